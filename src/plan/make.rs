//! Making the plan of a model out of the optimum of its program.
//!
//! What depends on which of several optimal bases the solver ended in is left out, never told as if it were the only truth.

mod activities;
mod limits;
mod resources;

use super::types::{Plan, PlannedActivity, PlannedLimit, PlannedResource, Standing, State};
use crate::lp::{Key, Program, RowIndex};
use crate::model::meaning::Meaning;
use crate::model::{Aim, Model, Name, Value};
use crate::solver::message::{Optimum, Ranges};

/// Levels and rates no larger than this are 0, and a level this near to a bound, relative to it, is that bound.
pub const NIL: f64 = 1e-9;

/// Why an optimum makes no plan. Each is a mistake of the program, not of the model.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum MakeError {
    /// The optimum is that of another program.
    #[error("the answer has {found} {what}, the program {expected}")]
    Shape {
        /// What was counted.
        what: &'static str,
        /// How many the answer has.
        found: usize,
        /// How many the program has.
        expected: usize,
    },
    /// The program is that of another model.
    #[error("the program has no `{0}`")]
    Missing(Key),
    /// A number that no plan may hold.
    #[error("{what} of `{name}` is {number}, which no plan may say")]
    NotFinite {
        /// Which number.
        what: &'static str,
        /// Of what.
        name: String,
        /// The number, as text.
        number: String,
    },
}

/// The plan of `model`, which means `meaning`, from the `optimum` of its `program`.
///
/// Worths are told where no others are optimal, ranges where in addition no other levels are; whatever this leaves out makes the
/// plan incomplete. How far levels may vary where others are as good is told apart from that: what of it was not worked out is counted.
///
/// # Errors
/// Says what does not fit together, or which number is not finite where it must be.
pub fn make(model: &Model, meaning: Meaning, program: &Program, optimum: &Optimum) -> Result<Plan, MakeError> {
    let maker = Maker::new(model, program, optimum)?;
    let activities = maker.activities()?;
    let resources = maker.resources()?;
    let limits = maker.limits(&activities)?;
    let complete = activities.iter().all(activity_is_complete)
        && resources.iter().all(resource_is_complete)
        && limits.iter().all(|limit| maker.limit_is_complete(limit));
    Ok(Plan {
        answers: meaning,
        standing: Standing::Current,
        aim: maker.aim()?,
        minimise: model.aim == Aim::Minimise,
        currency: model.currency.clone(),
        exact: optimum.exact,
        ties: !optimum.levels_unique,
        may_vary_left_out: maker.may_vary_left_out(&activities),
        complete,
        activities,
        resources,
        limits,
    })
}

fn activity_is_complete(activity: &PlannedActivity) -> bool {
    match activity.state {
        State::Idle | State::Prospect => activity.break_even.is_some(),
        _ => activity.price_range.is_some(),
    }
}

fn resource_is_complete(resource: &PlannedResource) -> bool {
    resource.spare.is_none() || (resource.worth_of_more.is_some() && resource.holds_between.is_some())
}

/// A model, its program and its optimum, known to have one shape; and what may be told of it.
struct Maker<'a> {
    model: &'a Model,
    program: &'a Program,
    optimum: &'a Optimum,
    /// Whether worths may be told.
    worths: bool,
    /// Ranges, where they may be told.
    ranges: Option<&'a Ranges>,
    /// Per column how far its level may vary without loss, where that may be told.
    spans: Option<&'a Vec<(f64, f64)>>,
}

impl<'a> Maker<'a> {
    fn new(model: &'a Model, program: &'a Program, optimum: &'a Optimum) -> Result<Self, MakeError> {
        let (columns, rows) = (program.columns.len(), program.rows.len());
        let mut shapes = vec![
            ("levels", optimum.levels.len(), columns),
            ("gains", optimum.gains.len(), columns),
            ("sums", optimum.sums.len(), rows),
            ("worths", optimum.worths.len(), rows),
        ];
        if let Some(spans) = &optimum.spans {
            shapes.push(("spans", spans.len(), columns));
        }
        if let Some(ranges) = &optimum.ranges {
            shapes.extend([
                ("ranges of aims", ranges.aims.len(), columns),
                ("ranges of bounds", ranges.bounds.len(), rows),
            ]);
        }
        if let Some(&(what, found, expected)) = shapes.iter().find(|(_, found, expected)| found != expected) {
            return Err(MakeError::Shape { what, found, expected });
        }
        // A rate of a plan is one number; over several periods there would be one for each.
        let single = model.horizon.periods().count() == 1;
        let worths = optimum.worths_unique && single;
        let ranges = optimum.ranges.as_ref().filter(|_| worths && optimum.levels_unique);
        let spans = optimum.spans.as_ref().filter(|_| single && !optimum.levels_unique);
        Ok(Self { model, program, optimum, worths, ranges, spans })
    }

    /// The aim, where a sum whose terms cancel to the last digits is 0.
    fn aim(&self) -> Result<f64, MakeError> {
        let aim = finite(self.optimum.aim, "the aim", "the plan")?;
        let earned =
            self.program.columns.iter().zip(&self.optimum.levels).map(|(column, level)| (column.aim * level).abs());
        let scale = self.program.offset.abs() + earned.sum::<f64>();
        Ok(if aim.abs() <= 1e-12 * scale { 0.0 } else { aim })
    }

    /// A rate of the aim, turned so that positive is better.
    fn better(&self, rate: f64) -> f64 {
        0.0 - self.program.sense.sign() * rate
    }

    /// One number for each period, or one alone where the horizon is a single nameless period.
    fn value(&self, mut numbers: Vec<f64>) -> Value {
        let named = self.model.horizon.periods().any(|period| self.model.horizon.label(period).is_some());
        match numbers.pop() {
            Some(number) if numbers.is_empty() && !named => Value::Every(number),
            Some(number) => {
                numbers.push(number);
                Value::Listed(numbers)
            }
            None => Value::Every(0.0),
        }
    }

    fn row(&self, key: Key) -> Result<RowIndex, MakeError> {
        self.program.row(&key).ok_or(MakeError::Missing(key))
    }
}

/// Which of a row's bounds its sum stands at.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Side {
    Lower,
    Upper,
    /// At both: they are one.
    Both,
    Neither,
}

impl Side {
    fn of(sum: f64, lower: f64, upper: f64) -> Self {
        match (same(sum, lower), same(sum, upper)) {
            (true, true) => Self::Both,
            (true, false) => Self::Lower,
            (false, true) => Self::Upper,
            (false, false) => Self::Neither,
        }
    }
}

/// What one unit more or less of something does to the aim, and between which of its numbers.
struct Rates {
    worth_of_more: f64,
    loss_of_less: f64,
    holds_between: Option<(f64, f64)>,
}

/// A number of the answer, taken to the bound it means.
fn settled(number: f64, lower: f64, upper: f64) -> f64 {
    let bound =
        [lower, upper].into_iter().find(|bound| bound.is_finite() && (number - bound).abs() <= NIL * bound.abs());
    match bound {
        Some(bound) => bound + 0.0,
        None if number.abs() <= NIL => 0.0,
        None => number,
    }
}

/// Whether two settled numbers are the same.
#[expect(clippy::float_cmp, reason = "settled numbers have been taken to their bounds")]
fn same(a: f64, b: f64) -> bool {
    a == b
}

fn finite(number: f64, what: &'static str, name: &str) -> Result<f64, MakeError> {
    if number.is_finite() {
        return Ok(number + 0.0);
    }
    Err(MakeError::NotFinite { what, name: name.to_owned(), number: number.to_string() })
}

/// A rate of the aim, which is 0 where it is next to nothing.
fn rate(number: f64, what: &'static str, name: &Name) -> Result<f64, MakeError> {
    let number = finite(number, what, name.as_str())?;
    Ok(if number.abs() <= NIL { 0.0 } else { number })
}

/// A range, either end of which may have no limit.
fn range(least: f64, most: f64, what: &'static str, name: &Name) -> Result<(f64, f64), MakeError> {
    let wrong = least.is_nan() || most.is_nan() || least == f64::INFINITY || most == f64::NEG_INFINITY;
    if wrong {
        let number = format!("{least} to {most}");
        return Err(MakeError::NotFinite { what, name: name.to_string(), number });
    }
    Ok((tidy(least), tidy(most)))
}

fn tidy(end: f64) -> f64 {
    if end.abs() <= NIL { 0.0 } else { end + 0.0 }
}

#[cfg(test)]
#[path = "make/tests.rs"]
mod tests;
