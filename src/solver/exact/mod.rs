//! The best vertex of a program in exact rational arithmetic, from any basis.
//!
//! A floating-point solver finds a basis that is optimal, or all but. Whether a plan that is better by a billionth is better at all,
//! no tolerance can tell. Here it is decided on the decimals as they are written: the basis is factorised exactly, its vertex and
//! multipliers are worked out as fractions, and where they are not exactly optimal a few exact pivots follow (Applegate, Cook, Dash &
//! Espinoza, *Exact solutions to linear programming problems*, Operations Research Letters 35, 2007, 693–699).
//!
//! What it costs, in milliseconds on a busy two-core machine, least of 20 (a solve from nothing beside it). A basis that is right is
//! factorised, solved with twice, where there may be ties three times, and priced. A pivot takes three solves more.
//!
//! | program | rows × columns | bits of the fractions | a basis that is right | each pivot | the solve from nothing |
//! | --- | --- | --- | --- | --- | --- |
//! | afiro | 27 × 32 | 80 | 0.1 | | 2 |
//! | adlittle | 56 × 97 | | 0.5 | 0.3 | 3 |
//! | israel | 174 × 142 | | 1.2 | 0.7 | 5 |
//! | standmps | 467 × 1075 | 80 | 2 | 1 | 6 |
//! | scrs8 | 490 × 1169 | | 6 | 5 | 19 |
//! | a random mix | 300 × 10,000 | | 25 | | 490 |
//! | bandm | 305 × 472 | | 6 | | 23 |
//! | 25fv47 | 821 × 1571 | 1,900 | 30 | 14 | 200 |
//! | stair | 356 × 467 | 2,400 | 30 | | 34 |
//! | 80bau3b | 2262 × 9799 | 700 | 30 | 14 | 190 |
//! | perold | 625 × 1376 | 4,500 | 75 | 40 | 90 |
//! | greenbea | 2392 × 5405 | | 130 | 90 | 370 |
//!
//! The files, in the order in which they build on each other:
//!
//! | | |
//! | --- | --- |
//! | `whole` | the program in whole numbers, by way of `lp::decimal` |
//! | `field`, `factor` | a basis factorised modulo a prime |
//! | `lift`, `fractions` | exact solutions from it |
//! | `vertex`, `price` | where a basis stands, and what would improve it |
//! | `dual`, `primal` | pivots |

mod dual;
mod factor;
mod field;
mod fractions;
mod lift;
mod price;
mod primal;
mod settled;
mod vertex;
mod whole;

pub use settled::{Settled, Unsettled, settle};
