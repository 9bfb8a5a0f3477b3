//! Reading models: what a good one becomes, and what is said about a bad one.

#![expect(clippy::unwrap_used, reason = "helpers of tests stop at what they did not expect")]

#[path = "reading/again.rs"]
mod again;
#[path = "reading/faults.rs"]
mod faults;
#[path = "reading/faults_over_weeks.rs"]
mod faults_over_weeks;
#[path = "reading/files.rs"]
mod files;
#[path = "reading/good.rs"]
mod good;
#[path = "reading/hostile.rs"]
mod hostile;
#[path = "reading/laws.rs"]
mod laws;
#[path = "reading/models.rs"]
mod models;
#[path = "reading/odd.rs"]
mod odd;

use std::path::Path;

use millreeve::model::Faults;
use millreeve::model::read::{self, Reading};

/// A small tileworks that has nothing wrong with it.
const TILEWORKS: &str = include_str!("reading/tileworks.model.toml");

/// The same works over three weeks, with materials, stock and overtime.
const WEEKS: &str = include_str!("reading/weeks.model.toml");

fn read(bytes: &[u8]) -> Result<Reading, Faults> {
    read::text(Path::new("works.model.toml"), bytes)
}

/// The reading of a text in which nothing is wrong.
#[expect(clippy::panic, reason = "a test's helper")]
fn good(text: &str) -> Reading {
    read(text.as_bytes()).unwrap_or_else(|faults| panic!("{}", faults.terminal(false)))
}

/// The faults of bytes in which something is wrong.
#[expect(clippy::panic, reason = "a test's helper")]
fn bad(bytes: &[u8]) -> Faults {
    match read(bytes) {
        Ok(reading) => panic!("read without a fault: {:?}", reading.model),
        Err(faults) => faults,
    }
}

/// The tileworks with one part replaced by another.
fn edited(from: &str, to: &str) -> String {
    assert!(TILEWORKS.contains(from), "the tileworks has no {from:?}");
    TILEWORKS.replacen(from, to, 1)
}

/// The works over three weeks with one part replaced by another.
fn edited_weeks(from: &str, to: &str) -> String {
    assert!(WEEKS.contains(from), "the works has no {from:?}");
    WEEKS.replacen(from, to, 1)
}
