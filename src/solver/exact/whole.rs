//! A program in whole numbers: each row, and all bounds and all prices together, times a power of ten.
//!
//! A row is written `Σ entries·levels − sum = 0`, with a variable of its own for the sum, so that every variable has bounds and there is
//! a basis of sums alone.

use std::cmp::Ordering;

use dashu_int::IBig;

use super::Unsettled;
use super::factor::Entries;
use crate::lp::{Program, RowIndex};
use crate::model::decimal::{Decimal, nearest, ten_to};

/// A column of the program or the sum of a row: columns first, both in the program's order.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(super) struct Variable(pub(super) usize);

/// The bounds of a variable, in the common unit.
#[derive(Clone, Debug)]
pub(super) struct Bounds {
    pub(super) lower: Option<IBig>,
    pub(super) upper: Option<IBig>,
}

impl Bounds {
    /// Whether they allow a single value.
    pub(super) fn fixed(&self) -> bool {
        self.lower.is_some() && self.lower == self.upper
    }

    fn crossed(&self) -> bool {
        matches!((&self.lower, &self.upper), (Some(lower), Some(upper)) if lower > upper)
    }
}

/// What is to be made small, per variable, in units of `1 / unit`.
#[derive(Clone, Debug)]
pub(super) struct Costs {
    pub(super) of: Vec<IBig>,
    /// The doubles nearest to them.
    pub(super) rough: Vec<f64>,
    pub(super) unit: IBig,
}

impl Costs {
    pub(super) fn of(of: Vec<IBig>, unit: IBig) -> Self {
        let rough = of.iter().map(|cost| nearest(cost, &IBig::ONE)).collect();
        Self { of, rough, unit }
    }
}

/// A program in whole numbers.
#[derive(Debug)]
pub(super) struct Whole {
    /// Entries of each variable.
    entries: Vec<Vec<(usize, i128)>>,
    /// Bounds of each variable, times [`Self::unit`]; those of sums also times the power of ten of their row.
    pub(super) bounds: Vec<Bounds>,
    /// What bounds and levels are multiplied by.
    pub(super) unit: IBig,
    /// Per row: the power of ten that its entries were multiplied by.
    places: Vec<i32>,
    pub(super) columns: usize,
}

impl Whole {
    /// # Errors
    /// When bounds cross, or numbers have more digits than is provided for.
    pub(super) fn of(program: &Program) -> Result<Self, Unsettled> {
        let written = entries(program)?;
        let places = row_places(&written, program.rows.len());
        let mut entries = Vec::with_capacity(program.columns.len() + program.rows.len());
        for column in &written {
            let whole = |&(row, entry): &(usize, Decimal)| {
                let entry = entry.times_ten_to(places[row]);
                Ok((row, i128::try_from(entry).map_err(|_| Unsettled::TooLarge)?))
            };
            entries.push(column.iter().map(whole).collect::<Result<_, _>>()?);
        }
        entries.extend((0..program.rows.len()).map(|row| vec![(row, -1)]));
        let (bounds, unit) = bounds(program, &places)?;
        if bounds.iter().any(Bounds::crossed) {
            return Err(Unsettled::Infeasible);
        }
        Ok(Self { entries, bounds, unit, places, columns: program.columns.len() })
    }

    /// How many variables there are.
    pub(super) fn len(&self) -> usize {
        self.entries.len()
    }

    /// All variables.
    pub(super) fn variables(&self) -> impl Iterator<Item = Variable> + use<> {
        (0..self.len()).map(Variable)
    }

    /// How many rows there are.
    pub(super) fn rows(&self) -> usize {
        self.places.len()
    }

    pub(super) fn entries(&self, variable: Variable) -> &Entries {
        &self.entries[variable.0]
    }

    pub(super) fn bounds(&self, variable: Variable) -> &Bounds {
        &self.bounds[variable.0]
    }

    /// What the levels of a variable are multiplied by: the common unit, and for a sum the power of ten of its row. As a fraction.
    pub(super) fn scale(&self, variable: Variable) -> (IBig, IBig) {
        match variable.0.checked_sub(self.columns) {
            None => (self.unit.clone(), IBig::ONE),
            Some(row) => (&self.unit * ten_to(self.places[row]), ten_to(-self.places[row])),
        }
    }

    /// What a row was multiplied by, as a fraction.
    pub(super) fn row_scale(&self, row: RowIndex) -> (IBig, IBig) {
        (ten_to(self.places[row.0]), ten_to(-self.places[row.0]))
    }

    /// Costs of the columns in whole numbers; sums cost nothing.
    ///
    /// # Errors
    /// When a cost is no finite number.
    pub(super) fn costs(&self, costs: impl Iterator<Item = f64>) -> Result<Costs, Unsettled> {
        let costs: Vec<Decimal> = costs.map(decimal).collect::<Result<_, _>>()?;
        let places = least_places(costs.iter().copied());
        let columns = costs.iter().map(|cost| cost.times_ten_to(places));
        Ok(Costs::of(columns.chain((0..self.rows()).map(|_| IBig::ZERO)).collect(), ten_to(places)))
    }
}

/// The entries of each column as they are written.
fn entries(program: &Program) -> Result<Vec<Vec<(usize, Decimal)>>, Unsettled> {
    let column = |entries: &Vec<(RowIndex, f64)>| {
        let written = entries.iter().filter(|entry| entry.1 != 0.0).map(|&(row, value)| Ok((row.0, decimal(value)?)));
        written.collect::<Result<Vec<_>, _>>()
    };
    program.columns.iter().map(|item| column(&item.entries)).collect()
}

/// For each row, the least power of ten that makes its entries whole.
fn row_places(entries: &[Vec<(usize, Decimal)>], rows: usize) -> Vec<i32> {
    let mut places: Vec<Option<i32>> = vec![None; rows];
    for &(row, value) in entries.iter().flatten() {
        let place = -value.exponent;
        places[row] = Some(places[row].map_or(place, |most| most.max(place)));
    }
    places.into_iter().map(|place| place.unwrap_or(0)).collect()
}

/// The bounds of columns and of the scaled rows in whole numbers, and their unit.
fn bounds(program: &Program, places: &[i32]) -> Result<(Vec<Bounds>, IBig), Unsettled> {
    let columns = program.columns.iter().map(|column| (column.lower, column.upper, 0));
    let rows = program.rows.iter().zip(places).map(|(row, &places)| (row.lower, row.upper, places));
    let mut written = Vec::with_capacity(program.columns.len() + program.rows.len());
    for (lower, upper, places) in columns.chain(rows) {
        written.push((bound(lower, Ordering::Less, places)?, bound(upper, Ordering::Greater, places)?));
    }
    let places = least_places(written.iter().flat_map(|(lower, upper)| lower.iter().chain(upper)).copied());
    let whole = |bound: Option<Decimal>| bound.map(|bound| bound.times_ten_to(places));
    let bounds = written.into_iter().map(|(lower, upper)| Bounds { lower: whole(lower), upper: whole(upper) });
    Ok((bounds.collect(), ten_to(places)))
}

/// A bound times a power of ten; `None` where it limits nothing, being infinite on its own side.
fn bound(value: f64, side: Ordering, places: i32) -> Result<Option<Decimal>, Unsettled> {
    if value.is_infinite() {
        return if value.total_cmp(&0.0) == side { Ok(None) } else { Err(Unsettled::Infeasible) };
    }
    let Decimal { mantissa, exponent } = decimal(value)?;
    Ok(Some(if mantissa == 0 { Decimal::ZERO } else { Decimal { mantissa, exponent: exponent + places } }))
}

fn decimal(value: f64) -> Result<Decimal, Unsettled> {
    Decimal::of(value).ok_or(Unsettled::TooLarge)
}

/// The least power of ten, not below 0, that makes all of these whole.
fn least_places(numbers: impl Iterator<Item = Decimal>) -> i32 {
    numbers.map(|number| -number.exponent).max().unwrap_or(0).max(0)
}
