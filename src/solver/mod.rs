//! The live solver, choosing the start, and the proof of every answer.
//!
//! Knows programs, but no files. Spoken to by the plain messages of [`message`].

pub mod basis;
pub mod batch;
mod by_name;
pub mod canonical;
pub mod certificate;
pub mod change;
pub mod cold;
pub mod desk;
pub mod exact;
pub mod face;
pub mod findings;
mod free;
mod inherit;
pub mod instance;
pub mod known;
mod let_go;
pub mod live;
pub mod look;
mod mend;
pub mod message;
pub mod minimal;
pub mod opened;
pub mod optimum;
pub mod proof;
pub mod ranging;
pub mod session;
mod sharp;
pub mod soft;
mod step;
pub mod stop;
pub mod sum;
pub mod swap;
pub mod ties;
pub mod vertex;
mod warm;
pub mod weight;
pub mod wire;
pub mod worker;
