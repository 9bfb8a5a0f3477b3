//! A tileworks of three weeks.

use millreeve::model::{
    Activity, Bound, Closing, Discard, Flow, Horizon, Late, Limit, Material, Model, Name, Over, Purchase, Resource,
    Sale, Stock, Surge, Term, Value,
};

const INF: f64 = f64::INFINITY;

pub(crate) fn name(text: &str) -> Name {
    Name::new(text).unwrap()
}

pub(crate) fn listed(numbers: [f64; 3]) -> Value {
    Value::Listed(numbers.to_vec())
}

/// Its plan, by week: 90, 100 and 100 tiles are made; the kiln's 90 hours are used up, and so are the ten of its overtime in the last
/// two weeks. Slip is bought as it is drawn and kept at its safety stock.
pub(crate) fn weeks() -> Model {
    let mut model = Model { horizon: Horizon::of(["w1", "w2", "w3"].map(name).to_vec()), ..Model::default() };
    model.resources.insert(
        name("kiln"),
        Resource {
            capacity: 90.0.into(),
            cost: 0.5.into(),
            surge: vec![Surge { at_most: 10.0.into(), cost: 1.0.into() }],
            ..Resource::default()
        },
    );
    model.activities.insert(
        name("press"),
        Activity {
            uses: [(name("kiln"), 1.0.into())].into(),
            draws: [(name("slip"), 2.0.into())].into(),
            makes: [(name("tile"), 1.0.into())].into(),
            at_most: 150.0.into(),
            change_at_most: 40.0.into(),
            ..Activity::default()
        },
    );
    model.activities.insert(
        name("vase"),
        Activity {
            price: 2.0.into(),
            cost: 1.0.into(),
            uses: [(name("kiln"), 1.0.into())].into(),
            tags: [name("glazed")].into(),
            ..Activity::default()
        },
    );
    model.materials.insert(
        name("slip"),
        Material {
            opening: 10.0,
            purchase: vec![
                Purchase { price: 1.0.into(), at_least: 0.0.into(), at_most: 300.0.into() },
                Purchase { price: 4.0.into(), at_least: 0.0.into(), at_most: INF.into() },
            ],
            stock: Some(Stock { cost: 0.1.into(), at_least: 1.0.into(), at_most: 50.0.into() }),
            closing: Some(Closing { at_least: 2.0, worth: 0.5 }),
            ..Material::default()
        },
    );
    let late = Late { cost: 1.0.into(), at_most: 20.0.into() };
    model.materials.insert(
        name("tile"),
        Material {
            sale: vec![
                Sale {
                    price: 10.0.into(),
                    at_least: 50.0.into(),
                    at_most: listed([60.0, 70.0, 130.0]),
                    late: Some(late),
                },
                Sale { price: 6.0.into(), at_least: 0.0.into(), at_most: 15.0.into(), late: None },
            ],
            stock: Some(Stock { cost: 0.2.into(), at_least: 0.0.into(), at_most: 100.0.into() }),
            discard: Discard { cost: 1.0.into(), at_most: 5.0.into() },
            ..Material::default()
        },
    );
    let most = |most: f64| Bound::Between((-INF).into(), most.into());
    let glazed = (Term::Tag(name("glazed")), 1.0.into());
    model.limits.insert(name("glazed"), Limit { terms: [glazed].into(), bound: most(20.0), ..Limit::default() });
    let bought = (Term::Material(name("slip"), Flow::Purchase(None)), 1.0.into());
    let limit = Limit { terms: [bought].into(), bound: most(900.0), over: Over::All, ..Limit::default() };
    model.limits.insert(name("bought"), limit);
    model
}

pub(crate) fn kiln(model: &mut Model) -> &mut Resource {
    model.resources.get_mut("kiln").unwrap()
}

pub(crate) fn press(model: &mut Model) -> &mut Activity {
    model.activities.get_mut("press").unwrap()
}

pub(crate) fn slip(model: &mut Model) -> &mut Material {
    model.materials.get_mut("slip").unwrap()
}

pub(crate) fn tile(model: &mut Model) -> &mut Material {
    model.materials.get_mut("tile").unwrap()
}

pub(crate) fn stock(material: &mut Material) -> &mut Stock {
    material.stock.as_mut().unwrap()
}

pub(crate) fn limit<'m>(model: &'m mut Model, limit: &str) -> &'m mut Limit {
    model.limits.get_mut(limit).unwrap()
}

pub(crate) fn late(model: &mut Model) -> &mut Late {
    tile(model).sale[0].late.as_mut().unwrap()
}
