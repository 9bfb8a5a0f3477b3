//! Names of other programs as names of ours.
//!
//! What a name of ours cannot hold is written as `_x`, its code in hexadecimal, `_`: `B1.TILE` becomes `B1_x2e_TILE`. A name that
//! is one of ours stays as it is, unless it holds what looks like such an escape. What gets too long is cut and ends in a hash
//! between the same marks. So no two texts become the same name.

use crate::model::Name;
use crate::model::name::LONGEST;

/// Opens an escape.
const OPEN: &str = "_x";
/// Closes an escape.
const CLOSE: char = '_';
/// How many hexadecimal digits of hash a cut name ends in.
const HASH_DIGITS: usize = 32;

/// The name of ours that stands for `text`, and for no other text.
#[must_use]
#[expect(clippy::expect_used, reason = "pieces hold only what a name may hold, and a cut name is exactly long enough")]
pub fn escape(text: &str) -> Name {
    if text.is_empty() {
        return Name::new("_x_").expect("a name");
    }
    let mut whole = String::new();
    let mut length = 0;
    let mut cut = 0;
    for (at, character) in text.char_indices() {
        if Name::allows(character) && !opens_escape(&text[at..]) {
            whole.push(character);
            length += 1;
        } else {
            let piece = format!("{OPEN}{:x}{CLOSE}", u32::from(character));
            whole.push_str(&piece);
            length += piece.len();
        }
        if length > LONGEST {
            whole.truncate(cut);
            let hash = blake3::hash(text.as_bytes()).to_hex();
            return Name::new(&format!("{whole}{OPEN}{}{CLOSE}", &hash[..HASH_DIGITS])).expect("a name");
        }
        if length + OPEN.len() + HASH_DIGITS + CLOSE.len_utf8() <= LONGEST {
            cut = whole.len();
        }
    }
    Name::new(&whole).expect("a name")
}

/// The text that [`escape`] made `name` from; `None` where there is none or it was cut.
#[must_use]
pub fn unescape(name: &Name) -> Option<String> {
    let mut text = String::new();
    let mut rest = name.as_str();
    while let Some(at) = rest.find(OPEN) {
        let digits = hexadecimal(&rest[at + OPEN.len()..]);
        let after = &rest[at + OPEN.len() + digits.len()..];
        if after.starts_with(CLOSE) {
            text.push_str(&rest[..at]);
            if !digits.is_empty() {
                text.push(char::from_u32(u32::from_str_radix(digits, 16).ok()?)?);
            }
            rest = &after[CLOSE.len_utf8()..];
        } else {
            text.push_str(&rest[..at + OPEN.len()]);
            rest = &rest[at + OPEN.len()..];
        }
    }
    text.push_str(rest);
    (escape(&text) == *name).then_some(text)
}

/// Whether what `text` begins with would be taken for an escape once the rest of it is escaped.
fn opens_escape(text: &str) -> bool {
    text.strip_prefix(OPEN)
        .is_some_and(|rest| rest[hexadecimal(rest).len()..].starts_with(|next| next == CLOSE || !Name::allows(next)))
}

/// The lower-case hexadecimal digits that `text` begins with.
fn hexadecimal(text: &str) -> &str {
    let end = text.find(|c| !matches!(c, '0'..='9' | 'a'..='f')).unwrap_or(text.len());
    &text[..end]
}

#[cfg(test)]
mod tests {
    use std::collections::HashMap;

    use proptest::prelude::*;

    use super::*;

    #[test]
    fn names_of_ours_stay_and_others_are_spelt_out() {
        for (text, name) in [
            ("kiln", "kiln"),
            ("Плитка-2", "Плитка-2"),
            ("a_x", "a_x"),
            ("B1C1....", "B1C1_x2e__x2e__x2e__x2e_"),
            ("'ENDX'", "_x27_ENDX_x27_"),
            ("_x2e_", "_x5f_x2e_"),
            ("_x2.", "_x5f_x2_x2e_"),
            ("_x2", "_x2"),
            ("", "_x_"),
        ] {
            assert_eq!(escape(text).as_str(), name, "{text}");
            assert_eq!(unescape(&escape(text)).as_deref(), Some(text));
        }
    }

    #[test]
    fn long_names_are_cut_and_kept_apart() {
        let long = "ä".repeat(65);
        let (one, other) = (escape(&long), escape(&format!("{long}.")));
        assert_ne!(one, other);
        assert!(one.as_str().starts_with("äää"));
        assert_eq!(one.as_str().chars().count(), LONGEST);
        assert_eq!(unescape(&one), None);
        assert_ne!(escape(one.as_str()), one);
    }

    proptest! {
        #[test]
        fn no_two_texts_become_one_name(texts in prop::collection::vec("[_x25ef.é ]{0,12}", 1..40)) {
            let mut seen = HashMap::new();
            for text in texts {
                let name = escape(&text);
                prop_assert_eq!(unescape(&name), Some(text.clone()));
                let first = seen.entry(name).or_insert_with(|| text.clone());
                prop_assert_eq!(first, &text);
            }
        }

        #[test]
        fn any_text_has_a_name(text in any::<String>()) {
            let name = escape(&text);
            if let Some(back) = unescape(&name) {
                prop_assert_eq!(back, text);
            }
        }
    }
}
