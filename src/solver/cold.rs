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

/// From the fastest to the most patient, but on programs of many rows.
const LADDER: [Rung; 4] = [
    Rung { name: "dual simplex with presolve", presolve: "choose", solver: "simplex", strategy: 1 },
    Rung { name: "dual simplex without presolve", presolve: "off", solver: "simplex", strategy: 1 },
    Rung { name: "primal simplex without presolve", presolve: "off", solver: "simplex", strategy: 4 },
    Rung { name: "interior point and crossover", presolve: "choose", solver: "ipm", strategy: 1 },
];

/// With more rows than this the last rung comes first: measured on works of 200 activities over 52 weeks with stocks (7,488 rows), 6.5 s
/// against 43 s by dual simplex and 43 s by primal.
const MANY_ROWS: usize = 4_000;

/// The rungs in the order in which `program` climbs them.
fn ladder(program: &Program) -> impl Iterator<Item = &'static Rung> {
    let first = if program.rows.len() > MANY_ROWS { LADDER.len() - 1 } else { 0 };
    LADDER.iter().cycle().skip(first).take(LADDER.len())
}

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
    for rung in ladder(program) {
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
    if ending != Ending::Optimal {
        return Ok(without_plan(ending, program, &mut scratch, limit));
    }
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
        if polished != Ending::Optimal {
            return Ok(without_plan(polished, program, &mut instance, limit));
        }
        look = Look::at(&mut instance, program)?;
    }
    Ok(if look.is_optimal() {
        Reached::Optimal(Box::new(instance), Box::new(look))
    } else {
        Reached::Other(Outcome::Undecided(String::new()))
    })
}

/// What a run came to that did not end in an optimum.
fn without_plan(ending: Ending, program: &Program, instance: &mut Instance, limit: Duration) -> Reached {
    Reached::Other(match ending {
        Ending::Infeasible => Outcome::Infeasible(explain_infeasible(program, instance)),
        Ending::Unbounded => Outcome::Unbounded(explain_unbounded(program, instance)),
        Ending::OutOfTime => Outcome::Undecided(format!("the time limit of {} s was reached", limit.as_secs_f64())),
        Ending::Stopped => Outcome::Interrupted,
        Ending::Optimal | Ending::OutOfPivots | Ending::Trouble => Outcome::Undecided(String::new()),
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

#[cfg(test)]
mod tests {
    use super::*;
    use crate::lp::{Column, Key, Row, RowIndex, Sense};

    /// Independent copies of one small program: its optimum of 36 (the Wyndor example of Hillier & Lieberman, *Introduction to Operations
    /// Research*, from memory) as many times over.
    fn copies(count: usize) -> Program {
        let mut program = Program { sense: Sense::Maximise, offset: 0.0, columns: Vec::new(), rows: Vec::new() };
        for copy in 0..count {
            let rows = [("a", 4.0), ("b", 12.0), ("c", 18.0)].map(|(name, upper)| Row {
                key: Key::new(&format!("{copy:05}{name}")),
                lower: f64::NEG_INFINITY,
                upper,
            });
            let first = program.rows.len();
            program.rows.extend(rows);
            for (name, aim, entries) in [("x", 3.0, [(0, 1.0), (2, 3.0)]), ("y", 5.0, [(1, 2.0), (2, 2.0)])] {
                program.columns.push(Column {
                    key: Key::new(&format!("{copy:05}{name}")),
                    lower: 0.0,
                    upper: f64::INFINITY,
                    aim,
                    entries: entries.map(|(row, value)| (RowIndex(first + row), value)).into(),
                });
            }
        }
        program
    }

    /// The solver's own tolerance takes 9e-8 for nothing, and a plan for one that has an end.
    #[test]
    fn a_little_earned_without_limit_has_no_end() {
        let mut program = copies(1);
        let (lower, upper) = (0.0, f64::INFINITY);
        program.columns.push(Column { key: Key::new("z"), lower, upper, aim: 9e-8, entries: Vec::new() });
        let Cold { end, detours, .. } = solve(&program, Duration::from_secs(60), &Stop::default());
        let Reached::Other(Outcome::Unbounded(growth)) = end else { panic!("it has no end: {detours:?}") };
        assert!(growth.proven && detours.is_empty(), "{growth:?} {detours:?}");
    }

    #[test]
    fn programs_of_many_rows_come_to_a_proven_basis_too() {
        for count in [MANY_ROWS / 3, MANY_ROWS / 3 + 1] {
            let program = copies(count);
            let Cold { end, detours, .. } = solve(&program, Duration::from_secs(60), &Stop::default());
            assert!(detours.is_empty(), "{detours:?}");
            let Reached::Optimal(_, look) = end else { unreachable!("it has a plan") };
            assert!(look.is_optimal());
            #[expect(clippy::cast_precision_loss, reason = "some thousands")]
            let sum = 36.0 * count as f64;
            assert!((look.checked.aim - sum).abs() <= 1e-9 * sum, "{} is not {sum}", look.checked.aim);
        }
        assert_eq!(ladder(&copies(MANY_ROWS / 3 + 1)).next().map(|rung| rung.solver), Some("ipm"));
        assert_eq!(ladder(&copies(1)).next().map(|rung| rung.solver), Some("simplex"));
    }
}
