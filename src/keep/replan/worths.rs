//! What each edit was worth: how far the aim moves as the edits are made one after another.
//!
//! One edit alone is worth the whole difference. Several share it in the order of the list: the sum is always the whole, and each
//! part is the truth about a model that somebody might have saved in between.

use std::sync::Arc;

use super::memory::Known;
use crate::edits::{Edit, Kind, apply};
use crate::lp::build;
use crate::model::Model;
use crate::plan::make::NIL;
use crate::solver::desk::Desk;
use crate::solver::message::{ModelKey, Outcome};
use crate::solver::stop::Stop;
use crate::solver::worker::Solver;

/// So many edits are told apart at most; more are told together.
const TOLD_APART: usize = 12;

/// Edits times entries of the program: beyond, telling edits apart would cost more than the replan itself.
const EFFORT: usize = 500_000;

/// What each of `edits`, which turn the known model into `model` with the aim `aim`, adds to the aim: positive is better, under
/// either aim. `None` where it cannot be told.
pub(super) fn of_each(
    known: Option<&Known>,
    model: &Model,
    edits: &[Edit],
    aim: f64,
    desk: &mut Desk<impl Solver>,
    stop: &Stop,
) -> Vec<Option<f64>> {
    let untold = vec![None; edits.len()];
    let Some(known) = known else { return untold };
    // The aims of other periods, or of another aim, are not compared.
    let comparable =
        known.model.aim == model.aim && known.model.currency == model.currency && known.model.horizon == model.horizon;
    if !comparable {
        return untold;
    }
    let small = edits.len() <= TOLD_APART && edits.len().saturating_mul(known.program.entries()) <= EFFORT;
    let deciding = edits.iter().filter(|edit| decides(edit)).count();
    let aims: Vec<Option<f64>> = match deciding {
        0 => return untold,
        1 => vec![],
        _ if small => aims_between(known, model, edits, desk, stop),
        _ => return untold,
    };
    let better = |from: f64, to: f64| {
        // Plans on disk have ten digits: what differs below that is their rounding, not the edit's doing.
        let moved = if (to - from).abs() > NIL * from.abs().max(to.abs()) { to - from } else { 0.0 };
        if known.plan.minimise { -moved } else { moved }
    };
    let mut befores = std::iter::once(Some(known.plan.aim)).chain(aims.iter().copied());
    let mut afters = aims.iter().copied().chain(std::iter::once(Some(aim)));
    let worth = |edit| if decides(edit) { Some(better(befores.next()??, afters.next()??)) } else { None };
    edits.iter().map(worth).collect()
}

/// Whether an edit can move the aim.
fn decides(edit: &Edit) -> bool {
    edit.kind != Kind::Wording || edit.address == "constant"
}

/// The aims between one deciding edit and the next; `None` where there is no plan in between.
fn aims_between(
    known: &Known,
    model: &Model,
    edits: &[Edit],
    desk: &mut Desk<impl Solver>,
    stop: &Stop,
) -> Vec<Option<f64>> {
    // One session for what is between the edits of whatever model: it starts anew from the last basis of each.
    let key = ModelKey(String::new());
    desk.forget(&key);
    let mut between = known.model.clone();
    let mut lost = false;
    let deciding: Vec<&Edit> = edits.iter().filter(|edit| decides(edit)).collect();
    let solved = deciding.iter().take(deciding.len().saturating_sub(1)).map(|edit| {
        apply(&mut between, edit, model);
        if lost {
            return None;
        }
        match desk.solve(&key, &Arc::new(build(&between)), || known.last(), stop).outcome {
            Outcome::Optimal(optimum) => Some(optimum.aim),
            Outcome::Lost(_) => {
                // What ended one process would end the next one too.
                lost = true;
                None
            }
            _ => None,
        }
    });
    let aims = solved.collect();
    desk.forget(&key);
    aims
}
