//! Models whose names some systems do not tell apart: they differ only in capitals, or in how an accented letter is put together.

use std::collections::BTreeMap;

use unicode_normalization::UnicodeNormalization;

use super::path::ModelPath;

/// What is to be said of each model whose name is the twin of an earlier one's, in the order of their paths.
pub(super) fn find<'a>(models: impl Iterator<Item = &'a ModelPath>) -> Vec<String> {
    let mut seen: BTreeMap<String, &str> = BTreeMap::new();
    let mut said = Vec::new();
    // What is no text is folded by no system.
    for name in models.filter_map(|model| model.relative().to_str()) {
        let first = *seen.entry(folded(name)).or_insert(name);
        if first != name {
            said.push(format!(
                "{} and {} differ only in capitals or in how an accented letter is put together: both are planned, but a system that does \
                 not tell such names apart would keep one of them only; rename one",
                spelt(first),
                spelt(name)
            ));
        }
    }
    said
}

/// A name as a system sees it that tells neither capitals nor ways of putting a letter together apart.
fn folded(name: &str) -> String {
    if name.is_ascii() { name.to_ascii_lowercase() } else { name.nfd().flat_map(char::to_lowercase).nfc().collect() }
}

/// A name letter by letter: whatever is not plain is escaped, since that is what the two differ in.
fn spelt(name: &str) -> String {
    let letter = |letter: char| {
        if letter.is_ascii() { letter.escape_debug().to_string() } else { letter.escape_unicode().to_string() }
    };
    name.chars().map(letter).collect()
}

#[cfg(test)]
mod tests {
    use std::path::Path;
    use std::sync::Arc;

    use super::*;

    #[test]
    fn twins_are_told_with_every_letter_that_is_not_plain() {
        let root = Arc::from(Path::new("/works"));
        let names = [
            "caf\u{e9}",
            "cafe\u{301}",
            "cafe",
            "Kiln",
            "kiln",
            "north/kiln",
            "\u{419}ard",
            "\u{438}\u{306}ard",
            "two\nlines",
        ];
        let models = names.map(|name| ModelPath::new(&root, Path::new(&format!("{name}.model.toml"))).unwrap());
        let said = find(models.iter());
        let pairs: Vec<_> = said.iter().map(|text| text.split(" differ only").next().unwrap()).collect();
        assert_eq!(
            pairs,
            [
                "caf\\u{e9}.model.toml and cafe\\u{301}.model.toml",
                "Kiln.model.toml and kiln.model.toml",
                "\\u{419}ard.model.toml and \\u{438}\\u{306}ard.model.toml",
            ]
        );
    }
}
