//! The vertex a basis stands for, recomputed by our own arithmetic.
//!
//! The solver's point carries the rounding of every pivot that led to it. The basis alone says what the point should be: what is
//! out of the basis stands at its bound, the rest follows from the rows. Iterative refinement with residuals in doubled precision
//! (Wilkinson, *Rounding Errors in Algebraic Processes*, 1963) gets there with the solver's factorisation, whatever its quality.

use super::basis::{Basis, Position};
use super::instance::{Instance, Member};
use super::live::Refusal;
use super::sum::Sum;
use crate::lp::Program;

/// The most steps of refinement; each gains some ten digits where the factorisation is good.
const STEPS: usize = 4;

/// A residual of this share of what is summed is rounding.
const END_OF_DIGITS: f64 = 4.0 * f64::EPSILON;

/// A basic solution and its multipliers, in the program's order.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Vertex {
    /// Level of each column.
    pub levels: Vec<f64>,
    /// Worth of each row: derivative of the aim by its bound.
    pub worths: Vec<f64>,
}

impl Vertex {
    /// The vertex of `basis`, which is the basis that `instance` holds; refined from the solver's own point, where it has one.
    ///
    /// # Errors
    /// When the basis cannot be factorised.
    pub fn of(instance: &mut Instance, program: &Program, basis: &Basis) -> Result<Self, Refusal> {
        let guess = solvers_point(instance);
        Self::near(instance, program, basis, guess)
    }

    /// As [`of`](Self::of), refined from a `guess`: the nearer it is, the fewer steps that takes.
    ///
    /// # Errors
    /// When the basis cannot be factorised.
    pub fn near(instance: &mut Instance, program: &Program, basis: &Basis, guess: Self) -> Result<Self, Refusal> {
        let mut vertex = guess.put_on_bounds(program, basis);
        if program.rows.is_empty() {
            return Ok(vertex);
        }
        if program.columns.is_empty() {
            // All rows stand at 0, and there is no factorisation to be had.
            vertex.worths.fill(0.0);
            return Ok(vertex);
        }
        instance.factorise()?;
        let basics = instance.basics()?;
        vertex.refine_levels(instance, program, basis, &basics)?;
        vertex.refine_worths(instance, program, &basics)?;
        Ok(vertex)
    }

    /// What is out of the basis stands exactly at its bound.
    fn put_on_bounds(mut self, program: &Program, basis: &Basis) -> Self {
        for ((level, column), &position) in self.levels.iter_mut().zip(&program.columns).zip(&basis.columns) {
            if let Some(bound) = bound_at(position, column.lower, column.upper) {
                *level = bound;
            }
        }
        self
    }

    fn refine_levels(
        &mut self,
        instance: &mut Instance,
        program: &Program,
        basis: &Basis,
        basics: &[Member],
    ) -> Result<(), Refusal> {
        let targets: Vec<Option<f64>> = program
            .rows
            .iter()
            .zip(&basis.rows)
            .map(|(row, &position)| bound_at(position, row.lower, row.upper))
            .collect();
        let scale = targets.iter().flatten().fold(0.0, |scale: f64, target| scale.max(target.abs()));
        let mut last = f64::INFINITY;
        for _ in 0..STEPS {
            let residuals = self.row_residuals(program, &targets);
            let size = largest(&residuals);
            // Refinement that no longer halves its residual has reached the end of the digits.
            if size <= END_OF_DIGITS * scale || size > last / 2.0 {
                break;
            }
            last = size;
            let steps = instance.solve(&residuals)?;
            for (member, step) in basics.iter().zip(steps) {
                if let Member::Column(column) = member {
                    self.levels[column.0] += step;
                }
            }
        }
        Ok(())
    }

    /// What each row that stands at a bound lacks of it; 0 for rows that have slack.
    fn row_residuals(&self, program: &Program, targets: &[Option<f64>]) -> Vec<f64> {
        let mut sums = vec![Sum::default(); program.rows.len()];
        for (column, &level) in program.columns.iter().zip(&self.levels) {
            for &(row, value) in &column.entries {
                sums[row.0].add_product(-value, level);
            }
        }
        let residual = |(mut sum, target): (Sum, &Option<f64>)| {
            target.map_or(0.0, |target| {
                sum.add(target);
                sum.value()
            })
        };
        sums.into_iter().zip(targets).map(residual).collect()
    }

    fn refine_worths(&mut self, instance: &mut Instance, program: &Program, basics: &[Member]) -> Result<(), Refusal> {
        for member in basics {
            if let Member::Row(row) = member {
                self.worths[row.0] = 0.0;
            }
        }
        let scale = basics.iter().fold(0.0, |scale: f64, member| match member {
            Member::Column(column) => scale.max(program.columns[column.0].aim.abs()),
            Member::Row(_) => scale,
        });
        let mut last = f64::INFINITY;
        for _ in 0..STEPS {
            let residuals: Vec<f64> = basics
                .iter()
                .map(|member| match member {
                    Member::Column(column) => self.gain(program, column.0),
                    Member::Row(_) => 0.0,
                })
                .collect();
            let size = largest(&residuals);
            if size <= END_OF_DIGITS * scale || size > last / 2.0 {
                break;
            }
            last = size;
            let steps = instance.solve_transposed(&residuals)?;
            for (worth, step) in self.worths.iter_mut().zip(steps) {
                *worth += step;
            }
            for member in basics {
                if let Member::Row(row) = member {
                    self.worths[row.0] = 0.0;
                }
            }
        }
        Ok(())
    }

    fn gain(&self, program: &Program, column: usize) -> f64 {
        let column = &program.columns[column];
        let mut gain = Sum::default();
        gain.add(column.aim);
        for &(row, value) in &column.entries {
            gain.add_product(-value, self.worths[row.0]);
        }
        gain.value()
    }
}

/// The solver's own point; 0 where it has none.
fn solvers_point(instance: &mut Instance) -> Vertex {
    let point = instance.live.point().unwrap_or_default();
    let taken = |list: &[f64], at: usize| list.get(at).copied().filter(|value| value.is_finite()).unwrap_or(0.0);
    Vertex {
        levels: instance.columns.iter().map(|&at| taken(&point.columns, at)).collect(),
        worths: instance.rows.iter().map(|&at| taken(&point.row_duals, at)).collect(),
    }
}

/// Where something out of the basis stands; `None` for what is in it.
#[must_use]
pub fn bound_at(position: Position, lower: f64, upper: f64) -> Option<f64> {
    match position {
        Position::Basic => None,
        Position::AtLower => Some(if lower.is_finite() { lower } else { 0.0 }),
        Position::AtUpper => Some(if upper.is_finite() { upper } else { 0.0 }),
        Position::AtZero => Some(0.0),
    }
}

fn largest(numbers: &[f64]) -> f64 {
    numbers.iter().fold(0.0, |largest, number| largest.max(number.abs()))
}
