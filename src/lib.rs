//! Millreeve keeps production plans optimal while many people edit the model behind them.
//!
//! The layers run one way; each uses those before it and never those after it:
//! [`model`] → [`lp`] → [`edits`] → [`solver`] → [`plan`] → [`store`] → [`keep`] → `cli`.

/// Reading a model makes and drops some hundred thousand small things; this allocator takes half the system's time for that.
#[global_allocator]
static ALLOCATOR: mimalloc::MiMalloc = mimalloc::MiMalloc;

pub mod cli;
pub mod edits;
pub mod keep;
pub mod lp;
pub mod model;
pub mod plan;
pub mod solver;
pub mod store;
