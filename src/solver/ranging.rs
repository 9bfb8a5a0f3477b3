//! Ranging: how far one number can move before the basis is no longer optimal.
//!
//! The classical ratio tests on the final basis (Dantzig, *Linear Programming and Extensions*, 1963, ch. 12). They give the true
//! ranges where levels and worths are unique; under degeneracy they are too narrow and must not be shown (Jansen, de Jong, Roos &
//! Terlaky, European Journal of Operational Research 101, 1997).

use super::basis::Position;
use super::instance::{Instance, Member};
use super::live::Refusal;
use super::look::Look;
use super::message::Ranges;
use crate::lp::Program;

/// Rates smaller than this do not move anything.
const STILL: f64 = 1e-11;

/// The ranges of every column's worth in the aim and of every row's binding bound, for the optimal basis of `look`.
///
/// # Errors
/// When the solver has no factorisation.
pub fn ranges(instance: &mut Instance, program: &Program, look: &Look) -> Result<Ranges, Refusal> {
    instance.factorise()?;
    let basics = instance.basics()?;
    let mut aims: Vec<(f64, f64)> = (0..program.columns.len()).map(|at| nonbasic_aim(program, look, at)).collect();
    for (place, &basic) in basics.iter().enumerate() {
        if let Member::Column(column) = basic {
            let mut unit = vec![0.0; program.rows.len()];
            unit[place] = 1.0;
            let inverse_row = instance.solve_transposed(&unit)?;
            aims[column.0] = basic_aim(program, look, column.0, &inverse_row);
        }
    }
    let mut bounds = Vec::with_capacity(program.rows.len());
    for at in 0..program.rows.len() {
        bounds.push(row_bound(instance, program, look, &basics, at)?);
    }
    Ok(Ranges { aims, bounds })
}

/// What is out of the basis stays out until its gain changes sign.
fn nonbasic_aim(program: &Program, look: &Look, at: usize) -> (f64, f64) {
    let column = &program.columns[at];
    let least = f64::NEG_INFINITY;
    let most = f64::INFINITY;
    if column.lower >= column.upper {
        return (least, most);
    }
    let at_break = column.aim - look.checked.gains[at];
    let to_minimise = program.sense.sign() > 0.0;
    match (look.basis.columns[at], to_minimise) {
        (Position::AtLower, true) | (Position::AtUpper, false) => (at_break, most),
        (Position::AtLower, false) | (Position::AtUpper, true) => (least, at_break),
        (Position::AtZero | Position::Basic, _) => (column.aim, column.aim),
    }
}

/// What is in the basis moves the gains of all that is out of it, by its row of the tableau.
fn basic_aim(program: &Program, look: &Look, at: usize, inverse_row: &[f64]) -> (f64, f64) {
    let sign = program.sense.sign();
    let mut room = Room::default();
    for (other, column) in program.columns.iter().enumerate() {
        if look.basis.columns[other] != Position::Basic && column.lower < column.upper {
            let rate: f64 = column.entries.iter().map(|&(row, value)| value * inverse_row[row.0]).sum();
            room.keep_sign(look.basis.columns[other], sign * look.checked.gains[other], rate);
        }
    }
    for (other, row) in program.rows.iter().enumerate() {
        if look.basis.rows[other] != Position::Basic && row.lower < row.upper {
            room.keep_sign(look.basis.rows[other], sign * look.vertex.worths[other], -inverse_row[other]);
        }
    }
    let aim = program.columns[at].aim;
    if sign > 0.0 { (aim + room.down, aim + room.up) } else { (aim - room.up, aim - room.down) }
}

/// A binding bound can move until something in the basis meets a bound of its own; a slack one until it binds.
fn row_bound(
    instance: &mut Instance,
    program: &Program,
    look: &Look,
    basics: &[Member],
    at: usize,
) -> Result<(f64, f64), Refusal> {
    let row = &program.rows[at];
    let sum = look.checked.sums[at];
    let position = look.basis.rows[at];
    if position == Position::Basic {
        let upper_is_nearest = row.upper - sum <= sum - row.lower;
        return Ok(if upper_is_nearest { (sum, f64::INFINITY) } else { (f64::NEG_INFINITY, sum) });
    }
    let mut unit = vec![0.0; program.rows.len()];
    unit[at] = 1.0;
    let rates = instance.solve(&unit)?;
    let mut room = Room::default();
    for (&basic, &rate) in basics.iter().zip(&rates) {
        // The factorisation keeps a row's logical as minus its sum.
        match basic {
            Member::Column(c) => {
                let column = &program.columns[c.0];
                room.keep_within(look.vertex.levels[c.0], column.lower, column.upper, rate);
            }
            Member::Row(r) => {
                let other = &program.rows[r.0];
                room.keep_within(look.checked.sums[r.0], other.lower, other.upper, -rate);
            }
        }
    }
    let bound = if position == Position::AtUpper { row.upper } else { row.lower };
    let (mut least, mut most) = (bound + room.down, bound + room.up);
    if row.lower < row.upper {
        // One bound moves, the other stays: they must not cross.
        match position {
            Position::AtUpper => least = least.max(row.lower),
            _ => most = most.min(row.upper),
        }
    }
    Ok((least, most))
}

/// How far a number can move down (at most 0) and up (at least 0).
struct Room {
    down: f64,
    up: f64,
}

impl Default for Room {
    fn default() -> Self {
        Self { down: f64::NEG_INFINITY, up: f64::INFINITY }
    }
}

impl Room {
    /// `cost − move · rate` must keep the sign that its position asks for.
    fn keep_sign(&mut self, position: Position, cost: f64, rate: f64) {
        if rate.abs() <= STILL {
            return;
        }
        let to_zero = cost / rate;
        let blocks_up = match position {
            Position::AtLower => rate > 0.0,
            Position::AtUpper => rate < 0.0,
            Position::AtZero | Position::Basic => {
                (self.down, self.up) = (0.0, 0.0);
                return;
            }
        };
        if blocks_up { self.up = self.up.min(to_zero.max(0.0)) } else { self.down = self.down.max(to_zero.min(0.0)) }
    }

    /// `value + move · rate` must stay within the bounds.
    fn keep_within(&mut self, value: f64, lower: f64, upper: f64, rate: f64) {
        if rate.abs() <= STILL {
            return;
        }
        let (to_lower, to_upper) = ((lower - value) / rate, (upper - value) / rate);
        let (down, up) = if rate > 0.0 { (to_lower, to_upper) } else { (to_upper, to_lower) };
        self.down = self.down.max(down.min(0.0));
        self.up = self.up.min(up.max(0.0));
    }
}
