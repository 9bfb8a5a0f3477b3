//! Coefficients that are too far apart to be reckoned with well.

use std::collections::BTreeMap;
use std::fmt::Display;

use super::Oddity;
use crate::model::types::Model;
use crate::model::value::Value;

/// How many times the smallest coefficient the largest may be.
const WIDEST: f64 = 1e8;

/// The smallest coefficient, where the largest is too far from it.
pub(super) fn find(model: &Model) -> Option<Oddity> {
    let mut range = Range::default();
    for (name, activity) in &model.activities {
        for (key, rates) in [("uses", &activity.uses), ("draws", &activity.draws), ("makes", &activity.makes)] {
            range.widen(["activities", name.as_str(), key], rates);
        }
    }
    for (name, limit) in &model.limits {
        range.widen(["limits", name.as_str(), "terms"], &limit.terms);
        if let Some(per) = &limit.per {
            range.widen(["limits", name.as_str(), "per"], per);
        }
    }
    range.oddity()
}

/// The smallest and the largest coefficient so far.
#[derive(Default)]
struct Range<'m>(Option<[Coefficient<'m>; 2]>);

#[derive(Clone, Copy)]
struct Coefficient<'m> {
    size: f64,
    place: [&'m str; 3],
    key: &'m dyn Display,
}

impl<'m> Range<'m> {
    fn widen<K: Display>(&mut self, place: [&'m str; 3], rates: &'m BTreeMap<K, Value>) {
        for (key, rate) in rates {
            for size in rate.numbers().iter().map(|number| number.abs()).filter(|&size| size > 0.0) {
                let here = Coefficient { size, place, key };
                let [smallest, largest] = self.0.get_or_insert([here, here]);
                if size < smallest.size {
                    *smallest = here;
                }
                if size > largest.size {
                    *largest = here;
                }
            }
        }
    }

    fn oddity(self) -> Option<Oddity> {
        let [smallest, largest] = self.0.filter(|[smallest, largest]| largest.size > WIDEST * smallest.size)?;
        let message = format!(
            "{} is more than 1e8 times smaller than the {} of `{}` in {}",
            shown(smallest.size),
            shown(largest.size),
            largest.key,
            largest.place.join(".")
        );
        let help = "choose units that bring the numbers closer together: so far apart they cost the plan its accuracy";
        let key = smallest.key.to_string();
        let [section, name, rates] = smallest.place;
        Some(Oddity::new(&[section, name, rates, &key], "spread", message, help))
    }
}

fn shown(size: f64) -> String {
    if (1e-4..1e7).contains(&size) { size.to_string() } else { format!("{size:e}") }
}
