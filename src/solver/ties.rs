//! Whether the levels, or the worths, of an optimal basis are the only optimal ones.

use super::basis::Position;
use super::cold;
use super::live::{Ending, Refusal};
use super::look::Look;
use super::proof::TOLERANCE;
use super::stop::Stop;
use crate::lp::{Program, Sense};

/// Whether no basic column or row stands at a bound of its own: then the worths are unique.
#[must_use]
pub fn worths_unique(program: &Program, look: &Look) -> bool {
    let Look { basis, vertex, checked, .. } = look;
    let column_at_bound = program
        .columns
        .iter()
        .enumerate()
        .any(|(at, column)| at_bound(basis.columns[at], vertex.levels[at], 0.0, column.lower, column.upper));
    let row_at_bound = program
        .rows
        .iter()
        .enumerate()
        .any(|(at, row)| at_bound(basis.rows[at], checked.sums[at], checked.sum_scales[at], row.lower, row.upper));
    !column_at_bound && !row_at_bound
}

fn at_bound(position: Position, value: f64, scale: f64, lower: f64, upper: f64) -> bool {
    let near = TOLERANCE * value.abs().max(scale).max(1.0);
    position == Position::Basic && ((value - lower).abs() <= near || (upper - value).abs() <= near)
}

/// Whether no other levels earn as much.
///
/// Where everything out of the basis would lose, they are the only ones. Where something out of the basis could move at no loss,
/// and nothing in it stands at a bound, it can. Otherwise a small program on the optimal face decides: move what is free to move
/// as far as it goes.
///
/// # Errors
/// When the solver refuses that program.
pub fn levels_unique(program: &Program, look: &Look, worths_unique: bool) -> Result<bool, Refusal> {
    let face = Face::of(program, look);
    if face.movers == 0 {
        return Ok(true);
    }
    if worths_unique {
        return Ok(false);
    }
    let mut instance = cold::ready(&face.program)?;
    instance.set_basis(&look.basis)?;
    instance.live.set("simplex_strategy", 4)?;
    let ending = instance.live.run(&Stop::default());
    if ending != Ending::Optimal {
        return Ok(false);
    }
    let moved = Look::at(&mut instance, &face.program)?;
    let reach: f64 = moved.checked.aim - face.start;
    Ok(reach <= 1e3 * TOLERANCE * face.start.abs().max(1.0))
}

/// The optimal face: what has a gain or a worth is held where it is; the aim is to move the rest.
struct Face {
    program: Program,
    /// How many columns and rows out of the basis could move at no loss.
    movers: usize,
    /// The moving aim at the vertex.
    start: f64,
}

impl Face {
    fn of(program: &Program, look: &Look) -> Self {
        let mut face = program.clone();
        face.sense = Sense::Maximise;
        face.offset = 0.0;
        let mut movers = 0;
        let mut start = 0.0;
        let mut row_aims = vec![0.0; program.rows.len()];
        for (at, row) in face.rows.iter_mut().enumerate() {
            match stance(look.basis.rows[at], row.lower, row.upper, look.vertex.worths[at], 1.0) {
                Stance::Basic => {}
                Stance::Held => {
                    let bound = if look.basis.rows[at] == Position::AtUpper { row.upper } else { row.lower };
                    (row.lower, row.upper) = (bound, bound);
                }
                Stance::Mover(direction) => {
                    movers += 1;
                    row_aims[at] = direction;
                    start += direction * look.checked.sums[at];
                }
            }
        }
        for (at, column) in face.columns.iter_mut().enumerate() {
            let scale = look.checked.gain_scales[at];
            column.aim = column.entries.iter().map(|&(row, value)| row_aims[row.0] * value).sum();
            match stance(look.basis.columns[at], column.lower, column.upper, look.checked.gains[at], scale) {
                Stance::Basic => {}
                Stance::Held => {
                    let level = look.vertex.levels[at];
                    (column.lower, column.upper) = (level, level);
                }
                Stance::Mover(direction) => {
                    movers += 1;
                    column.aim += direction;
                    start += direction * look.vertex.levels[at];
                }
            }
        }
        Self { program: face, movers, start }
    }
}

enum Stance {
    Basic,
    Held,
    /// Could move at no loss; the way it would go.
    Mover(f64),
}

fn stance(position: Position, lower: f64, upper: f64, multiplier: f64, scale: f64) -> Stance {
    if position == Position::Basic {
        return Stance::Basic;
    }
    if lower >= upper || multiplier.abs() > TOLERANCE * scale.max(1.0) {
        return Stance::Held;
    }
    Stance::Mover(if position == Position::AtUpper { -1.0 } else { 1.0 })
}
