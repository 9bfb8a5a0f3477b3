//! The one plan of a program: of those that earn the most, the one of least weight, whatever way led to it.
//!
//! Floating point walks there; what is too close to call there is decided in exact arithmetic on the decimals as they are written.

use super::basis::Position;
use super::exact::{self, Settled};
use super::face::{End, Face};
use super::instance::Instance;
use super::live::Refusal;
use super::look::Look;
use super::proof::{self, Checked};
use super::stop::Stop;
use super::vertex::Vertex;
use super::weight::weights;
use crate::lp::Program;

/// What is farther from 0, relative to what it is summed from, has the sign that it shows.
const CLEAR: f64 = 1e-6;

/// The one plan, and how surely it is that.
#[derive(Clone, Debug)]
pub struct Canonical {
    /// Its basis and vertex, proven.
    pub look: Look,
    /// Whether nothing was decided by a tolerance.
    pub exact: bool,
    /// Whether something out of the basis may move at no loss.
    pub may_tie: bool,
    /// Exact pivots it took.
    pub pivots: usize,
}

/// From an optimal basis, which `instance` holds, to the one plan; `instance` holds its basis afterwards.
///
/// # Errors
/// When the solver refuses a basis or a program.
pub fn of(instance: &mut Instance, program: &Program, look: Look, stop: &Stop) -> Result<Canonical, Refusal> {
    if is_clear(program, &look) {
        return Ok(Canonical { look, exact: true, may_tie: false, pivots: 0 });
    }
    let weights = weights(program);
    let look = walk(instance, program, look, &weights, stop)?;
    match exact::settle(program, &look.basis, &weights) {
        Ok(settled) => exactly(instance, program, look, settled),
        Err(_) => {
            let may_tie = Face::of(program, &look).may_be_more_than_a_point();
            Ok(Canonical { look, exact: false, may_tie, pivots: 0 })
        }
    }
}

/// Whether every bound and every gain is kept by so much that rounding has no say: then the vertex is the only optimal one.
fn is_clear(program: &Program, look: &Look) -> bool {
    let Look { basis, vertex, checked, .. } = look;
    let columns = program.columns.iter().enumerate().all(|(at, column)| {
        let gain = checked.gains[at] / checked.gain_scales[at].max(1.0);
        let stands = vertex.levels[at];
        clear(basis.columns[at], (stands, stands.abs().max(1.0)), (column.lower, column.upper), gain)
    });
    let rows = program.rows.iter().enumerate().all(|(at, row)| {
        let scale = checked.sum_scales[at].max(1.0);
        clear(basis.rows[at], (checked.sums[at], scale), (row.lower, row.upper), vertex.worths[at])
    });
    columns && rows
}

fn clear(position: Position, (value, scale): (f64, f64), (lower, upper): (f64, f64), multiplier: f64) -> bool {
    if position == Position::Basic {
        value - lower > CLEAR * scale && upper - value > CLEAR * scale
    } else {
        lower >= upper || multiplier.abs() > CLEAR
    }
}

/// To the plan of least weight, as far as floating point tells.
fn walk(instance: &mut Instance, program: &Program, look: Look, weights: &[f64], stop: &Stop) -> Result<Look, Refusal> {
    let face = Face::of(program, &look);
    if !face.may_be_more_than_a_point() || face.is_least(instance, weights)? {
        return Ok(look);
    }
    let End::Least(basis) = face.least(weights, stop)? else { return Ok(look) };
    instance.set_basis(&basis)?;
    let walked = Look::at(instance, program)?;
    if walked.is_optimal() {
        return Ok(walked);
    }
    instance.set_basis(&look.basis)?;
    Ok(look)
}

/// The plan that exact arithmetic has settled on, in the place of the one that floating point came to; that one where the other cannot
/// be proven in floating point.
fn exactly(instance: &mut Instance, program: &Program, look: Look, settled: Settled) -> Result<Canonical, Refusal> {
    let Settled { basis, levels, sums, worths, aim, pivots, ties, .. } = settled;
    let vertex = Vertex { levels, worths };
    let checked = Checked { aim, sums, ..proof::check(program, &vertex.levels, &vertex.worths) };
    if !checked.proof.holds() {
        let may_tie = Face::of(program, &look).may_be_more_than_a_point();
        return Ok(Canonical { look, exact: false, may_tie, pivots: 0 });
    }
    if basis != look.basis {
        instance.set_basis(&basis)?;
    }
    let look = Look { basis, vertex, checked, primal: 0, dual: 0 };
    Ok(Canonical { look, exact: true, may_tie: ties, pivots })
}
