//! What is said across the boundary of the solver: a program or a difference in; an answer and progress out.
//!
//! Plain data without pointers, files or clocks, so that the solver can live in another thread or another process.

use std::borrow::Cow;
use std::time::Duration;

use serde::{Deserialize, Serialize};

use super::basis::{Basis, NamedBasis};
use super::proof::Proof;
use crate::lp::{Difference, Program};

/// What the solver is asked.
#[derive(Clone, Debug, Serialize, Deserialize)]
pub struct Request {
    /// Which model this is about; a live instance is kept for each.
    pub model: ModelKey,
    /// The program to solve.
    pub task: Task,
    /// How long one run may take.
    pub time_limit: Duration,
}

/// Tells the models of one daemon apart.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
pub struct ModelKey(pub String);

/// The program to solve, whole or as what differs from the one asked last about the same model.
#[derive(Clone, Debug, Serialize, Deserialize)]
pub enum Task {
    /// A whole program, and one solved earlier to start from where that is remembered.
    Whole(Box<Program>, Option<Box<Last>>),
    /// What differs from the program asked last. Answered by [`Outcome::Forgotten`] where that is no longer held.
    Change(Box<Difference>),
}

/// A program solved earlier, and the basis it was solved with.
#[derive(Clone, Debug, Serialize, Deserialize)]
pub struct Last {
    /// The program.
    pub program: Program,
    /// Its optimal basis.
    pub basis: NamedBasis,
    /// Iterations of its last solve from nothing, where that is remembered.
    pub cold_pivots: Option<usize>,
}

/// The solver's answer.
#[derive(Clone, Debug, Serialize, Deserialize)]
pub struct Answer {
    /// What came of it.
    pub outcome: Outcome,
    /// How it was reached.
    pub account: Account,
}

/// What came of a request.
#[derive(Clone, Debug, Serialize, Deserialize)]
pub enum Outcome {
    /// An optimal plan, proven.
    Optimal(Box<Optimum>),
    /// No levels keep all rows and bounds.
    Infeasible(Conflict),
    /// The aim has no limit.
    Unbounded(Growth),
    /// Cannot tell: the reason, as a sentence for people.
    Undecided(String),
    /// A newer request made this one void.
    Interrupted,
    /// A difference came for a program that is no longer held; ask again with the whole program.
    Forgotten,
    /// The process that was solving came to its end over it: how, in a few words. Whatever it held is gone with it.
    Lost(String),
}

/// An optimal plan. Vectors are in the order of the program's columns or rows.
///
/// Worths are derivatives of the aim in its own sense: what one unit more of a row's bound, or of a column's level, adds to it.
#[derive(Clone, Debug, Serialize, Deserialize)]
pub struct Optimum {
    /// The aim, with its constant.
    pub aim: f64,
    /// Level of each column.
    pub levels: Vec<f64>,
    /// Sum of each row.
    pub sums: Vec<f64>,
    /// Per column: what one unit more of its level would add to the aim (reduced cost).
    pub gains: Vec<f64>,
    /// Per row: what one unit more of its binding bound would add to the aim (shadow price).
    pub worths: Vec<f64>,
    /// The optimal basis.
    pub basis: Basis,
    /// Whether nothing was decided by a tolerance.
    pub exact: bool,
    /// Whether no other levels are optimal.
    pub levels_unique: bool,
    /// Per column, where others are and it was worked out: the least and the most that its level may be.
    pub spans: Option<Vec<(f64, f64)>>,
    /// Whether no other worths are optimal.
    pub worths_unique: bool,
    /// Where others are: which of them are the only ones all the same, as far as it was worked out.
    pub known: Option<Known>,
    /// Ranges, where they were worked out.
    pub ranges: Option<Ranges>,
    /// The proof of all this.
    pub proof: Proof,
}

/// Which worths and gains are the only optimal ones.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Known {
    /// Per row.
    pub worths: Vec<bool>,
    /// Per column.
    pub gains: Vec<bool>,
}

/// How far numbers of the program can move, one at a time, before the basis changes.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Ranges {
    /// Per column: numbers of its worth in the aim between which the levels stay optimal.
    pub aims: Vec<(f64, f64)>,
    /// Per row: numbers of its binding bound (or, where it is slack, of the bound nearest its sum) between which the worths stay.
    pub bounds: Vec<(f64, f64)>,
}

/// Why there is no plan: rows and bounds that contradict each other, with the multipliers that prove it.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Conflict {
    /// Rules that cannot all be kept.
    pub rules: Vec<Rule>,
    /// Whether our own arithmetic has confirmed the contradiction.
    pub proven: bool,
    /// Whether each of the rules was found to be needed for it, those aside that a level is at least 0.
    pub minimal: bool,
}

/// One side of a row or column that takes part in a contradiction.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Rule {
    /// The row or column.
    pub key: crate::lp::Key,
    /// Whether it is a row (else a column's own bound).
    pub is_row: bool,
    /// Whether the upper bound takes part (else the lower).
    pub upper: bool,
    /// The bound.
    pub bound: f64,
}

/// Why the aim has no limit: columns that can grow together for ever, with their rates.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Growth {
    /// Columns and how fast each moves, per unit of the strongest.
    pub rates: Vec<(crate::lp::Key, f64)>,
    /// Whether our own arithmetic has confirmed it.
    pub proven: bool,
}

/// How an answer was reached.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Account {
    /// The start taken.
    pub start: Start,
    /// Simplex iterations, over all runs.
    pub pivots: usize,
    /// The last basis under the new data: how many columns and rows break a bound; `None` where there was none.
    pub primal_infeasible: Option<usize>,
    /// The last basis under the new data: how many would still improve the aim; `None` where there was none.
    pub dual_infeasible: Option<usize>,
    /// Whether the last basis was carried over by name alone, as too much has gone at once to be withdrawn softly.
    pub by_name: bool,
    /// Whether a warm run was given up for taking more iterations than a fresh solve is worth.
    pub capped: bool,
    /// Iterations of the last solve from nothing.
    pub cold_pivots: Option<usize>,
    /// Steps down the ladder: what was tried and given up, as short phrases.
    pub detours: Vec<Cow<'static, str>>,
    /// Exact pivots to the one plan.
    pub exact_pivots: usize,
    /// Time to a proven answer.
    pub time: Duration,
    /// Time from there to the one plan.
    pub settling: Duration,
    /// Time spent on reading ties and ranges off it.
    pub reading: Duration,
}

/// Where a solve starts from.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub enum Start {
    /// The last basis is still optimal: no pivot.
    None,
    /// Primal simplex from the last basis.
    Primal,
    /// Dual simplex from the last basis.
    Dual,
    /// Afresh.
    #[default]
    Cold,
}

impl Start {
    /// The word for it.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::None => "none",
            Self::Primal => "primal",
            Self::Dual => "dual",
            Self::Cold => "cold",
        }
    }
}

/// How a solve is getting on.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Progress {
    /// Simplex iterations so far.
    pub pivots: usize,
}
