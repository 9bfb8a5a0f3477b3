//! Names near to a misspelt one, and names that look like another.

use std::collections::BTreeMap;

use crate::model::name::{self, Name};

/// What to say about a name that is not there: the nearest that is, else what `otherwise` says.
pub(super) fn help<'a>(
    wrong: &str,
    names: impl Iterator<Item = &'a str>,
    otherwise: impl FnOnce() -> String,
) -> String {
    match nearest(wrong, names) {
        Some(name) if skeleton(name) == skeleton(wrong) => {
            format!("did you mean `{name}`? It only looks the same: {}", oddity(wrong, name))
        }
        Some(name) => format!("did you mean `{name}`?"),
        None => otherwise(),
    }
}

/// The name fewest edits away from `wrong`, if that is near enough to be a slip.
fn nearest<'a>(wrong: &str, names: impl Iterator<Item = &'a str>) -> Option<&'a str> {
    let length = wrong.chars().count();
    if length > name::LONGEST {
        return None;
    }
    let far = (length / 4).max(1);
    let wrong = plain(wrong);
    let distance = |name: &'a str| {
        let hopeless = name.len().abs_diff(wrong.len()) > 4 * far;
        let apart = if hopeless { usize::MAX } else { strsim::damerau_levenshtein(&wrong, &plain(name)) };
        (apart <= far).then_some((apart, name))
    };
    names.filter_map(distance).min().map(|(_, name)| name)
}

/// A name without the differences that count as no slip at all: capitals, and `-` for `_`.
fn plain(name: &str) -> String {
    name.to_lowercase().replace('-', "_")
}

/// Pairs of names that can hardly be told apart by eye, each with the sign that differs.
pub(super) fn twins<'a>(names: impl Iterator<Item = &'a Name> + Clone) -> Vec<(&'a Name, &'a Name, String)> {
    if names.clone().all(|name| name.as_str().is_ascii()) {
        return Vec::new();
    }
    let mut seen: BTreeMap<String, &Name> = BTreeMap::new();
    let mut pairs = Vec::new();
    for name in names {
        match seen.get(&skeleton(name.as_str())) {
            Some(&first) => pairs.push((first, name, oddity(name.as_str(), first.as_str()))),
            None => drop(seen.insert(skeleton(name.as_str()), name)),
        }
    }
    pairs
}

/// Names the first sign in which two look-alikes differ.
fn oddity(a: &str, b: &str) -> String {
    let differing = a.chars().zip(b.chars()).enumerate().find(|(_, (x, y))| x != y);
    match differing {
        Some((at, (x, y))) => {
            format!("its character {} is U+{:04X}, not U+{:04X}", at + 1, u32::from(x), u32::from(y))
        }
        None => "they differ in length".to_owned(),
    }
}

/// A name with every letter that looks like a Latin one replaced by it.
fn skeleton(name: &str) -> String {
    name.chars().map(latin).collect()
}

/// The Latin letter or digit that a Cyrillic, Greek or full-width one is easily taken for.
fn latin(character: char) -> char {
    match character {
        '\u{ff01}'..='\u{ff5e}' => char::from_u32(u32::from(character) - 0xfee0).unwrap_or(character),
        'А' | 'Α' => 'A',
        'В' | 'Β' => 'B',
        'С' | 'Ϲ' => 'C',
        'Е' | 'Ε' => 'E',
        'Н' | 'Η' => 'H',
        'І' | 'Ι' | 'Ӏ' => 'I',
        'Ј' => 'J',
        'К' | 'Κ' => 'K',
        'М' | 'Μ' => 'M',
        'Ν' => 'N',
        'О' | 'Ο' => 'O',
        'Р' | 'Ρ' => 'P',
        'Ѕ' => 'S',
        'Т' | 'Τ' => 'T',
        'Х' | 'Χ' => 'X',
        'У' | 'Υ' | 'Ү' => 'Y',
        'Ζ' => 'Z',
        'а' | 'α' | 'ɑ' => 'a',
        'с' | 'ϲ' => 'c',
        'ԁ' => 'd',
        'е' => 'e',
        'һ' => 'h',
        'і' | 'ι' | 'ı' => 'i',
        'ј' => 'j',
        'к' | 'κ' => 'k',
        'о' | 'ο' => 'o',
        'р' | 'ρ' => 'p',
        'ѕ' => 's',
        'υ' => 'u',
        'ν' | 'ѵ' => 'v',
        'ԝ' => 'w',
        'х' | 'χ' => 'x',
        'у' | 'γ' => 'y',
        _ => character,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_slip_is_near_and_another_word_is_not() {
        let names = ["kiln", "press", "glaze_line"];
        let near = |wrong| nearest(wrong, names.into_iter());
        assert_eq!(near("kilm"), Some("kiln"));
        assert_eq!(near("Kiln"), Some("kiln"));
        assert_eq!(near("glaze-lien"), Some("glaze_line"));
        assert_eq!(near("dryer"), None);
        assert_eq!(near(&"k".repeat(65)), None);
    }

    #[test]
    fn letters_of_another_script_make_twins() {
        let names = ["kiln", "k\u{456}ln", "печь"].map(|name| Name::new(name).unwrap());
        let found = twins(names.iter());
        assert_eq!(found.len(), 1);
        assert_eq!(found[0].2, "its character 2 is U+0456, not U+0069");
    }
}
