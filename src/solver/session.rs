//! One model's solver session: the last optimal basis, kept from edit to edit, and the solve from it.

use std::sync::Arc;
use std::time::{Duration, Instant};

use super::basis::{Basis, NamedBasis, Position};
use super::canonical::{self, Canonical};
use super::cold::{self, Cold, Reached};
use super::instance::Instance;
use super::look::Look;
use super::message::{Account, Answer, Outcome, Start};
use super::stop::Stop;
use super::vertex::Vertex;
use super::warm::{Anchor, Run, warm};
use super::{minimal, optimum};
use crate::lp::Program;

/// A warm run may take this share of the last cold run's iterations; past it, starting afresh is the better bet. Measured on 618 edits of
/// all kinds on five programs: 2 met it. A cap of a seventh would have stopped 54, of which 52 ended sooner than a cold solve.
const SHARE_OF_COLD: f64 = 0.65;

/// A warm run may always take so many iterations.
const PIVOTS_ALLOWED: usize = 200;

/// One model's session.
#[derive(Default)]
pub struct Session {
    anchor: Option<Anchor>,
    asked: Option<Arc<Program>>,
    cold_pivots: Option<usize>,
    insisted: Option<Start>,
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
        Self { anchor, asked, cold_pivots, insisted: None }
    }

    /// Takes this start from now on whatever the last basis looks like: for measuring what the choice is worth.
    pub fn insist(&mut self, start: Option<Start>) {
        self.insisted = start;
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
        let reached = self.reach(&program, limit, stop, &mut account);
        account.time = begun.elapsed();
        let outcome = match reached {
            Reached::Optimal(instance, look) => self.settled(program, (instance, *look), (limit, stop), &mut account),
            Reached::Other(Outcome::Infeasible(conflict)) => {
                Outcome::Infeasible(minimal::shrink(&program, conflict, limit, stop))
            }
            Reached::Other(outcome) => outcome,
        };
        account.reading = begun.elapsed() - account.time - account.settling;
        account.cold_pivots = self.cold_pivots;
        Answer { outcome, account }
    }

    /// From a proven basis to the one plan and what is read off it.
    fn settled(
        &mut self,
        program: Arc<Program>,
        (mut instance, look): (Box<Instance>, Look),
        (limit, stop): (Duration, &Stop),
        account: &mut Account,
    ) -> Outcome {
        let begun = Instant::now();
        let mut plan = canonical::of(&mut instance, &program, look, stop);
        if plan.as_ref().is_ok_and(|plan| !plan.sure) && account.start != Start::Cold {
            // What only a tolerance decides depends on the way there: the one from nothing is the same for everybody.
            account.detours.push("near ties in a model too large to tell them apart exactly".into());
            if let Reached::Optimal(afresh, look) = cold::solve(&program, limit, stop).end {
                instance = afresh;
                plan = canonical::of(&mut instance, &program, *look, stop);
            }
        }
        account.settling = begun.elapsed();
        let told = plan.and_then(|plan| {
            account.exact_pivots = plan.pivots;
            Ok((optimum::of(&mut instance, &program, &plan, stop)?, plan))
        });
        match told {
            Err(refusal) => Outcome::Undecided(refusal.to_string()),
            Ok((optimum, Canonical { look: Look { basis, vertex, .. }, .. })) => {
                self.anchor = Some(Anchor { program, basis, vertex, instance: Some(instance) });
                // What was cut short may be another plan than the one.
                if stop.is_stopped() { Outcome::Interrupted } else { Outcome::Optimal(Box::new(optimum)) }
            }
        }
    }

    /// The proven basis of `program`, or what else comes of it.
    fn reach(&mut self, program: &Arc<Program>, limit: Duration, stop: &Stop, account: &mut Account) -> Reached {
        if let Some(mut anchor) = self.anchor.take() {
            if self.insisted != Some(Start::Cold) {
                let run = Run { limit, stop, cap: self.cap(), insisted: self.insisted };
                match warm(&mut anchor, program, &run, account) {
                    Ok(Reached::Optimal(instance, look)) => return Reached::Optimal(instance, look),
                    Ok(Reached::Other(outcome)) => {
                        anchor.instance = None;
                        self.anchor = Some(anchor);
                        return Reached::Other(outcome);
                    }
                    Err(detour) => account.detours.push(detour.into()),
                }
            }
            anchor.instance = None;
            self.anchor = Some(anchor);
        }
        account.start = Start::Cold;
        let Cold { end, pivots, detours } = cold::solve(program, limit, stop);
        account.pivots += pivots;
        account.detours.extend(detours.into_iter().map(Into::into));
        if let Reached::Optimal(..) = end {
            // Where no pivot was counted, as after an interior point, one for each row stands for what it took.
            self.cold_pivots = Some(if pivots == 0 { program.rows.len() } else { pivots });
        }
        end
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
}
