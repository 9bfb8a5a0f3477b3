//! Random models, solved by an independent engine as well.

#![expect(clippy::unwrap_used, reason = "helpers of tests fail the test")]

#[path = "support/clarabel.rs"]
mod clarabel;
#[path = "support/random.rs"]
mod random;
#[path = "support/rng.rs"]
mod rng;

use std::time::Duration;

use clarabel::Verdict;
use millreeve::lp::{Program, build};
use millreeve::solver::message::Outcome;
use millreeve::solver::session::Session;
use millreeve::solver::stop::Stop;

const MODELS: u64 = 3000;

/// An interior point stops at a gap of 1e-8 or so, relative to aims and residuals, and never at a vertex.
const TOLERANCE: f64 = 1e-6;

#[test]
fn random_models_come_to_what_an_independent_engine_finds() {
    let mut counts = [0, 0, 0];
    let mut unsure = Vec::new();
    for seed in 0..MODELS {
        let program = build(&random::model(seed));
        let answer = Session::default().solve(program.clone(), Duration::from_secs(60), &Stop::default());
        let verdict = clarabel::solve(&program);
        match (&answer.outcome, &verdict) {
            (Outcome::Optimal(optimum), Verdict::Optimal(aim)) => {
                let near = TOLERANCE * optimum.aim.abs().max(1.0);
                assert!((optimum.aim - aim).abs() <= near, "seed {seed}: {} and {aim}", optimum.aim);
                assert!(optimum.proof.holds(), "seed {seed}: {:?}", optimum.proof);
                counts[0] += 1;
            }
            (Outcome::Infeasible(conflict), Verdict::Infeasible) => {
                assert!(conflict.proven, "seed {seed}: {conflict:?}");
                counts[1] += 1;
            }
            // Its certificate is a direction alone: it does not say that there is a plan to start from.
            (Outcome::Infeasible(conflict), Verdict::Unbounded) => {
                assert!(conflict.proven, "seed {seed}: {conflict:?}")
            }
            (Outcome::Unbounded(growth), Verdict::Unbounded) => {
                assert!(growth.proven, "seed {seed}: {growth:?}");
                assert!(has_a_plan(&program), "seed {seed}: there is no plan to grow from");
                counts[2] += 1;
            }
            // Where there is neither a plan nor an end, it sometimes gets nowhere.
            (_, Verdict::Unsure(status)) => unsure.push((seed, status.clone())),
            (outcome, verdict) => panic!("seed {seed}: {outcome:?}, but {verdict:?}"),
        }
    }
    assert!(unsure.len() <= 3, "{unsure:?}");
    assert!(counts.iter().all(|&count| count >= 40), "too few of a kind: {counts:?}");
}

/// Whether the engine finds a plan when nothing is to be gained.
fn has_a_plan(program: &Program) -> bool {
    let mut aimless = program.clone();
    for column in &mut aimless.columns {
        column.aim = 0.0;
    }
    matches!(clarabel::solve(&aimless), Verdict::Optimal(_))
}
