//! One model's solver session: the last optimal basis, kept from edit to edit, and the solve from it.

use std::sync::Arc;
use std::time::{Duration, Instant};

use super::basis::{Basis, NamedBasis, Position};
use super::change::change;
use super::cold::{self, Cold, End};
use super::instance::{Instance, Member};
use super::live::{Ending, Refusal};
use super::look::Look;
use super::message::{Account, Answer, Outcome, Start};
use super::soft::on_the_way;
use super::stop::Stop;
use super::swap::{self, Entrant};
use super::vertex::{Vertex, bound_at};
use super::{opened, optimum};
use crate::lp::{ColumnIndex, Difference, Program, RowIndex};

/// A warm run may take this share of the last cold run's iterations; past it, starting afresh is the better bet.
const SHARE_OF_COLD: f64 = 0.3;

/// A warm run may always take so many iterations.
const PIVOTS_ALLOWED: usize = 200;

/// Own pivots of the way to letting go; past so many the solver mends the basis as it can.
const MOST_SWAPS: usize = 16;

/// What the next solve starts from: a program, a basis of it, and its vertex.
struct Anchor {
    program: Arc<Program>,
    basis: Basis,
    vertex: Vertex,
    instance: Option<Box<Instance>>,
}

/// One model's session.
#[derive(Default)]
pub struct Session {
    anchor: Option<Anchor>,
    asked: Option<Arc<Program>>,
    cold_pivots: Option<usize>,
}

impl Session {
    /// A session that starts from a basis remembered for `program`, as if it had solved it.
    #[must_use]
    pub fn remembered(program: Program, basis: &NamedBasis, cold_pivots: Option<usize>) -> Self {
        let basis = Basis {
            columns: program.columns.iter().map(|c| basis.column(&c.key).unwrap_or(Position::AtLower)).collect(),
            rows: program.rows.iter().map(|r| basis.row(&r.key).unwrap_or(Position::Basic)).collect(),
        };
        let program = Arc::new(program);
        let asked = Some(program.clone());
        let fits = basis.fits(&program);
        let anchor = fits.then(|| Anchor { program, basis, vertex: Vertex::default(), instance: None });
        Self { anchor, asked, cold_pivots }
    }

    /// The program asked last: what a difference is taken from.
    #[must_use]
    pub fn asked(&self) -> Option<&Program> {
        self.asked.as_deref()
    }

    /// Iterations of the last solve from nothing.
    #[must_use]
    pub fn cold_pivots(&self) -> Option<usize> {
        self.cold_pivots
    }

    /// Lets the live instance go and keeps the basis, to save memory.
    pub fn shrink(&mut self) {
        if let Some(anchor) = &mut self.anchor {
            anchor.instance = None;
        }
    }

    /// Entries held by the live instance; 0 where there is none.
    #[must_use]
    pub fn live_entries(&self) -> usize {
        let anchor = self.anchor.as_ref().filter(|anchor| anchor.instance.is_some());
        anchor.map_or(0, |anchor| anchor.program.entries() + anchor.program.columns.len() + anchor.program.rows.len())
    }

    /// Solves `program`, from the last basis where there is one that helps.
    pub fn solve(&mut self, program: impl Into<Arc<Program>>, limit: Duration, stop: &Stop) -> Answer {
        let begun = Instant::now();
        let program = program.into();
        self.asked = Some(program.clone());
        let mut account = Account::default();
        let outcome = self.outcome(program, limit, stop, &mut account);
        account.time = begun.elapsed();
        account.cold_pivots = self.cold_pivots;
        Answer { outcome, account }
    }

    fn outcome(&mut self, program: Arc<Program>, limit: Duration, stop: &Stop, account: &mut Account) -> Outcome {
        if let Some(mut anchor) = self.anchor.take() {
            if worth_keeping(&anchor.program, &program) {
                let run = Run { limit, stop, cap: self.cap() };
                match warm(&mut anchor, &program, &run, account) {
                    Ok(Warm::Optimal(instance, look)) => return self.arrive(program, instance, *look),
                    Ok(Warm::Other(outcome)) => {
                        anchor.instance = None;
                        self.anchor = Some(anchor);
                        return outcome;
                    }
                    Err(detour) => account.detours.push(detour),
                }
            }
            anchor.instance = None;
            self.anchor = Some(anchor);
        }
        account.start = Start::Cold;
        let Cold { end, pivots, detours } = cold::solve(&program, limit, stop);
        account.pivots += pivots;
        account.detours.extend(detours);
        match end {
            End::Optimal(instance, look) => {
                self.cold_pivots = Some(pivots);
                self.arrive(program, instance, *look)
            }
            End::Other(outcome) => outcome,
        }
    }

    fn cap(&self) -> usize {
        let share = |pivots: usize| {
            #[expect(
                clippy::cast_precision_loss,
                clippy::cast_possible_truncation,
                clippy::cast_sign_loss,
                reason = "a rough share of a count"
            )]
            let share = (pivots as f64 * SHARE_OF_COLD) as usize;
            share.max(PIVOTS_ALLOWED)
        };
        self.cold_pivots.map_or(usize::MAX, share)
    }

    fn arrive(&mut self, program: Arc<Program>, mut instance: Box<Instance>, look: Look) -> Outcome {
        let outcome = optimum::of(&mut instance, &program, &look);
        self.anchor = Some(Anchor { program, basis: look.basis, vertex: look.vertex, instance: Some(instance) });
        outcome
    }
}

/// Whether enough of the last program is in the new one for its basis to help.
fn worth_keeping(last: &Program, program: &Program) -> bool {
    let kept = program.columns.iter().filter(|column| last.column(&column.key).is_some()).count()
        + program.rows.iter().filter(|row| last.row(&row.key).is_some()).count();
    let all = (program.columns.len() + program.rows.len()).max(last.columns.len() + last.rows.len());
    2 * kept >= all && !program.columns.is_empty()
}

/// The limits of one warm solve.
struct Run<'a> {
    limit: Duration,
    stop: &'a Stop,
    cap: usize,
}

/// What a warm solve came to.
enum Warm {
    Optimal(Box<Instance>, Box<Look>),
    Other(Outcome),
}

/// Solves `program` from `anchor`. An error is the reason why that led nowhere, as a short phrase.
fn warm(
    anchor: &mut Anchor,
    program: &Arc<Program>,
    run: &Run<'_>,
    account: &mut Account,
) -> Result<Warm, &'static str> {
    if super::certificate::plain_contradiction(program).is_some() {
        return Err("bounds that contradict each other");
    }
    let mut instance = live(anchor).map_err(|_| "the last basis could not be brought back")?;
    let lost = |_| "the last basis did not survive the edit";
    let difference = Difference::between(&anchor.program, program);
    let Some(way) = on_the_way(&anchor.program, &anchor.basis, &anchor.vertex, program, &difference) else {
        change(&mut instance, &anchor.program, program, &difference).map_err(lost)?;
        opened::stay(&mut instance, &anchor.program, program, &difference).map_err(lost)?;
        return finish(anchor, instance, program, run, account);
    };
    let way = Arc::new(way);
    let first = step(&mut instance, &anchor.program, &way).map_err(lost)?;
    let look = match begin(anchor, &mut instance, &way, first, run, account)? {
        Settled::Optimal(look) => look,
        // The way is narrower than the program: that it leads nowhere says nothing of the program.
        Settled::Other(Outcome::Infeasible(_)) => return Err("a contradiction on the way"),
        Settled::Other(outcome) => return Ok(Warm::Other(outcome)),
    };
    let look = let_go(&mut instance, &way, *look, program).map_err(|_| "what was withdrawn could not be let go")?;
    match settle(&mut instance, program, look, run, account)? {
        Settled::Optimal(look) => Ok(Warm::Optimal(instance, look)),
        Settled::Other(outcome) => Ok(Warm::Other(outcome)),
    }
}

/// The rest of a warm solve where nothing needs to be withdrawn softly: the instance holds `program` already.
fn finish(
    anchor: &mut Anchor,
    mut instance: Box<Instance>,
    program: &Arc<Program>,
    run: &Run<'_>,
    account: &mut Account,
) -> Result<Warm, &'static str> {
    let first = Look::at(&mut instance, program).map_err(|_| "the last basis did not survive the edit")?;
    match begin(anchor, &mut instance, program, first, run, account)? {
        Settled::Optimal(look) => Ok(Warm::Optimal(instance, look)),
        Settled::Other(outcome) => Ok(Warm::Other(outcome)),
    }
}

/// Records what the first look found, and runs what it calls for. An interrupted run leaves what it reached as the anchor: a
/// better start than what was left.
fn begin(
    anchor: &mut Anchor,
    instance: &mut Instance,
    program: &Arc<Program>,
    first: Look,
    run: &Run<'_>,
    account: &mut Account,
) -> Result<Settled, &'static str> {
    account.start = first.start();
    account.primal_infeasible = Some(first.primal);
    account.dual_infeasible = Some(first.dual);
    let settled = settle(instance, program, first, run, account)?;
    if let Settled::Other(Outcome::Interrupted) = settled
        && let Ok(basis) = instance.basis()
    {
        *anchor = Anchor { program: program.clone(), basis, vertex: Vertex::default(), instance: None };
    }
    Ok(settled)
}

/// The anchor's live instance, made again from its basis where it is gone.
fn live(anchor: &mut Anchor) -> Result<Box<Instance>, Refusal> {
    if let Some(instance) = anchor.instance.take() {
        return Ok(instance);
    }
    let mut instance = Box::new(cold::ready(&anchor.program)?);
    instance.set_basis(&anchor.basis)?;
    instance.factorise()?;
    anchor.basis = instance.basis()?;
    anchor.vertex = Vertex::of(&mut instance, &anchor.program, &anchor.basis)?;
    Ok(instance)
}

fn step(instance: &mut Instance, from: &Program, to: &Program) -> Result<Look, Refusal> {
    let difference = Difference::between(from, to);
    change(instance, from, to, &difference)?;
    opened::stay(instance, from, to, &difference)?;
    Look::at(instance, to)
}

enum Settled {
    Optimal(Box<Look>),
    Other(Outcome),
}

/// Runs the simplex variant that the look calls for; where that leads nowhere, the other one.
fn settle(
    instance: &mut Instance,
    program: &Program,
    look: Look,
    run: &Run<'_>,
    account: &mut Account,
) -> Result<Settled, &'static str> {
    if look.is_optimal() {
        return Ok(Settled::Optimal(Box::new(look)));
    }
    let chosen = if look.primal == 0 || look.start() == Start::Primal { Start::Primal } else { Start::Dual };
    let other = if chosen == Start::Primal { Start::Dual } else { Start::Primal };
    for variant in [chosen, other] {
        let ending = simplex(instance, variant, run, account).map_err(|_| "the solver refused its options")?;
        match ending {
            Ending::Optimal => {
                let look = Look::at(instance, program).map_err(|_| "the basis reached could not be factorised")?;
                if look.is_optimal() {
                    return Ok(Settled::Optimal(Box::new(look)));
                }
                account.detours.push("an answer that was not proven");
            }
            Ending::Stopped => return Ok(Settled::Other(Outcome::Interrupted)),
            Ending::OutOfPivots => return Err("more pivots than a fresh solve is worth"),
            Ending::OutOfTime => return Err("the time limit"),
            Ending::Infeasible => {
                let conflict = cold::explain_infeasible(program, instance);
                if conflict.proven {
                    return Ok(Settled::Other(Outcome::Infeasible(conflict)));
                }
                return Err("a contradiction that was not proven");
            }
            Ending::Unbounded => {
                let growth = cold::explain_unbounded(program, instance);
                if growth.proven {
                    return Ok(Settled::Other(Outcome::Unbounded(growth)));
                }
                return Err("a growth that was not proven");
            }
            Ending::Trouble => account.detours.push("numerical trouble"),
        }
    }
    Err("neither simplex variant got there")
}

fn simplex(instance: &mut Instance, variant: Start, run: &Run<'_>, account: &mut Account) -> Result<Ending, Refusal> {
    let left = run.cap.saturating_sub(account.pivots);
    instance.live.set("simplex_strategy", if variant == Start::Primal { 4 } else { 1 })?;
    instance.live.set("simplex_iteration_limit", i32::try_from(left).unwrap_or(i32::MAX))?;
    instance.live.set("time_limit", run.limit.as_secs_f64())?;
    let ending = instance.live.run(run.stop);
    account.pivots += instance.live.pivots();
    instance.live.set("simplex_iteration_limit", i32::MAX)?;
    Ok(ending)
}

/// From the program on the way to the program itself: pivots what is to go out of the way of the basis, then lets it go.
fn let_go(instance: &mut Instance, way: &Program, mut look: Look, program: &Program) -> Result<Look, Refusal> {
    for _ in 0..MOST_SWAPS {
        let Some(basis) = next_swap(instance, way, &look, program)? else { break };
        instance.set_basis(&basis)?;
        look = Look::at(instance, way)?;
    }
    step(instance, way, program)
}

/// The basis after one more member is out of the way; `None` when nothing is left, or nothing can be done.
fn next_swap(instance: &mut Instance, way: &Program, look: &Look, program: &Program) -> Result<Option<Basis>, Refusal> {
    let sign = way.sense.sign();
    for (at, column) in way.columns.iter().enumerate() {
        let member = Member::Column(ColumnIndex(at));
        let after = program.column(&column.key).map(|found| &program.columns[found.0]);
        let basis = match (after, bound_at(look.basis.columns[at], column.lower, column.upper)) {
            (None, None) => swap::leave(instance, way, look, member)?,
            (Some(after), Some(value)) if after.lower < value && value < after.upper => {
                let rises = sign * look.checked.gains[at] < 0.0;
                let entrant = Entrant { member, value, lower: after.lower, upper: after.upper, rises };
                swap::enter(instance, way, look, entrant)?
            }
            _ => None,
        };
        if basis.is_some() {
            return Ok(basis);
        }
    }
    for (at, row) in way.rows.iter().enumerate() {
        let after = program.row(&row.key).map(|found| &program.rows[found.0]);
        let (lower, upper) = after.map_or((f64::NEG_INFINITY, f64::INFINITY), |after| (after.lower, after.upper));
        let Some(value) = bound_at(look.basis.rows[at], row.lower, row.upper) else { continue };
        if lower < value && value < upper {
            let rises = sign * look.vertex.worths[at] < 0.0;
            let entrant = Entrant { member: Member::Row(RowIndex(at)), value, lower, upper, rises };
            let basis = swap::enter(instance, way, look, entrant)?;
            if basis.is_some() {
                return Ok(basis);
            }
        }
    }
    Ok(None)
}
