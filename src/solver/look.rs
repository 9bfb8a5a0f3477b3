//! Looking at a basis under new data: how many bounds its vertex breaks, how much it would still gain, and which start follows.

use super::basis::{Basis, Position};
use super::instance::Instance;
use super::live::Refusal;
use super::message::Start;
use super::proof::{self, Checked, TOLERANCE};
use super::vertex::Vertex;
use crate::lp::Program;

/// A basis measured against a program.
#[derive(Clone, Debug, Default)]
pub struct Look {
    /// The basis.
    pub basis: Basis,
    /// Its vertex.
    pub vertex: Vertex,
    /// What follows from the vertex, with its proof.
    pub checked: Checked,
    /// Columns and rows outside their bounds.
    pub primal: usize,
    /// Columns and rows out of the basis that would still improve the aim.
    pub dual: usize,
}

impl Look {
    /// Measures the basis that `instance` holds against `program`, which it holds too.
    ///
    /// # Errors
    /// When the basis is not valid or cannot be factorised.
    pub fn at(instance: &mut Instance, program: &Program) -> Result<Self, Refusal> {
        // A basis that cannot be factorised is mended by the solver: read it after.
        instance.factorise()?;
        let basis = instance.basis()?;
        let vertex = Vertex::of(instance, program, &basis)?;
        Ok(Self::of(program, basis, vertex))
    }

    /// As [`at`](Self::at), where the vertex is thought to be near `guess`.
    ///
    /// # Errors
    /// When the basis is not valid or cannot be factorised.
    pub fn near(instance: &mut Instance, program: &Program, guess: Vertex) -> Result<Self, Refusal> {
        instance.factorise()?;
        let basis = instance.basis()?;
        let vertex = Vertex::near(instance, program, &basis, guess)?;
        Ok(Self::of(program, basis, vertex))
    }

    /// Measures a basis whose vertex is known.
    #[must_use]
    pub fn of(program: &Program, basis: Basis, vertex: Vertex) -> Self {
        let checked = proof::check(program, &vertex.levels, &vertex.worths);
        let mut look = Self { basis, vertex, checked, primal: 0, dual: 0 };
        look.count(program);
        look
    }

    /// Whether the basis is optimal and proven so.
    #[must_use]
    pub fn is_optimal(&self) -> bool {
        self.primal == 0 && self.dual == 0 && self.checked.proof.holds()
    }

    /// The start that the measured infeasibilities call for; where both are nil and the proof fails all the same, primal simplex has the least to mend.
    #[must_use]
    pub fn start(&self, program: &Program) -> Start {
        match (self.primal, self.dual) {
            (0, 0) if self.is_optimal() => Start::None,
            // On a flat program a price can leave more gains than there are rows, and primal simplex then wanders: dual simplex starts by
            // moving what has two bounds to the other one. A single gain it forgives until the end (measured: a tenth less time).
            (0, broken) if is_flat(program) && (broken == 1 || broken > program.rows.len()) => Start::Dual,
            (0, _) => Start::Primal,
            // On a flat program a few bounds are soon kept again, and a primal iteration takes half the time of a dual one.
            (broken, gains) if gains > 0 && is_flat(program) && broken * FEW <= program.rows.len() => Start::Primal,
            // Neither is feasible: measured on changed coefficients of basic columns and on several edits at once, dual simplex,
            // which mends the gains on the way, does better than primal simplex.
            _ => Start::Dual,
        }
    }

    /// As [`start`](Self::start), for a basis that was carried over by name. It breaks few bounds, those of what is new or has lost its
    /// neighbours, and leaves gains all over: primal simplex then takes a tenth to a half of dual simplex' pivots (measured on rolled
    /// horizons of 8 to 52 weeks).
    #[must_use]
    pub fn start_by_name(&self, program: &Program) -> Start {
        match self.start(program) {
            Start::Dual if self.primal < self.dual => Start::Primal,
            start => start,
        }
    }

    fn count(&mut self, program: &Program) {
        let sign = program.sense.sign();
        for (at, column) in program.columns.iter().enumerate() {
            self.primal += usize::from(outside(self.vertex.levels[at], 0.0, column.lower, column.upper));
            let cost = sign * self.checked.gains[at] / self.checked.gain_scales[at].max(1.0);
            self.dual += usize::from(improves(self.basis.columns[at], column.lower, column.upper, cost));
        }
        for (at, row) in program.rows.iter().enumerate() {
            self.primal +=
                usize::from(outside(self.checked.sums[at], self.checked.sum_scales[at], row.lower, row.upper));
            let cost = sign * self.vertex.worths[at];
            self.dual += usize::from(improves(self.basis.rows[at], row.lower, row.upper, cost));
        }
    }
}

/// A program with so many times more columns than rows is flat.
const FLAT: usize = 20;

/// One broken bound for so many rows is few (measured on a mix of 300 rows: with 1 to 8 broken primal simplex takes 0.7 of the time, with 19 to
/// 133 it takes 1.8).
const FEW: usize = 30;

/// Whether rows are few for the columns there are.
pub(super) fn is_flat(program: &Program) -> bool {
    program.rows.len() * FLAT < program.columns.len()
}

/// Whether a value breaks a bound by more than its rounding, as the proof measures it.
fn outside(value: f64, scale: f64, lower: f64, upper: f64) -> bool {
    let size = TOLERANCE * value.abs().max(scale).max(1.0);
    value < lower - size || value > upper + size || value.is_nan()
}

/// Whether something out of the basis would improve an aim to minimise by leaving its bound.
fn improves(position: Position, lower: f64, upper: f64, cost: f64) -> bool {
    if lower >= upper {
        return false;
    }
    match position {
        Position::Basic => false,
        Position::AtLower => cost < -TOLERANCE,
        Position::AtUpper => cost > TOLERANCE,
        Position::AtZero => cost.abs() > TOLERANCE,
    }
}
