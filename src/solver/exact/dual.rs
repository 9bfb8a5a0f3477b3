//! Dual simplex in exact arithmetic: from any vertex to one that keeps all bounds.
//!
//! Where a reduced cost has the wrong sign, the cost is shifted until it has not; primal simplex with the true costs follows. A start
//! that breaks bounds by a hair and is otherwise optimal is mended in about as many pivots as it breaks bounds. After some pivots in a row
//! without progress, the first variables that qualify are taken (Bland 1977, for the dual program).

use std::cmp::Ordering;

use dashu_int::IBig;
use dashu_int::ops::{Abs, DivRem};

use super::Unsettled;
use super::price::{Prices, combine, improves};
use super::primal::PATIENCE;
use super::vertex::{Side, Swap, Vertex};
use super::whole::{Costs, Variable};
use crate::model::decimal::nearest;
use crate::solver::basis::Position;

/// Pivots until the vertex keeps all bounds.
///
/// # Errors
/// When nothing does, or the budget does not suffice.
pub(super) fn restore(vertex: &mut Vertex<'_>, aim: &Costs) -> Result<(), Unsettled> {
    let mut costs = aim.clone();
    let mut still = 0;
    while let Some((slot, side)) = leaving(vertex, still >= PATIENCE) {
        let prices = feasible(vertex, &mut costs)?;
        let row = vertex.row(slot)?;
        let rates = |variable| combine(vertex.whole, variable, &row);
        // The variable rises to its lower bound or falls to its upper one. It falls by the rate as another rises by one.
        let wanted = if side == Side::Lower { Ordering::Less } else { Ordering::Greater };
        let entrants = vertex.nonbasics().filter_map(|variable| {
            let rate = rates(variable);
            let helps = match vertex.position(variable) {
                _ if vertex.whole.bounds(variable).fixed() => false,
                Position::AtLower => rate.cmp(&IBig::ZERO) == wanted,
                Position::AtUpper => IBig::ZERO.cmp(&rate) == wanted,
                Position::AtZero => !rate.is_zero(),
                Position::Basic => false,
            };
            helps.then(|| Entrant { variable, price: prices[variable.0].clone().abs(), rate: rate.abs() })
        });
        let entrant = entrants.reduce(|a, b| if b.is_before(&a) { b } else { a }).ok_or(Unsettled::Infeasible)?;
        still = if entrant.price.is_zero() { still + 1 } else { 0 };
        vertex.swap(Swap { slot, side, entrant: entrant.variable, pivot: entrant.rate, still: false })?;
    }
    Ok(())
}

/// A variable that may enter, with the sizes of its reduced cost and of its rate.
struct Entrant {
    variable: Variable,
    price: IBig,
    rate: IBig,
}

impl Entrant {
    /// Whether its reduced cost vanishes first. Variables come in order, so that the first of several goes ahead.
    fn is_before(&self, other: &Self) -> bool {
        &self.price * &other.rate < &other.price * &self.rate
    }
}

/// The slot of a basic variable that breaks a bound: the one that breaks it by most, or the first of all.
fn leaving(vertex: &Vertex<'_>, first: bool) -> Option<(usize, Side)> {
    let broken = (0..vertex.basics.len()).flat_map(|slot| {
        [Side::Lower, Side::Upper].into_iter().filter_map(move |side| {
            let room = vertex.room(slot, side)?;
            (room < IBig::ZERO).then_some((slot, side, room))
        })
    });
    let broken = if first {
        broken.min_by_key(|&(slot, ..)| vertex.basics[slot])
    } else {
        broken.min_by(|a, b| a.2.cmp(&b.2).then(vertex.basics[a.0].cmp(&vertex.basics[b.0])))
    };
    broken.map(|(slot, side, _)| (slot, side))
}

/// The reduced costs of all variables (0 in the basis), times a denominator; costs are shifted until none has the wrong sign, free
/// variables aside. They enter at the first chance and never leave again.
fn feasible(vertex: &mut Vertex<'_>, costs: &mut Costs) -> Result<Vec<IBig>, Unsettled> {
    let mut list = vec![IBig::ZERO; vertex.whole.len()];
    let prices = Prices::of(vertex, costs)?;
    let denominator = prices.multipliers.denominator.clone();
    for variable in vertex.nonbasics() {
        list[variable.0] = prices.exact(vertex.whole, variable);
    }
    for variable in vertex.nonbasics().filter(|&variable| !vertex.whole.bounds(variable).fixed()) {
        let price = &mut list[variable.0];
        match improves(vertex.position(variable), (*price).cmp(&IBig::ZERO)) {
            None => {}
            Some(_) if vertex.position(variable) == Position::AtZero => *price = IBig::ZERO,
            Some(rises) => {
                let (least, rest) = price.clone().abs().div_rem(&denominator);
                let shift = least + IBig::from(!rest.is_zero());
                let shift = if rises { shift } else { -shift };
                *price += &shift * &denominator;
                costs.of[variable.0] += shift;
            }
        }
    }
    // The rough costs follow.
    costs.rough = costs.of.iter().map(|cost| nearest(cost, &IBig::ONE)).collect();
    Ok(list)
}
