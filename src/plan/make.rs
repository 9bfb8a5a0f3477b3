//! Making the plan of a model out of the optimum of its program.
//!
//! What depends on which of several optimal bases the solver ended in is left out, never told as if it were the only truth.

mod resources;

mod limits;

use super::number::rounded_to;
use super::types::{Plan, PlannedActivity, PlannedLimit, PlannedResource, Standing, State};
use crate::lp::{Column, ColumnIndex, Key, Program, RowIndex, build};
use crate::model::meaning::Meaning;
use crate::model::{Activity, Aim, Model, Name, Period, Value};
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
/// plan incomplete. Nothing is decided in rational arithmetic yet, so no plan says that it is exact.
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
        exact: false,
        ties: !optimum.levels_unique,
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
        let worths = optimum.worths_unique && model.horizon.periods().count() == 1;
        let ranges = optimum.ranges.as_ref().filter(|_| worths && optimum.levels_unique);
        Ok(Self { model, program, optimum, worths, ranges })
    }

    /// The aim, where a sum whose terms cancel to the last digits is 0.
    fn aim(&self) -> Result<f64, MakeError> {
        let aim = finite(self.optimum.aim, "the aim", "the plan")?;
        let earned =
            self.program.columns.iter().zip(&self.optimum.levels).map(|(column, level)| (column.aim * level).abs());
        let scale = self.program.offset.abs() + earned.sum::<f64>();
        Ok(if aim.abs() <= 1e-12 * scale { 0.0 } else { aim })
    }

    fn activities(&self) -> Result<Vec<PlannedActivity>, MakeError> {
        let activities = self.model.activities.iter().enumerate();
        activities.map(|(position, (name, activity))| self.activity(position, name, activity)).collect()
    }

    /// `position` is that in the model, which in a single period is that in the program too.
    fn activity(&self, position: usize, name: &Name, activity: &Activity) -> Result<PlannedActivity, MakeError> {
        let columns = self.columns_of(position, name)?;
        let mut levels = Vec::with_capacity(columns.len());
        for &(_, index) in &columns {
            levels.push(self.level(index)?);
        }
        let state = self.state(activity, &columns, &levels);
        let mut planned = PlannedActivity {
            name: name.clone(),
            level: self.value(levels),
            state,
            price_range: None,
            break_even: None,
            loses: None,
        };
        let &[(period, index)] = columns.as_slice() else { return Ok(planned) };
        match state {
            State::Idle | State::Prospect if self.worths => {
                let own = self.own_price(activity, period);
                let gain = finite(self.optimum.gains[index.0], "the gain", name.as_str())?;
                let break_even = own - gain;
                let loses = rounded_to(-self.better(gain), own.abs().max(break_even.abs()));
                planned.loses = Some(if loses.abs() <= NIL { 0.0 } else { loses });
                planned.break_even = Some(finite(break_even, "the break-even", name.as_str())?);
            }
            State::Idle | State::Prospect => {}
            _ => {
                // The aim's number for a level is the price less all costs, or the cost with that of resources.
                let beside = self.own_price(activity, period) - self.program.columns[index.0].aim;
                planned.price_range = self
                    .ranges
                    .map(|ranges| ranges.aims[index.0])
                    .map(|(least, most)| range(least + beside, most + beside, "the price range", name))
                    .transpose()?;
            }
        }
        Ok(planned)
    }

    fn columns_of(&self, position: usize, name: &Name) -> Result<Vec<(Period, ColumnIndex)>, MakeError> {
        let mut columns = Vec::with_capacity(1);
        for period in self.model.horizon.periods() {
            let guessed = self.program.columns.get(position);
            if guessed.is_some_and(|column| build::is_activity_key(&column.key, name, &self.model.horizon, period)) {
                columns.push((period, ColumnIndex(position)));
                continue;
            }
            let key = build::activity_key(name, &self.model.horizon, period);
            columns.push((period, self.program.column(&key).ok_or(MakeError::Missing(key))?));
        }
        Ok(columns)
    }

    fn level(&self, index: ColumnIndex) -> Result<f64, MakeError> {
        let column = &self.program.columns[index.0];
        finite(settled(self.optimum.levels[index.0], column.lower, column.upper), "the level", column.key.as_str())
    }

    fn state(&self, activity: &Activity, columns: &[(Period, ColumnIndex)], levels: &[f64]) -> State {
        let all = |holds: &dyn Fn(&Column, f64) -> bool| {
            columns.iter().zip(levels).all(|(&(_, index), &level)| holds(&self.program.columns[index.0], level))
        };
        if activity.prospect {
            State::Prospect
        } else if all(&|column, _| same(column.lower, column.upper)) {
            State::Fixed
        } else if all(&|column, level| same(level, column.upper)) {
            State::AtItsMost
        } else if all(&|_, level| same(level, 0.0)) {
            State::Idle
        } else if all(&|column, level| same(level, column.lower)) {
            State::AtItsLeast
        } else {
            State::InTheMix
        }
    }

    /// The number of an activity's own that its break-even is compared with: its price, or its cost where costs are to be small.
    fn own_price(&self, activity: &Activity, period: Period) -> f64 {
        match self.model.aim {
            Aim::Maximise => activity.price.at(period),
            Aim::Minimise => activity.cost.at(period),
        }
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
