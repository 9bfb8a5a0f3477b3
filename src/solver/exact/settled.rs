//! Settling a program: the one plan that is best for its aim and then for a second aim.

use std::cmp::Ordering;

use dashu_int::IBig;
use thiserror::Error;

use super::dual;
use super::number::{Decimal, nearest, ten_to};
use super::price::Prices;
use super::primal::{lowest, minimise};
use super::vertex::{Budget, Side, Vertex};
use super::whole::{Costs, Variable, Whole};
use crate::lp::{Program, RowIndex};
use crate::solver::basis::{Basis, Position};

/// The vertex that is best for a program's aim and, among those, for a second aim to be made small.
#[derive(Clone, Debug, PartialEq)]
pub struct Settled {
    /// Its basis, exactly feasible and optimal for both aims.
    pub basis: Basis,
    /// The doubles nearest to the exact levels, in the program's order.
    pub levels: Vec<f64>,
    /// The doubles nearest to the exact sums of the rows.
    pub sums: Vec<f64>,
    /// The doubles nearest to the exact multipliers of the rows: derivative of the aim, in its own sense, by the row's bound.
    pub worths: Vec<f64>,
    /// The double nearest to the exact aim, with its constant.
    pub aim: f64,
    /// Exact pivots it took.
    pub pivots: usize,
    /// Whether some basic column or row stands exactly at a bound of its own: other multipliers may be as right.
    pub degenerate: bool,
    /// Whether something out of the basis that could move has a reduced cost of exactly 0 for the aim: other plans may be as good.
    pub ties: bool,
}

/// Why a program was not settled.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Error)]
pub enum Unsettled {
    /// The program has more columns, rows, entries or digits than exact arithmetic is meant for.
    #[error("too large for exact arithmetic")]
    TooLarge,
    /// What was given is no basis, or a singular one.
    #[error("a singular basis")]
    Singular,
    /// No levels keep all rows and bounds.
    #[error("no plan keeps all rules")]
    Infeasible,
    /// The aim, or the second aim among the best plans, has no limit.
    #[error("nothing limits the aim")]
    Unbounded,
    /// It would take more exact pivots than are allowed.
    #[error("too many exact pivots")]
    OutOfPivots,
    /// The fractions have more digits than may be worked out.
    #[error("too many digits")]
    OutOfWork,
}

/// Exact pivots allowed: so many for each row, and some more.
const PIVOTS_PER_ROW: usize = 20;
const PIVOTS: usize = 200;

/// Entries that may be looked at in all solves together.
const WORK: u64 = 4_000_000_000;

/// The plan of `program` that is best for its aim and, among those, has the least sum of `second` times level; among those in turn, the
/// least level of the first column, then of the second, and so on. The levels depend on nothing but the program and `second`.
///
/// Numbers of the program and of `second` count as the shortest decimals that read as them. Any nonsingular basis will do as `from`; the
/// nearer to the best it is, the fewer exact pivots it takes. Columns and rows held at one value may have either side.
///
/// # Errors
/// When it could not be told: see [`Unsettled`].
pub fn settle(program: &Program, from: &Basis, second: &[f64]) -> Result<Settled, Unsettled> {
    if !from.fits(program) {
        return Err(Unsettled::Singular);
    }
    let whole = Whole::of(program)?;
    let sign = program.sense.sign();
    let aim = whole.costs(program.columns.iter().map(|column| sign * column.aim))?;
    let second = whole.costs(second.iter().copied())?;
    let allowed = PIVOTS + PIVOTS_PER_ROW * program.rows.len();
    let budget = Budget { pivots: allowed, work: WORK };
    let mut vertex = Vertex::of(&whole, from.columns.iter().chain(&from.rows).copied(), budget)?;
    dual::restore(&mut vertex, &aim)?;
    let mut held: Vec<bool> = whole.bounds.iter().map(super::whole::Bounds::fixed).collect();
    let prices = minimise(&mut vertex, &aim, &held)?;
    hold(&vertex, &prices, &mut held);
    let ties = some_free(&vertex, &held);
    if ties {
        let prices = minimise(&mut vertex, &second, &held)?;
        hold(&vertex, &prices, &mut held);
        lowest(&mut vertex, &held)?;
    }
    Ok(Told { program, vertex: &vertex, allowed }.settled(&aim, &prices, ties))
}

/// Holds what is out of the basis and has a price: moving it would lose.
fn hold(vertex: &Vertex<'_>, prices: &Prices<'_>, held: &mut [bool]) {
    for variable in vertex.nonbasics() {
        held[variable.0] = held[variable.0] || prices.sign(vertex.whole, variable).0 != Ordering::Equal;
    }
}

fn some_free(vertex: &Vertex<'_>, held: &[bool]) -> bool {
    vertex.nonbasics().any(|variable| !held[variable.0])
}

/// Tells a vertex in doubles.
struct Told<'a> {
    program: &'a Program,
    vertex: &'a Vertex<'a>,
    allowed: usize,
}

impl Told<'_> {
    fn settled(&self, aim: &Costs, prices: &Prices<'_>, ties: bool) -> Settled {
        let Self { program, vertex, allowed } = self;
        let columns = program.columns.len();
        let values = self.values();
        let at_bound = |slot| {
            [Side::Lower, Side::Upper].iter().any(|&side| vertex.room(slot, side).is_some_and(|room| room.is_zero()))
        };
        Settled {
            basis: Basis { columns: vertex.positions[..columns].to_vec(), rows: vertex.positions[columns..].to_vec() },
            levels: values[..columns].to_vec(),
            sums: values[columns..].to_vec(),
            worths: self.worths(aim, prices),
            aim: self.aim(aim),
            pivots: allowed - vertex.budget.pivots,
            degenerate: (0..vertex.basics.len()).any(at_bound),
            ties,
        }
    }

    /// Values of all variables: those out of the basis are bounds of the program.
    fn values(&self) -> Vec<f64> {
        let columns = self.program.columns.iter().map(|column| (column.lower, column.upper));
        let rows = self.program.rows.iter().map(|row| (row.lower, row.upper));
        let stands = columns.chain(rows).zip(&self.vertex.positions).map(|((lower, upper), position)| match position {
            // Adding 0 makes −0 plain.
            Position::AtLower => lower + 0.0,
            Position::AtUpper => upper + 0.0,
            Position::AtZero | Position::Basic => 0.0,
        });
        let mut values: Vec<f64> = stands.collect();
        let levels = &self.vertex.levels;
        for (&basic, level) in self.vertex.basics.iter().zip(&levels.numerators) {
            let (above, below) = self.vertex.whole.scale(basic);
            values[basic.0] = nearest(&(level * below), &(&levels.denominator * above));
        }
        values
    }

    fn worths(&self, aim: &Costs, prices: &Prices<'_>) -> Vec<f64> {
        let sign = self.program.sense.sign();
        let denominator = &prices.multipliers.denominator * &aim.unit;
        let worth = |(row, multiplier): (usize, &IBig)| {
            let (above, below) = self.vertex.whole.row_scale(RowIndex(row));
            sign * nearest(&(multiplier * above), &(&denominator * below)) + 0.0
        };
        prices.multipliers.numerators.iter().enumerate().map(worth).collect()
    }

    fn aim(&self, aim: &Costs) -> f64 {
        let Vertex { whole, levels, .. } = self.vertex;
        let cost = |variable: Variable| &aim.of[variable.0];
        let basic = self.vertex.basics.iter().zip(&levels.numerators).map(|(&basic, level)| cost(basic) * level);
        let others = self.vertex.nonbasics().filter_map(|other| Some(cost(other) * self.vertex.stand(other)?));
        let sum = basic.sum::<IBig>() + others.sum::<IBig>() * &levels.denominator;
        let offset = Decimal::of(self.program.offset).unwrap_or(Decimal::ZERO);
        let places = (-offset.exponent).max(0);
        let denominator = &levels.denominator * &aim.unit * &whole.unit;
        let minimised = match self.program.sense {
            crate::lp::Sense::Minimise => sum,
            crate::lp::Sense::Maximise => -sum,
        };
        let offset = offset.times_ten_to(places);
        nearest(&(minimised * ten_to(places) + offset * &denominator), &(denominator * ten_to(places)))
    }
}
