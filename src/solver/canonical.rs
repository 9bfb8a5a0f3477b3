//! The one plan of a program: of those that earn the most, the one of least weight, whatever way led to it.
//!
//! Floating point walks there; what is too close to call there is decided in exact arithmetic on the decimals as they are written.

use super::exact::{self, Settled, Unsettled};
use super::face::{End, Face};
use super::free;
use super::instance::Instance;
use super::live::Refusal;
use super::look::Look;
use super::mend;
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
    /// Whether it is the same whatever basis it was found from, as far as twice the digits of an `f64` tell.
    pub sure: bool,
    /// A gain no larger than this, relative to what it is summed from, is none.
    pub nil: f64,
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
    let large = program.rows.len() > MOST_EXACT;
    let (look, mut sharp) = if large {
        mend::gains(instance, program, look, NIL_IF_LARGE)?
    } else {
        let sharp = Sharp::of(instance, program, &look)?;
        (look, sharp)
    };
    let clear = sharp.margins.iter().all(|&margin| margin > CLEAR);
    let mut look = sharpened(look, &sharp);
    // Every bound and every gain may be kept by so much that rounding has no say: the vertex is the only optimal one.
    let plan =
        |look, exact| Canonical { look, exact, sure: true, rational: false, nil: TOLERANCE, may_tie: false, pivots: 0 };
    if clear {
        return Ok(plan(look, true));
    }
    let weights = weights(program);
    let right = |sharp: &Sharp| sharp.margins.iter().all(|&margin| margin >= -NIL_IF_LARGE);
    // Where nothing exact follows, what twice the digits tell from 0 is not a tie.
    let nil = if large && right(&sharp) { NIL_IF_LARGE } else { TOLERANCE };
    if let Some(walked) = walk(instance, program, &Face::of(program, &look, nil), &weights, stop)? {
        sharp = Sharp::of(instance, program, &walked)?;
        look = sharpened(walked, &sharp);
    }
    let face = Face::of(program, &look, nil);
    let may_tie = face.may_be_more_than_a_point();
    let walked_out = !may_tie || face.gains(instance, &weights)?.into_iter().all(|gain| gain > CLEAR);
    let grey = (if large { NIL_IF_LARGE } else { NIL })..=CLEAR;
    let decided = walked_out && !sharp.margins.iter().any(|margin| grey.contains(&margin.abs()));
    if decided && program.rows.len() > ALWAYS_EXACT {
        return Ok(Canonical { may_tie, nil, ..plan(look, true) });
    }
    if let Some(exactly) = settle(program, &look, &weights) {
        if exactly.look.basis != look.basis {
            instance.set_basis(&exactly.look.basis)?;
        }
        return Ok(exactly);
    }
    let sure = large && walked_out && right(&sharp);
    Ok(Canonical { sure, may_tie, nil, ..plan(look, false) })
}

/// The look with the numbers of its vertex in all their digits.
fn sharpened(look: Look, sharp: &Sharp) -> Look {
    let Sharp { aim, levels, worths, sums, gains, .. } = sharp;
    let vertex = Vertex { levels: levels.clone(), worths: worths.clone() };
    let checked = Checked { aim: *aim, sums: sums.clone(), gains: gains.clone(), ..look.checked };
    Look { vertex, checked, ..look }
}

/// To the plan of least weight, as far as floating point tells; `None` where it stays where it is.
fn walk(
    instance: &mut Instance,
    program: &Program,
    face: &Face<'_>,
    weights: &[f64],
    stop: &Stop,
) -> Result<Option<Look>, Refusal> {
    if !face.may_be_more_than_a_point() || face.gains(instance, weights)?.into_iter().all(|gain| gain >= -TOLERANCE) {
        return Ok(None);
    }
    let End::Least(basis) = face.least(weights, stop)? else { return Ok(None) };
    instance.set_basis(&basis)?;
    let walked = Look::at(instance, program)?;
    if walked.is_optimal() {
        return Ok(Some(walked));
    }
    instance.set_basis(&face.look().basis)?;
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
    let found = Canonical { look, exact: true, sure: true, rational: true, nil: TOLERANCE, may_tie: ties, pivots };
    proven.then_some(found)
}
