//! Random edits of a program, one of each kind.

use millreeve::lp::{Column, Key, Program, Row, RowIndex};

use crate::rng::Rng;

/// An edit of one kind: from a program to the edited one.
pub(crate) type Edit = fn(&mut Rng, &Program) -> Program;

/// Every kind of edit, with a word for it.
pub(crate) const EDITS: [(&str, Edit); 8] = [
    ("price", price),
    ("bound of a column", column_bound),
    ("bound of a row", row_bound),
    ("coefficient", coefficient),
    ("new column", new_column),
    ("new row", new_row),
    ("column withdrawn", column_withdrawn),
    ("row withdrawn", row_withdrawn),
];

/// A factor near 1 or far from it.
fn factor(rng: &mut Rng) -> f64 {
    *rng.pick(&[0.5, 0.9, 0.99, 1.01, 1.1, 2.0])
}

fn price(rng: &mut Rng, program: &Program) -> Program {
    let mut edited = program.clone();
    let at = rng.below(edited.columns.len());
    let column = &mut edited.columns[at];
    column.aim = if column.aim == 0.0 { rng.between(-1.0, 1.0) } else { column.aim * factor(rng) };
    edited
}

fn column_bound(rng: &mut Rng, program: &Program) -> Program {
    let mut edited = program.clone();
    let at = rng.below(edited.columns.len());
    let column = &mut edited.columns[at];
    if column.upper.is_finite() {
        column.upper = column.lower.max(column.upper * factor(rng));
    } else {
        column.upper = column.lower.max(0.0) + rng.between(0.0, 100.0);
    }
    edited
}

fn row_bound(rng: &mut Rng, program: &Program) -> Program {
    let mut edited = program.clone();
    let at = rng.below(edited.rows.len());
    let row = &mut edited.rows[at];
    let bound = if row.upper.is_finite() { row.upper } else { row.lower };
    let moved = if bound == 0.0 { rng.between(-1.0, 1.0) } else { bound * factor(rng) };
    if row.lower >= row.upper {
        (row.lower, row.upper) = (moved, moved);
    } else if row.upper.is_finite() {
        row.upper = moved.max(row.lower);
    } else {
        row.lower = moved;
    }
    edited
}

fn coefficient(rng: &mut Rng, program: &Program) -> Program {
    let mut edited = program.clone();
    let used: Vec<usize> = (0..edited.columns.len()).filter(|&at| !edited.columns[at].entries.is_empty()).collect();
    if used.is_empty() {
        return edited;
    }
    let entries = &mut edited.columns[*rng.pick(&used)].entries;
    let at = rng.below(entries.len());
    entries[at].1 *= factor(rng);
    edited
}

/// A column much like another, a little dearer or cheaper.
fn new_column(rng: &mut Rng, program: &Program) -> Program {
    let mut edited = program.clone();
    let like = rng.pick(&program.columns);
    let entries = like.entries.iter().map(|&(row, value)| (row, value * rng.between(0.5, 1.5))).collect();
    edited.columns.push(Column {
        key: Key::new("activities.~new"),
        aim: like.aim * factor(rng),
        lower: 0.0,
        upper: f64::INFINITY,
        entries,
    });
    edited.columns.sort_by(|a, b| a.key.cmp(&b.key));
    edited
}

/// A row over a handful of columns that are often used.
fn new_row(rng: &mut Rng, program: &Program) -> Program {
    let mut edited = program.clone();
    let row = RowIndex(edited.rows.len());
    edited.rows.push(Row { key: Key::new("limits.~new"), lower: f64::NEG_INFINITY, upper: rng.between(0.0, 200.0) });
    for _ in 0..5 {
        let at = rng.below(edited.columns.len());
        let entries = &mut edited.columns[at].entries;
        if entries.last().is_none_or(|entry| entry.0 != row) {
            entries.push((row, rng.between(0.1, 2.0)));
        }
    }
    edited
}

/// Never the last one: there would be nothing left to edit.
fn column_withdrawn(rng: &mut Rng, program: &Program) -> Program {
    let mut edited = program.clone();
    if edited.columns.len() == 1 {
        return edited;
    }
    edited.columns.remove(rng.below(program.columns.len()));
    edited
}

/// Never the last one, likewise.
fn row_withdrawn(rng: &mut Rng, program: &Program) -> Program {
    let mut edited = program.clone();
    if edited.rows.len() == 1 {
        return edited;
    }
    let gone = rng.below(program.rows.len());
    edited.rows.remove(gone);
    for column in &mut edited.columns {
        column.entries.retain(|entry| entry.0.0 != gone);
        for (row, _) in &mut column.entries {
            row.0 -= usize::from(row.0 > gone);
        }
    }
    edited
}
