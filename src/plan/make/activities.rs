//! What a plan says of activities.

use super::super::number::{rounded, rounded_to};
use super::{Each, MakeError, Maker, NIL, PlannedActivity, Span, State, finite, range, rate, same, settled};
use crate::lp::{Column, ColumnIndex, keys};
use crate::model::{Activity, Aim, Name, Period, Value};

impl Maker<'_> {
    pub(super) fn activities(&self) -> Result<Vec<PlannedActivity>, MakeError> {
        let activities = self.model.activities.iter().enumerate();
        activities.map(|(position, (name, activity))| self.activity(position, name, activity)).collect()
    }

    /// `position` is that in the model.
    fn activity(&self, position: usize, name: &Name, activity: &Activity) -> Result<PlannedActivity, MakeError> {
        let columns = self.columns_of(position, name)?;
        let mut levels = Vec::with_capacity(columns.len());
        for &(_, index) in &columns {
            levels.push(self.level(index)?);
        }
        let states: Vec<State> =
            columns.iter().zip(&levels).map(|(&(_, index), &level)| self.state(activity, index, level)).collect();
        let is_out = |state: &State| matches!(state, State::Idle | State::Prospect);
        let (some_out, all_out) = (states.iter().any(is_out), states.iter().all(is_out));
        let (break_even, loses) = if some_out { self.break_even(name, activity, &columns)? } else { (None, None) };
        Ok(PlannedActivity {
            name: name.clone(),
            level: self.value(levels),
            // A horizon has at least one period.
            state: Each::folded(states).unwrap_or(Each::One(State::Idle)),
            may_vary: self.may_vary(name, &columns)?,
            price_range: if all_out { None } else { self.price_range(name, activity, &columns)? },
            break_even,
            loses,
        })
    }

    /// At which prices one unit more would just pay, and what it loses now.
    fn break_even(
        &self,
        name: &Name,
        activity: &Activity,
        columns: &[(Period, ColumnIndex)],
    ) -> Result<(Option<Value>, Option<Value>), MakeError> {
        let (mut break_evens, mut losses) = (Vec::with_capacity(columns.len()), Vec::with_capacity(columns.len()));
        for &(period, index) in columns {
            if !self.knows_gain(index) {
                return Ok((None, None));
            }
            let own = self.own_price(activity, period);
            let gain = finite(self.optimum.gains[index.0], "the gain", name.as_str())?;
            let break_even = own - gain;
            let loses = rounded_to(-self.better(gain), own.abs().max(break_even.abs()));
            losses.push(if loses.abs() <= NIL { 0.0 } else { loses });
            break_evens.push(rate(break_even, "the break-even", name)?);
        }
        Ok((Some(self.value(break_evens)), Some(self.value(losses))))
    }

    /// Between which prices the levels stay, each period's moved alone; where that may be told.
    fn price_range(
        &self,
        name: &Name,
        activity: &Activity,
        columns: &[(Period, ColumnIndex)],
    ) -> Result<Option<Each<Span>>, MakeError> {
        let Some(ranges) = self.ranges else { return Ok(None) };
        let mut spans = Vec::with_capacity(columns.len());
        for &(period, index) in columns {
            // The aim's number for a level is the price less all costs, or the cost with that of resources.
            let beside = self.own_price(activity, period) - self.program.columns[index.0].aim;
            let (least, most) = ranges.aims[index.0];
            spans.push(Some(range(least + beside, most + beside, "the price range", name)?));
        }
        Ok(self.spans_of_all(spans.into_iter()))
    }

    fn columns_of(&self, position: usize, name: &Name) -> Result<Vec<(Period, ColumnIndex)>, MakeError> {
        let horizon = &self.model.horizon;
        let mut columns = Vec::with_capacity(horizon.count());
        for period in horizon.periods() {
            // Mostly levels come first and in this order: then nothing need be looked up.
            let guess = position * horizon.count() + period.position();
            let guessed = self.program.columns.get(guess);
            if guessed.is_some_and(|column| keys::is_activity_key(&column.key, name, horizon, period)) {
                columns.push((period, ColumnIndex(guess)));
                continue;
            }
            let key = keys::activity_key(name, horizon, period);
            columns.push((period, self.program.column(&key).ok_or(MakeError::Missing(key))?));
        }
        Ok(columns)
    }

    pub(super) fn level(&self, index: ColumnIndex) -> Result<f64, MakeError> {
        let column = &self.program.columns[index.0];
        finite(settled(self.optimum.levels[index.0], column.lower, column.upper), "the level", column.key.as_str())
    }

    /// How far the levels may go without loss, where any may and that was worked out.
    fn may_vary(&self, name: &Name, columns: &[(Period, ColumnIndex)]) -> Result<Option<Each<Span>>, MakeError> {
        let Some(spans) = self.spans else { return Ok(None) };
        let (mut told, mut varies) = (Vec::with_capacity(columns.len()), false);
        for &(_, index) in columns {
            let Column { lower, upper, .. } = self.program.columns[index.0];
            let (level, (least, most)) = (self.level(index)?, spans[index.0]);
            let ends = (settled(least, lower, upper), settled(most, lower, upper));
            let (least, most) = range(ends.0, ends.1, "how far the level may vary", name)?;
            let (least, most) = (least.min(level), most.max(level));
            // What a plan cannot tell from the level in the digits it keeps does not vary.
            let differ = !same(rounded(least), rounded(most));
            told.push(Some(if differ { (least, most) } else { (level, level) }));
            varies |= differ;
        }
        Ok(self.spans_of_all(told.into_iter()).filter(|_| varies))
    }

    /// Of how many of `activities` it was not worked out how far they may vary. Those that have one level only cannot.
    pub(super) fn may_vary_left_out(&self, activities: &[PlannedActivity]) -> usize {
        if self.optimum.levels_unique || self.spans.is_some() {
            return 0;
        }
        let may_move = |state: &State| !matches!(state, State::Fixed | State::Prospect);
        activities.iter().filter(|planned| planned.state.all().iter().any(may_move)).count()
    }

    fn state(&self, activity: &Activity, index: ColumnIndex, level: f64) -> State {
        let column = &self.program.columns[index.0];
        if activity.prospect {
            State::Prospect
        } else if same(column.lower, column.upper) {
            State::Fixed
        } else if same(level, column.upper) {
            State::AtItsMost
        } else if same(level, 0.0) {
            State::Idle
        } else if same(level, column.lower) {
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
}
