//! Turning the program that a live instance holds into another, keeping its basis.

use std::collections::BTreeMap;

use super::batch::Batch;
use super::instance::Instance;
use super::live::Refusal;
use crate::lp::{Difference, Key, Program, places};

/// Turns `from`, which `instance` holds, into `to`, as `difference` says.
///
/// The basis stays valid if what is removed is out of the basis (columns) or in it (rows): see [`super::soft`].
///
/// # Errors
/// When the solver refuses a change.
pub fn change(instance: &mut Instance, from: &Program, to: &Program, difference: &Difference) -> Result<(), Refusal> {
    if difference.sense.is_some() || difference.offset.is_some() {
        instance.live.set_aim(to.sense, to.offset)?;
    }
    withdraw(instance, from, difference)?;
    let carried = carry(instance, from, to);
    numbers(instance, to, &carried, difference)?;
    add(instance, to, carried, difference)
}

/// Where the columns and rows of the new program lie; `None` for what is yet to be added.
struct Carried {
    columns: Vec<Option<usize>>,
    rows: Vec<Option<usize>>,
}

fn withdraw(instance: &mut Instance, from: &Program, difference: &Difference) -> Result<(), Refusal> {
    if !difference.removed_columns.is_empty() {
        let gone = positions(&difference.removed_columns, &instance.columns, |key| from.column(key).map(|at| at.0));
        instance.live.delete_columns(&gone)?;
        close_up(&mut instance.columns, &gone);
    }
    if !difference.removed_rows.is_empty() {
        let gone = positions(&difference.removed_rows, &instance.rows, |key| from.row(key).map(|at| at.0));
        instance.live.delete_rows(&gone)?;
        close_up(&mut instance.rows, &gone);
    }
    Ok(())
}

fn positions(keys: &[Key], map: &[usize], find: impl Fn(&Key) -> Option<usize>) -> Vec<usize> {
    let mut positions: Vec<usize> = keys.iter().filter_map(find).map(|at| map[at]).collect();
    positions.sort_unstable();
    positions
}

/// Moves positions up past those that are gone (ascending). Positions that are themselves gone are void afterwards.
fn close_up(map: &mut [usize], gone: &[usize]) {
    for at in map {
        *at -= gone.partition_point(|&lost| lost < *at);
    }
}

fn carry(instance: &Instance, from: &Program, to: &Program) -> Carried {
    let lie = |places: Vec<Option<usize>>, map: &[usize]| -> Vec<Option<usize>> {
        places.into_iter().map(|place| place.map(|at| map[at])).collect()
    };
    Carried {
        columns: lie(places(&from.columns, &to.columns, |column| &column.key), &instance.columns),
        rows: lie(places(&from.rows, &to.rows, |row| &row.key), &instance.rows),
    }
}

fn numbers(instance: &mut Instance, to: &Program, carried: &Carried, difference: &Difference) -> Result<(), Refusal> {
    let column = |key| to.column(key).and_then(|at| carried.columns[at.0]);
    let row = |key| to.row(key).and_then(|at| carried.rows[at.0]);
    for (key, aim) in &difference.aims {
        if let Some(at) = column(key) {
            instance.live.set_column_aim(at, *aim)?;
        }
    }
    for (key, lower, upper) in &difference.column_bounds {
        if let Some(at) = column(key) {
            instance.live.set_column_bounds(at, *lower, *upper)?;
        }
    }
    for (key, lower, upper) in &difference.row_bounds {
        if let Some(at) = row(key) {
            instance.live.set_row_bounds(at, *lower, *upper)?;
        }
    }
    for (key, row_key, value) in &difference.entries {
        if let (Some(at), Some(row)) = (column(key), row(row_key)) {
            instance.live.set_entry(row, at, *value)?;
        }
    }
    Ok(())
}

fn add(instance: &mut Instance, to: &Program, mut carried: Carried, difference: &Difference) -> Result<(), Refusal> {
    if !difference.added_rows.is_empty() {
        let mut entries: BTreeMap<&Key, Vec<(usize, f64)>> = BTreeMap::new();
        for (key, row, value) in &difference.entries {
            if let Some(at) = to.column(key).and_then(|at| carried.columns[at.0]) {
                entries.entry(row).or_default().push((at, *value));
            }
        }
        let mut batch = Batch::default();
        for (place, row) in difference.added_rows.iter().enumerate() {
            batch.push(0.0, row.lower, row.upper, entries.remove(&row.key).unwrap_or_default());
            if let Some(at) = to.row(&row.key) {
                carried.rows[at.0] = Some(instance.live.rows() + place);
            }
        }
        instance.live.add_rows(&batch)?;
    }
    instance.rows = complete(carried.rows)?;
    if !difference.added_columns.is_empty() {
        let mut batch = Batch::default();
        for (place, column) in difference.added_columns.iter().enumerate() {
            let entries =
                column.entries.iter().filter_map(|(row, value)| to.row(row).map(|at| (instance.rows[at.0], *value)));
            batch.push(column.aim, column.lower, column.upper, entries);
            if let Some(at) = to.column(&column.key) {
                carried.columns[at.0] = Some(instance.live.columns() + place);
            }
        }
        instance.live.add_columns(&batch)?;
    }
    instance.columns = complete(carried.columns)?;
    Ok(())
}

fn complete(map: Vec<Option<usize>>) -> Result<Vec<usize>, Refusal> {
    map.into_iter().collect::<Option<_>>().ok_or(Refusal("a difference that does not fit"))
}
