//! Whether a model is within the caps on its size.

use super::calendar::Calendar;
use super::findings::{Findings, Span};
use super::known::Tags;
use super::most::{
    MOST_ACTIVITIES, MOST_COEFFICIENTS, MOST_COLUMNS, MOST_LIMITS, MOST_LISTED, MOST_MATERIALS, MOST_RESOURCES,
    MOST_ROWS,
};
use super::toml_types::Table;
use crate::model::types::{Flow, Material, Model, Term};
use crate::model::value::Value;
use crate::model::values;

/// Adds a fault for each cap that the model exceeds.
pub(super) fn check(root: &Table<'_>, model: &Model, calendar: &Calendar, tags: &Tags, findings: &mut Findings) {
    if calendar.is_full() {
        let message = format!("the model lists more than {MOST_LISTED} numbers by period");
        findings.add(&span(root, "periods"), "too-many", message, "plan fewer periods, or split the model");
    }
    let mut crowded = false;
    for (section, count, most) in counts(model) {
        if count > most {
            crowded = true;
            let message = format!("{count} {section} are more than the {most} that one model may have");
            findings.add(&span(root, section), "too-many", message, "split the model");
        }
    }
    let Size { columns, rows, coefficients } = Size::of(model, tags);
    let sizes = [("columns", columns, MOST_COLUMNS), ("rows", rows, MOST_ROWS)];
    for (what, count, most) in sizes.into_iter().filter(|_| !crowded) {
        if count > most {
            let periods = model.horizon.count();
            let message = format!(
                "over {periods} periods the model has {count} {what}, more than the {most} that one model may have"
            );
            findings.add(&span(root, "periods"), "too-many", message, "plan fewer periods, or split the model");
        }
    }
    if coefficients > MOST_COEFFICIENTS {
        let message =
            format!("{coefficients} coefficients are more than the {MOST_COEFFICIENTS} that one model may have");
        let (section, help) = match model.horizon.is_named() {
            true => ("periods", "plan fewer periods, split the model, or sum fewer tags"),
            false => ("limits", "split the model, or sum fewer tags"),
        };
        findings.add(&span(root, section), "too-many", message, help);
    }
}

/// The sections of a model: how many entries each has, and may have.
fn counts(model: &Model) -> [(&'static str, usize, usize); 4] {
    [
        ("resources", model.resources.len(), MOST_RESOURCES),
        ("activities", model.activities.len(), MOST_ACTIVITIES),
        ("materials", model.materials.len(), MOST_MATERIALS),
        ("limits", model.limits.len(), MOST_LIMITS),
    ]
}

/// Whether an edited model exceeds none of the caps that an edit of its tables can reach.
pub(super) fn fit(model: &Model, tags: &Tags) -> bool {
    if counts(model).into_iter().any(|(_, count, most)| count > most) {
        return false;
    }
    let Size { columns, rows, coefficients } = Size::of(model, tags);
    let listed = if model.horizon.count() > 1 { listed(model) } else { 0 };
    columns <= MOST_COLUMNS && rows <= MOST_ROWS && coefficients <= MOST_COEFFICIENTS && listed <= MOST_LISTED
}

fn span(root: &Table<'_>, section: &str) -> Span {
    root.get_key_value(section).map(|(key, _)| key.span()).unwrap_or_default()
}

/// How large the program behind a model is, at most.
struct Size {
    columns: usize,
    rows: usize,
    coefficients: usize,
}

impl Size {
    /// The size of a model in which so many activities carry each tag.
    fn of(model: &Model, tags: &Tags) -> Self {
        let mut size = Self { columns: 0, rows: model.resources.len() + model.limits.len(), coefficients: 0 };
        for resource in model.resources.values() {
            size.add(resource.surge.len(), 0, 1);
        }
        for activity in model.activities.values() {
            let changes = usize::from(activity.change_at_most != Value::Every(f64::INFINITY));
            let rates = activity.uses.len() + activity.draws.len() + activity.makes.len();
            size.add(1, changes, rates + 2 * changes);
        }
        for material in model.materials.values() {
            let Material { purchase, sale, stock, closing, .. } = material;
            let late = sale.iter().filter(|sale| sale.late.is_some()).count();
            let carried = usize::from(stock.is_some() || closing.is_some());
            // A stock stands in the balance of its period and in that of the next; what is late in two demands.
            size.add(purchase.len() + sale.len() + 1, 1, 1);
            size.add(carried, 0, 2);
            size.add(late, late, 3);
        }
        for limit in model.limits.values() {
            let terms: usize = limit.sums().flat_map(|sum| sum.keys().map(|term| width(term, model, tags))).sum();
            // With `per`, each bound has a row of its own.
            let rows = if limit.per.is_some() { 2 } else { 1 };
            size.rows += rows - 1;
            size.coefficients += terms;
        }
        let periods = model.horizon.count();
        Self { columns: size.columns * periods, rows: size.rows * periods, coefficients: size.coefficients * periods }
    }

    /// Adds columns and rows of one period, and the coefficients of each of these columns.
    fn add(&mut self, columns: usize, rows: usize, coefficients: usize) {
        self.columns += columns;
        self.rows += rows;
        self.coefficients += columns * coefficients;
    }
}

/// How many columns a term sums in a period.
fn width(term: &Term, model: &Model, tags: &Tags) -> usize {
    match term {
        Term::Activity(_) => 1,
        Term::Tag(tag) => tags.get(tag).copied().unwrap_or(0),
        Term::All => model.activities.len(),
        Term::Material(name, flow) => model.materials.get(name).map_or(0, |material| match flow {
            Flow::Purchase(None) => material.purchase.len(),
            Flow::Sale(None) | Flow::Late(None) => material.sale.len(),
            _ => 1,
        }),
        Term::Surge(name, None) => model.resources.get(name).map_or(0, |resource| resource.surge.len()),
        Term::Surge(_, Some(_)) => 1,
    }
}

/// How many numbers of a model are listed by period.
fn listed(model: &Model) -> usize {
    let mut count = 0;
    values::each(model, &mut |value| count += if let Value::Listed(list) = value { list.len() } else { 0 });
    count
}
