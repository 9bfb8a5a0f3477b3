//! MPS files: reading one as a model and writing a model as one, so that any solver can check a plan.
//!
//! Columns are activities, rows are limits, the objective row is the aim. Whole numbers, quadratic terms and anything else that
//! is not a plain linear program are refused by name rather than left out.

mod card;
mod draft;
mod error;
pub mod names;
mod number;
mod read;
mod translate;
mod write;

#[cfg(test)]
mod tests;

pub use card::Layout;
pub use error::{MpsError, Warning, Warnings};
pub use read::{Reading, read};
pub use write::{WriteError, write};

/// What stands in place of a row in a line of COLUMNS that says where whole numbers begin or end.
const MARKER: &str = "'MARKER'";
