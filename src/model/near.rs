//! Names near to a misspelt one.

use super::letters::{difference, skeleton};
use super::name;

/// What to say about a name that is not there: the nearest that is, else what `otherwise` says.
pub(crate) fn help<'a>(
    wrong: &str,
    names: impl Iterator<Item = &'a str>,
    otherwise: impl FnOnce() -> String,
) -> String {
    match nearest(wrong, names) {
        Some(name) if skeleton(name) == skeleton(wrong) => {
            format!("did you mean `{name}`? It only looks the same: {}", difference(wrong, name))
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
}
