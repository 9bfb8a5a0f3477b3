//! A tileworks of any size as the text of a model, and the edits that its planners make.

use std::fmt::Write as _;

use crate::rng::Rng;

/// Things of which there is a limited amount; the number that follows makes the name.
const MACHINES: [&str; 6] = ["kiln", "press", "dryer", "glaze_line", "mixer", "packing"];
/// What is made.
const TILES: [&str; 8] = ["floor", "wall", "roof", "trim", "mosaic", "step", "border", "slab"];
/// How many different machines a tile passes through at most.
const STEPS: usize = 6;

/// A tileworks: each tile takes some hours of a handful of machines, earns about what they are worth, and most have a market.
pub(crate) struct Works {
    edition: usize,
    capacities: Vec<f64>,
    tiles: Vec<Tile>,
}

struct Tile {
    name: String,
    price: f64,
    cost: f64,
    uses: Vec<(usize, f64)>,
    at_most: Option<f64>,
}

impl Works {
    pub(crate) fn new(tiles: usize, machines: usize, rng: &mut Rng) -> Self {
        let capacities = (0..machines).map(|_| rng.between(100.0, 2_000.0).round()).collect();
        Self { edition: 1, capacities, tiles: (0..tiles).map(|at| Tile::new(at, machines, rng)).collect() }
    }

    /// The model as a planner's editor would save it.
    pub(crate) fn text(&self) -> String {
        let mut out = format!("format   = 1\ntitle    = \"Tileworks, edition {}\"\ncurrency = \"EUR\"\n", self.edition);
        for (at, capacity) in self.capacities.iter().enumerate() {
            let _ = write!(out, "\n[resources.{}]\nunit     = \"h\"\ncapacity = {capacity}\n", machine(at));
        }
        for (at, tile) in self.tiles.iter().enumerate() {
            let _ = write!(out, "\n[activities.{}]\nlabel   = \"Tile no. {at}\"\nunit    = \"m2\"\n", tile.name);
            let _ = write!(out, "price   = {}\ncost    = {}\nuses    = {{ ", tile.price, tile.cost);
            for (place, (used, rate)) in tile.uses.iter().enumerate() {
                let comma = if place == 0 { "" } else { ", " };
                let _ = write!(out, "{comma}{} = {rate}", machine(*used));
            }
            out.push_str(" }\n");
            if let Some(at_most) = tile.at_most {
                let _ = writeln!(out, "at_most = {at_most}");
            }
        }
        out
    }

    /// Moves the capacity of one machine by up to a tenth.
    pub(crate) fn edit(&mut self, machine: usize, rng: &mut Rng) {
        let capacity = &mut self.capacities[machine];
        *capacity = round(*capacity * rng.between(0.9, 1.1), 1e3);
    }

    /// Gives the model another title, which stands outside its tables.
    pub(crate) fn retitle(&mut self) {
        self.edition += 1;
    }
}

impl Tile {
    fn new(at: usize, machines: usize, rng: &mut Rng) -> Self {
        let mut used: Vec<usize> = (0..STEPS).map(|_| rng.below(machines)).collect();
        used.sort_unstable();
        used.dedup();
        let uses: Vec<_> = used.into_iter().map(|machine| (machine, round(rng.between(0.02, 2.0), 1e3))).collect();
        let takes: f64 = uses.iter().map(|(_, rate)| rate).sum();
        let cost = round(takes * rng.between(0.5, 2.0), 1e2);
        Self {
            name: format!("{}_{at:05}", rng.pick(&TILES)),
            price: round(cost + takes * rng.between(2.0, 12.0), 1e2),
            cost,
            uses,
            at_most: (rng.below(4) > 0).then(|| rng.between(5.0, 200.0).round()),
        }
    }
}

/// The name of a machine, in byte order of its number.
pub(crate) fn machine(at: usize) -> String {
    format!("m{at:03}_{}", MACHINES[at % MACHINES.len()])
}

fn round(number: f64, unit: f64) -> f64 {
    (number * unit).round() / unit
}
