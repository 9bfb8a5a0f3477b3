//! A live instance that knows which of its columns and rows stand for which of a program's.

use super::basis::{Basis, Position};
use super::findings::{Basic, Ending};
use super::live::{Live, Refusal};
use super::stop::Stop;
use crate::lp::{ColumnIndex, Program, RowIndex};

/// A live solver instance with the program it holds, and where each of the program's columns and rows lies in it.
pub struct Instance {
    /// The solver.
    pub live: Live,
    /// Position in the instance of each of the program's columns.
    pub columns: Vec<usize>,
    /// Position in the instance of each of the program's rows.
    pub rows: Vec<usize>,
}

impl Instance {
    /// An instance with `program` alone.
    ///
    /// # Errors
    /// When the solver refuses the program.
    pub fn new(program: &Program) -> Result<Self, Refusal> {
        let live = Live::new(program)?;
        Ok(Self { live, columns: (0..program.columns.len()).collect(), rows: (0..program.rows.len()).collect() })
    }

    /// The basis the instance holds, for the program's columns and rows.
    ///
    /// # Errors
    /// When it holds none that is valid.
    pub fn basis(&mut self) -> Result<Basis, Refusal> {
        let basis = self.live.basis()?;
        Ok(Basis {
            columns: self.columns.iter().map(|&at| basis.columns[at]).collect(),
            rows: self.rows.iter().map(|&at| basis.rows[at]).collect(),
        })
    }

    /// Sets the basis to start from. The instance must hold the program's columns and rows alone.
    ///
    /// # Errors
    /// When it has another shape.
    pub fn set_basis(&mut self, basis: &Basis) -> Result<(), Refusal> {
        let mut own = Basis {
            columns: vec![Position::AtLower; self.live.columns()],
            rows: vec![Position::Basic; self.live.rows()],
        };
        for (&at, &position) in self.columns.iter().zip(&basis.columns) {
            own.columns[at] = position;
        }
        for (&at, &position) in self.rows.iter().zip(&basis.rows) {
            own.rows[at] = position;
        }
        self.live.set_basis(&own)
    }

    /// Makes sure that there is a factorisation of the basis held: a run of no iterations makes one.
    ///
    /// # Errors
    /// When even that does not.
    pub fn factorise(&mut self) -> Result<(), Refusal> {
        if self.live.rows() == 0 || self.live.columns() == 0 || self.live.basics().is_ok() {
            return Ok(());
        }
        self.live.set("simplex_iteration_limit", 0)?;
        let ending = self.live.run(&Stop::default());
        self.live.set("simplex_iteration_limit", i32::MAX)?;
        if ending == Ending::Trouble { Err(Refusal("to factorise the basis")) } else { self.live.basics().map(drop) }
    }

    /// The basic variables in the order of the factorisation, as columns and rows of the program.
    ///
    /// # Errors
    /// When there is no factorisation, or something basic is not the program's.
    pub fn basics(&mut self) -> Result<Vec<Member>, Refusal> {
        let columns = inverse(&self.columns, self.live.columns());
        let rows = inverse(&self.rows, self.live.rows());
        let member = |basic| match basic {
            Basic::Column(at) => columns[at].map(|column| Member::Column(ColumnIndex(column))),
            Basic::Row(at) => rows[at].map(|row| Member::Row(RowIndex(row))),
        };
        let members: Option<Vec<_>> = self.live.basics()?.into_iter().map(member).collect();
        members.ok_or(Refusal("a basis with strangers in it"))
    }

    /// `B⁻¹ · right`, `right` by the program's rows: one number per basic variable.
    ///
    /// # Errors
    /// When there is no factorisation.
    pub fn solve(&mut self, right: &[f64]) -> Result<Vec<f64>, Refusal> {
        let mut own = vec![0.0; self.live.rows()];
        for (&at, &value) in self.rows.iter().zip(right) {
            own[at] = value;
        }
        self.live.solve(&own)
    }

    /// `B⁻ᵀ · right`, `right` by the basic variables: one number per row of the program.
    ///
    /// # Errors
    /// When there is no factorisation.
    pub fn solve_transposed(&mut self, right: &[f64]) -> Result<Vec<f64>, Refusal> {
        let own = self.live.solve_transposed(right)?;
        Ok(self.rows.iter().map(|&at| own[at]).collect())
    }
}

/// A column or row of the program.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Member {
    /// A column.
    Column(ColumnIndex),
    /// A row.
    Row(RowIndex),
}

/// From position in the instance to position in the program.
fn inverse(positions: &[usize], size: usize) -> Vec<Option<usize>> {
    let mut inverse = vec![None; size];
    for (own, &at) in positions.iter().enumerate() {
        inverse[at] = Some(own);
    }
    inverse
}
