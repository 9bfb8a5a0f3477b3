//! A vertex in about twice the digits of an `f64`: for telling what is 0 from what is next to it.
//!
//! Iterative refinement with the solution itself kept in two numbers (Moler, "Iterative refinement in floating point", Journal of the ACM
//! 14, 1967; sums as in [`super::sum`]).

use super::basis::Position;
use super::instance::{Instance, Member};
use super::live::Refusal;
use super::look::Look;
use super::sum::Sum;
use super::vertex::bound_at;
use crate::lp::Program;

/// Refinement takes so many steps at most.
const STEPS: usize = 5;

/// A residual of this share of what is summed is rounding.
const END_OF_DIGITS: f64 = 1e-30;

/// A number and what it lacks.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
struct Pair {
    high: f64,
    low: f64,
}

impl Pair {
    fn add(&mut self, step: f64) {
        let sum = self.high + step;
        let part = sum - self.high;
        let low = self.low + ((self.high - (sum - part)) + (step - part));
        self.high = sum + low;
        self.low = low - (self.high - sum);
    }

    fn add_to(self, sum: &mut Sum, factor: f64) {
        sum.add_product(factor, self.high);
        sum.add_product(factor, self.low);
    }
}

/// The vertex of a basis, and how clearly each bound and gain is kept.
pub(super) struct Sharp {
    /// The aim, with its constant, rounded once.
    pub(super) aim: f64,
    /// Level of each column, rounded once.
    pub(super) levels: Vec<f64>,
    /// Worth of each row, rounded once.
    pub(super) worths: Vec<f64>,
    /// Sum of each row, rounded once.
    pub(super) sums: Vec<f64>,
    /// Gain of each column, rounded once.
    pub(super) gains: Vec<f64>,
    /// By how much each basic column and row keeps its nearer bound, and by how much each other one would lose by moving; columns first,
    /// relative to what they are summed from; below 0 where a bound is broken, or moving would gain.
    pub(super) margins: Vec<f64>,
}

impl Sharp {
    /// The vertex of `look`, whose basis `instance` holds.
    ///
    /// # Errors
    /// When the basis cannot be factorised.
    pub(super) fn of(instance: &mut Instance, program: &Program, look: &Look) -> Result<Self, Refusal> {
        let high = |list: &[f64]| list.iter().map(|&high| Pair { high, low: 0.0 }).collect();
        let mut refined = Refined { levels: high(&look.vertex.levels), worths: high(&look.vertex.worths) };
        if !program.rows.is_empty() && !program.columns.is_empty() {
            instance.factorise()?;
            let basics = instance.basics()?;
            refined.levels(instance, program, look, &basics)?;
            refined.worths(instance, program, &basics)?;
        }
        Ok(refined.told(program, look))
    }
}

struct Refined {
    levels: Vec<Pair>,
    worths: Vec<Pair>,
}

impl Refined {
    fn levels(
        &mut self,
        instance: &mut Instance,
        program: &Program,
        look: &Look,
        basics: &[Member],
    ) -> Result<(), Refusal> {
        let targets: Vec<Option<f64>> = program
            .rows
            .iter()
            .zip(&look.basis.rows)
            .map(|(row, &position)| bound_at(position, row.lower, row.upper))
            .collect();
        let mut last = f64::INFINITY;
        for _ in 0..STEPS {
            let residual = |(sum, target): (Sum, &Option<f64>)| {
                let lacks = target.map(|target| {
                    let mut lacks = Sum::default();
                    lacks.add(target);
                    lacks.take(sum);
                    lacks.value()
                });
                lacks.unwrap_or(0.0)
            };
            let residuals: Vec<f64> = self.sums(program).into_iter().zip(&targets).map(residual).collect();
            let largest = largest(residuals.iter().zip(&look.checked.sum_scales));
            if largest <= END_OF_DIGITS || largest > last / 2.0 {
                break;
            }
            last = largest;
            for (member, step) in basics.iter().zip(instance.solve(&residuals)?) {
                if let Member::Column(column) = member {
                    self.levels[column.0].add(step);
                }
            }
        }
        Ok(())
    }

    fn worths(&mut self, instance: &mut Instance, program: &Program, basics: &[Member]) -> Result<(), Refusal> {
        let slack: Vec<usize> =
            basics.iter().filter_map(|member| if let Member::Row(row) = member { Some(row.0) } else { None }).collect();
        let mut last = f64::INFINITY;
        for _ in 0..STEPS {
            slack.iter().for_each(|&row| self.worths[row] = Pair::default());
            let (mut residuals, mut scales) = (Vec::with_capacity(basics.len()), Vec::with_capacity(basics.len()));
            for member in basics {
                let (gain, scale) = match member {
                    Member::Column(column) => self.gain(program, column.0),
                    Member::Row(_) => (Sum::default(), 1.0),
                };
                residuals.push(gain.value());
                scales.push(scale);
            }
            let largest = largest(residuals.iter().zip(&scales));
            if largest <= END_OF_DIGITS || largest > last / 2.0 {
                break;
            }
            last = largest;
            for (worth, step) in self.worths.iter_mut().zip(instance.solve_transposed(&residuals)?) {
                worth.add(step);
            }
        }
        slack.iter().for_each(|&row| self.worths[row] = Pair::default());
        Ok(())
    }

    fn sums(&self, program: &Program) -> Vec<Sum> {
        let mut sums = vec![Sum::default(); program.rows.len()];
        for (column, level) in program.columns.iter().zip(&self.levels) {
            for &(row, value) in &column.entries {
                level.add_to(&mut sums[row.0], value);
            }
        }
        sums
    }

    /// The gain of a column, and the largest term of it.
    fn gain(&self, program: &Program, column: usize) -> (Sum, f64) {
        let column = &program.columns[column];
        let mut gain = Sum::default();
        gain.add(column.aim);
        let mut scale = column.aim.abs().max(1.0);
        for &(row, value) in &column.entries {
            let worth = self.worths[row.0];
            worth.add_to(&mut gain, -value);
            scale = scale.max((value * worth.high).abs());
        }
        (gain, scale)
    }

    fn told(&self, program: &Program, look: &Look) -> Sharp {
        let sign = program.sense.sign();
        let sums = self.sums(program);
        let mut gains = Vec::with_capacity(program.columns.len());
        let mut margins = Vec::with_capacity(program.columns.len() + program.rows.len());
        for (at, column) in program.columns.iter().enumerate() {
            let (gain, scale) = self.gain(program, at);
            let Pair { high, low } = self.levels[at];
            let size = high.abs().max(1.0);
            let room = [((high - column.lower) + low) / size, ((column.upper - high) - low) / size];
            let cost = sign * gain.value() / scale;
            margins.push(margin(look.basis.columns[at], room, column.lower < column.upper, cost));
            gains.push(gain.value());
        }
        for (at, row) in program.rows.iter().enumerate() {
            let scale = look.checked.sum_scales[at].max(1.0);
            let room = [(row.lower, 1.0), (row.upper, -1.0)].map(|(bound, side)| {
                let mut room = sums[at];
                room.add(-bound);
                if bound.is_finite() { side * room.value() / scale } else { f64::INFINITY }
            });
            margins.push(margin(look.basis.rows[at], room, row.lower < row.upper, sign * self.worths[at].high));
        }
        let mut aim = Sum::default();
        aim.add(program.offset);
        program.columns.iter().zip(&self.levels).for_each(|(column, level)| level.add_to(&mut aim, column.aim));
        Sharp {
            aim: aim.value(),
            levels: self.levels.iter().map(|level| level.high + 0.0).collect(),
            worths: self.worths.iter().map(|worth| worth.high + 0.0).collect(),
            sums: sums.into_iter().map(Sum::value).collect(),
            gains,
            margins,
        }
    }
}

/// `cost` is what an aim to be made small would lose by a rise of one.
fn margin(position: Position, room: [f64; 2], moves: bool, cost: f64) -> f64 {
    match position {
        Position::Basic => room[0].min(room[1]),
        _ if !moves => f64::INFINITY,
        Position::AtLower => cost,
        Position::AtUpper => -cost,
        Position::AtZero => -cost.abs(),
    }
}

fn largest<'a>(residuals: impl Iterator<Item = (&'a f64, &'a f64)>) -> f64 {
    residuals.fold(0.0, |largest, (residual, scale)| largest.max(residual.abs() / scale.max(1.0)))
}

#[cfg(test)]
#[expect(clippy::float_cmp, reason = "what is tested is that nothing is lost")]
mod tests {
    use super::Pair;

    #[test]
    fn a_pair_keeps_what_one_number_would_lose() {
        let mut pair = Pair { high: 1.0, low: 0.0 };
        pair.add(1e-20);
        pair.add(1e-9);
        pair.add(-1.0);
        assert_eq!(pair.high, 1e-9 + 1e-20);
        pair.add(-1e-9);
        assert!((pair.high - 1e-20).abs() < 1e-24, "{pair:?}");
    }
}
