//! Names: what people call an activity, a resource or a limit.

use std::borrow::Borrow;
use std::fmt;
use std::sync::Arc;

/// The longest name a model may use, in characters.
pub const LONGEST: usize = 64;

/// The name of one thing in a model: 1 to 64 letters, digits, `_` or `-`, of any script.
///
/// Names sort in byte order; everything Millreeve writes is in that order.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Name(Arc<str>);

/// Why a text is not a name.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum NameError {
    /// Nothing was written.
    #[error("a name must have at least one character")]
    Empty,
    /// More than [`LONGEST`] characters.
    #[error("a name has at most {LONGEST} characters, this one has {0}")]
    TooLong(usize),
    /// A character that is neither a letter, a digit, `_` nor `-`.
    #[error("a name is made of letters, digits, `_` and `-`, not of {0:?}")]
    Character(char),
}

impl Name {
    /// The name that `text` spells.
    ///
    /// # Errors
    /// Says which rule the text breaks: it is empty, too long, or has a character that names do not have.
    pub fn new(text: &str) -> Result<Self, NameError> {
        if text.is_empty() {
            return Err(NameError::Empty);
        }
        let length = text.chars().count();
        if length > LONGEST {
            return Err(NameError::TooLong(length));
        }
        match text.chars().find(|&c| !Self::allows(c)) {
            Some(character) => Err(NameError::Character(character)),
            None => Ok(Self(text.into())),
        }
    }

    /// Whether a name may contain this character.
    #[must_use]
    pub fn allows(character: char) -> bool {
        character.is_alphanumeric() || character == '_' || character == '-'
    }

    /// The name as text.
    #[must_use]
    pub fn as_str(&self) -> &str {
        &self.0
    }
}

impl Borrow<str> for Name {
    fn borrow(&self) -> &str {
        &self.0
    }
}

impl fmt::Display for Name {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.0)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn letters_of_any_script_digits_and_two_signs_make_a_name() {
        for good in ["kiln", "floor_tile-2", "Плитка", "瓦", "7"] {
            assert_eq!(Name::new(good).map(|n| n.to_string()), Ok(good.to_owned()));
        }
        assert_eq!(Name::new(""), Err(NameError::Empty));
        assert_eq!(Name::new("a.b"), Err(NameError::Character('.')));
        assert_eq!(Name::new("a b"), Err(NameError::Character(' ')));
        assert_eq!(Name::new(&"x".repeat(65)), Err(NameError::TooLong(65)));
        assert!(Name::new(&"é".repeat(64)).is_ok());
    }
}
