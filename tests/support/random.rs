//! Random models of a tileworks: feasible, infeasible and unbounded ones.

use std::collections::{BTreeMap, BTreeSet};

use millreeve::model::{Activity, Aim, Bound, Limit, Model, Name, Resource, Term, Value};

use crate::rng::Rng;

const INF: f64 = f64::INFINITY;
pub(crate) const TAGS: [&str; 3] = ["glazed", "small", "thick"];

/// How the numbers of a model look.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Grain {
    /// Small whole numbers, which meet in one point more often than not.
    Coarse,
    /// The same, and every price follows from one resource: many plans earn alike.
    Tied,
    /// Decimals.
    Fine,
}

/// The model that `seed` stands for; a third of each grain.
pub(crate) fn model(seed: u64) -> Model {
    let grain = match seed % 3 {
        0 => Grain::Coarse,
        1 => Grain::Tied,
        _ => Grain::Fine,
    };
    Draw { rng: &mut Rng::new(seed), grain }.model()
}

/// Draws parts of models.
pub(crate) struct Draw<'r> {
    pub(crate) rng: &'r mut Rng,
    pub(crate) grain: Grain,
}

pub(crate) fn name(text: &str) -> Name {
    Name::new(text).unwrap()
}

impl Draw<'_> {
    fn model(&mut self) -> Model {
        let mut model = Model { aim: if self.once_in(3) { Aim::Minimise } else { Aim::Maximise }, ..Model::default() };
        if self.once_in(4) {
            model.constant = self.number(-50, 50);
        }
        for at in 0..1 + self.rng.below(4) {
            let resource = self.resource();
            model.resources.insert(name(&format!("r{at}")), resource);
        }
        for at in 0..2 + self.rng.below(7) {
            let activity = self.activity(&model);
            model.activities.insert(name(&format!("a{at}")), activity);
        }
        for at in 0..self.rng.below(5) {
            let limit = self.limit(&model);
            model.limits.insert(name(&format!("l{at}")), limit);
        }
        model
    }

    pub(crate) fn once_in(&mut self, times: usize) -> bool {
        self.rng.below(times) == 0
    }

    /// A number between two whole ones.
    pub(crate) fn number(&mut self, least: i32, most: i32) -> f64 {
        if self.grain == Grain::Fine {
            return (self.rng.between(f64::from(least), f64::from(most)) * 1000.0).round() / 1000.0;
        }
        let span = usize::try_from(most - least + 1).unwrap();
        f64::from(least + i32::try_from(self.rng.below(span)).unwrap())
    }

    pub(crate) fn resource(&mut self) -> Resource {
        let capacity = if self.once_in(10) { INF } else { self.number(4, 40) };
        let at_least = if self.once_in(8) { capacity.min(self.number(0, 6)) } else { -INF };
        let cost = if self.once_in(4) { self.number(0, 3) } else { 0.0 };
        Resource { capacity: capacity.into(), at_least: at_least.into(), cost: cost.into(), ..Resource::default() }
    }

    pub(crate) fn rate(&mut self) -> f64 {
        let rate = self.number(1, 4);
        if self.once_in(20) { -rate } else { rate }
    }

    pub(crate) fn activity(&mut self, model: &Model) -> Activity {
        let mut uses: BTreeMap<Name, Value> = BTreeMap::new();
        for resource in model.resources.keys() {
            if !self.once_in(4) {
                uses.insert(resource.clone(), self.rate().into());
            }
        }
        let mut activity = Activity { uses, ..Activity::default() };
        self.priced(&mut activity, model.aim);
        let least = match self.rng.below(24) {
            0 => -INF,
            1 => self.number(-6, -1),
            2 | 3 => self.number(1, 4),
            _ => 0.0,
        };
        let most = if self.once_in(2) { INF } else { least.max(0.0) + self.number(0, 9) };
        (activity.at_least, activity.at_most) = (least.into(), most.into());
        activity.tags = TAGS.iter().filter(|_| self.once_in(3)).map(|tag| name(tag)).collect::<BTreeSet<_>>();
        activity.prospect = self.once_in(10);
        activity
    }

    /// Gives an activity a price or cost that the aim allows.
    pub(crate) fn priced(&mut self, activity: &mut Activity, aim: Aim) {
        let tied = activity.uses.values().next().map_or(1.0, |rate| rate.numbers()[0]);
        let money = if self.grain == Grain::Tied { 3.0 * tied } else { self.number(1, 12) };
        let cost = if self.once_in(3) && self.grain != Grain::Tied { self.number(0, 3) } else { 0.0 };
        match aim {
            Aim::Maximise => (activity.price, activity.cost) = (money.into(), cost.into()),
            Aim::Minimise => {
                let sign = if self.once_in(12) { -1.0 } else { 1.0 };
                (activity.price, activity.cost) = (0.0.into(), (sign * money + cost).into());
            }
        }
    }

    pub(crate) fn term(&mut self, model: &Model) -> Term {
        match self.rng.below(6) {
            0 => Term::All,
            1 | 2 => Term::Tag(name(TAGS[self.rng.below(TAGS.len())])),
            _ => {
                let names: Vec<&Name> = model.activities.keys().collect();
                Term::Activity((*self.rng.pick(&names)).clone())
            }
        }
    }

    fn terms(&mut self, model: &Model) -> BTreeMap<Term, Value> {
        (0..1 + self.rng.below(3)).map(|_| (self.term(model), self.rate().into())).collect()
    }

    pub(crate) fn limit(&mut self, model: &Model) -> Limit {
        let terms = self.terms(model);
        if self.once_in(4) {
            let share = |draw: &mut Self| if draw.grain == Grain::Fine { draw.rng.share() } else { 0.5 };
            let per = Some(self.terms(model));
            return Limit { terms, per, bound: Bound::Between((-INF).into(), share(self).into()), ..Limit::default() };
        }
        Limit { terms, bound: self.bound(model.aim), ..Limit::default() }
    }

    pub(crate) fn bound(&mut self, aim: Aim) -> Bound {
        let least = self.number(1, 9);
        let floor = if aim == Aim::Minimise { 2 } else { 6 };
        match self.rng.below(12) {
            0 => Bound::Equals(least.into()),
            1 => Bound::Between(least.into(), (least + self.number(0, 9)).into()),
            at if at % floor == 0 => Bound::Between(least.into(), INF.into()),
            _ => Bound::Between((-INF).into(), (3.0 * least).into()),
        }
    }
}
