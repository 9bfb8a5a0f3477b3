//! What a good model becomes.

use millreeve::model::read::Reading;
use millreeve::model::{Aim, Bound, Closing, Discard, Flow, Late, Model, Name, Over, Term, Value, write};

use super::{TILEWORKS, WEEKS, edited, edited_weeks, good};

fn name(text: &str) -> Name {
    Name::new(text).unwrap()
}

#[test]
fn a_good_model_is_read_as_it_is_written() {
    let Reading { model, .. } = good(TILEWORKS);
    assert_eq!(model.title.as_deref(), Some("Tileworks, next fortnight"));
    assert_eq!(model.aim, Aim::Maximise);
    assert_eq!(model.resources["kiln"].capacity, Value::Every(168.0));
    assert_eq!(model.resources["glaze_line"].capacity, Value::Every(80.0));
    assert_eq!(model.resources["press"].at_least, Value::Every(f64::NEG_INFINITY));
    assert_eq!(model.activities["wall_tile"].uses["glaze_line"], Value::Every(0.011));
    assert_eq!(model.activities["wall_tile"].at_most, Value::Every(5000.0));
    assert!(model.activities["terrace_slab"].prospect);
    let limit = &model.limits["small_batch"];
    assert_eq!(limit.terms[&Term::Tag(name("small"))], Value::Every(1.0));
    assert_eq!(limit.terms[&Term::Activity(name("floor_tile"))], Value::Every(-0.5));
    assert_eq!(limit.bound, Bound::Between(Value::Every(-4000.0), Value::Every(900.0)));
    assert_eq!(limit.per, None);
}

#[test]
fn every_address_of_activities_is_a_term() {
    let terms = "terms    = { \"activities.*\" = 2, \"activities.tag:small\" = 3, \"activities.wall_tile\" = 4 }";
    let model = good(&edited("terms    = { wall_tile = 1.0 }", terms)).model;
    let read: Vec<_> = model.limits["glazed_share"].terms.iter().collect();
    let expected = [
        (Term::Activity(name("wall_tile")), Value::Every(4.0)),
        (Term::Tag(name("small")), Value::Every(3.0)),
        (Term::All, Value::Every(2.0)),
    ];
    assert_eq!(read, expected.iter().map(|(term, value)| (term, value)).collect::<Vec<_>>());
}

#[test]
fn a_model_of_nothing_is_a_model() {
    assert_eq!(good("format = 1\n").model, Model::default());
}

#[test]
fn a_byte_order_mark_and_windows_line_ends_are_no_matter() {
    let windows = format!("\u{feff}{}", TILEWORKS.replace('\n', "\r\n"));
    assert_eq!(good(&windows).model, good(TILEWORKS).model);
}

#[test]
fn bounds_may_be_left_open() {
    let model = good(&edited("at_least = 500\nat_most  = 6000", "at_least = -inf\nat_most  = inf")).model;
    assert_eq!(model.activities["floor_tile"].at_least, Value::Every(f64::NEG_INFINITY));
    assert_eq!(model.activities["floor_tile"].at_most, Value::Every(f64::INFINITY));
    let model = good(&edited("at_least = 500\nat_most  = 6000", "at_least = -9\nat_most  = -2")).model;
    assert_eq!(model.activities["floor_tile"].at_most, Value::Every(-2.0));
}

#[test]
fn numbers_at_the_edge_of_what_is_allowed_are_read() {
    let price = |text: &str| {
        good(&edited("price    = 21.0", &format!("price = {text}"))).model.activities["floor_tile"].price.clone()
    };
    assert_eq!(price("1e15"), Value::Every(1e15));
    assert_eq!(price("-1_000_000_000_000_000"), Value::Every(-1e15));
    assert_eq!(price("0x10"), Value::Every(16.0));
    assert_eq!(price("1e-12"), Value::Every(1e-12));
    let Value::Every(zero) = price("-0.0") else { unreachable!() };
    assert!(zero.is_sign_positive());
    good(&edited("kiln = 0.020", "kiln = 1e-9"));
    good(&edited("kiln = 0.020", "kiln = -0"));
}

#[test]
fn a_model_over_several_periods_is_read_as_it_is_written() {
    let model = good(WEEKS).model;
    let horizon = &model.horizon;
    let period = |label| horizon.period(label).unwrap();
    assert_eq!(horizon.count(), 3);
    // 22 hours a day, on 5, 4 and 4.5 days.
    assert_eq!(model.resources["kiln"].capacity, Value::Listed(vec![110.0, 88.0, 99.0]));
    assert_eq!(model.resources["kiln"].at_least, Value::Listed(vec![40.0, 30.0, 40.0]));
    assert_eq!(model.resources["kiln"].surge[1].at_most.at(period("2027-W02")).to_bits(), 20_f64.to_bits());
    let floor_tile = &model.activities["floor_tile"];
    assert_eq!((floor_tile.lead, floor_tile.makes.len()), (1, 2));
    assert_eq!(floor_tile.change_at_most, Value::Every(800.0));
    let slip = &model.materials["slip"];
    assert_eq!(slip.closing, Some(Closing { at_least: 10.0, worth: 30.0 }));
    assert_eq!(
        slip.purchase.iter().map(|tier| tier.at_most.clone()).collect::<Vec<_>>(),
        [60.0, 30.0].map(Value::Every)
    );
    let floor_stock = &model.materials["floor_stock"];
    assert_eq!(floor_stock.closing, Some(Closing { at_least: 400.0, worth: 0.0 }));
    assert_eq!(floor_stock.sale[0].late, Some(Late { cost: Value::Every(2.0), at_most: Value::Every(300.0) }));
    assert_eq!(floor_stock.sale[1].late, None);
    assert_eq!(floor_stock.discard, Discard::default());
    let late = Term::Material(name("floor_stock"), Flow::Late(None));
    assert_eq!(model.limits["store"].terms[&late], Value::Every(-0.01));
    assert_eq!(model.limits["contract"].over, Over::All);
    assert_eq!(model.limits["overtime"].over, Over::Some(vec![period("2027-W01"), period("2027-W02")]));
}

#[test]
fn what_means_the_same_is_read_the_same() {
    for (one, other) in [
        ("[60, 48, 54]", "{ each = 48, \"2027-W01\" = 60, \"2027-W03\" = 54 }"),
        ("[60, 48, 54]", "{ per_day = 12 }"),
        ("[60, 48, 54]", "{ \"2027-W03\" = 54, \"2027-W02\" = 48, \"2027-W01\" = 60.0 }"),
        ("[60, 48, 54]", "{ per_day = 12, \"2027-W03\" = 54 }"),
        ("at_most  = 2000", "at_most  = [2000, 2000, 2000]"),
        ("at_most  = 2000", "at_most  = { each = 2000 }"),
        ("over     = \"all\"", "over     = [\"2027-W03\", \"2027-W01\", \"2027-W02\"]"),
        ("[\"2027-W01\", \"2027-W02\"]\n\n[limits.store]", "[\"2027-W02\", \"2027-W01\"]\n\n[limits.store]"),
        ("closing  = 400", "closing  = { at_least = 400, worth = 0 }"),
        ("[materials.offcut]\n", "[materials.offcut]\nopening = 0\npurchase = []\n"),
        (
            "surge    = { at_most = { per_day = 2 }, cost = [60, 70, 60] }",
            "surge    = [{ at_most = { per_day = 2 }, cost = [60, 70, 60] }]",
        ),
    ] {
        assert_eq!(good(&edited_weeks(one, other)).model, good(WEEKS).model, "{other}");
    }
    let closed = edited_weeks("closing  = 400\n", "");
    assert_eq!(
        good(&closed.replace("[materials.offcut]", "closing = 0\n[materials.offcut]")).model,
        good(&closed).model
    );
    // Of a single nameless period, all together are each.
    let all = good(&edited("over     = \"each\"", "over     = \"all\""));
    assert_eq!(all.model, good(TILEWORKS).model);
    let days = good(
        &edited("capacity = 168", "capacity = { per_day = 24 }")
            .replace("currency = \"EUR\"", "currency = \"EUR\"\ndays = 7"),
    );
    assert_eq!(days.model, good(TILEWORKS).model);
}

#[test]
fn what_is_made_of_days_is_the_product_of_the_decimals() {
    // In doubles 0.1 · 3 and 4.35 · 100 come out otherwise.
    let text = edited_weeks("days     = [5, 4, 4.5]", "days     = [3, 100, 7]")
        .replace("per_day = 22", "per_day = 0.1")
        .replace("at_least = { each = 40, \"2027-W02\" = 30 }", "");
    assert_eq!(good(&text).model.resources["kiln"].capacity, Value::Listed(vec![0.3, 10.0, 0.7]));
    assert_eq!(
        good(&text.replace("per_day = 0.1", "per_day = 4.35")).model.resources["kiln"].capacity,
        Value::Listed(vec![13.05, 435.0, 30.45])
    );
    assert_ne!(f64::to_bits(0.1 * 3.0), f64::to_bits(0.3));
}

#[test]
fn what_is_odd_is_a_warning() {
    let warnings = good(TILEWORKS).warnings;
    let told: Vec<String> =
        warnings.reported.iter().map(|warning| format!("[{}] {}", warning.code, warning.line())).collect();
    let expected = "[unused-tag] works.model.toml:48:1: no limit sums the tag `glazed`; \
                    sum it in a limit as \"tag:glazed\", or take it out";
    assert_eq!(told, [expected]);
}

#[test]
fn a_written_model_is_laid_out_as_people_write_one() {
    insta::assert_snapshot!(write::model(&good(TILEWORKS).model));
}

#[test]
fn a_written_model_of_several_periods_is_laid_out_as_people_write_one() {
    insta::assert_snapshot!(write::model(&good(WEEKS).model));
}
