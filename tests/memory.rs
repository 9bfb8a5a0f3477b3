//! A session takes no more memory after hundreds of edits than after the first hundred: in a process of its own, as it measures that.

#![cfg(target_os = "linux")]
#![expect(clippy::unwrap_used, reason = "a test that cannot read fails")]

#[path = "support/instances.rs"]
mod instances;
#[path = "support/program_edit.rs"]
mod program_edit;
#[path = "support/rng.rs"]
mod rng;

use std::fs;
use std::time::Duration;

use instances::netlib;
use millreeve::lp::{Program, build, mps};
use millreeve::solver::session::Session;
use millreeve::solver::stop::Stop;
use program_edit::EDITS;
use rng::Rng;

/// Edits in each part of the chain, each made and taken back again.
const EDITS_A_PART: usize = 15;

/// What the allocator may keep for itself between parts, in pages of 4 KiB; it was seen to go up and down by 1,100. An instance left behind
/// at every edit would take thirty times as many.
const PLAY: usize = 2048;

/// Pages of this process in memory.
fn resident() -> usize {
    let pages = fs::read_to_string("/proc/self/statm").unwrap();
    pages.split(' ').nth(1).unwrap().parse().unwrap()
}

fn there_and_back(session: &mut Session, program: &Program, rng: &mut Rng) {
    for _ in 0..EDITS_A_PART {
        let (_, edit) = *rng.pick(&EDITS);
        for step in [edit(rng, program), program.clone()] {
            session.solve(step, Duration::from_secs(60), &Stop::default());
        }
    }
}

#[test]
fn edits_leave_nothing_behind() {
    let program = build(&mps::read(&fs::read_to_string(netlib("25fv47")).unwrap()).unwrap().model);
    let mut session = Session::default();
    let mut rng = Rng::new(7);
    // The first parts bring the solver's and the allocator's own stores to the size that they keep.
    for _ in 0..2 {
        there_and_back(&mut session, &program, &mut rng);
    }
    let entries = session.live_entries();
    let before = resident();
    let parts: Vec<usize> = (0..4)
        .map(|_| {
            there_and_back(&mut session, &program, &mut rng);
            resident()
        })
        .collect();
    assert_eq!(session.live_entries(), entries, "the program that is held is the one there was");
    let most = before + PLAY;
    assert!(parts.iter().all(|&pages| pages <= most), "pages of 4 KiB: {before} after the first parts, then {parts:?}");
}
