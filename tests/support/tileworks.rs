//! A small tileworks, and edits of it, one for each row of the table of kinds.

use millreeve::edits::{Kept, Kind};
use millreeve::model::{Activity, Aim, Bound, Limit, Model, Name, Resource, Term};
use millreeve::solver::message::Start;

const INF: f64 = f64::INFINITY;

/// One kind of edit.
pub(crate) struct Row {
    pub(crate) what: &'static str,
    pub(crate) edit: fn(&mut Model),
    pub(crate) kinds: &'static [Kind],
    pub(crate) kept: Kept,
    pub(crate) start: Start,
    pub(crate) most_pivots: usize,
}

fn name(text: &str) -> Name {
    Name::new(text).unwrap()
}

fn resource(capacity: f64) -> Resource {
    Resource { capacity: capacity.into(), ..Resource::default() }
}

fn activity(price: f64, kiln: f64, press: f64, at_most: f64) -> Activity {
    let uses = [(name("kiln"), kiln.into()), (name("press"), press.into())].into();
    Activity { price: price.into(), uses, at_most: at_most.into(), ..Activity::default() }
}

fn limit(terms: &[(&str, f64)], least: f64, most: f64) -> Limit {
    let terms = terms.iter().map(|&(activity, rate)| (Term::Activity(name(activity)), rate.into())).collect();
    Limit { terms, bound: Bound::Between(least.into(), most.into()), ..Limit::default() }
}

/// Its plan: floor 60 and wall 40 use up the kiln (100 h) and leave 20 h of the press (100 h); trim stands at its most of 10, which
/// uses neither; mosaic and roof stay idle. `mix` binds (wall ≤ 40), `floor_sold` (floor ≤ 90) does not.
pub(crate) fn tileworks() -> Model {
    let mut model = Model::default();
    model.resources.insert(name("kiln"), resource(100.0));
    model.resources.insert(name("press"), resource(100.0));
    model.activities.insert(name("floor"), activity(10.0, 1.0, 0.8, INF));
    model.activities.insert(name("wall"), activity(12.0, 1.0, 0.8, INF));
    model.activities.insert(name("trim"), activity(2.0, 0.0, 0.0, 10.0));
    model.activities.insert(name("mosaic"), activity(15.0, 2.0, 1.0, INF));
    model.activities.insert(name("roof"), activity(5.0, 1.0, 1.0, INF));
    model.limits.insert(name("mix"), limit(&[("wall", 1.0)], -INF, 40.0));
    model.limits.insert(name("floor_sold"), limit(&[("floor", 1.0)], -INF, 90.0));
    model
}

fn at<'m>(model: &'m mut Model, activity: &str) -> &'m mut Activity {
    model.activities.get_mut(activity).unwrap()
}

fn kiln(model: &mut Model) -> &mut Resource {
    model.resources.get_mut("kiln").unwrap()
}

const fn row(
    what: &'static str,
    edit: fn(&mut Model),
    kinds: &'static [Kind],
    kept: Kept,
    start: Start,
    most_pivots: usize,
) -> Row {
    Row { what, edit, kinds, kept, start, most_pivots }
}

/// What is done; its kinds; what they leave standing; the start taken and the pivots it may take.
pub(crate) const ROWS: [Row; 32] = [
    row("a label", |m| at(m, "wall").label = Some("Wall".into()), &[Kind::Wording], Kept::Both, Start::None, 0),
    row("the constant", |m| m.constant = 5.0, &[Kind::Wording], Kept::Both, Start::None, 0),
    row(
        "a price inside its range",
        |m| at(m, "floor").price = 9.0.into(),
        &[Kind::Price],
        Kept::Primal,
        Start::None,
        0,
    ),
    row("a price beyond", |m| at(m, "roof").price = 11.0.into(), &[Kind::Price], Kept::Primal, Start::Primal, 3),
    row("a resource's cost", |m| kiln(m).cost = 1.0.into(), &[Kind::Price], Kept::Primal, Start::None, 0),
    row(
        "the aim turned round",
        |m| {
            m.aim = Aim::Minimise;
            m.activities.values_mut().for_each(|activity| activity.price = 0.0.into());
        },
        &[Kind::Aim, Kind::Price, Kind::Price, Kind::Price, Kind::Price, Kind::Price],
        Kept::Primal,
        // Nothing costs anything: every plan is as good.
        Start::None,
        0,
    ),
    row("a slack capacity", |m| capacity(m, "press", 90.0), &[Kind::Capacity], Kept::Dual, Start::None, 0),
    row("a scarce capacity inside", |m| capacity(m, "kiln", 110.0), &[Kind::Capacity], Kept::Dual, Start::None, 0),
    row("a scarce capacity beyond", |m| capacity(m, "kiln", 150.0), &[Kind::Capacity], Kept::Dual, Start::Dual, 3),
    row("less of a slack capacity", |m| capacity(m, "press", 70.0), &[Kind::Capacity], Kept::Dual, Start::Dual, 3),
    row("a bound moved", |m| at(m, "trim").at_most = 12.0.into(), &[Kind::Capacity], Kept::Dual, Start::None, 0),
    row("a bound put there", |m| at(m, "floor").at_most = 50.0.into(), &[Kind::Capacity], Kept::Dual, Start::Dual, 3),
    row("a commitment", |m| at(m, "roof").at_least = 5.0.into(), &[Kind::Capacity], Kept::Dual, Start::None, 0),
    row("a slack bound taken away", |m| capacity(m, "press", INF), &[Kind::BoundRemoved], Kept::Both, Start::None, 0),
    row(
        "a bound of what is idle taken away",
        |m| at(m, "roof").at_least = (-INF).into(),
        &[Kind::BoundRemoved],
        Kept::Primal,
        Start::Primal,
        3,
    ),
    row(
        "a limit's bound that binds taken away",
        |m| {
            m.limits.get_mut("mix").unwrap().bound = Bound::Between(0.0.into(), INF.into());
        },
        &[Kind::Capacity, Kind::BoundRemoved],
        Kept::Neither,
        Start::Primal,
        4,
    ),
    row(
        "a new activity that does not pay",
        |m| {
            m.activities.insert(name("edge"), activity(9.0, 1.0, 1.0, INF));
        },
        &[Kind::NewActivity],
        Kept::Primal,
        Start::None,
        0,
    ),
    row(
        "a new activity that pays",
        |m| {
            m.activities.insert(name("edge"), activity(20.0, 1.0, 1.0, INF));
        },
        &[Kind::NewActivity],
        Kept::Primal,
        Start::Primal,
        3,
    ),
    row(
        "a new activity with a term in a limit",
        |m| {
            m.activities.insert(name("edge"), activity(20.0, 1.0, 1.0, INF));
            m.limits.get_mut("mix").unwrap().terms.insert(Term::Activity(name("edge")), 1.0.into());
        },
        &[Kind::NewActivity, Kind::Recipe],
        Kept::Primal,
        Start::Primal,
        3,
    ),
    row(
        "a new activity that must be done",
        |m| {
            m.activities.insert(name("edge"), Activity { at_least: 1.0.into(), ..activity(9.0, 1.0, 1.0, INF) });
        },
        &[Kind::NewCommitment],
        Kept::Neither,
        Start::None,
        0,
    ),
    row(
        "an idle activity withdrawn",
        |m| drop(m.activities.remove("roof")),
        &[Kind::WithdrawnActivity],
        Kept::Both,
        Start::None,
        0,
    ),
    row(
        "an activity in the mix withdrawn",
        |m| {
            m.activities.remove("wall");
            m.limits.remove("mix");
        },
        &[Kind::WithdrawnActivity, Kind::WithdrawnConstraint],
        Kept::Neither,
        Start::Dual,
        4,
    ),
    row(
        "an activity in the mix made a prospect",
        |m| at(m, "wall").prospect = true,
        &[Kind::WithdrawnActivity],
        Kept::Dual,
        Start::Dual,
        3,
    ),
    row(
        "a new constraint that the plan keeps",
        |m| {
            m.limits.insert(name("sorting"), limit(&[("floor", 1.0), ("wall", 1.0)], -INF, 120.0));
        },
        &[Kind::NewConstraint],
        Kept::Dual,
        Start::None,
        0,
    ),
    row(
        "a new constraint that it breaks",
        |m| {
            m.limits.insert(name("sorting"), limit(&[("floor", 1.0), ("wall", 2.0)], -INF, 120.0));
        },
        &[Kind::NewConstraint],
        Kept::Dual,
        Start::Dual,
        3,
    ),
    row(
        "a new resource",
        |m| {
            m.resources.insert(name("glazing"), resource(30.0));
            at(m, "wall").uses.insert(name("glazing"), 1.0.into());
        },
        &[Kind::NewConstraint, Kind::NewConstraint],
        Kept::Dual,
        Start::Dual,
        3,
    ),
    row(
        "a new resource that costs",
        |m| {
            m.resources.insert(name("glazing"), Resource { cost: 1.0.into(), ..resource(50.0) });
            at(m, "wall").uses.insert(name("glazing"), 1.0.into());
        },
        &[Kind::NewConstraint, Kind::Price, Kind::NewConstraint],
        Kept::Neither,
        Start::None,
        0,
    ),
    row(
        "a slack constraint withdrawn",
        |m| drop(m.limits.remove("floor_sold")),
        &[Kind::WithdrawnConstraint],
        Kept::Both,
        Start::None,
        0,
    ),
    row(
        "a binding constraint withdrawn",
        |m| drop(m.limits.remove("mix")),
        &[Kind::WithdrawnConstraint],
        Kept::Primal,
        Start::Primal,
        4,
    ),
    row(
        "a scarce resource withdrawn",
        |m| {
            m.resources.remove("kiln");
            m.activities.values_mut().for_each(|activity| drop(activity.uses.remove("kiln")));
        },
        &[Kind::WithdrawnConstraint; 6],
        Kept::Primal,
        Start::Primal,
        5,
    ),
    row(
        "the recipe of an idle activity",
        |m| {
            at(m, "mosaic").uses.insert(name("kiln"), 1.0.into());
        },
        &[Kind::Recipe],
        Kept::Primal,
        Start::Primal,
        3,
    ),
    row(
        "the recipe of an activity in the mix",
        |m| {
            at(m, "wall").uses.insert(name("kiln"), 0.9.into());
        },
        &[Kind::Recipe],
        Kept::Neither,
        Start::None,
        0,
    ),
];

fn capacity(model: &mut Model, resource: &str, capacity: f64) {
    model.resources.get_mut(resource).unwrap().capacity = capacity.into();
}
