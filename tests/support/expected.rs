//! Published answers: the files of `tests/published/`.

use std::collections::BTreeMap;
use std::fs;
use std::path::Path;

use millreeve::model::{Model, read};
use serde::Deserialize;

/// A worked example.
pub(crate) struct Example {
    pub(crate) id: String,
    pub(crate) model: Model,
    pub(crate) expected: Expected,
}

/// The answer that is published for it.
#[derive(Debug, Default, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub(crate) struct Expected {
    pub(crate) outcome: String,
    pub(crate) aim: Option<Number>,
    pub(crate) levels_unique: bool,
    pub(crate) worths_unique: bool,
    /// By activity: a level, or the least and the most of several.
    pub(crate) levels: BTreeMap<String, Told>,
    /// By row: its worth, or what one unit less takes away and one unit more adds.
    pub(crate) worths: BTreeMap<String, Told>,
    /// By activity: its reduced cost.
    pub(crate) gains: BTreeMap<String, Told>,
    pub(crate) aim_ranges: BTreeMap<String, Told>,
    pub(crate) bound_ranges: BTreeMap<String, Told>,
    pub(crate) conflicts: Vec<Vec<String>>,
}

/// A number as it is published: a decimal, or a fraction such as `"36000/7"`.
#[derive(Clone, Copy, Debug, Deserialize)]
#[serde(try_from = "Written")]
pub(crate) struct Number(f64);

#[derive(Deserialize)]
#[serde(untagged)]
enum Written {
    Decimal(f64),
    Fraction(String),
}

impl TryFrom<Written> for Number {
    type Error = String;

    fn try_from(written: Written) -> Result<Self, String> {
        match written {
            Written::Decimal(number) => Ok(Self(number)),
            Written::Fraction(text) => {
                let halves = text.split_once('/').and_then(|(above, below)| {
                    Some(above.parse::<f64>().ok()? / below.parse::<f64>().ok().filter(|&below| below > 0.0)?)
                });
                halves.map(Self).ok_or(format!("`{text}` is no fraction"))
            }
        }
    }
}

impl Number {
    pub(crate) fn value(self) -> f64 {
        self.0
    }
}

/// One number, or two ends.
#[derive(Clone, Copy, Debug, Deserialize)]
#[serde(untagged)]
pub(crate) enum Told {
    One(Number),
    Range(Number, Number),
}

impl Told {
    /// Both ends.
    pub(crate) fn sides(&self) -> (f64, f64) {
        match self {
            Self::One(number) => (number.0, number.0),
            Self::Range(first, second) => (first.0, second.0),
        }
    }

    /// Whether `found` is the number, or lies between the two.
    pub(crate) fn holds(&self, found: f64) -> bool {
        let (first, second) = self.sides();
        let slip = |end: f64| 1e-9 * if end.is_finite() { end.abs().max(1.0) } else { 1.0 };
        let (least, most) = (first.min(second), first.max(second));
        found >= least - slip(least) && found <= most + slip(most)
    }

    /// Whether `found` are the two ends.
    pub(crate) fn is(&self, found: (f64, f64)) -> bool {
        let (least, most) = self.sides();
        let same = |a: f64, b: f64| a.total_cmp(&b).is_eq() || (a - b).abs() <= 1e-9 * a.abs().max(1.0);
        same(found.0, least) && same(found.1, most)
    }

    /// For each end that is finite and apart from `now`: a number just inside it and one just outside.
    pub(crate) fn probes(&self, now: f64) -> Vec<(f64, f64)> {
        let (least, most) = self.sides();
        let apart = |end: &f64| end.is_finite() && (end - now).abs() > 1e-6;
        let probe = |end: f64| (end + (now - end) * 1e-3, end - (now - end) * 1e-3);
        [least, most].into_iter().filter(apart).map(probe).collect()
    }
}

/// All worked examples.
pub(crate) fn examples() -> impl Iterator<Item = Example> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests").join("published");
    let mut ids: Vec<String> = fs::read_dir(&folder)
        .unwrap()
        .filter_map(|entry| Some(entry.unwrap().file_name().to_str()?.strip_suffix(".model.toml")?.to_owned()))
        .collect();
    ids.sort();
    assert!(ids.len() >= 25, "examples are missing: {ids:?}");
    ids.into_iter().map(move |id| {
        let path = folder.join(format!("{id}.model.toml"));
        let model = match read::text(&path, &fs::read(&path).unwrap()) {
            Ok(reading) if reading.warnings.is_empty() => reading.model,
            Ok(reading) => panic!("{id}: {:?}", reading.warnings),
            Err(faults) => panic!("{}", faults.terminal(false)),
        };
        let text = fs::read_to_string(folder.join(format!("{id}.expected.toml"))).unwrap();
        let expected = toml::from_str(&text).unwrap_or_else(|error| panic!("{id}: {error}"));
        Example { id, model, expected }
    })
}
