//! Programs mean what their models do: held against the meaning written down a second time, and against another engine.

#![expect(clippy::unwrap_used, clippy::panic, reason = "helpers of tests fail the test")]

#[path = "support/clarabel.rs"]
mod clarabel;
#[path = "support/plain_meaning.rs"]
mod plain_meaning;
#[path = "support/random_language.rs"]
mod random_language;
#[path = "support/rng.rs"]
mod rng;
#[path = "support/solve.rs"]
mod support;

use clarabel::Verdict;
use millreeve::lp::{build, mps};
use millreeve::solver::message::Outcome;
use millreeve::solver::session::Session;
use plain_meaning::meaning;
use support::{least, same, size, solve};

const CASES: u64 = 1500;

/// What a plan says keeps every rule of the model and earns what is told: so nothing is missing. What another engine makes of the rules,
/// written down another way, comes to the same aim: so nothing is there that the model does not say.
#[test]
fn programs_mean_what_models_say() {
    let mut seen = [0; 3];
    let mut unsure = Vec::new();
    for seed in 0..CASES {
        let model = random_language::model(seed);
        let program = build(&model);
        let outcome = solve(&mut Session::default(), &program).outcome;
        let (meant, case) = (meaning(&model), || format!("seed {seed}: {model:?}\n{outcome:?}"));
        match (&outcome, clarabel::solve(&meant.program())) {
            (_, Verdict::Unsure(reason)) => unsure.push(reason),
            (Outcome::Optimal(optimum), verdict) => {
                let broken = meant.broken(&program, &optimum.levels, optimum.aim);
                assert!(broken.is_empty(), "{}\n{}", broken.join("\n"), case());
                let Verdict::Optimal(aim) = verdict else { panic!("{verdict:?} instead, {}", case()) };
                let tolerance = 1e-6 * size(&program, optimum);
                assert!((aim - optimum.aim).abs() <= tolerance, "{aim} instead, {}", case());
                seen[0] += 1;
            }
            (Outcome::Infeasible(_), mut verdict) => {
                // Where there is a direction without an end, it says so and does not ask whether there is a plan.
                if let Verdict::Unbounded = verdict {
                    let mut aimless = meant.program();
                    aimless.columns.iter_mut().for_each(|column| column.aim = 0.0);
                    verdict = clarabel::solve(&aimless);
                }
                assert!(matches!(verdict, Verdict::Infeasible), "{verdict:?} instead, {}", case());
                seen[1] += 1;
            }
            (Outcome::Unbounded(_), verdict) => {
                assert!(matches!(verdict, Verdict::Unbounded), "{verdict:?} instead, {}", case());
                seen[2] += 1;
            }
            _ => panic!("{}", case()),
        }
    }
    assert!(unsure.len() < 50, "the other engine could not tell too often: {unsure:?}");
    assert!(seen[0] >= 500 && seen[1] >= 50 && seen[2] >= 5, "too few of a kind: {seen:?}");
}

/// A model of any sort goes through an MPS file: columns and rows keep their numbers, so it comes to the same.
#[test]
fn written_as_mps_a_model_comes_to_the_same() {
    for seed in 0..400 {
        let model = random_language::model(seed);
        let program = build(&model);
        let back = build(&mps::read(&mps::write(&model).unwrap()).unwrap().model);
        assert_eq!(program.columns.len(), back.columns.len(), "seed {seed}");
        let there = solve(&mut Session::default(), &program).outcome;
        let back_again = solve(&mut Session::default(), &back).outcome;
        let size = if let Outcome::Optimal(optimum) = &there { size(&program, optimum) } else { 1.0 };
        let (there, back_again) = (least(&program, &there), least(&back, &back_again));
        assert!(same(there, back_again, size), "seed {seed}: {there} and {back_again}");
    }
}
