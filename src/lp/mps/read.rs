//! Reading an MPS file, section by section.

use super::card::{Card, Layout, Shape, needs_no_value};
use super::draft::{Bounds, Draft, RowKind};
use super::error::{Flaw, MpsError, Warnings, quoted};
use super::{MARKER, number, translate};
use crate::model::{Aim, Model};

/// A model read from an MPS file.
#[derive(Clone, Debug, PartialEq)]
pub struct Reading {
    /// The model the file stands for.
    pub model: Model,
    /// The layout that the file turned out to have.
    pub layout: Layout,
    /// What was read otherwise than written, or left out.
    pub warnings: Warnings,
}

/// The model that the MPS file `text` stands for: free layout if it can be read so, else fixed.
///
/// Columns become activities and rows become limits. A name that is not one of ours is escaped
/// ([`names`](super::names)) and stands in the label. Left out, with a warning: free rows beside the objective, rows that
/// nothing holds, and all sets of right-hand sides, ranges or bounds but the first.
///
/// # Errors
/// The first thing wrong, in whichever layout gets further into the file.
pub fn read(text: &str) -> Result<Reading, MpsError> {
    let free = match read_as(Layout::Free, text) {
        Ok(reading) => return Ok(reading),
        Err(stop) => stop,
    };
    read_as(Layout::Fixed, text).map_err(|fixed| if fixed.reached > free.reached { fixed.error } else { free.error })
}

/// Where a reading stopped, which may be after the line that is wrong, and why.
struct Stop {
    reached: usize,
    error: MpsError,
}

fn read_as(layout: Layout, text: &str) -> Result<Reading, Stop> {
    let mut reader = Reader::new(layout);
    let mut reached = 1;
    for (line, content) in (1..).zip(text.strip_prefix('\u{feff}').unwrap_or(text).lines()) {
        if content.starts_with('*') || content.trim().is_empty() {
            continue;
        }
        reached = line;
        let is_data = content.starts_with(char::is_whitespace);
        let done = if is_data { reader.data(content, line) } else { reader.head(content, line) };
        done.map_err(|flaw| Stop { reached, error: flaw.at(line) })?;
        if reader.section == Some(Section::End) {
            break;
        }
    }
    reader.finish(reached).map_err(|error| Stop { reached, error })
}

/// A section that is read.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Section {
    Name,
    Sense,
    Objective,
    Rows,
    Columns,
    Right,
    Ranges,
    Bounds,
    End,
}

impl Section {
    const ALL: [(&'static str, Self); 9] = [
        ("NAME", Self::Name),
        ("OBJSENSE", Self::Sense),
        ("OBJNAME", Self::Objective),
        ("ROWS", Self::Rows),
        ("COLUMNS", Self::Columns),
        ("RHS", Self::Right),
        ("RANGES", Self::Ranges),
        ("BOUNDS", Self::Bounds),
        ("ENDATA", Self::End),
    ];

    fn named(word: &str) -> Result<Self, Flaw> {
        let known = Self::ALL.iter().find(|(name, _)| word.eq_ignore_ascii_case(name));
        known.map(|&(_, section)| section).ok_or_else(|| match beyond(word) {
            Some(what) => Flaw::new(
                format!("section {} states {what}, which this version does not plan", quoted(word)),
                "only a plain linear program can be converted",
            ),
            None => Flaw::new(
                format!("{} is no section of an MPS file", quoted(word)),
                "sections are NAME, OBJSENSE, OBJNAME, ROWS, COLUMNS, RHS, RANGES, BOUNDS and ENDATA; other lines start with a blank",
            ),
        })
    }

    fn word(self) -> &'static str {
        Self::ALL.iter().find(|&&(_, section)| section == self).map_or("", |&(word, _)| word)
    }

    /// The section that must stand before.
    fn follows(self) -> Option<Self> {
        match self {
            Self::Columns | Self::Right | Self::Ranges | Self::End => Some(Self::Rows),
            Self::Bounds => Some(Self::Columns),
            Self::Name | Self::Sense | Self::Objective | Self::Rows => None,
        }
    }
}

/// What a section states that is no part of a linear program.
fn beyond(word: &str) -> Option<&'static str> {
    let word = word.to_ascii_uppercase();
    match word.as_str() {
        "QUADOBJ" | "QMATRIX" | "QSECTION" | "QCMATRIX" => Some("quadratic terms"),
        "CSECTION" => Some("cones"),
        "SOS" | "SOS1" | "SOS2" | "SETS" => Some("sets of which only some may be above 0"),
        "INDICATORS" | "GENCONS" | "PWLOBJ" => Some("rules that are not linear"),
        "LAZYCONS" | "USERCUTS" => Some("rows that hold only where they are needed"),
        _ => None,
    }
}

struct Reader<'t> {
    layout: Layout,
    section: Option<Section>,
    seen: Vec<(Section, usize)>,
    draft: Draft<'t>,
    /// The set used of the present section, and whether another was left out.
    set: Option<&'t str>,
    left_out: bool,
    /// The marker line from which on columns are whole numbers.
    whole_from: Option<usize>,
    warnings: Warnings,
}

impl<'t> Reader<'t> {
    fn new(layout: Layout) -> Self {
        Self {
            layout,
            section: None,
            seen: Vec::new(),
            draft: Draft::default(),
            set: None,
            left_out: false,
            whole_from: None,
            warnings: Warnings::default(),
        }
    }

    fn finish(self, last: usize) -> Result<Reading, MpsError> {
        if self.section != Some(Section::End) {
            return Err(Flaw::new("the file ends without ENDATA", "it may have been cut short").at(last));
        }
        let mut warnings = self.warnings;
        let model = translate::model(&self.draft, self.layout, &mut warnings)?;
        Ok(Reading { model, layout: self.layout, warnings })
    }

    /// A line that opens a section.
    fn head(&mut self, content: &'t str, line: usize) -> Result<(), Flaw> {
        let (word, rest) = content.split_once(char::is_whitespace).unwrap_or((content, ""));
        let rest = rest.trim();
        let section = Section::named(word)?;
        if let Some((_, first)) = self.seen.iter().find(|&&(seen, _)| seen == section) {
            return Err(Flaw::new(
                format!("section {} stands twice, in lines {first} and {line}", section.word()),
                "a line that belongs to a section starts with a blank",
            ));
        }
        if let Some(before) = section.follows().filter(|&before| self.seen.iter().all(|&(seen, _)| seen != before)) {
            return Err(Flaw::new(
                format!("{} stands where {} has not been", section.word(), before.word()),
                "the order is ROWS, COLUMNS, RHS, RANGES, BOUNDS, ENDATA",
            ));
        }
        self.seen.push((section, line));
        self.section = Some(section);
        (self.set, self.left_out) = (None, false);
        match section {
            Section::Name => self.draft.title = title(rest),
            Section::Sense | Section::Objective if !rest.is_empty() => self.data(rest, line)?,
            _ => {}
        }
        Ok(())
    }

    /// A line that belongs to the section.
    fn data(&mut self, content: &'t str, line: usize) -> Result<(), Flaw> {
        match self.section {
            Some(Section::Sense) => self.sense(content.trim()),
            Some(Section::Objective) => self.objective(content.trim(), line),
            Some(Section::Rows) => self.row(Card::of(self.layout, Shape::Row, content)?, line),
            Some(Section::Columns) => self.entries(Card::of(self.layout, Shape::Entries, content)?, line),
            Some(Section::Right) => self.right(Card::of(self.layout, Shape::Sides, content)?, line),
            Some(Section::Ranges) => self.ranges(Card::of(self.layout, Shape::Sides, content)?, line),
            Some(Section::Bounds) => self.bound(Card::of(self.layout, Shape::Bound, content)?, line),
            Some(Section::Name | Section::End) | None => Err(Flaw::new(
                format!("{} stands in no section", quoted(content.trim())),
                "a section's name starts in the first column",
            )),
        }
    }

    fn sense(&mut self, word: &str) -> Result<(), Flaw> {
        let aim = match word.to_ascii_uppercase().as_str() {
            "MAX" | "MAXIMIZE" | "MAXIMISE" => Aim::Maximise,
            "MIN" | "MINIMIZE" | "MINIMISE" => Aim::Minimise,
            _ => return Err(Flaw::new(format!("{} is no sense of an objective", quoted(word)), "write MAX or MIN")),
        };
        match self.draft.aim.replace(aim) {
            Some(_) => Err(Flaw::new("the sense of the objective is given twice", "leave one of them out")),
            None => Ok(()),
        }
    }

    fn objective(&mut self, name: &'t str, line: usize) -> Result<(), Flaw> {
        match self.draft.objective.replace((name, line)) {
            Some(_) => Err(Flaw::new("the objective is named twice", "leave one of them out")),
            None => Ok(()),
        }
    }

    fn row(&mut self, card: Card<'t>, line: usize) -> Result<(), Flaw> {
        let kind = match card.kind {
            "N" | "n" => RowKind::Free,
            "L" | "l" => RowKind::AtMost,
            "G" | "g" => RowKind::AtLeast,
            "E" | "e" => RowKind::Equal,
            other => return Err(Flaw::new(format!("{} is no kind of row", quoted(other)), "kinds are N, L, G and E")),
        };
        self.draft.add_row(card.pair.0, kind, line)
    }

    fn entries(&mut self, card: Card<'t>, line: usize) -> Result<(), Flaw> {
        let marks = |word| card.pair.0 == MARKER && card.names(word);
        if marks("'INTORG'") || marks("'INTEND'") {
            self.whole_from = marks("'INTORG'").then_some(line);
            return Ok(());
        }
        if let (Some(marker), Some(column)) = (self.whole_from, card.head) {
            return Err(Flaw::new(
                format!(
                    "column {} is marked in line {marker} as whole numbers, which this version does not plan",
                    quoted(column)
                ),
                "leave the marker lines out to plan it as a fraction",
            ));
        }
        self.draft.open_column(card.head.unwrap_or_default(), line)?;
        for (row, value) in card.pairs() {
            let value = number::coefficient(value.unwrap_or_default())?;
            self.draft.add_entry(row, value, line)?;
        }
        Ok(())
    }

    fn right(&mut self, card: Card<'t>, line: usize) -> Result<(), Flaw> {
        if self.is_of_another_set(card.head, line) {
            return Ok(());
        }
        for (row, value) in card.pairs() {
            let value = value.unwrap_or_default();
            let value = if self.draft.is_free(row) { number::constant(value)? } else { number::bound(value)? };
            self.draft.set_right(row, value, line)?;
        }
        Ok(())
    }

    fn ranges(&mut self, card: Card<'t>, line: usize) -> Result<(), Flaw> {
        if self.is_of_another_set(card.head, line) {
            return Ok(());
        }
        for (row, value) in card.pairs() {
            self.draft.set_range(row, number::bound(value.unwrap_or_default())?, line)?;
        }
        Ok(())
    }

    fn bound(&mut self, mut card: Card<'t>, line: usize) -> Result<(), Flaw> {
        // Without a set's name, what follows the column is a value that this kind of bound has no use for.
        if let Some(column) = card.head.filter(|name| self.layout == Layout::Free && self.draft.has_column(name))
            && needs_no_value(card.kind)
            && !self.draft.has_column(card.pair.0)
        {
            card = Card { head: None, pair: (column, None), ..card };
        }
        let kind = card.kind.to_ascii_uppercase();
        let column = card.pair.0;
        if let "BV" | "LI" | "UI" | "SC" | "SI" = kind.as_str() {
            let what = if kind.starts_with('S') { "none or at least so much" } else { "whole numbers" };
            return Err(Flaw::new(
                format!("bound {kind} makes column {} {what}, which this version does not plan", quoted(column)),
                "use LO and UP to plan it as a fraction",
            ));
        }
        if self.is_of_another_set(card.head, line) {
            return Ok(());
        }
        let value = || number::bound(card.pair.1.unwrap_or_default());
        let (lower, upper) = match kind.as_str() {
            "LO" => (Some(value()?), None),
            "UP" => (None, Some(value()?)),
            "FX" => (Some(value()?), Some(value()?)),
            "FR" => (Some(f64::NEG_INFINITY), Some(f64::INFINITY)),
            "MI" => (Some(f64::NEG_INFINITY), None),
            "PL" => (None, Some(f64::INFINITY)),
            _ => {
                return Err(Flaw::new(
                    format!("{} is no kind of bound", quoted(card.kind)),
                    "kinds are LO, UP, FX, FR, MI and PL",
                ));
            }
        };
        if lower == Some(f64::INFINITY) || upper == Some(f64::NEG_INFINITY) {
            return Err(Flaw::new(
                format!("bound {kind} of column {} leaves it no value", quoted(column)),
                "an infinite bound must be on its own side: below for LO, above for UP",
            ));
        }
        self.draft.set_bounds(column, Bounds { lower, upper }, line)
    }

    /// Whether a line belongs to a set that is not used: any but the first. A line that names none belongs to every set.
    fn is_of_another_set(&mut self, name: Option<&'t str>, line: usize) -> bool {
        let Some(name) = name else { return false };
        let first = *self.set.get_or_insert(name);
        if first == name {
            return false;
        }
        if !self.left_out {
            self.left_out = true;
            let section = self.section.map_or("", Section::word);
            self.warnings.add(line, || {
                format!("of {section} only the first set, {}, is used; {} is left out", quoted(first), quoted(name))
            });
        }
        true
    }
}

/// The title that the rest of a NAME line spells.
fn title(rest: &str) -> Option<String> {
    let words: Vec<_> = rest.split_whitespace().collect();
    (!words.is_empty()).then(|| words.join(" "))
}
