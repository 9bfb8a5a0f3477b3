//! From save to plan: what a replan takes beside its solve, against the least that anything must do; and the whole of it, against a
//! script that parses and solves afresh. Edits of a capacity alone, and with the title, so that the text must be read whole.
//!
//! `cargo bench --bench save` prints the table; every ratio is the median of ratios of two times that were taken one after the other.
//! `cargo bench --bench save -- 10000` takes that size only, `cargo bench --bench save -- reading` measures reading alone,
//! `cargo bench --bench save -- apart` what it costs to solve in a process of its own.

#![expect(
    clippy::unwrap_used,
    clippy::print_stdout,
    clippy::disallowed_methods,
    reason = "a measurement that saves models as people do, and prints its table or fails"
)]

mod apart;
mod others;
#[path = "../../support/rng.rs"]
mod rng;
mod works;

use std::fs;
use std::hint::black_box;
use std::path::Path;
use std::sync::Arc;

use criterion::{Criterion, Throughput};
use millreeve::keep::{Job, ModelPath, Planner, Replanned, Report, Settings, Stop, What, replan};
use millreeve::model::read;
use millreeve::plan::compare::is_scarce;
use millreeve::plan::text;
use rng::Rng;
use works::{Works, machine};

/// Activities, resources, and how many edits are measured.
const SIZES: [(usize, usize, usize); 3] = [(100, 20, 101), (1_000, 60, 51), (10_000, 300, 21)];
/// Edits before those that are measured.
const WARMING: usize = 3;

fn main() {
    let words: Vec<String> = std::env::args().skip(1).filter(|word| !word.starts_with('-')).collect();
    if words.iter().any(|word| word == "reading") {
        let mut criterion = Criterion::default();
        reading(&mut criterion);
        criterion.final_summary();
        return;
    }
    if words.iter().any(|word| word == "apart") {
        println!("activities | in the thread, in a worker, ratio | the same of the whole replan");
        for (activities, resources, edits) in SIZES {
            apart::tell(activities, resources, edits);
        }
        return;
    }
    println!(
        "{:>10} {:>9} {:>6} | {:>8} {:>9} {:>5} | {:>8} {:>6} {:>8} {:>9} {:>5} | {:>7} {:>8}",
        "activities",
        "resources",
        "read",
        "floor ms",
        "beside ms",
        "ratio",
        "solve ms",
        "pivots",
        "whole ms",
        "script ms",
        "ratio",
        "read ms",
        "write ms"
    );
    for (activities, resources, edits) in SIZES {
        if words.is_empty() || words.contains(&activities.to_string()) {
            for retitled in [false, true] {
                print!("{activities:10} {resources:9} {:>6} | ", if retitled { "whole" } else { "edited" });
                tell(&measure(activities, resources, edits, retitled));
            }
        }
    }
}

/// One line of the table, but for what was measured.
fn tell(measured: &[Times]) {
    let median = |of: fn(&Times) -> f64| median(measured.iter().map(of).collect());
    println!(
        "{:8.2} {:9.2} {:5.2} | {:8.2} {:6.0} {:8.2} {:9.2} {:5.1} | {:7.2} {:8.2}",
        median(|t| t.floor),
        median(Times::beside),
        median(|t| t.beside() / t.floor),
        median(|t| t.solve),
        median(|t| t.pivots),
        median(|t| t.whole),
        median(|t| t.script),
        median(|t| t.script / t.whole),
        median(|t| t.read),
        median(|t| t.write),
    );
}

/// The times of one edit, in milliseconds.
struct Times {
    floor: f64,
    read: f64,
    solve: f64,
    write: f64,
    whole: f64,
    script: f64,
    pivots: f64,
}

impl Times {
    /// What the replan takes beside the solve.
    fn beside(&self) -> f64 {
        self.whole - self.solve
    }
}

/// The times of edits of capacities that bind, each saved over the one before; with `retitled`, of the title as well.
fn measure(activities: usize, resources: usize, edits: usize, retitled: bool) -> Vec<Times> {
    let folder = tempfile::tempdir().unwrap();
    let (root, beside) = (folder.path().join("works"), folder.path().join("beside"));
    fs::create_dir_all(&root).unwrap();
    fs::create_dir_all(&beside).unwrap();
    let root: Arc<Path> = Arc::from(root);
    let path = ModelPath::new(&root, Path::new("tiles.model.toml")).unwrap();
    let job = Job { path: path.clone(), what: What::Replan, state: Arc::from(root.join(".millreeve")) };
    let mut planner = replan::factory(&Settings::default())();
    let mut rng = Rng::new(1);
    let mut works = Works::new(activities, resources, &mut rng);
    let mut times = Vec::new();
    fs::write(path.full(), works.text()).unwrap();
    replanned(planner.as_mut(), &job);
    for edit in 0..WARMING + edits {
        let scarce = scarce(&path, resources);
        works.edit(*rng.pick(&scarce), &mut rng);
        if retitled {
            works.retitle();
        }
        fs::write(path.full(), works.text()).unwrap();
        let report = replanned(planner.as_mut(), &job);
        let [plan, note] = [path.plan(), path.note()].map(|written| fs::read_to_string(written).unwrap());
        let outputs = [(&*beside.join("tiles.plan.toml"), &*plan), (&*beside.join("tiles.note.md"), &*note)];
        let floor = others::floor(&path.full(), outputs);
        let (script, aim) = others::script(&path.full(), &beside.join("levels"));
        let told = report.aim.unwrap();
        assert!((told - aim).abs() <= 1e-6 * aim.abs(), "the plan earns {told}, the script's {aim}");
        if edit >= WARMING {
            let milliseconds = &report.milliseconds;
            times.push(Times {
                floor: 1e3 * floor.as_secs_f64(),
                read: milliseconds.read,
                solve: milliseconds.solve,
                write: milliseconds.write,
                whole: milliseconds.all,
                script: 1e3 * script.as_secs_f64(),
                pivots: report.pivots as f64,
            });
        }
    }
    times
}

fn replanned(planner: &mut dyn Planner, job: &Job) -> Box<Report> {
    match planner.replan(job, &Stop::new()) {
        Replanned::Done(report) => report,
        other => unreachable!("every edit has another plan: {other:?}"),
    }
}

/// The machines that bind in the plan on disk.
fn scarce(path: &ModelPath, resources: usize) -> Vec<usize> {
    let plan = text::read(&fs::read_to_string(path.plan()).unwrap()).unwrap().plan;
    let binds = |name: &str| plan.resources.iter().any(|planned| planned.name.as_str() == name && is_scarce(planned));
    (0..resources).filter(|&at| binds(&machine(at))).collect()
}

fn reading(criterion: &mut Criterion) {
    let mut group = criterion.benchmark_group("reading");
    for (activities, resources, _) in SIZES {
        let text = Works::new(activities, resources, &mut Rng::new(1)).text();
        group.throughput(Throughput::Bytes(text.len() as u64));
        let path = Path::new("tiles.model.toml");
        group.bench_function(format!("{activities} activities"), |bencher| {
            bencher.iter(|| read::text(black_box(path), black_box(text.as_bytes())).unwrap());
        });
    }
    group.finish();
}

fn median(mut numbers: Vec<f64>) -> f64 {
    numbers.sort_by(f64::total_cmp);
    numbers.get(numbers.len() / 2).copied().unwrap_or(f64::NAN)
}
