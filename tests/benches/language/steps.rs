//! The steps from a saved part to a plan: each by itself, and all of them in a replan of the daemon's own.

use std::fs;
use std::path::Path;
use std::sync::Arc;
use std::time::{Duration, Instant};

use millreeve::edits::{Renames, compare_renamed};
use millreeve::keep::{Job, ModelPath, Planner, Replanned, Report, Settings, Stop, What, replan};
use millreeve::lp::{Difference, Program, build};
use millreeve::model::meaning::Meaning;
use millreeve::model::read::Writing;
use millreeve::plan::note::{self, EditTold, Verdict};
use millreeve::plan::{make, text};
use millreeve::solver::message::{Answer, Optimum, Outcome};
use millreeve::solver::session::Session;
use millreeve::solver::stop;

use crate::works::Works;

/// Edits that are measured; medians are told.
const EDITS: usize = 7;
const LIMIT: Duration = Duration::from_secs(600);

/// Prints what a works takes, first whole and then after edits of one price in one part.
pub(crate) fn tell(works: &Works) {
    let path = Path::new("tiles.model");
    let mut steps = Steps::default();
    let writing = writing(works);
    let (mut model, mut traced) = steps.taken("read", || writing.read_tracing(path).unwrap());
    let mut program = steps.taken("build", || build(&model));
    let meaning = steps.taken("meaning", || Meaning::of(&model));
    let mut session = Session::default();
    let mut optimum = solved(&mut steps, &mut session, &program);
    let mut plan = steps.taken("plan", || make(&model, meaning, &program, &optimum).unwrap());
    let written = steps.taken("text", || text::write(&plan));
    let shape = [program.columns.len(), program.rows.len(), program.entries(), writing.bytes().len(), written.len()];
    println!("  columns, rows, entries, bytes of the parts and of the plan: {shape:?}");
    steps.print("whole");
    let whole = steps.of("read");

    let mut bytes = writing.into_bytes();
    let mut all = Vec::new();
    for edit in 0..EDITS {
        let mut steps = Steps::default();
        let edited = self::writing(&raised(works, edit));
        let (is, now) =
            steps.taken("read", || edited.read_again(path, (&bytes, &traced, &model)).expect("an edit within a table"));
        let meaning = steps.taken("meaning", || Meaning::of(&is));
        let told = steps.taken("compare", || compare_renamed(&model, &is, &Renames::between(&model, &is)));
        let next = steps.taken("build", || build(&is));
        let difference = steps.taken("difference", || Difference::between(&program, &next));
        assert!(!difference.is_empty());
        optimum = solved(&mut steps, &mut session, &next);
        let made = steps.taken("plan", || make(&is, meaning, &next, &optimum).unwrap());
        let written = steps.taken("text", || text::write(&made));
        let edits: Vec<_> = told.iter().map(|edit| EditTold { edit, worth: None }).collect();
        steps.taken("note", || {
            note::write(&note::Report {
                title: None,
                file: "tiles.model",
                model: Some(&is),
                before: Some(&plan),
                edits: &edits,
                verdict: Verdict::Planned(&made),
                seal: text::seal(&written),
                release: None,
                reckoning: None,
            })
        });
        steps.taken("basis", || optimum.basis.named(&next));
        (model, traced, program, plan, bytes) = (is, now, next, made, edited.into_bytes());
        all.push(steps);
    }
    let medians = Steps::medians(&all);
    medians.print("after an edit of one price");
    println!("  read again / read whole: {:.3}", medians.of("read") / whole);
    drop((model, traced, program, plan, session, optimum));
    daemon(works);
}

/// The same by the daemon's own replan, with files, record and live solver.
fn daemon(works: &Works) {
    let folder = tempfile::tempdir().unwrap();
    let root: Arc<Path> = Arc::from(folder.path());
    let path = ModelPath::new(&root, Path::new("tiles.model")).unwrap();
    fs::create_dir_all(root.join("tiles.model")).unwrap();
    let job = Job { path, what: What::Replan, state: Arc::from(root.join(".millreeve")) };
    let mut planner = replan::factory(&Settings::default())();
    let save = |works: &Works| {
        for (name, text) in works.parts() {
            let path = root.join("tiles.model").join(name);
            if fs::read_to_string(&path).ok().as_ref() != Some(&text) {
                fs::write(path, text).unwrap();
            }
        }
    };
    fs::write("/proc/self/clear_refs", "5").unwrap();
    save(works);
    let first = replanned(planner.as_mut(), &job);
    println!("  first plan: {}, peak memory {} MB", told(&first), peak());
    let reports: Vec<Report> = (0..EDITS)
        .map(|edit| {
            save(&raised(works, edit));
            *replanned(planner.as_mut(), &job)
        })
        .collect();
    let mut sorted: Vec<&Report> = reports.iter().collect();
    sorted.sort_by(|a, b| beside(a).total_cmp(&beside(b)));
    let middle = sorted[EDITS / 2];
    println!("  replan:     {}, peak memory {} MB", told(middle), peak());
    println!("  beside the solve, first plan / replan: {:.2}", beside(&first) / beside(middle));
}

fn beside(report: &Report) -> f64 {
    report.milliseconds.all - report.milliseconds.solve
}

fn told(report: &Report) -> String {
    let times = &report.milliseconds;
    format!(
        "all {:.0} ms, read {:.0}, solve {:.0}, write {:.0}, the rest {:.0}, {:?} {} pivots",
        times.all,
        times.read,
        times.solve,
        times.write,
        times.all - times.read - times.solve - times.write,
        report.start,
        report.pivots
    )
}

/// The most memory that was in use since it was last asked to be counted, in MB.
fn peak() -> u64 {
    let status = fs::read_to_string("/proc/self/status").unwrap();
    let line = status.lines().find(|line| line.starts_with("VmHWM:")).unwrap();
    line.split_ascii_whitespace().nth(1).unwrap().parse::<u64>().unwrap() / 1024
}

fn replanned(planner: &mut dyn Planner, job: &Job) -> Box<Report> {
    match planner.replan(job, &Stop::new()) {
        Replanned::Done(report) => report,
        other => unreachable!("every edit has another plan: {other:?}"),
    }
}

/// The works with one price raised, a little more each time.
fn raised(works: &Works, edit: usize) -> Works {
    Works { raised: (3, 1.5 * (edit + 1) as f64), ..works.clone() }
}

fn writing(works: &Works) -> Writing {
    let parts = works.parts();
    Writing::in_parts(&parts.iter().map(|(name, text)| (*name, text.as_bytes())).collect::<Vec<_>>())
}

fn solved(steps: &mut Steps, session: &mut Session, program: &Program) -> Box<Optimum> {
    let Answer { outcome, account } = session.solve(program.clone(), LIMIT, &stop::Stop::default());
    steps.0.push(("solve", ms(account.time)));
    steps.0.push(("settle", ms(account.settling)));
    steps.0.push(("read off", ms(account.reading)));
    steps.0.push(("(pivots)", account.pivots as f64));
    match outcome {
        Outcome::Optimal(optimum) => optimum,
        other => unreachable!("the works has a plan: {other:?}"),
    }
}

fn ms(time: Duration) -> f64 {
    1e3 * time.as_secs_f64()
}

/// Steps in their order, in milliseconds.
#[derive(Default)]
struct Steps(Vec<(&'static str, f64)>);

impl Steps {
    fn taken<T>(&mut self, what: &'static str, step: impl FnOnce() -> T) -> T {
        let begun = Instant::now();
        let done = step();
        self.0.push((what, ms(begun.elapsed())));
        done
    }

    fn of(&self, what: &str) -> f64 {
        self.0.iter().find(|(other, _)| *other == what).map_or(f64::NAN, |(_, time)| *time)
    }

    fn medians(all: &[Self]) -> Self {
        let median = |&(what, _): &(&'static str, f64)| {
            let mut times: Vec<f64> = all.iter().map(|steps| steps.of(what)).collect();
            times.sort_by(f64::total_cmp);
            (what, times[times.len() / 2])
        };
        Self(all[0].0.iter().map(median).collect())
    }

    fn print(&self, what: &str) {
        let told: Vec<String> = self.0.iter().map(|(what, time)| format!("{what} {time:.1}")).collect();
        println!("  {what}: {}", told.join(", "));
    }
}
