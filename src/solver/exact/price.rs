//! Reduced costs: what a variable out of the basis would add to what is to be made small, per unit of its level.

use std::cmp::Ordering;

use dashu_int::IBig;

use super::Unsettled;
use super::fractions::Fractions;
use super::vertex::Vertex;
use super::whole::{Costs, Variable, Whole};
use crate::solver::basis::Position;

/// Rounding of a sum of products of rounded numbers, per term and relative to the sum of their sizes, generously.
const ROUNDING: f64 = 4.0 * f64::EPSILON;

/// More than all that underflow can take away.
const UNDERFLOW: f64 = 1e-200;

/// Reduced costs at a vertex.
#[derive(Debug)]
pub(super) struct Prices<'c> {
    costs: &'c Costs,
    /// Of the rows, in units of one over the unit of the costs.
    pub(super) multipliers: Fractions,
    rough: Vec<f64>,
}

impl<'c> Prices<'c> {
    /// The reduced costs at `vertex`.
    ///
    /// # Errors
    /// When the budget does not suffice.
    pub(super) fn of(vertex: &mut Vertex<'_>, costs: &'c Costs) -> Result<Self, Unsettled> {
        let multipliers = vertex.multipliers(costs)?;
        let rough = multipliers.nearest(&IBig::ONE);
        Ok(Self { costs, multipliers, rough })
    }

    /// The reduced cost of a variable, times the denominator of the multipliers.
    pub(super) fn exact(&self, whole: &Whole, variable: Variable) -> IBig {
        let cost = &self.costs.of[variable.0] * &self.multipliers.denominator;
        cost - combine(whole, variable, &self.multipliers)
    }

    /// The sign of the reduced cost of a variable, and about its size.
    ///
    /// Decided in floating point where rounding cannot have turned the sign.
    pub(super) fn sign(&self, whole: &Whole, variable: Variable) -> (Ordering, f64) {
        let mut price = self.costs.rough[variable.0];
        let mut size = price.abs();
        let entries = whole.entries(variable);
        for &(row, entry) in entries {
            #[expect(clippy::cast_precision_loss, reason = "its rounding is reckoned with")]
            let product = entry as f64 * self.rough[row];
            price -= product;
            size += product.abs();
        }
        #[expect(clippy::cast_precision_loss, reason = "a small count")]
        let slip = ROUNDING * (entries.len() + 2) as f64 * size + UNDERFLOW;
        // Not so where either is infinite or no number.
        if price.abs() > slip {
            return (price.total_cmp(&0.0), price.abs());
        }
        (self.exact(whole, variable).cmp(&IBig::ZERO), price.abs())
    }
}

/// A combination of rows at a variable, times the denominator of the multipliers.
pub(super) fn combine(whole: &Whole, variable: Variable, multipliers: &Fractions) -> IBig {
    let products = whole.entries(variable).iter().filter(|&&(row, _)| !multipliers.numerators[row].is_zero());
    products.map(|&(row, entry)| &multipliers.numerators[row] * IBig::from(entry)).sum()
}

/// Whether a variable that stands there improves what is to be made small by leaving its place; if so whether by rising.
pub(super) fn improves(position: Position, price: Ordering) -> Option<bool> {
    match (position, price) {
        (Position::AtLower | Position::AtZero, Ordering::Less) => Some(true),
        (Position::AtUpper | Position::AtZero, Ordering::Greater) => Some(false),
        _ => None,
    }
}
