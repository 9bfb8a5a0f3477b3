//! The plan as tables for a terminal.

use comfy_table::{Cell, CellAlignment, ContentArrangement, Table};

use super::super::screen::{GOOD, HEAD, Screen, WARN};
use super::number::{align, range, short, value};
use super::{Shown, Standing, since};
use crate::model::escape::Plain;
use crate::model::{Bound, Value};
use crate::plan::State;

pub(super) fn show(screen: &mut Screen, shown: &Shown) {
    screen.say(heading(shown));
    for (what, table) in [("Activities", activities(shown)), ("Resources", resources(shown)), ("Limits", limits(shown))]
    {
        if !table.rows.is_empty() {
            screen.say(format_args!("\n{HEAD}{what}{HEAD:#}\n{}", table.text()));
        }
    }
    for remark in remarks(shown) {
        screen.say(format_args!("\n{remark}"));
    }
}

fn heading(shown: &Shown) -> String {
    let plan = &shown.plan;
    let title = shown.model.as_ref().and_then(|model| model.title.as_deref()).unwrap_or(&shown.name);
    let look = if shown.standing == Standing::Current { GOOD } else { WARN };
    let currency = plan.currency.as_deref().map(|currency| format!(" {}", Plain(currency))).unwrap_or_default();
    let verb = if plan.minimise { "costs" } else { "earns" };
    format!(
        "{HEAD}{}{HEAD:#}: {look}{}{look:#}, {verb} {HEAD}{}{currency}{HEAD:#}",
        Plain(title),
        shown.standing.word(),
        short(plan.aim)
    )
}

fn remarks(shown: &Shown) -> Vec<String> {
    let plan = &shown.plan;
    let mut remarks = Vec::new();
    for activity in &plan.activities {
        if activity.state == State::Prospect && activity.loses.is_some_and(|loses| loses < 0.0) {
            remarks.push(format!("The prospect {} would pay.", activity.name));
        }
    }
    if plan.ties {
        let as_good = if plan.minimise { "cost as little" } else { "earn as much" };
        let how_far = if plan.may_vary_left_out > 0 {
            "levels can differ without loss; how far is not worked out for a model of this size"
        } else if plan.activities.iter().any(|planned| planned.may_vary.is_some()) {
            "levels may be anything in the ranges shown, each as the others allow"
        } else {
            "levels can differ without loss"
        };
        remarks.push(format!("Other plans {as_good}: {how_far}."));
    }
    if !plan.complete {
        remarks
            .push("Worths and ranges that depend on which of several equal answers is taken are left out.".to_owned());
    }
    remarks.extend(shown.pinned.as_ref().map(|pinned| since::remark(pinned, plan)));
    remarks
}

/// A table to be: its heads, which columns are numbers, and its rows.
pub(super) struct Sheet {
    heads: Vec<&'static str>,
    numbers: Vec<bool>,
    pub(super) rows: Vec<Vec<String>>,
}

impl Sheet {
    /// With these columns: each its head, and whether it holds numbers.
    pub(super) fn new(columns: &[(&'static str, bool)]) -> Self {
        let (heads, numbers) = columns.iter().copied().unzip();
        Self { heads, numbers, rows: Vec::new() }
    }

    /// Leaves out columns that say nothing, aligns numbers at their point, and draws.
    pub(super) fn text(mut self) -> String {
        let told: Vec<usize> =
            (0..self.heads.len()).filter(|&column| self.rows.iter().any(|row| !row[column].is_empty())).collect();
        for &column in told.iter().filter(|&&column| self.numbers[column]) {
            let mut cells: Vec<String> = self.rows.iter().map(|row| row[column].clone()).collect();
            align(&mut cells);
            for (row, cell) in self.rows.iter_mut().zip(cells) {
                row[column] = cell;
            }
        }
        let side = |column: usize| if self.numbers[column] { CellAlignment::Right } else { CellAlignment::Left };
        let mut table = Table::new();
        table.load_style(comfy_table::presets::NOTHING).set_content_arrangement(ContentArrangement::Disabled);
        table.set_header(told.iter().map(|&column| Cell::new(self.heads[column]).set_alignment(side(column))));
        for row in &self.rows {
            table.add_row(told.iter().map(|&column| Cell::new(&row[column]).set_alignment(side(column))));
        }
        table.lines().map(|line| line.trim_end().to_owned()).collect::<Vec<_>>().join("\n")
    }
}

fn activities(shown: &Shown) -> Sheet {
    let (range_head, even_head) =
        if shown.plan.minimise { ("cost may be", "enters below") } else { ("price may be", "enters above") };
    let mut sheet = Sheet::new(&[
        ("name", false),
        ("level", true),
        ("unit", false),
        ("state", false),
        ("level may be", false),
        (range_head, false),
        (even_head, true),
        ("loses", true),
        ("label", false),
    ]);
    for activity in &shown.plan.activities {
        let known = shown.model.as_ref().and_then(|model| model.activities.get(&activity.name));
        sheet.rows.push(vec![
            activity.name.to_string(),
            value(&activity.level),
            plain(known.and_then(|known| known.unit.as_deref())),
            activity.state.words().to_owned(),
            activity.may_vary.map(range).unwrap_or_default(),
            activity.price_range.map(range).unwrap_or_default(),
            number(activity.break_even),
            number(activity.loses),
            plain(known.and_then(|known| known.label.as_deref())),
        ]);
    }
    sheet
}

fn resources(shown: &Shown) -> Sheet {
    let mut sheet = Sheet::new(&[
        ("name", false),
        ("used", true),
        ("capacity", true),
        ("spare", true),
        ("unit", false),
        ("worth of more", true),
        ("loss of less", true),
        ("holds for capacities", false),
        ("label", false),
    ]);
    for resource in &shown.plan.resources {
        let known = shown.model.as_ref().and_then(|model| model.resources.get(&resource.name));
        sheet.rows.push(vec![
            resource.name.to_string(),
            value(&resource.used),
            known.map(|known| bound(&known.capacity)).unwrap_or_default(),
            resource.spare.as_ref().map(value).unwrap_or_default(),
            plain(known.and_then(|known| known.unit.as_deref())),
            number(resource.worth_of_more),
            differing(resource.loss_of_less, resource.worth_of_more),
            resource.holds_between.map(range).unwrap_or_default(),
            plain(known.and_then(|known| known.label.as_deref())),
        ]);
    }
    sheet
}

fn limits(shown: &Shown) -> Sheet {
    let mut sheet = Sheet::new(&[
        ("name", false),
        ("value", true),
        ("at least", true),
        ("at most", true),
        ("spare", true),
        ("worth of more", true),
        ("loss of less", true),
        ("holds for bounds", false),
        ("label", false),
    ]);
    for limit in &shown.plan.limits {
        let known = shown.model.as_ref().and_then(|model| model.limits.get(&limit.name));
        let (least, most) = known.map(|known| bounds(&known.bound)).unwrap_or_default();
        sheet.rows.push(vec![
            limit.name.to_string(),
            limit.value.as_ref().map(value).unwrap_or_default(),
            least,
            most,
            limit.spare.as_ref().map(value).unwrap_or_default(),
            number(limit.worth_of_more),
            differing(limit.loss_of_less, limit.worth_of_more),
            limit.holds_between.map(range).unwrap_or_default(),
            plain(known.and_then(|known| known.label.as_deref())),
        ]);
    }
    sheet
}

/// At least and at most, as text.
fn bounds(of: &Bound) -> (String, String) {
    match of {
        Bound::Between(least, most) => (bound(least), bound(most)),
        Bound::Equals(both) => (bound(both), bound(both)),
    }
}

/// A bound; nothing where there is none.
fn bound(of: &Value) -> String {
    if of.numbers().iter().all(|number| number.is_infinite()) { String::new() } else { value(of) }
}

fn number(number: Option<f64>) -> String {
    number.map(short).unwrap_or_default()
}

/// The loss of less, where it is another number than the worth of more.
fn differing(loss: Option<f64>, worth: Option<f64>) -> String {
    if loss == worth { String::new() } else { number(loss) }
}

fn plain(text: Option<&str>) -> String {
    text.map(|text| Plain(text).to_string()).unwrap_or_default()
}
