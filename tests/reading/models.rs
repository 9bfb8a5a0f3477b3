//! Models made at random: any that reading lets through.

use std::collections::{BTreeMap, BTreeSet};

use millreeve::model::{
    Activity, Aim, Bound, Closing, Discard, Flow, Horizon, Late, Limit, Material, Model, Name, Over, Period, Purchase,
    Resource, Sale, Stock, Surge, Term, Value,
};
use proptest::collection::{btree_map, btree_set, vec};
use proptest::option;
use proptest::prelude::*;
use proptest::sample::subsequence;

fn name() -> impl Strategy<Value = Name> {
    "[a-zA-Z0-9_é瓦-]{1,6}".prop_map(|text| Name::new(&text).unwrap())
}

fn text() -> impl Strategy<Value = Option<String>> {
    option::of(prop_oneof![any::<String>(), Just("\u{202e}\u{e0041}\"\\\r\n\t\u{7f}".to_owned())])
}

fn amount() -> impl Strategy<Value = f64> {
    prop_oneof![
        (-1_000_000..1_000_000i32).prop_map(f64::from),
        -1e15..1e15f64,
        (-1.0..1.0f64).prop_map(|x| x * 1e-6),
        Just(0.0),
        Just(1e15),
        Just(0.1 + 0.2),
    ]
}

/// The values of one model: as many numbers as it has periods, or one for all.
#[derive(Clone)]
struct Values {
    horizon: Horizon,
}

impl Values {
    fn of(&self, number: impl Strategy<Value = f64> + Clone + 'static) -> BoxedStrategy<Value> {
        let every = number.clone().prop_map(Value::Every);
        if self.horizon.is_named() {
            prop_oneof![3 => every, 1 => vec(number, self.horizon.count()).prop_map(Value::of)].boxed()
        } else {
            every.boxed()
        }
    }

    fn amount(&self) -> BoxedStrategy<Value> {
        self.of(amount().boxed())
    }

    fn rate(&self) -> BoxedStrategy<Value> {
        self.of(amount().prop_map(|x| if x.abs() < 1e-9 { 0.0 } else { x }).boxed())
    }

    /// An upper bound of what is never below 0.
    fn room(&self) -> BoxedStrategy<Value> {
        self.of(prop_oneof![3 => amount().prop_map(f64::abs), 1 => Just(f64::INFINITY)].boxed())
    }

    /// A lower and an upper bound, `low` where there is no lower one, each of them `low` or more.
    fn bounds(&self, low: f64, least: f64) -> BoxedStrategy<(Value, Value)> {
        let one = amount().prop_map(move |x| if x < least { -x } else { x }).boxed();
        let pair = (one.clone(), one).prop_map(|(a, b)| (a.min(b), a.max(b)));
        let pairs = prop_oneof![pair.clone().prop_map(|pair| vec![pair]), vec(pair, self.horizon.count())];
        let named = self.horizon.is_named();
        (pairs, any::<(bool, bool)>())
            .prop_map(move |(pairs, (has_least, has_most))| {
                let pairs = if named { &pairs[..] } else { &pairs[..1] };
                let leasts: Vec<f64> = pairs.iter().map(|pair| if has_least { pair.0 } else { low }).collect();
                let mosts = pairs.iter().zip(&leasts);
                let mosts = mosts.map(|(pair, &low)| if has_most { pair.1.max(low) } else { f64::INFINITY }).collect();
                (Value::of(leasts), Value::of(mosts))
            })
            .boxed()
    }

    /// Numbers for so many tiers, in each period in ascending order.
    fn ascending(&self, tiers: usize) -> BoxedStrategy<Vec<Value>> {
        vec(self.amount(), tiers)
            .prop_map(|mut values| {
                let longest = values.iter().map(|value| value.numbers().len()).max().unwrap_or(1);
                let mut lists = vec![Vec::new(); values.len()];
                let horizon = Horizon::of((0..longest).map(|at| Name::new(&at.to_string()).unwrap()).collect());
                for period in horizon.periods() {
                    let mut numbers: Vec<f64> = values.iter().map(|value| value.at(period)).collect();
                    numbers.sort_by(f64::total_cmp);
                    lists.iter_mut().zip(numbers).for_each(|(list, number)| list.push(number));
                }
                values = lists.into_iter().map(Value::of).collect();
                values
            })
            .boxed()
    }

    fn rates(&self, of: &[Name]) -> BoxedStrategy<BTreeMap<Name, Value>> {
        let names = of.to_vec();
        (subsequence(names.clone(), 0..=names.len()), vec(self.rate(), names.len()))
            .prop_map(|(names, rates)| names.into_iter().zip(rates).collect())
            .boxed()
    }
}

fn resource(values: &Values) -> impl Strategy<Value = Resource> + use<> {
    let own = values.clone();
    let surge = (0..3usize).prop_flat_map(move |tiers| (own.ascending(tiers), vec(own.room(), tiers)));
    (text(), text(), values.bounds(f64::NEG_INFINITY, f64::NEG_INFINITY), values.amount(), surge).prop_map(
        |(label, unit, (at_least, capacity), cost, (costs, rooms))| Resource {
            label,
            unit,
            capacity,
            at_least,
            cost,
            surge: costs.into_iter().zip(rooms).map(|(cost, at_most)| Surge { at_most, cost }).collect(),
        },
    )
}

fn activity(
    values: &Values,
    resources: &[Name],
    materials: &[Name],
    minimise: bool,
) -> impl Strategy<Value = Activity> + use<> {
    let amounts = (values.amount(), values.amount(), values.room());
    let rates = (values.rates(resources), values.rates(materials), values.rates(materials));
    let rest = (values.bounds(0.0, f64::NEG_INFINITY), btree_set(name(), 0..3), any::<(bool, bool)>(), 0..3usize);
    (text(), text(), amounts, rates, rest).prop_map(move |(label, unit, amounts, rates, rest)| {
        let (price, cost, change_at_most) = amounts;
        let (uses, draws, makes) = rates;
        let ((at_least, at_most), tags, (prospect, free), lead) = rest;
        // Where `at_least` is left out, it is 0.
        let at_most = match &at_least {
            Value::Every(0.0) => Value::of(at_most.numbers().iter().map(|most| most.max(0.0)).collect()),
            _ => at_most,
        };
        Activity {
            label,
            unit,
            price: if minimise { Value::Every(0.0) } else { price },
            cost,
            uses,
            draws,
            makes,
            lead,
            at_least: match (prospect, free) {
                (true, false) => Value::Every(0.0),
                (_, true) => Value::Every(f64::NEG_INFINITY),
                _ => at_least,
            },
            at_most: if prospect { Value::Every(f64::INFINITY) } else { at_most },
            change_at_most,
            tags,
            prospect,
        }
    })
}

fn material(values: &Values) -> impl Strategy<Value = Material> + use<> {
    let own = values.clone();
    let bought = (0..3usize).prop_flat_map(move |tiers| (own.ascending(tiers), vec(own.bounds(0.0, 0.0), tiers)));
    let own = values.clone();
    let sold = (0..3usize).prop_flat_map(move |tiers| {
        let late = option::of((own.amount(), own.room()));
        (own.ascending(tiers), vec(own.bounds(0.0, 0.0), tiers), vec(late, tiers))
    });
    let kept = (option::of((values.amount(), values.bounds(0.0, 0.0))), option::of((amount(), amount())));
    let discard = (values.amount(), values.room());
    let horizon = values.horizon.clone();
    (text(), text(), amount(), bought, sold, kept, discard).prop_map(
        move |(label, unit, opening, bought, sold, (stock, closing), (cost, at_most))| {
            let purchase = bought.0.into_iter().zip(bought.1);
            let purchase = purchase.map(|(price, (at_least, at_most))| Purchase { price, at_least, at_most });
            let sale = sold.0.into_iter().rev().zip(sold.1).zip(sold.2);
            let sale = sale.map(|((price, (at_least, at_most)), late)| {
                let late = late.map(|(cost, at_most)| Late { cost, at_most });
                Sale { price, at_least, at_most, late }
            });
            let stock = stock.map(|(cost, (at_least, at_most))| Stock { cost, at_least, at_most });
            let last: Period = horizon.periods().last().unwrap();
            let room = stock.as_ref().map_or(f64::INFINITY, |stock| stock.at_most.at(last));
            let closing = closing.map(|(at_least, worth)| Closing { at_least: at_least.abs().min(room), worth });
            Material {
                label,
                unit,
                opening: opening.abs(),
                purchase: purchase.collect(),
                sale: sale.collect(),
                closing: closing.filter(|closing| stock.is_none() || *closing != Closing::default()),
                stock,
                discard: Discard { cost, at_most },
            }
        },
    )
}

/// All that a limit can sum in a model.
fn terms(model: &Model) -> Vec<Term> {
    let tags: BTreeSet<&Name> = model.activities.values().flat_map(|activity| &activity.tags).collect();
    let mut terms: Vec<Term> = model.activities.keys().cloned().map(Term::Activity).collect();
    terms.extend(tags.into_iter().cloned().map(Term::Tag));
    terms.push(Term::All);
    let tiers = |count: usize| (0..=count).filter(move |_| count > 0).map(|tier| (tier > 0).then_some(tier));
    for (name, resource) in &model.resources {
        terms.extend(tiers(resource.surge.len()).map(|tier| Term::Surge(name.clone(), tier)));
    }
    for (name, material) in &model.materials {
        let late: Vec<usize> = (0..material.sale.len()).filter(|&at| material.sale[at].late.is_some()).collect();
        let mut flows = vec![Flow::Discard];
        flows.extend(tiers(material.purchase.len()).map(Flow::Purchase));
        flows.extend(tiers(material.sale.len()).map(Flow::Sale));
        flows.extend(late.iter().map(|at| Flow::Late(Some(at + 1))));
        flows.extend((!late.is_empty()).then_some(Flow::Late(None)));
        flows.extend((material.stock.is_some() || material.closing.is_some()).then_some(Flow::Stock));
        terms.extend(flows.into_iter().map(|flow| Term::Material(name.clone(), flow)));
    }
    terms
}

fn over(horizon: &Horizon) -> BoxedStrategy<Over> {
    let periods: Vec<Period> = horizon.periods().collect();
    match (horizon.is_named(), periods.len()) {
        (false, _) => Just(Over::Each).boxed(),
        (true, 1) => prop_oneof![Just(Over::Each), Just(Over::All)].boxed(),
        (true, count) => {
            let some = subsequence(periods, 1..count).prop_map(Over::Some);
            prop_oneof![Just(Over::Each), Just(Over::All), some].boxed()
        }
    }
}

fn limit(values: &Values, terms: &[Term]) -> impl Strategy<Value = Limit> + use<> {
    let (own, terms) = (values.clone(), terms.to_vec());
    let sum = move |least: usize| {
        (subsequence(terms.clone(), least..=terms.len()), vec(own.rate(), terms.len()))
            .prop_map(|(terms, rates)| terms.into_iter().zip(rates).collect::<BTreeMap<_, _>>())
    };
    let bound = |values: &Values| {
        prop_oneof![
            values.bounds(f64::NEG_INFINITY, f64::NEG_INFINITY).prop_map(|(low, high)| Bound::Between(low, high)),
            values.amount().prop_map(Bound::Equals),
        ]
    };
    let alone = Values { horizon: Horizon::single() };
    let bounds = (bound(values), bound(&alone));
    let over = over(&values.horizon);
    (text(), sum(0), option::of(sum(1)), bounds, over).prop_map(|(label, terms, per, (each, together), over)| Limit {
        label,
        terms,
        per,
        bound: if over == Over::Each { each } else { together },
        over,
    })
}

fn horizon() -> impl Strategy<Value = Horizon> {
    // Some of them plan a single nameless period.
    btree_set(name(), 0..4)
        .prop_flat_map(|names| Just(names.into_iter().collect::<Vec<_>>()).prop_shuffle().prop_map(Horizon::of))
}

/// Resources and materials, and what the model itself says.
fn head() -> impl Strategy<Value = Model> {
    horizon().prop_flat_map(|horizon| {
        let values = Values { horizon: horizon.clone() };
        let sections = (btree_map(name(), resource(&values), 0..4), btree_map(name(), material(&values), 0..4));
        let words = (text(), text(), any::<bool>(), amount());
        (Just(horizon), words, sections).prop_map(|(horizon, (title, currency, minimise, constant), sections)| Model {
            title: title.map(|text| text.chars().take(900).collect()),
            currency,
            aim: if minimise { Aim::Minimise } else { Aim::Maximise },
            constant,
            horizon,
            resources: sections.0,
            materials: sections.1,
            ..Model::default()
        })
    })
}

/// Any model that reading lets through.
pub(super) fn model() -> impl Strategy<Value = Model> {
    let with_activities = head().prop_flat_map(|model| {
        let values = Values { horizon: model.horizon.clone() };
        let resources: Vec<Name> = model.resources.keys().cloned().collect();
        let materials: Vec<Name> = model.materials.keys().cloned().collect();
        let activity = activity(&values, &resources, &materials, model.aim == Aim::Minimise);
        (Just(model), btree_map(name(), activity, 0..4))
    });
    with_activities.prop_flat_map(|(model, activities)| {
        let model = Model { activities, ..model };
        let values = Values { horizon: model.horizon.clone() };
        let limit = limit(&values, &terms(&model));
        (Just(model), btree_map(name(), limit, 0..3)).prop_map(|(model, limits)| Model { limits, ..model })
    })
}
