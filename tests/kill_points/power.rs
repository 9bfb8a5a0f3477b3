//! Power cuts: the changes that the program asks the disk for, cut off after each of them.

use std::path::Path;

use crate::disk::{Change, Cut, Disk};
use crate::points::{from_environment, on_all_processors, scratch};
use crate::rng::Rng;
use crate::scenario::{Case, Lost, SCENARIOS};

/// Power cuts by chance at each point, beside the two that are not.
const BY_CHANCE: usize = 3;

/// A scenario, and what was changed in it.
struct Recording {
    case: Case,
    disk: Disk,
    changes: Vec<Change>,
}

/// F3: whatever the cut leaves, plans are whole and old or new, no note is ahead of its plan, models are untouched, and the next pass
/// brings all to where it would have been. Records may be lost, or worse; then notes can only tell what the plans do.
#[test]
fn f3_the_power_is_cut_after_any_change() {
    let folder = scratch();
    let recordings: Vec<_> =
        SCENARIOS.iter().map(|&scenario| record(Case::new(scenario, folder.path()), folder.path())).collect();
    let cuts: Vec<_> = [Cut::AllLost, Cut::ContentLost].into_iter().chain([Cut::Chance; BY_CHANCE]).collect();
    let seed = u64::try_from(from_environment("MILLREEVE_SEED", 5)).unwrap();
    let mut rng = Rng::new(seed);
    let mut points: Vec<_> = recordings
        .iter()
        .flat_map(|recording| (0..=recording.changes.len()).map(move |count| (recording, count)))
        .flat_map(|(recording, count)| cuts.iter().map(move |&cut| (recording, count, cut)))
        .collect();
    for last in (1..points.len()).rev() {
        points.swap(last, rng.below(last + 1));
    }
    points.truncate(from_environment("MILLREEVE_KILL_POINTS", 500));
    on_all_processors(points.len(), |number| {
        let (recording, count, cut) = points[number];
        let own = folder.path().join(format!("cut-{number}"));
        check(recording, count, cut, &mut Rng::new(seed ^ (number as u64) << 20), &own.join("works"));
        std::fs::remove_dir_all(own).unwrap();
    });
}

fn record(case: Case, folder: &Path) -> Recording {
    let works = case.copy(&folder.join(format!("{:?}-recorded", case.scenario).replace(' ', "")));
    let disk = Disk::of(&works);
    let changes = case.record(&works);
    // Nothing was overlooked: where all changes are kept, the folder is as it is now.
    let mut end = disk.clone();
    changes.iter().for_each(|change| end.change(change));
    end.expect(&works);
    Recording { case, disk, changes }
}

fn check(recording: &Recording, count: usize, cut: Cut, rng: &mut Rng, works: &Path) {
    let mut disk = recording.disk.clone();
    recording.changes[..count].iter().for_each(|change| disk.change(change));
    disk.cut(cut, rng, works);
    let last = count.checked_sub(1).map(|last| recording.changes[last].what());
    let context = format!("{:?}, {cut:?} after change {count}, {last:?}", recording.case.scenario);
    recording.case.check_at_once(works, Lost::Records, &context);
    recording.case.check_convergence(works, Lost::Records, &context);
}
