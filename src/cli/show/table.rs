//! The plan as tables for a terminal.

mod once;
mod totals;
mod wide;

use comfy_table::{Cell, CellAlignment, ContentArrangement, Table};

use super::super::demo::quoted;
use super::super::models;
use super::super::screen::{GOOD, HEAD, Screen, WARN};
use super::number::{align, short};
use super::{Shown, Standing, since};
use crate::model::escape::Plain;
use crate::plan::State;

pub(super) fn show(screen: &mut Screen, shown: &Shown) {
    screen.say(heading(shown));
    let (sheets, hint) = sheets(screen, shown);
    for (what, table) in sheets {
        screen.say(format_args!("\n{HEAD}{what}{HEAD:#}\n{table}"));
    }
    for remark in remarks(shown).into_iter().chain(hint) {
        screen.say(format_args!("\n{remark}"));
    }
}

/// The tables that have rows, drawn, each under its heading; and how to see what they leave out.
fn sheets(screen: &Screen, shown: &Shown) -> (Vec<(&'static str, String)>, Option<String>) {
    if shown.plan.periods.is_empty() {
        return (drawn(once::sheets(shown)), None);
    }
    let wide = drawn(wide::sheets(shown));
    let widest = wide.iter().flat_map(|(_, text)| text.lines()).map(unicode_width::UnicodeWidthStr::width).max();
    if screen.width().is_none_or(|width| widest.is_none_or(|widest| widest <= width)) {
        return (wide, None);
    }
    let name = quoted(&models::stem(&shown.model_path));
    let hint = format!(
        "Of {} periods only sums fit here: `millreeve show {name} --csv` writes all of them, `--why NAME` tells them of one thing.",
        shown.plan.periods.len()
    );
    (drawn(totals::sheets(shown)), Some(hint))
}

fn drawn<const N: usize>(sheets: [(&'static str, Sheet); N]) -> Vec<(&'static str, String)> {
    let told = sheets.into_iter().filter(|(_, sheet)| !sheet.rows.is_empty());
    told.map(|(what, sheet)| (what, sheet.text())).collect()
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
        let loses = activity.loses.as_ref().map_or(&[][..], |loses| loses.numbers());
        if activity.state.is(State::Prospect) && loses.iter().any(|&loses| loses < 0.0) {
            remarks.push(format!("The prospect {} would pay.", activity.name));
        }
    }
    if plan.ties {
        let as_good = if plan.minimise { "cost as little" } else { "earn as much" };
        let how_far = if plan.may_vary_left_out > 0 {
            "levels can differ without loss; how far is not worked out for a model of this size"
        } else if !plan.periods.is_empty() {
            "levels can differ without loss; --why NAME says how far"
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
    heads: Vec<String>,
    numbers: Vec<bool>,
    pub(super) rows: Vec<Vec<String>>,
}

impl Sheet {
    /// With these columns: each its head, and whether it holds numbers.
    pub(super) fn new(columns: &[(&str, bool)]) -> Self {
        let (heads, numbers) = columns.iter().map(|&(head, numbers)| (Plain(head).to_string(), numbers)).unzip();
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
        table.set_header(told.iter().map(|&column| Cell::new(&self.heads[column]).set_alignment(side(column))));
        for row in &self.rows {
            table.add_row(told.iter().map(|&column| Cell::new(&row[column]).set_alignment(side(column))));
        }
        table.lines().map(|line| line.trim_end().to_owned()).collect::<Vec<_>>().join("\n")
    }
}

/// A text from people, escaped; nothing where there is none.
fn plain(text: Option<&str>) -> String {
    text.map(|text| Plain(text).to_string()).unwrap_or_default()
}
