//! One live HiGHS instance behind a safe face: the only file with `unsafe` in it.
//!
//! Positions here are the instance's own: columns and rows in the order they were added, less those deleted. Whoever holds an
//! instance maps them to a program's. Results are copied out, since any change makes the solver forget them.

#![expect(unsafe_code, reason = "HiGHS has a C interface; every call to it is in this file")]

use std::ffi::{CStr, c_char, c_int, c_void};
use std::ptr;

use highs::{ColProblem, HighsModelStatus, HighsOptionValue, Model};
use highs_sys::{
    Highs_addCols, Highs_addRows, Highs_changeCoeff, Highs_changeColBounds, Highs_changeColCost,
    Highs_changeObjectiveOffset, Highs_changeObjectiveSense, Highs_changeRowBounds, Highs_clearSolver,
    Highs_deleteColsBySet, Highs_deleteRowsBySet, Highs_getBasicVariables, Highs_getBasis, Highs_getBasisSolve,
    Highs_getBasisTransposeSolve, Highs_getDualRay, Highs_getIis, Highs_getIntInfoValue, Highs_getModelStatus,
    Highs_getPrimalRay, Highs_getSolution, Highs_passLp, Highs_run, Highs_setBasis, Highs_setCallback,
    Highs_startCallback, Highs_zeroAllClocks, HighsCallbackDataIn, HighsCallbackDataOut, HighsInt,
    MATRIX_FORMAT_COLUMN_WISE, OBJECTIVE_SENSE_MAXIMIZE, OBJECTIVE_SENSE_MINIMIZE,
};

use super::basis::{Basis, Position};
use super::batch::{Batch, int};
use super::findings::{Basic, Ending, Point};
use super::stop::Stop;
use super::sum::power_of_two;
use crate::lp::{Program, Sense};

/// The solver refused a call that is sound by its own documentation.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("the solver refused {0}")]
pub struct Refusal(
    /// What it refused.
    pub &'static str,
);

/// A live solver instance holding one program.
pub struct Live {
    model: Model,
    columns: usize,
    rows: usize,
    stop: Box<Stop>,
}

// SAFETY: an instance has no thread of its own and no thread-local state once `threads` is 1; HiGHS documents that an instance
// may be used from any thread as long as it is by one at a time, which `&mut self` on every call ensures.
unsafe impl Send for Live {}

impl Live {
    /// A live instance with `program`, its columns and rows in the program's order.
    ///
    /// # Errors
    /// When the solver refuses the program.
    pub fn new(program: &Program) -> Result<Self, Refusal> {
        let model = Model::try_new(ColProblem::default()).map_err(|_| Refusal("an empty program"))?;
        let mut live = Self { model, columns: 0, rows: 0, stop: Box::default() };
        live.set("threads", 1)?;
        live.set("allow_unbounded_or_infeasible", false)?;
        live.watch()?;
        live.load(program)?;
        Ok(live)
    }

    /// Sets an option of the solver.
    ///
    /// # Errors
    /// When there is no such option, or not with such a value.
    pub fn set<V: HighsOptionValue>(&mut self, option: &'static str, value: V) -> Result<(), Refusal> {
        self.model.try_set_option(option, value).map_err(|_| Refusal(option))
    }

    /// How many columns the instance has.
    #[must_use]
    pub fn columns(&self) -> usize {
        self.columns
    }

    /// How many rows the instance has.
    #[must_use]
    pub fn rows(&self) -> usize {
        self.rows
    }

    fn watch(&mut self) -> Result<(), Refusal> {
        let data = ptr::from_ref::<Stop>(&self.stop).cast_mut().cast::<c_void>();
        let instance = self.instance();
        // SAFETY: the callback reads `data` as the `Stop` it points to, which is boxed and lives as long as the instance.
        accepted(unsafe { Highs_setCallback(instance, Some(on_look), data) }, "a callback")?;
        for kind in [1, 2] {
            // SAFETY: 1 and 2 are the callback types of simplex and interior point interrupts.
            accepted(unsafe { Highs_startCallback(instance, kind) }, "a callback")?;
        }
        Ok(())
    }

    fn load(&mut self, program: &Program) -> Result<(), Refusal> {
        let mut batch = Batch::default();
        for column in &program.columns {
            batch.push(
                column.aim,
                column.lower,
                column.upper,
                column.entries.iter().map(|&(row, value)| (row.0, value)),
            );
        }
        let row_lower: Vec<f64> = program.rows.iter().map(|row| row.lower).collect();
        let row_upper: Vec<f64> = program.rows.iter().map(|row| row.upper).collect();
        // SAFETY: every array has the length that the counts before it promise; they outlive the call, which copies them.
        let code = unsafe {
            Highs_passLp(
                self.instance(),
                int(program.columns.len()),
                int(program.rows.len()),
                int(batch.values.len()),
                MATRIX_FORMAT_COLUMN_WISE,
                sense(program.sense),
                program.offset,
                batch.costs.as_ptr(),
                batch.lower.as_ptr(),
                batch.upper.as_ptr(),
                row_lower.as_ptr(),
                row_upper.as_ptr(),
                batch.starts.as_ptr(),
                batch.indices.as_ptr(),
                batch.values.as_ptr(),
            )
        };
        accepted(code, "the program")?;
        self.columns = program.columns.len();
        self.rows = program.rows.len();
        Ok(())
    }

    /// Turns the aim round, or not.
    ///
    /// # Errors
    /// When the solver refuses.
    pub fn set_aim(&mut self, aim: Sense, offset: f64) -> Result<(), Refusal> {
        // SAFETY: a plain call on a live instance.
        accepted(unsafe { Highs_changeObjectiveSense(self.instance(), sense(aim)) }, "the sense of the aim")?;
        // SAFETY: a plain call on a live instance.
        accepted(unsafe { Highs_changeObjectiveOffset(self.instance(), offset) }, "the constant of the aim")
    }

    /// Changes what one unit of a column adds to the aim.
    ///
    /// # Errors
    /// When there is no such column.
    pub fn set_column_aim(&mut self, column: usize, aim: f64) -> Result<(), Refusal> {
        // SAFETY: a plain call on a live instance; a bad position is answered by an error code.
        accepted(unsafe { Highs_changeColCost(self.instance(), int(column), aim) }, "a worth")
    }

    /// Changes a column's bounds.
    ///
    /// # Errors
    /// When there is no such column.
    pub fn set_column_bounds(&mut self, column: usize, lower: f64, upper: f64) -> Result<(), Refusal> {
        // SAFETY: a plain call on a live instance; a bad position is answered by an error code.
        accepted(unsafe { Highs_changeColBounds(self.instance(), int(column), lower, upper) }, "a column's bounds")
    }

    /// Changes a row's bounds.
    ///
    /// # Errors
    /// When there is no such row.
    pub fn set_row_bounds(&mut self, row: usize, lower: f64, upper: f64) -> Result<(), Refusal> {
        // SAFETY: a plain call on a live instance; a bad position is answered by an error code.
        accepted(unsafe { Highs_changeRowBounds(self.instance(), int(row), lower, upper) }, "a row's bounds")
    }

    /// Changes one entry of the matrix. Drops the factorisation, keeps the basis.
    ///
    /// # Errors
    /// When there is no such row or column.
    pub fn set_entry(&mut self, row: usize, column: usize, value: f64) -> Result<(), Refusal> {
        // SAFETY: a plain call on a live instance; bad positions are answered by an error code.
        accepted(unsafe { Highs_changeCoeff(self.instance(), int(row), int(column), value) }, "an entry")
    }

    /// Adds columns, nonbasic, after those there are; entries are by row.
    ///
    /// # Errors
    /// When an entry is out of place.
    pub fn add_columns(&mut self, batch: &Batch) -> Result<(), Refusal> {
        // SAFETY: every array has the length that the counts before it promise; they outlive the call, which copies them.
        let code = unsafe {
            Highs_addCols(
                self.instance(),
                int(batch.lower.len()),
                batch.costs.as_ptr(),
                batch.lower.as_ptr(),
                batch.upper.as_ptr(),
                int(batch.values.len()),
                batch.starts.as_ptr(),
                batch.indices.as_ptr(),
                batch.values.as_ptr(),
            )
        };
        accepted(code, "new columns")?;
        self.columns += batch.lower.len();
        Ok(())
    }

    /// Adds rows, basic, after those there are; entries are by column.
    ///
    /// # Errors
    /// When an entry is out of place.
    pub fn add_rows(&mut self, batch: &Batch) -> Result<(), Refusal> {
        // SAFETY: every array has the length that the counts before it promise; they outlive the call, which copies them.
        let code = unsafe {
            Highs_addRows(
                self.instance(),
                int(batch.lower.len()),
                batch.lower.as_ptr(),
                batch.upper.as_ptr(),
                int(batch.values.len()),
                batch.starts.as_ptr(),
                batch.indices.as_ptr(),
                batch.values.as_ptr(),
            )
        };
        accepted(code, "new rows")?;
        self.rows += batch.lower.len();
        Ok(())
    }

    /// Deletes columns, given in ascending order; those after them move up.
    ///
    /// # Errors
    /// When there is no such column.
    pub fn delete_columns(&mut self, columns: &[usize]) -> Result<(), Refusal> {
        let set: Vec<HighsInt> = columns.iter().map(|&column| int(column)).collect();
        // SAFETY: the array has the length given and outlives the call.
        accepted(unsafe { Highs_deleteColsBySet(self.instance(), int(set.len()), set.as_ptr()) }, "deleting columns")?;
        self.columns -= set.len();
        Ok(())
    }

    /// Deletes rows, given in ascending order; those after them move up.
    ///
    /// # Errors
    /// When there is no such row.
    pub fn delete_rows(&mut self, rows: &[usize]) -> Result<(), Refusal> {
        let set: Vec<HighsInt> = rows.iter().map(|&row| int(row)).collect();
        // SAFETY: the array has the length given and outlives the call.
        accepted(unsafe { Highs_deleteRowsBySet(self.instance(), int(set.len()), set.as_ptr()) }, "deleting rows")?;
        self.rows -= set.len();
        Ok(())
    }

    /// Sets the basis to start from.
    ///
    /// # Errors
    /// When it has another shape than the instance, or not as many basic variables as rows: the solver would mend that silently.
    pub fn set_basis(&mut self, basis: &Basis) -> Result<(), Refusal> {
        let basic = basis.columns.iter().chain(&basis.rows).filter(|&&position| position == Position::Basic).count();
        if basis.columns.len() != self.columns || basis.rows.len() != self.rows || basic != self.rows {
            return Err(Refusal("a basis of another shape"));
        }
        if self.columns == 0 {
            return Ok(());
        }
        let columns: Vec<HighsInt> = basis.columns.iter().map(|&position| status_of(position)).collect();
        let rows: Vec<HighsInt> = basis.rows.iter().map(|&position| status_of(position)).collect();
        // SAFETY: the arrays have as many elements as the instance has columns and rows, checked above.
        accepted(unsafe { Highs_setBasis(self.instance(), columns.as_ptr(), rows.as_ptr()) }, "a basis")
    }

    /// The basis the instance holds.
    ///
    /// # Errors
    /// When it holds none that is valid.
    pub fn basis(&mut self) -> Result<Basis, Refusal> {
        if self.columns == 0 {
            // The solver calls it invalid, but there is just the one.
            return Ok(Basis { columns: Vec::new(), rows: vec![Position::Basic; self.rows] });
        }
        let mut columns = vec![0; self.columns];
        let mut rows = vec![0; self.rows];
        // SAFETY: the arrays have room for as many elements as the instance has columns and rows.
        accepted(unsafe { Highs_getBasis(self.instance(), columns.as_mut_ptr(), rows.as_mut_ptr()) }, "its basis")?;
        let positions = |list: Vec<HighsInt>| list.into_iter().map(position_of).collect::<Result<_, _>>();
        Ok(Basis { columns: positions(columns)?, rows: positions(rows)? })
    }

    /// Forgets basis, factorisation and point; keeps the program.
    ///
    /// # Errors
    /// When the solver refuses.
    pub fn forget(&mut self) -> Result<(), Refusal> {
        // SAFETY: a plain call on a live instance.
        accepted(unsafe { Highs_clearSolver(self.instance()) }, "to forget")
    }

    /// Runs the solver; `stop` is looked at while it runs.
    pub fn run(&mut self, stop: &Stop) -> Ending {
        *self.stop = stop.clone();
        stop.count(0);
        let instance = self.instance();
        // SAFETY: plain calls on a live instance; the callback's data is the boxed `Stop` of this instance.
        let (code, status) = unsafe {
            Highs_zeroAllClocks(instance);
            let code = Highs_run(instance);
            (code, Highs_getModelStatus(instance))
        };
        if code < 0 {
            return Ending::Trouble;
        }
        match HighsModelStatus::try_from(status) {
            Ok(HighsModelStatus::Optimal | HighsModelStatus::ModelEmpty) => Ending::Optimal,
            Ok(HighsModelStatus::Infeasible) => Ending::Infeasible,
            Ok(HighsModelStatus::Unbounded) => Ending::Unbounded,
            Ok(HighsModelStatus::ReachedIterationLimit) => Ending::OutOfPivots,
            Ok(HighsModelStatus::ReachedTimeLimit) => Ending::OutOfTime,
            Ok(HighsModelStatus::ReachedInterrupt) => Ending::Stopped,
            _ => Ending::Trouble,
        }
    }

    /// Simplex iterations of the last run.
    #[must_use]
    pub fn pivots(&mut self) -> usize {
        usize::try_from(self.info(c"simplex_iteration_count")).unwrap_or(0)
    }

    fn info(&mut self, name: &'static CStr) -> HighsInt {
        let mut value: HighsInt = -1;
        // SAFETY: `name` ends in NUL and `value` has room for the integer that an info of this name is.
        let code = unsafe { Highs_getIntInfoValue(self.instance(), name.as_ptr(), &raw mut value) };
        if code < 0 { -1 } else { value }
    }

    /// The point of the last run.
    ///
    /// # Errors
    /// When there is none, as after any change.
    pub fn point(&mut self) -> Result<Point, Refusal> {
        let mut point =
            Point { columns: vec![0.0; self.columns], rows: vec![0.0; self.rows], row_duals: vec![0.0; self.rows] };
        let mut column_duals = vec![0.0; self.columns];
        // SAFETY: the arrays have room for as many elements as the instance has columns and rows.
        let code = unsafe {
            Highs_getSolution(
                self.instance(),
                point.columns.as_mut_ptr(),
                column_duals.as_mut_ptr(),
                point.rows.as_mut_ptr(),
                point.row_duals.as_mut_ptr(),
            )
        };
        accepted(code, "its point")?;
        Ok(point)
    }

    /// The basic variables, in the order of the factorisation.
    ///
    /// # Errors
    /// When there is no factorisation: it is made by a run and dropped by most changes.
    pub fn basics(&mut self) -> Result<Vec<Basic>, Refusal> {
        let mut list: Vec<HighsInt> = vec![0; self.rows];
        // SAFETY: the array has room for as many elements as the instance has rows.
        accepted(unsafe { Highs_getBasicVariables(self.instance(), list.as_mut_ptr()) }, "its basic variables")?;
        let basic = |&code: &HighsInt| match usize::try_from(code) {
            Ok(column) => Ok(Basic::Column(column)),
            Err(_) => usize::try_from(-(code + 1)).map(Basic::Row).map_err(|_| Refusal("a basic variable")),
        };
        list.iter().map(basic).collect()
    }

    /// `B⁻¹ · right`, B being the basis matrix with unit columns for logicals: one number per basic variable, in their order.
    ///
    /// # Errors
    /// When there is no factorisation.
    pub fn solve(&mut self, right: &[f64]) -> Result<Vec<f64>, Refusal> {
        self.solved(right, false)
    }

    /// `B⁻ᵀ · right`, `right` in the order of the basic variables: one number per row.
    ///
    /// # Errors
    /// When there is no factorisation.
    pub fn solve_transposed(&mut self, right: &[f64]) -> Result<Vec<f64>, Refusal> {
        self.solved(right, true)
    }

    fn solved(&mut self, right: &[f64], transposed: bool) -> Result<Vec<f64>, Refusal> {
        if right.len() != self.rows {
            return Err(Refusal("a right-hand side of another length"));
        }
        // The solver takes anything below 1e-14 for 0: what is small altogether is made larger first.
        let scale = power_of_two(right.iter().fold(0.0, |largest: f64, value| largest.max(value.abs())));
        let right: Vec<f64> = right.iter().map(|value| value / scale).collect();
        let mut result = vec![0.0; self.rows];
        let call = if transposed { Highs_getBasisTransposeSolve } else { Highs_getBasisSolve };
        // SAFETY: both arrays have one element per row; NULL says that the nonzeros are not asked for.
        let code =
            unsafe { call(self.instance(), right.as_ptr(), result.as_mut_ptr(), ptr::null_mut(), ptr::null_mut()) };
        accepted(code, "a solve with its basis")?;
        result.iter_mut().for_each(|value| *value *= scale);
        Ok(result)
    }

    /// Multipliers, one per row, whose combination of rows no point within the bounds can keep; `None` where it has none.
    /// May solve another program: the instance's point and status are void afterwards.
    pub fn dual_ray(&mut self) -> Option<Vec<f64>> {
        let mut ray = vec![0.0; self.rows];
        let mut has: HighsInt = 0;
        // SAFETY: the array has one element per row.
        let code = unsafe { Highs_getDualRay(self.instance(), &raw mut has, ray.as_mut_ptr()) };
        (code >= 0 && has != 0).then_some(ray)
    }

    /// A direction, one rate per column, in which the aim improves for ever; `None` where it has none.
    /// May solve another program: the instance's point and status are void afterwards.
    pub fn primal_ray(&mut self) -> Option<Vec<f64>> {
        let mut ray = vec![0.0; self.columns];
        let mut has: HighsInt = 0;
        // SAFETY: the array has one element per column.
        let code = unsafe { Highs_getPrimalRay(self.instance(), &raw mut has, ray.as_mut_ptr()) };
        (code >= 0 && has != 0).then_some(ray)
    }

    /// Asks the solver for a conflict with the status of everything in it. On some infeasible programs (klein1, vol1) that crashes it:
    /// for tests of what a crash costs.
    pub fn conflict_with_statuses(&mut self) {
        let _ = self.set("iis_strategy", 6);
        let (mut some_columns, mut some_rows): (HighsInt, HighsInt) = (0, 0);
        let [mut columns, mut column_bounds, mut column_status] = std::array::from_fn(|_| vec![0; self.columns]);
        let [mut rows, mut row_bounds, mut row_status] = std::array::from_fn(|_| vec![0; self.rows]);
        // SAFETY: every array has one element per column or row, the most that can be in a conflict.
        unsafe {
            Highs_getIis(
                self.instance(),
                &raw mut some_columns,
                &raw mut some_rows,
                columns.as_mut_ptr(),
                rows.as_mut_ptr(),
                column_bounds.as_mut_ptr(),
                row_bounds.as_mut_ptr(),
                column_status.as_mut_ptr(),
                row_status.as_mut_ptr(),
            );
        }
    }

    fn instance(&mut self) -> *mut c_void {
        self.model.as_mut_ptr()
    }
}

/// Called by a running solve; tells it to end by writing to `answer` at every call, since the solver keeps what was written last.
unsafe extern "C" fn on_look(
    _kind: c_int,
    _message: *const c_char,
    state: *const HighsCallbackDataOut,
    answer: *mut HighsCallbackDataIn,
    data: *mut c_void,
) {
    // SAFETY: `data` is the boxed `Stop` that `Live::watch` registered, alive as long as the instance that calls.
    let Some(stop) = (unsafe { data.cast::<Stop>().as_ref() }) else { return };
    // SAFETY: the solver passes a valid state or NULL.
    if let Some(state) = unsafe { state.as_ref() } {
        stop.count(usize::try_from(state.simplex_iteration_count).unwrap_or(0));
    }
    // SAFETY: the solver passes a valid place for the answer or NULL.
    if let Some(answer) = unsafe { answer.as_mut() } {
        answer.user_interrupt = c_int::from(stop.is_stopped());
    }
}

fn accepted(code: HighsInt, what: &'static str) -> Result<(), Refusal> {
    if code < 0 { Err(Refusal(what)) } else { Ok(()) }
}

fn sense(sense: Sense) -> HighsInt {
    match sense {
        Sense::Minimise => OBJECTIVE_SENSE_MINIMIZE,
        Sense::Maximise => OBJECTIVE_SENSE_MAXIMIZE,
    }
}

fn status_of(position: Position) -> HighsInt {
    match position {
        Position::AtLower => 0,
        Position::Basic => 1,
        Position::AtUpper => 2,
        Position::AtZero => 3,
    }
}

fn position_of(status: HighsInt) -> Result<Position, Refusal> {
    match status {
        0 | 4 => Ok(Position::AtLower), // 4: on no side in particular, taken out by the solver to mend what was singular.
        1 => Ok(Position::Basic),
        2 => Ok(Position::AtUpper),
        3 => Ok(Position::AtZero),
        _ => Err(Refusal("a basis it knows")),
    }
}
