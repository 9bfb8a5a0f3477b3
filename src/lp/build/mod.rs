//! Building the program that a model stands for.
//!
//! | column | bounds | aim |
//! | --- | --- | --- |
//! | level of an activity (a prospect's is held at 0, so that it is priced and never made) | its least and most | price − cost − Σ uses · resource cost |
//! | tier of extra capacity | 0, its width | −cost |
//! | purchase and sale tiers, what is late, stock, discard of a material | their limits | −price, +price, −cost each; the last stock also its worth |
//!
//! | row | |
//! | --- | --- |
//! | capacity of a resource | least ≤ Σ uses · level − Σ extra capacity ≤ capacity |
//! | balance of a material | purchases + Σ makes · level `lead` periods before + stock before − Σ draws · level − sales − discard − stock = −opening, which is 0 but in the first period |
//! | demand of a sale tier that may be late | least ≤ sale + late − late before ≤ most |
//! | change of an activity | −most ≤ level − level before ≤ most |
//! | limit, one for each bound where it has `per` | its bounds |
//!
//! There is one of each for every period, but for limits over several periods together. Where an aim is to be small, what is earned and
//! what is spent change signs.
//!
//! Where several numbers of a model meet in one of the program, they are added up as the decimals that people wrote and rounded once, so
//! that what earns as much on paper earns as much here.

mod activities;
mod frame;
mod limits;
mod materials;
mod resources;
#[cfg(test)]
mod tests;

pub use activities::worth_of_one;
pub use limits::{Group, Side, groups, sides};

use self::frame::{Columns, Frame, Rows};
use super::program::{Program, Sense};
use crate::model::{Aim, Model};

/// The program behind `model`.
#[must_use]
pub fn build(model: &Model) -> Program {
    let frame = Frame::of(model);
    let mut rows = Rows::default();
    let changes = activities::rows(&frame, &mut rows);
    let limits = limits::rows(&frame, &mut rows);
    let balances = materials::rows(&frame, &mut rows);
    let capacities = resources::rows(&frame, &mut rows);
    let (rows, places) = rows.in_order();

    let mut columns = Columns::at(&places);
    let lines = activities::Lines { changes: &changes, limits: &limits, balances: &balances, capacities: &capacities };
    activities::columns(&frame, &lines, &mut columns);
    materials::columns(&frame, &balances, &limits, &mut columns);
    resources::columns(&frame, &capacities, &limits, &mut columns);
    Program {
        sense: match model.aim {
            Aim::Maximise => Sense::Maximise,
            Aim::Minimise => Sense::Minimise,
        },
        offset: model.constant,
        columns: columns.in_order(),
        rows,
    }
}
