//! One data line of an MPS file, taken apart by the layout it is written in.

use super::error::{Flaw, quoted};

/// How the fields of a line are told apart.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Layout {
    /// By blanks; names have none in them.
    Free,
    /// By columns 2, 5, 15, 25, 40 and 50; names may have blanks in them.
    Fixed,
}

/// What the data lines of a section hold.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Shape {
    /// A kind and a name.
    Row,
    /// A column, then one or two rows with values.
    Entries,
    /// Perhaps the name of a set, then one or two rows with values.
    Sides,
    /// A kind, perhaps the name of a set, a column, and a value where the kind needs one.
    Bound,
}

/// A data line in parts.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub(super) struct Card<'t> {
    /// The kind of row or bound; empty where the shape has none.
    pub(super) kind: &'t str,
    /// The column of entries, the set of sides and bounds.
    pub(super) head: Option<&'t str>,
    /// A name, and the value that goes with it.
    pub(super) pair: (&'t str, Option<&'t str>),
    /// A second name and value.
    pub(super) other: Option<(&'t str, Option<&'t str>)>,
}

impl<'t> Card<'t> {
    pub(super) fn of(layout: Layout, shape: Shape, line: &'t str) -> Result<Self, Flaw> {
        match layout {
            Layout::Free => Self::free(shape, line),
            Layout::Fixed => Self::fixed(shape, line),
        }
    }

    /// Its names with their values.
    pub(super) fn pairs(&self) -> impl Iterator<Item = (&'t str, Option<&'t str>)> + use<'t> {
        std::iter::once(self.pair).chain(self.other)
    }

    /// Whether a word stands in it beside the first name: as a value or, in fixed layout, as the other name.
    pub(super) fn names(&self, word: &str) -> bool {
        self.pair.1 == Some(word) || self.other.is_some_and(|(name, _)| name == word)
    }

    fn free(shape: Shape, line: &'t str) -> Result<Self, Flaw> {
        // One more than any shape has, so that a long line costs no more than a short one.
        let fields: Vec<_> = line.split_whitespace().take(6).collect();
        let card = match (shape, fields.as_slice()) {
            (Shape::Row, &[kind, name]) => Self { kind, pair: (name, None), ..Self::default() },
            (Shape::Entries | Shape::Sides, &[head, name, value]) => {
                Self { head: Some(head), pair: (name, Some(value)), ..Self::default() }
            }
            (Shape::Entries | Shape::Sides, &[head, name, value, other, second]) => {
                Self { head: Some(head), pair: (name, Some(value)), other: Some((other, Some(second))), kind: "" }
            }
            (Shape::Sides, &[name, value]) => Self { pair: (name, Some(value)), ..Self::default() },
            (Shape::Sides, &[name, value, other, second]) => {
                Self { pair: (name, Some(value)), other: Some((other, Some(second))), ..Self::default() }
            }
            (Shape::Bound, &[kind, name]) => Self { kind, pair: (name, None), ..Self::default() },
            (Shape::Bound, &[kind, set, name]) if needs_no_value(kind) => {
                Self { kind, head: Some(set), pair: (name, None), other: None }
            }
            (Shape::Bound, &[kind, name, value]) => Self { kind, pair: (name, Some(value)), ..Self::default() },
            (Shape::Bound, &[kind, set, name, value]) => {
                Self { kind, head: Some(set), pair: (name, Some(value)), other: None }
            }
            _ => return Err(Flaw::new(format!("{} {}", count(fields.len()), shape.wants()), shape.help())),
        };
        Ok(card)
    }

    fn fixed(shape: Shape, line: &'t str) -> Result<Self, Flaw> {
        let [kind, first, second, third, fourth, fifth] = columns(line)?;
        let some = |field: &'t str| (!field.is_empty()).then_some(field);
        let card = match shape {
            Shape::Row => Self { kind, pair: (first, None), ..Self::default() },
            Shape::Entries | Shape::Sides => Self {
                kind: "",
                head: some(first),
                pair: (second, some(third)),
                other: some(fourth).map(|name| (name, some(fifth))),
            },
            Shape::Bound => Self { kind, head: some(first), pair: (second, some(third)), other: None },
        };
        if card.pair.0.is_empty() || (shape == Shape::Entries && card.head.is_none()) {
            return Err(Flaw::new("a name is missing from its columns", shape.help()));
        }
        Ok(card)
    }
}

/// Whether a bound of this kind says all by its kind.
pub(super) fn needs_no_value(kind: &str) -> bool {
    ["FR", "MI", "PL", "BV"].iter().any(|known| kind.eq_ignore_ascii_case(known))
}

impl Shape {
    fn wants(self) -> &'static str {
        match self {
            Self::Row => "where a row has two, its kind and its name",
            Self::Entries => "where a column has three or five: its name, then a row and a value, once or twice",
            Self::Sides => "where a set's name, a row and a value stand, with perhaps another row and value",
            Self::Bound => "where a bound's kind, a set's name, a column and a value stand",
        }
    }

    fn help(self) -> &'static str {
        match self {
            Self::Row => "write it like ` L  ROW`",
            Self::Entries => "write it like `    COLUMN    ROW    1.5`; names with blanks need the fixed layout",
            Self::Sides => "write it like `    RHS    ROW    1.5`; names with blanks need the fixed layout",
            Self::Bound => "write it like ` UP BOUND    COLUMN    1.5`; names with blanks need the fixed layout",
        }
    }
}

fn count(fields: usize) -> String {
    match fields {
        1 => "1 field".to_owned(),
        6 => "more than 5 fields".to_owned(),
        some => format!("{some} fields"),
    }
}

/// First and last column of each field, from 1.
const FIELDS: [(usize, usize); 6] = [(2, 3), (5, 12), (15, 22), (25, 36), (40, 47), (50, 61)];
/// From this column on a line is remarks.
const REMARKS: usize = 73;

/// The six fields of a line in fixed layout, without the blanks around them. Between them nothing may stand.
fn columns(line: &str) -> Result<[&str; 6], Flaw> {
    let mut fields = [""; 6];
    let mut open: Option<(usize, usize)> = None;
    for (column, (at, character)) in (1..REMARKS).zip(line.char_indices()) {
        if character == '\t' {
            return Err(Flaw::new("a tab, where fields stand in fixed columns", "put blanks in its place"));
        }
        match FIELDS.iter().position(|&(first, last)| (first..=last).contains(&column)) {
            Some(field) => {
                let start = open.filter(|&(current, _)| current == field).map_or(at, |(_, start)| start);
                open = Some((field, start));
                fields[field] = &line[start..at + character.len_utf8()];
            }
            None if character.is_whitespace() => {}
            None => {
                return Err(Flaw::new(
                    format!("{} in column {column}, between the fields", quoted(character.encode_utf8(&mut [0; 4]))),
                    "fields stand in columns 2 to 3, 5 to 12, 15 to 22, 25 to 36, 40 to 47 and 50 to 61",
                ));
            }
        }
    }
    Ok(fields.map(str::trim))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_set_may_go_without_a_name_in_free_layout() {
        let named = Card::of(Layout::Free, Shape::Sides, " RHS R1 1 R2 2").unwrap();
        let nameless = Card::of(Layout::Free, Shape::Sides, " R1 1 R2 2").unwrap();
        assert_eq!(named.head, Some("RHS"));
        assert_eq!(nameless, Card { head: None, ..named });
        let bound = |line| Card::of(Layout::Free, Shape::Bound, line).unwrap();
        assert_eq!(bound(" UP X 4"), Card { head: None, ..bound(" UP BND X 4") });
        assert_eq!(bound(" FR X"), Card { head: None, ..bound(" FR BND X") });
    }

    #[test]
    fn fixed_columns_let_names_have_blanks() {
        let line = "    FLOOR 30  KILN DAY           1.5   WET SIDE            -2  ";
        let card = Card::of(Layout::Fixed, Shape::Entries, line).unwrap();
        assert_eq!(card.head, Some("FLOOR 30"));
        assert_eq!(card.pair, ("KILN DAY", Some("1.5")));
        assert_eq!(card.other, Some(("WET SIDE", Some("-2"))));
        assert!(Card::of(Layout::Free, Shape::Entries, line).is_err());
        assert!(Card::of(Layout::Fixed, Shape::Entries, "   X ROW 1").is_err());
        assert!(Card::of(Layout::Fixed, Shape::Entries, "    é\u{301}é       ROW           1").is_ok());
    }
}
