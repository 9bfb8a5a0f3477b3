//! What a plan says of activities.

use super::super::number::{rounded, rounded_to};
use super::{MakeError, Maker, NIL, PlannedActivity, State, finite, range, rate, same, settled};
use crate::lp::{Column, ColumnIndex, keys};
use crate::model::{Activity, Aim, Name, Period};

impl Maker<'_> {
    pub(super) fn activities(&self) -> Result<Vec<PlannedActivity>, MakeError> {
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
            may_vary: None,
            price_range: None,
            break_even: None,
            loses: None,
        };
        let &[(period, index)] = columns.as_slice() else { return Ok(planned) };
        planned.may_vary = self.may_vary(name, index)?;
        match state {
            State::Idle | State::Prospect if self.worths => {
                let own = self.own_price(activity, period);
                let gain = finite(self.optimum.gains[index.0], "the gain", name.as_str())?;
                let break_even = own - gain;
                let loses = rounded_to(-self.better(gain), own.abs().max(break_even.abs()));
                planned.loses = Some(if loses.abs() <= NIL { 0.0 } else { loses });
                planned.break_even = Some(rate(break_even, "the break-even", name)?);
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
            if guessed.is_some_and(|column| keys::is_activity_key(&column.key, name, &self.model.horizon, period)) {
                columns.push((period, ColumnIndex(position)));
                continue;
            }
            let key = keys::activity_key(name, &self.model.horizon, period);
            columns.push((period, self.program.column(&key).ok_or(MakeError::Missing(key))?));
        }
        Ok(columns)
    }

    fn level(&self, index: ColumnIndex) -> Result<f64, MakeError> {
        let column = &self.program.columns[index.0];
        finite(settled(self.optimum.levels[index.0], column.lower, column.upper), "the level", column.key.as_str())
    }

    /// How far a level may go without loss, where it may and that was worked out.
    fn may_vary(&self, name: &Name, index: ColumnIndex) -> Result<Option<(f64, f64)>, MakeError> {
        let Some(spans) = self.spans else { return Ok(None) };
        let Column { lower, upper, .. } = self.program.columns[index.0];
        let (level, (least, most)) = (self.level(index)?, spans[index.0]);
        let ends = (settled(least, lower, upper), settled(most, lower, upper));
        let (least, most) = range(ends.0, ends.1, "how far the level may vary", name)?;
        let (least, most) = (least.min(level), most.max(level));
        // What a plan cannot tell from the level in the digits it keeps does not vary.
        Ok((!same(rounded(least), rounded(most))).then_some((least, most)))
    }

    /// Of how many of `activities` it was not worked out how far they may vary. Those that have one level only cannot.
    pub(super) fn may_vary_left_out(&self, activities: &[PlannedActivity]) -> usize {
        if self.optimum.levels_unique || self.spans.is_some() {
            return 0;
        }
        let may_move = |planned: &&PlannedActivity| !matches!(planned.state, State::Fixed | State::Prospect);
        activities.iter().filter(may_move).count()
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
}
