//! Reading models: what a good one becomes, and what is said about a bad one.

#![expect(clippy::panic, reason = "a helper outside a test function")]

use std::path::Path;

use millreeve::model::read::{self, Reading};
use millreeve::model::{Bound, Name, Term, Value, write};

/// A small tileworks that has nothing wrong with it.
const TILEWORKS: &str = include_str!("reading/tileworks.model.toml");

fn reading(text: &str) -> Reading {
    match read::text(Path::new("works.model.toml"), text.as_bytes()) {
        Ok(reading) => reading,
        Err(faults) => panic!("{}", faults.terminal(false)),
    }
}

#[test]
fn a_good_model_is_read_as_it_is_written() {
    let Reading { model, warnings } = reading(TILEWORKS);
    assert!(warnings.is_empty());
    assert_eq!(model.title.as_deref(), Some("Tileworks, next fortnight"));
    assert_eq!(model.resources["kiln"].capacity, Value::Every(168.0));
    assert_eq!(model.resources["glaze_line"].capacity, Value::Every(80.0));
    assert_eq!(model.resources["press"].at_least, Value::Every(f64::NEG_INFINITY));
    assert_eq!(model.activities["wall_tile"].uses["glaze_line"], Value::Every(0.011));
    assert_eq!(model.activities["wall_tile"].at_most, Value::Every(5000.0));
    assert!(model.activities["terrace_slab"].prospect);
    let limit = &model.limits["small_batch"];
    let name = |text| Name::new(text).unwrap();
    assert_eq!(limit.terms[&Term::Tag(name("small"))], Value::Every(1.0));
    assert_eq!(limit.terms[&Term::Activity(name("floor_tile"))], Value::Every(-0.5));
    assert_eq!(limit.bound, Bound::Between(Value::Every(-4000.0), Value::Every(900.0)));
    assert_eq!(limit.per, None);
}

#[test]
fn what_is_written_reads_back_the_same() {
    let Reading { model, .. } = reading(TILEWORKS);
    assert_eq!(reading(&write::model(&model)).model, model);
}
