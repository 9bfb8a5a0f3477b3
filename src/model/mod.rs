//! What people write: the model, reading and checking it, its names and its meaning.
//!
//! Knows no solver and no clock, and never writes.

pub(crate) mod decimal;
pub mod escape;
pub mod fault;
pub(crate) mod letters;
pub mod meaning;
pub mod name;
pub(crate) mod near;
pub(crate) mod odd;
pub(crate) mod products;
pub mod read;
pub mod types;
pub mod value;
mod values;
pub mod write;

pub use fault::{Fault, Faults};
pub use name::Name;
pub use types::{
    Activity, Aim, Bound, Closing, Discard, Flow, Late, Limit, Material, Model, Over, Purchase, Resource, Sale, Stock,
    Surge, Term,
};
pub use value::{Horizon, Period, Value};
