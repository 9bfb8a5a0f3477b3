//! A folder of 5,000 models: a start over current plans, rest, a checkout that changes 500 of them, and the memory it takes.
//!
//! `cargo bench --bench folder` prints the table; a number after `--` sets how many models there are.

#![expect(
    clippy::unwrap_used,
    clippy::panic,
    clippy::print_stdout,
    clippy::disallowed_methods,
    reason = "a measurement that prints its table or fails, and looks on while nothing happens"
)]

#[expect(dead_code, reason = "shared with a test of fewer models")]
#[path = "../../support/crowd.rs"]
mod crowd;

use std::fs;
use std::time::{Duration, Instant};

use crowd::{Crowd, Keeper};

/// Every so many-th model is changed by the checkout.
const EVERY: usize = 10;
/// Starts, of which the median is told.
const STARTS: usize = 5;
/// How long rest is looked at.
const REST: Duration = Duration::from_secs(20);

fn main() {
    let models = std::env::args().skip(1).find_map(|word| word.parse().ok()).unwrap_or(5_000);
    let crowd = Crowd::new(models, EVERY);
    let first = timed(|| crowd.plan());
    // A start takes what has changed in the last two seconds for unsettled.
    std::thread::sleep(Duration::from_secs(3));
    println!("| {models} models | |\n| --- | ---: |");
    row("first plans, all of them", format_args!("{:.1} s", first.as_secs_f64()));

    let mut starts: Vec<_> = (0..STARTS).map(|_| start(&crowd).1).collect();
    starts.sort();
    row(
        "start over current plans, until each has been told of",
        format_args!("{:.2} s", starts[STARTS / 2].as_secs_f64()),
    );
    let (mut keeper, _) = start(&crowd);
    row("solves in it", format_args!("{}", keeper.solves()));
    row("memory after it", format_args!("{:.0} MiB", memory(&keeper, "VmRSS:")));

    let before = processor(&keeper);
    std::thread::sleep(REST);
    let share = (processor(&keeper) - before) / REST.as_secs_f64();
    row("at rest, share of one core", format_args!("{:.2} %", 100.0 * share));

    let changed = models.div_ceil(EVERY);
    keeper.told.clear();
    let took = timed(|| {
        crowd.switch("second");
        keeper.wait("each changed model", |told| told.len() == changed);
    });
    row("checkout that changes a tenth, until all is planned", format_args!("{:.2} s", took.as_secs_f64()));
    crowd.save_mark();
    keeper.wait("the mark", |told| told.contains_key("mark.model.toml"));
    keeper.told.remove("mark.model.toml");
    let plans: usize = keeper.told.values().map(Vec::len).sum();
    row("plans made by it", format_args!("{plans} for {changed} changed models"));
    row("memory after it", format_args!("{:.0} MiB", memory(&keeper, "VmRSS:")));
    row("most memory", format_args!("{:.0} MiB", memory(&keeper, "VmHWM:")));
}

fn row(what: &str, value: std::fmt::Arguments<'_>) {
    println!("| {what} | {value} |");
}

fn timed(work: impl FnOnce()) -> Duration {
    let begun = Instant::now();
    work();
    begun.elapsed()
}

/// A daemon that has just told of all models, and how long it took to.
fn start(crowd: &Crowd) -> (Keeper, Duration) {
    let begun = Instant::now();
    let mut keeper = Keeper::start(&crowd.root());
    keeper.wait("a word of each", |told| told.len() == crowd.models.len());
    (keeper, begun.elapsed())
}

/// A line of `/proc/…/status`, in MiB.
fn memory(keeper: &Keeper, line: &str) -> f64 {
    let status = fs::read_to_string(keeper.proc().join("status")).unwrap();
    let found = status.lines().find_map(|text| text.strip_prefix(line)).unwrap();
    found.trim().trim_end_matches(" kB").parse::<f64>().unwrap() / 1024.0
}

/// The processor time used so far, in seconds: user and system, fields 14 and 15 of proc_pid_stat(5), in hundredths.
fn processor(keeper: &Keeper) -> f64 {
    let stat = fs::read_to_string(keeper.proc().join("stat")).unwrap();
    let fields: Vec<_> = stat.rsplit(") ").next().unwrap().split(' ').collect();
    (fields[11].parse::<f64>().unwrap() + fields[12].parse::<f64>().unwrap()) / 100.0
}
