//! What the choice of start is worth: a table of ratios, each of two times of one run of this program.
//!
//! `cargo bench --bench starts` prints it; `cargo bench --bench starts -- 3 mix` with three edits of each kind instead of ten, and for
//! one of the programs.

#![expect(clippy::unwrap_used, clippy::print_stdout, reason = "a measurement that prints its table or fails")]

mod edits;
#[path = "../../support/instances.rs"]
mod instances;
mod programs;
#[path = "../../support/rng.rs"]
mod rng;

use std::collections::BTreeMap;
use std::time::{Duration, Instant};

use edits::KINDS;
use millreeve::lp::{Difference, Program};
use millreeve::solver::change::change;
use millreeve::solver::instance::Instance;
use millreeve::solver::message::{Account, Optimum, Outcome, Start};
use millreeve::solver::session::Session;
use millreeve::solver::stop::Stop;
use rng::Rng;

/// Each time is the least of so many.
const REPEATS: usize = 3;

/// Solves shorter than this are too short to choose between starts for.
const LEAST: f64 = 1e-3;

const LIMIT: Duration = Duration::from_secs(60);

/// The times of one edit, in seconds.
struct Times {
    taken: f64,
    primal: f64,
    dual: f64,
    cold: f64,
    /// The solver's own warm start as it is by default, without our proof.
    default: f64,
    /// From the proven answer to the one plan.
    settling: f64,
}

fn main() {
    let words: Vec<String> = std::env::args().skip(1).filter(|word| !word.starts_with('-')).collect();
    let count = words.iter().find_map(|word| word.parse().ok()).unwrap_or(10);
    let names: Vec<&String> = words.iter().filter(|word| word.parse::<u64>().is_err()).collect();
    let mut all: BTreeMap<&str, Vec<Times>> = BTreeMap::new();
    println!(
        "{:10} {:22} {:>5} {:>8} {:>10} {:>13} {:>12} {:>10} {:>10} {:>12} {:>7} {:>11}",
        "program",
        "edit",
        "broke",
        "taken ms",
        "cold/taken",
        "default/taken",
        "primal/taken",
        "dual/taken",
        "worst",
        "settle/taken",
        "pivots",
        "cold pivots"
    );
    for (name, program) in programs::programs() {
        if !names.is_empty() && !names.iter().any(|wanted| *wanted == name) {
            continue;
        }
        let (optimum, cold_pivots) = optimum(&program);
        let base = Base { program, optimum, cold_pivots };
        for (kind, edit, _) in KINDS {
            let measured = measure(&base, edit, count);
            let (times, accounts): (Vec<Times>, Vec<(usize, usize)>) = measured.into_iter().unzip();
            if times.is_empty() {
                println!("{name:10} {kind:22} {:5}", 0);
                continue;
            }
            let pivots = mean(accounts.iter().map(|pivots| pivots.0 as f64 + 1.0)) - 1.0;
            let cold_pivots = mean(accounts.iter().map(|pivots| pivots.1 as f64 + 1.0)) - 1.0;
            println!(
                "{name:10} {kind:22} {:5} {:8.2} {:10.1} {:13.2} {:12.1} {:10.1} {:10.2} {:12.2} {pivots:7.1} {cold_pivots:11.1}",
                times.len(),
                1e3 * mean(times.iter().map(|t| t.taken)),
                mean(times.iter().map(|t| t.cold / t.taken)),
                mean(times.iter().map(|t| t.default / t.taken)),
                mean(times.iter().map(|t| t.primal / t.taken)),
                mean(times.iter().map(|t| t.dual / t.taken)),
                worst(&times),
                mean(times.iter().map(|t| t.settling / t.taken)),
            );
            all.entry(kind).or_default().extend(times);
        }
    }
    summary(&all);
}

fn summary(all: &BTreeMap<&str, Vec<Times>>) {
    println!(
        "\n{:22} {:>5} {:>10} {:>7} {:>14} {:>12} {:>10} {:>16} {:>12} {:>17}",
        "edit",
        "broke",
        "cold/taken",
        "aimed",
        "default/taken",
        "regret mean",
        "95th",
        "worst taken/cold",
        "settle/taken",
        "worst settle/cold"
    );
    for (kind, _, aimed) in KINDS {
        let Some(times) = all.get(kind) else { continue };
        let mut regrets: Vec<f64> =
            times.iter().filter(|t| t.taken > LEAST).map(|t| t.taken / t.primal.min(t.dual).min(t.cold)).collect();
        regrets.sort_by(f64::total_cmp);
        let rank = (regrets.len() * 95).div_ceil(100).saturating_sub(1);
        println!(
            "{kind:22} {:5} {:10.1} {aimed:7.0} {:14.2} {:12.2} {:10.2} {:16.2} {:12.2} {:17.2}",
            times.len(),
            mean(times.iter().map(|t| t.cold / t.taken)),
            mean(times.iter().map(|t| t.default / t.taken)),
            mean(regrets.iter().copied()),
            regrets.get(rank).copied().unwrap_or(f64::NAN),
            worst(times),
            mean(times.iter().map(|t| t.settling / t.taken)),
            times.iter().map(|t| t.settling / t.cold).fold(0.0, f64::max),
        );
    }
}

/// What is edited: a program and its optimum, found by a cold solve of so many iterations.
struct Base {
    program: Program,
    optimum: Optimum,
    cold_pivots: usize,
}

fn optimum(program: &Program) -> (Optimum, usize) {
    let answer = Session::default().solve(program.clone(), LIMIT, &Stop::default());
    match answer.outcome {
        Outcome::Optimal(optimum) => (*optimum, answer.account.pivots),
        other => unreachable!("the programs have plans: {other:?}"),
    }
}

/// The times of edits that broke the optimum and left a plan, and the pivots of the start taken and of the cold one.
fn measure(base: &Base, edit: edits::Edit, count: u64) -> Vec<(Times, (usize, usize))> {
    let mut measured = Vec::new();
    for seed in 0..count {
        let Some(edited) = edit(&mut Rng::new(seed + 1), &base.program, &base.optimum) else { continue };
        let Some((taken, account)) = solve(base, &edited, None) else { continue };
        if account.primal_infeasible == Some(0) && account.dual_infeasible == Some(0) {
            continue;
        }
        let forced = |start| {
            solve(base, &edited, Some(start)).map_or((f64::INFINITY, 0), |(time, account)| (time, account.pivots))
        };
        let (cold, cold_pivots) = forced(Start::Cold);
        let times = Times {
            taken,
            primal: forced(Start::Primal).0,
            dual: forced(Start::Dual).0,
            cold,
            default: by_default(base, &edited),
            settling: account.settling.as_secs_f64(),
        };
        measured.push((times, (account.pivots, cold_pivots)));
    }
    measured
}

/// The least time of a solve of `edited` from the live optimum of `program`, with its account; `None` where it has no plan.
fn solve(base: &Base, edited: &Program, insisted: Option<Start>) -> Option<(f64, Account)> {
    let Base { program, optimum, cold_pivots } = base;
    let mut least: Option<(f64, Account)> = None;
    for _ in 0..REPEATS {
        let mut session = Session::remembered(program.clone(), &optimum.basis.named(program), Some(*cold_pivots));
        // Live, as after a first replan.
        session.solve(program.clone(), LIMIT, &Stop::default());
        session.insist(insisted);
        let answer = session.solve(edited.clone(), LIMIT, &Stop::default());
        let Outcome::Optimal(_) = answer.outcome else { return None };
        let time = answer.account.time.as_secs_f64();
        if least.as_ref().is_none_or(|(best, _)| time < *best) {
            least = Some((time, answer.account));
        }
    }
    least
}

/// The least time of the solver's own warm start, with its default settings, from the same basis.
fn by_default(base: &Base, edited: &Program) -> f64 {
    let Base { program, optimum, .. } = base;
    let difference = Difference::between(program, edited);
    let times = (0..REPEATS).map(|_| {
        let mut instance = Instance::new(program).unwrap();
        instance.live.set("simplex_dual_edge_weight_strategy", -1).unwrap();
        instance.set_basis(&optimum.basis).unwrap();
        instance.live.run(&Stop::default());
        let begun = Instant::now();
        change(&mut instance, program, edited, &difference).unwrap();
        instance.live.run(&Stop::default());
        begun.elapsed().as_secs_f64()
    });
    times.fold(f64::INFINITY, f64::min)
}

/// The longest that a start taken was, in cold solves.
fn worst(times: &[Times]) -> f64 {
    times.iter().map(|t| t.taken / t.cold).fold(0.0, f64::max)
}

/// Geometric mean.
fn mean(numbers: impl Iterator<Item = f64>) -> f64 {
    let (sum, count) = numbers.fold((0.0, 0.0), |(sum, count), number| (sum + number.ln(), count + 1.0));
    f64::exp(sum / count)
}
