//! Which calls are meddled with, and what must hold each time.

use std::path::Path;
use std::sync::atomic::{AtomicUsize, Ordering};
use std::thread;

use crate::rng::Rng;
use crate::scenario::{Asked, Case, Done, Lost, SCENARIOS, Scenario};
use crate::tracer::{At, End, Fault};

/// A number from the environment, for a longer run or another one.
pub(crate) fn from_environment(name: &str, default: usize) -> usize {
    std::env::var(name).map_or(default, |text| text.parse().unwrap())
}

/// All scenarios, laid out and run once undisturbed.
fn cases(folder: &Path) -> Vec<Case> {
    SCENARIOS.iter().map(|&scenario| Case::new(scenario, folder)).collect()
}

/// A folder in memory where there is one: a kill loses nothing that was written, synced or not, so syncing would only cost time.
pub(crate) fn scratch() -> tempfile::TempDir {
    tempfile::tempdir_in("/dev/shm").or_else(|_| tempfile::tempdir()).unwrap()
}

/// Runs `test` for that many single calls, on all processors: all calls of all scenarios in an order that the seed decides, and again
/// from the first. `test` gets the scenario, the call, a source of chance of its own and the folder.
#[expect(clippy::print_stdout, reason = "how many of how many, shown by --nocapture")]
fn for_each_call(count: usize, test: impl Fn(&Case, usize, &mut Rng, &Path) + Sync) {
    let folder = scratch();
    let cases = cases(folder.path());
    let seed = u64::try_from(from_environment("MILLREEVE_SEED", 5)).unwrap();
    let mut all: Vec<_> = cases.iter().flat_map(|case| (1..=case.calls).map(move |call| (case, call))).collect();
    let mut rng = Rng::new(seed);
    for last in (1..all.len()).rev() {
        all.swap(last, rng.below(last + 1));
    }
    let mut points: Vec<_> = all.iter().cycle().take(count).enumerate().collect();
    // The daemon lets a model settle that has changed in the last two seconds: its folders are laid out first and come last.
    points.sort_by_key(|(_, (case, _))| case.scenario.asked == Asked::Keep);
    let own = |number: usize| folder.path().join(number.to_string());
    for (number, (case, _)) in points.iter().filter(|(_, (case, _))| case.scenario.asked == Asked::Keep) {
        case.copy(&own(*number));
    }
    on_all_processors(points.len(), |at| {
        let (number, &(case, call)) = points[at];
        let works = match case.scenario.asked {
            Asked::Once => case.copy(&own(number)),
            Asked::Keep => own(number).join("works"),
        };
        test(case, call, &mut Rng::new(seed ^ (number as u64) << 20), &works);
        std::fs::remove_dir_all(own(number)).unwrap();
    });
    println!("{count} points in {} calls of {} scenarios, seed {seed}", all.len(), cases.len());
}

/// Does something for each number below `count`, on all processors.
pub(crate) fn on_all_processors(count: usize, work: impl Fn(usize) + Sync) {
    let next = AtomicUsize::new(0);
    let work = || {
        while let Some(number) = Some(next.fetch_add(1, Ordering::Relaxed)).filter(|&number| number < count) {
            work(number);
        }
    };
    thread::scope(|scope| {
        for _ in 0..thread::available_parallelism().map_or(2, usize::from) {
            scope.spawn(work);
        }
    });
}

#[test]
fn killed_before_any_call() {
    let kills = from_environment("MILLREEVE_KILL_POINTS", 500);
    for_each_call(kills, |case, call, rng, works| {
        let mut context = format!("{:?}", case.scenario);
        let mut call = call;
        loop {
            let run = case.run(works, Some(At { fault: Fault::Kill, call }));
            context.push_str(&format!(", killed before {:?}", run.struck));
            match run.end {
                End::Signal(nix::sys::signal::Signal::SIGKILL) if run.struck.len() == 1 => {}
                // Another order of its threads, or a recovery shorter than that: there was no such call.
                End::Exit(_) if run.struck.is_empty() => break,
                _ => panic!("{context}: {run:?}"),
            }
            case.check_at_once(works, Lost::Nothing, &context);
            if rng.below(2) == 0 {
                break;
            }
            call = 1 + rng.below(case.calls);
        }
        case.check_convergence(works, Lost::Nothing, &context);
    });
}

#[test]
fn any_call_fails_once_or_from_then_on() {
    let failures = from_environment("MILLREEVE_KILL_POINTS", 500);
    for_each_call(failures, |case, call, rng, works| {
        let pick = rng.below(12);
        // What fails for good keeps the daemon trying for good.
        let faults = match case.scenario.asked {
            Asked::Once => &[Fault::Once(pick), Fault::Always(pick), Fault::Full][..],
            Asked::Keep => &[Fault::Once(pick)][..],
        };
        fails(case, *rng.pick(faults), call, works);
    });
}

/// What was once found wrong there must not come back: a model that could not be looked at was passed over, the plan of a model that
/// was gone not marked, and either was told as success.
#[test]
fn every_call_of_a_pass_fails_once() {
    let folder = scratch();
    for done in [Done::Nothing, Done::Removed] {
        let case = Case::new(Scenario { done, asked: Asked::Once }, folder.path());
        for call in 1..=case.calls {
            let own = folder.path().join(call.to_string());
            fails(&case, Fault::Once(0), call, &case.copy(&own));
            std::fs::remove_dir_all(own).unwrap();
        }
    }
}

/// A call fails: the program says so or does without, leaves nothing torn, and the next pass mends all.
fn fails(case: &Case, fault: Fault, call: usize, works: &Path) {
    let run = case.run(works, Some(At { fault, call }));
    let context = format!("{:?}, {fault:?}: {:?}, {:?} {}", case.scenario, run.struck, run.end, run.said);
    let End::Exit(status) = run.end else { panic!("{context}") };
    let settings = run.said.contains(".millreeve.toml: cannot be read");
    assert!([0, 1, 3].contains(&status) || settings && status == 2, "{context}");
    assert!(!run.said.contains("panicked"), "{context}");
    let about = |part: &str| run.struck.iter().any(|call| call.contains(part));
    let lost = match (about(".release.toml"), about("/.millreeve/")) {
        (true, _) => Lost::Release,
        (_, true) => Lost::Records,
        _ => Lost::Nothing,
    };
    case.check_at_once(works, lost, &context);
    if status == 0 && case.scenario.asked == Asked::Once {
        case.check_current(works, &context);
    }
    case.check_convergence(works, lost, &context);
}
