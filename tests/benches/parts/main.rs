//! Reading a model in parts: whole, and again after one of its parts was edited.
//!
//! Quote the ratios within one run: reading again must cost at most a quarter of reading the whole.

#![expect(clippy::unwrap_used, reason = "a measurement that fails where it cannot be made")]

use std::fmt::Write as _;
use std::hint::black_box;
use std::path::Path;

use criterion::{Criterion, criterion_group, criterion_main};
use millreeve::model::read::Writing;
use millreeve::model::write;

/// Activities and periods.
const SIZES: [(usize, usize); 3] = [(200, 52), (2_000, 1), (20_000, 1)];
/// Resources in each.
const MACHINES: usize = 40;

/// A tileworks of three teams: what is common in TOML, recipes and costs in spreadsheets, and what sales writes in TOML.
fn works(activities: usize, periods: usize) -> Vec<(String, String)> {
    let weeks: Vec<String> = (1..=periods).map(|week| format!("2027-W{week:02}")).collect();
    let mut head = "format = 1\ntitle = \"Tileworks\"\ncurrency = \"EUR\"\n".to_owned();
    if periods > 1 {
        let _ = writeln!(head, "periods = {weeks:?}");
    }
    let mut resources = format!("name,unit,capacity{}\n", columns("capacity", periods, &weeks));
    for machine in 0..MACHINES {
        let _ = writeln!(resources, "machine_{machine},h,{}{}", 900 + machine, cells(168, periods));
    }
    let mut costs = "name,label,unit,cost,at_most\n".to_owned();
    let mut uses = "activity,resource,rate\n".to_owned();
    let mut sales = String::new();
    for tile in 0..activities {
        let _ = writeln!(costs, "tile_{tile},\"Tile no. {tile}\",m2,{}.5,{}", tile % 7, 50 + tile % 90);
        for step in 0..4 {
            let _ = writeln!(uses, "tile_{tile},machine_{},0.0{}", (tile + 9 * step) % MACHINES, 1 + (tile + step) % 9);
        }
        let price = 10 + tile % 30;
        let _ = match periods {
            1 => writeln!(sales, "[activities.tile_{tile}]\nprice = {price}.25\n"),
            _ => {
                let listed: Vec<String> = (0..periods).map(|week| format!("{}.5", price + week % 5)).collect();
                writeln!(sales, "[activities.tile_{tile}]\nprice = [{}]\n", listed.join(", "))
            }
        };
    }
    let part = |name: &str, text: String| (name.to_owned(), text);
    vec![
        part("activities.csv", costs),
        part("resources.csv", resources),
        part("sales.toml", sales),
        part("uses.csv", uses),
        part("works.toml", head),
    ]
}

fn columns(key: &str, periods: usize, weeks: &[String]) -> String {
    if periods == 1 { String::new() } else { weeks.iter().map(|week| format!(",{key}@{week}")).collect() }
}

fn cells(number: usize, periods: usize) -> String {
    if periods == 1 { String::new() } else { (0..periods).map(|week| format!(",{}", number - week % 3)).collect() }
}

fn writing(parts: &[(String, String)]) -> Writing {
    Writing::in_parts(&parts.iter().map(|(name, text)| (name.as_str(), text.as_bytes())).collect::<Vec<_>>())
}

/// The parts with one number in the middle of one of them edited.
fn edited(parts: &[(String, String)], name: &str, tile: usize) -> Writing {
    let mut parts = parts.to_vec();
    for (_, text) in parts.iter_mut().filter(|(other, _)| other == name) {
        let at = text.find(&format!("tile_{tile}")).unwrap_or_default();
        // Behind the decimal point of its first number.
        let digit = text[at..].find('.').filter(|_| name != "activities.csv");
        let digit = digit.or_else(|| text[at..].find(".5")).map(|found| at + found + 1);
        if let Some(digit) = digit {
            text.replace_range(digit..digit, "1");
        }
    }
    writing(&parts)
}

fn reading(criterion: &mut Criterion) {
    let path = Path::new("tiles.model");
    for (activities, periods) in SIZES {
        let mut group = criterion.benchmark_group(format!("{activities} x {periods}"));
        group.sample_size(20);
        let parts = works(activities, periods);
        let before = writing(&parts);
        group.bench_function("whole", |bencher| bencher.iter(|| black_box(&before).read_tracing(path).unwrap()));
        let (model, traced) = before.read_tracing(path).unwrap();
        let file = Writing::of(write::model(&model).into_bytes());
        group.bench_function("whole, in one file", |bencher| {
            bencher.iter(|| black_box(&file).read_tracing(path).unwrap())
        });
        for name in ["sales.toml", "activities.csv", "uses.csv"] {
            let after = edited(&parts, name, activities / 2);
            assert_ne!(after.bytes(), before.bytes(), "{name}");
            group.bench_function(format!("again after {name}"), |bencher| {
                bencher.iter(|| black_box(&after).read_again(path, (before.bytes(), &traced, &model)).unwrap());
            });
        }
        group.finish();
    }
}

criterion_group!(benches, reading);
criterion_main!(benches);
