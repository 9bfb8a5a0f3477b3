//! What all parts of a program are built with: the periods, rows and columns on their way to their order, and the parts of entries.

use crate::lp::program::{Column, Key, Row, RowIndex};
use crate::model::products;
use crate::model::{Aim, Model, Period};

/// A model, and its periods in the order in which their keys come.
pub(super) struct Frame<'m> {
    pub(super) model: &'m Model,
    /// All periods, in byte order of their names: things made in this order are nearly in order already.
    pub(super) by_name: Vec<Period>,
    /// How many periods there are.
    pub(super) count: usize,
    /// +1 where the aim is to earn, −1 where it is to spend: what one unit earned adds to it.
    pub(super) earned: f64,
}

impl<'m> Frame<'m> {
    pub(super) fn of(model: &'m Model) -> Self {
        let mut by_name: Vec<Period> = model.horizon.periods().collect();
        by_name.sort_by_key(|&period| model.horizon.label(period));
        let earned = match model.aim {
            Aim::Maximise => 1.0,
            Aim::Minimise => -1.0,
        };
        Self { model, count: by_name.len(), by_name, earned }
    }

    /// What a unit adds to the aim that earns so much.
    pub(super) fn earns(&self, price: f64) -> f64 {
        // There is one zero only.
        self.earned * price + 0.0
    }

    /// What a unit adds to the aim that costs so much.
    pub(super) fn costs(&self, cost: f64) -> f64 {
        0.0 - self.earned * cost
    }

    /// The period after one; `None` after the last.
    pub(super) fn after(&self, period: Period, periods: usize) -> Option<usize> {
        period.position().checked_add(periods).filter(|&at| at < self.count)
    }

    pub(super) fn is_last(&self, period: Period) -> bool {
        period.position() + 1 == self.count
    }
}

/// A row by the order in which it was made.
#[derive(Clone, Copy, Debug)]
pub(super) struct Made(usize);

/// The rows of one thing by period, where it has one there.
pub(super) type Line = Vec<Option<Made>>;

/// The row of a line in a period.
pub(super) fn at(line: &[Option<Made>], period: usize) -> Option<Made> {
    line.get(period).copied().flatten()
}

/// Rows in the order in which they are made.
#[derive(Default)]
pub(super) struct Rows(Vec<Row>);

impl Rows {
    pub(super) fn push(&mut self, key: Key, lower: f64, upper: f64) -> Made {
        self.0.push(Row { key, lower, upper });
        Made(self.0.len() - 1)
    }

    /// A line of rows, one for each period that `row` has key and bounds for.
    pub(super) fn line(&mut self, frame: &Frame<'_>, row: impl Fn(Period) -> Option<(Key, f64, f64)>) -> Line {
        let mut line = vec![None; frame.count];
        for &period in &frame.by_name {
            line[period.position()] = row(period).map(|(key, lower, upper)| self.push(key, lower, upper));
        }
        line
    }

    /// The rows in byte order of their keys, and where each of those made has come to stand.
    pub(super) fn in_order(self) -> (Vec<Row>, Vec<RowIndex>) {
        let mut rows: Vec<(usize, Row)> = self.0.into_iter().enumerate().collect();
        rows.sort_by(|a, b| a.1.key.cmp(&b.1.key));
        let mut places = vec![RowIndex(0); rows.len()];
        for (place, (made, _)) in rows.iter().enumerate() {
            places[*made] = RowIndex(place);
        }
        (rows.into_iter().map(|(_, row)| row).collect(), places)
    }
}

/// What one term adds to an entry: a coefficient, times a factor.
#[derive(Clone, Copy, Debug)]
pub(super) struct Part {
    pub(super) row: Made,
    pub(super) coefficient: f64,
    pub(super) factor: f64,
}

impl Part {
    pub(super) fn new(row: Made, coefficient: f64) -> Self {
        Self { row, coefficient, factor: 1.0 }
    }
}

/// Columns in the order in which they are made.
pub(super) struct Columns<'p> {
    columns: Vec<Column>,
    places: &'p [RowIndex],
    placed: Vec<(RowIndex, f64, f64)>,
}

impl<'p> Columns<'p> {
    /// None yet; their rows stand at `places`.
    pub(super) fn at(places: &'p [RowIndex]) -> Self {
        Self { columns: Vec::new(), places, placed: Vec::new() }
    }

    /// Adds a column. The parts of its entries are used up.
    pub(super) fn push(&mut self, key: Key, (lower, upper): (f64, f64), aim: f64, parts: &mut Vec<Part>) {
        self.placed.clear();
        self.placed.extend(parts.drain(..).map(|part| (self.places[part.row.0], part.coefficient, part.factor)));
        let entries = summed(&mut self.placed);
        self.columns.push(Column { key, lower, upper, aim, entries });
    }

    /// The columns in byte order of their keys.
    pub(super) fn in_order(mut self) -> Vec<Column> {
        self.columns.sort_by(|a, b| a.key.cmp(&b.key));
        self.columns
    }
}

/// Entries in order of rows, the parts of one row added up, zeros left out.
fn summed(parts: &mut [(RowIndex, f64, f64)]) -> Vec<(RowIndex, f64)> {
    parts.sort_by_key(|part| part.0);
    let of_one_row = parts.chunk_by(|one, other| one.0 == other.0);
    let entry = |parts: &[(RowIndex, f64, f64)]| {
        let products = parts.iter().map(|&(_, coefficient, factor)| (coefficient, factor));
        Some((parts.first()?.0, products::sum(products)))
    };
    // Mostly there is one part for each entry.
    let mut entries = Vec::with_capacity(parts.len());
    entries.extend(of_one_row.filter_map(entry).filter(|&(_, value)| value != 0.0));
    entries
}
