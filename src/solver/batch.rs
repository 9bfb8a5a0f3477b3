//! Columns or rows on their way into a live instance, as the solver takes them.

use highs_sys::HighsInt;

/// Sparse columns or rows to add, one after another.
#[derive(Clone, Debug, Default)]
pub struct Batch {
    pub(super) costs: Vec<f64>,
    pub(super) lower: Vec<f64>,
    pub(super) upper: Vec<f64>,
    pub(super) starts: Vec<HighsInt>,
    pub(super) indices: Vec<HighsInt>,
    pub(super) values: Vec<f64>,
}

impl Batch {
    /// Adds one column (`cost` counts) or row (it does not).
    pub fn push(&mut self, cost: f64, lower: f64, upper: f64, entries: impl IntoIterator<Item = (usize, f64)>) {
        self.starts.push(int(self.indices.len()));
        self.costs.push(cost);
        self.lower.push(lower);
        self.upper.push(upper);
        for (index, value) in entries {
            self.indices.push(int(index));
            self.values.push(value);
        }
    }

    /// Whether nothing was added.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.lower.is_empty()
    }
}

/// Counts and positions are far below 2³¹: the caps on a model's size see to that.
pub(super) fn int(number: usize) -> HighsInt {
    HighsInt::try_from(number).unwrap_or(HighsInt::MAX)
}
