//! Limits: their rows, and what each column adds to them.

use std::collections::{BTreeMap, HashMap};

use super::frame::{Frame, Made, Part, Rows};
use crate::lp::keys::{limit_key, limit_over_key};
use crate::lp::program::Key;
use crate::model::{Activity, Bound, Flow, Horizon, Limit, Model, Name, Over, Period, Term, Value};

/// One row of a limit: the bounds of the row, and what `per` is multiplied by in it.
pub struct Side {
    /// Tells the rows of one limit apart; `None` where it has one.
    pub word: Option<&'static str>,
    /// Lower bound of the row.
    pub lower: f64,
    /// Upper bound of the row.
    pub upper: f64,
    /// The bound that multiplies `per`.
    pub per: f64,
}

/// The rows that a limit stands for in a period, or in [periods](Group) together of which this is one: one, or with `per` one for each
/// bound, as the bound is then a coefficient.
#[must_use]
pub fn sides(limit: &Limit, period: Period) -> Vec<Side> {
    let (least, most) = match &limit.bound {
        Bound::Between(least, most) => (least.at(period), most.at(period)),
        Bound::Equals(value) => (value.at(period), value.at(period)),
    };
    if limit.per.is_none() {
        return vec![Side { word: None, lower: least, upper: most, per: 0.0 }];
    }
    if let Bound::Equals(_) = limit.bound {
        return vec![Side { word: Some("equals"), lower: 0.0, upper: 0.0, per: least }];
    }
    let at_least =
        least.is_finite().then_some(Side { word: Some("at_least"), lower: 0.0, upper: f64::INFINITY, per: least });
    let at_most =
        most.is_finite().then_some(Side { word: Some("at_most"), lower: f64::NEG_INFINITY, upper: 0.0, per: most });
    at_least.into_iter().chain(at_most).collect()
}

/// Periods over which a limit holds as one.
pub struct Group {
    /// The periods it sums over, never none.
    pub periods: Vec<Period>,
    /// Whether the limit holds in each period on its own, so that the key of its row names the period.
    pub alone: bool,
}

impl Group {
    /// The first of its periods.
    #[must_use]
    pub fn first(&self) -> Option<Period> {
        self.periods.first().copied()
    }

    /// The key of the row, or of that of a [side](sides), of a limit over these periods.
    #[must_use]
    pub fn key(&self, name: &Name, side: Option<&str>, horizon: &Horizon) -> Key {
        match self.first() {
            Some(period) if self.alone => limit_key(name, side, horizon, period),
            _ => limit_over_key(name, side),
        }
    }
}

/// The periods over which a limit holds: each on its own, or several as one. In the order of the horizon.
#[must_use]
pub fn groups(limit: &Limit, horizon: &Horizon) -> Vec<Group> {
    match &limit.over {
        Over::Each => horizon.periods().map(|period| Group { periods: vec![period], alone: true }).collect(),
        Over::All => vec![Group { periods: horizon.periods().collect(), alone: false }],
        Over::Some(periods) => vec![Group { periods: periods.clone(), alone: false }],
    }
}

/// The rows of a limit by period, each with the bound that multiplies `per`.
type Rule = Vec<Option<(Made, f64)>>;

/// What columns must know of limits.
#[derive(Default)]
pub(super) struct Limits<'m> {
    /// One for each limit, or for each bound of one with `per`.
    rules: Vec<Rule>,
    activities: HashMap<&'m Name, Uses<'m>>,
    tags: HashMap<&'m Name, Uses<'m>>,
    all: Uses<'m>,
    flows: HashMap<(&'m Name, Flow), Uses<'m>>,
    surges: HashMap<(&'m Name, Option<usize>), Uses<'m>>,
}

/// The places where limits count something.
pub(super) type Uses<'m> = Vec<Use<'m>>;

/// One place where a limit counts something: by this coefficient, on this side of it.
#[derive(Clone, Copy)]
pub(super) struct Use<'m> {
    rule: usize,
    coefficient: &'m Value,
    per: bool,
}

pub(super) fn rows<'m>(frame: &Frame<'m>, rows: &mut Rows) -> Limits<'m> {
    let Model { horizon, limits, .. } = frame.model;
    let mut all = Limits::default();
    for (name, limit) in limits {
        let mut rules: BTreeMap<Option<&str>, Rule> = BTreeMap::new();
        for group in groups(limit, horizon) {
            let Some(first) = group.first() else { continue };
            for side in sides(limit, first) {
                let made = rows.push(group.key(name, side.word, horizon), side.lower, side.upper);
                let rule = rules.entry(side.word).or_insert_with(|| vec![None; frame.count]);
                group.periods.iter().for_each(|period| rule[period.position()] = Some((made, side.per)));
            }
        }
        for rule in rules.into_values() {
            all.rules.push(rule);
            all.count(&limit.terms, false);
            all.count(limit.per.iter().flatten(), true);
        }
    }
    all
}

impl<'m> Limits<'m> {
    /// Notes what the last rule counts.
    fn count(&mut self, terms: impl IntoIterator<Item = (&'m Term, &'m Value)>, per: bool) {
        let rule = self.rules.len() - 1;
        for (term, coefficient) in terms {
            let uses = match term {
                Term::Activity(name) => self.activities.entry(name).or_default(),
                Term::Tag(tag) => self.tags.entry(tag).or_default(),
                Term::All => &mut self.all,
                Term::Material(name, flow) => self.flows.entry((name, *flow)).or_default(),
                Term::Surge(name, tier) => self.surges.entry((name, *tier)).or_default(),
            };
            uses.push(Use { rule, coefficient, per });
        }
    }

    /// The places that count an activity.
    pub(super) fn of_activity(&self, name: &Name, activity: &Activity) -> Uses<'m> {
        let by_tag = activity.tags.iter().filter_map(|tag| self.tags.get(tag));
        self.activities.get(name).into_iter().chain(by_tag).chain([&self.all]).flatten().copied().collect()
    }

    /// The places that count a tier of extra capacity.
    pub(super) fn of_surge(&self, name: &Name, tier: usize) -> Uses<'m> {
        [None, Some(tier)].into_iter().filter_map(|tier| self.surges.get(&(name, tier))).flatten().copied().collect()
    }

    /// The places that count a way in which a material comes, goes or waits.
    pub(super) fn of_flow(&self, name: &Name, flow: Flow) -> Uses<'m> {
        let all_tiers = match flow {
            Flow::Purchase(Some(_)) => Some(Flow::Purchase(None)),
            Flow::Sale(Some(_)) => Some(Flow::Sale(None)),
            Flow::Late(Some(_)) => Some(Flow::Late(None)),
            _ => None,
        };
        let flows = all_tiers.into_iter().chain([flow]);
        flows.filter_map(|flow| self.flows.get(&(name, flow))).flatten().copied().collect()
    }

    /// What is counted in `uses` adds to rows in a period.
    pub(super) fn parts(&self, uses: &[Use<'m>], period: Period, parts: &mut Vec<Part>) {
        for counted in uses {
            if let Some((row, bound)) = self.rules[counted.rule][period.position()] {
                let factor = if counted.per { -bound } else { 1.0 };
                parts.push(Part { row, coefficient: counted.coefficient.at(period), factor });
            }
        }
    }
}
