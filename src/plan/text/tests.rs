//! Plan text there and back: round trips, seals, marks.

use proptest::collection::{btree_map, vec};
use proptest::option;
use proptest::prelude::*;

use super::*;
use crate::model::meaning::Meaning;
use crate::model::{Name, Value};
use crate::plan::each::{Each, Span};
use crate::plan::number::rounded;
use crate::plan::types::{Plan, PlannedActivity, PlannedLimit, PlannedMaterial, PlannedResource, Standing, State};

fn numbers() -> impl Strategy<Value = f64> {
    prop_oneof![Just(0.0), -1e6..1e6_f64, (-9..14_i32, -1.0..1.0_f64).prop_map(|(e, m)| m * 10_f64.powi(e))]
}

fn ends() -> impl Strategy<Value = (f64, f64)> {
    let least = prop_oneof![Just(f64::NEG_INFINITY), numbers()];
    let most = prop_oneof![Just(f64::INFINITY), numbers()];
    (least, most)
}

/// Numbers as a plan of so many named periods has them: mostly one per period.
fn values(periods: usize) -> impl Strategy<Value = Value> {
    if periods == 0 {
        return numbers().prop_map(Value::Every).boxed();
    }
    prop_oneof![1 => numbers().prop_map(Value::Every), 4 => vec(numbers(), periods).prop_map(Value::Listed)].boxed()
}

fn spans(periods: usize) -> impl Strategy<Value = Each<Span>> {
    if periods == 0 {
        return ends().prop_map(Each::One).boxed();
    }
    prop_oneof![1 => ends().prop_map(Each::One), 4 => vec(ends(), periods).prop_map(Each::Listed)].boxed()
}

fn states(periods: usize) -> impl Strategy<Value = Each<State>> {
    vec((0..6_usize).prop_map(|at| State::ALL[at]), periods.max(1)).prop_map(|list| Each::folded(list).unwrap())
}

fn name() -> impl Strategy<Value = Name> {
    "[a-zA-Z0-9_б瓦é-]{1,12}".prop_map(|text| Name::new(&text).unwrap())
}

fn named<T: std::fmt::Debug>(entry: impl Strategy<Value = T>) -> impl Strategy<Value = Vec<(Name, T)>> {
    btree_map(name(), entry, 0..5).prop_map(|map| map.into_iter().collect())
}

type Rates = (Option<Value>, Option<Value>, Option<Each<Span>>);

fn rates(periods: usize) -> impl Strategy<Value = Rates> {
    let loss = prop_oneof![Just(Value::Every(f64::INFINITY)), values(periods)];
    (option::of(values(periods)), option::of(loss), option::of(spans(periods)))
}

fn activities(periods: usize) -> impl Strategy<Value = Vec<PlannedActivity>> {
    let ranges = (option::of(spans(periods)), option::of(spans(periods)));
    let rates = (option::of(values(periods)), option::of(values(periods)));
    named((values(periods), states(periods), ranges, rates)).prop_map(|list| {
        let planned = |(name, (level, state, (may_vary, price_range), (break_even, loses)))| PlannedActivity {
            name,
            level,
            state,
            may_vary,
            price_range,
            break_even,
            loses,
        };
        list.into_iter().map(planned).collect()
    })
}

fn resources(periods: usize) -> impl Strategy<Value = Vec<PlannedResource>> {
    let amounts = (values(periods), option::of(values(periods)), option::of(values(periods)));
    named((amounts, rates(periods))).prop_map(|list| {
        let planned = |(name, ((used, surge, spare), (worth_of_more, loss_of_less, holds_between)))| PlannedResource {
            name,
            used,
            surge,
            spare,
            worth_of_more,
            loss_of_less,
            holds_between,
        };
        list.into_iter().map(planned).collect()
    })
}

fn limits(periods: usize) -> impl Strategy<Value = Vec<PlannedLimit>> {
    named((option::of(values(periods)), option::of(values(periods)), rates(periods))).prop_map(|list| {
        let planned = |(name, (value, spare, (worth_of_more, loss_of_less, holds_between)))| PlannedLimit {
            name,
            value,
            spare,
            worth_of_more,
            loss_of_less,
            holds_between,
        };
        list.into_iter().map(planned).collect()
    })
}

fn materials(periods: usize) -> impl Strategy<Value = Vec<PlannedMaterial>> {
    let some = || option::of(values(periods));
    let flows = (some(), some(), some(), some(), some());
    named((flows, values(periods), values(periods), some(), some())).prop_map(|list| {
        let planned = |(name, (flows, made, drawn, worth_of_more, loss_of_less))| {
            let (purchase, sale, late, stock, discard) = flows;
            PlannedMaterial { name, purchase, sale, late, stock, discard, made, drawn, worth_of_more, loss_of_less }
        };
        list.into_iter().map(planned).collect()
    })
}

fn standings() -> impl Strategy<Value = Standing> {
    prop_oneof![Just(Standing::Current), Just(Standing::Retired), any::<String>().prop_map(Standing::Held)]
}

/// The names of the periods: none, or a few that differ.
fn horizons() -> impl Strategy<Value = Vec<Name>> {
    let named = proptest::collection::btree_set(name(), 1..5).prop_map(|names| names.into_iter().rev().collect());
    prop_oneof![Just(Vec::new()), named]
}

prop_compose! {
    fn plans()(periods in horizons())(
        digest in "[0-9a-f]{64}",
        standing in standings(),
        (aim, currency) in (numbers(), option::of(any::<String>())),
        flags in any::<[bool; 4]>(),
        may_vary_left_out in 0..30_000_usize,
        activities in activities(periods.len()),
        resources in resources(periods.len()),
        limits in limits(periods.len()),
        materials in materials(periods.len()),
        periods in Just(periods),
    ) -> Plan {
        let [minimise, exact, ties, complete] = flags;
        let answers = Meaning::parse(&digest).unwrap();
        Plan {
            answers, standing, aim, minimise, currency, periods, exact, ties, may_vary_left_out, complete,
            activities, resources, limits, materials,
        }
    }
}

/// The plan with every number cut to what its text keeps.
fn kept(mut plan: Plan) -> Plan {
    fn value(value: &mut Value) {
        match value {
            Value::Every(number) => *number = rounded(*number),
            Value::Listed(list) => list.iter_mut().for_each(|number| *number = rounded(*number)),
        }
    }
    fn some<'v>(values: impl IntoIterator<Item = &'v mut Option<Value>>) {
        values.into_iter().flatten().for_each(value);
    }
    fn spans(told: &mut Option<Each<Span>>) {
        let cut = |span: &mut Span| *span = (rounded(span.0), rounded(span.1));
        match told {
            None => {}
            Some(Each::One(one)) => cut(one),
            Some(Each::Listed(list)) => list.iter_mut().for_each(cut),
        }
    }
    plan.aim = rounded(plan.aim);
    for planned in &mut plan.activities {
        value(&mut planned.level);
        spans(&mut planned.may_vary);
        spans(&mut planned.price_range);
        some([&mut planned.break_even, &mut planned.loses]);
    }
    for planned in &mut plan.resources {
        value(&mut planned.used);
        some([&mut planned.surge, &mut planned.spare, &mut planned.worth_of_more, &mut planned.loss_of_less]);
        spans(&mut planned.holds_between);
    }
    for planned in &mut plan.limits {
        some([&mut planned.value, &mut planned.spare, &mut planned.worth_of_more, &mut planned.loss_of_less]);
        spans(&mut planned.holds_between);
    }
    for planned in &mut plan.materials {
        some([&mut planned.purchase, &mut planned.sale, &mut planned.late, &mut planned.stock, &mut planned.discard]);
        [&mut planned.made, &mut planned.drawn].into_iter().for_each(value);
        some([&mut planned.worth_of_more, &mut planned.loss_of_less]);
    }
    plan
}

proptest! {
    #[test]
    fn a_plan_reads_back_as_it_was_written(plan in plans()) {
        let text = write(&plan);
        prop_assert!(text.ends_with('\n') && is_ours(text.as_bytes()));
        let written = read(&text).unwrap();
        prop_assert!(written.sealed);
        prop_assert_eq!(Some(written.seal.as_str()), seal(&text));
        prop_assert_eq!(write(&written.plan), text);
        prop_assert_eq!(written.plan, kept(plan));
    }

    #[test]
    fn marking_touches_the_standing_alone(plan in plans(), to in standings()) {
        let text = write(&plan);
        let held = marked(&text, &to).unwrap();
        prop_assert_eq!(&held, &write(&Plan { standing: to, ..plan.clone() }));
        prop_assert_eq!(marked(&held, &plan.standing).unwrap(), text);
    }

    #[test]
    fn any_edit_breaks_the_seal(plan in plans(), at in any::<prop::sample::Index>(), with in "[0-9a-z]") {
        let text = write(&plan);
        let places: Vec<usize> = text.char_indices().map(|(place, _)| place).filter(|&place| place > HEADER.len()).collect();
        let place = places[at.index(places.len())];
        let old = text[place..].chars().next().unwrap();
        prop_assume!(!with.starts_with(old));
        let edited = format!("{}{with}{}", &text[..place], &text[place + old.len_utf8()..]);
        prop_assert!(read(&edited).map_or(true, |written| !written.sealed));
        prop_assert!(marked(&edited, &Standing::Retired).is_err());
    }
}

fn sample() -> String {
    write(&Plan {
        answers: Meaning::parse(&"0a".repeat(32)).unwrap(),
        standing: Standing::Current,
        aim: 43265.1,
        minimise: false,
        currency: Some("EUR".to_owned()),
        periods: vec![],
        exact: false,
        ties: false,
        may_vary_left_out: 0,
        complete: true,
        activities: vec![],
        resources: vec![],
        limits: vec![],
        materials: vec![],
    })
}

#[test]
fn line_ends_of_another_system_do_not_break_the_seal() {
    let there = sample().replace('\n', "\r\n");
    assert!(is_ours(there.as_bytes()));
    assert!(read(&there).unwrap().sealed);
    let held = marked(&there, &Standing::Held("the kiln is down".to_owned())).unwrap();
    assert_eq!(marked(&held, &Standing::Current).unwrap(), sample());
}

#[test]
fn a_file_of_somebody_else_is_not_ours() {
    for foreign in
        ["", "format = 1\n", "# my plan\n", "<!-- a page -->\n", "# Written by millreeve. Do not edit: the next plan"]
    {
        assert!(!is_ours(foreign.as_bytes()));
        assert_eq!(read(foreign), Err(PlanError::NotOurs));
        assert_eq!(marked(foreign, &Standing::Retired), Err(PlanError::NotOurs));
    }
    assert!(!is_ours(b"\xff\xfe# Written by millreeve"));
    assert!(is_ours(format!("{NOTE_HEADER} Plan: none -->\n").as_bytes()));
    assert!(is_ours(format!("<<<<<<< HEAD\n{NOTE_HEADER} Plan: none -->\n").as_bytes()));
    assert!(!is_ours(format!("<<<<<<< HEAD\nminutes\n{NOTE_HEADER} Plan: none -->\n").as_bytes()));
}

#[test]
fn a_newer_plan_is_refused_before_its_layout_is_looked_at() {
    let newer = sample().replace("format   = 1", "format   = 2\nsomething_new = true");
    assert_eq!(read(&newer), Err(PlanError::Newer { what: "format", found: 2, known: 1 }));
    let newer = sample().replace("rules    = 1", "rules    = 3");
    assert_eq!(read(&newer), Err(PlanError::Newer { what: "rules", found: 3, known: 1 }));
}

#[test]
fn a_broken_plan_is_told_in_one_line() {
    for (from, to, said) in [
        ("aim      = 43265.1", "aim      = \"\u{1b}[31m", "not a whole plan: line 7"),
        ("exact    = false\n", "", "not a whole plan: line 1: missing field `exact`"),
        ("format   = 1\n", "", "not a whole plan: it does not say its `format`"),
        ("\"current\"", "\"held\"", "not a whole plan: its `standing` and `held` do not fit together"),
        ("\"0a0a", "\"xx0a", "not a whole plan: its `answers` is no hash of a meaning"),
    ] {
        let text = sample().replace(from, to);
        assert_ne!(text, sample());
        let error = read(&text).unwrap_err().to_string();
        assert!(error.starts_with(said), "{error}");
        assert!(!error.contains(|c: char| c.is_control()), "{error}");
    }
}

/// A sample over two named periods.
fn over_periods() -> String {
    let mut plan = read(&sample()).unwrap().plan;
    plan.periods = ["2027-W01", "瓦"].map(|label| Name::new(label).unwrap()).into();
    plan.activities.push(PlannedActivity {
        name: Name::new("floor_tile").unwrap(),
        level: Value::Listed(vec![120.0, 0.0]),
        state: Each::Listed(vec![State::InTheMix, State::Idle]),
        may_vary: None,
        price_range: Some(Each::Listed(vec![(19.2, 22.75), (f64::NEG_INFINITY, 24.0)])),
        break_even: Some(Value::Listed(vec![21.0, 24.0])),
        loses: Some(Value::Listed(vec![0.0, 3.0])),
    });
    plan.materials.push(PlannedMaterial {
        name: Name::new("slip").unwrap(),
        purchase: Some(Value::Listed(vec![12.0, 0.0])),
        sale: None,
        late: None,
        stock: Some(Value::Listed(vec![2.0, 2.0])),
        discard: None,
        made: Value::Listed(vec![0.0, 0.0]),
        drawn: Value::Listed(vec![10.0, 0.0]),
        worth_of_more: None,
        loss_of_less: None,
    });
    write(&plan)
}

#[test]
fn what_is_of_several_periods_is_written_as_lists() {
    let text = over_periods();
    for line in [
        "periods  = [\"2027-W01\", \"瓦\"]\n",
        "level       = [120, 0]\n",
        "state       = [\"in the mix\", \"idle\"]\n",
        "price_range = [[19.2, 22.75], [-inf, 24]]\n",
        "stock         = [2, 2]\n",
    ] {
        assert!(text.contains(line), "{line}{text}");
    }
    assert_eq!(write(&read(&text).unwrap().plan), text);
}

#[test]
fn what_holds_in_every_period_may_be_said_once() {
    let text = over_periods().replace("stock         = [2, 2]", "stock         = 2");
    assert_eq!(read(&text).unwrap().plan.materials[0].stock, Some(Value::Every(2.0)));
    let alike = over_periods().replace("[\"in the mix\", \"idle\"]", "[\"idle\", \"idle\"]");
    assert_eq!(read(&alike).unwrap().plan.activities[0].state, Each::One(State::Idle));
}

#[test]
fn a_list_that_does_not_fit_the_periods_is_told() {
    for (from, to, said) in [
        (
            "level       = [120, 0]",
            "level       = [120]",
            "`level` of `floor_tile` is a list of 1, and 2 periods are named",
        ),
        (
            "[[19.2, 22.75], [-inf, 24]]",
            "[[19.2, 22.75]]",
            "`price_range` of `floor_tile` is a list of 1, and 2 periods are named",
        ),
        ("[\"in the mix\", \"idle\"]", "[\"in the mix\", \"asleep\"]", "no state is called `asleep`"),
        ("\"瓦\"", "\"a b\"", "a name is wrong: a name is made of letters, digits, `_` and `-`, not of ' '"),
    ] {
        let text = over_periods().replace(from, to);
        assert_ne!(text, over_periods());
        assert_eq!(read(&text).unwrap_err().to_string(), format!("not a whole plan: {said}"));
    }
}
