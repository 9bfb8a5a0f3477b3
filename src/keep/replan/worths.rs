//! What each edit was worth: how far the aim moves as the edits are made one after another.
//!
//! One edit alone is worth the whole difference. Several share it in the order of the list: the sum is always the whole, and each
//! part is the truth about a model that somebody might have saved in between.

use super::memory::Known;
use crate::edits::Edit;
use crate::model::Model;

/// What each of `edits`, which turn the known model into `model` with the aim `aim`, adds to the aim: positive is better, under
/// either aim. `None` where it cannot be told.
pub(super) fn of_each(known: Option<&Known>, model: &Model, edits: &[Edit], aim: f64) -> Vec<Option<f64>> {
    let Some(known) = known else { return vec![None; edits.len()] };
    let comparable = known.model.aim == model.aim && known.model.currency == model.currency;
    let better = if known.plan.minimise { known.plan.aim - aim } else { aim - known.plan.aim };
    match edits {
        [_] if comparable => vec![Some(better)],
        _ => vec![None; edits.len()],
    }
}
