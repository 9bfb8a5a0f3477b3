//! Solving in tests, and comparing what comes of it.

use std::time::Duration;

use millreeve::lp::Program;
use millreeve::solver::message::{Answer, Optimum, Outcome};
use millreeve::solver::session::Session;
use millreeve::solver::stop::Stop;

/// Relative difference of aims that passes for none.
pub(crate) const TOLERANCE: f64 = 1e-9;

pub(crate) fn solve(session: &mut Session, program: &Program) -> Answer {
    session.solve(program.clone(), Duration::from_secs(60), &Stop::default())
}

/// What a program comes to, as a number: the worst there is without a plan, the best there is without an end. For comparing, aims to
/// be large are turned into aims to be small.
///
/// # Panics
/// When the answer is not proven, or there is none.
pub(crate) fn least(program: &Program, outcome: &Outcome) -> f64 {
    match outcome {
        Outcome::Optimal(optimum) => {
            assert!(optimum.proof.holds(), "{:?}", optimum.proof);
            program.sense.sign() * optimum.aim
        }
        Outcome::Infeasible(conflict) => {
            assert!(conflict.proven, "{conflict:?}");
            f64::INFINITY
        }
        Outcome::Unbounded(growth) => {
            assert!(growth.proven, "{growth:?}");
            f64::NEG_INFINITY
        }
        other => panic!("{other:?}"),
    }
}

/// The size of what the aim is summed from: its rounding is relative to that.
pub(crate) fn size(program: &Program, optimum: &Optimum) -> f64 {
    let terms = program.columns.iter().zip(&optimum.levels).map(|(column, level)| (column.aim * level).abs());
    terms.sum::<f64>().max(program.offset.abs()).max(1.0)
}

/// Whether `a` is at most `b`, or above it by rounding alone.
pub(crate) fn at_most(a: f64, b: f64, size: f64) -> bool {
    a <= b || a - b <= TOLERANCE * size.max(a.abs()).max(b.abs())
}

/// Whether two numbers are the same but for rounding.
pub(crate) fn same(a: f64, b: f64, size: f64) -> bool {
    at_most(a, b, size) && at_most(b, a, size)
}
