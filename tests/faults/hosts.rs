//! Two hosts that keep one folder: two processes here that take themselves for such, and do not see each other's locks.

use std::time::Duration;

use rustix::process::Signal;

use crate::support::{Daemon, Works, aim, command, identity, tiles};

/// Long enough for a busy machine to renew in time; another host takes over after three times as long.
const RENEWED_EVERY: &str = "1000";

fn keep_on(host: &str, works: &Works) -> Daemon {
    let mut keep = command(&["--json", "keep"]);
    Daemon::spawn(keep.arg(works.root()).env("_MILLREEVE_HOST", format!("{host}:{RENEWED_EVERY}")))
}

#[test]
fn g2_two_hosts_on_one_mount() {
    let works = Works::new(&[("m", &tiles(1))]);
    let mut first = keep_on("mill-1", &works);
    first.wait_current("m", aim(1));

    // One that comes while the other is alive says who has it, and ends.
    let mut second = keep_on("mill-2", &works);
    second.wait_log("may be kept by process");
    let ended = second.wait_end(Duration::from_secs(20)).unwrap();
    assert_eq!(ended.code(), Some(3), "{:#?}", second.log);
    let held = format!("already kept by process {} on host mill-1", first.pid().as_raw_nonzero());
    assert_eq!((second.logged(&held), second.objects.len()), (1, 0), "{:#?}", second.log);

    // One that comes while the other stands still waits, and takes over.
    first.signal(Signal::STOP);
    works.save("m", &tiles(2));
    let mut third = keep_on("mill-2", &works);
    third.wait_current("m", aim(2));
    assert_eq!(third.logged("may be kept by process"), 1, "{:#?}", third.log);
    assert_eq!(third.logged("the folder is kept again"), 1, "{:#?}", third.log);

    // The first finds that out by itself, and ends; only where it was stopped in the middle of a renewal is it the other. Should it look at the model before that, it finds the plan in place.
    works.save("m", &tiles(3));
    third.wait_current("m", aim(3));
    let plan = identity(&works.plan("m"));
    first.signal(Signal::CONT);
    let moment = Duration::from_millis(500);
    let ended = (0..40).find_map(|_| match (first.wait_end(moment), third.wait_end(moment)) {
        (Some(status), None) => Some((status, true)),
        (None, Some(status)) => Some((status, false)),
        _ => None,
    });
    let (status, is_first) = ended.unwrap();
    assert_eq!(status.code(), Some(3), "{:#?} {:#?}", first.log, third.log);
    assert_eq!(identity(&works.plan("m")), plan);

    // What ends well leaves nothing to wait for.
    if is_first {
        third.stop()
    } else {
        first.stop()
    }
    let mut fourth = keep_on("mill-3", &works);
    fourth.wait_current("m", aim(3));
    assert_eq!(fourth.logged("may be kept by process"), 0, "{:#?}", fourth.log);
    works.check();
}
