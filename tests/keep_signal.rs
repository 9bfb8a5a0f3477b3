//! The daemon ends on a signal. Alone in its process, for the signal goes to all of it.

use std::fs;
use std::sync::{Arc, mpsc};
use std::time::Duration;

use millreeve::keep::{Factory, Job, Operating, Planner, Replanned, Settings, Stop, keep};

/// Solves for ever, until it is told to stop.
struct Endless(mpsc::Sender<()>);

impl Planner for Endless {
    fn replan(&mut self, _: &Job, stop: &Stop) -> Replanned {
        let _ = self.0.send(());
        while !stop.is_raised() {
            std::thread::yield_now();
        }
        Replanned::Interrupted
    }
}

#[test]
fn a_signal_in_mid_solve_ends_the_daemon() {
    let folder = tempfile::tempdir().unwrap();
    for file in ["a.model.toml", "b.model.toml", "c.model.toml"] {
        fs::File::create(folder.path().join(file)).unwrap();
    }
    let (began, begins) = mpsc::channel();
    let root = folder.path().to_owned();
    let daemon = std::thread::spawn(move || {
        let factory: Factory = Arc::new(move || Box::new(Endless(began.clone())));
        keep(&root, &Settings::default(), factory, Operating::default(), |_, _| {})
    });
    begins.recv_timeout(Duration::from_secs(60)).unwrap();
    let own = rustix::process::getpid();
    rustix::process::kill_process(own, rustix::process::Signal::TERM).unwrap();
    daemon.join().unwrap().unwrap();
    assert!(!folder.path().join("a.plan.toml").exists());
}
