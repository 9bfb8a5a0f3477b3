//! Notes, one for each thing that can become of an edit.

use std::path::PathBuf;

use millreeve::edits::{Edit, Kind, Subject};
use millreeve::lp::Key;
use millreeve::model::fault::{Excerpt, Place};
use millreeve::model::{Fault, Faults, Model};
use millreeve::plan::note::{EditTold, Reckoning, Report, Trouble, Verdict, reason, speaks_of, write};
use millreeve::plan::{Each, Plan, PlannedActivity, Standing};
use millreeve::solver::message::{Conflict, Growth, Rule, Start};

use crate::tileworks::{activity, model, name, planned};

const SEAL: &str = "5ea1";

fn edit(address: &str, old: &str, new: &str, kind: Kind) -> Edit {
    let told = |text: &str| (!text.is_empty()).then(|| text.to_owned());
    Edit { address: address.to_owned(), subject: Subject::Model, old: told(old), new: told(new), kind }
}

fn reckoning(kind: Kind, taken: Start, broken: usize, open: usize, pivots: usize) -> Reckoning {
    Reckoning {
        kinds: vec![kind],
        expected: "none or dual".to_owned(),
        taken,
        primal_infeasible: Some(broken),
        dual_infeasible: Some(open),
        by_name: false,
        pivots,
        exact_pivots: 0,
        detours: vec![],
        worst: 2.2e-15,
    }
}

fn report<'a>(
    model: &'a Model,
    before: Option<&'a Plan>,
    edits: &'a [EditTold<'a>],
    verdict: Verdict<'a>,
) -> Report<'a> {
    let title = model.title.as_deref();
    Report {
        title,
        file: "tileworks.model.toml",
        model: Some(model),
        before,
        edits,
        verdict,
        seal: Some(SEAL),
        release: None,
        reckoning: None,
    }
}

#[test]
fn of_a_first_plan() {
    let (model, plan) = (model(), planned(&model()));
    let reckoning = Reckoning { expected: "cold".to_owned(), pivots: 4, ..Reckoning::default() };
    let report = Report { reckoning: Some(&reckoning), ..report(&model, None, &[], Verdict::Planned(&plan)) };
    insta::assert_snapshot!(write(&report));
}

#[test]
fn of_more_capacity() {
    let before = planned(&model());
    let mut model = model();
    model.resources.get_mut("kiln").unwrap().capacity = 130.0.into();
    let plan = planned(&model);
    let edit = edit("resources.kiln.capacity", "120", "130", Kind::Capacity);
    let edits = [EditTold { edit: &edit, worth: Some(6400.0) }];
    let reckoning = reckoning(Kind::Capacity, Start::None, 0, 0, 0);
    let report =
        Report { reckoning: Some(&reckoning), ..report(&model, Some(&before), &edits, Verdict::Planned(&plan)) };
    let note = write(&report);
    assert_eq!(speaks_of(&note), Some(SEAL));
    insta::assert_snapshot!(note);
}

#[test]
fn of_a_prospect_that_would_pay_now() {
    let before = planned(&model());
    let mut model = model();
    model.activities.get_mut("terrace_slab").unwrap().price = 35.0.into();
    let plan = planned(&model);
    let edit = edit("activities.terrace_slab.price", "34", "35", Kind::Price);
    let edits = [EditTold { edit: &edit, worth: None }];
    insta::assert_snapshot!(write(&report(&model, Some(&before), &edits, Verdict::Planned(&plan))));
}

/// Twenty tiles that earned nothing and filled the dryer are withdrawn, so the aim stays and one of many equal plans is left.
#[test]
fn of_many_moves_an_activity_gone_and_a_resource_eased() {
    let mut before = planned(&model());
    let template = before.activities[0].clone();
    for number in 0..20 {
        let mut extra = template.clone();
        extra.name = name(&format!("tile_{number:02}"));
        extra.level = f64::from(100 + number).into();
        before.activities.push(extra);
    }
    before.activities.sort_by(|a, b| a.name.cmp(&b.name));
    let dryer = &mut before.resources[0];
    (dryer.used, dryer.spare, dryer.worth_of_more) = (90.0.into(), Some(0.0.into()), None);
    let (model, mut plan) = (model(), planned(&model()));
    plan.ties = true;
    plan.complete = false;
    for planned in &mut plan.resources {
        (planned.worth_of_more, planned.loss_of_less, planned.holds_between) = (None, None, None);
    }
    for planned in &mut plan.activities {
        (planned.price_range, planned.break_even, planned.loses) = (None, None, None);
    }
    let edits: Vec<Edit> = (0..20)
        .map(|number| edit(&format!("activities.tile_{number:02}"), "one activity", "", Kind::WithdrawnActivity))
        .collect();
    let edits: Vec<EditTold<'_>> = edits.iter().map(|edit| EditTold { edit, worth: None }).collect();
    let mut reckoning = reckoning(Kind::WithdrawnActivity, Start::Cold, 7, 3, 41);
    reckoning.detours = vec!["dual simplex past its share of pivots".into()];
    let report =
        Report { reckoning: Some(&reckoning), ..report(&model, Some(&before), &edits, Verdict::Planned(&plan)) };
    insta::assert_snapshot!(write(&report));
}

/// How far the levels may go is made up: what is tested is how it is told.
#[test]
fn of_plans_that_earn_as_much() {
    let mut model = model();
    let mut plan = planned(&model);
    plan.ties = true;
    let told = |model: &Model, plan: &Plan| {
        let note = write(&report(model, None, &[], Verdict::Planned(plan)));
        note.lines().find(|line| line.contains("Other plans")).map(str::to_owned)
    };
    let floor = plan.activities.iter().position(|planned| planned.name == name("floor_tile")).unwrap();
    plan.activities[floor].may_vary = Some(Each::One((0.0, 4180.25)));
    let mut expected = "Other plans earn as much: floor_tile may be anything from 0 to 4 180.25 m2; \
        the one shown is always the same for the same model.";
    assert_eq!(told(&model, &plan).as_deref(), Some(expected));

    // The unit is somebody's text, the name has passed for one.
    model.activities.get_mut("floor_tile").unwrap().unit = Some("m2 <b>*".to_owned());
    (plan.minimise, plan.exact) = (true, false);
    plan.activities[floor].may_vary = Some(Each::One((f64::NEG_INFINITY, 5.0)));
    expected =
        "Other plans cost as little: floor_tile may be anything up to 5 m2 &lt;b&gt;\\*; the one shown is one of them.";
    assert_eq!(told(&model, &plan).as_deref(), Some(expected));

    // Of many, the first are told. None of these has an end, so they come by name.
    let template = plan.activities[floor].clone();
    for number in 0..9 {
        let span = if number == 0 { (f64::NEG_INFINITY, f64::INFINITY) } else { (1.0, f64::INFINITY) };
        let may_vary = Some(Each::One(span));
        plan.activities.push(PlannedActivity { name: name(&format!("x{number}")), may_vary, ..template.clone() });
    }
    expected = "Other plans cost as little: floor_tile may be anything up to 5 m2 &lt;b&gt;\\*, x0 anything, \
        x1 anything from 1 up, x2 anything from 1 up, x3 anything from 1 up, x4 anything from 1 up and 4 other levels, each as the others allow; \
        the one shown is one of them.";
    assert_eq!(told(&model, &plan).as_deref(), Some(expected));

    for planned in &mut plan.activities {
        planned.may_vary = None;
    }
    (plan.exact, plan.may_vary_left_out) = (true, 120);
    expected = "Other plans cost as little; the one shown is always the same for the same model. \
        How far 120 levels may differ is not worked out for a model of this size.";
    assert_eq!(told(&model, &plan).as_deref(), Some(expected));
    plan.ties = false;
    assert_eq!(told(&model, &plan), None);
}

#[test]
fn of_how_surely_it_was_settled() {
    let (model, mut plan) = (model(), planned(&model()));
    let reckoning = Reckoning { exact_pivots: 2, ..reckoning(Kind::Price, Start::None, 0, 0, 0) };
    let last = |plan: &Plan| {
        let report = Report { reckoning: Some(&reckoning), ..report(&model, None, &[], Verdict::Planned(plan)) };
        write(&report).lines().last().unwrap().to_owned()
    };
    assert!(last(&plan).ends_with("; settled by 2 exact pivots; proven to 2e-15."), "{}", last(&plan));
    plan.exact = false;
    assert!(last(&plan).ends_with("; proven to 2e-15; near ties not told apart exactly."), "{}", last(&plan));
}

#[test]
fn of_wording_and_of_nothing() {
    let (model, plan) = (model(), planned(&model()));
    let edit = edit("activities.floor_tile.label", "", "Floor tile 30x30", Kind::Wording);
    let edits = [EditTold { edit: &edit, worth: None }];
    let lead = |edits, before| lead(&write(&report(&model, Some(before), edits, Verdict::Planned(&plan))));
    assert_eq!(lead(&edits, &plan), "The plan stands: only wording was edited, and it earns 93 800 EUR as before.");
    assert_eq!(lead(&[], &plan), "The plan stands: nothing moves, and it earns 93 800 EUR as before.");
    let held = Plan { standing: Standing::Held("why".to_owned()), ..plan.clone() };
    assert_eq!(lead(&[], &held), "There is a plan again: nothing moves, and it earns 93 800 EUR as before.");
}

fn lead(note: &str) -> String {
    note.lines().find(|line| line.starts_with("**")).unwrap().trim_matches('*').to_owned()
}

#[test]
fn the_first_sentence_fits_the_way_the_aim_goes() {
    let model = model();
    let plan = planned(&model);
    let told = |before: f64, after: f64, minimise: bool| {
        let before = Plan { aim: before, minimise, ..plan.clone() };
        let after = Plan { aim: after, minimise, ..plan.clone() };
        lead(&write(&report(&model, Some(&before), &[], Verdict::Planned(&after))))
    };
    assert_eq!(told(100.0, 90.0, false), "The plan earns 90 EUR, 10 EUR (10 %) less than before; no level moves.");
    assert_eq!(told(-100.0, -90.0, false), "The plan loses 90 EUR, 10 EUR (10 %) less than before; no level moves.");
    assert_eq!(told(100.0, 110.0, true), "The plan costs 110 EUR, 10 EUR (10 %) more than before; no level moves.");
    assert_eq!(told(50.0, -50.0, false), "The plan loses 50 EUR, 100 EUR (200 %) worse than before; no level moves.");
    assert_eq!(
        told(43265.1, 43265.12, false),
        "The plan earns 43 265.12 EUR, 0.02 EUR more than before; no level moves."
    );
    assert_eq!(told(0.0, 5.0, true), "The plan costs 5 EUR, 5 EUR more than before; no level moves.");
}

#[test]
fn of_an_aim_turned_round() {
    let (model, plan) = (model(), planned(&model()));
    let before = Plan { minimise: true, ..plan.clone() };
    let note = write(&report(&model, Some(&before), &[], Verdict::Planned(&plan)));
    assert_eq!(
        lead(&note),
        "The plan now earns 93 800 EUR, which cannot be compared with before, as the aim or its currency was changed; no level moves."
    );
}

#[test]
fn of_a_fault() {
    let (model, plan) = (model(), planned(&model()));
    let excerpt = Excerpt { text: "uses = { kilm = 0.02 }".to_owned(), before: 9, cut_left: false, cut_right: false };
    let fault = Fault {
        path: PathBuf::from("works/tileworks.model.toml"),
        place: Some(Place { line: 12, column: 10, width: 4, excerpt }),
        code: "no-such-resource",
        message: "no resource `kilm`".to_owned(),
        help: "did you mean `kiln`?".to_owned(),
    };
    let whole = Fault { place: None, message: "the file is empty".to_owned(), help: String::new(), ..fault.clone() };
    let faults = Faults { reported: vec![fault, whole], more: 3 };
    let trouble = Trouble::Faults(&faults);
    assert_eq!(reason(trouble, None), "the model has 5 faults, the first in line 12: no resource `kilm`");
    let report = Report { model: None, ..report(&model, Some(&plan), &[], Verdict::Trouble(trouble)) };
    insta::assert_snapshot!(write(&report));
}

#[test]
fn of_a_contradiction() {
    let (mut model, plan) = (model(), planned(&model()));
    model.activities.insert(name("floor_tile"), activity(21.0, 6.5, &[("kiln", 0.02)]));
    let rule = |key: &str, is_row, upper, bound| Rule { key: Key::new(key), is_row, upper, bound };
    let conflict = Conflict {
        rules: vec![
            rule("activities.floor_tile", false, false, 5000.0),
            rule("limits.glazed_share.at_most", true, true, 0.0),
            rule("resources.kiln", true, true, 84.0),
            // Goes without saying, and is not said.
            rule("activities.wall_tile", false, false, 0.0),
        ],
        proven: true,
        minimal: true,
    };
    let trouble = Trouble::Infeasible(&conflict);
    assert_eq!(
        reason(trouble, Some(&model)),
        "these cannot all be kept: floor_tile at least 5 000 m2, limit glazed_share (at most 0.6, as a ratio), capacity of kiln (at most 84 h)"
    );
    let edit = edit("resources.kiln.capacity", "120", "84", Kind::Capacity);
    let edits = [EditTold { edit: &edit, worth: None }];
    let reckoning = reckoning(Kind::Capacity, Start::Dual, 1, 0, 2);
    let report =
        Report { reckoning: Some(&reckoning), ..report(&model, Some(&plan), &edits, Verdict::Trouble(trouble)) };
    insta::assert_snapshot!(write(&report));
}

#[test]
fn of_no_limit_no_answer_and_no_model() {
    let (model, plan) = (model(), planned(&model()));
    let growth = Growth { rates: vec![(Key::new("activities.mosaic"), 1.0)], proven: false };
    assert_eq!(reason(Trouble::Unbounded(&growth), None), "nothing limits mosaic");
    let note = |before, verdict| write(&report(&model, before, &[], verdict));
    insta::assert_snapshot!("unbounded", note(Some(&plan), Verdict::Trouble(Trouble::Unbounded(&growth))));
    let why = "The solver gave up: its numbers are too far apart.";
    insta::assert_snapshot!("undecided", note(None, Verdict::Trouble(Trouble::Undecided(why))));
    insta::assert_snapshot!("retired", note(Some(&plan), Verdict::Retired));
}
