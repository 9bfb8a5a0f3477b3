//! What a model means, written down a second time and another way, to hold the building of programs against.
//!
//! Nothing of the program is used: stock is what came in less what went out since the start, what is late is what was ordered less what
//! was delivered since the start, and what is used costs what it costs. Slow and plain.

use std::collections::BTreeMap;

use millreeve::lp::{Column, Key, Program, Row, RowIndex, Sense};
use millreeve::model::{Activity, Aim, Bound, Flow, Limit, Material, Model, Name, Over, Period, Resource, Term, Value};

const INF: f64 = f64::INFINITY;

/// A sum of amounts by name, and a constant.
#[derive(Clone, Debug, Default)]
pub(crate) struct Expression {
    constant: f64,
    terms: BTreeMap<String, f64>,
}

impl Expression {
    fn of(amount: String) -> Self {
        Self { constant: 0.0, terms: [(amount, 1.0)].into() }
    }

    fn add(&mut self, other: &Self, times: f64) {
        if times == 0.0 {
            return;
        }
        self.constant += times * other.constant;
        for (name, value) in &other.terms {
            *self.terms.entry(name.clone()).or_default() += times * value;
        }
    }

    fn at(&self, amounts: &BTreeMap<String, f64>) -> (f64, f64) {
        let terms = self.terms.iter().map(|(name, value)| value * amounts[name]);
        let size = terms.clone().map(f64::abs).sum::<f64>() + self.constant.abs() + 1.0;
        (self.constant + terms.sum::<f64>(), size)
    }
}

/// A rule: what is held, and between which bounds.
struct Rule {
    what: String,
    sum: Expression,
    least: f64,
    most: f64,
}

/// The rules of a model, and its aim.
pub(crate) struct Meaning<'m> {
    model: &'m Model,
    rules: Vec<Rule>,
    aim: Expression,
}

/// Every rule of `model`.
pub(crate) fn meaning(model: &Model) -> Meaning<'_> {
    let aim = Expression { constant: model.constant, ..Expression::default() };
    let mut meaning = Meaning { model, rules: Vec::new(), aim };
    for period in model.horizon.periods() {
        model.resources.iter().for_each(|(name, resource)| meaning.resource(name, resource, period));
        model.activities.iter().for_each(|(name, activity)| meaning.activity(name, activity, period));
        model.materials.iter().for_each(|(name, material)| meaning.material(name, material, period));
    }
    model.limits.iter().for_each(|(name, limit)| meaning.limit(name, limit));
    meaning
}

impl Meaning<'_> {
    fn name(&self, thing: &str, period: Period) -> String {
        self.model.horizon.label(period).map_or(thing.to_owned(), |label| format!("{thing}.{label}"))
    }

    fn level(&self, activity: &Name, period: Period) -> Expression {
        Expression::of(self.name(&format!("activities.{activity}"), period))
    }

    fn flow(&self, material: &Name, word: &str, period: Period) -> Expression {
        Expression::of(self.name(&format!("materials.{material}.{word}"), period))
    }

    /// What was ordered of a tier in a period: an amount of its own where it may be delivered late.
    fn ordered(&self, material: &Name, tier: usize, period: Period) -> Expression {
        Expression::of(self.name(&format!("ordered.{material}.{tier}"), period))
    }

    fn until(&self, period: Period) -> impl Iterator<Item = Period> + use<> {
        self.model.horizon.periods().take(period.position() + 1)
    }

    fn is_last(&self, period: Period) -> bool {
        period.position() + 1 == self.model.horizon.count()
    }

    fn hold(&mut self, what: &str, period: Option<Period>, sum: Expression, least: f64, most: f64) {
        let what = period.map_or(what.to_owned(), |period| self.name(what, period));
        self.rules.push(Rule { what, sum, least, most });
    }

    fn earn(&mut self, sum: &Expression, price: f64) {
        self.aim.add(sum, if self.model.aim == Aim::Maximise { price } else { -price });
    }

    fn resource(&mut self, name: &Name, resource: &Resource, period: Period) {
        let mut used = Expression::default();
        for (activity, Activity { uses, .. }) in &self.model.activities {
            if let Some(rate) = uses.get(name) {
                used.add(&self.level(activity, period), rate.at(period));
            }
        }
        self.earn(&used, -resource.cost.at(period));
        let mut ordinary = used;
        for (at, surge) in resource.surge.iter().enumerate() {
            let what = format!("resources.{name}.surge.{}", at + 1);
            let extra = Expression::of(self.name(&what, period));
            ordinary.add(&extra, -1.0);
            self.earn(&extra, -surge.cost.at(period));
            self.hold(&what, Some(period), extra, 0.0, surge.at_most.at(period));
        }
        let bounds = (resource.at_least.at(period), resource.capacity.at(period));
        self.hold(&format!("resources.{name}"), Some(period), ordinary, bounds.0, bounds.1);
    }

    fn activity(&mut self, name: &Name, activity: &Activity, period: Period) {
        let level = self.level(name, period);
        self.earn(&level, activity.price.at(period) - activity.cost.at(period));
        let what = format!("activities.{name}");
        if activity.prospect {
            self.hold(&what, Some(period), level, 0.0, 0.0);
            return;
        }
        if let Some(before) = period.before(1) {
            let mut change = level.clone();
            change.add(&self.level(name, before), -1.0);
            let most = activity.change_at_most.at(period);
            self.hold(&format!("{what} changes"), Some(period), change, -most, most);
        }
        self.hold(&what, Some(period), level, activity.at_least.at(period), activity.at_most.at(period));
    }

    fn material(&mut self, name: &Name, material: &Material, period: Period) {
        let discarded = self.flow(name, "discard", period);
        self.earn(&discarded, -material.discard.cost.at(period));
        self.hold("discarded", Some(period), discarded, 0.0, material.discard.at_most.at(period));
        for (at, purchase) in material.purchase.iter().enumerate() {
            let bought = self.flow(name, &format!("purchase.{}", at + 1), period);
            self.earn(&bought, -purchase.price.at(period));
            self.hold("bought", Some(period), bought, purchase.at_least.at(period), purchase.at_most.at(period));
        }
        for (at, sale) in material.sale.iter().enumerate() {
            let tier = at + 1;
            let sold = self.flow(name, &format!("sale.{tier}"), period);
            self.earn(&sold, sale.price.at(period));
            let (least, most) = (sale.at_least.at(period), sale.at_most.at(period));
            let Some(late) = &sale.late else {
                self.hold("sold", Some(period), sold, least, most);
                continue;
            };
            self.hold("delivered", Some(period), sold, 0.0, INF);
            self.hold("ordered", Some(period), self.ordered(name, tier, period), least, most);
            let owed = self.owed(name, tier, period);
            self.earn(&owed, -late.cost.at(period));
            self.hold(
                "late",
                Some(period),
                owed,
                0.0,
                if self.is_last(period) { 0.0 } else { late.at_most.at(period) },
            );
        }
        let left = self.left(name, material, period);
        let (mut least, mut most) = (0.0, 0.0);
        if let Some(stock) = &material.stock {
            self.earn(&left, -stock.cost.at(period));
            (least, most) = (stock.at_least.at(period), stock.at_most.at(period));
        }
        if let Some(closing) = material.closing.filter(|_| self.is_last(period)) {
            self.earn(&left, closing.worth);
            most = if material.stock.is_some() { most } else { INF };
            least = f64::max(least, closing.at_least);
        }
        self.hold(&format!("materials.{name} left"), Some(period), left, least, most);
    }

    /// What was ordered and is not delivered at the end of a period.
    fn owed(&self, name: &Name, tier: usize, period: Period) -> Expression {
        let mut owed = Expression::default();
        for before in self.until(period) {
            owed.add(&self.ordered(name, tier, before), 1.0);
            owed.add(&self.flow(name, &format!("sale.{tier}"), before), -1.0);
        }
        owed
    }

    /// What is there at the end of a period: what came in since the start less what went out. Where nothing can be carried, it is 0 in
    /// every period before.
    fn left(&self, name: &Name, material: &Material, period: Period) -> Expression {
        let mut left = Expression { constant: material.opening, ..Expression::default() };
        for at in self.until(period) {
            for tier in 1..=material.purchase.len() {
                left.add(&self.flow(name, &format!("purchase.{tier}"), at), 1.0);
            }
            for tier in 1..=material.sale.len() {
                left.add(&self.flow(name, &format!("sale.{tier}"), at), -1.0);
            }
            left.add(&self.flow(name, "discard", at), -1.0);
            for (activity, Activity { draws, makes, lead, .. }) in &self.model.activities {
                if let Some(rate) = draws.get(name) {
                    left.add(&self.level(activity, at), -rate.at(at));
                }
                if let (Some(rate), Some(begun)) = (makes.get(name), at.before(*lead)) {
                    left.add(&self.level(activity, begun), rate.at(begun));
                }
            }
        }
        left
    }

    fn limit(&mut self, name: &Name, limit: &Limit) {
        let all: Vec<Period> = self.model.horizon.periods().collect();
        let groups: Vec<Vec<Period>> = match &limit.over {
            Over::Each => all.iter().map(|&period| vec![period]).collect(),
            Over::All => vec![all],
            Over::Some(periods) => vec![periods.clone()],
        };
        for group in groups {
            let sum = self.counted(&limit.terms, &group);
            let (least, most) = match &limit.bound {
                Bound::Between(least, most) => (least.at(group[0]), most.at(group[0])),
                Bound::Equals(exactly) => (exactly.at(group[0]), exactly.at(group[0])),
            };
            let what = format!("limits.{name}");
            let Some(per) = &limit.per else {
                self.hold(&what, Some(group[0]), sum, least, most);
                continue;
            };
            let per = self.counted(per, &group);
            for (bound, least, most) in [(least, 0.0, INF), (most, -INF, 0.0)] {
                if bound.is_finite() {
                    let mut beyond = sum.clone();
                    beyond.add(&per, -bound);
                    self.hold(&what, Some(group[0]), beyond, least, most);
                }
            }
        }
    }

    fn counted(&self, terms: &BTreeMap<Term, Value>, group: &[Period]) -> Expression {
        let mut sum = Expression::default();
        for (term, coefficient) in terms {
            for &period in group {
                for counted in self.term(term, period) {
                    sum.add(&counted, coefficient.at(period));
                }
            }
        }
        sum
    }

    fn term(&self, term: &Term, period: Period) -> Vec<Expression> {
        let model = self.model;
        let activities = |asked: &dyn Fn(&Name, &Activity) -> bool| {
            let asked = model.activities.iter().filter(|(name, activity)| asked(name, activity));
            asked.map(|(name, _)| self.level(name, period)).collect()
        };
        let tiers = |tier: Option<usize>, count: usize| tier.map_or(1..=count, |tier| tier..=tier);
        match term {
            Term::Activity(one) => activities(&|name, _| name == one),
            Term::Tag(tag) => activities(&|_, activity| activity.tags.contains(tag)),
            Term::All => activities(&|_, _| true),
            Term::Surge(name, tier) => tiers(*tier, model.resources[name].surge.len())
                .map(|tier| Expression::of(self.name(&format!("resources.{name}.surge.{tier}"), period)))
                .collect(),
            Term::Material(name, flow) => {
                let material = &model.materials[name];
                match flow {
                    Flow::Purchase(tier) => tiers(*tier, material.purchase.len())
                        .map(|tier| self.flow(name, &format!("purchase.{tier}"), period))
                        .collect(),
                    Flow::Sale(tier) => tiers(*tier, material.sale.len())
                        .map(|tier| self.flow(name, &format!("sale.{tier}"), period))
                        .collect(),
                    Flow::Late(tier) => {
                        tiers(*tier, material.sale.len()).map(|tier| self.owed(name, tier, period)).collect()
                    }
                    Flow::Stock if material.stock.is_some() || self.is_last(period) => {
                        vec![self.left(name, material, period)]
                    }
                    Flow::Stock => vec![],
                    Flow::Discard => vec![self.flow(name, "discard", period)],
                }
            }
        }
    }

    /// All amounts, from the levels of a program's columns: what was ordered follows from what is delivered and late.
    fn amounts(&self, program: &Program, levels: &[f64]) -> BTreeMap<String, f64> {
        let columns = program.columns.iter().zip(levels);
        let mut amounts: BTreeMap<String, f64> =
            columns.map(|(column, level)| (column.key.as_str().to_owned(), *level)).collect();
        let mut ordered = Vec::new();
        for (name, material) in &self.model.materials {
            for (at, sale) in material.sale.iter().enumerate().filter(|(_, sale)| sale.late.is_some()) {
                let tier = at + 1;
                let late = |period| amounts[&self.name(&format!("materials.{name}.sale.{tier}.late"), period)];
                for period in self.model.horizon.periods() {
                    let sold = amounts[&self.name(&format!("materials.{name}.sale.{tier}"), period)];
                    let amount = sold + late(period) - period.before(1).map_or(0.0, late);
                    ordered.push((self.name(&format!("ordered.{name}.{tier}"), period), amount));
                }
                assert!(sale.at_most.numbers().iter().all(|number| *number >= 0.0));
            }
        }
        amounts.extend(ordered);
        amounts
    }

    /// Every rule that these levels break, and the aim where it is another one; empty where they mean what the model does.
    pub(crate) fn broken(&self, program: &Program, levels: &[f64], aim: f64) -> Vec<String> {
        let amounts = self.amounts(program, levels);
        let mut broken: Vec<String> = (self.rules.iter())
            .filter_map(|Rule { what, sum, least, most }| {
                let (value, size) = sum.at(&amounts);
                let slip = 1e-7 * size;
                (value < least - slip || value > most + slip).then(|| format!("{what}: {value} in [{least}, {most}]"))
            })
            .collect();
        for (name, material) in &self.model.materials {
            let carried = |period| material.stock.is_some() || material.closing.is_some() && self.is_last(period);
            for period in self.model.horizon.periods().filter(|&period| carried(period)) {
                let (left, size) = self.left(name, material, period).at(&amounts);
                let told = amounts[&self.name(&format!("materials.{name}.stock"), period)];
                if (told - left).abs() > 1e-7 * size {
                    broken.push(format!("stock of {name}: {told} is told, {left} is left"));
                }
            }
        }
        let (worked_out, size) = self.aim.at(&amounts);
        if (worked_out - aim).abs() > 1e-9 * size {
            broken.push(format!("the aim: {aim} is told, {worked_out} is worked out"));
        }
        broken
    }

    /// The same as a program of its own, to be solved by another engine.
    pub(crate) fn program(&self) -> Program {
        let mut names: Vec<&String> = self.rules.iter().flat_map(|rule| rule.sum.terms.keys()).collect();
        names.extend(self.aim.terms.keys());
        names.sort();
        names.dedup();
        let column = |name: &&String| {
            let entries = self.rules.iter().enumerate().filter_map(|(at, rule)| {
                let value = rule.sum.terms.get(*name).copied().unwrap_or(0.0);
                (value != 0.0).then_some((RowIndex(at), value))
            });
            let aim = self.aim.terms.get(*name).copied().unwrap_or(0.0);
            Column { key: Key::new(name), lower: -INF, upper: INF, aim, entries: entries.collect() }
        };
        let row = |rule: &Rule| Row {
            key: Key::new(&rule.what),
            lower: rule.least - rule.sum.constant,
            upper: rule.most - rule.sum.constant,
        };
        let sense = if self.model.aim == Aim::Maximise { Sense::Maximise } else { Sense::Minimise };
        let columns = names.iter().map(column).collect();
        Program { sense, offset: self.aim.constant, columns, rows: self.rules.iter().map(row).collect() }
    }
}
