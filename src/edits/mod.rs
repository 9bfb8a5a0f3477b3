//! Comparing two models in planners' terms: what was edited, of which kind, and what of the last basis survives it.

pub mod edit;

pub use edit::{Edit, Kind};
