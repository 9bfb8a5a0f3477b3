//! Primal simplex in exact arithmetic: from a feasible vertex to the best one.
//!
//! The variable with the largest reduced cost enters. After some pivots in a row that move nothing, the first one that improves
//! enters and the first one that blocks leaves until something moves, which cannot cycle (Bland, *Mathematics of Operations Research* 2,
//! 1977, 103–107).

use std::cmp::Ordering;

use dashu_int::IBig;
use dashu_int::ops::Abs;

use super::Unsettled;
use super::fractions::Fractions;
use super::price::{Prices, improves};
use super::vertex::{Side, Swap, Vertex};
use super::whole::{Costs, Variable};
use crate::solver::basis::Position;

/// So many pivots in a row may move nothing before the first variable is taken rather than the best.
pub(super) const PATIENCE: usize = 12;

/// Makes a cost as small as it gets without moving what is held; the last reduced costs.
///
/// # Errors
/// When there is no least, or the budget does not suffice.
pub(super) fn minimise<'c>(vertex: &mut Vertex<'_>, costs: &'c Costs, held: &[bool]) -> Result<Prices<'c>, Unsettled> {
    let mut still = 0;
    loop {
        let prices = Prices::of(vertex, costs)?;
        let Some((entrant, rises)) = entrant(vertex, &prices, held, still >= PATIENCE) else { return Ok(prices) };
        let column = vertex.column(entrant)?;
        still = if step(vertex, entrant, rises, &column)? { 0 } else { still + 1 };
    }
}

/// Of the plans that are left, takes the one with the least level of the first column, then of the second, and so on.
///
/// # Errors
/// When there is no least, or the budget does not suffice.
pub(super) fn lowest(vertex: &mut Vertex<'_>, held: &[bool]) -> Result<(), Unsettled> {
    'pivots: loop {
        let free: Vec<Variable> = vertex.nonbasics().filter(|variable| !held[variable.0]).collect();
        for entrant in free {
            let column = vertex.column(entrant)?;
            let first = first_moved(vertex, entrant, &column);
            if let Some(rises) = improves(vertex.position(entrant), first) {
                step(vertex, entrant, rises, &column)?;
                continue 'pivots;
            }
        }
        return Ok(());
    }
}

/// Whether the first column that moves as `entrant` rises goes up or down.
fn first_moved(vertex: &Vertex<'_>, entrant: Variable, column: &Fractions) -> Ordering {
    let moved = vertex.basics.iter().zip(&column.numerators).filter(|(_, rate)| !rate.is_zero());
    let moved = moved.map(|(&basic, rate)| (basic, IBig::ZERO.cmp(rate)));
    let first = moved.chain([(entrant, Ordering::Greater)]).min_by_key(|&(variable, _)| variable);
    first.map_or(Ordering::Equal, |(_, direction)| direction)
}

/// The variable to enter, and whether it rises.
fn entrant(vertex: &Vertex<'_>, prices: &Prices<'_>, held: &[bool], first: bool) -> Option<(Variable, bool)> {
    let mut best: Option<(f64, Variable, bool)> = None;
    for variable in vertex.nonbasics().filter(|variable| !held[variable.0]) {
        let (sign, size) = prices.sign(vertex.whole, variable);
        let Some(rises) = improves(vertex.position(variable), sign) else { continue };
        if first {
            return Some((variable, rises));
        }
        if best.is_none_or(|(largest, ..)| size > largest) {
            best = Some((size, variable, rises));
        }
    }
    best.map(|(_, variable, rises)| (variable, rises))
}

/// What ends a move: the slot of a basic variable that meets a bound, or `None` for the entrant meeting its other bound; and how far
/// that is, as a fraction in the same unit for all.
struct Block {
    slot: Option<(usize, Side)>,
    variable: Variable,
    distance: IBig,
    rate: IBig,
}

impl Block {
    fn is_before(&self, other: &Self) -> bool {
        let order = (&self.distance * &other.rate).cmp(&(&other.distance * &self.rate));
        order.then(self.variable.cmp(&other.variable)).is_lt()
    }
}

/// Moves `entrant` as far as it goes; whether anything moved.
fn step(vertex: &mut Vertex<'_>, entrant: Variable, rises: bool, column: &Fractions) -> Result<bool, Unsettled> {
    let own = own_block(vertex, entrant, column);
    let blocks = column.numerators.iter().enumerate().filter_map(|(slot, rate)| {
        let side = match (rate.cmp(&IBig::ZERO), rises) {
            (Ordering::Equal, _) => return None,
            (Ordering::Greater, true) | (Ordering::Less, false) => Side::Lower,
            _ => Side::Upper,
        };
        let distance = vertex.room(slot, side)?;
        Some(Block { slot: Some((slot, side)), variable: vertex.basics[slot], distance, rate: rate.abs() })
    });
    let block = own.into_iter().chain(blocks).reduce(|a, b| if b.is_before(&a) { b } else { a });
    let Block { slot, distance, rate, .. } = block.ok_or(Unsettled::Unbounded)?;
    let moved = !distance.is_zero();
    match slot {
        Some((slot, side)) => vertex.swap(Swap { slot, side, entrant, pivot: rate, still: !moved })?,
        None => vertex.put(entrant, if rises { Side::Upper } else { Side::Lower })?,
    }
    Ok(moved)
}

/// The entrant's own other bound.
fn own_block(vertex: &Vertex<'_>, entrant: Variable, column: &Fractions) -> Option<Block> {
    if vertex.position(entrant) == Position::AtZero {
        return None;
    }
    let bounds = vertex.whole.bounds(entrant);
    let width = bounds.upper.as_ref()? - bounds.lower.as_ref()?;
    // Distances of basic variables are in units of one over the denominator of the levels, rates of one over that of the column.
    let distance = width * &vertex.levels.denominator;
    Some(Block { slot: None, variable: entrant, distance, rate: column.denominator.clone() })
}
