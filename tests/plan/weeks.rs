//! Plans and notes over several weeks, worked out by the solver.

use std::fmt::Write as _;
use std::path::Path;
use std::time::Duration;

use millreeve::lp::build;
use millreeve::model::meaning::Meaning;
use millreeve::model::{Model, Value, read};
use millreeve::plan::compare::events;
use millreeve::plan::note::{ReleaseTold, Report, Trouble, Verdict, reason, write};
use millreeve::plan::release::Release;
use millreeve::plan::{self, Each, Plan, PlannedMaterial, State, text};
use millreeve::solver::message::Outcome;
use millreeve::solver::session::Session;
use millreeve::solver::stop::Stop;

/// The work of eight weeks: slip is bought, floor tiles are fired in one week and sold from the next on, the press is short in the
/// third. Extra kiln hours, a safety stock, firm sales that may be late.
pub(crate) const EIGHT: &str = include_str!("eight_weeks.model.toml");

pub(crate) fn model(text: &str) -> Model {
    read::text(Path::new("works.model.toml"), text.as_bytes()).unwrap().model
}

fn outcome(model: &Model) -> Outcome {
    Session::default().solve(build(model), Duration::from_secs(60), &Stop::default()).outcome
}

pub(crate) fn planned(model: &Model) -> Plan {
    let Outcome::Optimal(optimum) = outcome(model) else { panic!("{:?}", outcome(model)) };
    plan::make(model, Meaning::of(model), &build(model), &optimum).unwrap()
}

fn note(model: &Model, before: Option<&Plan>, plan: &Plan, release: Option<&Release>) -> String {
    write(&Report {
        title: model.title.as_deref(),
        file: "works.model.toml",
        model: Some(model),
        before,
        edits: &[],
        verdict: Verdict::Planned(plan),
        seal: None,
        release: release.map(|release| ReleaseTold { mark: "5e", release: Ok(release) }),
        reckoning: None,
    })
}

/// The same works with less of the kiln and the press.
fn short() -> String {
    let text = EIGHT.replace("per_day = 11", "per_day = 9");
    let text = text.replace("\"2027-W03\" = 22", "\"2027-W03\" = 15, \"2027-W06\" = 40");
    assert_ne!(text, EIGHT);
    text
}

#[test]
fn the_plan_of_eight_weeks() {
    insta::assert_snapshot!(text::write(&planned(&model(EIGHT))));
}

#[test]
fn the_note_of_a_first_plan_over_eight_weeks() {
    let model = model(EIGHT);
    insta::assert_snapshot!(note(&model, None, &planned(&model), None));
}

#[test]
fn the_note_of_moves_over_eight_weeks() {
    let before = planned(&model(EIGHT));
    let after = model(&short());
    insta::assert_snapshot!(note(&after, Some(&before), &planned(&after), Some(&Release::of(&before, "5e"))));
}

/// The first week has passed and another is planned: what both have is compared, and nothing else.
#[test]
fn the_note_of_a_horizon_that_has_rolled_on() {
    let before = planned(&model(EIGHT));
    let text = EIGHT
        .replace("\"2027-W01\", ", "")
        .replace("\"2027-W08\"]", "\"2027-W08\", \"2027-W09\"]")
        .replace("[4, 5, 5, 5, 5, 5, 4, 5]", "[5, 5, 5, 5, 5, 4, 5, 5]")
        .replace(FIRM, "[600, 600, 3200, 600, 600, 600, 600, 600]");
    let after = model(&text);
    let plan = planned(&after);
    insta::assert_snapshot!(note(&after, Some(&before), &plan, Some(&Release::of(&before, "5e"))));
}

/// So many floor tiles as are firmly sold in the fourth week cannot be fired until then.
#[test]
fn what_cannot_be_kept_is_told_with_its_weeks() {
    let text = EIGHT.replace(FIRM, "[600, 600, 600, 9900, 600, 600, 600, 600]");
    let text = text.replace(
        "at_most = 3200, late = { cost = 2, at_most = 1800 }",
        "at_most = 9900, late = { cost = 2, at_most = 9 }",
    );
    let model = model(&text);
    let Outcome::Infeasible(conflict) = outcome(&model) else { panic!("{:?}", outcome(&model)) };
    insta::assert_snapshot!(reason(Trouble::Infeasible(&conflict), Some(&model)).replace(", ", ",\n"));
}

fn at(value: Option<&Value>, place: usize) -> f64 {
    value.map_or(0.0, |value| value.numbers()[place])
}

/// In each week what was there, what is bought and what is made are what is drawn, sold, thrown away and left.
#[test]
fn what_comes_in_and_what_goes_out_of_a_material_are_equal() {
    for text in [EIGHT.to_owned(), short(), year()] {
        let model = model(&text);
        let plan = planned(&model);
        assert_eq!(plan.materials.len(), model.materials.len());
        for material in &plan.materials {
            let PlannedMaterial { purchase, sale, stock, discard, .. } = material;
            for place in 0..plan.periods.len() {
                let there = match place.checked_sub(1) {
                    Some(before) => at(stock.as_ref(), before),
                    None => model.materials[&material.name].opening,
                };
                let comes = there + at(purchase.as_ref(), place) + at(Some(&material.made), place);
                let goes = [sale.as_ref(), discard.as_ref(), stock.as_ref(), Some(&material.drawn)];
                let goes: f64 = goes.into_iter().map(|value| at(value, place)).sum();
                assert!((comes - goes).abs() <= 1e-6 * comes.max(1.0), "{} {place}: {comes} {goes}", material.name);
            }
        }
    }
}

/// Used is what activities use, extra capacity is what of it is beyond the capacity, spare what both leave.
#[test]
fn what_is_used_of_a_resource_is_within_its_capacity_and_the_extra_one() {
    let model = model(&short());
    let plan = planned(&model);
    for (planned, resource) in plan.resources.iter().zip(model.resources.values()) {
        for period in model.horizon.periods() {
            let used: f64 = plan
                .activities
                .iter()
                .zip(model.activities.values())
                .filter_map(|(level, activity)| {
                    Some(activity.uses.get(&planned.name)?.at(period) * level.level.at(period))
                })
                .sum();
            let place = period.position();
            let told = planned.used.at(period);
            assert!((told - used).abs() <= 1e-6, "{} {place}: {told} {used}", planned.name);
            let width: f64 = resource.surge.iter().map(|tier| tier.at_most.at(period)).sum();
            let spare = planned.spare.as_ref().unwrap().at(period);
            assert!((spare + told - resource.capacity.at(period) - width).abs() <= 1e-6, "{} {place}", planned.name);
            assert!(at(planned.surge.as_ref(), place) <= width + 1e-9);
            assert!(told - at(planned.surge.as_ref(), place) <= resource.capacity.at(period) + 1e-6);
        }
    }
    assert!(
        plan.resources.iter().any(|planned| planned.surge.as_ref().is_some_and(|surge| surge.at(first(&model)) > 0.0))
    );
}

fn first(model: &Model) -> millreeve::model::Period {
    model.horizon.periods().next().unwrap()
}

/// Lists of the eight weeks in their model.
const FIRM: &str = "[600, 600, 600, 3200, 600, 600, 600, 600]";
const BOUGHT: &str = "[60, 75, 85, 70, 85, 85, 85, 85]";

/// The eight weeks over a year: 52 of them, with a name from another script among them.
fn year() -> String {
    let mut weeks: Vec<String> = (1..=52).map(|week| format!("\"2027-W{week:02}\"")).collect();
    weeks[33] = "\"отпуск\"".to_owned();
    let mut text = String::new();
    for line in EIGHT.lines() {
        match line.split_once('=').map(|(key, _)| key.trim()) {
            Some("periods") => writeln!(text, "periods = [{}]", weeks.join(", ")).unwrap(),
            Some("days") => writeln!(text, "days = [{}]", ["5"; 52].join(", ")).unwrap(),
            _ => writeln!(text, "{}", line.replace(FIRM, "600").replace(BOUGHT, "85")).unwrap(),
        }
    }
    text
}

/// However many weeks there are, a note can be read in a minute: it has no table of them.
#[test]
fn a_note_over_a_year_is_no_longer_than_one_over_eight_weeks() {
    let before = planned(&model(&year()));
    let after = model(&year().replace("per_day = 11", "per_day = 9").replace("\"2027-W03\" = 22", "\"2027-W30\" = 15"));
    let plan = planned(&after);
    assert!(plan.periods.len() == 52 && text::read(&text::write(&plan)).unwrap().sealed);
    for note in [note(&after, None, &plan, None), note(&after, Some(&before), &plan, None)] {
        assert!(note.lines().count() < 60, "{note}");
        assert!(note.lines().all(|line| line.chars().count() < 330), "{note}");
    }
}

/// An event tells the week in which a prospect would pay most, and of a scarce resource the most that one more is worth.
#[test]
fn events_name_the_week_that_counts_most() {
    let before = planned(&model(EIGHT));
    let told = |before: Option<&Plan>, after: &Plan| {
        let events = events(before, after, 0.01);
        events.iter().map(|event| serde_json::to_value(event).unwrap()).collect::<Vec<_>>()
    };
    let [first] = &told(None, &before)[..] else { panic!("{:?}", told(None, &before)) };
    assert_eq!((&first["event"], &first["period"]), (&"would_enter".into(), &"2027-W08".into()));
    let mut eased = before.clone();
    eased.resources[0].worth_of_more = Some(Value::Listed(vec![0.0; 8]));
    let [binds] = &told(Some(&eased), &before)[..] else { panic!("{:?}", told(Some(&eased), &before)) };
    let most = before.resources[0].worth_of_more.as_ref().unwrap().numbers().iter().copied().fold(0.0, f64::max);
    assert_eq!((&binds["event"], &binds["name"]), (&"binds".into(), &"kiln".into()));
    assert!((binds["worth_of_more"].as_f64().unwrap() - most).abs() < 1e-6);
}

/// A level may be free in one week and not in another: then a plan says so week by week.
#[test]
fn a_state_that_differs_by_week_is_told_by_week_and_in_one_word_where_it_does_not() {
    let plan = planned(&model(EIGHT));
    let states: Vec<&Each<State>> = plan.activities.iter().map(|planned| &planned.state).collect();
    assert!(states.iter().any(|state| matches!(state, Each::Listed(list) if list.len() == 8)));
    assert!(states.iter().any(|state| state.is(State::Prospect)));
    // Its levels, worths and break-evens are lists even so.
    let prospect = plan.activities.iter().find(|planned| planned.state.is(State::Prospect)).unwrap();
    assert_eq!(prospect.level.numbers().len(), 8);
}
