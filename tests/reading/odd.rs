//! What is said of models in which nothing is wrong, and something is odd.

use std::fmt::Write as _;

use super::{TILEWORKS, WEEKS, edited, edited_weeks, good};

/// What is odd about each text.
fn told(texts: &[String]) -> String {
    let mut told = String::new();
    for text in texts {
        let warnings = good(text).warnings;
        let codes: Vec<_> = warnings.reported.iter().map(|warning| warning.code).collect();
        writeln!(told, "[{}]\n{}", codes.join(", "), warnings.terminal(false)).unwrap();
    }
    told
}

fn codes(text: &str) -> Vec<&'static str> {
    good(text).warnings.reported.iter().map(|warning| warning.code).collect()
}

/// The tileworks with no tag that nobody sums.
fn works(from: &str, to: &str) -> String {
    edited(from, to).replace("tags     = [\"glazed\"]\n", "").replace("\"glazed\", ", "")
}

#[test]
fn works_in_which_nothing_is_odd() {
    assert_eq!(codes(&works("", "")), [""; 0]);
    assert_eq!(codes(&WEEKS.replace("\"pressed\", \"glazed\"", "\"pressed\"")), [""; 0]);
}

#[test]
fn names_that_look_alike() {
    let slab = "[activities.terrace_slab]";
    let told = told(&[
        // The `i` is U+0456, a Cyrillic letter.
        works(slab, "[activities.\"tr\u{456}m\"]"),
        works(slab, "[activities.Floor-Tile]"),
        works(slab, "[activities.wa1l_tile]"),
        works("[resources.dryer]", "[resources.ki1n]\n[resources.dryer]"),
        edited_weeks("[materials.offcut]", "[materials.s1ip]\ndiscard = { cost = 1 }\n[materials.offcut]"),
        edited_weeks("[limits.store]", "[limits.c0ntract]\nterms = { floor_tile = 1 }\nat_most = 1e6\n[limits.store]"),
    ]);
    insta::assert_snapshot!(told);
    for other in ["trim_2", "wall_tiles", "floor_tile_30", "terrace_slab_b"] {
        assert_eq!(codes(&works(slab, &format!("[activities.{other}]"))), [""; 0], "{other}");
    }
}

#[test]
fn what_nothing_comes_of() {
    let told = told(&[
        works("[resources.dryer]", "[resources.packing]\ncapacity = 5\n[resources.dryer]"),
        works("glaze_line = 0.011", "glaze_line = 0")
            .replace("glaze_line = 0.004", "press = 0.004")
            .replace("press = 0.006, ", ""),
        edited("tags     = [\"glazed\", \"small\"]", "tags     = [\"smal\", \"small\"]"),
        edited_weeks("lead     = 1", "lead     = 3"),
        works("prospect = true", "makes = { slabs = 1 }\nlead = 1") + "[materials.slabs]\nsale = { price = 2 }\n",
        edited_weeks("[materials.offcut]", "[materials.sand]\npurchase = { price = 3 }\n[materials.offcut]"),
        edited_weeks("[materials.offcut]", "[materials.sand]\n[materials.offcut]")
            .replace("draws    = { slip = 0.05 }", "draws    = { slip = 0.05, sand = 0.1 }"),
    ]);
    insta::assert_snapshot!(told);
}

#[test]
fn what_is_there_for_something_is_not_idle() {
    for sand in [
        "opening = 3\nclosing = 3",
        "purchase = { price = 1 }\nsale = { price = 2, at_most = 9 }",
        "discard = { cost = 3 }",
    ] {
        let text = works("", "") + &format!("[materials.sand]\n{sand}\n");
        assert_eq!(codes(&text), [""; 0], "{sand}");
    }
}

#[test]
fn activities_that_nothing_limits() {
    let trade = |keys: &str, materials: &str| works("", "") + &format!("[activities.trade]\n{keys}\n") + materials;
    let bought = "[materials.sand]\npurchase = { price = 3 }\nsale = { price = 4, at_most = 10 }\n";
    let told = told(&[
        trade("price = 3", ""),
        trade("price = 3\nuses = { dryer = 1 }", ""),
        trade("cost = 3", ""),
        trade("price = 3.5\ndraws = { sand = 1 }", bought),
        trade("cost = 1\nmakes = { sand = 1 }", "[materials.sand]\nsale = { price = 4 }\n"),
        edited_weeks("at_least = [0, 200, 200]\nat_most  = 2000", "at_most  = [2000, inf, 2000]")
            .replace("kiln = 0.016, press = 0.010", "")
            .replace("wall_tile = 1.0 }", "floor_tile = 1.0 }")
            .replace("\"pressed\", \"glazed\"", "\"glazed\"")
            .replace("draws    = { slip = { each = 0.015, \"2027-W01\" = 0.016 } }\n", ""),
    ]);
    insta::assert_snapshot!(told);
    for (keys, materials) in [
        ("price = 3\nat_most = 7", ""),
        ("price = 3\nuses = { press = 1 }", ""),
        ("price = 3\nprospect = true", ""),
        ("price = 3\ntags = [\"small\"]", ""),
        // It costs as much as it earns, or more.
        ("price = 3\ndraws = { sand = 1 }", bought),
        ("cost = 1\nmakes = { sand = 1 }", "[materials.sand]\nsale = { price = 1 }\n"),
        // There is only so much of it, or only so much can be sold.
        ("price = 3.5\ndraws = { sand = 1 }", "[materials.sand]\npurchase = { price = 3, at_most = 9 }\n"),
        ("cost = 1\nmakes = { sand = 1 }", "[materials.sand]\nsale = { price = 4, at_most = 9 }\n"),
        ("price = 1\nmakes = { sand = 1 }", "[materials.sand]\ndiscard = { at_most = 9 }\n"),
    ] {
        assert_eq!(codes(&trade(keys, materials)), [""; 0], "{keys} {materials}");
    }
}

#[test]
fn coefficients_that_are_far_apart() {
    let told = told(&[
        works("kiln = 0.020", "kiln = 1e-9"),
        edited_weeks("\"materials.slip.stock\" = 1", "\"materials.slip.stock\" = 1e6"),
    ]);
    insta::assert_snapshot!(told);
    assert_eq!(codes(&works("kiln = 0.020", "kiln = 1e-8")), [""; 0]);
}

#[test]
fn beyond_twenty_oddities_are_counted() {
    let idle = (0..50).fold(TILEWORKS.to_owned(), |text, at| text + &format!("[resources.idle{at}]\n"));
    let warnings = good(&idle).warnings;
    // The tag of the tileworks that no limit sums is one more.
    assert_eq!((warnings.reported.len(), warnings.more), (20, 31));
}
