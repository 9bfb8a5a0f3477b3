//! Names that can hardly be told apart.

use std::collections::HashMap;

use super::{Oddity, entry};
use crate::model::letters;
use crate::model::name::Name;
use crate::model::types::Model;

/// Pairs of names in one section that look the same, or are the same but for capitals, `-` for `_`, 0 for o, or 1 for l.
pub(super) fn find(model: &Model) -> Vec<Oddity> {
    let mut found = Vec::new();
    pairs("resources", model.resources.keys(), &mut found);
    pairs("activities", model.activities.keys(), &mut found);
    pairs("materials", model.materials.keys(), &mut found);
    pairs("limits", model.limits.keys(), &mut found);
    found
}

fn pairs<'a>(section: &str, names: impl Iterator<Item = &'a Name>, found: &mut Vec<Oddity>) {
    let mut seen: HashMap<String, &Name> = HashMap::new();
    for name in names {
        let first = *seen.entry(folded(name.as_str())).or_insert(name);
        if first != name {
            let message = format!("`{name}` looks like `{first}`, but is another name");
            let help = format!("{}; rename one of the two", letters::difference(name.as_str(), first.as_str()));
            found.push(Oddity::new(&entry(section, name), "look-alike", message, help));
        }
    }
}

/// A name as a hasty eye reads it.
fn folded(name: &str) -> String {
    let plain = letters::skeleton(name).to_lowercase();
    plain.replace('-', "_").replace('0', "o").replace('1', "l")
}
