//! The one plan of a program: of those that earn the most, the one of least weight, whatever way led to it.
//!
//! Floating point walks there; what is too close to call there is decided in exact arithmetic on the decimals as they are written.

use super::basis::Position;
use super::exact::{self, Settled};
use super::face::{End, Face};
use super::instance::Instance;
use super::live::Refusal;
use super::look::Look;
use super::proof::{self, Checked, TOLERANCE};
use super::stop::Stop;
use super::vertex::Vertex;
use super::weight::weights;
use crate::lp::Program;

/// What is farther from 0, relative to what it is summed from, has the sign that it shows.
const CLEAR: f64 = 1e-6;

/// What is nearer to 0 is 0. What lies between is grey: it decides nothing in floating point.
const NIL: f64 = 1e-12;

/// Programs with at most so many rows are settled in exact arithmetic wherever a gain or a slack is not clear; larger ones where one is
/// grey. Measured on Netlib bases without a pivot: up to 4 ms with so many rows, 3 to 130 ms with more.
const ALWAYS_EXACT: usize = 250;

/// The one plan, and how surely it is that.
#[derive(Clone, Debug)]
pub struct Canonical {
    /// Its basis and vertex, proven.
    pub look: Look,
    /// Whether nothing was decided by a tolerance.
    pub exact: bool,
    /// Whether its levels are those of exact arithmetic, to the last digit.
    pub rational: bool,
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
        return Ok(Canonical { look, exact: true, rational: false, may_tie: false, pivots: 0 });
    }
    let weights = weights(program);
    let look = walk(instance, program, look, &weights, stop)?;
    let face = Face::of(program, &look);
    let may_tie = face.may_be_more_than_a_point();
    let decided = program.rows.len() > ALWAYS_EXACT
        && !is_grey(program, &look)
        && (!may_tie || !face.gains(instance, &weights)?.into_iter().any(grey));
    if decided {
        return Ok(Canonical { look, exact: true, rational: false, may_tie, pivots: 0 });
    }
    if let Ok(settled) = exact::settle(program, &look.basis, &weights)
        && let Some(exactly) = exactly(program, settled)
    {
        if exactly.look.basis != look.basis {
            instance.set_basis(&exactly.look.basis)?;
        }
        return Ok(exactly);
    }
    Ok(Canonical { look, exact: false, rational: false, may_tie, pivots: 0 })
}

/// Whether every bound and every gain is kept by so much that rounding has no say: then the vertex is the only optimal one.
fn is_clear(program: &Program, look: &Look) -> bool {
    margins(program, look).all(|margin| margin > CLEAR)
}

/// Whether some bound or gain is kept, or broken, by so little that floating point cannot tell.
fn is_grey(program: &Program, look: &Look) -> bool {
    margins(program, look).any(grey)
}

fn grey(margin: f64) -> bool {
    (NIL..=CLEAR).contains(&margin.abs())
}

/// By how much each basic column and row keeps its nearer bound, and by how much each other one would lose by moving, all relative.
fn margins(program: &Program, look: &Look) -> impl Iterator<Item = f64> {
    let Look { basis, vertex, checked, .. } = look;
    let columns = program.columns.iter().enumerate().map(|(at, column)| {
        let gain = checked.gains[at] / checked.gain_scales[at].max(1.0);
        let stands = vertex.levels[at];
        margin(basis.columns[at], (stands, stands.abs().max(1.0)), (column.lower, column.upper), gain)
    });
    let rows = program.rows.iter().enumerate().map(|(at, row)| {
        let scale = checked.sum_scales[at].max(1.0);
        margin(basis.rows[at], (checked.sums[at], scale), (row.lower, row.upper), vertex.worths[at])
    });
    columns.chain(rows)
}

fn margin(position: Position, (value, scale): (f64, f64), (lower, upper): (f64, f64), multiplier: f64) -> f64 {
    match position {
        Position::Basic => (value - lower).min(upper - value) / scale,
        _ if lower >= upper => f64::INFINITY,
        _ => multiplier.abs(),
    }
}

/// To the plan of least weight, as far as floating point tells.
fn walk(instance: &mut Instance, program: &Program, look: Look, weights: &[f64], stop: &Stop) -> Result<Look, Refusal> {
    let face = Face::of(program, &look);
    if !face.may_be_more_than_a_point() || face.gains(instance, weights)?.into_iter().all(|gain| gain >= -TOLERANCE) {
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

/// The plan that exact arithmetic has settled on; `None` where floating point cannot prove it.
fn exactly(program: &Program, settled: Settled) -> Option<Canonical> {
    let Settled { basis, levels, sums, worths, aim, pivots, ties, .. } = settled;
    let vertex = Vertex { levels, worths };
    let checked = Checked { aim, sums, ..proof::check(program, &vertex.levels, &vertex.worths) };
    let look = Look { basis, vertex, checked, primal: 0, dual: 0 };
    let proven = look.checked.proof.holds();
    proven.then_some(Canonical { look, exact: true, rational: true, may_tie: ties, pivots })
}
