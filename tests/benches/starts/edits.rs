//! Edits that are meant to break the optimality of a known optimum, one of each kind.

use millreeve::lp::{Column, Key, Program, Row, RowIndex, Sense};
use millreeve::solver::basis::Position;
use millreeve::solver::message::Optimum;

use crate::rng::Rng;

/// An edit of one kind.
pub(crate) type Edit = fn(&mut Rng, &Program, &Optimum) -> Option<Program>;

/// Every kind, with a word for it and how many times a cold solve it should at least be.
pub(crate) const KINDS: [(&str, Edit, f64); 8] = [
    ("new activity", new_activity, 25.0),
    ("price", price, 25.0),
    ("capacity", capacity, 25.0),
    ("new constraint", new_constraint, 25.0),
    ("activity withdrawn", activity_withdrawn, 10.0),
    ("constraint withdrawn", constraint_withdrawn, 10.0),
    ("recipe in the mix", recipe, 1.0),
    ("five at once", five_at_once, 6.0),
];

fn in_the_mix(program: &Program, optimum: &Optimum) -> Vec<usize> {
    let made = |&at: &usize| optimum.basis.columns[at] == Position::Basic && optimum.levels[at].abs() > 1e-6;
    (0..program.columns.len()).filter(made).collect()
}

fn binding(program: &Program, optimum: &Optimum) -> Vec<usize> {
    let binds = |&at: &usize| optimum.basis.rows[at] != Position::Basic && optimum.worths[at].abs() > 1e-9;
    (0..program.rows.len()).filter(binds).collect()
}

fn sign(program: &Program) -> f64 {
    if program.sense == Sense::Maximise { 1.0 } else { -1.0 }
}

/// Much like an activity in the mix, and a little better than what it takes is worth.
fn new_activity(rng: &mut Rng, program: &Program, optimum: &Optimum) -> Option<Program> {
    let like = &program.columns[*rng.pick(&some(in_the_mix(program, optimum))?)];
    let entries: Vec<_> = like.entries.iter().map(|&(row, value)| (row, value * rng.between(0.5, 1.5))).collect();
    let charged: f64 = entries.iter().map(|&(row, value)| value * optimum.worths[row.0]).sum();
    let mut edited = program.clone();
    edited.columns.push(Column {
        key: Key::new("activities.~new"),
        lower: 0.0,
        upper: f64::INFINITY,
        aim: charged + sign(program) * charged.abs().max(0.1) * rng.between(0.02, 0.2),
        entries,
    });
    Some(sorted(edited))
}

fn price(rng: &mut Rng, program: &Program, optimum: &Optimum) -> Option<Program> {
    let mut edited = program.clone();
    let at = *rng.pick(&some(in_the_mix(program, optimum))?);
    let column = &mut edited.columns[at];
    let worse = sign(program) * column.aim.abs().max(0.1) * rng.between(0.05, 0.5);
    column.aim += if rng.below(3) == 0 { worse } else { -worse };
    Some(edited)
}

fn capacity(rng: &mut Rng, program: &Program, optimum: &Optimum) -> Option<Program> {
    let mut edited = program.clone();
    let at = *rng.pick(&some(binding(program, optimum))?);
    let upper = optimum.basis.rows[at] == Position::AtUpper;
    let row = &mut edited.rows[at];
    let bound = if upper { row.upper } else { row.lower };
    let moved = bound + bound.abs().max(1.0) * rng.between(-0.3, 0.1);
    if row.lower >= row.upper {
        (row.lower, row.upper) = (moved, moved);
    } else if upper {
        row.upper = moved.max(row.lower);
    } else {
        row.lower = moved.min(row.upper);
    }
    Some(edited)
}

/// A few of those in the mix together at most nine tenths of what they are.
fn new_constraint(rng: &mut Rng, program: &Program, optimum: &Optimum) -> Option<Program> {
    let made = some(in_the_mix(program, optimum))?;
    let mut chosen: Vec<usize> = (0..5).map(|_| *rng.pick(&made)).collect();
    chosen.sort_unstable();
    chosen.dedup();
    let mut edited = program.clone();
    let row = RowIndex(edited.rows.len());
    let mut sum = 0.0;
    for at in chosen {
        let coefficient = rng.between(0.1, 2.0) * optimum.levels[at].signum();
        sum += coefficient * optimum.levels[at];
        edited.columns[at].entries.push((row, coefficient));
    }
    edited.rows.push(Row { key: Key::new("~new"), lower: f64::NEG_INFINITY, upper: sum * rng.between(0.8, 0.98) });
    Some(edited)
}

fn activity_withdrawn(rng: &mut Rng, program: &Program, optimum: &Optimum) -> Option<Program> {
    let mut edited = program.clone();
    edited.columns.remove(*rng.pick(&some(in_the_mix(program, optimum))?));
    Some(edited)
}

fn constraint_withdrawn(rng: &mut Rng, program: &Program, optimum: &Optimum) -> Option<Program> {
    let gone = *rng.pick(&some(binding(program, optimum))?);
    let mut edited = program.clone();
    edited.rows.remove(gone);
    for column in &mut edited.columns {
        column.entries.retain(|entry| entry.0.0 != gone);
        for (row, _) in &mut column.entries {
            row.0 -= usize::from(row.0 > gone);
        }
    }
    Some(edited)
}

fn recipe(rng: &mut Rng, program: &Program, optimum: &Optimum) -> Option<Program> {
    let mut edited = program.clone();
    let at = *rng.pick(&some(in_the_mix(program, optimum))?);
    let entries = &mut edited.columns[at].entries;
    let entry = rng.below(entries.len());
    entries[entry].1 *= rng.between(0.7, 1.3);
    Some(edited)
}

fn five_at_once(rng: &mut Rng, program: &Program, optimum: &Optimum) -> Option<Program> {
    // Those that keep rows and columns in place come first: the optimum speaks of the program as it was.
    let mut edited = program.clone();
    for edit in [price, capacity, recipe, new_constraint, new_activity] {
        let made = edit(rng, program, optimum)?;
        edited = overlaid(&edited, program, &made);
    }
    Some(edited)
}

/// `edited` with what differs between `from` and `to`.
fn overlaid(edited: &Program, from: &Program, to: &Program) -> Program {
    millreeve::lp::Difference::between(from, to).apply(edited).unwrap()
}

fn some(list: Vec<usize>) -> Option<Vec<usize>> {
    (!list.is_empty()).then_some(list)
}

fn sorted(mut program: Program) -> Program {
    program.columns.sort_by(|a, b| a.key.cmp(&b.key));
    program
}
