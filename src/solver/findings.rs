//! What a live instance tells: how a run ended, its basic variables, its point.

/// How a run ended.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Ending {
    /// Optimal, says the solver.
    Optimal,
    /// No point keeps all rows and bounds, says the solver.
    Infeasible,
    /// The aim has no limit, says the solver.
    Unbounded,
    /// Its iterations were used up.
    OutOfPivots,
    /// Its time was used up.
    OutOfTime,
    /// It was asked to stop.
    Stopped,
    /// Anything else: numerical trouble, mostly.
    Trouble,
}

/// A basic variable of the instance.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Basic {
    /// A column.
    Column(usize),
    /// A row's logical.
    Row(usize),
}

/// A point and its multipliers as the solver reports them, in the instance's order.
#[derive(Clone, Debug, Default)]
pub struct Point {
    /// Value of each column.
    pub columns: Vec<f64>,
    /// Sum of each row.
    pub rows: Vec<f64>,
    /// Derivative of the aim by each row's bound.
    pub row_duals: Vec<f64>,
}
