//! Making a contradiction smaller: a rule that the contradiction does without is taken out, until each that is left is needed.
//!
//! The deletion filter of Chinneck & Dravnieks, ORSA Journal on Computing 3 (1991). Each step is a small program of the rules left;
//! where it has no point either, the support of its certificate is what is left next.

use std::collections::BTreeSet;
use std::time::Duration;

use super::cold::{self, Reached};
use super::message::{Conflict, Outcome, Rule};
use super::stop::Stop;
use crate::lp::{Column, Program, Row, RowIndex, Sense};

/// A contradiction of more rules is told as it is: nobody reads that many, and the steps would take long.
const MOST_RULES: usize = 120;

/// `conflict`, a proven one of `program`, without the rules it does without.
///
/// That a level is at least 0 is no rule anybody gave: it always holds, and is not tried. What of it the contradiction leans on comes
/// last.
#[must_use]
pub fn shrink(program: &Program, conflict: Conflict, limit: Duration, stop: &Stop) -> Conflict {
    if !conflict.proven || conflict.rules.len() > MOST_RULES {
        return conflict;
    }
    let (mut natural, mut given): (Vec<Rule>, Vec<Rule>) = conflict.rules.into_iter().partition(is_natural);
    let mut needed = 0;
    while needed < given.len() && !stop.is_stopped() {
        let mut without = given.clone();
        without.remove(needed);
        match cold::solve(&only(program, &without), limit, stop).end {
            // What is left contradicts itself: the rules its certificate uses are all that matters. Those found needed stay so.
            Reached::Other(Outcome::Infeasible(Conflict { rules: fewer, proven: true, .. })) => {
                given.retain(|rule| fewer.contains(rule));
                natural = fewer.into_iter().filter(is_natural).collect();
            }
            _ => needed += 1,
        }
    }
    let minimal = needed == given.len();
    given.append(&mut natural);
    Conflict { rules: given, proven: true, minimal }
}

/// That a level is at least 0.
fn is_natural(rule: &Rule) -> bool {
    !rule.is_row && !rule.upper && rule.bound.abs() <= 0.0
}

/// The program of some rules alone: what they do not bound is free, but for levels that are at least 0.
fn only(program: &Program, rules: &[Rule]) -> Program {
    let bounds = |is_row: bool, key: &crate::lp::Key| {
        let mut bounds = (f64::NEG_INFINITY, f64::INFINITY);
        for rule in rules.iter().filter(|rule| rule.is_row == is_row && rule.key == *key) {
            if rule.upper { bounds.1 = rule.bound } else { bounds.0 = rule.bound }
        }
        bounds
    };
    let named: BTreeSet<_> = rules.iter().filter(|rule| rule.is_row).map(|rule| &rule.key).collect();
    let mut places = vec![None; program.rows.len()];
    let mut rows = Vec::new();
    for (at, row) in program.rows.iter().enumerate().filter(|(_, row)| named.contains(&row.key)) {
        let (lower, upper) = bounds(true, &row.key);
        places[at] = Some(RowIndex(rows.len()));
        rows.push(Row { key: row.key.clone(), lower, upper });
    }
    let columns = program.columns.iter().filter_map(|column| {
        let entries: Vec<_> = column.entries.iter().filter_map(|&(row, value)| Some((places[row.0]?, value))).collect();
        let (lower, upper) = bounds(false, &column.key);
        let lower = if column.lower.abs() <= 0.0 { 0.0 } else { lower };
        let matters = !entries.is_empty() || upper.is_finite() || (lower.is_finite() && lower.abs() > 0.0);
        matters.then(|| Column { key: column.key.clone(), lower, upper, aim: 0.0, entries })
    });
    Program { sense: Sense::Minimise, offset: 0.0, columns: columns.collect(), rows }
}
