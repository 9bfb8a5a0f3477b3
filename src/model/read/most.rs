//! How large a model may be. Each cap is far above what planning is meant for, and keeps a hostile file from taking the machine.

/// The largest file, in bytes.
pub const MOST_BYTES: usize = 16 * 1024 * 1024;
/// The most parts of a model.
pub const MOST_PARTS: usize = 1000;
/// The most lines in a file.
pub const MOST_LINES: usize = 500_000;
/// The most words and signs in a file: what the parser takes memory for, some 100 bytes each.
pub const MOST_TOKENS: usize = 6_000_000;
/// The most activities in a model.
pub const MOST_ACTIVITIES: usize = 25_000;
/// The most resources in a model.
pub const MOST_RESOURCES: usize = 25_000;
/// The most materials in a model.
pub const MOST_MATERIALS: usize = 25_000;
/// The most limits in a model.
pub const MOST_LIMITS: usize = 25_000;
/// The most periods in a model.
pub const MOST_PERIODS: usize = 1_000;
/// The most columns of the program behind a model: levels, tiers and stocks in every period.
pub const MOST_COLUMNS: usize = 250_000;
/// The most rows of the program behind a model: resources, balances and limits in every period.
pub const MOST_ROWS: usize = 250_000;
/// The most coefficients of the program behind a model, every tag counted as the activities that carry it, in every period.
pub const MOST_COEFFICIENTS: usize = 2_000_000;
/// The most numbers of a model that are listed by period: a table such as `{ each = 1, "2027-W01" = 2 }` lists as many as there are periods.
pub const MOST_LISTED: usize = 4_000_000;
