//! What kinds of edit promise of the last basis, held against what was found.

use millreeve::edits::Kept;
use millreeve::solver::message::{Account, Start};

/// Whether what was promised of the last basis was found of it.
pub(crate) fn promise_kept(kept: Kept, account: &Account) -> bool {
    let primal = account.primal_infeasible == Some(0);
    let dual = account.dual_infeasible == Some(0);
    match kept {
        Kept::Both => primal && dual && account.start == Start::None,
        Kept::Primal => primal && account.start != Start::Dual,
        Kept::Dual => dual && account.start != Start::Primal,
        Kept::Neither => true,
    }
}
