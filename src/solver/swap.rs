//! Single pivots of our own: bringing something into the basis, or out of it, where the solver offers no call for it.
//!
//! Needed when what was withdrawn softly is still in the way after the solve: a withdrawn column that stayed basic at 0 must leave
//! the basis, a withdrawn row that stayed at its bound must enter it. Ratio tests as in any textbook (Dantzig 1963, ch. 5).

use super::basis::{Basis, Position};
use super::instance::{Instance, Member};
use super::live::Refusal;
use super::look::Look;
use crate::lp::{ColumnIndex, Program, RowIndex};

/// The smallest pivot element that is trusted.
const PIVOT: f64 = 1e-7;

/// What is to enter the basis: it stands strictly within its bounds, out of the basis.
#[derive(Clone, Copy, Debug)]
pub struct Entrant {
    /// Which column or row.
    pub member: Member,
    /// Where it stands.
    pub value: f64,
    /// The least it may become.
    pub lower: f64,
    /// The most it may become.
    pub upper: f64,
    /// Whether the aim would rather have it rise.
    pub rises: bool,
}

/// Brings one member into the basis by a primal ratio test: the point moves along the edge until a basic one meets its bound, or
/// the member its own. `None` where nothing stops it or no pivot can be trusted.
///
/// # Errors
/// When the solver has no factorisation.
pub fn enter(
    instance: &mut Instance,
    program: &Program,
    look: &Look,
    entrant: Entrant,
) -> Result<Option<Basis>, Refusal> {
    instance.factorise()?;
    let basics = instance.basics()?;
    let edge = Edge::of(instance, program, &basics, entrant)?;
    let block = edge.block(program, look, entrant.rises).or_else(|| edge.block(program, look, !entrant.rises));
    let Some(block) = block else { return Ok(None) };
    let mut basis = look.basis.clone();
    put(&mut basis, entrant.member, Position::Basic);
    put(&mut basis, block.member, block.position);
    Ok(Some(basis))
}

/// How far one member can move, in the direction it would rather go, before something stops it; infinite where nothing does.
///
/// # Errors
/// When the solver has no factorisation.
pub fn reach(
    instance: &mut Instance,
    program: &Program,
    look: &Look,
    basics: &[Member],
    entrant: Entrant,
) -> Result<f64, Refusal> {
    let edge = Edge::of(instance, program, basics, entrant)?;
    Ok(edge.block(program, look, entrant.rises).map_or(f64::INFINITY, |block| block.step))
}

/// The edge along which a member moves while the rest of the basis follows.
struct Edge<'b> {
    entrant: Entrant,
    basics: &'b [Member],
    /// How each basic one moves when the member rises by one.
    rates: Vec<f64>,
}

impl<'b> Edge<'b> {
    fn of(instance: &mut Instance, program: &Program, basics: &'b [Member], entrant: Entrant) -> Result<Self, Refusal> {
        // B z = −a for a column, B z = e for a row.
        let mut right = vec![0.0; program.rows.len()];
        match entrant.member {
            Member::Column(column) => {
                for &(row, value) in &program.columns[column.0].entries {
                    right[row.0] = -value;
                }
            }
            Member::Row(row) => right[row.0] = 1.0,
        }
        let mut rates = instance.solve(&right)?;
        for (basic, rate) in basics.iter().zip(&mut rates) {
            // The factorisation keeps a row's logical as minus its sum.
            if let Member::Row(_) = basic {
                *rate = -*rate;
            }
        }
        Ok(Self { entrant, basics, rates })
    }

    /// What stops the member first, going up or down.
    fn block(&self, program: &Program, look: &Look, rising: bool) -> Option<Block> {
        let sign = if rising { 1.0 } else { -1.0 };
        let basic =
            self.basics.iter().zip(&self.rates).filter(|(_, rate)| rate.abs() >= PIVOT).map(|(&basic, &rate)| {
                let (value, lower, upper) = match basic {
                    Member::Column(c) => {
                        (look.vertex.levels[c.0], program.columns[c.0].lower, program.columns[c.0].upper)
                    }
                    Member::Row(r) => (look.checked.sums[r.0], program.rows[r.0].lower, program.rows[r.0].upper),
                };
                Block::of(basic, value, lower, upper, sign * rate)
            });
        let own = Block::of(self.entrant.member, self.entrant.value, self.entrant.lower, self.entrant.upper, sign);
        basic.chain([own]).filter(|block| block.step.is_finite()).min_by(|a, b| a.step.total_cmp(&b.step))
    }
}

/// What stops a move, after which step, and where it then stands.
struct Block {
    step: f64,
    member: Member,
    position: Position,
}

impl Block {
    fn of(member: Member, value: f64, lower: f64, upper: f64, rate: f64) -> Self {
        let (bound, position) = if rate > 0.0 { (upper, Position::AtUpper) } else { (lower, Position::AtLower) };
        Self { step: ((bound - value) / rate).max(0.0), member, position }
    }
}

/// Takes one member, at 0 or another bound, out of the basis by a dual ratio test: the gains stay right.
/// `None` where no pivot can be trusted.
///
/// # Errors
/// When the solver has no factorisation.
pub fn leave(
    instance: &mut Instance,
    program: &Program,
    look: &Look,
    member: Member,
) -> Result<Option<Basis>, Refusal> {
    instance.factorise()?;
    let basics = instance.basics()?;
    let Some(place) = basics.iter().position(|&basic| basic == member) else { return Ok(Some(look.basis.clone())) };
    let mut unit = vec![0.0; program.rows.len()];
    unit[place] = 1.0;
    let inverse_row = instance.solve_transposed(&unit)?;
    let mut best: Option<(f64, Member)> = None;
    let mut offer = |candidate: Member, pivot: f64, gain: f64| {
        let ratio = (gain / pivot).abs();
        if pivot.abs() >= PIVOT && best.is_none_or(|(least, _)| ratio < least) {
            best = Some((ratio, candidate));
        }
    };
    for (at, column) in program.columns.iter().enumerate() {
        if look.basis.columns[at] != Position::Basic && column.lower < column.upper {
            let pivot = column.entries.iter().map(|&(row, value)| value * inverse_row[row.0]).sum();
            offer(Member::Column(ColumnIndex(at)), pivot, look.checked.gains[at]);
        }
    }
    for (at, row) in program.rows.iter().enumerate() {
        if look.basis.rows[at] != Position::Basic && row.lower < row.upper {
            offer(Member::Row(RowIndex(at)), inverse_row[at], look.vertex.worths[at]);
        }
    }
    let Some((_, entering)) = best else { return Ok(None) };
    let mut basis = look.basis.clone();
    put(&mut basis, member, Position::AtLower);
    put(&mut basis, entering, Position::Basic);
    Ok(Some(basis))
}

fn put(basis: &mut Basis, member: Member, position: Position) {
    match member {
        Member::Column(column) => basis.columns[column.0] = position,
        Member::Row(row) => basis.rows[row.0] = position,
    }
}
