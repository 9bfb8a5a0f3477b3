//! Edits of the tileworks, one or more for each key of the language that plans several periods.

use millreeve::edits::Kept;
use millreeve::model::{Bound, Closing, Flow, Horizon, Late, Material, Model, Over, Purchase, Sale, Surge, Term};

use crate::weeks::{kiln, late, limit, listed, name, press, slip, stock, tile};

const INF: f64 = f64::INFINITY;

/// One edit: how it is told, and what of the last basis it leaves standing.
pub(crate) struct Row {
    pub(crate) what: &'static str,
    pub(crate) edit: fn(&mut Model),
    pub(crate) told: &'static [&'static str],
    pub(crate) kept: Kept,
}

const fn row(what: &'static str, edit: fn(&mut Model), told: &'static [&'static str], kept: Kept) -> Row {
    Row { what, edit, told, kept }
}

/// What is done, how it is told, what it leaves standing.
pub(crate) const ROWS: [Row; 66] = [
    row(
        "capacity, one week",
        |m| kiln(m).capacity = listed([90.0, 95.0, 90.0]),
        &["resources.kiln.capacity.w2: 90 → 95 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "capacity, most weeks",
        |m| kiln(m).capacity = listed([90.0, 95.0, 96.0]),
        &["resources.kiln.capacity: 90 → [90, 95, 96] (Capacity)"],
        Kept::Dual,
    ),
    row(
        "capacity, every week",
        |m| kiln(m).capacity = 95.0.into(),
        &["resources.kiln.capacity: 90 → 95 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "capacity taken away in a week",
        |m| kiln(m).capacity = listed([90.0, INF, 90.0]),
        &["resources.kiln.capacity.w2: 90 → nothing (BoundRemoved)"],
        Kept::Primal,
    ),
    row(
        "minimum load",
        |m| kiln(m).at_least = listed([-INF, 80.0, -INF]),
        &["resources.kiln.at_least.w2: nothing → 80 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "cost of a resource",
        |m| kiln(m).cost = listed([0.5, 0.5, 0.75]),
        &["resources.kiln.cost.w3: 0.5 → 0.75 (Price)"],
        Kept::Primal,
    ),
    row(
        "width of overtime",
        |m| kiln(m).surge[0].at_most = listed([10.0, 16.0, 10.0]),
        &["resources.kiln.surge.1.at_most.w2: 10 → 16 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "no overtime",
        |m| kiln(m).surge[0].at_most = 0.0.into(),
        &["resources.kiln.surge.1.at_most: 10 → 0 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "cost of overtime",
        |m| kiln(m).surge[0].cost = 2.0.into(),
        &["resources.kiln.surge.1.cost: 1 → 2 (Price)"],
        Kept::Primal,
    ),
    row(
        "another tier of overtime",
        |m| kiln(m).surge.push(Surge { at_most: 5.0.into(), cost: 3.0.into() }),
        &["resources.kiln.surge.2: nothing → at most 5, cost 3 (NewActivity)"],
        Kept::Primal,
    ),
    row(
        "overtime withdrawn",
        |m| drop(kiln(m).surge.pop()),
        &["resources.kiln.surge.1: at most 10, cost 1 → nothing (WithdrawnActivity)"],
        Kept::Dual,
    ),
    row(
        "price in a week",
        |m| press(m).price = listed([0.0, 0.0, 1.0]),
        &["activities.press.price.w3: 0 → 1 (Price)"],
        Kept::Primal,
    ),
    row("cost", |m| press(m).cost = 0.25.into(), &["activities.press.cost: 0 → 0.25 (Price)"], Kept::Primal),
    row(
        "a rate of use",
        |m| drop(press(m).uses.insert(name("kiln"), listed([1.0, 0.9, 1.0]))),
        &["activities.press.uses.kiln.w2: 1 → 0.9 (Recipe)"],
        Kept::Neither,
    ),
    row(
        "a rate at which it draws",
        |m| drop(press(m).draws.insert(name("slip"), 2.1.into())),
        &["activities.press.draws.slip: 2 → 2.1 (Recipe)"],
        Kept::Neither,
    ),
    row(
        "a rate at which it makes",
        |m| drop(press(m).makes.insert(name("tile"), listed([1.0, 1.0, 1.1]))),
        &["activities.press.makes.tile.w3: 1 → 1.1 (Recipe)"],
        Kept::Neither,
    ),
    row(
        "it draws something else",
        |m| drop(press(m).draws.remove("slip")),
        &["activities.press.draws.slip: 2 → nothing (Recipe)"],
        Kept::Neither,
    ),
    row(
        "the lead",
        |m| {
            press(m).lead = 1;
            tile(m).sale[0].at_least = 0.0.into();
        },
        &["activities.press.lead: 0 → 1 (Recipe)", "materials.tile.sale.1.at_least: 50 → 0 (Capacity)"],
        Kept::Neither,
    ),
    row(
        "an idle one draws",
        |m| drop(m.activities.get_mut("vase").unwrap().draws.insert(name("slip"), 0.5.into())),
        &["activities.vase.draws.slip: nothing → 0.5 (Recipe)"],
        Kept::Primal,
    ),
    row(
        "a commitment of a week",
        |m| press(m).at_least = listed([0.0, 95.0, 0.0]),
        &["activities.press.at_least.w2: 0 → 95 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "a market of a week",
        |m| press(m).at_most = listed([150.0, 95.0, 150.0]),
        &["activities.press.at_most.w2: 150 → 95 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "changes held closer",
        |m| press(m).change_at_most = 5.0.into(),
        &["activities.press.change_at_most: 40 → 5 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "changes let go",
        |m| press(m).change_at_most = INF.into(),
        &["activities.press.change_at_most: 40 → nothing (WithdrawnConstraint)"],
        Kept::Both,
    ),
    row(
        "changes held",
        |m| m.activities.get_mut("vase").unwrap().change_at_most = 3.0.into(),
        &["activities.vase.change_at_most: nothing → 3 (NewConstraint)"],
        Kept::Dual,
    ),
    row("opening", |m| slip(m).opening = 20.0, &["materials.slip.opening: 10 → 20 (Capacity)"], Kept::Dual),
    row(
        "price of a purchase",
        |m| slip(m).purchase[0].price = listed([1.0, 1.5, 1.0]),
        &["materials.slip.purchase.1.price.w2: 1 → 1.5 (Price)"],
        Kept::Primal,
    ),
    row(
        "least of a purchase",
        |m| slip(m).purchase[1].at_least = 1.0.into(),
        &["materials.slip.purchase.2.at_least: 0 → 1 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "most of a purchase",
        |m| slip(m).purchase[0].at_most = 150.0.into(),
        &["materials.slip.purchase.1.at_most: 300 → 150 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "no most of a purchase",
        |m| slip(m).purchase[0].at_most = INF.into(),
        &["materials.slip.purchase.1.at_most: 300 → nothing (BoundRemoved)"],
        Kept::Both,
    ),
    row(
        "a dearer tier withdrawn",
        |m| drop(slip(m).purchase.pop()),
        &["materials.slip.purchase.2: price 4 → nothing (WithdrawnActivity)"],
        Kept::Both,
    ),
    row(
        "a tier more",
        |m| slip(m).purchase.push(Purchase { price: 5.0.into(), at_least: 0.0.into(), at_most: INF.into() }),
        &["materials.slip.purchase.3: nothing → price 5 (NewActivity)"],
        Kept::Primal,
    ),
    row(
        "a tier that must be bought",
        |m| slip(m).purchase.push(Purchase { price: 5.0.into(), at_least: 2.0.into(), at_most: INF.into() }),
        &["materials.slip.purchase.3: nothing → price 5, at least 2 (NewCommitment)"],
        Kept::Neither,
    ),
    row(
        "price of a sale",
        |m| tile(m).sale[1].price = listed([6.0, 6.0, 7.0]),
        &["materials.tile.sale.2.price.w3: 6 → 7 (Price)"],
        Kept::Primal,
    ),
    row(
        "firm sales",
        |m| tile(m).sale[0].at_least = listed([60.0, 50.0, 50.0]),
        &["materials.tile.sale.1.at_least.w1: 50 → 60 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "most of a sale",
        |m| tile(m).sale[1].at_most = listed([15.0, 15.0, 20.0]),
        &["materials.tile.sale.2.at_most.w3: 15 → 20 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "most of late sales taken away",
        |m| tile(m).sale[0].at_most = INF.into(),
        &["materials.tile.sale.1.at_most: [60, 70, 130] → nothing (BoundRemoved)"],
        Kept::Primal,
    ),
    row(
        "a tier of sales",
        |m| tile(m).sale.push(Sale { price: 4.0.into(), at_least: 0.0.into(), at_most: 5.0.into(), late: None }),
        &["materials.tile.sale.3: nothing → price 4, at most 5 (NewActivity)"],
        Kept::Primal,
    ),
    row(
        "a tier of sales withdrawn",
        |m| drop(tile(m).sale.pop()),
        &["materials.tile.sale.2: price 6, at most 15 → nothing (WithdrawnActivity)"],
        Kept::Dual,
    ),
    row(
        "cost of being late",
        |m| late(m).cost = 0.1.into(),
        &["materials.tile.sale.1.late.cost: 1 → 0.1 (Price)"],
        Kept::Primal,
    ),
    row(
        "most that is late",
        |m| late(m).at_most = 0.0.into(),
        &["materials.tile.sale.1.late.at_most: 20 → 0 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "late no more",
        |m| tile(m).sale[0].late = None,
        &["materials.tile.sale.1.late: cost 1, at most 20 → nothing (WithdrawnBalance)"],
        Kept::Neither,
    ),
    row(
        "late now",
        |m| tile(m).sale[1].late = Some(Late { cost: 1.0.into(), at_most: INF.into() }),
        &["materials.tile.sale.2.late: nothing → cost 1 (NewBalance)"],
        Kept::Neither,
    ),
    row(
        "cost of stock",
        |m| stock(tile(m)).cost = listed([0.2, 0.3, 0.2]),
        &["materials.tile.stock.cost.w2: 0.2 → 0.3 (Price)"],
        Kept::Primal,
    ),
    row(
        "safety stock",
        |m| stock(slip(m)).at_least = 3.0.into(),
        &["materials.slip.stock.at_least: 1 → 3 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "most of a stock",
        |m| stock(tile(m)).at_most = 10.0.into(),
        &["materials.tile.stock.at_most: 100 → 10 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "stock without most",
        |m| stock(tile(m)).at_most = INF.into(),
        &["materials.tile.stock.at_most: 100 → nothing (BoundRemoved)"],
        Kept::Primal,
    ),
    row(
        "stock withdrawn",
        |m| tile(m).stock = None,
        &["materials.tile.stock: cost 0.2, at most 100 → nothing (WithdrawnActivity)"],
        Kept::Dual,
    ),
    row(
        "stock withdrawn, what is left stays",
        |m| slip(m).stock = None,
        &["materials.slip.stock: cost 0.1, at least 1, at most 50 → nothing (WithdrawnBalance)"],
        Kept::Neither,
    ),
    row(
        "left at the end",
        |m| slip(m).closing = Some(Closing { at_least: 12.0, worth: 0.5 }),
        &["materials.slip.closing.at_least: 2 → 12 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "worth of what is left",
        |m| slip(m).closing = Some(Closing { at_least: 2.0, worth: 2.0 }),
        &["materials.slip.closing.worth: 0.5 → 2 (Price)"],
        Kept::Primal,
    ),
    row(
        "nothing said of the end",
        |m| slip(m).closing = None,
        &[
            "materials.slip.closing.at_least: 2 → nothing (Capacity)",
            "materials.slip.closing.worth: 0.5 → nothing (Price)",
        ],
        Kept::Neither,
    ),
    row(
        "something said of the end",
        |m| tile(m).closing = Some(Closing { at_least: 5.0, worth: 0.0 }),
        &["materials.tile.closing.at_least: nothing → 5 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "cost of discarding",
        |m| tile(m).discard.cost = 0.0.into(),
        &["materials.tile.discard.cost: 1 → 0 (Price)"],
        Kept::Primal,
    ),
    row(
        "nothing discarded",
        |m| tile(m).discard.at_most = 0.0.into(),
        &["materials.tile.discard.at_most: 5 → 0 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "a new material",
        |m| {
            m.materials.insert(
                name("glaze"),
                Material {
                    purchase: vec![Purchase { price: 1.0.into(), at_least: 0.0.into(), at_most: INF.into() }],
                    ..Material::default()
                },
            );
            press(m).draws.insert(name("glaze"), 0.1.into());
        },
        &[
            "activities.press.draws.glaze: nothing → 0.1 (NewBalance)",
            "materials.glaze: nothing → purchase (NewBalance)",
        ],
        Kept::Neither,
    ),
    row(
        "a material withdrawn",
        |m| {
            m.materials.remove("slip");
            m.limits.remove("bought");
            press(m).draws.clear();
        },
        &[
            "activities.press.draws.slip: 2 → nothing (WithdrawnBalance)",
            "materials.slip: opening 10, 2 tiers of purchase, stock, closing → nothing (WithdrawnBalance)",
            "limits.bought: at most 900 → nothing (WithdrawnConstraint)",
        ],
        Kept::Neither,
    ),
    row(
        "a material renamed",
        |m| {
            let slip = m.materials.remove("slip").unwrap();
            m.materials.insert(name("clay"), slip);
            press(m).draws = [(name("clay"), 2.0.into())].into();
            limit(m, "bought").terms = [(Term::Material(name("clay"), Flow::Purchase(None)), 1.0.into())].into();
        },
        &["materials.clay: slip → clay (Wording)"],
        Kept::Both,
    ),
    row(
        "a limit over all weeks",
        |m| limit(m, "bought").bound = Bound::Between((-INF).into(), 550.0.into()),
        &["limits.bought.at_most: 900 → 550 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "a limit of a week",
        |m| limit(m, "glazed").bound = Bound::Between((-INF).into(), listed([20.0, 0.0, 20.0])),
        &["limits.glazed.at_most.w2: 20 → 0 (Capacity)"],
        Kept::Dual,
    ),
    row(
        "a limit over some weeks now",
        |m| limit(m, "bought").over = Over::Some(from_week(1)),
        &["limits.bought.over: all → [w2, w3] (NewBalance)"],
        Kept::Neither,
    ),
    row(
        "a term of a limit",
        |m| drop(limit(m, "bought").terms.insert(Term::Material(name("slip"), Flow::Stock), 1.0.into())),
        &["limits.bought.terms.materials.slip.stock: nothing → 1 (Recipe)"],
        Kept::Neither,
    ),
    row(
        "a term of overtime",
        |m| drop(limit(m, "glazed").terms.insert(Term::Surge(name("kiln"), Some(1)), listed([0.0, 1.0, 0.0]))),
        &["limits.glazed.terms.resources.kiln.surge.1: nothing → [0, 1, 0] (Recipe)"],
        Kept::Neither,
    ),
    row(
        "a resource with overtime withdrawn",
        |m| {
            m.resources.clear();
            m.activities.values_mut().for_each(|activity| activity.uses.clear());
        },
        &[
            "resources.kiln: capacity 90, surge → nothing (WithdrawnBalance)",
            "resources.kiln.cost: 0.5 → 0 (Price)",
            "activities.press.uses.kiln: 1 → nothing (WithdrawnBalance)",
            "activities.vase.uses.kiln: 1 → nothing (WithdrawnBalance)",
        ],
        Kept::Neither,
    ),
    row(
        "the horizon rolled",
        |m| roll(m, ["w2", "w3", "w4"]),
        &["periods: w1 to w3 → w2 to w4 (HorizonRolled)"],
        Kept::Neither,
    ),
    row(
        "the horizon rolled with an edit",
        |m| {
            roll(m, ["w2", "w3", "w4"]);
            kiln(m).capacity = listed([90.0, 80.0, 60.0]);
            slip(m).opening = 4.0;
        },
        &[
            "periods: w1 to w3 → w2 to w4 (HorizonRolled)",
            "resources.kiln.capacity.w3: 90 → 80 (Capacity)",
            "materials.slip.opening: 10 → 4 (Capacity)",
        ],
        Kept::Neither,
    ),
    row(
        "other periods",
        |m| roll(m, ["w2", "w1", "w3"]),
        &["periods: [w1, w2, w3] → [w2, w1, w3] (HorizonReplaced)"],
        Kept::Neither,
    ),
];

fn from_week(from: usize) -> Vec<millreeve::model::Period> {
    Horizon::of(["w1", "w2", "w3"].map(name).to_vec()).periods().skip(from).collect()
}

/// Other weeks; the numbers of the market go with them.
fn roll(model: &mut Model, labels: [&str; 3]) {
    model.horizon = Horizon::of(labels.map(name).to_vec());
    let of = |label: &str| match label {
        "w1" => 60.0,
        "w2" => 70.0,
        _ => 130.0,
    };
    tile(model).sale[0].at_most = listed(labels.map(of));
}
