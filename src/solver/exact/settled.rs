//! Settling a program: the one plan that is best for its aim and then for a second aim.

use std::cmp::Ordering;
use std::iter;

use dashu_int::IBig;
use thiserror::Error;

use super::dual;
use super::price::Prices;
use super::primal::{lowest, minimise};
use super::vertex::{Budget, Side, Vertex};
use super::whole::{Bounds, Costs, Variable, Whole};
use crate::lp::{Program, RowIndex, Sense};
use crate::model::decimal::{Decimal, nearest, ten_to};
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

/// Programs up to this size are taken. What a basis costs depends on its digits more than on its size: see [`super`] for what was
/// measured.
const ROWS: usize = 3_000;
const COLUMNS: usize = 100_000;
const ENTRIES: usize = 500_000;

/// Exact pivots allowed: so many for each row, and some more.
const PIVOTS_PER_ROW: usize = 20;
const PIVOTS: usize = 200;

/// What may be spent on all solves together, in products of words: two to four seconds, where a start is far from the best.
const WORK: u64 = 500_000_000;

/// The plan of `program` that is best for its aim and, among those, has the least sum of `second` times level; among those in turn, the
/// least level of the first column, then of the second, and so on. The levels depend on nothing but the program and `second`.
///
/// Numbers of the program and of `second` count as the shortest decimals that read as them. Any nonsingular basis will do as `from`; the
/// nearer to the best it is, the fewer exact pivots it takes. A column without a weight in `second` weighs 0. Columns and rows held at one value may have either side.
///
/// # Errors
/// When it could not be told: see [`Unsettled`].
pub fn settle(program: &Program, from: &Basis, second: &[f64]) -> Result<Settled, Unsettled> {
    if !from.fits(program) {
        return Err(Unsettled::Singular);
    }
    if program.rows.len() > ROWS || program.columns.len() > COLUMNS || program.entries() > ENTRIES {
        return Err(Unsettled::TooLarge);
    }
    let whole = Whole::of(program)?;
    let sign = program.sense.sign();
    let aim = whole.costs(program.columns.iter().map(|column| sign * column.aim))?;
    let second = whole.costs(second.iter().copied().chain(iter::repeat(0.0)).take(program.columns.len()))?;
    let allowed = PIVOTS + PIVOTS_PER_ROW * program.rows.len();
    let budget = Budget { pivots: allowed, work: WORK };
    let mut vertex = Vertex::of(&whole, from.columns.iter().chain(&from.rows).copied(), budget)?;
    dual::restore(&mut vertex, &aim)?;
    let mut held: Vec<bool> = whole.bounds.iter().map(Bounds::fixed).collect();
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
            Sense::Minimise => sum,
            Sense::Maximise => -sum,
        };
        let offset = offset.times_ten_to(places);
        nearest(&(minimised * ten_to(places) + offset * &denominator), &(denominator * ten_to(places)))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::lp::{Column, Key, Row};

    const INF: f64 = f64::INFINITY;

    /// A program to maximise: columns by lower bound, upper bound, aim and entries, rows by their bounds.
    fn program(columns: &[(f64, f64, f64, &[f64])], rows: &[(f64, f64)]) -> Program {
        let entries = |values: &[f64]| values.iter().enumerate().map(|(row, &value)| (RowIndex(row), value)).collect();
        let columns = columns.iter().enumerate().map(|(at, &(lower, upper, aim, values))| Column {
            key: Key::new(&format!("c{at}")),
            lower,
            upper,
            aim,
            entries: entries(values),
        });
        let rows =
            rows.iter().enumerate().map(|(at, &(lower, upper))| Row { key: Key::new(&format!("r{at}")), lower, upper });
        Program { sense: Sense::Maximise, offset: 0.0, columns: columns.collect(), rows: rows.collect() }
    }

    fn settled(program: &Program, second: &[f64]) -> Result<Settled, Unsettled> {
        let (columns, rows) = (program.columns.len(), program.rows.len());
        let from = Basis { columns: vec![Position::AtLower; columns], rows: vec![Position::Basic; rows] };
        settle(program, &from, second)
    }

    fn levels(program: &Program, second: &[f64]) -> Vec<f64> {
        settled(program, second).unwrap().levels
    }

    #[test]
    fn numbers_are_what_is_written() {
        // In doubles, three times 0.1 is more than 0.3 and the rows would contradict each other.
        let decimals = program(&[(0.1, 0.1, 0.0, &[3.0])], &[(0.3, 0.3)]);
        assert_eq!(levels(&decimals, &[1.0]), [0.1]);
        // Nothing is near enough to pass for it.
        let beside = program(&[(0.1, 0.1, 0.0, &[3.0])], &[(0.300_000_000_000_000_04, INF)]);
        assert_eq!(settled(&beside, &[1.0]), Err(Unsettled::Infeasible));
    }

    #[test]
    fn the_second_aim_decides_among_the_best_and_names_after_it() {
        let tied = program(&[(0.0, 4.0, 1.0, &[1.0]), (0.0, 4.0, 1.0, &[1.0])], &[(-INF, 6.0)]);
        assert_eq!(levels(&tied, &[1.0, 1.5]), [4.0, 2.0]);
        assert_eq!(levels(&tied, &[1.5, 1.0]), [2.0, 4.0]);
        assert_eq!(levels(&tied, &[1.0, 1.0]), [2.0, 4.0]);
        let mut nearly = tied;
        nearly.columns[0].aim = 1.000_000_000_001;
        assert_eq!(levels(&nearly, &[1.5, 1.0]), [4.0, 2.0]);
    }

    #[test]
    fn worths_and_the_aim_are_in_the_sense_of_the_program() {
        let mut two = program(&[(0.0, INF, 3.0, &[0.02]), (0.0, 50.0, 5.0, &[0.01])], &[(-INF, 2.0)]);
        two.offset = -7.5;
        let told = settled(&two, &[1.0, 1.0]).unwrap();
        // By hand: the second goes to its limit and leaves 1.5 for the first, where a unit is worth 3 / 0.02.
        assert_eq!((told.levels, told.sums, told.worths, told.aim), (vec![75.0, 50.0], vec![2.0], vec![150.0], 467.5));
        assert!(!told.degenerate && !told.ties);
    }

    #[test]
    fn what_has_no_end_no_plan_or_no_basis_is_told() {
        let endless = program(&[(0.0, INF, 1.0, &[-1.0])], &[(-INF, 2.0)]);
        assert_eq!(settled(&endless, &[1.0]), Err(Unsettled::Unbounded));
        // The aim has an end, but the second aim has none on the best plans.
        let free = program(&[(-INF, INF, 0.0, &[1.0])], &[(-INF, 2.0)]);
        assert_eq!(settled(&free, &[1.0]), Err(Unsettled::Unbounded));
        let crossed = program(&[(2.0, 1.0, 1.0, &[1.0])], &[(-INF, 2.0)]);
        assert_eq!(settled(&crossed, &[1.0]), Err(Unsettled::Infeasible));
        let twins = program(&[(0.0, 1.0, 1.0, &[1.0, 2.0]), (0.0, 1.0, 1.0, &[2.0, 4.0])], &[(0.0, 1.0), (0.0, 2.0)]);
        let both = Basis { columns: vec![Position::Basic; 2], rows: vec![Position::AtLower; 2] };
        assert_eq!(settle(&twins, &both, &[1.0, 1.0]), Err(Unsettled::Singular));
        let none = Basis { columns: vec![Position::AtLower; 2], rows: vec![Position::AtLower; 2] };
        assert_eq!(settle(&twins, &none, &[1.0, 1.0]), Err(Unsettled::Singular));
    }

    #[test]
    fn wide_rows_are_taken_as_long_as_they_fit() {
        // 0.3…4 of a million more than 1e11 takes 27 digits.
        let wide =
            program(&[(0.0, INF, 1.0, &[0.333_333_333_333_333_3]), (1.0, 1.0, 0.0, &[1e11])], &[(-INF, 1e11 + 1.0)]);
        assert_eq!(levels(&wide, &[1.0, 1.0]), [3.000_000_000_000_000_3, 1.0]);
        let wider = program(&[(0.0, INF, 1.0, &[1e15]), (1.0, 1.0, 0.0, &[1e-15])], &[(-INF, 1.0)]);
        assert_eq!(settled(&wider, &[1.0, 1.0]), Err(Unsettled::TooLarge));
    }

    #[test]
    fn programs_without_rows_or_columns_have_their_plan() {
        let rowless = program(&[(0.0, 4.0, 1.0, &[]), (-3.0, 4.0, -1.0, &[]), (-1.0, 2.0, 0.0, &[])], &[]);
        assert_eq!(levels(&rowless, &[1.0; 3]), [4.0, -3.0, -1.0]);
        let columnless = program(&[], &[(-1.0, 2.0)]);
        assert_eq!(settled(&columnless, &[]).unwrap().sums, [0.0]);
    }
}
