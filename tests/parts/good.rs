//! What good parts become.

use std::path::Path;

use millreeve::model::meaning::Meaning;
use millreeve::model::read::Writing;
use proptest::prelude::*;

use super::{WHOLE, WORKS, borrowed, edited, good, with, writing};

#[test]
fn parts_mean_what_they_would_in_one_file() {
    let whole = Writing::of(WHOLE.as_bytes().to_vec()).read(Path::new("works.model.toml")).unwrap();
    assert_eq!(good(&WORKS).model, whole.model);
}

#[test]
fn the_order_and_names_of_parts_decide_nothing() {
    let mut turned = WORKS;
    turned.reverse();
    assert_eq!(writing(&turned), writing(&WORKS));
    let renamed = WORKS.map(|(name, text)| (if name == "works.toml" { "zz.toml" } else { name }, text));
    assert_eq!(good(&renamed).model, good(&WORKS).model);
    assert_ne!(writing(&renamed), writing(&WORKS));
}

#[test]
fn what_editors_and_spreadsheets_do_to_a_file_changes_nothing() {
    let same = |name: &str, change: fn(&str) -> String| {
        let parts: Vec<_> = WORKS
            .iter()
            .map(|&(n, text)| (n.to_owned(), if n == name { change(text) } else { text.to_owned() }))
            .collect();
        assert_eq!(good(&borrowed(&parts)).model, good(&WORKS).model, "{name}");
    };
    for (name, _) in WORKS {
        same(name, |text| format!("\u{feff}{}", text.replace('\n', "\r\n")));
        same(name, |text| text.trim_end().to_owned());
        same(name, |text| format!("{text}\n\n"));
    }
    let csv = |change: fn(&str) -> String| {
        same("resources.csv", change);
        same("activities.csv", change);
        same("uses.csv", change);
    };
    csv(|text| text.lines().map(|line| format!("{line},,\n")).collect());
    csv(|text| format!("{text},,,,,,,\n").replace(",,,,,,,\n", &format!("{}\n", ",".repeat(commas(text)))));
    csv(|text| text.replace("kiln", "\"kiln\"").replace("1.2", "\"1.2\"").replace("press", " press "));
}

fn commas(text: &str) -> usize {
    text.lines().next().unwrap().matches(',').count()
}

#[test]
fn columns_may_stand_in_any_order_and_flags_in_capitals() {
    let parts = with(&WORKS, "uses.csv", "rate,resource,activity\n0.02,kiln,floor_tile\n");
    assert_eq!(good(&parts).model.activities["floor_tile"].uses.len(), 1);
    let parts = edited("activities.csv", "name,label,unit,cost", "name,label,unit,prospect");
    let parts: Vec<_> = parts
        .into_iter()
        .map(|(name, text)| (name, text.replace("m2,6.5", "m2,FALSE").replace("m2,5.25", "m2,TRUE")))
        .collect();
    let model = good(&borrowed(&parts)).model;
    assert!(model.activities["wall_tile"].prospect && !model.activities["floor_tile"].prospect);
}

#[test]
fn a_table_may_be_given_in_pieces() {
    let more = "[activities.floor_tile.uses]\ndryer = 1\n[resources.oven]\n";
    let parts = with(&WORKS, "dryer.toml", more);
    let model = good(&parts).model;
    assert_eq!(model.activities["floor_tile"].uses.len(), 3);
    assert!(model.resources.contains_key("oven"));
}

#[test]
fn names_that_look_alike_are_told_across_parts() {
    let parts = with(&WORKS, "twin.toml", "[resources.\"k\u{456}ln\"]\n");
    let warnings = good(&parts).warnings;
    let twins: Vec<_> = warnings.reported.iter().filter(|warning| warning.code == "look-alike").collect();
    assert_eq!(twins.len(), 1);
    assert_eq!(twins[0].path, Path::new("works.model/twin.toml"));
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(200))]

    /// However the entries of a model are dealt out to parts, it means the same.
    #[test]
    fn any_division_into_parts_means_the_same(hands in proptest::collection::vec(0..4usize, 24)) {
        let mut parts = [(); 4].map(|()| String::new());
        for (block, hand) in WHOLE.split("\n[").skip(1).zip(&hands) {
            parts[*hand].push_str(&format!("[{block}\n"));
        }
        let head = "format = 1\ntitle = \"Tileworks\"\ncurrency = \"EUR\"\n";
        parts[hands[23]].insert_str(0, head);
        let parts: Vec<_> = parts.into_iter().enumerate().filter(|(_, text)| !text.is_empty())
            .map(|(at, text)| (format!("{at}.toml"), text)).collect();
        prop_assert_eq!(Meaning::of(&good(&borrowed(&parts)).model), Meaning::of(&good(&WORKS).model));
    }
}
