//! Everything at once: people and programs that write, rename and delete, git, kills, lost state and full disks, drawn by a seed, over
//! the real daemon. When it stops, the folder becomes what a fresh start writes.
//!
//! `MILLREEVE_CHAOS` says how many operations there are (1,500 without it, a minute or so), `MILLREEVE_SEED` which ones.

#![expect(clippy::unwrap_used, clippy::panic, reason = "a test that cannot go on has failed")]

#[path = "chaos/driver.rs"]
mod driver;
#[expect(dead_code, reason = "drawing needs less than all kinds of numbers")]
#[path = "support/rng.rs"]
mod rng;
#[path = "chaos/settled.rs"]
mod settled;
#[expect(dead_code, reason = "shared with the tests of single faults")]
#[path = "faults/support.rs"]
mod support;

use driver::Driver;

fn from_environment(name: &str, default: u64) -> u64 {
    std::env::var(name).map_or(default, |text| text.parse().unwrap())
}

#[test]
fn the_folder_becomes_what_a_fresh_start_writes() {
    let mut driver = Driver::new(from_environment("MILLREEVE_SEED", 5));
    for _ in 0..from_environment("MILLREEVE_CHAOS", 1_500) {
        driver.operate();
    }
    let (works, daemon) = driver.rest();
    settled::wait(works, daemon);
}
