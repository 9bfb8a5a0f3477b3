//! Models in parts: what the parts of a folder become together, what is said of their faults, and how they are kept.

#![expect(clippy::unwrap_used, reason = "helpers of tests stop at what they did not expect")]

#[path = "parts/again.rs"]
mod again;
#[path = "parts/faults.rs"]
mod faults;
#[path = "parts/good.rs"]
mod good;

use std::path::Path;

use millreeve::model::Faults;
use millreeve::model::read::{Reading, Writing};

/// A part: its name and its text.
type Part<'a> = (&'a str, &'a str);

/// A tileworks of three teams: what is common, what the production planners keep in spreadsheets, and what sales writes.
const WORKS: [Part<'static>; 5] = [
    (
        "works.toml",
        "format = 1\ntitle = \"Tileworks\"\ncurrency = \"EUR\"\n\n[activities.terrace_slab]\nprospect = true\nprice = 34.0\n\n\
         [limits.glazed_share]\nterms = { wall_tile = 1.0 }\nper = { wall_tile = 1.0, floor_tile = 1.0 }\nat_most = 0.4\n",
    ),
    ("resources.csv", "name,unit,capacity,cost,at_least\nkiln,h,168,1.2,60\npress,h,120,,\ndryer,m2,inf,,\n"),
    ("activities.csv", "name,label,unit,cost\nfloor_tile,\"Floor tile, 30x30\",m2,6.5\nwall_tile,,m2,5.25\n"),
    (
        "uses.csv",
        "activity,resource,rate\nfloor_tile,kiln,0.020\nfloor_tile,press,0.012\nwall_tile,kiln,0.016\nwall_tile,press,0.010\n\
         terrace_slab,kiln,0.045\n",
    ),
    (
        "sales.toml",
        "format = 1\n[activities.floor_tile]\nprice = 21.0\nat_least = 500\nat_most = 6000\n\n[activities.wall_tile]\nprice = 17.5\n\
         at_most = 5000\ntags = [\"glazed\"]\n",
    ),
];

/// The same tileworks in one file.
const WHOLE: &str = "
format = 1
title = \"Tileworks\"
currency = \"EUR\"
[resources]
kiln = { unit = \"h\", capacity = 168, cost = 1.2, at_least = 60 }
press = { unit = \"h\", capacity = 120 }
dryer = { unit = \"m2\" }
[activities.floor_tile]
label = \"Floor tile, 30x30\"
unit = \"m2\"
price = 21.0
cost = 6.5
uses = { kiln = 0.020, press = 0.012 }
at_least = 500
at_most = 6000
[activities.wall_tile]
unit = \"m2\"
price = 17.5
cost = 5.25
uses = { kiln = 0.016, press = 0.010 }
at_most = 5000
tags = [\"glazed\"]
[activities.terrace_slab]
prospect = true
price = 34.0
uses = { kiln = 0.045 }
[limits.glazed_share]
terms = { wall_tile = 1.0 }
per = { wall_tile = 1.0, floor_tile = 1.0 }
at_most = 0.4
";

fn writing(parts: &[Part<'_>]) -> Writing {
    Writing::in_parts(&parts.iter().map(|&(name, text)| (name, text.as_bytes())).collect::<Vec<_>>())
}

fn read(parts: &[Part<'_>]) -> Result<Reading, Faults> {
    writing(parts).read(Path::new("works.model"))
}

/// The reading of parts in which nothing is wrong.
#[expect(clippy::panic, reason = "a test's helper")]
fn good(parts: &[Part<'_>]) -> Reading {
    read(parts).unwrap_or_else(|faults| panic!("{}", faults.terminal(false)))
}

/// The parts with one of them changed, or put beside the others.
fn with<'a>(parts: &[Part<'a>], name: &'a str, text: &'a str) -> Vec<Part<'a>> {
    let others = parts.iter().filter(|(other, _)| *other != name);
    others.copied().chain([(name, text)]).collect()
}

/// The parts with something in one of them replaced.
fn edited(name: &str, from: &str, to: &str) -> Vec<(String, String)> {
    let mut parts: Vec<_> = WORKS.iter().map(|&(name, text)| (name.to_owned(), text.to_owned())).collect();
    let part = parts.iter_mut().find(|(other, _)| other == name).unwrap();
    assert!(part.1.contains(from), "{name} has no {from:?}");
    part.1 = part.1.replacen(from, to, 1);
    parts
}

fn borrowed(parts: &[(String, String)]) -> Vec<Part<'_>> {
    parts.iter().map(|(name, text)| (name.as_str(), text.as_str())).collect()
}
