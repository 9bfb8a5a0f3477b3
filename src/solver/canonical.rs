//! The one plan of a program: of those that earn the most, the one of least weight, whatever way led to it.
//!
//! Floating point walks there; what is too close to call there is decided in exact arithmetic on the decimals as they are written.

use super::exact::{self, Settled, Unsettled};
use super::face::{End, Face};
use super::free;
use super::instance::Instance;
use super::live::Refusal;
use super::look::Look;
use super::proof::{self, Checked, TOLERANCE};
use super::sharp::Sharp;
use super::stop::Stop;
use super::vertex::Vertex;
use super::weight::weights;
use crate::lp::Program;

/// What is farther from 0, relative to what it is summed from, has the sign that it shows.
const CLEAR: f64 = 1e-6;

/// What is nearer to 0, in twice the digits of an `f64`, is 0. What lies between is grey: it decides nothing in floating point.
const NIL: f64 = 1e-20;

/// The same on programs too large for exact arithmetic: decimals that would come to 0 exactly come to 1e-14 or so as doubles, which says
/// nothing and would cost a solve from nothing at every edit.
const NIL_IF_LARGE: f64 = 1e-12;

/// Programs with at most so many rows are settled in exact arithmetic wherever a gain or a slack is not clear; larger ones where one is
/// grey. Measured on Netlib bases without a pivot: up to 4 ms with so many rows, 3 to 130 ms with more.
const ALWAYS_EXACT: usize = 250;

/// Larger programs are not settled in exact arithmetic: a basis takes tens of milliseconds there, and so does each pivot, more than a solve
/// from nothing. The model alone decides, never a clock.
const MOST_EXACT: usize = 600;

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
pub fn of(instance: &mut Instance, program: &Program, mut look: Look, stop: &Stop) -> Result<Canonical, Refusal> {
    let mut sharp = Sharp::of(instance, program, &look)?;
    if sharp.margins.iter().all(|&margin| margin > CLEAR) {
        // Every bound and every gain is kept by so much that rounding has no say: the vertex is the only optimal one.
        return Ok(Canonical { look: sharpened(look, sharp), exact: true, rational: false, may_tie: false, pivots: 0 });
    }
    let weights = weights(program);
    if let Some(walked) = walk(instance, program, &look, &weights, stop)? {
        look = walked;
        sharp = Sharp::of(instance, program, &look)?;
    }
    let face = Face::of(program, &look);
    let may_tie = face.may_be_more_than_a_point();
    let nil = if program.rows.len() > MOST_EXACT { NIL_IF_LARGE } else { NIL };
    let grey = |margin: &f64| (nil..=CLEAR).contains(margin);
    let decided = program.rows.len() > ALWAYS_EXACT
        && !sharp.margins.iter().any(grey)
        && (!may_tie || face.gains(instance, &weights)?.into_iter().all(|gain| gain > CLEAR));
    if decided {
        return Ok(Canonical { look: sharpened(look, sharp), exact: true, rational: false, may_tie, pivots: 0 });
    }
    if let Some(exactly) = settle(program, &look, &weights) {
        if exactly.look.basis != look.basis {
            instance.set_basis(&exactly.look.basis)?;
        }
        return Ok(exactly);
    }
    Ok(Canonical { look: sharpened(look, sharp), exact: false, rational: false, may_tie, pivots: 0 })
}

/// The look with the numbers of its vertex in all their digits.
fn sharpened(mut look: Look, sharp: Sharp) -> Look {
    let Sharp { aim, levels, worths, sums, gains, .. } = sharp;
    look.vertex = Vertex { levels, worths };
    look.checked = Checked { aim, sums, gains, ..look.checked };
    look
}

/// To the plan of least weight, as far as floating point tells; `None` where it stays where it is.
fn walk(
    instance: &mut Instance,
    program: &Program,
    look: &Look,
    weights: &[f64],
    stop: &Stop,
) -> Result<Option<Look>, Refusal> {
    let face = Face::of(program, look);
    if !face.may_be_more_than_a_point() || face.gains(instance, weights)?.into_iter().all(|gain| gain >= -TOLERANCE) {
        return Ok(None);
    }
    let End::Least(basis) = face.least(weights, stop)? else { return Ok(None) };
    instance.set_basis(&basis)?;
    let walked = Look::at(instance, program)?;
    if walked.is_optimal() {
        return Ok(Some(walked));
    }
    instance.set_basis(&look.basis)?;
    Ok(None)
}

/// The plan that exact arithmetic settles on; `None` where it cannot, or floating point cannot prove it.
fn settle(program: &Program, look: &Look, weights: &[f64]) -> Option<Canonical> {
    if program.rows.len() > MOST_EXACT {
        return None;
    }
    let settled = match exact::settle(program, &look.basis, weights) {
        Err(Unsettled::Unbounded) => free::settle(program, look, weights),
        settled => settled,
    };
    let Settled { basis, levels, sums, worths, aim, pivots, ties, .. } = settled.ok()?;
    let vertex = Vertex { levels, worths };
    let checked = Checked { aim, sums, ..proof::check(program, &vertex.levels, &vertex.worths) };
    let look = Look { basis, vertex, checked, primal: 0, dual: 0 };
    let proven = look.checked.proof.holds();
    proven.then_some(Canonical { look, exact: true, rational: true, may_tie: ties, pivots })
}
