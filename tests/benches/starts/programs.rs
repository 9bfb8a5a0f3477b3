//! The programs that starts are measured on: four from Netlib and a product mix of our own.

use std::fs;

use millreeve::lp::{Column, Key, Program, Row, RowIndex, Sense, build, mps};

use crate::instances::netlib;
use crate::rng::Rng;

/// The programs, each with its name.
pub(crate) fn programs() -> Vec<(&'static str, Program)> {
    let mut programs: Vec<_> = ["perold", "25fv47", "greenbea", "80bau3b"].map(|name| (name, instance(name))).into();
    programs.push(("mix", mix(10_000, 300, 1)));
    programs
}

fn instance(name: &str) -> Program {
    let text = fs::read_to_string(netlib(name)).unwrap();
    build(&mps::read(&text).unwrap().model)
}

/// A product mix: each activity uses a handful of resources, earns about what they are worth, and most have a market.
pub(crate) fn mix(activities: usize, resources: usize, seed: u64) -> Program {
    let mut rng = Rng::new(seed);
    let rows = (0..resources).map(|at| Row {
        key: Key::new(&format!("resources.r{at:03}")),
        lower: f64::NEG_INFINITY,
        upper: rng.between(100.0, 2_000.0).round(),
    });
    let rows: Vec<Row> = rows.collect();
    let columns = (0..activities).map(|at| {
        let mut used: Vec<usize> = (0..6).map(|_| rng.below(resources)).collect();
        used.sort_unstable();
        used.dedup();
        let entries: Vec<_> =
            used.into_iter().map(|row| (RowIndex(row), (rng.between(0.02, 2.0) * 1e3).round() / 1e3)).collect();
        let takes: f64 = entries.iter().map(|entry| entry.1).sum();
        Column {
            key: Key::new(&format!("activities.a{at:05}")),
            lower: 0.0,
            upper: if rng.below(4) == 0 { f64::INFINITY } else { rng.between(5.0, 200.0).round() },
            aim: (takes * rng.between(2.0, 12.0) * 1e2).round() / 1e2,
            entries,
        }
    });
    Program { sense: Sense::Maximise, offset: 0.0, columns: columns.collect(), rows }
}
