//! What a good model becomes.

use millreeve::model::read::Reading;
use millreeve::model::{Aim, Bound, Model, Name, Term, Value, write};

use super::{TILEWORKS, edited, good};

fn name(text: &str) -> Name {
    Name::new(text).unwrap()
}

#[test]
fn a_good_model_is_read_as_it_is_written() {
    let Reading { model, warnings } = good(TILEWORKS);
    assert!(warnings.is_empty());
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
fn look_alike_names_are_a_warning() {
    // The `i` of the second is U+0456, a Cyrillic letter.
    let text = edited("[activities.terrace_slab]", "[activities.\"tr\u{456}m\"]");
    let warnings = good(&text).warnings;
    let told: Vec<String> =
        warnings.reported.iter().map(|warning| format!("[{}] {}", warning.code, warning.line())).collect();
    let expected = "[look-alike] works.model.toml:50:13: `tr\u{456}m` looks like `trim`, but is another name; \
                    its character 3 is U+0456, not U+0069; rename one of the two";
    assert_eq!(told, [expected]);
}

#[test]
fn a_written_model_is_laid_out_as_people_write_one() {
    insta::assert_snapshot!(write::model(&good(TILEWORKS).model));
}
