//! Making the plan of a model out of the optimum of its program.
//!
//! What depends on which of several optimal bases the solver ended in is left out, never told as if it were the only truth.

mod activities;
mod flows;
mod limits;
mod materials;
mod resources;

use super::each::{Each, Span};
use super::types::{Plan, PlannedActivity, PlannedLimit, PlannedMaterial, PlannedResource, Standing, State};
use crate::lp::{ColumnIndex, Key, Program, RowIndex};
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
    let materials = maker.materials(&activities)?;
    let complete = activities.iter().all(activity_is_complete)
        && resources.iter().all(resource_is_complete)
        && limits.iter().all(|limit| maker.limit_is_complete(limit))
        && materials.iter().all(|material| material.worth_of_more.is_some());
    Ok(Plan {
        answers: meaning,
        standing: Standing::Current,
        aim: maker.aim()?,
        minimise: model.aim == Aim::Minimise,
        currency: model.currency.clone(),
        periods: maker.periods(),
        exact: optimum.exact,
        ties: !optimum.levels_unique,
        may_vary_left_out: maker.may_vary_left_out(&activities),
        complete,
        activities,
        resources,
        limits,
        materials,
    })
}

fn activity_is_complete(activity: &PlannedActivity) -> bool {
    let states = activity.state.all();
    let breaks_even = |state: &State| matches!(state, State::Idle | State::Prospect);
    (activity.break_even.is_some() || !states.iter().any(breaks_even))
        && (activity.price_range.is_some() || states.iter().all(breaks_even))
}

fn resource_is_complete(resource: &PlannedResource) -> bool {
    resource.spare.is_none() || (resource.worth_of_more.is_some() && resource.holds_between.is_some())
}

/// A model, its program and its optimum, known to have one shape; and what may be told of it.
struct Maker<'a> {
    model: &'a Model,
    program: &'a Program,
    optimum: &'a Optimum,
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
        if let Some(known) = &optimum.known {
            shapes.extend([("known gains", known.gains.len(), columns), ("known worths", known.worths.len(), rows)]);
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
        let ranges = optimum.ranges.as_ref().filter(|_| optimum.worths_unique && optimum.levels_unique);
        let spans = optimum.spans.as_ref().filter(|_| !optimum.levels_unique);
        Ok(Self { model, program, optimum, ranges, spans })
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

    /// The names of the periods; none where the horizon is a single nameless one.
    fn periods(&self) -> Vec<Name> {
        let horizon = &self.model.horizon;
        let labels = horizon.periods().filter_map(|period| horizon.label(period));
        // A label has been a name once.
        labels.filter_map(|label| Name::new(label).ok()).collect()
    }

    /// One number for each period, or one alone where the horizon is a single nameless period.
    fn value(&self, numbers: Vec<f64>) -> Value {
        match numbers.as_slice() {
            &[number] if !self.model.horizon.is_named() => Value::Every(number),
            _ => Value::Listed(numbers),
        }
    }

    /// As [`Maker::value`], where there is a number for every period.
    fn value_of_all(&self, numbers: impl Iterator<Item = Option<f64>>) -> Option<Value> {
        Some(self.value(numbers.collect::<Option<_>>()?))
    }

    /// One range for each period, or one alone where the horizon is a single nameless period.
    fn spans_of_all(&self, spans: impl Iterator<Item = Option<Span>>) -> Option<Each<Span>> {
        let spans = spans.collect::<Option<Vec<_>>>()?;
        match spans.as_slice() {
            &[span] if !self.model.horizon.is_named() => Some(Each::One(span)),
            _ => Some(Each::Listed(spans)),
        }
    }

    /// Whether the worth of a row is the only one that is optimal.
    fn knows_worth(&self, row: RowIndex) -> bool {
        let known = || self.optimum.known.as_ref().is_some_and(|known| known.worths[row.0]);
        self.optimum.worths_unique || known()
    }

    /// Whether the gain of a column is the only one that is optimal.
    fn knows_gain(&self, column: ColumnIndex) -> bool {
        let known = || self.optimum.known.as_ref().is_some_and(|known| known.gains[column.0]);
        self.optimum.worths_unique || known()
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
    holds_between: Option<Span>,
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
fn range(least: f64, most: f64, what: &'static str, name: &Name) -> Result<Span, MakeError> {
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
