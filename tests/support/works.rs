//! Random programs of some size: a product mix with whole or decimal numbers, degenerate or tied on purpose.

use millreeve::lp::{Column, Key, Program, Row, RowIndex, Sense};

use crate::rng::Rng;

/// What a program is made to be.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Nature {
    /// Whole numbers and capacities that meet in one point.
    Degenerate,
    /// What an activity earns follows from what it uses: many plans earn alike.
    Tied,
    /// Decimals, as they come.
    Plain,
}

impl Nature {
    /// A third of each.
    pub(crate) fn of(seed: u64) -> Self {
        [Self::Degenerate, Self::Tied, Self::Plain][usize::try_from(seed % 3).unwrap()]
    }
}

/// A product mix of `columns` activities that `seed` stands for.
pub(crate) fn works(seed: u64, columns: usize) -> Program {
    let mut rng = Rng::new(seed);
    let nature = Nature::of(seed);
    let rows = 2 + columns / 5;
    let whole = |rng: &mut Rng, most: usize| f64::from(u32::try_from(1 + rng.below(most)).unwrap());
    let decimal = |rng: &mut Rng, least: f64, most: f64| (rng.between(least, most) * 1e3).round() / 1e3;
    let columns: Vec<Column> = (0..columns)
        .map(|at| {
            let mut used: Vec<usize> = (0..1 + rng.below(5)).map(|_| rng.below(rows)).collect();
            used.sort_unstable();
            used.dedup();
            let entries: Vec<(RowIndex, f64)> = used
                .into_iter()
                .map(|row| {
                    let plain = nature == Nature::Plain;
                    (RowIndex(row), if plain { decimal(&mut rng, 0.02, 2.0) } else { whole(&mut rng, 3) })
                })
                .collect();
            let aim = match nature {
                Nature::Tied => entries.iter().map(|entry| entry.1).sum::<f64>() * 2.0,
                Nature::Degenerate => whole(&mut rng, 12),
                Nature::Plain => decimal(&mut rng, 1.0, 20.0),
            };
            let upper = if rng.below(3) == 0 { whole(&mut rng, 20) } else { f64::INFINITY };
            Column { key: Key::new(&format!("activities.a{at:03}")), lower: 0.0, upper, aim, entries }
        })
        .collect();
    let rows = (0..rows).map(|at| {
        let share = rng.below(6) == 0;
        let upper = if nature == Nature::Plain { decimal(&mut rng, 10.0, 100.0) } else { 12.0 * whole(&mut rng, 3) };
        let lower = if share { 0.0 } else { f64::NEG_INFINITY };
        Row { key: Key::new(&format!("limits.r{at:03}")), lower, upper }
    });
    Program { sense: Sense::Maximise, offset: 0.0, rows: rows.collect(), columns }
}
