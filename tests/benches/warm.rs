//! One edit of each kind, from the last basis and from nothing: how long a solve takes, with criterion's statistics.
//!
//! `cargo bench --bench warm`. The table of ratios over many edits and programs is `cargo bench --bench starts`.

#![expect(clippy::unwrap_used, reason = "a measurement that fails where it cannot be made")]

#[path = "starts/edits.rs"]
mod edits;
#[path = "../support/instances.rs"]
mod instances;
#[path = "starts/programs.rs"]
mod programs;
#[path = "../support/rng.rs"]
mod rng;

use std::time::Duration;

use criterion::{BenchmarkId, Criterion, criterion_group, criterion_main};
use edits::KINDS;
use millreeve::lp::Program;
use millreeve::solver::message::{Optimum, Outcome, Start};
use millreeve::solver::session::Session;
use millreeve::solver::stop::Stop;
use rng::Rng;

const LIMIT: Duration = Duration::from_secs(60);

/// The programs measured here; the table takes all.
const PROGRAMS: [&str; 2] = ["25fv47", "80bau3b"];

fn optimum(program: &Program) -> Box<Optimum> {
    match Session::default().solve(program.clone(), LIMIT, &Stop::default()).outcome {
        Outcome::Optimal(optimum) => optimum,
        other => unreachable!("the programs have plans: {other:?}"),
    }
}

/// So many solves of `edited` from the live optimum of `program`, by the start that the look calls for or the one insisted on.
fn solves(count: u64, program: &Program, optimum: &Optimum, edited: &Program, insisted: Option<Start>) -> Duration {
    let solve = |_| {
        let mut session = Session::remembered(program.clone(), &optimum.basis.named(program), None);
        session.solve(program.clone(), LIMIT, &Stop::default());
        session.insist(insisted);
        session.solve(edited.clone(), LIMIT, &Stop::default()).account.time
    };
    (0..count).map(solve).sum()
}

fn kinds(criterion: &mut Criterion) {
    for (name, program) in programs::programs().into_iter().filter(|(name, _)| PROGRAMS.contains(name)) {
        let optimum = optimum(&program);
        let mut group = criterion.benchmark_group(name);
        group.sample_size(10).warm_up_time(Duration::from_millis(200)).measurement_time(Duration::from_secs(2));
        for (kind, edit, _) in KINDS {
            let edited = (1..).find_map(|seed| edit(&mut Rng::new(seed), &program, &optimum)).unwrap();
            for (way, insisted) in [("taken", None), ("cold", Some(Start::Cold))] {
                group.bench_with_input(BenchmarkId::new(kind, way), &edited, |bencher, edited| {
                    bencher.iter_custom(|count| solves(count, &program, &optimum, edited, insisted));
                });
            }
        }
        group.finish();
    }
}

criterion_group!(benches, kinds);
criterion_main!(benches);
