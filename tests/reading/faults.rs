//! What is said about each fault, word for word.

use std::fmt::Write as _;

use super::{TILEWORKS, bad, edited};

/// What is said when each part of the tileworks is replaced by another.
fn told(edits: &[(&str, &str)]) -> String {
    told_of(edits.iter().map(|(from, to)| edited(from, to)))
}

/// What is said of each text.
pub(super) fn told_of(texts: impl Iterator<Item = String>) -> String {
    let mut told = String::new();
    for text in texts {
        let faults = bad(text.as_bytes());
        let codes: Vec<_> = faults.reported.iter().map(|fault| fault.code).collect();
        writeln!(told, "[{}]\n{}", codes.join(", "), faults.terminal(false)).unwrap();
    }
    told
}

#[test]
fn format_and_head() {
    let told = told(&[
        ("format   = 1\n", ""),
        ("format   = 1\n", "format = 2\nnew_things = true\n"),
        ("format   = 1\n", "format = \"1\"\n"),
        ("format   = 1\n", "format = 0\n"),
        ("currency = \"EUR\"", "currency = 978"),
        ("currency = \"EUR\"", "aim = \"minimize\""),
        ("currency = \"EUR\"", "aim = \"profit\""),
        ("currency = \"EUR\"", "aim = true"),
        ("currency = \"EUR\"", "aim = \"minimise\""),
        ("currency = \"EUR\"", "constant = inf"),
        ("currency = \"EUR\"", "constant = { each = 3 }"),
    ]);
    insta::assert_snapshot!(told);
}

#[test]
fn keys_and_types() {
    let told = told(&[
        ("capacity = 168", "capcity = 168"),
        ("capacity = 168", "colour = \"red\""),
        ("[resources.kiln]", "[resource.kiln]"),
        ("[resources.kiln]", "[kiln]"),
        ("capacity = 168", "capacity = \"168\""),
        ("capacity = 168", "capacity = \"168,5\""),
        ("capacity = 168", "capacity = \"many\""),
        ("capacity = 168", "capacity = true"),
        ("capacity = 168", "capacity = 2027-01-04"),
        ("capacity = 168", "capacity = {}"),
        ("label    = \"Tunnel kiln\"", "label = 7"),
        ("tags     = [\"glazed\"]", "tags = \"glazed\""),
        ("tags     = [\"glazed\"]", "tags = [\"glazed\", 7]"),
        ("tags     = [\"glazed\"]", "tags = [\"glazed tile\"]"),
        ("prospect = true", "prospect = \"yes\""),
        ("uses     = { kiln = 0.045, press = 0.02, dryer = 1 }", "uses = [\"kiln\", 0.045]"),
        ("currency = \"EUR\"", "resources.oven = 7"),
        ("[activities.terrace_slab]", "[[activities.terrace_slab]]"),
        ("[activities.terrace_slab]", "[activities.\"terrace slab\"]"),
        ("[resources.dryer]", "[resources.\"\"]"),
    ]);
    insta::assert_snapshot!(told);
}

#[test]
fn references() {
    let told = told(&[
        ("kiln = 0.020", "kilm = 0.020"),
        ("kiln = 0.020", "\"k\u{456}ln\" = 0.020"),
        ("kiln = 0.020", "packing_line = 0.020"),
        ("kiln = 0.020", "\"kiln.capacity\" = 0.020"),
        ("terms    = { wall_tile = 1.0 }", "terms = { wal_tile = 1.0 }"),
        ("terms    = { wall_tile = 1.0 }", "terms = { glazed = 1.0 }"),
        ("terms    = { wall_tile = 1.0 }", "terms = { \"tag:glased\" = 1.0 }"),
        ("terms    = { wall_tile = 1.0 }", "terms = { \"tag:roof\" = 1.0 }"),
        ("terms    = { wall_tile = 1.0 }", "terms = { \"*\" = 1.0 }"),
        ("terms    = { wall_tile = 1.0 }", "terms = { \"activities.wal_tile\" = 1.0 }"),
        ("terms    = { wall_tile = 1.0 }", "terms = { activities.wall_tile = 1.0 }"),
        ("terms    = { wall_tile = 1.0 }", "terms = { \"activities.wall_tile.price\" = 1.0 }"),
        ("terms    = { wall_tile = 1.0 }", "terms = { \"resources.kiln\" = 1.0 }"),
        ("terms    = { wall_tile = 1.0 }", "terms = { wall_tile = 1.0, \"activities.wall_tile\" = 2.0 }"),
        ("per      = { wall_tile = 1.0", "per = { roof_tile = 1.0"),
    ]);
    insta::assert_snapshot!(told);
}

#[test]
fn bounds() {
    let told = told(&[
        ("at_least = 60", "at_least = 170"),
        ("at_least = 500\nat_most  = 6000", "at_least = 6000\nat_most = 500"),
        ("at_least = 500\nat_most  = 6000", "at_most = -5"),
        ("at_least = 500\nat_most  = 6000", "at_least = \"none\"\nat_most = -5"),
        ("at_least = -4000", "at_least = 4000"),
        ("at_most  = 0.4", "equals = 0.4\nat_least = 0.1"),
        ("at_most  = 0.4", ""),
        ("terms    = { wall_tile = 1.0 }", ""),
        ("per      = { wall_tile = 1.0, floor_tile = 1.0 }", "per = {}"),
        ("prospect = true", "prospect = true\nat_least = 5"),
        ("prospect = true", "prospect = true\nat_least = -5\nat_most = -2"),
    ]);
    insta::assert_snapshot!(told);
}

#[test]
fn numbers() {
    let told = told(&[
        ("price    = 21.0", "price = nan"),
        ("price    = 21.0", "price = inf"),
        ("price    = 21.0", "price = 1e309"),
        ("price    = 21.0", "price = 1.5e15"),
        ("price    = 21.0", "price = -2e15"),
        ("price    = 21.0", "price = 1e-400"),
        ("price    = 21.0", "price = 5e-324"),
        ("price    = 21.0", "price = 9007199254740993"),
        ("price    = 21.0", "price = 0x7fffffffffffffffffff"),
        ("price    = 21.0", "price = 2_000_000_000_000_000"),
        ("kiln = 0.020", "kiln = 1e-10"),
        ("kiln = 0.020", "kiln = inf"),
        ("terms    = { wall_tile = 1.0 }", "terms = { wall_tile = -5e-10 }"),
        ("capacity = 168", "capacity = -inf"),
        ("at_least = 60", "at_least = -inf"),
        ("at_least = 60", "at_least = inf"),
        ("at_least = 500", "at_least = inf"),
        ("at_most  = 0.4", "equals = inf"),
    ]);
    insta::assert_snapshot!(told);
}

#[test]
fn what_this_version_does_not_plan() {
    let told = told(&[
        ("at_least = 500", "lot = 50\nnone_or_at_least = 300\nsetup = { cost = 400 }"),
        ("[limits.small_batch]", "[variants.kiln_down]\n[steady]\n[guard]\n[limits.small_batch]"),
    ]);
    insta::assert_snapshot!(told);
}

#[test]
fn periods_that_are_not_there() {
    let told = told(&[
        ("capacity = 168", "capacity = [168, 120]"),
        ("capacity = 168", "capacity = [168]"),
        ("capacity = 168", "capacity = { each = 168, \"2027-W02\" = 120 }"),
        ("capacity = 168", "capacity = { eech = 168 }"),
        ("capacity = 168", "capacity = { per_day = 22 }"),
        ("terms    = { wall_tile = 1.0 }", "terms = { wall_tile = [1.0, 2.0] }"),
        ("over     = \"each\"", "over = [\"2027-W01\"]"),
        ("over     = \"each\"", "over = []"),
        ("over     = \"each\"", "over = \"every\""),
        ("over     = \"each\"", "over = 1"),
        ("currency = \"EUR\"", "periods = []"),
        ("currency = \"EUR\"", "periods = \"2027-W01\""),
        ("currency = \"EUR\"", "periods = [\"2027-W01\", 2]"),
        ("currency = \"EUR\"", "periods = [2027-01-04]"),
        ("currency = \"EUR\"", "periods = [\"week 1\"]"),
        ("currency = \"EUR\"", "periods = [\"each\", \"per_day\"]"),
        ("currency = \"EUR\"", "periods = [\"2027-W01\", \"2027-W02\", \"2027-W01\"]"),
        (
            "currency = \"EUR\"",
            &format!("periods = [{}]", (0..1001).fold(String::new(), |text, at| format!("{text}\"{at}\", "))),
        ),
        ("currency = \"EUR\"", "days = -1"),
        ("currency = \"EUR\"", "days = [5, 4]"),
        ("currency = \"EUR\"", "days = \"5\""),
    ]);
    insta::assert_snapshot!(told);
}

#[test]
fn syntax() {
    let told = told(&[
        ("price    = 21.0", "price = 21,0"),
        ("kiln = 0.020", "kiln = 0,020"),
        ("price    = 21.0", "price = "),
        ("price    = 21.0", "price"),
        ("price    = 21.0", "price: 21.0"),
        ("price    = 21.0", "price = = 21.0"),
        ("price    = 21.0", "price = EUR 21"),
        ("price    = 21.0", "price = 21 EUR"),
        ("price    = 21.0", "price = 021"),
        ("price    = 21.0", "price = 21."),
        ("price    = 21.0", "price = 1_"),
        ("price    = 21.0", "price = 2027-99-99"),
        ("[resources.press]", "[resources.press"),
        ("[resources.press]", "[resources.the press]"),
        ("[resources.press]", "[resources.]"),
        ("[resources.press]", "[]"),
        ("[resources.press]", "\"\"\"press\"\"\" = 1\n[resources.press]"),
        ("unit     = \"h\"", "unit = \"h"),
        ("unit     = \"h\"", "unit = h"),
        ("unit     = \"h\"", "unit = \"\\h\""),
        ("unit     = \"h\"", "unit = \"\"\"h"),
        ("tags     = [\"glazed\"]", "tags = [\"glazed\""),
        ("tags     = [\"glazed\"]", "tags = [\"glazed\" \"small\"]"),
        ("tags     = [\"glazed\"]", "tags = [\n\"glazed\"\n\"small\"\n]"),
        ("tags     = [\"glazed\"]", "tags = [,]"),
        ("uses     = { kiln = 0.045, press = 0.02, dryer = 1 }", "uses = { kiln = 0.045, press = 0.02"),
        ("uses     = { kiln = 0.045, press = 0.02, dryer = 1 }", "uses = { kiln = 0.045 press = 0.02 }"),
        ("uses     = { kiln = 0.045, press = 0.02, dryer = 1 }", "uses = { kiln 0.045 }"),
        ("uses     = { kiln = 0.045, press = 0.02, dryer = 1 }", "uses = { kiln: 0.045 }"),
        ("uses     = { kiln = 0.045, press = 0.02, dryer = 1 }", "uses = { kiln = 0.045,, press = 0.02 }"),
        ("[activities.trim]", "печь = 1"),
        ("[activities.trim]", "@@@@\n%%%\n[activities.trim]"),
    ]);
    insta::assert_snapshot!(told);
}

#[test]
fn given_twice() {
    let told = told(&[
        ("capacity = 168", "capacity = 168\ncapacity = 170"),
        ("[resources.press]", "[resources.kiln]"),
        ("[resources.press]", "[resources.\"kiln\"]"),
        ("[resources.press]", "[resources.kiln]\n[resources.oven]\nunit = \"m\""),
        ("kiln = 0.020", "kiln = 0.020, kiln = 0.021"),
        ("[resources.press]", "[activities.floor_tile.uses]\n[resources.press]"),
        ("currency = \"EUR\"", "currency = \"EUR\"\nresources.kiln.cost = 2"),
        ("[limits.small_batch]", "[activities]\nfloor_tile.cost = 3\n[limits.small_batch]"),
        ("currency = \"EUR\"", "currency = \"EUR\"\ncurrency = \"SEK\"\n\ncurrency = \"NOK\""),
        ("currency = \"EUR\"", "currency = \"EUR\"\ntitle.short = \"T\""),
    ]);
    insta::assert_snapshot!(told);
}

#[test]
fn conflict_marks() {
    let told = told(&[
        ("capacity = 168", "<<<<<<< HEAD\ncapacity = 168\n=======\ncapacity = 170\n>>>>>>> night-shift"),
        ("# A tileworks of our own invention, one fortnight.", "<<<<<<< HEAD"),
    ]);
    insta::assert_snapshot!(told);
}

#[test]
fn every_fault_of_a_file_is_told_at_once_and_in_its_order() {
    let text = TILEWORKS
        .replace("capacity = 168", "capcity = 168")
        .replace("kiln = 0.020", "kilm = 0.020")
        .replace("at_most  = 900", "at_most = -4001")
        .replace("price    = 17.5", "price = \"17.5\"");
    insta::assert_snapshot!(bad(text.as_bytes()).terminal(false));
}

#[test]
fn beyond_twenty_faults_are_counted() {
    let mut text = String::from("format = 1\n");
    for number in (0..50).rev() {
        writeln!(text, "[activities.a{number:02}]\nprise = 1").unwrap();
    }
    let faults = bad(text.as_bytes());
    let lines: Vec<_> = faults.reported.iter().map(|fault| fault.place.as_ref().unwrap().line).collect();
    assert_eq!(lines, (0..20).map(|at| 3 + 2 * at).collect::<Vec<_>>());
    assert_eq!(faults.more, 30);
    assert!(faults.to_string().ends_with("and 30 more faults"));
}

#[test]
fn a_fault_has_a_form_for_each_reader() {
    let faults = bad(edited("kiln = 0.020", "\"k\u{456}ln\" = 0.020")
        .replace("press = 0.02,", "\"\\u001b[2J\" = 1,")
        .as_bytes());
    insta::assert_snapshot!("on_a_line", faults.to_string());
    insta::assert_snapshot!("in_a_note", faults.markdown());
    insta::assert_snapshot!("in_colour", faults.terminal(true).to_string().replace('\u{1b}', "␛"));
    insta::assert_snapshot!("as_json", serde_json::to_string(&faults.reported).unwrap());
}

#[test]
fn the_caret_stands_under_the_fault_behind_wide_characters_tabs_and_windows_line_ends() {
    let text =
        "format = 1\r\n\r\n[resources.\"瓦窯\"]\r\n[activities.tile]\r\n\tuses = { \"瓦窯\" = 1, \"瓦窑\" = 2 }\r\n";
    insta::assert_snapshot!(bad(text.as_bytes()).terminal(false));
}
