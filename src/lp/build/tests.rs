//! A tileworks of three weeks with everything a model can say, and the program it stands for, written out.

use std::fmt::Write as _;

use super::build;
use crate::lp::program::Program;
use crate::model::{
    Activity, Aim, Bound, Closing, Discard, Flow, Horizon, Late, Limit, Material, Model, Name, Over, Purchase,
    Resource, Sale, Stock, Surge, Term, Value,
};

const INF: f64 = f64::INFINITY;

fn name(text: &str) -> Name {
    Name::new(text).unwrap()
}

fn listed(numbers: &[f64]) -> Value {
    Value::Listed(numbers.to_vec())
}

/// Named so that byte order is not the order of the periods.
fn weeks() -> Horizon {
    Horizon::of(["w9", "w10", "w11"].map(name).to_vec())
}

fn rates(rates: &[(&str, f64)]) -> std::collections::BTreeMap<Name, Value> {
    rates.iter().map(|&(of, rate)| (name(of), rate.into())).collect()
}

fn works() -> Model {
    let mut model = Model { horizon: weeks(), constant: 7.0, ..Model::default() };
    model.resources.insert(
        name("kiln"),
        Resource {
            capacity: listed(&[100.0, 80.0, 100.0]),
            at_least: 10.0.into(),
            cost: 1.2.into(),
            surge: vec![Surge { at_most: listed(&[16.0, 0.0, 8.0]), cost: 95.0.into() }],
            ..Resource::default()
        },
    );
    model.activities.insert(
        name("tile"),
        Activity {
            price: listed(&[21.0, 22.0, 23.0]),
            cost: 6.5.into(),
            uses: rates(&[("kiln", 0.1)]),
            draws: rates(&[("slip", 0.3)]),
            makes: rates(&[("slip", 0.1), ("stacked", 1.0)]),
            change_at_most: listed(&[5.0, INF, 9.0]),
            tags: [name("glazed")].into(),
            ..Activity::default()
        },
    );
    model.activities.insert(
        name("dried"),
        Activity { makes: rates(&[("stacked", 2.0)]), lead: 1, at_most: 50.0.into(), ..Activity::default() },
    );
    model.activities.insert(name("vase"), Activity { prospect: true, price: 9.0.into(), ..Activity::default() });
    model.materials.insert(
        name("slip"),
        Material {
            opening: 20.0,
            purchase: vec![
                Purchase { price: 34.0.into(), at_least: 1.0.into(), at_most: 90.0.into() },
                Purchase { price: 40.0.into(), at_least: 0.0.into(), at_most: INF.into() },
            ],
            stock: Some(Stock { cost: 0.4.into(), at_least: 2.0.into(), at_most: 60.0.into() }),
            closing: Some(Closing { at_least: 10.0, worth: 30.0 }),
            discard: Discard { cost: 8.0.into(), at_most: 5.0.into() },
            ..Material::default()
        },
    );
    model.materials.insert(
        name("stacked"),
        Material {
            sale: vec![Sale {
                price: 5.0.into(),
                at_least: listed(&[3.0, 4.0, 5.0]),
                at_most: 30.0.into(),
                late: Some(Late { cost: 2.0.into(), at_most: 6.0.into() }),
            }],
            closing: Some(Closing { at_least: 1.0, worth: 0.5 }),
            ..Material::default()
        },
    );
    model.limits.insert(
        name("share"),
        Limit {
            terms: [(Term::Tag(name("glazed")), 1.0.into())].into(),
            per: Some([(Term::All, 1.0.into())].into()),
            bound: Bound::Between((-INF).into(), listed(&[0.4, INF, 0.5])),
            ..Limit::default()
        },
    );
    model.limits.insert(
        name("bought"),
        Limit {
            terms: [
                (Term::Material(name("slip"), Flow::Purchase(None)), listed(&[1.0, 2.0, 3.0])),
                (Term::Material(name("slip"), Flow::Purchase(Some(2))), 1.0.into()),
                (Term::Surge(name("kiln"), None), 0.5.into()),
            ]
            .into(),
            bound: Bound::Between((-INF).into(), 300.0.into()),
            over: Over::Some(weeks().periods().skip(1).collect()),
            ..Limit::default()
        },
    );
    model
}

/// The program as a table: each column with its bounds, its worth in the aim and its entries; each row with its bounds.
fn told(program: &Program) -> String {
    let mut text = String::new();
    for column in &program.columns {
        let entries = column.entries.iter().map(|&(row, value)| format!(" {value:+} in {}", program.rows[row.0].key));
        let entries = entries.collect::<String>();
        let _ = writeln!(text, "{} [{}, {}] {:+}:{entries}", column.key, column.lower, column.upper, column.aim);
    }
    for row in &program.rows {
        let _ = writeln!(text, "{} [{}, {}]", row.key, row.lower, row.upper);
    }
    text
}

/// Worked out by hand from the table at the top of this module's parent: 21 − 6.5 − 0.1 · 1.2 is 14.38, a tile draws 0.3 − 0.1 slip,
/// (1 − 0.4) and −0.4 are the shares, 3 + 1 of a tonne bought dearly in the last week count, 30 − 0.4 is left of the worth of slip.
#[test]
fn every_key_has_its_columns_and_rows() {
    let expected = "\
activities.dried.w10 [0, 50] +0: +2 in materials.stacked.w11
activities.dried.w11 [0, 50] +0: -0.5 in limits.share.at_most.w11
activities.dried.w9 [0, 50] +0: -0.4 in limits.share.at_most.w9 +2 in materials.stacked.w10
activities.tile.w10 [0, inf] +15.38: -1 in activities.tile.change.w11 -0.2 in materials.slip.w10 +1 in materials.stacked.w10 +0.1 in resources.kiln.w10
activities.tile.w11 [0, inf] +16.38: +1 in activities.tile.change.w11 +0.5 in limits.share.at_most.w11 -0.2 in materials.slip.w11 +1 in materials.stacked.w11 +0.1 in resources.kiln.w11
activities.tile.w9 [0, inf] +14.38: +0.6 in limits.share.at_most.w9 -0.2 in materials.slip.w9 +1 in materials.stacked.w9 +0.1 in resources.kiln.w9
activities.vase.w10 [0, 0] +9:
activities.vase.w11 [0, 0] +9: -0.5 in limits.share.at_most.w11
activities.vase.w9 [0, 0] +9: -0.4 in limits.share.at_most.w9
materials.slip.discard.w10 [0, 5] -8: -1 in materials.slip.w10
materials.slip.discard.w11 [0, 5] -8: -1 in materials.slip.w11
materials.slip.discard.w9 [0, 5] -8: -1 in materials.slip.w9
materials.slip.purchase.1.w10 [1, 90] -34: +2 in limits.bought +1 in materials.slip.w10
materials.slip.purchase.1.w11 [1, 90] -34: +3 in limits.bought +1 in materials.slip.w11
materials.slip.purchase.1.w9 [1, 90] -34: +1 in materials.slip.w9
materials.slip.purchase.2.w10 [0, inf] -40: +3 in limits.bought +1 in materials.slip.w10
materials.slip.purchase.2.w11 [0, inf] -40: +4 in limits.bought +1 in materials.slip.w11
materials.slip.purchase.2.w9 [0, inf] -40: +1 in materials.slip.w9
materials.slip.stock.w10 [2, 60] -0.4: -1 in materials.slip.w10 +1 in materials.slip.w11
materials.slip.stock.w11 [10, 60] +29.6: -1 in materials.slip.w11
materials.slip.stock.w9 [2, 60] -0.4: +1 in materials.slip.w10 -1 in materials.slip.w9
materials.stacked.discard.w10 [0, inf] +0: -1 in materials.stacked.w10
materials.stacked.discard.w11 [0, inf] +0: -1 in materials.stacked.w11
materials.stacked.discard.w9 [0, inf] +0: -1 in materials.stacked.w9
materials.stacked.sale.1.late.w10 [0, 6] -2: +1 in materials.stacked.sale.1.demand.w10 -1 in materials.stacked.sale.1.demand.w11
materials.stacked.sale.1.late.w11 [0, 0] -2: +1 in materials.stacked.sale.1.demand.w11
materials.stacked.sale.1.late.w9 [0, 6] -2: -1 in materials.stacked.sale.1.demand.w10 +1 in materials.stacked.sale.1.demand.w9
materials.stacked.sale.1.w10 [0, inf] +5: +1 in materials.stacked.sale.1.demand.w10 -1 in materials.stacked.w10
materials.stacked.sale.1.w11 [0, inf] +5: +1 in materials.stacked.sale.1.demand.w11 -1 in materials.stacked.w11
materials.stacked.sale.1.w9 [0, inf] +5: +1 in materials.stacked.sale.1.demand.w9 -1 in materials.stacked.w9
materials.stacked.stock.w11 [1, inf] +0.5: -1 in materials.stacked.w11
resources.kiln.surge.1.w10 [0, 0] -95: +0.5 in limits.bought -1 in resources.kiln.w10
resources.kiln.surge.1.w11 [0, 8] -95: +0.5 in limits.bought -1 in resources.kiln.w11
resources.kiln.surge.1.w9 [0, 16] -95: -1 in resources.kiln.w9
activities.tile.change.w11 [-9, 9]
limits.bought [-inf, 300]
limits.share.at_most.w11 [-inf, 0]
limits.share.at_most.w9 [-inf, 0]
materials.slip.w10 [0, 0]
materials.slip.w11 [0, 0]
materials.slip.w9 [-20, -20]
materials.stacked.sale.1.demand.w10 [4, 30]
materials.stacked.sale.1.demand.w11 [5, 30]
materials.stacked.sale.1.demand.w9 [3, 30]
materials.stacked.w10 [0, 0]
materials.stacked.w11 [0, 0]
materials.stacked.w9 [0, 0]
resources.kiln.w10 [10, 80]
resources.kiln.w11 [10, 100]
resources.kiln.w9 [10, 100]
";
    let program = build(&works());
    assert_eq!(told(&program), expected);
    assert!((program.offset - 7.0).abs() < 1e-12);
}

/// Costs add to an aim to be small; what is sold, and what is left, takes away from it.
#[test]
fn an_aim_to_be_small_turns_all_signs() {
    let mut model = works();
    model.aim = Aim::Minimise;
    model.activities.values_mut().for_each(|activity| activity.price = 0.0.into());
    let (large, small) = (build(&works()), build(&model));
    for (large, small) in large.columns.iter().zip(&small.columns) {
        assert_eq!((&large.key, large.lower, large.upper), (&small.key, small.lower, small.upper));
        assert_eq!(large.entries, small.entries);
        let key = large.key.as_str();
        let expected = if key.starts_with("activities.tile") {
            6.62
        } else if key.starts_with("activities") {
            0.0
        } else {
            0.0 - large.aim
        };
        assert_eq!(small.aim.to_bits(), f64::to_bits(expected), "{key}");
    }
}

/// A name sorts before those that go on with `-`, a dot does not; tier 10 sorts before tier 2.
#[test]
fn columns_and_rows_are_in_byte_order_of_keys() {
    let mut model = works();
    let tile = model.activities["tile"].clone();
    model.activities.insert(name("tile-1"), tile.clone());
    model.activities.insert(name("tile_1"), Activity { change_at_most: 1.0.into(), ..tile });
    let kiln = model.resources.get_mut("kiln").unwrap();
    kiln.surge = vec![kiln.surge[0].clone(); 11];
    let program = build(&model);
    assert!(program.columns.windows(2).all(|pair| pair[0].key < pair[1].key));
    assert!(program.rows.windows(2).all(|pair| pair[0].key < pair[1].key));
    let entries = program.columns.iter().map(|column| &column.entries);
    assert!(entries.into_iter().all(|entries| entries.windows(2).all(|pair| pair[0].0 < pair[1].0)));
}

/// Without periods, keys name none: what is carried from a period to the next is what is left.
#[test]
fn a_single_period_has_no_change_and_nothing_late() {
    let mut model = works();
    model.horizon = Horizon::single();
    model.limits.clear();
    let text = told(&build(&model));
    assert!(
        text.contains("materials.stacked.sale.1.late [0, 0] -2: +1 in materials.stacked.sale.1.demand\n"),
        "{text}"
    );
    assert!(text.contains("materials.slip.stock [10, 60] +29.6: -1 in materials.slip\n"), "{text}");
    assert!(!text.contains("change"), "{text}");
    assert!(text.contains("activities.dried [0, 50] +0:\n"), "{text}");
}
