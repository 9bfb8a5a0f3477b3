//! Worths that a plan may tell though not all are the only optimal ones: held against what the aim does when the bound moves.

#![expect(clippy::unwrap_used, reason = "a test that cannot go on fails")]

#[expect(dead_code, reason = "drawing works needs less than all kinds of numbers")]
#[path = "support/rng.rs"]
mod rng;
#[path = "support/works.rs"]
mod works;

use std::time::Duration;

use millreeve::lp::Program;
use millreeve::solver::message::{Optimum, Outcome};
use millreeve::solver::session::Session;
use millreeve::solver::stop::Stop;
use works::Nature;

fn solved(program: &Program) -> Option<Optimum> {
    let answer = Session::default().solve(program.clone(), Duration::from_secs(60), &Stop::default());
    if let Outcome::Optimal(optimum) = answer.outcome { Some(*optimum) } else { None }
}

/// How much the aim moves when the upper bound of a row does.
fn moved(program: &Program, row: usize, by: f64, aim: f64) -> Option<f64> {
    let mut other = program.clone();
    other.rows[row].upper += by;
    solved(&other).map(|optimum| (optimum.aim - aim) / by)
}

/// Few of these degenerate works have unique worths, and of most some are told all the same. A worth that is the only optimal one is what
/// one unit more adds and what one less takes away; one that is not differs between the two.
#[test]
fn a_known_worth_is_that_of_more_and_of_less_and_an_unknown_one_is_not() {
    const BY: f64 = 1e-4;
    let (mut known_rows, mut unknown_rows) = (0, 0);
    for seed in (0..900).filter(|&seed| Nature::of(seed) == Nature::Degenerate) {
        let program = works::works(seed, 14);
        let optimum = solved(&program).unwrap();
        let Some(known) = &optimum.known else { continue };
        assert!(optimum.levels_unique && !optimum.worths_unique, "{seed}");
        for (row, &is_known) in known.worths.iter().enumerate() {
            let worth = optimum.worths[row];
            let at_most = optimum.sums[row] >= program.rows[row].upper - 1e-9;
            if !at_most {
                continue;
            }
            let (Some(more), Some(less)) =
                (moved(&program, row, BY, optimum.aim), moved(&program, row, -BY, optimum.aim))
            else {
                continue;
            };
            if is_known {
                known_rows += 1;
                assert!((more - worth).abs() < 1e-4 && (less - worth).abs() < 1e-4, "{seed}: {worth}, {more}, {less}");
            } else {
                unknown_rows += 1;
                assert!((more - less).abs() > 1e-4, "{seed}: {worth} is the only one: {more}, {less}");
            }
        }
    }
    assert!(known_rows > 20 && unknown_rows > 20, "{known_rows} known, {unknown_rows} unknown");
}

/// A gain that is the only optimal one is that of every optimal basis: here of another one, with the columns the other way round.
#[test]
fn what_is_known_does_not_depend_on_the_basis() {
    for seed in (0..900).filter(|&seed| Nature::of(seed) == Nature::Degenerate) {
        let program = works::works(seed, 14);
        let optimum = solved(&program).unwrap();
        let Some(known) = &optimum.known else { continue };
        let mut turned = program.clone();
        for row in &mut turned.rows {
            row.upper += 1.0;
        }
        let mut session = Session::default();
        session.solve(turned, Duration::from_secs(60), &Stop::default());
        let Outcome::Optimal(other) = session.solve(program, Duration::from_secs(60), &Stop::default()).outcome else {
            panic!("{seed}")
        };
        assert_eq!(other.known.as_ref(), Some(known), "{seed}");
        let near = |one: &[f64], other: &[f64], known: &[bool]| {
            one.iter().zip(other).zip(known).all(|((one, other), &known)| !known || (one - other).abs() < 1e-9)
        };
        assert!(near(&optimum.worths, &other.worths, &known.worths), "{seed}");
        assert!(near(&optimum.gains, &other.gains, &known.gains), "{seed}");
    }
}
