//! The optimal face: the plans that earn as much as the one found, and another aim on it.
//!
//! What is out of the basis and has a gain or a worth would lose by moving: it is held where it stands. Whatever else keeps the rows and
//! bounds earns as much.

use super::basis::{Basis, Position};
use super::cold;
use super::findings::Ending;
use super::instance::{Instance, Member};
use super::live::Refusal;
use super::look::Look;
use super::stop::Stop;
use super::vertex::bound_at;
use crate::lp::{Program, Sense};

/// The plans that earn as much as the plan of a look.
pub struct Face<'a> {
    program: &'a Program,
    look: &'a Look,
    /// A gain or worth no larger than this, relative to what it is summed from, is none.
    nil: f64,
}

/// Where another aim ends on a face.
pub enum End {
    /// At the vertex of a basis of the program.
    Least(Basis),
    /// Nowhere.
    NoLeast,
    /// The solver could not tell.
    Unknown,
}

impl<'a> Face<'a> {
    /// The face of the optimal plan of `look`; a gain within `nil` of 0 is none.
    #[must_use]
    pub fn of(program: &'a Program, look: &'a Look, nil: f64) -> Self {
        Self { program, look, nil }
    }

    /// The look whose face it is.
    #[must_use]
    pub fn look(&self) -> &Look {
        self.look
    }

    /// Whether something out of the basis can move at no loss, as far as its gain or worth tells.
    #[must_use]
    pub fn may_be_more_than_a_point(&self) -> bool {
        let column = |at: usize| self.moves_column(at);
        let row = |at: usize| self.moves_row(at);
        (0..self.program.columns.len()).any(column) || (0..self.program.rows.len()).any(row)
    }

    fn moves_column(&self, at: usize) -> bool {
        let Look { basis, checked, .. } = self.look;
        let column = &self.program.columns[at];
        let gain = checked.gains[at] / checked.gain_scales[at].max(1.0);
        basis.columns[at] != Position::Basic && column.lower < column.upper && gain.abs() <= self.nil
    }

    fn moves_row(&self, at: usize) -> bool {
        let row = &self.program.rows[at];
        let worth = self.look.vertex.worths[at];
        self.look.basis.rows[at] != Position::Basic && row.lower < row.upper && worth.abs() <= self.nil
    }

    /// What `aim`, to be made small, loses as each of what may move leaves its place, per unit; below 0 where it would improve.
    ///
    /// # Errors
    /// When the basis cannot be factorised.
    pub fn gains(&self, instance: &mut Instance, aim: &[f64]) -> Result<Vec<f64>, Refusal> {
        let worths = self.worths(instance, aim)?;
        let basis = &self.look.basis;
        let columns = (0..self.program.columns.len()).filter(|&at| self.moves_column(at)).map(|at| {
            let entries = &self.program.columns[at].entries;
            let charged: f64 = entries.iter().map(|&(row, value)| value * worths[row.0]).sum();
            loss(basis.columns[at], aim[at] - charged)
        });
        let rows = (0..self.program.rows.len()).filter(|&at| self.moves_row(at));
        Ok(columns.chain(rows.map(|at| loss(basis.rows[at], worths[at]))).collect())
    }

    fn worths(&self, instance: &mut Instance, aim: &[f64]) -> Result<Vec<f64>, Refusal> {
        if self.program.rows.is_empty() {
            return Ok(Vec::new());
        }
        instance.factorise()?;
        let costs = instance.basics()?.into_iter().map(|member| match member {
            Member::Column(column) => aim[column.0],
            Member::Row(_) => 0.0,
        });
        let costs: Vec<f64> = costs.collect();
        instance.solve_transposed(&costs)
    }

    /// Walks to the least sum of `aim` times level on the face.
    ///
    /// # Errors
    /// When the solver refuses the program or the basis.
    pub fn least(&self, aim: &[f64], stop: &Stop) -> Result<End, Refusal> {
        let mut scratch = cold::ready(&self.held(aim))?;
        scratch.set_basis(&self.look.basis)?;
        scratch.live.set("simplex_strategy", 4)?;
        Ok(match scratch.live.run(stop) {
            Ending::Optimal => End::Least(self.seated(scratch.basis()?)),
            Ending::Unbounded => End::NoLeast,
            _ => End::Unknown,
        })
    }

    /// The face as a program of its own, with another aim to be made small.
    fn held(&self, aim: &[f64]) -> Program {
        let Look { basis, vertex, .. } = self.look;
        let mut held = self.program.clone();
        held.sense = Sense::Minimise;
        held.offset = 0.0;
        for (at, column) in held.columns.iter_mut().enumerate() {
            column.aim = aim[at];
            if basis.columns[at] != Position::Basic && !self.moves_column(at) {
                (column.lower, column.upper) = (vertex.levels[at], vertex.levels[at]);
            }
        }
        for (at, row) in held.rows.iter_mut().enumerate() {
            if let Some(bound) = bound_at(basis.rows[at], row.lower, row.upper)
                && !self.moves_row(at)
            {
                (row.lower, row.upper) = (bound, bound);
            }
        }
        held
    }

    /// The solver gives any side to what was held; in the program it stands on the one where it was.
    fn seated(&self, basis: Basis) -> Basis {
        let Look { basis: was, .. } = self.look;
        let column = |(at, position)| {
            let held = was.columns[at] != Position::Basic && !self.moves_column(at);
            if held && position != Position::Basic { was.columns[at] } else { position }
        };
        let row = |(at, position)| {
            let held = was.rows[at] != Position::Basic && !self.moves_row(at);
            if held && position != Position::Basic { was.rows[at] } else { position }
        };
        Basis {
            columns: basis.columns.into_iter().enumerate().map(column).collect(),
            rows: basis.rows.into_iter().enumerate().map(row).collect(),
        }
    }
}

/// What a cost loses as something leaves its place: by rising from its lower bound, by falling from its upper, by either where it is free.
fn loss(position: Position, cost: f64) -> f64 {
    match position {
        Position::AtUpper => -cost,
        Position::AtZero => -cost.abs(),
        Position::AtLower | Position::Basic => cost,
    }
}
