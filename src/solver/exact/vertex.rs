//! The vertex of a basis, exactly: where every variable stands.

use dashu_int::IBig;

use super::Unsettled;
use super::fractions::Fractions;
use super::lift::{Matrix, Turn};
use super::whole::{Bounds, Costs, Variable, Whole};
use crate::solver::basis::Position;

/// Which of its bounds a variable meets.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Side {
    Lower,
    Upper,
}

impl Side {
    /// Where a variable stands that has left the basis at this bound.
    pub(super) fn position(self) -> Position {
        match self {
            Self::Lower => Position::AtLower,
            Self::Upper => Position::AtUpper,
        }
    }
}

/// A change of basis.
#[derive(Debug)]
pub(super) struct Swap {
    /// The slot of the variable that leaves, and the bound that it leaves to.
    pub(super) slot: usize,
    pub(super) side: Side,
    pub(super) entrant: Variable,
    /// The numerator of the pivot, not negative. The new determinant is the pivot times the old one, and the pivot's denominator is most
    /// of the old one: so the numerator is most of the new one.
    pub(super) pivot: IBig,
    /// Whether nothing moves.
    pub(super) still: bool,
}

/// What may still be spent.
#[derive(Clone, Copy, Debug)]
pub(super) struct Budget {
    /// Exact pivots.
    pub(super) pivots: usize,
    /// Entries looked at in solving.
    pub(super) work: u64,
}

/// A basis of a program with its exact vertex.
#[derive(Debug)]
pub(super) struct Vertex<'p> {
    pub(super) whole: &'p Whole,
    /// Where each variable stands.
    pub(super) positions: Vec<Position>,
    /// The variables in the basis.
    pub(super) basics: Vec<Variable>,
    /// Their values, in the program's common unit.
    pub(super) levels: Fractions,
    matrix: Matrix<'p>,
    pub(super) budget: Budget,
}

impl<'p> Vertex<'p> {
    /// The vertex of a basis with as many basic variables as there are rows.
    ///
    /// # Errors
    /// When the basis is singular, or the budget does not suffice.
    pub(super) fn of(
        whole: &'p Whole,
        positions: impl Iterator<Item = Position>,
        budget: Budget,
    ) -> Result<Self, Unsettled> {
        let positions: Vec<Position> =
            positions.zip(&whole.bounds).map(|(position, bounds)| seat(position, bounds)).collect();
        let basics: Vec<Variable> =
            whole.variables().filter(|variable| positions[variable.0] == Position::Basic).collect();
        let matrix = matrix(whole, &basics, IBig::ONE)?;
        let levels = Fractions::zeros(basics.len());
        let mut vertex = Self { whole, positions, basics, levels, matrix, budget };
        vertex.measure()?;
        Ok(vertex)
    }

    pub(super) fn position(&self, variable: Variable) -> Position {
        self.positions[variable.0]
    }

    /// Variables out of the basis.
    pub(super) fn nonbasics(&self) -> impl Iterator<Item = Variable> {
        self.whole.variables().filter(|&variable| self.position(variable) != Position::Basic)
    }

    /// The value of a variable out of the basis; `None` for 0.
    pub(super) fn stand(&self, variable: Variable) -> Option<&'p IBig> {
        let bounds = &self.whole.bounds[variable.0];
        match self.position(variable) {
            Position::AtLower => bounds.lower.as_ref(),
            Position::AtUpper => bounds.upper.as_ref(),
            Position::AtZero | Position::Basic => None,
        }
    }

    /// How far a basic variable is above its lower bound or below its upper one (negative where it breaks it), in units of
    /// one over the denominator of the levels; `None` where there is no such bound.
    pub(super) fn room(&self, slot: usize, side: Side) -> Option<IBig> {
        let bounds = self.whole.bounds(self.basics[slot]);
        let level = &self.levels.numerators[slot];
        match side {
            Side::Lower => bounds.lower.as_ref().map(|lower| level - lower * &self.levels.denominator),
            Side::Upper => bounds.upper.as_ref().map(|upper| upper * &self.levels.denominator - level),
        }
    }

    /// By how much each basic variable falls as `variable` rises by one.
    pub(super) fn column(&mut self, variable: Variable) -> Result<Fractions, Unsettled> {
        let mut right = vec![IBig::ZERO; self.basics.len()];
        for &(row, entry) in self.whole.entries(variable) {
            right[row] = entry.into();
        }
        self.matrix.solve(right, Turn::Plain, &mut self.budget.work)
    }

    /// The multipliers of the rows that make the costs of all basic variables vanish.
    pub(super) fn multipliers(&mut self, costs: &Costs) -> Result<Fractions, Unsettled> {
        let right = self.basics.iter().map(|basic| costs.of[basic.0].clone()).collect();
        self.matrix.solve(right, Turn::Transposed, &mut self.budget.work)
    }

    /// The multipliers of the rows that leave a basic variable alone in their combination.
    pub(super) fn row(&mut self, slot: usize) -> Result<Fractions, Unsettled> {
        let mut right = vec![IBig::ZERO; self.basics.len()];
        right[slot] = IBig::ONE;
        self.matrix.solve(right, Turn::Transposed, &mut self.budget.work)
    }

    /// Puts a variable that is out of the basis at one of its bounds.
    pub(super) fn put(&mut self, variable: Variable, side: Side) -> Result<(), Unsettled> {
        self.count()?;
        self.positions[variable.0] = side.position();
        self.measure()
    }

    /// Takes a variable into the basis in place of another.
    pub(super) fn swap(&mut self, swap: Swap) -> Result<(), Unsettled> {
        self.count()?;
        let Swap { slot, side, entrant, .. } = swap;
        let level = self.stand(entrant).map_or(IBig::ZERO, |stand| stand * &self.levels.denominator);
        self.positions[self.basics[slot].0] = side.position();
        self.positions[entrant.0] = Position::Basic;
        self.basics[slot] = entrant;
        self.matrix = matrix(self.whole, &self.basics, swap.pivot)?;
        if swap.still {
            self.levels.numerators[slot] = level;
            return Ok(());
        }
        self.measure()
    }

    fn count(&mut self) -> Result<(), Unsettled> {
        self.budget.pivots = self.budget.pivots.checked_sub(1).ok_or(Unsettled::OutOfPivots)?;
        Ok(())
    }

    /// Works the basic variables out from where the others stand.
    fn measure(&mut self) -> Result<(), Unsettled> {
        let mut right = vec![IBig::ZERO; self.basics.len()];
        for variable in self.nonbasics() {
            if let Some(stand) = self.stand(variable).filter(|stand| !stand.is_zero()) {
                for &(row, entry) in self.whole.entries(variable) {
                    right[row] -= stand * IBig::from(entry);
                }
            }
        }
        self.levels = self.matrix.solve(right, Turn::Plain, &mut self.budget.work)?;
        Ok(())
    }
}

fn matrix<'p>(whole: &'p Whole, basics: &[Variable], divisor: IBig) -> Result<Matrix<'p>, Unsettled> {
    Matrix::of(basics.iter().map(|&basic| whole.entries(basic)).collect(), divisor)
}

/// Where a variable stands that a basis puts at a bound: at that bound, or where it is infinite at the other, or else at 0.
fn seat(position: Position, bounds: &Bounds) -> Position {
    match (position, &bounds.lower, &bounds.upper) {
        (Position::Basic, ..) => Position::Basic,
        (Position::AtUpper, _, Some(_)) | (_, None, Some(_)) => Position::AtUpper,
        (_, Some(_), _) => Position::AtLower,
        (_, None, None) => Position::AtZero,
    }
}
