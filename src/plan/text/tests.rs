//! Plan text there and back: round trips, seals, marks.

use proptest::collection::{btree_map, vec};
use proptest::option;
use proptest::prelude::*;

use super::*;
use crate::model::meaning::Meaning;
use crate::model::{Name, Value};
use crate::plan::number::rounded;
use crate::plan::types::{Plan, PlannedActivity, PlannedLimit, PlannedResource, Standing, State};

fn numbers() -> impl Strategy<Value = f64> {
    prop_oneof![Just(0.0), -1e6..1e6_f64, (-9..14_i32, -1.0..1.0_f64).prop_map(|(e, m)| m * 10_f64.powi(e))]
}

fn ends() -> impl Strategy<Value = (f64, f64)> {
    let least = prop_oneof![Just(f64::NEG_INFINITY), numbers()];
    let most = prop_oneof![Just(f64::INFINITY), numbers()];
    (least, most)
}

fn values() -> impl Strategy<Value = Value> {
    prop_oneof![numbers().prop_map(Value::Every), vec(numbers(), 1..4).prop_map(Value::Listed)]
}

fn named<T: std::fmt::Debug>(entry: impl Strategy<Value = T>) -> impl Strategy<Value = Vec<(Name, T)>> {
    btree_map("[a-zA-Z0-9_б瓦-]{1,12}".prop_map(|text| Name::new(&text).unwrap()), entry, 0..5)
        .prop_map(|map| map.into_iter().collect())
}

fn rates() -> impl Strategy<Value = (Option<f64>, Option<f64>, Option<(f64, f64)>)> {
    (option::of(numbers()), option::of(prop_oneof![Just(f64::INFINITY), numbers()]), option::of(ends()))
}

fn activities() -> impl Strategy<Value = Vec<PlannedActivity>> {
    let (may_vary, price_range) = (option::of(ends()), option::of(ends()));
    let entry = (values(), 0..6_usize, may_vary, price_range, option::of(numbers()), option::of(numbers()));
    named(entry).prop_map(|list| {
        let planned = |(name, (level, state, may_vary, price_range, break_even, loses))| {
            let state = State::ALL[state];
            PlannedActivity { name, level, state, may_vary, price_range, break_even, loses }
        };
        list.into_iter().map(planned).collect()
    })
}

fn resources() -> impl Strategy<Value = Vec<PlannedResource>> {
    named((values(), option::of(values()), rates())).prop_map(|list| {
        let planned = |(name, (used, spare, (worth_of_more, loss_of_less, holds_between)))| PlannedResource {
            name,
            used,
            spare,
            worth_of_more,
            loss_of_less,
            holds_between,
        };
        list.into_iter().map(planned).collect()
    })
}

fn limits() -> impl Strategy<Value = Vec<PlannedLimit>> {
    named((option::of(values()), option::of(values()), rates())).prop_map(|list| {
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

fn standings() -> impl Strategy<Value = Standing> {
    prop_oneof![Just(Standing::Current), Just(Standing::Retired), any::<String>().prop_map(Standing::Held)]
}

prop_compose! {
    fn plans()(
        digest in "[0-9a-f]{64}",
        standing in standings(),
        aim in numbers(),
        currency in option::of(any::<String>()),
        flags in any::<[bool; 4]>(),
        may_vary_left_out in 0..30_000_usize,
        activities in activities(),
        resources in resources(),
        limits in limits(),
    ) -> Plan {
        let [minimise, exact, ties, complete] = flags;
        let answers = Meaning::parse(&digest).unwrap();
        Plan {
            answers, standing, aim, minimise, currency, exact, ties, may_vary_left_out, complete, activities, resources, limits,
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
    fn single(number: &mut Option<f64>) {
        *number = number.map(rounded);
    }
    fn pair(range: &mut Option<(f64, f64)>) {
        *range = range.map(|(least, most)| (rounded(least), rounded(most)));
    }
    plan.aim = rounded(plan.aim);
    for planned in &mut plan.activities {
        value(&mut planned.level);
        pair(&mut planned.may_vary);
        pair(&mut planned.price_range);
        single(&mut planned.break_even);
        single(&mut planned.loses);
    }
    for planned in &mut plan.resources {
        value(&mut planned.used);
        planned.spare.iter_mut().for_each(value);
        single(&mut planned.worth_of_more);
        single(&mut planned.loss_of_less);
        pair(&mut planned.holds_between);
    }
    for planned in &mut plan.limits {
        planned.value.iter_mut().chain(&mut planned.spare).for_each(value);
        single(&mut planned.worth_of_more);
        single(&mut planned.loss_of_less);
        pair(&mut planned.holds_between);
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
        exact: false,
        ties: false,
        may_vary_left_out: 0,
        complete: true,
        activities: vec![],
        resources: vec![],
        limits: vec![],
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
