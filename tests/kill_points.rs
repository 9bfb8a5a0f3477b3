//! The real program, killed before any of its system calls, and with any of them failing: nothing torn, and the next pass mends all.
//!
//! `MILLREEVE_KILL_POINTS` says how many kills there are, and how many failing calls (500 of each without it); `MILLREEVE_SEED` which
//! ones. Points are taken in turn from a list of all single calls of all scenarios, shuffled by the seed; every second kill is followed
//! by another one somewhere in the recovery from it, and so on with even chances.

#![cfg_attr(
    all(target_os = "linux", target_arch = "x86_64"),
    expect(clippy::unwrap_used, clippy::expect_used, clippy::panic, reason = "a test that cannot go on has failed")
)]

#[cfg(all(target_os = "linux", target_arch = "x86_64"))]
#[path = "kill_points/calls.rs"]
mod calls;
#[cfg(all(target_os = "linux", target_arch = "x86_64"))]
#[path = "kill_points/disk.rs"]
mod disk;
#[cfg(all(target_os = "linux", target_arch = "x86_64"))]
#[path = "kill_points/points.rs"]
mod points;
#[cfg(all(target_os = "linux", target_arch = "x86_64"))]
#[path = "kill_points/power.rs"]
mod power;
#[cfg(all(target_os = "linux", target_arch = "x86_64"))]
#[path = "kill_points/recorder.rs"]
mod recorder;
#[cfg(all(target_os = "linux", target_arch = "x86_64"))]
#[expect(dead_code, reason = "other tests draw more kinds of numbers")]
#[path = "support/rng.rs"]
mod rng;
#[cfg(all(target_os = "linux", target_arch = "x86_64"))]
#[path = "kill_points/scenario.rs"]
mod scenario;
#[cfg(all(target_os = "linux", target_arch = "x86_64"))]
#[path = "kill_points/tracer.rs"]
mod tracer;

#[cfg(not(all(target_os = "linux", target_arch = "x86_64")))]
#[test]
#[ignore = "calls are told apart by their numbers on Linux for x86-64, and this is another system"]
fn kill_points_and_failing_calls() {}
