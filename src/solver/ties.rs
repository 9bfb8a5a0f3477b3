//! Whether the levels, or the worths, of an optimal basis are the only optimal ones.

use super::basis::Position;
use super::cold;
use super::findings::Ending;
use super::instance::{Instance, Member};
use super::live::Refusal;
use super::look::Look;
use super::proof::TOLERANCE;
use super::stop::Stop;
use super::swap::{self, Entrant};
use crate::lp::{ColumnIndex, Program, RowIndex, Sense};

/// So many ratio tests are tried before a program on the optimal face is.
const PROBES: usize = 16;

/// A move smaller than this, relative to what moves, is none.
const MOVES: f64 = 1e-6;

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
/// Where everything out of the basis would lose, they are the only ones. Where something out of the basis can move at no loss, they
/// are not: a ratio test for each of a few tells. Otherwise a small program on the optimal face decides: move what is free to move
/// as far as it goes.
///
/// # Errors
/// When the solver refuses.
pub fn levels_unique(instance: &mut Instance, program: &Program, look: &Look) -> Result<bool, Refusal> {
    let movers = movers(program, look);
    if movers.is_empty() {
        return Ok(true);
    }
    instance.factorise()?;
    let basics = instance.basics()?;
    for &entrant in movers.iter().take(PROBES) {
        let size = entrant.value.abs().max(1.0);
        if swap::reach(instance, program, look, &basics, entrant)? > MOVES * size {
            return Ok(false);
        }
    }
    stuck(program, look, &movers)
}

/// What is out of the basis and could move at no loss, as far as its gain or worth tells.
fn movers(program: &Program, look: &Look) -> Vec<Entrant> {
    let Look { basis, vertex, checked, .. } = look;
    let columns = program.columns.iter().enumerate().filter_map(|(at, column)| {
        let multiplier = checked.gains[at] / checked.gain_scales[at].max(1.0);
        let member = Member::Column(ColumnIndex(at));
        mover(member, basis.columns[at], vertex.levels[at], (column.lower, column.upper), multiplier)
    });
    let rows = program.rows.iter().enumerate().filter_map(|(at, row)| {
        mover(Member::Row(RowIndex(at)), basis.rows[at], checked.sums[at], (row.lower, row.upper), vertex.worths[at])
    });
    columns.chain(rows).collect()
}

fn mover(member: Member, position: Position, value: f64, bounds: (f64, f64), multiplier: f64) -> Option<Entrant> {
    let (lower, upper) = bounds;
    let free = position != Position::Basic && lower < upper && multiplier.abs() <= TOLERANCE;
    free.then_some(Entrant { member, value, lower, upper, rises: position != Position::AtUpper })
}

/// Whether nothing moves on the optimal face. What has a gain or a worth is held where it is; the aim is to move the movers.
fn stuck(program: &Program, look: &Look, movers: &[Entrant]) -> Result<bool, Refusal> {
    let mut instance = cold::ready(&face(program, look, movers))?;
    instance.set_basis(&look.basis)?;
    instance.live.set("simplex_strategy", 4)?;
    if instance.live.run(&Stop::default()) != Ending::Optimal {
        // It has a point, the vertex: what it lacks is an end.
        return Ok(false);
    }
    let point = instance.live.point()?;
    let moved = |entrant: &Entrant| {
        let (before, after) = match entrant.member {
            Member::Column(column) => (entrant.value, point.columns[column.0]),
            Member::Row(row) => (entrant.value, point.rows[row.0]),
        };
        (after - before).abs() > MOVES * before.abs().max(1.0)
    };
    Ok(!movers.iter().any(moved))
}

fn face(program: &Program, look: &Look, movers: &[Entrant]) -> Program {
    let mut face = program.clone();
    face.sense = Sense::Maximise;
    face.offset = 0.0;
    let mut row_aims = vec![0.0; program.rows.len()];
    let mut column_aims = vec![0.0; program.columns.len()];
    for entrant in movers {
        let direction = if entrant.rises { 1.0 } else { -1.0 };
        match entrant.member {
            Member::Column(column) => column_aims[column.0] = direction,
            Member::Row(row) => row_aims[row.0] = direction,
        }
    }
    for (at, row) in face.rows.iter_mut().enumerate() {
        if look.basis.rows[at] != Position::Basic && row_aims[at] == 0.0 {
            let bound = if look.basis.rows[at] == Position::AtUpper { row.upper } else { row.lower };
            (row.lower, row.upper) = (bound, bound);
        }
    }
    for (at, column) in face.columns.iter_mut().enumerate() {
        let by_rows: f64 = column.entries.iter().map(|&(row, value)| row_aims[row.0] * value).sum();
        if look.basis.columns[at] != Position::Basic && column_aims[at] == 0.0 {
            let level = look.vertex.levels[at];
            (column.lower, column.upper) = (level, level);
        }
        column.aim = column_aims[at] + by_rows;
    }
    face
}
