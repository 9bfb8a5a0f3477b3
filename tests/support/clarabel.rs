//! An independent engine: Clarabel's interior-point method, which has no code in common with the solver in use.

use clarabel::algebra::CscMatrix;
use clarabel::solver::{DefaultSettings, DefaultSolver, IPSolver, NonnegativeConeT, SolverStatus, ZeroConeT};
use millreeve::lp::Program;

/// What the engine makes of a program.
#[derive(Debug)]
pub(crate) enum Verdict {
    /// The aim of the best plan.
    Optimal(f64),
    /// There is no plan.
    Infeasible,
    /// A direction exists in which the aim grows for ever; there is an end all the same where there is no plan.
    Unbounded,
    /// It could not tell.
    Unsure(String),
}

/// Solves `program` in the engine's form: minimise q·x where b − A·x lies in a cone.
pub(crate) fn solve(program: &Program) -> Verdict {
    let sign = program.sense.sign();
    let (equal, at_most) = sides(program);
    let sides: Vec<&Side> = equal.iter().chain(&at_most).collect();
    let (mut rows, mut columns, mut values) = (Vec::new(), Vec::new(), Vec::new());
    for (at, side) in sides.iter().enumerate() {
        for &(column, value) in &side.terms {
            rows.push(at);
            columns.push(column);
            values.push(value);
        }
    }
    let count = program.columns.len();
    let matrix = CscMatrix::new_from_triplets(sides.len(), count, rows, columns, values);
    let right: Vec<f64> = sides.iter().map(|side| side.right).collect();
    let aim: Vec<f64> = program.columns.iter().map(|column| sign * column.aim).collect();
    let cones = [ZeroConeT(equal.len()), NonnegativeConeT(at_most.len())];
    let settings = DefaultSettings { verbose: false, max_iter: 500, ..DefaultSettings::default() };
    let none = CscMatrix::zeros((count, count));
    let mut solver = DefaultSolver::new(&none, &aim, &matrix, &right, &cones, settings).unwrap();
    solver.solve();
    match solver.solution.status {
        SolverStatus::Solved => Verdict::Optimal(sign * solver.solution.obj_val + program.offset),
        SolverStatus::PrimalInfeasible => Verdict::Infeasible,
        SolverStatus::DualInfeasible => Verdict::Unbounded,
        other => Verdict::Unsure(other.to_string()),
    }
}

/// One side of a row or of a column's bounds: Σ terms = right, or ≤ right.
struct Side {
    terms: Vec<(usize, f64)>,
    right: f64,
}

/// All equations, and all sides that set an upper limit; a lower limit is an upper one of the negative.
fn sides(program: &Program) -> (Vec<Side>, Vec<Side>) {
    let (mut equal, mut at_most) = (Vec::new(), Vec::new());
    let mut hold = |terms: &[(usize, f64)], lower: f64, upper: f64| {
        let times =
            |factor: f64, right| Side { terms: terms.iter().map(|&(at, value)| (at, factor * value)).collect(), right };
        if lower.total_cmp(&upper).is_eq() {
            equal.push(times(1.0, upper));
            return;
        }
        if upper.is_finite() {
            at_most.push(times(1.0, upper));
        }
        if lower.is_finite() {
            at_most.push(times(-1.0, -lower));
        }
    };
    let mut rows = vec![Vec::new(); program.rows.len()];
    for (at, column) in program.columns.iter().enumerate() {
        for &(row, value) in &column.entries {
            rows[row.0].push((at, value));
        }
        hold(&[(at, 1.0)], column.lower, column.upper);
    }
    for (row, terms) in program.rows.iter().zip(&rows) {
        hold(terms, row.lower, row.upper);
    }
    (equal, at_most)
}
