//! The dispatcher under made-up time: what it does about each event.

#[path = "daemon_tests/bench.rs"]
mod bench;

use std::path::PathBuf;

use bench::Bench;

use super::*;
use crate::keep::report::Report;

const SECOND: Duration = Duration::from_secs(1);
const MILLISECOND: Duration = Duration::from_millis(1);

fn done() -> Replanned {
    Replanned::Done(Box::new(Report { standing: "current".into(), ..Report::default() }))
}

fn replan(name: &str) -> (String, What) {
    (name.to_owned(), What::Replan)
}

#[test]
fn a_closed_model_is_read_at_once_and_not_again_until_it_changes() {
    let mut bench = Bench::new(2);
    bench.write("a.model.toml", "1");
    bench.hint(Hint::Closed, "a");
    assert_eq!(bench.in_hand(), [replan("a")]);
    bench.end(done());
    bench.pass(60 * SECOND);
    assert_eq!(bench.in_hand(), []);
    bench.write("a.model.toml", "22");
    bench.pass(5 * SECOND);
    assert_eq!(bench.in_hand(), [replan("a")]);
}

#[test]
fn a_half_written_model_is_not_read() {
    let mut bench = Bench::new(2);
    bench.write("a.model.toml", "1");
    bench.hint(Hint::Writing, "a");
    bench.pass(9 * SECOND);
    assert_eq!(bench.in_hand(), []);
    bench.hint(Hint::Closed, "a");
    assert_eq!(bench.in_hand(), [replan("a")]);
    bench.end(done());
    bench.hint(Hint::Writing, "a");
    bench.pass(11 * SECOND);
    let told = |bench: &Bench, what| bench.said.iter().filter(|text| text.contains(what)).count();
    assert_eq!(told(&bench, "a.model.toml: still open for writing, since 10 s ago; its last plan stays"), 1);
    bench.pass(588 * SECOND);
    assert_eq!((bench.in_hand(), told(&bench, "still open for writing")), (vec![], 1), "{:?}", bench.said);
    bench.pass(2 * SECOND);
    assert_eq!(told(&bench, "so it is read as it is"), 1, "{:?}", bench.said);
    assert_eq!(bench.in_hand(), [replan("a")]);
}

#[test]
fn without_events_the_scan_finds_every_edit() {
    let mut bench = Bench::new(2);
    bench.write("a.model.toml", "1");
    bench.pass(SECOND);
    assert_eq!(bench.in_hand(), []);
    bench.pass(5 * SECOND);
    assert_eq!(bench.in_hand(), [replan("a")]);
    // The same edit interrupts nothing, a further one does.
    bench.pass(20 * SECOND);
    assert_eq!(bench.interrupted, []);
    bench.write("a.model.toml", "22");
    bench.pass(5 * SECOND);
    assert_eq!(bench.interrupted, [Worker(0)]);
    bench.end(Replanned::Interrupted);
    assert_eq!(bench.in_hand(), [replan("a")]);
}

#[test]
fn word_of_what_a_scan_found_already_interrupts_nothing() {
    let mut bench = Bench::new(2);
    bench.write("a.model.toml", "1");
    bench.pass(6 * SECOND);
    assert_eq!(bench.in_hand(), [replan("a")]);
    let arrived = |path: PathBuf| {
        let stamp = Stamp::of(&path);
        Hint::Arrived(path, stamp)
    };
    bench.hint(arrived, "a");
    assert_eq!((&bench.interrupted[..], bench.in_hand()), (&[][..], vec![replan("a")]));
    // Another one moved there since is news.
    bench.write("new", "2");
    std::fs::rename(bench.folder.path().join("new"), bench.model("a").full()).unwrap();
    bench.hint(arrived, "a");
    assert_eq!(bench.interrupted, [Worker(0)]);
    bench.end(Replanned::Interrupted);
    assert_eq!(bench.in_hand(), [replan("a")]);
}

#[test]
fn a_removed_plan_brings_its_model_back_into_hand() {
    let mut bench = Bench::new(2);
    bench.write("a.model.toml", "1");
    bench.write("a.plan.toml", "plan");
    bench.hint(Hint::Closed, "a");
    bench.end(done());
    bench.pass(10 * SECOND);
    assert_eq!(bench.in_hand(), []);
    bench.remove("a.plan.toml");
    bench.pass(5 * SECOND);
    assert_eq!(bench.in_hand(), [replan("a")]);
}

#[test]
fn a_removed_model_is_retired_after_its_grace_and_once() {
    let mut bench = Bench::new(2);
    for file in ["a.model.toml", "a.plan.toml", "b.model.toml"] {
        bench.write(file, "1");
    }
    for name in ["a", "b"] {
        bench.hint(Hint::Closed, name);
        bench.end(done());
    }
    bench.remove("a.model.toml");
    bench.hint(Hint::Gone, "a");
    bench.pass(1900 * MILLISECOND);
    assert_eq!(bench.in_hand(), []);
    bench.pass(SECOND);
    assert_eq!(bench.in_hand(), [("a".to_owned(), What::Retire)]);
    bench.end(done());
    bench.pass(30 * SECOND);
    assert_eq!(bench.in_hand(), []);
}

#[test]
fn an_editors_dance_retires_nothing() {
    let mut bench = Bench::new(2);
    bench.write("a.model.toml", "1");
    bench.write("a.plan.toml", "plan");
    bench.hint(Hint::Closed, "a");
    bench.end(done());
    bench.remove("a.model.toml");
    bench.hint(Hint::Gone, "a");
    bench.pass(MILLISECOND);
    bench.write("a.model.toml", "22");
    bench.hint(Hint::Writing, "a");
    bench.hint(Hint::Closed, "a");
    assert_eq!(bench.in_hand(), [replan("a")]);
    bench.end(done());
    bench.pass(30 * SECOND);
    assert_eq!(bench.in_hand(), []);
}

#[test]
fn an_emptied_folder_is_not_a_deletion_of_every_model() {
    let mut bench = Bench::new(2);
    for name in ["a", "b"] {
        bench.write(&format!("{name}.model.toml"), "1");
        bench.write(&format!("{name}.plan.toml"), "plan");
        bench.hint(Hint::Closed, name);
    }
    bench.end(done());
    bench.end(done());
    let aside = tempfile::tempdir().unwrap();
    let files = ["a.model.toml", "a.plan.toml", "b.model.toml", "b.plan.toml"];
    let swap =
        |from: &Path, to: &Path| files.iter().for_each(|file| std::fs::rename(from.join(file), to.join(file)).unwrap());
    swap(bench.folder.path(), aside.path());
    bench.pass(60 * SECOND);
    assert_eq!(bench.in_hand(), []);
    assert_eq!(bench.said.iter().filter(|text| text.contains("unmounted")).count(), 1);
    swap(aside.path(), bench.folder.path());
    bench.pass(60 * SECOND);
    // A rename moves the change time, so each is looked at; none was retired.
    assert_eq!(bench.in_hand(), [replan("a"), replan("b")]);
}

#[test]
fn a_vanished_folder_is_held_and_claimed_again_when_another_takes_its_place() {
    let mut bench = Bench::new(2);
    let root = bench.folder.path().to_owned();
    let away = root.with_extension("away");
    bench.pass(SECOND);
    std::fs::rename(&root, &away).unwrap();
    bench.pass(10 * SECOND);
    assert_eq!((bench.claims, bench.said.len()), (0, 1), "{:?}", bench.said);
    std::fs::create_dir(&root).unwrap();
    bench.pass(3 * SECOND);
    let claims = bench.claims;
    assert_eq!((claims, bench.said.len()), (1, 2), "{:?}", bench.said);
    bench.write("a.model.toml", "1");
    bench.pass(10 * SECOND);
    assert_eq!((bench.claims, bench.in_hand()), (claims, vec![replan("a")]));
    std::fs::remove_dir_all(away).unwrap();
}

#[test]
fn lost_events_make_everything_be_looked_at_again() {
    let mut bench = Bench::new(2);
    bench.write("a.model.toml", "1");
    bench.hint(Hint::Writing, "a");
    // Its close was among what was lost.
    bench.event(Event::Hint(Hint::Rescan));
    bench.pass(5 * SECOND);
    assert_eq!(bench.in_hand(), [replan("a")]);
}

#[test]
fn saves_in_a_burst_make_one_run_and_one_waiting() {
    let mut bench = Bench::new(2);
    for save in 0..30 {
        bench.write("a.model.toml", &save.to_string());
        bench.hint(Hint::Closed, "a");
    }
    assert_eq!((bench.in_hand(), bench.interrupted.len()), (vec![replan("a")], 1));
    bench.end(Replanned::Interrupted);
    assert_eq!(bench.in_hand(), [replan("a")]);
    bench.end(done());
    bench.pass(30 * SECOND);
    assert_eq!(bench.in_hand(), []);
}

#[test]
fn a_full_disk_is_tried_again_with_growing_pauses_and_told_once() {
    let mut bench = Bench::new(2);
    bench.write("a.model.toml", "1");
    bench.hint(Hint::Closed, "a");
    let full = || Replanned::Failed { message: "the disk is full".into(), retry: true };
    for pause in [1, 2, 4, 8] {
        bench.end(full());
        bench.pass(pause * SECOND - MILLISECOND);
        assert_eq!(bench.in_hand(), [], "before {pause} s");
        bench.pass(MILLISECOND);
        assert_eq!(bench.in_hand(), [replan("a")], "after {pause} s");
    }
    assert_eq!(bench.said, ["a.model.toml: the disk is full"]);
    bench.end(done());
    bench.pass(100 * SECOND);
    assert_eq!(bench.in_hand(), []);
}

#[test]
fn what_can_only_be_mended_by_an_edit_waits_for_one() {
    let mut bench = Bench::new(2);
    bench.write("a.model.toml", "1");
    bench.hint(Hint::Closed, "a");
    bench.end(Replanned::Failed { message: "it panicked".into(), retry: false });
    bench.pass(200 * SECOND);
    assert_eq!(bench.in_hand(), []);
    bench.write("a.model.toml", "22");
    bench.hint(Hint::Closed, "a");
    assert_eq!(bench.in_hand(), [replan("a")]);
}

#[test]
fn the_end_interrupts_what_runs_and_waits_for_it_two_seconds_at_most() {
    let mut bench = Bench::new(1);
    bench.write("a.model.toml", "1");
    bench.write("b.model.toml", "1");
    bench.hint(Hint::Closed, "a");
    bench.hint(Hint::Closed, "b");
    bench.event(Event::Stop);
    assert_eq!((&bench.interrupted[..], bench.ended), (&[Worker(0)][..], false));
    bench.end(Replanned::Interrupted);
    assert!(bench.ended && bench.jobs.is_empty());

    let mut stuck = Bench::new(1);
    stuck.write("a.model.toml", "1");
    stuck.hint(Hint::Closed, "a");
    stuck.event(Event::Stop);
    stuck.pass(SECOND);
    assert!(!stuck.ended);
    stuck.now += SECOND;
    stuck.event(Event::Tick);
    assert!(stuck.ended);
}

#[test]
fn scans_give_way_to_work_while_much_is_waiting() {
    let mut bench = Bench::new(1);
    for number in 0..50 {
        bench.write(&format!("m{number}.model.toml"), "1");
    }
    bench.pass(5 * SECOND);
    assert_eq!(bench.in_hand().len(), 1);
    // 49 wait. Looks come a whole interval apart, not at once.
    bench.scans.clear();
    bench.pass(20 * SECOND);
    let scans = &bench.scans;
    assert!(scans.len() > 5 && scans.windows(2).all(|pair| pair[1] - pair[0] >= 2 * SECOND), "{scans:?}");
}

#[test]
fn long_scans_come_seldom_and_more_so_where_events_tell_of_edits() {
    let mut bench = Bench::new(1);
    bench.scan_takes = 200 * MILLISECOND;
    let pause = |bench: &mut Bench| {
        bench.pass(100 * SECOND);
        let scans = bench.scans.len();
        bench.scans[scans - 1] - bench.scans[scans - 2]
    };
    assert_eq!(pause(&mut bench), 151 * bench.scan_takes);
    bench.event(Event::Followed(Followed { added: 0, watching: Watching::Asked }));
    assert_eq!(pause(&mut bench), 21 * bench.scan_takes);
}

#[test]
fn odd_files_are_mentioned_once_and_never_read() {
    let mut bench = Bench::new(1);
    std::os::unix::fs::symlink("/etc/hostname", bench.folder.path().join("l.model.toml")).unwrap();
    std::fs::create_dir(bench.folder.path().join("d.model.toml")).unwrap();
    bench.write("l.plan.toml", "plan");
    bench.write(".millreeve-aB3dEf7h.tmp", "half");
    bench.pass(60 * SECOND);
    assert_eq!(bench.in_hand(), []);
    assert_eq!(bench.said.len(), 2, "{:?}", bench.said);
    assert_eq!(bench.swept.len(), 1);
}

#[test]
fn a_bare_mount_point_is_not_claimed_and_what_comes_back_is() {
    let mut bench = Bench::new(2);
    let root = bench.folder.path().to_owned();
    let away = root.with_extension("away");
    bench.write("a.model.toml", "1");
    bench.hint(Hint::Closed, "a");
    bench.end(done());
    std::fs::rename(&root, &away).unwrap();
    std::fs::create_dir(&root).unwrap();
    bench.pass(60 * SECOND);
    let told = |bench: &Bench, words| bench.said.iter().filter(|text| text.contains(words)).count();
    assert_eq!((bench.claims, told(&bench, "unmounted"), bench.in_hand()), (0, 1, vec![]), "{:?}", bench.said);
    std::fs::remove_dir(&root).unwrap();
    std::fs::rename(&away, &root).unwrap();
    bench.pass(10 * SECOND);
    assert_eq!((bench.claims, told(&bench, "is back"), bench.in_hand()), (1, 1, vec![]), "{:?}", bench.said);
}

#[test]
fn nothing_is_planned_in_a_folder_that_is_not_ours() {
    let mut bench = Bench::new(2);
    bench.dispatcher.claimed = None;
    bench.write("a.model.toml", "1");
    bench.hint(Hint::Closed, "a");
    assert_eq!(bench.in_hand(), []);
    bench.event(Event::Unclaimed("no room".into()));
    bench.event(Event::Unclaimed("no room".into()));
    assert_eq!(bench.said, ["no room"]);
    bench.claim();
    assert_eq!((bench.in_hand(), bench.said.len()), (vec![replan("a")], 2));
}

#[test]
fn folders_that_come_to_be_watched_are_looked_at_again() {
    let mut bench = Bench::new(2);
    std::fs::create_dir(bench.folder.path().join("sub")).unwrap();
    bench.pass(SECOND);
    assert_eq!(bench.folders, ["", "sub"].map(PathBuf::from).into());
    let scans = bench.scans.len();
    bench.event(Event::Followed(Followed { added: 1, watching: Watching::Events }));
    bench.pass(100 * MILLISECOND);
    assert_eq!((bench.scans.len(), bench.said.len()), (scans + 1, 0));
}

#[test]
fn a_want_of_watches_is_told_once_however_many_folders_it_costs() {
    let mut bench = Bench::new(2);
    for missing in 1..1500 {
        let watching = Watching::Partly { missing, of: 2000, why: "no more watches".into() };
        bench.event(Event::Followed(Followed { added: 0, watching }));
    }
    assert_eq!(bench.said.len(), 1, "{:?}", bench.said);
    assert!(bench.said[0].starts_with("1 of 2000 folders send no file events: no more watches"), "{:?}", bench.said);
    bench.pass(2 * SECOND);
    assert!(bench.statuses.last().unwrap().watching.words.starts_with("1499 of 2000"));
    bench.event(Event::Followed(Followed { added: 1499, watching: Watching::Events }));
    assert_eq!(bench.said.len(), 2);
}

#[test]
fn a_status_tells_what_runs_and_what_is_amiss() {
    let mut bench = Bench::new(1);
    for name in ["a", "b"] {
        bench.write(&format!("{name}.model.toml"), "1");
        bench.hint(Hint::Closed, name);
    }
    bench.pass(6 * SECOND);
    let status = bench.statuses.last().unwrap();
    assert_eq!((status.waiting, &status.running[0].path[..], status.models.len()), (1, "a.model.toml", 0));
    assert!(status.running[0].seconds >= 5, "{status:?}");
    bench.end(Replanned::Failed { message: "the disk is full".into(), retry: false });
    bench.end(done());
    bench.pass(2 * SECOND);
    let status = bench.statuses.last().unwrap();
    assert_eq!(status.models, [("current".to_owned(), 1), ("failed".to_owned(), 1)].into());
    assert_eq!((&status.amiss[0].why[..], status.running.len(), status.waiting), ("the disk is full", 0, 0));
    let written = bench.statuses.len();
    bench.pass(60 * SECOND);
    assert_eq!(bench.statuses.len(), written, "nothing has happened");
}

#[test]
fn d8_a_first_scan_plans_first_what_was_touched_last_and_the_status_tells_how_far_it_is() {
    let mut bench = Bench::new(1);
    let mut last = 0;
    for name in ["b", "c", "a"] {
        // Until the clock of the file system has moved on.
        while Stamp::of(&bench.model(name).full()).is_none_or(|stamp| stamp.changed() <= last) {
            bench.write(&format!("{name}.model.toml"), "1");
        }
        last = Stamp::of(&bench.model(name).full()).unwrap().changed();
    }
    bench.pass(5 * SECOND);
    let status = bench.statuses.last().unwrap();
    assert_eq!((status.waiting, status.running.len()), (2, 1));
    bench.pass(60 * SECOND);
    let status = bench.statuses.last().unwrap();
    assert_eq!((status.waiting, &status.running[0].path[..]), (2, "a.model.toml"));
    assert!(status.waiting_seconds >= 50 && status.running[0].seconds >= 50, "{status:?}");
    let order: Vec<_> = (0..3)
        .map(|_| {
            let name = bench.in_hand()[0].0.clone();
            bench.end(done());
            name
        })
        .collect();
    assert_eq!(order, ["a", "c", "b"]);
    bench.pass(10 * SECOND);
    let status = bench.statuses.last().unwrap();
    assert_eq!((status.waiting, status.waiting_seconds, status.running.len()), (0, 0, 0));
}
