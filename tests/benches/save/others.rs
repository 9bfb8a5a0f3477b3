//! What a replan is measured against: the least that anything must do between two files, and a script that starts afresh each time.

use std::collections::BTreeMap;
use std::fmt::Write as _;
use std::fs;
use std::num::NonZeroU32;
use std::path::Path;
use std::time::{Duration, Instant};

use highs::{ColProblem, HighsModelStatus, Sense};
use millreeve::model::read;
use millreeve::plan::text::is_ours;
use millreeve::store::{Durability, atomic};
use serde::Deserialize;
use toml::de::DeTable;

/// Reads and parses the model, and writes plan and note whole and synced: the bytes are those that a replan reads and writes.
pub(crate) fn floor(model: &Path, outputs: [(&Path, &str); 2]) -> Duration {
    let begun = Instant::now();
    let bytes = read::file(model).unwrap();
    let document = DeTable::parse(std::str::from_utf8(&bytes).unwrap()).unwrap();
    assert!(!document.get_ref().is_empty());
    drop(document);
    for (path, text) in outputs {
        atomic::write(path, text.as_bytes(), is_ours, Durability::Synced).unwrap();
    }
    begun.elapsed()
}

#[derive(Deserialize)]
struct Model {
    resources: BTreeMap<String, Resource>,
    activities: BTreeMap<String, Activity>,
}

#[derive(Deserialize)]
struct Resource {
    capacity: f64,
}

#[derive(Deserialize)]
struct Activity {
    price: f64,
    cost: f64,
    uses: BTreeMap<String, f64>,
    at_most: Option<f64>,
}

/// Reads, parses, solves from nothing with the solver as it comes, and writes the levels: neither checked, ranged nor synced. Answers
/// how long that took and the aim.
pub(crate) fn script(model: &Path, plan: &Path) -> (Duration, f64) {
    let begun = Instant::now();
    let model: Model = toml::from_str(&fs::read_to_string(model).unwrap()).unwrap();
    let mut problem = ColProblem::default();
    let rows: BTreeMap<&str, _> =
        model.resources.iter().map(|(name, resource)| (name.as_str(), problem.add_row(..=resource.capacity))).collect();
    for activity in model.activities.values() {
        let factors = activity.uses.iter().map(|(name, &rate)| (rows[name.as_str()], rate));
        let most = activity.at_most.unwrap_or(f64::INFINITY);
        problem.add_column(activity.price - activity.cost, 0.0..=most, factors);
    }
    let mut solver = problem.optimise(Sense::Maximise);
    solver.make_quiet();
    solver.set_threads(NonZeroU32::MIN);
    let solved = solver.solve();
    assert_eq!(solved.status(), HighsModelStatus::Optimal);
    let solution = solved.get_solution();
    let mut text = String::new();
    for (name, level) in model.activities.keys().zip(solution.columns()) {
        let _ = writeln!(text, "{name} = {level}");
    }
    fs::write(plan, text).unwrap();
    (begun.elapsed(), solved.objective_value())
}
