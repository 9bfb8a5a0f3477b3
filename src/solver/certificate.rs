//! Why there is no plan, or no end to one: the solver's rays, confirmed by our own arithmetic.
//!
//! Farkas' lemma: a program has no point if some combination of its rows must be larger than the bounds of its columns allow.
//! Extreme rays of the alternative system give minimal contradictions (Gleeson & Ryan, ORSA Journal on Computing 2, 1990).

use super::message::{Conflict, Growth, Rule};
use super::sum::Sum;
use crate::lp::{Column, Key, Program, Row, RowIndex};

/// Multipliers smaller than this share of the largest are noise.
const NOISE: f64 = 1e-9;

/// The contradiction that `ray`, one multiplier per row, shows in `program`.
#[must_use]
pub fn conflict(program: &Program, ray: &[f64]) -> Conflict {
    let flipped: Vec<f64> = ray.iter().map(|multiplier| -multiplier).collect();
    let (first, second) = (combine(program, ray), combine(program, &flipped));
    if second.proven && !first.proven { second } else { first }
}

/// Columns or rows whose own bounds contradict each other, or rows that no column touches and that are not kept at 0.
#[must_use]
pub fn plain_contradiction(program: &Program) -> Option<Conflict> {
    let columns =
        program.columns.iter().filter(|c| c.lower > c.upper).flat_map(|c| crossed(&c.key, false, c.lower, c.upper));
    let rows = program.rows.iter().filter(|r| r.lower > r.upper).flat_map(|r| crossed(&r.key, true, r.lower, r.upper));
    let rules: Vec<Rule> = columns.chain(rows).take(2).collect();
    if !rules.is_empty() {
        return Some(Conflict { rules, proven: true, minimal: true });
    }
    let mut touched = vec![false; program.rows.len()];
    for &(row, _) in program.columns.iter().flat_map(|column| &column.entries) {
        touched[row.0] = true;
    }
    let broken =
        program.rows.iter().zip(touched).find(|(row, touched)| !touched && (row.lower > 0.0 || row.upper < 0.0));
    broken.map(|(row, _)| Conflict { rules: vec![row_rule(row, row.upper < 0.0)], proven: true, minimal: true })
}

/// The growth that `ray`, one rate per column, shows in `program`.
#[must_use]
pub fn growth(program: &Program, ray: &[f64]) -> Growth {
    let largest = ray.iter().fold(0.0_f64, |largest, rate| largest.max(rate.abs()));
    let rates: Vec<f64> =
        ray.iter().map(|&rate| if rate.abs() <= NOISE * largest { 0.0 } else { rate / largest }).collect();
    let mut sums = vec![Sum::default(); program.rows.len()];
    let mut scales = vec![0.0_f64; program.rows.len()];
    let mut gain = Sum::default();
    for (column, &rate) in program.columns.iter().zip(&rates) {
        gain.add_product(program.sense.sign() * column.aim, rate);
        for &(row, value) in &column.entries {
            sums[row.0].add_product(value, rate);
            scales[row.0] = scales[row.0].max((value * rate).abs());
        }
    }
    let goes_on = |rate: f64, scale: f64, lower: f64, upper: f64| {
        let noise = NOISE * scale.max(1.0);
        (rate <= noise || upper.is_infinite()) && (rate >= -noise || lower.is_infinite())
    };
    let columns_go = program.columns.iter().zip(&rates).all(|(c, &rate)| goes_on(rate, 0.0, c.lower, c.upper));
    let rows_go = program
        .rows
        .iter()
        .zip(sums.iter().zip(&scales))
        .all(|(r, (sum, &scale))| goes_on(sum.value(), scale, r.lower, r.upper));
    let named = program.columns.iter().zip(&rates).filter(|&(_, &rate)| rate != 0.0);
    Growth {
        rates: named.map(|(column, &rate)| (column.key.clone(), rate)).collect(),
        proven: largest > 0.0 && columns_go && rows_go && gain.value() < -NOISE,
    }
}

/// A single column that neither a bound nor a row keeps from improving the aim for ever.
#[must_use]
pub fn plain_growth(program: &Program) -> Option<Growth> {
    let limit = |rate: f64, lower: f64, upper: f64| if rate > 0.0 { upper } else { lower };
    let rate = |column: &Column| (-program.sense.sign() * column.aim).signum();
    let grows = |column: &Column| {
        let rate = rate(column);
        let row_goes = |&(row, value): &(RowIndex, f64)| {
            let row = &program.rows[row.0];
            value == 0.0 || limit(rate * value, row.lower, row.upper).is_infinite()
        };
        column.aim != 0.0
            && limit(rate, column.lower, column.upper).is_infinite()
            && column.entries.iter().all(row_goes)
    };
    let at = program.columns.iter().position(grows)?;
    let mut ray = vec![0.0; program.columns.len()];
    ray[at] = rate(&program.columns[at]);
    Some(growth(program, &ray))
}

/// What rows combined by `ray` must at least come to, and what the columns' bounds allow at most.
fn combine(program: &Program, ray: &[f64]) -> Conflict {
    let largest = ray.iter().fold(0.0_f64, |largest, multiplier| largest.max(multiplier.abs()));
    let ray: Vec<f64> = ray.iter().map(|&y| if y.abs() <= NOISE * largest { 0.0 } else { y / largest }).collect();
    let mut rules = Vec::new();
    let mut excess = Sum::default();
    let mut scale = 1.0_f64;
    let mut endless = largest == 0.0;
    for (row, &multiplier) in program.rows.iter().zip(&ray) {
        if multiplier != 0.0 {
            let rule = row_rule(row, multiplier < 0.0);
            endless |= rule.bound.is_infinite();
            excess.add_product(multiplier, rule.bound);
            scale = scale.max((multiplier * rule.bound).abs());
            rules.push(rule);
        }
    }
    for column in &program.columns {
        let weight = weight(column, &ray);
        if weight != 0.0 {
            let upper = weight > 0.0;
            let bound = if upper { column.upper } else { column.lower };
            endless |= bound.is_infinite();
            excess.add_product(-weight, bound);
            scale = scale.max((weight * bound).abs());
            rules.push(Rule { key: column.key.clone(), is_row: false, upper, bound });
        }
    }
    Conflict { rules, proven: !endless && excess.value() > NOISE * scale, minimal: false }
}

/// What the combination of rows weighs a column with; 0 where it is all rounding.
fn weight(column: &Column, ray: &[f64]) -> f64 {
    let mut sum = Sum::default();
    let mut scale = 0.0_f64;
    for &(row, value) in &column.entries {
        sum.add_product(value, ray[row.0]);
        scale = scale.max((value * ray[row.0]).abs());
    }
    let weight = sum.value();
    if weight.abs() <= NOISE * scale { 0.0 } else { weight }
}

fn row_rule(row: &Row, upper: bool) -> Rule {
    Rule { key: row.key.clone(), is_row: true, upper, bound: if upper { row.upper } else { row.lower } }
}

fn crossed(key: &Key, is_row: bool, lower: f64, upper: f64) -> [Rule; 2] {
    let rule = |is_upper, bound| Rule { key: key.clone(), is_row, upper: is_upper, bound };
    [rule(false, lower), rule(true, upper)]
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::lp::Sense;

    #[test]
    fn what_is_in_no_row_may_grow_for_ever() {
        let column = |lower, upper, aim| Column { key: Key::new("x"), lower, upper, aim, entries: Vec::new() };
        let alone =
            |sense, column| plain_growth(&Program { sense, offset: 0.0, columns: vec![column], rows: Vec::new() });
        for (sense, lower, upper, aim, rate) in [
            (Sense::Maximise, 0.0, f64::INFINITY, 3.0, 1.0),
            (Sense::Maximise, f64::NEG_INFINITY, 0.0, -3.0, -1.0),
            (Sense::Minimise, f64::NEG_INFINITY, 0.0, 3.0, -1.0),
        ] {
            let growth = alone(sense, column(lower, upper, aim));
            assert_eq!(growth, Some(Growth { rates: vec![(Key::new("x"), rate)], proven: true }));
        }
        assert_eq!(alone(Sense::Maximise, column(0.0, 9.0, 3.0)), None);
        assert_eq!(alone(Sense::Minimise, column(0.0, f64::INFINITY, 3.0)), None);
    }
}
