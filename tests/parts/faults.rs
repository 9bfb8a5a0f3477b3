//! What is said about the faults of parts, word for word.

use std::fmt::Write as _;

use super::{Part, WORKS, borrowed, edited, read, with};

/// What is said of parts; each set of them has something wrong.
fn told(all: &[Vec<Part<'_>>]) -> String {
    let mut told = String::new();
    for parts in all {
        let faults = read(parts).unwrap_err();
        let codes: Vec<_> = faults.reported.iter().map(|fault| fault.code).collect();
        writeln!(told, "[{}]\n{}", codes.join(", "), faults.terminal(false)).unwrap();
    }
    told
}

/// What is said when something in a part is replaced.
fn told_edited(name: &str, edits: &[(&str, &str)]) -> String {
    let all: Vec<_> = edits.iter().map(|(from, to)| edited(name, from, to)).collect();
    told(&all.iter().map(|parts| borrowed(parts)).collect::<Vec<_>>())
}

#[test]
fn the_folder_and_its_parts() {
    let nothing: Vec<Part<'_>> = Vec::new();
    let without_format: Vec<_> = WORKS.iter().filter(|(name, _)| name.ends_with(".csv")).copied().collect();
    insta::assert_snapshot!(told(&[
        nothing,
        without_format,
        with(&WORKS, "works.toml", "title = \"Tileworks\"\n")
            .into_iter()
            .filter(|(name, _)| *name != "sales.toml")
            .collect(),
        with(&WORKS, "sales.toml", "format = 2\nnews = 1\n"),
        with(&WORKS, "sales.toml", "format = \"1\"\n"),
        with(&WORKS, "sales.toml", " \n"),
        with(&WORKS, "sales.toml", "[activities.floor_tile\nprice = 21\n"),
        with(&with(&WORKS, "sales.toml", "price =\n"), "works.toml", "format = 1\n<<<<<<< ours\n"),
        with(&WORKS, "uses.csv", "activity,resource,rate\n<<<<<<< ours\n=======\n>>>>>>> theirs\n"),
        with(&WORKS, "Activities.csv", "name\n"),
        with(&WORKS, "prices.csv", "name,price\n"),
        with(&WORKS, "uses.csv", "activity,resource,rate\n\u{0}"),
    ]));
}

#[test]
fn keys_given_twice() {
    insta::assert_snapshot!(told(&[
        with(&WORKS, "prices.toml", "[activities.floor_tile]\nprice = 22\n"),
        with(&WORKS, "prices.toml", "title = \"Works\"\n[resources.kiln]\ncapacity = { each = 160 }\n"),
        with(&WORKS, "prices.toml", "[activities.floor_tile.uses]\nkiln = 0.021\n"),
        with(&WORKS, "prices.toml", "[limits.glazed_share]\nper = { trim = 1 }\nterms = 3\n"),
        with(&WORKS, "prices.toml", "[activities.roof_tile]\nprice = 3\nprice = 4\n"),
    ]));
    insta::assert_snapshot!(told_edited(
        "resources.csv",
        &[("press,h", "kiln,h"), ("capacity,cost", "capacity,capacity")]
    ));
    insta::assert_snapshot!(told_edited("uses.csv", &[("floor_tile,press", "floor_tile,kiln")]));
}

#[test]
fn rows_and_cells() {
    insta::assert_snapshot!(told_edited(
        "activities.csv",
        &[
            ("6.5", "6,5"),
            ("6.5", "\"6,5\""),
            ("6.5", "\"1,200,000\""),
            ("6.5", "6.5 EUR"),
            ("6.5", ".5"),
            ("6.5", "06"),
            ("6.5", "1 200.5"),
            ("6.5", "many"),
            ("6.5", "nan"),
            ("6.5", "-inf"),
            ("6.5", "1e16"),
            ("6.5", "[6.5]"),
            ("m2,6.5", "m2"),
            ("m2,6.5", "m2,6.5,7"),
            ("floor_tile", "floor tile"),
            ("floor_tile", ""),
            ("\"Floor tile, 30x30\"", "30\" tile"),
            ("\"Floor tile, 30x30\"", "\"30\"\" tile"),
            ("\"Floor tile, 30x30\"", "\"30\" tile"),
            ("\"Floor tile, 30x30\",m2,6.5", "\"Two\nlines\",m2,x"),
        ]
    ));
}

#[test]
fn columns() {
    insta::assert_snapshot!(told_edited(
        "activities.csv",
        &[
            ("name,label,unit,cost", "activity,label,unit,cost"),
            ("name,label,unit,cost", "name,label,unit,costs"),
            ("name,label,unit,cost", "name,label,unit,colour"),
            ("name,label,unit,cost", "name,label,unit,tags"),
            ("name,label,unit,cost", "name,label,unit,uses"),
            ("name,label,unit,cost", "name,label,unit,"),
            ("name,label,unit,cost", "name,label,unit,cost@2027-W01"),
            ("name,label,unit,cost", "name,label,unit,prospect"),
            ("name,label,unit,cost", "name;label;unit;cost"),
            ("name,label,unit,cost", "name\tlabel\tunit\tcost"),
        ]
    ));
    insta::assert_snapshot!(told_edited(
        "uses.csv",
        &[
            ("activity,resource,rate", "activity,material,rate"),
            ("activity,resource,rate", "activity,resource,rates"),
            ("activity,resource,rate", "activity,resource"),
            ("floor_tile,kiln,0.020", "flor_tile,kiln,0.020"),
            ("floor_tile,kiln,0.020", "floor_tile,kilm,0.020"),
            ("floor_tile,kiln,0.020", "floor_tile,kiln,"),
            ("floor_tile,kiln,0.020", "floor_tile,,0.020"),
            ("floor_tile,kiln,0.020", "floor_tile,kiln,1e-12"),
        ]
    ));
}

/// A clay yard over two weeks.
const YARD: [Part<'static>; 4] = [
    (
        "works.toml",
        "format = 1\nperiods = [\"2027-W01\", \"2027-W02\"]\n[resources.pug_mill]\nunit = \"h\"\ncapacity = 80\n\
         [materials.clay]\nunit = \"t\"\nopening = 12\npurchase = [{ price = 30 }]\nstock = { at_most = 40 }\n",
    ),
    ("materials.csv", "name,unit,opening,closing\nbody,t,4,2\n"),
    ("activities.csv", "name,unit,price@2027-W01,price@2027-W02\nmill_body,t,0,0\nsell_body,t,95,97.5\n"),
    ("draws.csv", "activity,material,rate\nmill_body,clay,1.1\nsell_body,body,1\n"),
];

/// What is said when something in a part of the yard is replaced.
fn told_in_the_yard(name: &str, edits: &[(&str, &str)]) -> String {
    let change = |&(from, to): &(&str, &str)| {
        let change = |(part, text): &Part<'_>| {
            let text = if *part == name { text.replacen(from, to, 1) } else { (*text).to_owned() };
            ((*part).to_owned(), text)
        };
        let changed: Vec<_> = YARD.iter().map(change).collect();
        assert!(changed.iter().zip(YARD).any(|((_, text), (_, was))| text != was), "{name} has no {from:?}");
        changed
    };
    let all: Vec<_> = edits.iter().map(change).collect();
    told(&all.iter().map(|parts| borrowed(parts)).collect::<Vec<_>>())
}

#[test]
fn columns_of_one_period() {
    insta::assert_snapshot!(told_in_the_yard(
        "activities.csv",
        &[
            ("price@2027-W02", "price@2027-W03"),
            ("price@2027-W02", "price@27W2"),
            ("price@2027-W02", "price@"),
            ("price@2027-W02", "price@2027-W01"),
            ("price@2027-W02", "price@2027-W02@2027-W01"),
            ("price@2027-W02", "@2027-W02"),
            ("price@2027-W02", "prise@2027-W02"),
            ("price@2027-W02", "lead@2027-W02"),
            ("unit,price@2027-W01", "unit@2027-W01,price@2027-W01"),
            ("95,97.5", "95,"),
            ("95,97.5", "95,97,5"),
        ]
    ));
    insta::assert_snapshot!(told_in_the_yard("draws.csv", &[("rate", "rate@2027-W03"), ("rate", "rate@2027-W02")]));
}

#[test]
fn materials() {
    insta::assert_snapshot!(told_in_the_yard(
        "materials.csv",
        &[
            ("name,unit,opening,closing", "material,unit,opening,closing"),
            ("name,unit,opening,closing", "name,unit,open,closing"),
            ("name,unit,opening,closing", "name,unit,opening@2027-W01,closing"),
            ("name,unit,opening,closing", "name,unit,opening,stock"),
            ("name,unit,opening,closing", "name,unit,opening,purchase"),
            ("name,unit,opening,closing", "name,unit,opening,sale"),
            ("name,unit,opening,closing", "name,unit,opening,discard"),
            ("name,unit,opening,closing", "name,unit,opening,capacity"),
            ("body,t,4,2", "body,t,4,-2"),
            ("body,t,4,2", "body,t,-4,2"),
            ("body,t,4,2", "body,t,4 t,2"),
            ("body,t,4,2", "clay,t,4,2"),
            ("body,t,4,2", "body,t,4,2\nbody,t,5,"),
            ("body,t,4,2", "bodi,t,4,2"),
        ]
    ));
}

#[test]
fn more_faults_than_are_told_are_counted_over_all_parts() {
    let rows: String = (0..30).map(|row| format!("t{row},x\n")).collect();
    let parts = with(&WORKS, "activities.csv", "");
    let text = format!("name,cost\n{rows}");
    let parts = with(&parts, "activities.csv", &text);
    let faults = read(&parts).unwrap_err();
    assert_eq!(faults.reported.len(), 20);
    assert!(faults.more >= 10 && faults.reported.iter().all(|fault| fault.path.ends_with("activities.csv")));
    assert!(faults.reported.is_sorted_by_key(|fault| fault.place.as_ref().map(|place| place.line)));
}
