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
