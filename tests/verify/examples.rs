//! Everything that the tests and the examples plan comes out the same when it is worked out afresh.

use std::fs;
use std::path::Path;

use crate::support::Works;

/// Copies the models of a folder and of those below it, in one file or in parts, each into the same place below `to`.
fn lay_out(works: &Works, from: &str, to: &str) {
    let from = Path::new(env!("CARGO_MANIFEST_DIR")).join(from);
    for entry in fs::read_dir(&from).unwrap() {
        let path = entry.unwrap().path();
        let name = path.file_name().unwrap().to_str().unwrap();
        if path.is_dir() {
            lay_out(works, path.to_str().unwrap(), &format!("{to}/{name}"));
        } else if name.ends_with(".model.toml") || from.extension().is_some_and(|of| of == "model") {
            works.save(&format!("{to}/{name}"), fs::read(&path).unwrap());
        }
    }
}

#[test]
fn every_model_of_tests_and_examples_verifies() {
    let works = Works::with(&[]);
    lay_out(&works, "tests", "tests");
    lay_out(&works, "examples", "examples");
    works.run(&["once", "."]);
    let (_, text, objects) = works.verify();
    let count = |finding: &str| objects.iter().filter(|object| object["finding"] == finding).count();
    for object in &objects {
        let plan = works.path(object["plan"].as_str().unwrap());
        let expected = if plan.exists() { "verified" } else { "no plan" };
        let found = match object["finding"].as_str().unwrap() {
            "none" if object["good"] == true => "no plan",
            // Models that tests of reading are about.
            "faulty" if !plan.exists() => "no plan",
            finding => finding,
        };
        assert_eq!(found, expected, "{object}");
    }
    assert!(count("verified") >= 20, "{text}");
    assert!(count("none") >= 3, "{text}");
}
