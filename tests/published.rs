//! Worked examples from textbooks, papers and manuals: our answers held against the published ones.
//!
//! Each is a model and the answer expected of it, in `tests/published/`; the source stands in both.

#![expect(clippy::unwrap_used, clippy::panic, reason = "helpers of tests fail the test")]

#[path = "support/clarabel.rs"]
mod clarabel;
#[path = "support/expected.rs"]
mod expected;

use std::time::Duration;

use clarabel::Verdict;
use expected::{Example, Expected, Told, examples};
use millreeve::edits::{Kind, compare};
use millreeve::lp::{Key, Program, Sense, build};
use millreeve::model::meaning::Meaning;
use millreeve::model::{Activity, Bound, Limit, Model, Name, Term, Value};
use millreeve::plan::{self, Plan, State, last};
use millreeve::solver::message::{Answer, Conflict, Optimum, Outcome, Start};
use millreeve::solver::session::Session;
use millreeve::solver::stop::Stop;

const INF: f64 = f64::INFINITY;

fn solve(session: &mut Session, program: &Program) -> Answer {
    session.solve(program.clone(), Duration::from_secs(60), &Stop::default())
}

fn optimum(what: &str, answer: Answer) -> Optimum {
    match answer.outcome {
        Outcome::Optimal(optimum) => *optimum,
        other => panic!("{what}: {other:?}"),
    }
}

fn near(a: f64, b: f64) -> bool {
    a.total_cmp(&b).is_eq() || (a - b).abs() <= 1e-9 * a.abs().max(b.abs()).max(1.0)
}

fn plan(model: &Model, program: &Program, optimum: &Optimum) -> Plan {
    plan::make(model, Meaning::of(model), program, optimum).unwrap()
}

#[test]
fn answers_are_those_published() {
    for Example { id, model, expected } in examples() {
        let program = build(&model);
        match solve(&mut Session::default(), &program).outcome {
            Outcome::Optimal(optimum) => {
                assert_eq!(expected.outcome, "optimal", "{id}");
                answer(&id, &program, &expected, &optimum);
                told(&id, &program, &expected, &plan(&model, &program, &optimum));
            }
            Outcome::Infeasible(conflict) => {
                assert_eq!(expected.outcome, "infeasible", "{id}");
                contradiction(&id, &expected, &conflict);
            }
            Outcome::Unbounded(growth) => {
                assert_eq!(expected.outcome, "unbounded", "{id}");
                assert!(growth.proven, "{id}");
            }
            other => panic!("{id}: {other:?}"),
        }
    }
}

/// The numbers of the solver's answer.
fn answer(id: &str, program: &Program, expected: &Expected, optimum: &Optimum) {
    assert!(near(optimum.aim, expected.aim.unwrap().value()), "{id}: aim {}", optimum.aim);
    assert!(optimum.proof.holds(), "{id}: {:?}", optimum.proof);
    assert_eq!(optimum.levels_unique, expected.levels_unique, "{id}: levels unique");
    // Where several plans are optimal, one of them may hide that the worths are unique; they are never called unique in error.
    assert!(!optimum.worths_unique || expected.worths_unique, "{id}: worths unique");
    assert!(optimum.worths_unique || !expected.worths_unique || !expected.levels_unique, "{id}: worths not unique");
    for (name, level) in &expected.levels {
        let found = optimum.levels[column(program, name)];
        assert!(level.holds(found), "{id}: level of {name} is {found} instead of {level:?}");
    }
    for (key, worth) in &expected.worths {
        let found = optimum.worths[row(program, key)];
        assert!(worth.holds(found), "{id}: worth of {key} is {found} instead of {worth:?}");
    }
    for (name, gain) in &expected.gains {
        let found = optimum.gains[column(program, name)];
        assert!(gain.holds(found), "{id}: gain of {name} is {found} instead of {gain:?}");
    }
    assert_eq!(optimum.ranges.is_some(), expected.levels_unique && expected.worths_unique, "{id}: ranges");
    let Some(ranges) = &optimum.ranges else { return };
    assert_eq!(expected.aim_ranges.len(), program.columns.len(), "{id}");
    assert_eq!(expected.bound_ranges.len(), program.rows.len(), "{id}");
    for (name, range) in &expected.aim_ranges {
        let found = ranges.aims[column(program, name)];
        assert!(range.is(found), "{id}: range of {name} is {found:?} instead of {range:?}");
    }
    for (key, range) in &expected.bound_ranges {
        let found = ranges.bounds[row(program, key)];
        assert!(range.is(found), "{id}: range of {key} is {found:?} instead of {range:?}");
    }
}

/// The number of a single period.
fn one(value: Option<&Value>) -> Option<f64> {
    value.map(|value| value.numbers()[0])
}

/// What the plan tells planners: break-evens of what is idle, and of one-sided worths the right side or nothing.
fn told(id: &str, program: &Program, expected: &Expected, plan: &Plan) {
    let sign = -program.sense.sign();
    assert!(plan.exact && plan.ties != expected.levels_unique && plan.may_vary_left_out == 0, "{id}");
    for activity in &plan.activities {
        match (expected.levels.get(activity.name.as_str()), activity.may_vary.as_ref().and_then(plan::Each::one)) {
            (Some(range @ Told::Range(..)), Some(ends)) => assert!(range.is(ends), "{id}: {} {ends:?}", activity.name),
            (Some(Told::Range(..)), None) => panic!("{id}: {} may vary", activity.name),
            (Some(Told::One(_)), Some(ends)) => panic!("{id}: {} is {ends:?}", activity.name),
            (Some(Told::One(_)) | None, _) => {}
        }
    }
    for activity in plan.activities.iter().filter(|activity| activity.state.is(State::Idle)) {
        let Some(break_even) = one(activity.break_even.as_ref()) else {
            assert!(!expected.levels_unique || !expected.worths_unique, "{id}: no break-even of {}", activity.name);
            continue;
        };
        let Some(Told::Range(least, most)) = expected.aim_ranges.get(activity.name.as_str()) else { continue };
        let (least, most) = (least.value(), most.value());
        // Of what is earned the most at which it stays out, of what is spent the least. Costs count down where prices count up.
        let own = program.columns[column(program, activity.name.as_str())].aim;
        let loses = if program.sense == Sense::Maximise { most - own } else { own - least };
        assert!(
            near(one(activity.loses.as_ref()).unwrap(), loses),
            "{id}: {} loses {:?}",
            activity.name,
            activity.loses
        );
        assert!(break_even.is_finite(), "{id}");
    }
    for resource in &plan.resources {
        let worth = &expected.worths[&format!("resources.{}", resource.name)];
        let (less, more) = worth.sides();
        for (told, truth) in [(&resource.worth_of_more, more), (&resource.loss_of_less, less)] {
            match one(told.as_ref()) {
                Some(told) => assert!(near(told, sign * truth), "{id}: {} is told as {told}", resource.name),
                None => assert!(!expected.worths_unique || !expected.levels_unique, "{id}: {} untold", resource.name),
            }
        }
    }
}

/// A proven contradiction that contains a minimal one; where the rules have only one, it is that.
fn contradiction(id: &str, expected: &Expected, conflict: &Conflict) {
    assert!(conflict.proven, "{id}");
    let rules: Vec<String> = conflict
        .rules
        .iter()
        .map(|rule| format!("{} {}", rule.key, if rule.upper { "at most" } else { "at least" }))
        .collect();
    let within = |minimal: &Vec<String>| minimal.iter().all(|rule| rules.contains(rule));
    assert!(expected.conflicts.iter().any(within), "{id}: {rules:?}");
    assert!(expected.conflicts.iter().any(|minimal| minimal.len() == rules.len()), "{id}: not minimal: {rules:?}");
}

fn column(program: &Program, name: &str) -> usize {
    program.column(&Key::new(&format!("activities.{name}"))).unwrap().0
}

fn row(program: &Program, key: &str) -> usize {
    program.row(&Key::new(key)).unwrap().0
}

#[test]
fn an_independent_engine_agrees() {
    for Example { id, model, expected } in examples() {
        match (clarabel::solve(&build(&model)), expected.outcome.as_str()) {
            (Verdict::Optimal(aim), "optimal") => {
                let published = expected.aim.unwrap().value();
                assert!((aim - published).abs() <= 1e-6 * published.abs().max(1.0), "{id}: {aim}");
            }
            (Verdict::Infeasible, "infeasible") | (Verdict::Unbounded, "unbounded") => {}
            (Verdict::Unsure(status), _) => panic!("{id}: {status}"),
            (verdict, expected) => panic!("{id}: {verdict:?} instead of {expected}"),
        }
    }
}

/// Inside every published range the plan stands without a pivot; beyond its ends it does not.
#[test]
fn ranges_end_where_published() {
    let mut probed = 0;
    for Example { id, model, expected } in examples() {
        let program = build(&model);
        for (name, range) in &expected.aim_ranges {
            let at = column(&program, name);
            for (inside, outside) in range.probes(program.columns[at].aim) {
                let moved = |aim| {
                    let mut moved = program.clone();
                    moved.columns[at].aim = aim;
                    moved
                };
                let what = format!("{id}: {name} from {inside} to {outside}");
                let (before, stands, after) = probe(&what, &program, &moved(inside), &moved(outside));
                assert_eq!((stands, &before.0), (Start::None, &after[0].0), "{what}");
                let same = before.0.iter().zip(&after[1].0).all(|(a, b)| near(*a, *b));
                assert!(after[1].0.is_empty() || !same, "{what}: same levels");
                probed += 1;
            }
        }
        for (key, range) in &expected.bound_ranges {
            let at = row(&program, key);
            let (lower, upper) = (program.rows[at].lower, program.rows[at].upper);
            // A range row's own bounds must not cross; its lower bound is the one that binds.
            let moves_lower = lower.is_finite() && (lower < upper);
            let bound = if moves_lower { lower } else { upper };
            for (inside, outside) in range.probes(bound) {
                let moved = |bound| {
                    let mut moved = program.clone();
                    let row = &mut moved.rows[at];
                    match (lower < upper, moves_lower) {
                        (false, _) => (row.lower, row.upper) = (bound, bound),
                        (true, true) => row.lower = bound,
                        (true, false) => row.upper = bound,
                    }
                    moved
                };
                let what = format!("{id}: {key} from {inside} to {outside}");
                let (before, stands, after) = probe(&what, &program, &moved(inside), &moved(outside));
                assert_eq!(stands, Start::None, "{what}");
                assert!(before.1.iter().zip(&after[0].1).all(|(a, b)| near(*a, *b)), "{what}: other worths");
                let same = before.1.iter().zip(&after[1].1).all(|(a, b)| near(*a, *b));
                assert!(after[1].1.is_empty() || !same, "{what}: same worths");
                probed += 1;
            }
        }
    }
    assert!(probed > 100, "{probed}");
}

/// Levels and worths; empty where there is no plan, or no end to it.
type Point = (Vec<f64>, Vec<f64>);

fn probe(what: &str, program: &Program, inside: &Program, outside: &Program) -> (Point, Start, [Point; 2]) {
    let point = |answer: Answer| match answer.outcome {
        Outcome::Optimal(optimum) => (optimum.levels, optimum.worths),
        Outcome::Infeasible(_) | Outcome::Unbounded(_) => Point::default(),
        other => panic!("{what}: {other:?}"),
    };
    let mut session = Session::default();
    let before = point(solve(&mut session, program));
    let answer = solve(&mut session, inside);
    let start = answer.account.start;
    (before, start, [point(answer), point(solve(&mut session, outside))])
}

/// An edit of an example whose outcome is published.
struct Scenario {
    example: &'static str,
    what: &'static str,
    edit: fn(&mut Model),
    kinds: &'static [Kind],
    starts: [Start; 2],
    aim: f64,
    levels: &'static [(&'static str, f64)],
}

/// Hillier & Lieberman's own re-optimisations, and examples 5.1 and 5.2 of Bertsimas & Tsitsiklis; from memory, confirmed by exact
/// arithmetic.
const SCENARIOS: [Scenario; 5] = [
    Scenario {
        example: "hl-wyndor",
        what: "twice the capacity of plant 2",
        edit: |model| capacity(model, "plant2", 24.0),
        kinds: &[Kind::Capacity],
        starts: [Start::None, Start::Dual],
        aim: 45.0,
        levels: &[("doors", 0.0), ("windows", 9.0)],
    },
    Scenario {
        example: "hl-wyndor",
        what: "a new product that earns 4 and would have to earn 5.5",
        edit: |model| {
            let uses = [("plant1", 2.0), ("plant2", 3.0), ("plant3", 1.0)].map(|(at, rate)| (name(at), rate.into()));
            let new = Activity { price: 4.0.into(), uses: uses.into(), ..Activity::default() };
            model.activities.insert(name("skylights"), new);
        },
        kinds: &[Kind::NewActivity],
        starts: [Start::None, Start::None],
        aim: 36.0,
        levels: &[("doors", 2.0), ("windows", 6.0), ("skylights", 0.0)],
    },
    Scenario {
        example: "hl-wyndor",
        what: "a fourth plant, on top of twice the capacity of plant 2",
        edit: |model| {
            capacity(model, "plant2", 24.0);
            limit(model, "plant4", &[("doors", 2.0), ("windows", 3.0)], -INF, 24.0);
        },
        kinds: &[Kind::Capacity, Kind::NewConstraint],
        starts: [Start::None, Start::Dual],
        aim: 40.0,
        levels: &[("doors", 0.0), ("windows", 8.0)],
    },
    Scenario {
        example: "bt-example-5",
        what: "a fifth unknown whose reduced cost is -4",
        edit: |model| {
            model.activities.insert(name("x5"), Activity { cost: (-1.0).into(), ..Activity::default() });
            for row in ["r1", "r2"] {
                model.limits.get_mut(row).unwrap().terms.insert(Term::Activity(name("x5")), 1.0.into());
            }
        },
        kinds: &[Kind::NewActivity, Kind::Recipe, Kind::Recipe],
        starts: [Start::None, Start::Primal],
        aim: -16.0,
        levels: &[("x1", 3.0), ("x2", 0.0), ("x5", 1.0)],
    },
    Scenario {
        example: "bt-example-5",
        what: "x1 + x2 is to be at least 5",
        edit: |model| limit(model, "r3", &[("x1", 1.0), ("x2", 1.0)], 5.0, INF),
        kinds: &[Kind::NewConstraint],
        starts: [Start::None, Start::Dual],
        aim: -5.0,
        levels: &[("x1", 0.0), ("x2", 5.0)],
    },
];

fn name(text: &str) -> Name {
    Name::new(text).unwrap()
}

fn capacity(model: &mut Model, resource: &str, capacity: f64) {
    model.resources.get_mut(resource).unwrap().capacity = capacity.into();
}

fn limit(model: &mut Model, limit: &str, terms: &[(&str, f64)], least: f64, most: f64) {
    let terms = terms.iter().map(|&(activity, rate)| (Term::Activity(name(activity)), rate.into())).collect();
    let bound = Bound::Between(least.into(), most.into());
    model.limits.insert(name(limit), Limit { terms, bound, ..Limit::default() });
}

#[test]
fn edits_come_to_what_is_published() {
    let examples: Vec<Example> = examples().collect();
    for Scenario { example, what, edit, kinds, starts, aim, levels } in SCENARIOS {
        let Example { model, .. } = examples.iter().find(|found| found.id == example).unwrap();
        let mut edited = model.clone();
        edit(&mut edited);
        let (before, after) = (build(model), build(&edited));
        let mut session = Session::default();
        let first = optimum(what, solve(&mut session, &before));
        let answer = solve(&mut session, &after);
        let account = answer.account.clone();
        let second = optimum(what, answer);
        assert!(near(second.aim, aim), "{what}: {}", second.aim);
        for &(name, level) in levels {
            assert!(near(second.levels[column(&after, name)], level), "{what}: {name}");
        }
        let edits = compare(model, &edited);
        assert_eq!(edits.iter().map(|edit| edit.kind).collect::<Vec<_>>(), kinds, "{what}");
        assert!(starts.contains(&account.start), "{what}: {account:?}");
        let kept = last::last_plan(&model.horizon, &before, &first.basis.named(&before)).kept(&edits);
        assert!(kept.expected().contains(account.start.word()), "{what}: {kept:?}, {account:?}");
    }
}
