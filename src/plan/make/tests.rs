//! Plans made of models solved by hand and of published examples.

use super::*;
use crate::lp::build;
use crate::model::{Activity, Bound, Limit, Resource, Term};
use crate::solver::basis::Basis;
use crate::solver::proof::Proof;

const INF: f64 = f64::INFINITY;

fn name(text: &str) -> Name {
    Name::new(text).unwrap()
}

fn activity(price: f64, uses: &[(&str, f64)]) -> Activity {
    let uses = uses.iter().map(|&(resource, rate)| (name(resource), rate.into())).collect();
    Activity { price: price.into(), uses, ..Activity::default() }
}

fn bounded(term: &str, least: f64, most: f64) -> Limit {
    Limit {
        terms: [(Term::Activity(name(term)), 1.0.into())].into(),
        bound: Bound::Between(least.into(), most.into()),
        ..Limit::default()
    }
}

/// The custom molder of Bradley, Hax & Magnanti, Applied Mathematical Programming (1977), sections 1.1 and 3.1 to 3.4, with
/// champagne glasses. `hour` is charged to hours and added to the prices again, so that the program is the book's.
fn molder(hour: f64) -> Model {
    let mut model = empty();
    model.resources.insert(name("hours"), Resource { capacity: 60.0.into(), cost: hour.into(), ..Resource::default() });
    model.resources.insert(name("storage"), Resource { capacity: 150.0.into(), ..Resource::default() });
    for (glass, price, hours, storage) in
        [("six_oz", 500.0, 6.0, 10.0), ("ten_oz", 450.0, 5.0, 20.0), ("champagne", 600.0, 8.0, 10.0)]
    {
        let uses = [("hours", hours), ("storage", storage)];
        model.activities.insert(name(glass), activity(price + hour * hours, &uses));
    }
    model.limits.insert(name("six_oz_demand"), bounded("six_oz", f64::NEG_INFINITY, 8.0));
    model
}

fn empty() -> Model {
    Model {
        title: None,
        currency: None,
        aim: Aim::Maximise,
        constant: 0.0,
        horizon: crate::model::Horizon::single(),
        resources: [].into(),
        activities: [].into(),
        limits: [].into(),
        materials: [].into(),
    }
}

/// The book's answer, in the order of the program: champagne, six_oz, ten_oz; six_oz_demand, hours, storage.
fn molder_optimum() -> Optimum {
    Optimum {
        aim: 36000.0 / 7.0,
        levels: vec![0.0, 45.0 / 7.0, 30.0 / 7.0],
        sums: vec![45.0 / 7.0, 60.0 - 1e-14, 150.0 + 3e-14],
        gains: vec![-400.0 / 7.0, 0.0, 1e-14],
        worths: vec![0.0, 550.0 / 7.0, 20.0 / 7.0],
        basis: Basis::default(),
        exact: true,
        levels_unique: true,
        spans: None,
        worths_unique: true,
        known: None,
        ranges: Some(Ranges {
            aims: vec![(-INF, 4600.0 / 7.0), (5100.0 / 11.0, 540.0), (1250.0 / 3.0, 650.0)],
            bounds: vec![(45.0 / 7.0, INF), (37.5, 65.5), (128.0, 240.0)],
        }),
        proof: Proof::default(),
    }
}

fn made(model: &Model, optimum: &Optimum) -> Plan {
    make(model, Meaning::of(model), &build(model), optimum).unwrap()
}

/// The one number that is told of a single period.
fn close(told: impl Into<Told>, expected: f64) {
    let Told(told) = told.into();
    assert!(
        told.total_cmp(&expected).is_eq() || (told - expected).abs() <= 1e-9 * expected.abs(),
        "{told} is not {expected}"
    );
}

struct Told(f64);

impl From<&Option<Value>> for Told {
    fn from(value: &Option<Value>) -> Self {
        let Some(Value::Every(number)) = value else { panic!("{value:?}") };
        Self(*number)
    }
}

impl From<f64> for Told {
    fn from(number: f64) -> Self {
        Self(number)
    }
}

fn between(told: &Option<Each<Span>>, least: f64, most: f64) {
    let (told_least, told_most) = told.as_ref().and_then(Each::one).unwrap();
    close(told_least, least);
    close(told_most, most);
}

#[test]
fn the_molder_gets_the_plan_of_the_book() {
    let plan = made(&molder(0.0), &molder_optimum());
    let [champagne, six, ten] = plan.activities.as_slice() else { panic!("three activities") };
    assert_eq!(champagne.state, Each::One(State::Idle));
    close(&champagne.break_even, 4600.0 / 7.0);
    close(&champagne.loses, 400.0 / 7.0);
    assert_eq!(champagne.price_range, None);
    assert!(six.state.is(State::InTheMix) && ten.state.is(State::InTheMix));
    between(&six.price_range, 5100.0 / 11.0, 540.0);
    between(&ten.price_range, 1250.0 / 3.0, 650.0);
    let [hours, storage] = plan.resources.as_slice() else { panic!("two resources") };
    assert_eq!((&hours.used, &hours.spare), (&60.0.into(), &Some(0.0.into())));
    close(&hours.worth_of_more, 550.0 / 7.0);
    close(&hours.loss_of_less, 550.0 / 7.0);
    between(&hours.holds_between, 37.5, 65.5);
    close(&storage.worth_of_more, 20.0 / 7.0);
    between(&storage.holds_between, 128.0, 240.0);
    let [demand] = plan.limits.as_slice() else { panic!("one limit") };
    close(&demand.worth_of_more, 0.0);
    close(&demand.spare, 11.0 / 7.0);
    between(&demand.holds_between, 45.0 / 7.0, INF);
    assert!(plan.complete && !plan.ties && plan.exact && !plan.minimise);
    assert!(!made(&molder(0.0), &Optimum { exact: false, ..molder_optimum() }).exact);
}

#[test]
fn ranges_and_break_even_speak_of_the_price_itself() {
    let plan = made(&molder(2.0), &molder_optimum());
    close(&plan.activities[0].break_even, 4600.0 / 7.0 + 16.0);
    close(&plan.activities[0].loses, 400.0 / 7.0);
    between(&plan.activities[1].price_range, 5100.0 / 11.0 + 12.0, 552.0);
}

#[test]
fn what_is_not_unique_is_left_out() {
    let mut optimum = molder_optimum();
    optimum.levels_unique = false;
    let plan = made(&molder(0.0), &optimum);
    assert!(plan.ties && !plan.complete);
    assert_eq!(plan.may_vary_left_out, 3);
    assert_eq!(plan.activities[1].price_range, None);
    assert_eq!(plan.limits[0].holds_between, None);
    close(&plan.resources[0].worth_of_more, 550.0 / 7.0);

    let mut optimum = molder_optimum();
    optimum.worths_unique = false;
    let plan = made(&molder(0.0), &optimum);
    assert!(!plan.ties && !plan.complete);
    assert_eq!(plan.activities[0].break_even, None);
    assert_eq!(plan.activities[1].price_range, None);
    assert!(plan.resources.iter().all(|r| r.worth_of_more.is_none() && r.holds_between.is_none()));
}

/// The spans are made up: what is tested is what a plan says of them.
#[test]
fn levels_that_may_vary_say_how_far() {
    let (six, ten) = (45.0 / 7.0, 30.0 / 7.0);
    let spans = |champagne, ten| Optimum {
        levels_unique: false,
        spans: Some(vec![champagne, (six, six + 1e-12), ten]),
        ..molder_optimum()
    };
    let vary = |plan: &Plan| [0, 1, 2].map(|at| plan.activities[at].may_vary.as_ref().and_then(Each::one));
    let plan = made(&molder(0.0), &spans((-1e-10, 4.0), (1.0, INF)));
    assert!(plan.ties);
    assert_eq!((vary(&plan), plan.may_vary_left_out), ([Some((0.0, 4.0)), None, Some((1.0, INF))], 0));
    // Nothing but rounding, and an end that rounding has put beyond the level itself.
    let plan = made(&molder(0.0), &spans((-1e-10, 1e-10), (ten + 1e-12, 8.0)));
    assert_eq!(vary(&plan), [None, None, Some((ten, 8.0))]);
    let plan = made(&molder(0.0), &Optimum { levels_unique: true, ..spans((0.0, 4.0), (1.0, 8.0)) });
    assert_eq!((vary(&plan), plan.may_vary_left_out), ([None; 3], 0));
}

/// Ten of a and b together are needed, at a cost of 3 and 5; a is held to 8 by a resource. c costs 6.
/// By hand: a 8, b 2, aim 34. One more needed is one more b: +5. One more of the resource turns a b into an a: −2.
#[test]
fn where_costs_are_to_be_small_positive_is_still_better() {
    let mut model = empty();
    model.aim = Aim::Minimise;
    model.resources.insert(name("vat"), Resource { capacity: 8.0.into(), ..Resource::default() });
    model.resources.insert(name("yard"), Resource::default());
    for (what, cost, uses) in [("a", 3.0, &[("vat", 1.0)] as &[_]), ("b", 5.0, &[]), ("c", 6.0, &[("yard", 1.0)])] {
        model.activities.insert(name(what), Activity { cost: cost.into(), ..activity(0.0, uses) });
    }
    let mut need = bounded("a", 10.0, INF);
    need.terms.extend(["b", "c"].map(|what| (Term::Activity(name(what)), 1.0.into())));
    model.limits.insert(name("need"), need);
    let optimum = Optimum {
        aim: 34.0,
        levels: vec![8.0, 2.0, 0.0],
        sums: vec![10.0, 8.0, 0.0],
        gains: vec![0.0, 0.0, 1.0],
        worths: vec![5.0, -2.0, 0.0],
        ranges: Some(Ranges {
            aims: vec![(-INF, 5.0), (3.0, 6.0), (5.0, INF)],
            bounds: vec![(8.0, INF), (0.0, 10.0), (0.0, INF)],
        }),
        ..molder_optimum()
    };
    let plan = made(&model, &optimum);
    assert!(plan.minimise && plan.complete);
    close(&plan.activities[2].break_even, 5.0);
    close(&plan.activities[2].loses, 1.0);
    between(&plan.activities[1].price_range, 3.0, 6.0);
    close(&plan.resources[0].worth_of_more, 2.0);
    close(&plan.limits[0].worth_of_more, -5.0);
    close(&plan.limits[0].loss_of_less, -5.0);
    assert_eq!(plan.limits[0].spare, None);
    assert_eq!((&plan.resources[1].spare, &plan.resources[1].worth_of_more), (&None, &None));
}

/// One activity of each state. By hand: nothing is scarce, so each level is where its own bounds and price put it.
#[test]
fn every_state_is_told() {
    let mut model = empty();
    for (what, price, least, most, prospect) in [
        ("fixed", 1.0, 4.0, 4.0, false),
        ("idle", -1.0, 0.0, 9.0, false),
        ("least", -2.0, 3.0, 9.0, false),
        ("mix", 0.0, 0.0, INF, false),
        ("most", 1.0, 0.0, 6.0, false),
        ("prospect", 7.0, 0.0, 9.0, true),
    ] {
        let bounds = Activity { at_least: least.into(), at_most: most.into(), prospect, ..activity(price, &[]) };
        model.activities.insert(name(what), bounds);
    }
    let optimum = Optimum {
        aim: 4.0 - 6.0 + 6.0,
        levels: vec![4.0, 1e-10, 3.0 - 1e-12, 2.0, 6.0 + 1e-12, -0.0],
        gains: vec![1.0, -1.0, -2.0, 0.0, 1.0, 7.0],
        sums: vec![],
        worths: vec![],
        levels_unique: false,
        ranges: None,
        ..molder_optimum()
    };
    let plan = made(&model, &optimum);
    let told: Vec<_> =
        plan.activities.iter().map(|a| (a.state.one().unwrap(), a.level.numbers()[0].to_string())).collect();
    let expected = [
        (State::Fixed, "4"),
        (State::Idle, "0"),
        (State::AtItsLeast, "3"),
        (State::InTheMix, "2"),
        (State::AtItsMost, "6"),
        (State::Prospect, "0"),
    ];
    assert_eq!(told, expected.map(|(state, level)| (state, level.to_owned())));
    close(&plan.activities[5].break_even, 0.0);
    close(&plan.activities[5].loses, -7.0);
    // A level that its bounds fix, and that of a prospect, cannot vary.
    assert_eq!(plan.may_vary_left_out, 4);
}

/// Two of three kilos come from a, as a may be at most two thirds of a and b. By hand: a 4, b 2, of 6 in all.
#[test]
fn a_share_is_told_as_a_ratio() {
    let mut model = empty();
    model.resources.insert(name("all"), Resource { capacity: 6.0.into(), ..Resource::default() });
    for (what, price) in [("a", 3.0), ("b", 1.0)] {
        model.activities.insert(name(what), activity(price, &[("all", 1.0)]));
    }
    let mut share = bounded("a", f64::NEG_INFINITY, 2.0 / 3.0);
    share.per = Some([(Term::All, 1.0.into())].into());
    model.limits.insert(name("share"), share);
    // Worth of a unit more of the share's right-hand side: a goes up by 1, b down by 1.
    let optimum = Optimum {
        aim: 14.0,
        levels: vec![4.0, 2.0],
        gains: vec![0.0, 0.0],
        sums: vec![1e-16, 6.0],
        worths: vec![2.0, 7.0 / 3.0],
        ranges: Some(Ranges { aims: vec![(1.0, INF), (-6.0, 3.0)], bounds: vec![(-4.0, 2.0), (0.0, INF)] }),
        ..molder_optimum()
    };
    let plan = made(&model, &optimum);
    let [share] = plan.limits.as_slice() else { panic!("one limit") };
    assert_eq!((&share.value, &share.spare), (&Some((2.0 / 3.0).into()), &Some(0.0.into())));
    close(&share.worth_of_more, 2.0);
    assert_eq!(share.holds_between, None);
    assert!(plan.complete);
}

#[test]
fn what_is_no_number_makes_no_plan() {
    let model = molder(0.0);
    let refused = |change: &dyn Fn(&mut Optimum)| {
        let mut optimum = molder_optimum();
        change(&mut optimum);
        make(&model, Meaning::of(&model), &build(&model), &optimum).unwrap_err().to_string()
    };
    assert_eq!(refused(&|o| o.aim = f64::NAN), "the aim of `the plan` is NaN, which no plan may say");
    assert!(refused(&|o| o.levels[1] = INF).contains("the level of `activities.six_oz` is inf"));
    assert!(refused(&|o| o.worths[1] = f64::NAN).contains("the worth of `hours`"));
    assert!(refused(&|o| o.gains[0] = f64::NAN).contains("the gain of `champagne`"));
    assert_eq!(refused(&|o| o.levels.truncate(2)), "the answer has 2 levels, the program 3");
    assert_eq!(refused(&|o| o.spans = Some(vec![])), "the answer has 0 spans, the program 3");
    let untold = |o: &mut Optimum| (o.levels_unique, o.spans) = (false, Some(vec![(0.0, f64::NAN); 3]));
    assert!(refused(&untold).starts_with("how far the level may vary of `champagne` is "));
    let other = Model { activities: [].into(), ..molder(0.0) };
    let optimum = Optimum { levels: vec![], gains: vec![], ranges: None, ..molder_optimum() };
    let error = make(&model, Meaning::of(&model), &build(&other), &optimum).unwrap_err();
    assert_eq!(error.to_string(), "the program has no `activities.champagne`");
}
