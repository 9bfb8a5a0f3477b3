//! The best vertex of a program in exact rational arithmetic, from any basis.
//!
//! A floating-point solver finds a basis that is optimal, or all but. Whether a plan that is better by a billionth is better at all,
//! no tolerance can tell. Here it is decided on the decimals as they are written: the basis is factorised exactly, its vertex and
//! multipliers are worked out as fractions, and where they are not exactly optimal a few exact pivots follow (Applegate, Cook, Dash &
//! Espinoza, *Exact solutions to linear programming problems*, Operations Research Letters 35, 2007, 693–699).
//!
//! | | |
//! | --- | --- |
//! | [`number`], [`whole`] | the program in whole numbers |
//! | [`field`], [`factor`] | a basis factorised modulo a prime |
//! | [`lift`], [`fractions`] | exact solutions from it |
//! | [`vertex`], [`price`] | where a basis stands, and what would improve it |
//! | [`dual`], [`primal`] | pivots |

mod dual;
mod factor;
mod field;
mod fractions;
mod lift;
mod number;
mod price;
mod primal;
mod settled;
mod vertex;
mod whole;

pub use settled::{Settled, Unsettled, settle};
