//! Writing the program behind a model as an MPS file in free layout.
//!
//! The file means exactly what the program does: numbers are written in their shortest exact form, and a row with two bounds
//! that no right-hand side and range can state to the last bit is written as two. Rows that nothing holds are left out.
//! A prospect is a column fixed at 0.

use std::collections::{HashMap, HashSet};
use std::fmt::Write as _;

use super::number::shortest;
use super::{MARKER, names};
use crate::lp::build::build;
use crate::lp::program::{Column, Key, Program, Row, Sense};
use crate::model::escape::Plain;
use crate::model::{Model, Name};

/// Why a model cannot be written as an MPS file.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum WriteError {
    /// A sum or product of the model's numbers is too large for a number.
    #[error("a number of `{0}` is too large to be written")]
    Number(Key),
}

/// The MPS file that says what `model` means, in free layout.
///
/// A column is named after its activity, a row after its limit; both get back the name that another program gave them, if
/// their label holds it. Everything else goes by its [key](crate::lp::keys), as do all columns and rows of a model that names periods:
/// `resources.NAME`, `limits.NAME.at_least`, `activities.NAME.PERIOD`.
///
/// # Errors
/// If some number overflowed while the program was built.
pub fn write(model: &Model) -> Result<String, WriteError> {
    let program = build(model);
    check_numbers(&program)?;
    let sides: Vec<_> = program.rows.iter().map(sides).collect();
    let rows = row_names(model, &program, &sides);
    let columns = column_names(model, &program);
    let objective = objective_name(&rows);
    Ok(File { title: model.title.as_deref(), program: &program, sides, rows, columns, objective }.text())
}

fn check_numbers(program: &Program) -> Result<(), WriteError> {
    for row in &program.rows {
        if row.lower.is_nan() || row.upper.is_nan() || row.lower == f64::INFINITY || row.upper == f64::NEG_INFINITY {
            return Err(WriteError::Number(row.key.clone()));
        }
    }
    for column in &program.columns {
        let mut numbers = column.entries.iter().map(|&(_, value)| value).chain([column.aim]);
        let bounds = !column.lower.is_nan()
            && !column.upper.is_nan()
            && column.lower < f64::INFINITY
            && column.upper > f64::NEG_INFINITY;
        if !bounds || !numbers.all(f64::is_finite) {
            return Err(WriteError::Number(column.key.clone()));
        }
    }
    Ok(())
}

/// How a row is stated.
#[derive(Clone, Copy, Debug)]
struct Side {
    /// Tells the two rows of one apart.
    word: Option<&'static str>,
    kind: char,
    right: f64,
    range: Option<f64>,
}

/// The rows that state a row of the program: one as a rule, none if nothing holds it, two if its bounds need it.
fn sides(row: &Row) -> Vec<Side> {
    let Row { lower, upper, .. } = *row;
    let at_least = Side { word: None, kind: 'G', right: lower, range: None };
    let at_most = Side { word: None, kind: 'L', right: upper, range: None };
    match (lower.is_finite(), upper.is_finite()) {
        (false, false) => vec![],
        (true, false) => vec![at_least],
        (false, true) => vec![at_most],
        (true, true) if (lower + 0.0).to_bits() == (upper + 0.0).to_bits() => vec![Side { kind: 'E', ..at_least }],
        (true, true) => {
            let near = [upper - lower, (upper - lower).next_up(), (upper - lower).next_down()];
            let exact = |far: f64, bound: f64| (far + 0.0).to_bits() == (bound + 0.0).to_bits();
            let above = near.into_iter().find(|range| *range > 0.0 && exact(lower + range, upper));
            let below = near.into_iter().find(|range| *range > 0.0 && exact(upper - range, lower));
            match (below, above) {
                (Some(_), _) => vec![Side { range: below, ..at_most }],
                (None, Some(_)) => vec![Side { range: above, ..at_least }],
                (None, None) => {
                    vec![Side { word: Some("at_least"), ..at_least }, Side { word: Some("at_most"), ..at_most }]
                }
            }
        }
    }
}

/// The names of every row's sides.
///
/// A row's key, with a side's word, is a name that no other row has; a limit with one row is plain enough without `limits.`.
fn row_names(model: &Model, program: &Program, sides: &[Vec<Side>]) -> Vec<Vec<String>> {
    let candidate = |row: &Row, side: &Side| {
        let limit = row.key.as_str().strip_prefix("limits.").and_then(|name| model.limits.get_key_value(name));
        match (limit, side.word) {
            (Some((name, limit)), None) => (name.to_string(), original(name, limit.label.as_deref())),
            (_, None) => (row.key.to_string(), None),
            (_, Some(word)) => (format!("{}.{word}", row.key), None),
        }
    };
    let candidates = program.rows.iter().zip(sides);
    let candidates = candidates.flat_map(|(row, sides)| sides.iter().map(move |side| candidate(row, side)));
    let mut names = distinct(candidates.collect()).into_iter();
    sides.iter().map(|sides| names.by_ref().take(sides.len()).collect()).collect()
}

/// The names of the columns: each activity's own, or what its label says another program called it.
fn column_names(model: &Model, program: &Program) -> Vec<String> {
    let candidate = |column: &Column| {
        let key = column.key.as_str();
        let activity = key.strip_prefix("activities.").and_then(|name| model.activities.get_key_value(name));
        activity.map_or((key.to_owned(), None), |(name, activity)| {
            (name.to_string(), original(name, activity.label.as_deref()))
        })
    };
    distinct(program.columns.iter().map(candidate).collect())
}

/// Of each plain name and perhaps an original one the original, unless another must go by that name.
///
/// No two of the plain names are the same, nor two of the original ones.
fn distinct(candidates: Vec<(String, Option<&str>)>) -> Vec<String> {
    let originals = candidates.iter().enumerate().filter_map(|(at, (_, original))| original.map(|name| (name, at)));
    let mut goes_by: HashMap<&str, usize> = originals.collect();
    let mut plain: Vec<usize> = (0..candidates.len()).filter(|&at| candidates[at].1.is_none()).collect();
    while let Some(at) = plain.pop() {
        plain.extend(goes_by.remove(candidates[at].0.as_str()));
    }
    let kept: HashSet<usize> = goes_by.into_values().collect();
    let chosen = candidates.into_iter().enumerate();
    chosen.map(|(at, (plain, original))| original.filter(|_| kept.contains(&at)).map_or(plain, str::to_owned)).collect()
}

/// The name that another program gave: the label, if the name was made from it and free layout can hold it.
fn original<'m>(name: &Name, label: Option<&'m str>) -> Option<&'m str> {
    label.filter(|label| {
        !label.is_empty() && !label.contains(char::is_whitespace) && *label != MARKER && names::escape(label) == *name
    })
}

/// A name for the objective that no row has.
fn objective_name(rows: &[Vec<String>]) -> String {
    let taken: HashSet<&str> = rows.iter().flatten().map(String::as_str).collect();
    let mut name = "aim".to_owned();
    while taken.contains(name.as_str()) {
        name.push('.');
    }
    name
}

struct File<'m> {
    title: Option<&'m str>,
    program: &'m Program,
    sides: Vec<Vec<Side>>,
    rows: Vec<Vec<String>>,
    columns: Vec<String>,
    objective: String,
}

impl File<'_> {
    fn text(&self) -> String {
        let mut text = String::new();
        match self.title {
            Some(title) => line(&mut text, format_args!("NAME {}", Plain(title))),
            None => line(&mut text, format_args!("NAME")),
        }
        if self.program.sense == Sense::Maximise {
            text.push_str("OBJSENSE\n    MAX\n");
        }
        text.push_str("ROWS\n");
        line(&mut text, format_args!(" N {}", self.objective));
        for (name, side) in self.stated() {
            line(&mut text, format_args!(" {} {name}", side.kind));
        }
        text.push_str("COLUMNS\n");
        for (name, column) in self.columns.iter().zip(&self.program.columns) {
            self.column(&mut text, name, column);
        }
        text.push_str("RHS\n");
        if self.program.offset != 0.0 {
            line(&mut text, format_args!("    RHS {} {}", self.objective, shortest(-self.program.offset)));
        }
        for (name, side) in self.stated().filter(|(_, side)| side.right != 0.0) {
            line(&mut text, format_args!("    RHS {name} {}", shortest(side.right)));
        }
        if self.stated().any(|(_, side)| side.range.is_some()) {
            text.push_str("RANGES\n");
        }
        for (name, range) in self.stated().filter_map(|(name, side)| side.range.map(|range| (name, range))) {
            line(&mut text, format_args!("    RNG {name} {}", shortest(range)));
        }
        text.push_str("BOUNDS\n");
        for (name, column) in self.columns.iter().zip(&self.program.columns) {
            bounds(&mut text, name, column);
        }
        text.push_str("ENDATA\n");
        text
    }

    fn stated(&self) -> impl Iterator<Item = (&str, &Side)> {
        let names = self.rows.iter().flatten().map(String::as_str);
        names.zip(self.sides.iter().flatten())
    }

    fn column(&self, text: &mut String, name: &str, column: &Column) {
        let entries = || {
            let sides = column.entries.iter().map(|&(row, value)| (&self.rows[row.0], value));
            sides.flat_map(|(names, value)| names.iter().map(move |row| (row, value)))
        };
        // A column is there only if some line names it.
        if column.aim != 0.0 || entries().next().is_none() {
            line(text, format_args!("    {name} {} {}", self.objective, shortest(column.aim)));
        }
        for (row, value) in entries() {
            line(text, format_args!("    {name} {row} {}", shortest(value)));
        }
    }
}

/// The bounds of a column, where they are not from 0 up. Zero below is said wherever a reader might doubt it.
fn bounds(text: &mut String, name: &str, column: &Column) {
    let Column { lower, upper, .. } = *column;
    let mut bound = |kind: &str, value: f64| line(text, format_args!(" {kind} BND {name} {}", shortest(value)));
    if (lower + 0.0).to_bits() == (upper + 0.0).to_bits() {
        return bound("FX", lower);
    }
    match (lower.is_finite(), upper.is_finite()) {
        (false, false) => return line(text, format_args!(" FR BND {name}")),
        (false, true) => line(text, format_args!(" MI BND {name}")),
        (true, _) if lower != 0.0 || upper <= 0.0 => bound("LO", lower),
        (true, _) => {}
    }
    if upper.is_finite() {
        line(text, format_args!(" UP BND {name} {}", shortest(upper)));
    }
}

fn line(text: &mut String, content: std::fmt::Arguments<'_>) {
    // Writing to a string cannot fail.
    let _ = text.write_fmt(content);
    text.push('\n');
}
