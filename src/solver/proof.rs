//! The proof of an answer by our own arithmetic, from nothing but the program, the levels and the worths.
//!
//! Levels are optimal if they keep every row and bound, the gains that follow from the worths have the right signs, nothing that
//! has slack is charged for, and the aim meets the bound that the worths put on it (weak duality; Dantzig, *Linear Programming
//! and Extensions*, 1963, ch. 6). Sums are compensated, so what is measured is the answer's error and not the proof's own.

use serde::{Deserialize, Serialize};

use super::sum::Sum;
use crate::lp::Program;

/// The largest relative breach that passes for proven.
pub const TOLERANCE: f64 = 1e-9;

/// How well an answer keeps every law of optimality, each as the largest relative breach found.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Proof {
    /// Breach of rows and bounds.
    pub primal: f64,
    /// Breach of the signs of gains and worths.
    pub dual: f64,
    /// Breach of complementary slackness.
    pub slackness: f64,
    /// Gap between the aim and its bound by the worths.
    pub gap: f64,
}

impl Proof {
    /// The largest of the four; infinite where one is not a number.
    #[must_use]
    pub fn worst(&self) -> f64 {
        let all = [self.primal, self.dual, self.slackness, self.gap];
        if all.iter().any(|breach| breach.is_nan()) { f64::INFINITY } else { all.into_iter().fold(0.0, f64::max) }
    }

    /// Whether the answer is proven within [`TOLERANCE`].
    #[must_use]
    pub fn holds(&self) -> bool {
        self.worst() <= TOLERANCE
    }
}

/// Levels and worths, with all that follows from them.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Checked {
    /// The aim, with its constant.
    pub aim: f64,
    /// Sum of each row.
    pub sums: Vec<f64>,
    /// Gain of each column: what one unit more of it adds to the aim, less what the rows charge for it.
    pub gains: Vec<f64>,
    /// Per row: the largest term of its sum, which its rounding error is relative to.
    pub sum_scales: Vec<f64>,
    /// Per column: the largest term of its gain, which its rounding error is relative to.
    pub gain_scales: Vec<f64>,
    /// How well all laws are kept.
    pub proof: Proof,
}

/// Measures `levels` (one per column) and `worths` (one per row, derivatives of the aim) against the laws of optimality.
#[must_use]
pub fn check(program: &Program, levels: &[f64], worths: &[f64]) -> Checked {
    let mut tally = Tally::new(program.sense.sign());
    let mut sums = vec![Sum::default(); program.rows.len()];
    let mut scales = vec![0.0_f64; program.rows.len()];
    let mut aim = Sum::default();
    aim.add(program.offset);
    tally.bound.add(program.offset);
    let mut gains = Vec::with_capacity(program.columns.len());
    let mut gain_scales = Vec::with_capacity(program.columns.len());
    for (column, &level) in program.columns.iter().zip(levels) {
        aim.add_product(column.aim, level);
        let mut gain = Sum::default();
        gain.add(column.aim);
        let mut scale = column.aim.abs();
        for &(row, value) in &column.entries {
            sums[row.0].add_product(value, level);
            scales[row.0] = scales[row.0].max((value * level).abs());
            gain.add_product(-value, worths[row.0]);
            scale = scale.max((value * worths[row.0]).abs());
        }
        let gain = gain.value();
        tally.side(level, 0.0, column.lower, column.upper, gain, scale);
        gains.push(gain);
        gain_scales.push(scale);
    }
    let sums: Vec<f64> = sums.into_iter().map(Sum::value).collect();
    for (at, row) in program.rows.iter().enumerate() {
        tally.side(sums[at], scales[at], row.lower, row.upper, worths[at], 0.0);
    }
    let aim = aim.value();
    Checked { aim, sums, gains, sum_scales: scales, gain_scales, proof: tally.proof(aim) }
}

/// Gathers breaches over columns and rows alike: a value between bounds, and the multiplier that leans on them.
struct Tally {
    /// Turns a multiplier of the aim into one of an aim to minimise.
    sign: f64,
    primal: f64,
    dual: f64,
    slackness: f64,
    bound: Sum,
}

impl Tally {
    fn new(sign: f64) -> Self {
        Self { sign, primal: 0.0, dual: 0.0, slackness: 0.0, bound: Sum::default() }
    }

    fn side(&mut self, value: f64, value_scale: f64, lower: f64, upper: f64, multiplier: f64, multiplier_scale: f64) {
        let leans = self.sign * multiplier;
        let breach = (lower - value).max(value - upper).max(0.0);
        let size = 1.0_f64.max(value.abs()).max(value_scale);
        self.primal = worse(self.primal, breach / size);
        // An aim to minimise leans on the lower bound with a positive multiplier, on the upper with a negative one.
        let against = if leans > 0.0 { lower } else { upper };
        if leans == 0.0 {
            return;
        }
        if against.is_finite() {
            self.bound.add_product(multiplier, against);
            self.slackness = worse(self.slackness, (multiplier * (value - against)).abs());
        } else {
            self.dual = worse(self.dual, leans.abs() / 1.0_f64.max(multiplier_scale));
            self.slackness = worse(self.slackness, (multiplier * value).abs());
        }
    }

    fn proof(self, aim: f64) -> Proof {
        let size = 1.0_f64.max(aim.abs());
        Proof {
            primal: self.primal,
            dual: self.dual,
            slackness: self.slackness / size,
            gap: (aim - self.bound.value()).abs() / size,
        }
    }
}

/// The larger of two breaches, where not a number is the largest.
fn worse(a: f64, b: f64) -> f64 {
    if a.is_nan() || b.is_nan() { f64::NAN } else { a.max(b) }
}

#[cfg(test)]
#[expect(clippy::float_cmp, reason = "these sums are exact")]
mod tests {
    use super::*;
    use crate::lp::{Column, Key, Row, RowIndex, Sense};

    /// Maximise 3x + 5y, x ≤ 4, 2y ≤ 12, 3x + 2y ≤ 18: optimum 36 at (2, 6), worths 0, 3/2, 1. The Wyndor example of Hillier &
    /// Lieberman, *Introduction to Operations Research*, from memory.
    fn wyndor() -> Program {
        let column = |key: &str, aim, entries: &[(usize, f64)]| Column {
            key: Key::new(key),
            lower: 0.0,
            upper: f64::INFINITY,
            aim,
            entries: entries.iter().map(|&(row, value)| (RowIndex(row), value)).collect(),
        };
        let row = |key: &str, upper| Row { key: Key::new(key), lower: f64::NEG_INFINITY, upper };
        Program {
            sense: Sense::Maximise,
            offset: 0.0,
            columns: vec![column("x", 3.0, &[(0, 1.0), (2, 3.0)]), column("y", 5.0, &[(1, 2.0), (2, 2.0)])],
            rows: vec![row("a", 4.0), row("b", 12.0), row("c", 18.0)],
        }
    }

    #[test]
    fn the_optimum_is_proven() {
        let checked = check(&wyndor(), &[2.0, 6.0], &[0.0, 1.5, 1.0]);
        assert_eq!(checked.aim, 36.0);
        assert_eq!(checked.sums, [2.0, 12.0, 18.0]);
        assert_eq!(checked.gains, [0.0, 0.0]);
        assert_eq!(checked.proof, Proof::default());
    }

    #[test]
    fn each_law_broken_is_measured() {
        let broken = |levels: [f64; 2], worths: [f64; 3]| check(&wyndor(), &levels, &worths).proof;
        assert!(broken([2.0, 6.1], [0.0, 1.5, 1.0]).primal > 1e-3, "a row is broken");
        assert!(broken([2.0, 6.0], [0.0, 1.5, 0.9]).dual > 1e-3, "x would still gain");
        assert!(broken([0.0, 6.0], [0.0, 1.5, 1.0]).slackness > 1e-3, "what has slack is charged for");
        assert!(broken([0.0, 0.0], [0.0, 1.5, 1.0]).gap > 0.5, "the bound is not met");
        assert!(!broken([f64::NAN, 6.0], [0.0, 1.5, 1.0]).holds(), "not a number proves nothing");
        assert!(!broken([2.0, 6.0], [0.0, f64::NAN, 1.0]).holds(), "not a number proves nothing");
    }
}
