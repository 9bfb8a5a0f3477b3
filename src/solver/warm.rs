//! One solve from the last basis: carry it over the edit, look, run the variant that the look calls for, prove.

use std::sync::Arc;
use std::time::Duration;

use super::basis::Basis;
use super::change::change;
use super::cold::{self, Reached};
use super::findings::Ending;
use super::instance::Instance;
use super::let_go::let_go;
use super::live::Refusal;
use super::look::Look;
use super::message::{Account, Outcome, Start};
use super::soft::on_the_way;
use super::step::step;
use super::stop::Stop;
use super::vertex::Vertex;
use super::{by_name, certificate, inherit, opened};
use crate::lp::{Difference, Program};

/// The reason given where a run met its cap.
const TOO_LONG: &str = "more pivots than a fresh solve is worth";

/// What the next solve starts from: a program, a basis of it, and its vertex.
pub(super) struct Anchor {
    pub(super) program: Arc<Program>,
    pub(super) basis: Basis,
    pub(super) vertex: Vertex,
    pub(super) instance: Option<Box<Instance>>,
}

/// The limits of one warm solve.
pub(super) struct Run<'a> {
    pub(super) limit: Duration,
    pub(super) stop: &'a Stop,
    /// Iterations it may take.
    pub(super) cap: usize,
    /// The variant to take whatever the look says.
    pub(super) insisted: Option<Start>,
}

impl Run<'_> {
    /// The start to take from a basis: none where it is optimal.
    fn start(&self, look: &Look, program: &Program) -> Start {
        match look.start(program) {
            Start::None => Start::None,
            start => self.insisted.unwrap_or(start),
        }
    }
}

/// Solves `program` from `anchor`. An error is the reason why that led nowhere, as a short phrase.
pub(super) fn warm(
    anchor: &mut Anchor,
    program: &Arc<Program>,
    run: &Run<'_>,
    account: &mut Account,
) -> Result<Reached, &'static str> {
    if certificate::plain_contradiction(program).is_some() {
        return Err("bounds that contradict each other");
    }
    let difference = Difference::between(&anchor.program, program);
    if !worth_keeping(&anchor.program, program, &difference) {
        return Err("little was left of the last program");
    }
    let mut instance = live(anchor).map_err(|_| "the last basis could not be brought back")?;
    let lost = |_| "the last basis did not survive the edit";
    let Some(way) = on_the_way(&anchor.program, &anchor.basis, &anchor.vertex, program, &difference) else {
        change(&mut instance, &anchor.program, program, &difference).map_err(lost)?;
        opened::stay(&mut instance, &anchor.program, program, &difference).map_err(lost)?;
        return finish(anchor, instance, program, &difference, run, account);
    };
    if by_name::is_needed(&way, &difference) {
        return start_by_name(anchor, program, run, account);
    }
    let way = Arc::new(way);
    let first = step(&mut instance, &anchor.program, &anchor.vertex, &way).map_err(lost)?;
    let look = match begin(anchor, &mut instance, &way, first, run, account)? {
        Settled::Optimal(look) => look,
        // The way is narrower than the program: that it leads nowhere says nothing of the program.
        Settled::Other(Outcome::Infeasible(_)) => {
            account.detours.push("a contradiction on the way".into());
            return start_by_name(anchor, program, run, account);
        }
        Settled::Other(outcome) => return Ok(Reached::Other(outcome)),
    };
    let look = let_go(&mut instance, &way, *look, program).map_err(|_| "what was withdrawn could not be let go")?;
    match settle(&mut instance, program, look, run, account)? {
        Settled::Optimal(look) => Ok(Reached::Optimal(instance, look)),
        Settled::Other(outcome) => Ok(Reached::Other(outcome)),
    }
}

/// Whether enough of the last program is in the new one for its basis to help.
fn worth_keeping(last: &Program, program: &Program, difference: &Difference) -> bool {
    let size = |program: &Program| program.columns.len() + program.rows.len();
    let kept = size(last) - difference.removed_columns.len() - difference.removed_rows.len();
    2 * kept >= size(last).max(size(program)) && !program.columns.is_empty()
}

/// The rest of a warm solve where nothing needs to be withdrawn softly: the instance holds `program` already.
fn finish(
    anchor: &mut Anchor,
    mut instance: Box<Instance>,
    program: &Arc<Program>,
    difference: &Difference,
    run: &Run<'_>,
    account: &mut Account,
) -> Result<Reached, &'static str> {
    let lost = |_| "the last basis did not survive the edit";
    let first = match inherit::vertex(&anchor.program, &anchor.basis, &anchor.vertex, program, difference) {
        Some(vertex) => Look::of(program, instance.basis().map_err(lost)?, vertex),
        None => {
            let guess = inherit::carried(&anchor.program, &anchor.vertex, program, difference);
            Look::near(&mut instance, program, guess).map_err(lost)?
        }
    };
    match begin(anchor, &mut instance, program, first, run, account)? {
        Settled::Optimal(look) => Ok(Reached::Optimal(instance, look)),
        Settled::Other(outcome) => Ok(Reached::Other(outcome)),
    }
}

/// A solve from what of the last basis the program has by name, where there is no way between the two.
fn start_by_name(
    anchor: &mut Anchor,
    program: &Arc<Program>,
    run: &Run<'_>,
    account: &mut Account,
) -> Result<Reached, &'static str> {
    let lost = |_| "the last basis did not survive the edit";
    let mut instance = Box::new(cold::ready(program).map_err(lost)?);
    instance.set_basis(&by_name::carried(&anchor.program, &anchor.basis, program)).map_err(lost)?;
    let mended = by_name::fitted(&instance.basis().map_err(lost)?, program);
    instance.set_basis(&mended).map_err(lost)?;
    let first = Look::at(&mut instance, program).map_err(lost)?;
    account.by_name = true;
    let start = run.insisted.unwrap_or_else(|| first.start_by_name(program));
    let run = &Run { insisted: Some(start), ..*run };
    match begin(anchor, &mut instance, program, first, run, account)? {
        Settled::Optimal(look) => Ok(Reached::Optimal(instance, look)),
        Settled::Other(outcome) => Ok(Reached::Other(outcome)),
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
    account.start = run.start(&first, program);
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
    let chosen = run.start(&look, program);
    if account.start == Start::None {
        // The last basis was optimal on the way, and what was let go gives it something to gain after all.
        account.start = chosen;
    }
    let other = if chosen == Start::Primal { Start::Dual } else { Start::Primal };
    for variant in [chosen, other] {
        let ending = simplex(instance, variant, run, account).map_err(|_| "the solver refused its options")?;
        match ending {
            Ending::Optimal => {
                let look = Look::at(instance, program).map_err(|_| "the basis reached could not be factorised")?;
                if look.is_optimal() {
                    return Ok(Settled::Optimal(Box::new(look)));
                }
                account.detours.push("an answer that was not proven".into());
            }
            Ending::Stopped => return Ok(Settled::Other(Outcome::Interrupted)),
            Ending::OutOfPivots => {
                account.capped = true;
                return Err(TOO_LONG);
            }
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
            Ending::Trouble => account.detours.push("numerical trouble".into()),
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
