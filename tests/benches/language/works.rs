//! A tileworks of any size over any number of weeks, in the parts of three teams, and the edits and weeks that come.

use std::fmt::Write as _;

/// Machines, in rows of four that a tile passes through.
const MACHINES: usize = 40;
/// Bodies that tiles are made of.
const BODIES: usize = 4;

/// A tileworks: over several weeks it carries stocks of goods that two tiles each make, runs overtime, and buys the bodies.
#[derive(Clone, Debug)]
pub(crate) struct Works {
    pub(crate) tiles: usize,
    pub(crate) weeks: usize,
    /// The first week, counted from when the works began: what a week brings depends on it alone.
    pub(crate) first: usize,
    /// What there is of each good before the first week.
    pub(crate) opening: Vec<f64>,
    /// Added to the price of the tile or good of this number.
    pub(crate) raised: (usize, f64),
}

impl Works {
    pub(crate) fn new(tiles: usize, weeks: usize) -> Self {
        Self { tiles, weeks, first: 1, opening: vec![20.0; tiles / 2], raised: (0, 0.0) }
    }

    /// What each week is called. From `w9` to `w10` the order of weeks is not that of their names.
    pub(crate) fn labels(&self) -> Vec<String> {
        self.calendar().map(|week| format!("w{week}")).collect()
    }

    fn calendar(&self) -> std::ops::Range<usize> {
        self.first..self.first + self.weeks
    }

    /// The parts by name.
    pub(crate) fn parts(&self) -> Vec<(&'static str, String)> {
        let mut head = "format = 1\ntitle = \"Tileworks\"\ncurrency = \"EUR\"\n".to_owned();
        if self.weeks > 1 {
            let _ = writeln!(head, "periods = {:?}", self.labels());
        }
        let mut parts = vec![
            ("activities.csv", self.costs()),
            ("sales.toml", self.sales()),
            ("uses.csv", self.uses()),
            ("works.toml", head + &self.machines()),
        ];
        if self.weeks > 1 {
            parts.extend([("draws.csv", self.draws()), ("makes.csv", self.makes())]);
        }
        parts
    }

    fn costs(&self) -> String {
        let mut out = "name,label,unit,cost\n".to_owned();
        for tile in 0..self.tiles {
            let _ = writeln!(out, "tile_{tile},\"Tile no. {tile}\",m2,{}", spread(tile, 11, 2.0, 6.0));
        }
        out
    }

    fn uses(&self) -> String {
        let mut out = "activity,resource,rate\n".to_owned();
        for tile in 0..self.tiles {
            for step in 0..4 {
                let machine = (tile + 9 * step) % MACHINES;
                let _ = writeln!(out, "tile_{tile},machine_{machine},{}", spread(tile, 5 + step, 0.02, 0.09));
            }
        }
        out
    }

    fn draws(&self) -> String {
        let mut out = "activity,material,rate\n".to_owned();
        for tile in 0..self.tiles {
            let _ = writeln!(out, "tile_{tile},body_{},{}", tile % BODIES, spread(tile, 3, 0.01, 0.03));
        }
        out
    }

    fn makes(&self) -> String {
        let mut out = "activity,material,rate\n".to_owned();
        for tile in 0..self.tiles {
            let _ = writeln!(out, "tile_{tile},good_{},1", tile / 2);
        }
        out
    }

    fn machines(&self) -> String {
        let mut out = String::new();
        for machine in 0..MACHINES {
            let hours = |week: usize| spread(machine + 7 * week, 13, 0.7, 1.0) * self.hours();
            let _ = writeln!(out, "\n[resources.machine_{machine}]\nunit = \"h\"\ncapacity = {}", self.listed(hours));
            if self.weeks > 1 {
                let _ = writeln!(out, "surge = {{ at_most = 12, cost = {} }}", spread(machine, 3, 40.0, 90.0));
            }
        }
        if self.weeks > 1 {
            for body in 0..BODIES {
                let price = |week: usize| spread(body + week, 17, 30.0, 40.0);
                let _ = writeln!(out, "\n[materials.body_{body}]\nunit = \"t\"\nopening = 30");
                let _ = writeln!(out, "purchase = {{ price = {}, at_most = 90 }}", self.listed(price));
                out.push_str("stock = { cost = 0.4, at_least = 2, at_most = 60 }\n");
            }
        }
        out
    }

    /// Hours of a machine in a week, so that most of them bind now and then.
    fn hours(&self) -> f64 {
        0.055 * 4.0 * if self.weeks == 1 { 35.0 } else { 55.0 } * self.tiles as f64 / MACHINES as f64
    }

    fn sales(&self) -> String {
        let mut out = String::new();
        if self.weeks == 1 {
            for tile in 0..self.tiles {
                let _ = writeln!(out, "[activities.tile_{tile}]\nprice = {}", self.price(tile));
                let _ = writeln!(out, "at_most = {}\n", spread(tile, 19, 20.0, 90.0));
            }
            return out;
        }
        for (good, opening) in self.opening.iter().enumerate() {
            let sold = |week: usize| spread(good + 5 * week, 23, 20.0, 140.0).round();
            let _ = writeln!(out, "[materials.good_{good}]\nunit = \"m2\"\nopening = {opening}");
            let _ = writeln!(out, "sale = {{ price = {}, at_most = {} }}", self.price(good), self.listed(sold));
            let _ =
                writeln!(out, "stock = {{ cost = 0.05, at_most = 400 }}\nclosing = {{ worth = {} }}\n", 4 + good % 3);
        }
        out
    }

    fn price(&self, at: usize) -> f64 {
        let (raised, by) = self.raised;
        let price = spread(at, 29, 12.0, 30.0) + if raised == at { by } else { 0.0 };
        (price * 100.0).round() / 100.0
    }

    fn listed(&self, of: impl Fn(usize) -> f64) -> String {
        let numbers: Vec<String> =
            self.calendar().map(|week| format!("{}", (of(week) * 100.0).round() / 100.0)).collect();
        if self.weeks == 1 { numbers.concat() } else { format!("[{}]", numbers.join(", ")) }
    }
}

/// A number between two others that looks drawn and depends on `at` alone, to three digits.
fn spread(at: usize, salt: usize, least: f64, most: f64) -> f64 {
    let mixed = (at + 1).wrapping_mul(2_654_435_761).wrapping_add(salt.wrapping_mul(40_503)) ^ (at << 7);
    let share = ((mixed >> 5) % 10_007) as f64 / 10_007.0;
    ((least + share * (most - least)) * 1e3).round() / 1e3
}
