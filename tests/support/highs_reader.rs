//! A linear program as the solver's own reader understands an MPS file.
#![expect(unsafe_code, reason = "the solver's reader has a C interface only; tests hold ours against it")]
#![expect(clippy::unwrap_used, reason = "a test that cannot read its input must fail")]

use std::collections::BTreeMap;
use std::ffi::{CStr, CString, c_char, c_void};
use std::path::Path;

use highs_sys as highs;

/// A linear program by name.
#[derive(Debug, Default, PartialEq)]
pub(crate) struct Listing {
    /// Whether the objective is to be large.
    pub(crate) maximise: bool,
    /// Added to the objective.
    pub(crate) offset: f64,
    /// Lower bound, upper bound and cost of each column.
    pub(crate) columns: BTreeMap<String, [f64; 3]>,
    /// Lower and upper bound of each row.
    pub(crate) rows: BTreeMap<String, [f64; 2]>,
    /// Entries by column and row.
    pub(crate) entries: BTreeMap<(String, String), f64>,
}

/// What the solver reads from the file; `None` if it refuses.
pub(crate) fn read(path: &Path) -> Option<Listing> {
    let path = CString::new(path.to_str()?).ok()?;
    let solver = Solver::new();
    // SAFETY: the solver lives, the path ends in NUL.
    (unsafe { highs::Highs_readModel(solver.0, path.as_ptr()) } != highs::STATUS_ERROR).then(|| solver.listing())
}

struct Solver(*mut c_void);

impl Solver {
    fn new() -> Self {
        // SAFETY: makes a new solver, which `drop` gives back; the option's name ends in NUL.
        unsafe {
            let solver = highs::Highs_create();
            highs::Highs_setBoolOptionValue(solver, c"output_flag".as_ptr(), 0);
            Self(solver)
        }
    }

    fn listing(&self) -> Listing {
        // SAFETY: the solver lives.
        let [columns, rows, entries] = unsafe {
            [highs::Highs_getNumCol(self.0), highs::Highs_getNumRow(self.0), highs::Highs_getNumNz(self.0)]
                .map(|count| usize::try_from(count).unwrap())
        };
        let (mut column_count, mut row_count, mut entry_count, mut sense, mut offset) = (0, 0, 0, 0, 0.0);
        let [mut cost, mut lower, mut upper] = [(); 3].map(|()| vec![0.0; columns]);
        let [mut row_lower, mut row_upper] = [(); 2].map(|()| vec![0.0; rows]);
        let [mut start, mut integrality] = [(); 2].map(|()| vec![0; columns + 1]);
        let (mut index, mut value) = (vec![0; entries], vec![0.0; entries]);
        // SAFETY: every array has the length that the solver just stated for it.
        unsafe {
            highs::Highs_getLp(
                self.0,
                highs::MATRIX_FORMAT_COLUMN_WISE,
                &raw mut column_count,
                &raw mut row_count,
                &raw mut entry_count,
                &raw mut sense,
                &raw mut offset,
                cost.as_mut_ptr(),
                lower.as_mut_ptr(),
                upper.as_mut_ptr(),
                row_lower.as_mut_ptr(),
                row_upper.as_mut_ptr(),
                start.as_mut_ptr(),
                index.as_mut_ptr(),
                value.as_mut_ptr(),
                integrality.as_mut_ptr(),
            );
        }
        start[columns] = i32::try_from(entries).unwrap();
        let place = |number: i32| usize::try_from(number).unwrap();
        let row_names: Vec<_> = (0..rows).map(|row| self.name(highs::Highs_getRowName, row)).collect();
        let mut listing = Listing { maximise: sense == highs::OBJECTIVE_SENSE_MAXIMIZE, offset, ..Listing::default() };
        for (row, name) in row_names.iter().enumerate() {
            listing.rows.insert(name.clone(), [row_lower[row], row_upper[row]]);
        }
        for column in 0..columns {
            let name = self.name(highs::Highs_getColName, column);
            for entry in place(start[column])..place(start[column + 1]) {
                let row = row_names[place(index[entry])].clone();
                listing.entries.insert((name.clone(), row), value[entry]);
            }
            listing.columns.insert(name, [lower[column], upper[column], cost[column]]);
        }
        listing
    }

    fn name(&self, ask: unsafe extern "C" fn(*const c_void, i32, *mut c_char) -> i32, at: usize) -> String {
        let mut name: [c_char; 513] = [0; 513];
        // SAFETY: the solver lives and writes at most 512 characters and a NUL.
        unsafe {
            ask(self.0, i32::try_from(at).unwrap(), name.as_mut_ptr());
            CStr::from_ptr(name.as_ptr()).to_str().unwrap().to_owned()
        }
    }
}

impl Drop for Solver {
    fn drop(&mut self) {
        // SAFETY: made by `new` and given back once.
        unsafe { highs::Highs_destroy(self.0) }
    }
}
