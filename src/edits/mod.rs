//! Comparing two models in planners' terms: what was edited, of which kind, and what of the last basis survives it.
//!
//! Knows models, but no solver, no files and no clock.

pub mod apply;
pub mod compare;
pub mod edit;
pub mod kept;
pub mod rename;
mod side_by_side;

pub use apply::apply;
pub use compare::{compare, compare_renamed};
pub use edit::{Edit, Kind, Planned, Subject};
pub use kept::{Kept, LastPlan};
pub use rename::Renames;
