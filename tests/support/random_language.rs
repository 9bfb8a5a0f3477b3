//! Random models over the whole language: periods, materials, extra capacity, limits of every sort.

use std::collections::BTreeMap;

use millreeve::model::{
    Activity, Aim, Bound, Closing, Discard, Flow, Horizon, Late, Limit, Material, Model, Name, Over, Period, Purchase,
    Resource, Sale, Stock, Surge, Term, Value,
};

use crate::rng::Rng;

const INF: f64 = f64::INFINITY;
const TAGS: [&str; 2] = ["glazed", "small"];

pub(crate) fn name(text: &str) -> Name {
    Name::new(text).unwrap()
}

/// The model that `seed` stands for: every other one in whole numbers, which meet in one point more often than not.
pub(crate) fn model(seed: u64) -> Model {
    Draw { rng: &mut Rng::new(seed), coarse: seed.is_multiple_of(2) }.model()
}

/// The horizon of so many weeks from one on. From `w9` to `w10`, the order of periods is not the byte order of their names.
pub(crate) fn weeks(first: usize, count: usize) -> Horizon {
    Horizon::of((first..first + count).map(|week| name(&format!("w{week}"))).collect())
}

/// Draws parts of models.
pub(crate) struct Draw<'r> {
    pub(crate) rng: &'r mut Rng,
    pub(crate) coarse: bool,
}

impl Draw<'_> {
    fn model(&mut self) -> Model {
        let aim = if self.once_in(3) { Aim::Minimise } else { Aim::Maximise };
        let horizon = if self.once_in(6) { Horizon::single() } else { weeks(8, 1 + self.rng.below(4)) };
        let mut model = Model { aim, horizon, ..Model::default() };
        if self.once_in(4) {
            model.constant = self.number(-50, 50);
        }
        for at in 0..1 + self.rng.below(2) {
            let resource = self.resource(&model);
            model.resources.insert(name(&format!("r{at}")), resource);
        }
        for at in 0..1 + self.rng.below(3) {
            let material = self.material(&model);
            model.materials.insert(name(&format!("m{at}")), material);
        }
        for at in 0..2 + self.rng.below(3) {
            let activity = self.activity(&model);
            model.activities.insert(name(&format!("a{at}")), activity);
        }
        for at in 0..self.rng.below(4) {
            let limit = self.limit(&model);
            model.limits.insert(name(&format!("l{at}")), limit);
        }
        model
    }

    pub(crate) fn once_in(&mut self, times: usize) -> bool {
        self.rng.below(times) == 0
    }

    pub(crate) fn number(&mut self, least: i32, most: i32) -> f64 {
        if !self.coarse {
            return (self.rng.between(f64::from(least), f64::from(most)) * 1000.0).round() / 1000.0;
        }
        let span = usize::try_from(most - least + 1).unwrap();
        f64::from(least + i32::try_from(self.rng.below(span)).unwrap())
    }

    /// A value, by period every third time.
    pub(crate) fn value(&mut self, model: &Model, least: i32, most: i32) -> Value {
        if !model.horizon.is_named() || !self.once_in(3) {
            return self.number(least, most).into();
        }
        Value::Listed(model.horizon.periods().map(|_| self.number(least, most)).collect())
    }

    /// An upper limit: none once in so many times, in all periods or in some.
    pub(crate) fn most(&mut self, model: &Model, times: usize, least: i32, most: i32) -> Value {
        if self.once_in(times) {
            return INF.into();
        }
        match self.value(model, least, most) {
            Value::Listed(mut numbers) if self.once_in(3) => {
                let at = self.rng.below(numbers.len());
                numbers[at] = INF;
                Value::Listed(numbers)
            }
            value => value,
        }
    }

    pub(crate) fn resource(&mut self, model: &Model) -> Resource {
        let capacity = self.most(model, 8, 6, 40);
        let at_least = if self.once_in(8) { self.number(0, 3) } else { -INF };
        let cost = if self.once_in(3) { self.value(model, 0, 3) } else { 0.0.into() };
        let mut surge = Vec::new();
        let mut dear = self.number(1, 4);
        for _ in 0..self.rng.below(3) {
            surge.push(self.surge(model, dear));
            dear += self.number(0, 4);
        }
        Resource { capacity, at_least: at_least.into(), cost, surge, ..Resource::default() }
    }

    pub(crate) fn surge(&mut self, model: &Model, cost: f64) -> Surge {
        Surge { at_most: self.value(model, 0, 8), cost: cost.into() }
    }

    pub(crate) fn rates(&mut self, model: &Model, names: &[Name], times: usize) -> BTreeMap<Name, Value> {
        let mut rates = BTreeMap::new();
        for name in names {
            if self.once_in(times) {
                rates.insert(name.clone(), self.value(model, 1, 4));
            }
        }
        rates
    }

    pub(crate) fn activity(&mut self, model: &Model) -> Activity {
        let resources: Vec<Name> = model.resources.keys().cloned().collect();
        let materials: Vec<Name> = model.materials.keys().cloned().collect();
        let mut activity = Activity {
            uses: self.rates(model, &resources, 1),
            draws: self.rates(model, &materials, 3),
            makes: self.rates(model, &materials, 2),
            lead: if self.once_in(3) { 1 + self.rng.below(2) } else { 0 },
            change_at_most: if self.once_in(3) { self.most(model, 4, 0, 6) } else { INF.into() },
            tags: TAGS.iter().filter(|_| self.once_in(2)).map(|tag| name(tag)).collect(),
            prospect: self.once_in(10),
            ..Activity::default()
        };
        self.priced(&mut activity, model);
        if self.once_in(5) {
            activity.at_least = self.value(model, 0, 2);
        }
        activity.at_most = self.most(model, 4, 3, 12);
        activity
    }

    /// Gives an activity a price or cost that the aim allows.
    pub(crate) fn priced(&mut self, activity: &mut Activity, model: &Model) {
        activity.cost = self.value(model, 0, 4);
        activity.price = match model.aim {
            Aim::Maximise => self.value(model, 0, 9),
            Aim::Minimise => 0.0.into(),
        };
    }

    pub(crate) fn material(&mut self, model: &Model) -> Material {
        let mut material = Material::default();
        if self.once_in(2) {
            material.opening = self.number(0, 9);
        }
        let mut price = self.number(1, 6);
        for _ in 0..self.rng.below(3) {
            material.purchase.push(self.purchase(model, price));
            price += self.number(0, 3);
        }
        let mut price = self.number(3, 12);
        for _ in 0..self.rng.below(3) {
            material.sale.push(self.sale(model, price));
            price -= self.number(0, 3);
        }
        material.stock = (!self.once_in(3)).then(|| self.stock(model));
        material.closing = self.once_in(2).then(|| self.closing());
        if self.once_in(2) {
            material.discard = Discard { cost: self.value(model, 0, 3), at_most: self.most(model, 2, 0, 9) };
        }
        material
    }

    pub(crate) fn purchase(&mut self, model: &Model, price: f64) -> Purchase {
        let at_least = if self.once_in(6) { self.value(model, 0, 2) } else { 0.0.into() };
        Purchase { price: price.into(), at_least, at_most: self.most(model, 3, 3, 20) }
    }

    pub(crate) fn sale(&mut self, model: &Model, price: f64) -> Sale {
        let at_least = if self.once_in(3) { self.value(model, 0, 3) } else { 0.0.into() };
        let late = self.once_in(2).then(|| self.late(model));
        Sale { price: price.into(), at_least, at_most: self.most(model, 20, 3, 12), late }
    }

    pub(crate) fn late(&mut self, model: &Model) -> Late {
        Late { cost: self.value(model, 0, 2), at_most: self.most(model, 3, 0, 6) }
    }

    pub(crate) fn stock(&mut self, model: &Model) -> Stock {
        let at_least = if self.once_in(3) { self.value(model, 0, 3) } else { 0.0.into() };
        Stock { cost: self.value(model, 0, 1), at_least, at_most: self.most(model, 2, 4, 20) }
    }

    pub(crate) fn closing(&mut self) -> Closing {
        Closing {
            at_least: if self.once_in(2) { self.number(0, 4) } else { 0.0 },
            worth: if self.once_in(2) { self.number(0, 2) } else { 0.0 },
        }
    }

    pub(crate) fn term(&mut self, model: &Model) -> Term {
        match self.rng.below(9) {
            0 => Term::All,
            1 | 2 => Term::Tag(name(TAGS[self.rng.below(TAGS.len())])),
            3 => self.surge_term(model).unwrap_or(Term::All),
            4..7 => self.flow_term(model),
            _ => {
                let names: Vec<&Name> = model.activities.keys().collect();
                Term::Activity((*self.rng.pick(&names)).clone())
            }
        }
    }

    /// Some or all of the extra capacity of a resource that has any.
    fn surge_term(&mut self, model: &Model) -> Option<Term> {
        let (name, resource) = model.resources.iter().find(|(_, resource)| !resource.surge.is_empty())?;
        let tier = self.once_in(2).then(|| 1 + self.rng.below(resource.surge.len()));
        Some(Term::Surge(name.clone(), tier))
    }

    fn flow_term(&mut self, model: &Model) -> Term {
        let names: Vec<&Name> = model.materials.keys().collect();
        let name = (*self.rng.pick(&names)).clone();
        let material = &model.materials[&name];
        let mut flows = vec![Flow::Discard];
        flows.extend((material.stock.is_some() || material.closing.is_some()).then_some(Flow::Stock));
        for tier in [None, Some(1), Some(2)] {
            let has = |count: usize| tier.map_or(count > 0, |tier| tier <= count);
            flows.extend(has(material.purchase.len()).then_some(Flow::Purchase(tier)));
            flows.extend(has(material.sale.len()).then_some(Flow::Sale(tier)));
            let late = material.sale.iter().filter(|sale| sale.late.is_some()).count();
            flows.extend((has(late) && late == material.sale.len()).then_some(Flow::Late(tier)));
        }
        Term::Material(name, *self.rng.pick(&flows))
    }

    fn terms(&mut self, model: &Model) -> BTreeMap<Term, Value> {
        (0..1 + self.rng.below(3)).map(|_| (self.term(model), self.value(model, 1, 4))).collect()
    }

    pub(crate) fn limit(&mut self, model: &Model) -> Limit {
        let terms = self.terms(model);
        let over = self.over(model);
        let alone = over == Over::Each;
        let per = self.once_in(3).then(|| self.terms(model));
        let bound = self.bound(model, per.is_some(), alone);
        Limit { terms, per, bound, over, ..Limit::default() }
    }

    pub(crate) fn bound(&mut self, model: &Model, per: bool, alone: bool) -> Bound {
        let value = |draw: &mut Self, least, most| {
            if alone { draw.value(model, least, most) } else { draw.number(least, most).into() }
        };
        match (self.rng.below(8), per) {
            (0, true) => Bound::Between(0.0.into(), value(self, 1, 2)),
            (_, true) => Bound::Between((-INF).into(), value(self, 0, 2)),
            (0, false) => Bound::Equals(value(self, 0, 4)),
            (1, false) => Bound::Between(value(self, 0, 4), INF.into()),
            (2, false) => Bound::Between(value(self, 0, 2), value(self, 9, 40)),
            (_, false) => Bound::Between((-INF).into(), value(self, 9, 40)),
        }
    }

    pub(crate) fn over(&mut self, model: &Model) -> Over {
        let periods: Vec<Period> = model.horizon.periods().collect();
        match self.rng.below(4) {
            0 => Over::All,
            1 if periods.len() > 1 => Over::Some(periods[self.rng.below(periods.len() - 1)..].to_vec()),
            _ => Over::Each,
        }
    }
}
