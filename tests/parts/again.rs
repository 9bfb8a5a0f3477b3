//! Edited parts read by what was edited in them: always what reading them whole makes of them.

use std::path::Path;

use millreeve::model::Model;
use millreeve::model::read::{Traced, Writing};
use proptest::prelude::*;

use super::{Part, WORKS, borrowed, writing};

type Owned = Vec<(String, String)>;

fn path() -> &'static Path {
    Path::new("works.model")
}

fn owned(parts: &[Part<'_>]) -> Owned {
    parts.iter().map(|&(name, text)| (name.to_owned(), text.to_owned())).collect()
}

/// The tileworks with materials and two weeks, so that every kind of part is there.
fn works() -> Owned {
    let mut parts = owned(&WORKS);
    let head = parts.iter_mut().find(|(name, _)| name == "works.toml").unwrap();
    head.1 = head.1.replace("currency", "periods = [\"w1\", \"w2\"]\ndays = [5, 4]\ncurrency");
    // Others, so that an edit concerns little of it.
    let others: String = (0..20).map(|number| format!("[activities.trim_{number}]\nprice = {number}\n")).collect();
    parts.push(("trims.toml".to_owned(), others));
    parts.push(("materials.csv".to_owned(), "name,unit,opening\nslip,t,20\nclay,t,\n".to_owned()));
    parts.push(("stores.toml".to_owned(), "[materials.slip]\npurchase = { price = 30 }\n[materials.clay]\npurchase = { price = 12 }\nstock = { cost = 0.1 }\n".to_owned()));
    parts.push((
        "draws.csv".to_owned(),
        "activity,material,rate,rate@w2\nfloor_tile,slip,0.02,0.03\nwall_tile,clay,0.01,\n".to_owned(),
    ));
    parts.push(("makes.csv".to_owned(), "activity,material,rate\nwall_tile,slip,0.001\n".to_owned()));
    parts
}

fn whole(parts: &Owned) -> Option<(Model, Traced)> {
    writing(&borrowed(parts)).read_tracing(path()).ok()
}

/// What reading makes of `new` by what differs from `old`.
fn in_part(old: &Owned, new: &Owned) -> Option<(Model, Traced)> {
    let before = writing(&borrowed(old));
    let (model, traced) = before.read_tracing(path()).unwrap();
    writing(&borrowed(new)).read_again(path(), (before.bytes(), &traced, &model))
}

/// The parts with something in one of them replaced.
fn edited(parts: &Owned, name: &str, from: &str, to: &str) -> Owned {
    let mut parts = parts.clone();
    let part = &mut parts.iter_mut().find(|(other, _)| other == name).unwrap().1;
    assert!(part.contains(from), "{name} has no {from:?}");
    *part = part.replacen(from, to, 1);
    parts
}

#[test]
fn edits_of_entries_that_are_there_are_read_alone() {
    let works = works();
    for (name, from, to) in [
        ("sales.toml", "price = 21.0", "price = 2.5"),
        ("sales.toml", "price = 21.0", "price = [21, 22] # agreed"),
        ("sales.toml", "at_least = 500\n", ""),
        ("works.toml", "price = 34.0", "price = 35.0"),
        ("works.toml", "at_most = 0.4", "at_most = { each = 0.4, w2 = 0.5 }"),
        ("activities.csv", "m2,6.5", "m2,6.25"),
        ("activities.csv", "\"Floor tile, 30x30\"", "\"Floor \"\"tile\"\",\r\n30x30\""),
        // It is begun in another part too.
        ("activities.csv", "wall_tile,,m2,5.25\n", ""),
        ("resources.csv", "h,168,1.2,60", "h,170,,50"),
        ("materials.csv", "t,20", "t,25"),
        ("stores.toml", "cost = 0.1", "cost = 0.2"),
        ("uses.csv", "floor_tile,press,0.012", "floor_tile,press,0.013"),
        ("uses.csv", "floor_tile,press,0.012\n", ""),
        ("uses.csv", "floor_tile,press,0.012\n", "floor_tile,press,0.012\nfloor_tile,dryer,1\n\n"),
        ("uses.csv", "floor_tile,press,0.012\n", "\nwall_tile,dryer,0.5\n"),
        ("draws.csv", "0.02,0.03", "0.02,"),
        ("draws.csv", "0.01,", "0.01,0.02"),
        ("makes.csv", "0.001", "0.002"),
    ] {
        let new = edited(&works, name, from, to);
        assert!(whole(&new).is_some(), "{name} {to}");
        assert_eq!(in_part(&works, &new), whole(&new), "{name} {to}");
    }
    // Two parts at once, as a checkout edits them.
    let new = edited(&edited(&works, "sales.toml", "price = 17.5", "price = 18"), "uses.csv", "0.016", "0.017");
    assert_eq!(in_part(&works, &new), whole(&new));
    assert!(in_part(&works, &new).is_some());
}

#[test]
fn entries_put_in_and_taken_out_are_read_alone() {
    let works = works();
    for (name, from, to) in [
        ("activities.csv", "m2,5.25\n", "m2,5.25\ntrim,,m,1\n"),
        ("activities.csv", "wall_tile", "walltile"),
        ("sales.toml", "[activities.wall_tile]", "[activities.trim]\n[activities.wall_tile]"),
        ("sales.toml", "[activities.wall_tile]", "[activities.trim_3]\nunit = \"m\"\n[activities.wall_tile]"),
        ("sales.toml", "tags = [\"glazed\"]", "tags = []"),
        ("trims.toml", "[activities.trim_7]\nprice = 7\n", ""),
        ("trims.toml", "[activities.trim_7]", "[activities.edge]"),
        ("resources.csv", "dryer,m2", "saw,h,10,,\ndryer,m2"),
        ("resources.csv", "dryer,m2,inf,,\n", ""),
        ("stores.toml", "[materials.clay]", "[materials.glaze]\npurchase = { price = [3, 4] }\n[materials.clay]"),
        (
            "works.toml",
            "[limits.glazed_share]",
            "[limits.least]\nterms = { floor_tile = 1 }\nat_least = 1\n[limits.glazed_share]",
        ),
    ] {
        let new = edited(&works, name, from, to);
        assert!(in_part(&works, &new).is_some(), "{name} {to}");
        assert_eq!(in_part(&works, &new), whole(&new), "{name} {to}");
        assert_eq!(in_part(&new, &works), whole(&works), "{name} {to}");
    }
    // What a new activity needs, in the parts of two teams.
    let new = edited(&works, "activities.csv", "m2,5.25\n", "m2,5.25\nstep,,m,1\n");
    let new = edited(&new, "uses.csv", "terrace_slab,kiln", "step,kiln,0.01\nterrace_slab,kiln");
    assert!(in_part(&works, &new).is_some());
    assert_eq!(in_part(&works, &new), whole(&new));
}

#[test]
fn what_concerns_other_entries_or_is_faulty_is_left_to_reading_the_whole() {
    let works = works();
    for (name, from, to) in [
        ("works.toml", "title", "aim"),
        ("works.toml", "days = [5, 4]", "days = [5, 5]"),
        ("sales.toml", "format = 1\n", ""),
        ("sales.toml", "[activities.wall_tile]", "[activities.floor_tile]\n[activities.wall_tile]"),
        ("sales.toml", "[activities.wall_tile]", "[limits.new]\n[activities.wall_tile]"),
        ("sales.toml", "[activities.wall_tile]", "limits = {}\n[activities.wall_tile]"),
        ("sales.toml", "price = 17.5", "price = 17.5\nunit = \"m2\""),
        ("sales.toml", "price = 17.5", "price = -"),
        ("sales.toml", "price = 17.5", "price = 17.5\nuses = { kiln = 1 }"),
        ("activities.csv", "name,label,unit,cost", "name,label,unit,price"),
        ("activities.csv", "name,label", "name,unit"),
        ("activities.csv", "wall_tile,", "wall_tile,\""),
        ("uses.csv", "wall_tile,kiln", "wall_tile,kilm"),
        ("uses.csv", "wall_tile,kiln,0.016", "floor_tile,kiln,0.016"),
        ("uses.csv", "wall_tile,kiln,0.016", "wall_tile,kiln,0.016\nwall_tile,kiln,0.016"),
        ("uses.csv", "wall_tile,kiln,0.016", "wall_tile,kiln"),
        ("draws.csv", "rate@w2", "rate@w3"),
        ("uses.csv", "terrace_slab,kiln", "step,kiln,0.01\nterrace_slab,kiln"),
        ("resources.csv", "press,h,120,,\n", ""),
        ("stores.toml", "purchase = { price = 12 }", "purchase = { price = 12 }\n[materials.slip]\n"),
    ] {
        let new = edited(&works, name, from, to);
        assert_eq!(in_part(&works, &new), None, "{name} {to}");
    }
    let mut renamed = works.clone();
    renamed[0].0 = "zz.toml".to_owned();
    assert_eq!(in_part(&works, &renamed), None);
    let mut fewer = works.clone();
    fewer.retain(|(name, _)| name != "makes.csv");
    assert_eq!(in_part(&works, &fewer), None);
    // Where an entry lies elsewhere than in a table of its own, nothing tells where the rest of it is.
    let inline = edited(
        &works,
        "sales.toml",
        "[activities.floor_tile]",
        "activities.trim = { price = 1 }\n[activities.floor_tile]",
    );
    assert!(whole(&inline).is_some());
    assert_eq!(in_part(&inline, &edited(&inline, "uses.csv", "0.016", "0.017")), None);
}

#[test]
fn a_model_turned_from_a_file_into_parts_is_read_whole() {
    let file = Writing::of(super::WHOLE.as_bytes().to_vec());
    let (model, traced) = file.read_tracing(path()).unwrap();
    assert_eq!(writing(&WORKS).read_again(path(), (file.bytes(), &traced, &model)), None);
}

/// One edit of a part, whatever comes of it.
#[derive(Clone, Debug)]
enum Slip {
    /// Another number in place of the last on a line.
    Number(usize, u32),
    /// A sign put in somewhere.
    Sign(usize, char),
    /// A line taken out.
    Gone(usize),
    /// A line put in again after another.
    Copied(usize, usize),
    /// A table or row put in at a line that begins one.
    Added(usize, &'static str),
}

impl Slip {
    fn made(&self, text: &str) -> String {
        let mut lines: Vec<String> = text.split_inclusive('\n').map(str::to_owned).collect();
        let count = lines.len().max(1);
        match *self {
            Self::Number(at, number) => {
                let Some(line) = lines.get_mut(at % count) else { return text.to_owned() };
                let kept = line.trim_end().trim_end_matches(|sign: char| sign.is_ascii_digit() || sign == '.');
                *line = format!("{kept}{}\n", f64::from(number) / 8.0);
            }
            Self::Sign(at, sign) => {
                let mut text = text.to_owned();
                text.insert(text.floor_char_boundary(at % (text.len() + 1)), sign);
                return text;
            }
            Self::Gone(at) => {
                lines.splice(at % count..(at % count + 1).min(lines.len()), []);
            }
            Self::Copied(from, to) => {
                let line = lines.get(from % count).cloned().unwrap_or_default();
                lines.insert(to % (lines.len() + 1), line);
            }
            Self::Added(at, text) => {
                // In a table of rows, any line; among tables, a header.
                let tables = lines.iter().any(|line| line.starts_with('['));
                let starts: Vec<usize> =
                    (0..lines.len()).filter(|&at| !tables || lines[at].starts_with('[')).chain([lines.len()]).collect();
                lines.insert(starts[at % starts.len()], text.to_owned());
            }
        }
        lines.concat()
    }
}

fn slip() -> impl Strategy<Value = Slip> {
    let sign = prop::sample::select(vec!['[', '"', '=', '#', '\n', '\r', ',', '.', '0', 'a', ' ']);
    prop_oneof![
        4 => (any::<usize>(), 0..2000u32).prop_map(|(at, number)| Slip::Number(at, number)),
        2 => (any::<usize>(), sign).prop_map(|(at, sign)| Slip::Sign(at, sign)),
        1 => any::<usize>().prop_map(Slip::Gone),
        1 => any::<(usize, usize)>().prop_map(|(a, b)| Slip::Copied(a, b)),
        4 => (any::<usize>(), prop::sample::select(ADDED.to_vec())).prop_map(|(at, text)| Slip::Added(at, text)),
    ]
}

/// Tables and rows that may be put in, each for the part that has such.
const ADDED: [&str; 12] = [
    "[activities.step]\nprice = 9\nuses = { kiln = 0.01 }\n",
    "[activities.step]\ntags = [\"stepped\"]\n",
    "[activities.trim_30]\n",
    "[materials.glaze]\npurchase = { price = 3 }\n",
    "[limits.stepped]\nterms = { \"tag:glazed\" = 1, floor_tile = 1 }\nat_most = 9000\n",
    "[limits.glaze]\nterms = { \"materials.glaze.purchase\" = 1 }\nat_most = 9\n",
    "step,Step,m,1\n",
    "edge,,m,1.5\n",
    "saw,h,10,,\n",
    "glaze,t,5\n",
    "edge,kiln,0.01\n",
    "edge,slip,0.01\n",
];

proptest! {
    #![proptest_config(ProptestConfig::with_cases(2000))]

    #[test]
    fn in_part_or_as_a_whole_parts_say_the_same(slips in proptest::collection::vec((any::<usize>(), slip()), 1..8)) {
        let mut old = works();
        let (mut model, mut traced) = whole(&old).unwrap();
        for (at, slip) in slips {
            let mut new = old.clone();
            let at = at % new.len();
            new[at].1 = slip.made(&new[at].1);
            let before = writing(&borrowed(&old));
            let part = writing(&borrowed(&new)).read_again(path(), (before.bytes(), &traced, &model));
            let whole = whole(&new);
            if part.is_some() {
                prop_assert_eq!(&part, &whole, "{:?}", new);
            }
            // The next edit starts from what was read in part, as that of a running daemon does.
            if let Some(read) = part.or(whole) {
                old = new;
                (model, traced) = read;
            }
        }
    }
}
