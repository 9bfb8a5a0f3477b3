//! The plan and the change note, as values and as text.
//!
//! Knows models, programs, edits and answers, but no files and no clock.

pub mod compare;
pub mod difference;
pub mod each;
pub mod last;
pub mod make;
pub mod note;
pub mod number;
pub mod overlap;
pub mod release;
pub mod text;
pub mod types;

pub use each::{Each, Span};
pub use make::make;
pub use types::{Plan, PlannedActivity, PlannedLimit, PlannedMaterial, PlannedResource, Standing, State};
