//! The linear program behind a model: columns and rows by name, building them, and the difference of two programs.
//!
//! Knows models, but no solver, no files and no clock.

pub mod apply;
pub mod build;
pub mod difference;
pub mod keys;
pub mod mps;
pub mod program;

pub use build::build;
pub use difference::Difference;
pub use program::{Column, ColumnIndex, Key, Program, Row, RowIndex, Sense, places};
