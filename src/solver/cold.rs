//! Solving afresh, down a ladder of settings until one gives an answer that can be proven.

use std::time::Duration;

use super::certificate;
use super::findings::Ending;
use super::instance::Instance;
use super::live::Refusal;
use super::look::{Look, is_flat};
use super::message::{Conflict, Growth, Outcome};
use super::proof::TOLERANCE;
use super::stop::Stop;
use crate::lp::Program;

/// The solver's number for Devex edge weights.
const DEVEX: i32 = 1;

/// The solver's number for choosing edge weights itself.
const CHOSEN_BY_THE_SOLVER: i32 = -1;

/// How a solve from nothing is set up.
struct Rung {
    name: &'static str,
    presolve: &'static str,
    solver: &'static str,
    strategy: i32,
}

/// From the fastest to the most patient.
const LADDER: [Rung; 4] = [
    Rung { name: "dual simplex with presolve", presolve: "choose", solver: "simplex", strategy: 1 },
    Rung { name: "dual simplex without presolve", presolve: "off", solver: "simplex", strategy: 1 },
    Rung { name: "primal simplex without presolve", presolve: "off", solver: "simplex", strategy: 4 },
    Rung { name: "interior point and crossover", presolve: "choose", solver: "ipm", strategy: 1 },
];

/// What a solve from nothing came to.
pub struct Cold {
    /// How it ended.
    pub end: Reached,
    /// Simplex iterations of the run that gave the answer.
    pub pivots: usize,
    /// Rungs tried in vain.
    pub detours: Vec<&'static str>,
}

/// Where a solve arrived.
pub enum Reached {
    /// A proven basis, in an instance ready for warm starts.
    Optimal(Box<Instance>, Box<Look>),
    /// No plan, or no end, or no answer.
    Other(Outcome),
}

/// Solves `program` from nothing.
#[must_use]
pub fn solve(program: &Program, limit: Duration, stop: &Stop) -> Cold {
    let mut detours = Vec::new();
    let mut unproven: Option<Outcome> = None;
    let mut pivots = 0;
    if let Some(conflict) = certificate::plain_contradiction(program) {
        return Cold { end: Reached::Other(Outcome::Infeasible(conflict)), pivots, detours };
    }
    for rung in &LADDER {
        match climb(program, rung, limit, stop, &mut pivots) {
            Ok(Reached::Other(Outcome::Infeasible(conflict @ Conflict { proven: false, .. }))) => {
                unproven.get_or_insert(Outcome::Infeasible(conflict));
            }
            Ok(Reached::Other(Outcome::Unbounded(Growth { proven: false, rates }))) => {
                unproven.get_or_insert(Outcome::Unbounded(Growth { proven: false, rates }));
            }
            Ok(Reached::Other(Outcome::Undecided(_))) | Err(_) => {}
            Ok(end) => return Cold { end, pivots, detours },
        }
        detours.push(rung.name);
    }
    let reason = "every setting of the solver ended in numerical trouble; the coefficients may be spread too widely";
    Cold { end: Reached::Other(unproven.unwrap_or_else(|| Outcome::Undecided(reason.to_owned()))), pivots, detours }
}

fn climb(program: &Program, rung: &Rung, limit: Duration, stop: &Stop, pivots: &mut usize) -> Result<Reached, Refusal> {
    let mut scratch = Instance::new(program)?;
    scratch.live.set("presolve", rung.presolve)?;
    scratch.live.set("solver", rung.solver)?;
    scratch.live.set("simplex_strategy", rung.strategy)?;
    scratch.live.set("time_limit", limit.as_secs_f64())?;
    let ending = scratch.live.run(stop);
    *pivots = scratch.live.pivots();
    Ok(match ending {
        Ending::Optimal => {
            let basis = scratch.basis()?;
            drop(scratch);
            let mut instance = ready(program)?;
            instance.set_basis(&basis)?;
            let mut look = Look::at(&mut instance, program)?;
            if !look.is_optimal() {
                // The solver's tolerances are wider than the proof's: a few more pivots with tight ones.
                instance.live.set("time_limit", limit.as_secs_f64())?;
                let polished = instance.live.run(stop);
                *pivots += instance.live.pivots();
                if polished == Ending::Stopped {
                    return Ok(Reached::Other(Outcome::Interrupted));
                }
                look = Look::at(&mut instance, program)?;
            }
            if look.is_optimal() {
                Reached::Optimal(Box::new(instance), Box::new(look))
            } else {
                Reached::Other(Outcome::Undecided(String::new()))
            }
        }
        Ending::Infeasible => Reached::Other(Outcome::Infeasible(explain_infeasible(program, &mut scratch))),
        Ending::Unbounded => Reached::Other(Outcome::Unbounded(explain_unbounded(program, &mut scratch))),
        Ending::OutOfTime => {
            Reached::Other(Outcome::Undecided(format!("the time limit of {} s was reached", limit.as_secs_f64())))
        }
        Ending::Stopped => Reached::Other(Outcome::Interrupted),
        Ending::OutOfPivots | Ending::Trouble => Reached::Other(Outcome::Undecided(String::new())),
    })
}

/// An instance with `program`, set up for warm starts and tight tolerances.
///
/// # Errors
/// When the solver refuses the program.
pub fn ready(program: &Program) -> Result<Instance, Refusal> {
    let mut instance = Instance::new(program)?;
    instance.live.set("primal_feasibility_tolerance", TOLERANCE)?;
    instance.live.set("dual_feasibility_tolerance", TOLERANCE)?;
    // Perturbed numbers have to be put right again at the end, which takes a run of a few pivots longer than it is; a run that stalls
    // without them meets its cap.
    instance.live.set("dual_simplex_cost_perturbation_multiplier", 0.0)?;
    instance.live.set("primal_simplex_bound_perturbation_multiplier", 0.0)?;
    // Read at the first run of an instance only. Exact steepest-edge weights take a solve per row at every warm start, which Devex
    // spares; where rows are few and columns many they are cheap and save many iterations.
    let weights = if is_flat(program) { CHOSEN_BY_THE_SOLVER } else { DEVEX };
    instance.live.set("simplex_dual_edge_weight_strategy", weights)?;
    Ok(instance)
}

/// The contradiction behind an infeasible run: from the instance's ray, which voids its point.
pub fn explain_infeasible(program: &Program, instance: &mut Instance) -> Conflict {
    let ray = instance.live.dual_ray();
    ray.map_or_else(Conflict::default, |ray| {
        let own: Vec<f64> = instance.rows.iter().map(|&at| ray[at]).collect();
        certificate::conflict(program, &own)
    })
}

/// The growth behind an unbounded run: from the instance's ray, which voids its point.
pub fn explain_unbounded(program: &Program, instance: &mut Instance) -> Growth {
    let ray = instance.live.primal_ray();
    // Without rows that lean on each other the solver has no ray to give.
    let shown = ray.map(|ray| {
        let own: Vec<f64> = instance.columns.iter().map(|&at| ray[at]).collect();
        certificate::growth(program, &own)
    });
    shown.or_else(|| certificate::plain_growth(program)).unwrap_or_default()
}
