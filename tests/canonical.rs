//! The one plan of a program, as sessions tell it, held against an independent simplex in fractions: levels, and how far they may vary.
//!
//! Then the same models edited at random: warm and cold tell the same, with levels that are free both ways among them.

#![expect(
    clippy::unwrap_used,
    clippy::float_cmp,
    reason = "helpers of tests fail the test; exact numbers are compared exactly"
)]

#[path = "support/random.rs"]
mod random;
#[path = "support/random_edit.rs"]
mod random_edit;
#[path = "support/rational.rs"]
mod rational;
#[path = "support/rng.rs"]
mod rng;

use std::time::Duration;

use millreeve::lp::{Program, build};
use millreeve::solver::message::{Optimum, Outcome};
use millreeve::solver::session::Session;
use millreeve::solver::stop::Stop;
use millreeve::solver::weight::weights;
use random_edit::edit;
use rational::{Found, best};
use rng::Rng;

fn optimum(session: &mut Session, program: &Program) -> Option<Box<Optimum>> {
    match session.solve(program.clone(), Duration::from_secs(60), &Stop::default()).outcome {
        Outcome::Optimal(optimum) => Some(optimum),
        _ => None,
    }
}

/// The levels with the least sum of `second` times level among the best; `None` where there is no least.
fn levels(program: &Program, second: &[f64]) -> Option<Vec<f64>> {
    match best(program, second) {
        Found::Plan(levels, _) => Some(levels.iter().map(|level| level.to_f64().value()).collect()),
        _ => None,
    }
}

/// The least and the most that each level is among the best.
fn spans(program: &Program) -> Vec<(f64, f64)> {
    let end = |at: usize, direction: f64| {
        let mut second = vec![0.0; program.columns.len()];
        second[at] = direction;
        levels(program, &second).map_or(-direction * f64::INFINITY, |levels| levels[at])
    };
    (0..program.columns.len()).map(|at| (end(at, 1.0), end(at, -1.0))).collect()
}

#[test]
fn levels_and_how_they_vary_are_those_of_exact_arithmetic() {
    let (mut plans, mut tied, mut without_least) = (0, 0, 0);
    for seed in 0..2_000 {
        let program = build(&random::model(seed));
        let Some(optimum) = optimum(&mut Session::default(), &program) else { continue };
        plans += 1;
        assert!(optimum.exact, "seed {seed}");
        match levels(&program, &weights(&program)) {
            Some(levels) if optimum.levels_unique => {
                // Where nothing was close the levels are those of the doubles that the numbers were read as, not of their decimals.
                for (told, level) in optimum.levels.iter().zip(&levels) {
                    assert!((told - level).abs() <= 1e-12 * level.abs(), "seed {seed}: {told} for {level}");
                }
            }
            Some(levels) => assert_eq!(optimum.levels, levels, "seed {seed}"),
            None => without_least += 1,
        }
        let spans = spans(&program);
        let varies = spans.iter().any(|(least, most)| least != most);
        assert_eq!(optimum.levels_unique, !varies, "seed {seed}: {spans:?}");
        if varies {
            tied += 1;
            assert_eq!(optimum.spans.unwrap(), spans, "seed {seed}");
        }
    }
    assert!(
        plans > 1_000 && tied > 150 && without_least > 2,
        "{plans} plans, {tied} tied, {without_least} without a least"
    );
}

#[test]
fn edited_models_have_the_plan_that_a_cold_solve_finds() {
    let (mut compared, mut free) = (0, 0);
    for seed in 0..400 {
        let mut rng = Rng::new(seed);
        let mut model = random::model(seed);
        let mut warm = Session::default();
        for number in 0..12 {
            let program = build(&model);
            let (warm, cold) = (optimum(&mut warm, &program), optimum(&mut Session::default(), &program));
            assert_eq!(warm.is_some(), cold.is_some(), "seed {seed}, edit {number}");
            if let (Some(warm), Some(cold)) = (warm, cold) {
                compared += 1;
                free +=
                    usize::from(!cold.levels_unique && program.columns.iter().any(|column| column.lower.is_infinite()));
                assert_eq!(warm.levels, cold.levels, "seed {seed}, edit {number}");
                assert_eq!(format!("{:.12e}", warm.aim), format!("{:.12e}", cold.aim), "seed {seed}, edit {number}");
                assert_eq!(
                    (warm.exact, warm.levels_unique),
                    (cold.exact, cold.levels_unique),
                    "seed {seed}, edit {number}"
                );
                assert_eq!(warm.spans, cold.spans, "seed {seed}, edit {number}");
            }
            model = edit(&mut rng, &model);
        }
    }
    assert!(compared > 2_000 && free > 20, "{compared} plans compared, {free} of them tied with a level that is free");
}
