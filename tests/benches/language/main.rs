//! Large works in parts: what a first plan and a replan after one edited part take, step by step; and what a rolled horizon takes.
//!
//! `cargo bench --bench language` prints the tables. A word after `--` picks one: `20000x1`, `200x52` or `rolls`. Quote the ratios.

#![expect(
    clippy::unwrap_used,
    clippy::expect_used,
    clippy::print_stdout,
    clippy::disallowed_methods,
    clippy::cast_precision_loss,
    reason = "a measurement that saves models as people do, and prints its table or fails"
)]

mod rolls;
mod steps;
mod works;

use works::Works;

/// Tiles and weeks.
const SIZES: [(usize, usize); 2] = [(20_000, 1), (200, 52)];

fn main() {
    let words: Vec<String> = std::env::args().skip(1).filter(|word| !word.starts_with('-')).collect();
    let asked = |word: &str| words.is_empty() || words.iter().any(|other| other == word);
    for (tiles, weeks) in SIZES {
        let name = format!("{tiles}x{weeks}");
        if asked(&name) {
            println!("{name}");
            steps::tell(&Works::new(tiles, weeks));
        }
    }
    if asked("rolls") {
        rolls::tell();
    }
}
