//! The one plan where levels without a least or a most leave the second aim without a least: there they count by their size.
//!
//! A level free both ways is parted into what it is above 0 and what it is below, both of its weight.

use super::basis::{Basis, Position};
use super::exact::{self, Settled, Unsettled};
use super::look::Look;
use crate::lp::{Column, Program};

/// The plan that is best for the program's aim and, among those, has the least sum of weight times level, a free one by its size.
///
/// # Errors
/// When exact arithmetic cannot tell.
pub(super) fn settle(program: &Program, look: &Look, weights: &[f64]) -> Result<Settled, Unsettled> {
    let free: Vec<usize> = (0..program.columns.len()).filter(|&at| is_free(&program.columns[at])).collect();
    let (parted, mut weights) = (parted(program, &free), weights.to_vec());
    weights.extend(free.iter().map(|&at| weights[at]).collect::<Vec<_>>());
    let from = start(look, &free);
    exact::settle(&parted, &from, &weights).map(|settled| joined(settled, program.columns.len(), &free))
}

/// Whether a level has neither a least nor a most.
pub(super) fn is_free(column: &Column) -> bool {
    column.lower.is_infinite() && column.upper.is_infinite()
}

/// The program with what each free level is above 0 in its place, and what it is below 0 after all others.
fn parted(program: &Program, free: &[usize]) -> Program {
    let mut parted = program.clone();
    for &at in free {
        let above = &mut parted.columns[at];
        above.lower = 0.0;
        let entries = above.entries.iter().map(|&(row, value)| (row, -value)).collect();
        let below = Column { aim: -above.aim, entries, ..above.clone() };
        parted.columns.push(below);
    }
    parted
}

fn start(look: &Look, free: &[usize]) -> Basis {
    let mut start = look.basis.clone();
    for &at in free {
        let below = start.columns[at] == Position::Basic && look.vertex.levels[at] < 0.0;
        let above = start.columns[at] == Position::Basic && !below;
        let stands = |basic: bool| if basic { Position::Basic } else { Position::AtLower };
        start.columns[at] = stands(above);
        start.columns.push(stands(below));
    }
    start
}

/// The same plan in the program's own columns. Both parts of a level are never in the basis: they depend on each other.
fn joined(mut settled: Settled, columns: usize, free: &[usize]) -> Settled {
    let below_levels = settled.levels.split_off(columns);
    let below = settled.basis.columns.split_off(columns);
    for ((&at, level), position) in free.iter().zip(below_levels).zip(below) {
        settled.levels[at] -= level;
        let basic = [position, settled.basis.columns[at]].contains(&Position::Basic);
        settled.basis.columns[at] = if basic { Position::Basic } else { Position::AtZero };
    }
    settled
}
