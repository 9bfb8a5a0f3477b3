//! A small tileworks, solved by hand for any kiln, press and prices for which floor and wall tiles fill both.

use std::collections::BTreeMap;

use millreeve::lp::{self, Program};
use millreeve::model::meaning::Meaning;
use millreeve::model::{Activity, Aim, Bound, Horizon, Limit, Model, Name, Resource, Term};
use millreeve::plan::{self, Plan};
use millreeve::solver::basis::Basis;
use millreeve::solver::message::{Optimum, Ranges};
use millreeve::solver::proof::Proof;

const INF: f64 = f64::INFINITY;

pub(crate) fn name(text: &str) -> Name {
    Name::new(text).unwrap()
}

fn resource(unit: &str, capacity: f64) -> Resource {
    Resource { unit: Some(unit.to_owned()), capacity: capacity.into(), ..Resource::default() }
}

pub(crate) fn activity(price: f64, cost: f64, uses: &[(&str, f64)]) -> Activity {
    Activity {
        unit: Some("m2".to_owned()),
        price: price.into(),
        cost: cost.into(),
        uses: uses.iter().map(|&(resource, rate)| (name(resource), rate.into())).collect(),
        ..Activity::default()
    }
}

/// Floor and wall tiles in the mix, mosaic idle, a terrace slab asked about.
pub(crate) fn model() -> Model {
    let floor = activity(21.0, 6.5, &[("dryer", 0.01), ("kiln", 0.02), ("press", 0.01)]);
    let wall = activity(18.0, 5.0, &[("dryer", 0.01), ("kiln", 0.015), ("press", 0.02)]);
    let mosaic = activity(30.0, 9.0, &[("kiln", 0.03), ("press", 0.015)]);
    let slab = activity(34.0, 2.0, &[("kiln", 0.045), ("press", 0.02)]);
    let glazed = [name("glazed")];
    let share = Limit {
        terms: [(Term::Tag(name("glazed")), 1.0.into())].into(),
        per: Some([(Term::All, 1.0.into())].into()),
        bound: Bound::Between(f64::NEG_INFINITY.into(), 0.6.into()),
        ..Limit::default()
    };
    Model {
        title: Some("Tileworks, next fortnight".to_owned()),
        currency: Some("EUR".to_owned()),
        aim: Aim::Maximise,
        constant: 0.0,
        horizon: Horizon::single(),
        materials: [].into(),
        resources: [
            (name("dryer"), resource("h", 90.0)),
            (name("kiln"), Resource { label: Some("Tunnel kiln".to_owned()), ..resource("h", 120.0) }),
            (name("press"), resource("h", 100.0)),
        ]
        .into(),
        activities: [
            (name("floor_tile"), Activity { at_least: 500.0.into(), ..floor }),
            (name("mosaic"), Activity { tags: glazed.clone().into(), ..mosaic }),
            (name("terrace_slab"), Activity { prospect: true, ..slab }),
            (name("wall_tile"), Activity { tags: glazed.into(), ..wall }),
        ]
        .into(),
        limits: [(name("glazed_share"), share)].into(),
    }
}

/// The optimum with floor and wall tiles between their bounds, the kiln and the press full, all else slack, by Cramer's rule:
/// 0.02 f + 0.015 w = kiln, 0.01 f + 0.02 w = press. Worths solve the transposed equations for the margins.
pub(crate) fn optimum(model: &Model, program: &Program) -> Optimum {
    let number = |value: &millreeve::model::Value| value.numbers()[0];
    let capacity = |resource: &str| number(&model.resources[&name(resource)].capacity);
    let margin = |what: &str| {
        let activity = &model.activities[&name(what)];
        number(&activity.price) - number(&activity.cost)
    };
    let (kiln, press) = (capacity("kiln"), capacity("press"));
    let determinant = 0.02 * 0.02 - 0.015 * 0.01;
    let floor = (0.02 * kiln - 0.015 * press) / determinant;
    let wall = (0.02 * press - 0.01 * kiln) / determinant;
    let (floor_margin, wall_margin) = (margin("floor_tile"), margin("wall_tile"));
    let kiln_worth = (0.02 * floor_margin - 0.01 * wall_margin) / determinant;
    let press_worth = (0.02 * wall_margin - 0.015 * floor_margin) / determinant;

    let levels = BTreeMap::from([("activities.floor_tile", floor), ("activities.wall_tile", wall)]);
    let ranges_of_aims = BTreeMap::from([
        ("activities.floor_tile", (0.5 * wall_margin, wall_margin * 4.0 / 3.0)),
        ("activities.wall_tile", (floor_margin * 0.75, floor_margin * 2.0)),
    ]);
    let worths = BTreeMap::from([("resources.kiln", kiln_worth), ("resources.press", press_worth)]);
    // The floor tile's commitment of 500 and the wall tile's 0 end the ranges.
    let ranges_of_bounds = BTreeMap::from([
        ("resources.kiln", ((500.0 * determinant + 0.015 * press) / 0.02, 2.0 * press)),
        ("resources.press", (0.5 * kiln, (0.02 * kiln - 500.0 * determinant) / 0.015)),
    ]);

    let level_of = |key: &lp::Key| levels.get(key.as_str()).copied().unwrap_or(0.0);
    let levels: Vec<f64> = program.columns.iter().map(|column| level_of(&column.key)).collect();
    let worths: Vec<f64> =
        program.rows.iter().map(|row| worths.get(row.key.as_str()).copied().unwrap_or(0.0)).collect();
    let mut sums = vec![0.0; program.rows.len()];
    let mut gains = Vec::new();
    for (column, level) in program.columns.iter().zip(&levels) {
        let mut gain = column.aim;
        for &(row, rate) in &column.entries {
            sums[row.0] += rate * level;
            gain -= rate * worths[row.0];
        }
        gains.push(gain);
    }
    let aims = program.columns.iter().map(|column| column.key.as_str());
    let bounds = program.rows.iter().zip(&sums);
    Optimum {
        aim: program.columns.iter().zip(&levels).map(|(column, level)| column.aim * level).sum(),
        ranges: Some(Ranges {
            aims: aims.map(|key| ranges_of_aims.get(key).copied().unwrap_or((-INF, INF))).collect(),
            bounds: bounds.map(|(row, &sum)| *ranges_of_bounds.get(row.key.as_str()).unwrap_or(&(sum, INF))).collect(),
        }),
        levels,
        sums,
        gains,
        worths,
        basis: Basis::default(),
        exact: true,
        levels_unique: true,
        spans: None,
        worths_unique: true,
        known: None,
        proof: Proof::default(),
    }
}

pub(crate) fn planned(model: &Model) -> Plan {
    let program = lp::build(model);
    plan::make(model, Meaning::of(model), &program, &optimum(model, &program)).unwrap()
}
