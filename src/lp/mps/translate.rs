//! From what an MPS file says to the model it stands for.

use std::collections::BTreeMap;

use super::card::Layout;
use super::draft::{Draft, DraftColumn, DraftRow, RowKind, Stated};
use super::error::{Flaw, MpsError, Warnings, quoted};
use super::{names, number};
use crate::model::{Activity, Aim, Bound, Horizon, Limit, Model, Name, Term, Value};

/// The model behind `draft`.
pub(super) fn model(draft: &Draft<'_>, layout: Layout, warnings: &mut Warnings) -> Result<Model, MpsError> {
    let objective = objective(draft, warnings)?;
    let aim = draft.aim.unwrap_or(Aim::Minimise);
    let mut bounds = Vec::with_capacity(draft.rows.len());
    for (at, row) in draft.rows.iter().enumerate() {
        bounds.push(if Some(at) == objective { None } else { row_bound(row, warnings)? });
    }
    let mut terms: Vec<BTreeMap<Term, Value>> = vec![BTreeMap::new(); draft.rows.len()];
    let mut activities = BTreeMap::new();
    for column in &draft.columns {
        let (name, label) = name(column.name, layout);
        let mut activity = activity(column, label, warnings);
        for &(at, value) in column.entries.iter().filter(|&&(_, value)| value != 0.0) {
            if Some(at) == objective {
                *(if aim == Aim::Maximise { &mut activity.price } else { &mut activity.cost }) = Value::Every(value);
            } else if bounds[at].is_some() {
                terms[at].insert(Term::Activity(name.clone()), Value::Every(value));
            }
        }
        activities.insert(name, activity);
    }
    let mut limits = BTreeMap::new();
    for ((row, bound), terms) in draft.rows.iter().zip(bounds).zip(terms) {
        let Some(bound) = bound else { continue };
        let (name, label) = name(row.name, layout);
        limits.insert(name, Limit { label, terms, bound, ..Limit::default() });
    }
    Ok(Model {
        materials: BTreeMap::new(),
        title: draft.title.clone(),
        currency: None,
        aim,
        constant: objective.and_then(|at| draft.rows[at].right).map_or(0.0, |right| 0.0 - right.value),
        horizon: Horizon::single(),
        resources: BTreeMap::new(),
        activities,
        limits,
    })
}

/// Which row is the objective: the one named, or else the first free one.
fn objective(draft: &Draft<'_>, warnings: &mut Warnings) -> Result<Option<usize>, MpsError> {
    if let Some((name, line)) = draft.objective {
        let at = draft.row(name).map_err(|flaw| flaw.at(line))?;
        if draft.rows[at].kind != RowKind::Free {
            let message = format!("row {} is held by bounds and cannot be the objective", quoted(name));
            return Err(Flaw::new(message, "name a row of kind N").at(line));
        }
        return Ok(Some(at));
    }
    let first = draft.rows.iter().position(|row| row.kind == RowKind::Free);
    if first.is_none() {
        warnings.add(1, || "no row is of kind N: there is no objective, every plan has the aim 0".to_owned());
    }
    Ok(first)
}

/// What holds a row; `None` where nothing does, so that it is left out.
fn row_bound(row: &DraftRow<'_>, warnings: &mut Warnings) -> Result<Option<Bound>, MpsError> {
    if row.kind == RowKind::Free {
        warnings.add(row.line, || format!("row {} is free and not the objective; it is left out", quoted(row.name)));
        return Ok(None);
    }
    let right = row.right.map_or(0.0, |right| right.value);
    let (lower, upper) = match (row.kind, row.range.map(|range| range.value)) {
        (RowKind::AtMost, None) => (f64::NEG_INFINITY, right),
        (RowKind::AtLeast, None) => (right, f64::INFINITY),
        (_, None) => (right, right),
        (RowKind::AtMost, Some(range)) => (right - range.abs(), right),
        (RowKind::AtLeast, Some(range)) => (right, right + range.abs()),
        (_, Some(range)) if range < 0.0 => (right + range, right),
        (_, Some(range)) => (right, right + range),
    };
    let stated = row.range.or(row.right).map_or(row.line, |Stated { line, .. }| line);
    if lower.is_nan() || upper.is_nan() || lower == f64::INFINITY || upper == f64::NEG_INFINITY {
        let message = format!("the right-hand side of row {} leaves its sum no value", quoted(row.name));
        return Err(Flaw::new(message, "it may be infinite only on the side that sets no limit").at(stated));
    }
    if !number::may_bound(lower) || !number::may_bound(upper) {
        let message = format!("the range of row {} reaches beyond 1e15", quoted(row.name));
        return Err(Flaw::new(message, "choose larger units, or a range of 1e20 or more for no limit").at(stated));
    }
    if lower.is_infinite() && upper.is_infinite() {
        warnings.add(stated, || format!("nothing holds row {}; it is left out", quoted(row.name)));
        return Ok(None);
    }
    let (lower, upper) = (lower + 0.0, upper + 0.0);
    Ok(Some(if lower.to_bits() == upper.to_bits() {
        Bound::Equals(Value::Every(lower))
    } else {
        Bound::Between(Value::Every(lower), Value::Every(upper))
    }))
}

fn activity(column: &DraftColumn<'_>, label: Option<String>, warnings: &mut Warnings) -> Activity {
    let upper = column.upper.map_or(f64::INFINITY, |upper| upper.value);
    let lower = match (column.lower, column.upper) {
        (Some(lower), _) => lower.value,
        (None, Some(Stated { value, line })) if value < 0.0 => {
            warnings.add(line, || {
                format!("the upper bound of column {} is negative, so it has no lower bound", quoted(column.name))
            });
            f64::NEG_INFINITY
        }
        (None, _) => 0.0,
    };
    Activity { label, at_least: Value::Every(lower), at_most: Value::Every(upper), ..Activity::default() }
}

/// The name of ours for a name of the file, and the label that keeps the file's own where the two differ.
fn name(text: &str, layout: Layout) -> (Name, Option<String>) {
    // No name has blanks in free layout, so one that spells a name with blanks can only be what writing made of it.
    if layout == Layout::Free
        && let Ok(name) = Name::new(text)
        && let Some(original) = names::unescape(&name).filter(|original| original.contains(char::is_whitespace))
    {
        return (name, Some(original));
    }
    let name = names::escape(text);
    let label = (name.as_str() != text).then(|| text.to_owned());
    (name, label)
}
