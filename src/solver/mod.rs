//! The live solver, choosing the start, and the proof of every answer.
//!
//! Knows programs, but no files. Spoken to by the plain messages of [`message`].

pub mod basis;
pub mod message;
pub mod proof;
