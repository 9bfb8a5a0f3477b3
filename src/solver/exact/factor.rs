//! Lower and upper triangular factors of a sparse square matrix, modulo a prime.
//!
//! There is no rounding to guard against, so pivots are chosen for sparsity alone: the entry whose row and column have the fewest
//! others (Markowitz, *Management Science* 3, 1957, 255–269). Rows and columns with a single entry come first and fill in nothing.

use super::field::Field;

/// A column of whole numbers, by row.
pub(super) type Entries = [(usize, i128)];

/// How many rows and columns are searched for a pivot, at most: the bound of Zlatev (*SIAM Journal on Numerical Analysis* 17, 1980).
const SEARCHED: usize = 4;

/// The factors of a square matrix, as the steps of its elimination.
#[derive(Clone, Debug)]
pub(super) struct Factor {
    field: Field,
    steps: Vec<Step>,
    /// What was taken off other rows, step after step: the row, and the multiple.
    lower: Vec<(usize, u64)>,
    /// What was left of the pivots' rows: the column, and the entry.
    upper: Vec<(usize, u64)>,
}

#[derive(Clone, Copy, Debug)]
struct Step {
    row: usize,
    column: usize,
    /// Of the pivot.
    inverse: u64,
    /// Where the step's part of `lower` and of `upper` ends; it begins where that of the step before ends.
    lower_end: usize,
    upper_end: usize,
}

impl Factor {
    /// The factors of the matrix with these columns; `None` where it is singular modulo the prime.
    pub(super) fn of(columns: &[&Entries], field: Field) -> Option<Self> {
        let mut active = Active::of(columns, field);
        let mut factor = Self { field, steps: Vec::with_capacity(columns.len()), lower: Vec::new(), upper: Vec::new() };
        for _ in 0..columns.len() {
            let (row, column) = active.pivot()?;
            let inverse = active.eliminate(row, column, &mut factor);
            let (lower_end, upper_end) = (factor.lower.len(), factor.upper.len());
            factor.steps.push(Step { row, column, inverse, lower_end, upper_end });
        }
        Some(factor)
    }

    /// Entries of both factors.
    pub(super) fn entries(&self) -> usize {
        self.steps.len() + self.lower.len() + self.upper.len()
    }

    /// Solves `matrix · x = right`. `right`, by row, is used up; `x` is by column.
    pub(super) fn solve(&self, right: &mut [u64], x: &mut [u64]) {
        let field = self.field;
        let mut begin = 0;
        for step in &self.steps {
            let value = right[step.row];
            if value != 0 {
                for &(row, multiple) in &self.lower[begin..step.lower_end] {
                    right[row] = field.sub(right[row], field.mul(multiple, value));
                }
            }
            begin = step.lower_end;
        }
        let mut end = self.upper.len();
        for (at, step) in self.steps.iter().enumerate().rev() {
            let begin = at.checked_sub(1).map_or(0, |before| self.steps[before].upper_end);
            let mut value = right[step.row];
            for &(column, entry) in &self.upper[begin..end] {
                value = field.sub(value, field.mul(entry, x[column]));
            }
            x[step.column] = field.mul(value, step.inverse);
            end = begin;
        }
    }

    /// Solves `matrixᵀ · y = right`. `right`, by column, is used up; `y` is by row.
    pub(super) fn solve_transposed(&self, right: &mut [u64], y: &mut [u64]) {
        let field = self.field;
        let mut begin = 0;
        for step in &self.steps {
            let value = field.mul(right[step.column], step.inverse);
            y[step.row] = value;
            if value != 0 {
                for &(column, entry) in &self.upper[begin..step.upper_end] {
                    right[column] = field.sub(right[column], field.mul(entry, value));
                }
            }
            begin = step.upper_end;
        }
        let mut end = self.lower.len();
        for (at, step) in self.steps.iter().enumerate().rev() {
            let begin = at.checked_sub(1).map_or(0, |before| self.steps[before].lower_end);
            let mut value = y[step.row];
            for &(row, multiple) in &self.lower[begin..end] {
                value = field.sub(value, field.mul(multiple, y[row]));
            }
            y[step.row] = value;
            end = begin;
        }
    }
}

/// What is not yet eliminated.
struct Active {
    field: Field,
    /// Entries of each row, by column, in no order.
    rows: Vec<Vec<(usize, u64)>>,
    /// The rows that each column has an entry in, in no order.
    columns: Vec<Vec<usize>>,
    row_order: ByCount,
    column_order: ByCount,
    /// The pivot's row, spread out by column; 0 elsewhere.
    spread: Vec<u64>,
}

impl Active {
    fn of(matrix: &[&Entries], field: Field) -> Self {
        let mut rows = vec![Vec::new(); matrix.len()];
        let mut columns = vec![Vec::new(); matrix.len()];
        for (column, entries) in matrix.iter().enumerate() {
            for &(row, entry) in *entries {
                let residue = field.residue(entry);
                if residue != 0 {
                    rows[row].push((column, residue));
                    columns[column].push(row);
                }
            }
        }
        let mut active = Self {
            field,
            row_order: ByCount::new(matrix.len()),
            column_order: ByCount::new(matrix.len()),
            rows,
            columns,
            spread: vec![0; matrix.len()],
        };
        (0..matrix.len()).for_each(|at| active.row_order.put(at, active.rows[at].len()));
        (0..matrix.len()).for_each(|at| active.column_order.put(at, active.columns[at].len()));
        active
    }

    /// The row and column of the next pivot; `None` where some row or column has no entry left.
    fn pivot(&mut self) -> Option<(usize, usize)> {
        let columns = self.column_order.fewest();
        let rows = self.row_order.fewest();
        let empty = columns.iter().any(|&column| self.columns[column].is_empty())
            || rows.iter().any(|&row| self.rows[row].is_empty());
        if empty {
            return None;
        }
        let in_columns = columns.iter().flat_map(|&column| self.columns[column].iter().map(move |&row| (row, column)));
        let in_rows = rows.iter().flat_map(|&row| self.rows[row].iter().map(move |&(column, _)| (row, column)));
        let fill = |&(row, column): &(usize, usize)| (self.rows[row].len() - 1) * (self.columns[column].len() - 1);
        in_columns.chain(in_rows).min_by_key(fill)
    }

    /// Eliminates a column from the rows other than the pivot's; the inverse of the pivot.
    fn eliminate(&mut self, row: usize, column: usize, factor: &mut Factor) -> u64 {
        let pivot_row = std::mem::take(&mut self.rows[row]);
        self.row_order.drop(row);
        self.column_order.drop(column);
        let others = std::mem::take(&mut self.columns[column]);
        let mut pivot = 0;
        for &(at, entry) in &pivot_row {
            if at == column {
                pivot = entry;
            } else {
                self.spread[at] = entry;
                factor.upper.push((at, entry));
            }
        }
        let inverse = self.field.invert(pivot);
        let pivot_row = &factor.upper[factor.upper.len() + 1 - pivot_row.len()..];
        for other in others.into_iter().filter(|&other| other != row) {
            let multiple = self.take_off(other, column, inverse, pivot_row);
            factor.lower.push((other, multiple));
        }
        for &(at, _) in pivot_row {
            self.spread[at] = 0;
            self.columns[at].retain(|&other| other != row);
            self.column_order.put(at, self.columns[at].len());
        }
        inverse
    }

    /// Takes a multiple of the pivot's row (without the pivot) off another one so that its entry in the pivot's column vanishes;
    /// the multiple.
    fn take_off(&mut self, row: usize, column: usize, inverse: u64, pivot_row: &[(usize, u64)]) -> u64 {
        let field = self.field;
        let mut entries = std::mem::take(&mut self.rows[row]);
        let entry = entries.iter().find(|entry| entry.0 == column).map_or(0, |entry| entry.1);
        let multiple = field.mul(entry, inverse);
        entries.retain_mut(|(at, value)| {
            // What is met here is taken off the spread row: what stays in it is fill.
            let pivot = std::mem::take(&mut self.spread[*at]);
            if pivot != 0 {
                *value = field.sub(*value, field.mul(multiple, pivot));
                if *value == 0 {
                    self.columns[*at].retain(|&other| other != row);
                }
            }
            *at != column && *value != 0
        });
        for &(at, value) in pivot_row {
            if self.spread[at] != 0 {
                entries.push((at, field.sub(0, field.mul(multiple, value))));
                self.columns[at].push(row);
            }
            self.spread[at] = value;
        }
        self.row_order.put(row, entries.len());
        self.rows[row] = entries;
        multiple
    }
}

/// Rows or columns in the order of how many entries they have.
struct ByCount {
    counts: Vec<Option<usize>>,
    /// For each count, those that have or had it.
    lists: Vec<Vec<usize>>,
    /// No list before this one holds any that count.
    least: usize,
}

impl ByCount {
    fn new(size: usize) -> Self {
        Self { counts: vec![None; size], lists: vec![Vec::new(); size + 1], least: 0 }
    }

    fn put(&mut self, at: usize, count: usize) {
        if self.counts[at] != Some(count) {
            self.counts[at] = Some(count);
            self.lists[count].push(at);
            self.least = self.least.min(count);
        }
    }

    fn drop(&mut self, at: usize) {
        self.counts[at] = None;
    }

    /// Those with the fewest entries: one where it has at most one, or else up to [`SEARCHED`].
    fn fewest(&mut self) -> Vec<usize> {
        let mut found: Vec<usize> = Vec::with_capacity(SEARCHED);
        for (count, list) in self.lists.iter_mut().enumerate().skip(self.least) {
            while list.last().is_some_and(|&at| self.counts[at] != Some(count)) {
                list.pop();
            }
            if found.is_empty() && list.is_empty() {
                self.least = count + 1;
            }
            for &at in list.iter().rev().filter(|&&at| self.counts[at] == Some(count)) {
                found.push(at);
                if count <= 1 || found.len() == SEARCHED {
                    return found;
                }
            }
        }
        found
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Numbers that look random, from a linear congruence (Knuth's MMIX constants, from memory).
    fn numbers(seed: u64) -> impl FnMut(u64) -> u64 {
        let mut state = seed;
        move |end| {
            state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
            (state >> 33) % end
        }
    }

    fn matrix(size: usize, seed: u64) -> Vec<Vec<(usize, i128)>> {
        let mut draw = numbers(seed);
        let entry = |row: usize, draw: &mut dyn FnMut(u64) -> u64| (row, i128::from(draw(9)) - 4);
        (0..size)
            .map(|_| {
                let rows = (0..size).filter(|_| draw(5) < 2).collect::<Vec<_>>();
                rows.into_iter().map(|row| entry(row, &mut draw)).filter(|entry| entry.1 != 0).collect()
            })
            .collect()
    }

    #[test]
    fn solutions_solve_and_singular_matrices_are_told() {
        let mut solved = 0;
        for seed in 0..200 {
            let size = 2 + usize::try_from(seed % 12).unwrap();
            let columns = matrix(size, seed);
            let slices: Vec<&Entries> = columns.iter().map(Vec::as_slice).collect();
            let field = Field::WIDE;
            let Some(factor) = Factor::of(&slices, field) else {
                assert!(Factor::of(&slices, Field::NARROW).is_none(), "seed {seed}");
                continue;
            };
            solved += 1;
            let right: Vec<u64> = (1..=u64::try_from(size).unwrap()).collect();
            let (mut x, mut y) = (vec![0; size], vec![0; size]);
            factor.solve(&mut right.clone(), &mut x);
            factor.solve_transposed(&mut right.clone(), &mut y);
            let mut rest = right.clone();
            for (column, entries) in columns.iter().enumerate() {
                let mut product = 0;
                for &(row, entry) in entries {
                    rest[row] = field.sub(rest[row], field.mul(field.residue(entry), x[column]));
                    product = field.sub(product, field.mul(field.residue(entry), y[row]));
                }
                assert_eq!(field.sub(0, product), right[column], "seed {seed}");
            }
            assert!(rest.iter().all(|&rest| rest == 0), "seed {seed}");
        }
        assert!((80..200).contains(&solved), "{solved} of 200 solved");
    }
}
