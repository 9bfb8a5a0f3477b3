//! One model, one plan: levels depend on the program alone, whatever way led to them.
//!
//! Every program here is solved along several ways: warm along a chain of edits, from nothing, after a restart, from the basis of
//! another program, from that of its aim turned round. Levels must agree in all the digits that a plan shows. `MILLREEVE_PURITY=10`
//! makes ten times as many comparisons.

#![expect(clippy::unwrap_used, reason = "helpers of tests fail the test")]

#[path = "support/instances.rs"]
mod instances;
#[path = "support/program_edit.rs"]
mod program_edit;
#[path = "support/rng.rs"]
mod rng;
#[path = "support/works.rs"]
mod works;

use std::fmt::Write as _;
use std::fs;
use std::time::Duration;

use instances::netlib;
use millreeve::lp::{Key, Program, Sense, build, mps};
use millreeve::plan::number;
use millreeve::solver::basis::Position;
use millreeve::solver::message::{Optimum, Outcome};
use millreeve::solver::session::Session;
use millreeve::solver::stop::Stop;
use program_edit::EDITS;
use rng::Rng;
use works::works;

/// Edits in a chain.
const LENGTH: usize = 20;

/// Failures shown.
const SHOWN: usize = 12;

/// How many times as many comparisons are made.
fn times() -> u64 {
    std::env::var("MILLREEVE_PURITY").ok().and_then(|times| times.parse().ok()).unwrap_or(1)
}

fn solve(session: &mut Session, program: &Program) -> Outcome {
    session.solve(program.clone(), Duration::from_secs(60), &Stop::default()).outcome
}

/// What a plan shows of an outcome: aim and levels in 10 digits, whether it is exact, whether there are ties.
fn shown(outcome: &Outcome) -> String {
    let digits = |number: f64| {
        let mut text = String::new();
        number::push(&mut text, if number.abs() <= 1e-9 { 0.0 } else { number });
        text
    };
    match outcome {
        Outcome::Optimal(optimum) => {
            let mut text = format!("{} {} {}", digits(optimum.aim), optimum.exact, optimum.levels_unique);
            for level in &optimum.levels {
                let _ = write!(text, " {}", digits(*level));
            }
            text
        }
        Outcome::Infeasible(_) => "no plan".to_owned(),
        Outcome::Unbounded(_) => "no end".to_owned(),
        Outcome::Undecided(reason) => format!("undecided: {reason}"),
        Outcome::Interrupted | Outcome::Forgotten | Outcome::Lost(_) => "no answer".to_owned(),
    }
}

/// Gathers comparisons, and what failed.
#[derive(Default)]
struct Tally {
    made: usize,
    inexact: usize,
    failures: Vec<String>,
}

impl Tally {
    fn compare(&mut self, what: impl Fn() -> String, way: &str, cold: &Outcome, other: &Outcome) {
        self.made += 1;
        let (cold, other) = (shown(cold), shown(other));
        if cold != other {
            let differ = cold.split(' ').zip(other.split(' ')).filter(|(a, b)| a != b).take(4);
            let differ: Vec<String> = differ.map(|(a, b)| format!("{a} is {b}")).collect();
            self.failures.push(format!("{}, {way}: {}", what(), differ.join(", ")));
        }
    }

    fn done(self, least: usize) {
        let Self { made, inexact, failures } = self;
        assert!(made >= least, "{made} comparisons only");
        let list = failures[..failures.len().min(SHOWN)].join("\n");
        assert!(
            failures.is_empty(),
            "{} of {made} comparisons failed, {inexact} plans not exact:\n{list}",
            failures.len()
        );
    }
}

fn after_a_restart(last: &Program, optimum: &Optimum) -> Session {
    Session::remembered(last.clone(), &optimum.basis.named(last), Some(1_000))
}

/// A session that has solved the program with its aim turned round, or all levels bounded where that has no end.
fn turned_round(program: &Program) -> Session {
    let mut turned = program.clone();
    turned.sense = if program.sense == Sense::Maximise { Sense::Minimise } else { Sense::Maximise };
    for column in turned.columns.iter_mut().filter(|column| column.upper.is_infinite()) {
        column.upper = column.lower.max(0.0) + 1e4;
    }
    let mut session = Session::default();
    solve(&mut session, &turned);
    session
}

/// Walks a chain of edits, comparing every program's plan along all ways. `other` is a program to come from.
fn chain(tally: &mut Tally, name: &str, start: &Program, seed: u64, other: &Program, length: usize) {
    let mut rng = Rng::new(seed);
    let mut warm = Session::default();
    let mut last: Option<(Program, Box<Optimum>)> = None;
    let mut program = start.clone();
    for number in 0..length {
        let what = || format!("{name} {seed}, edit {number}");
        let outcome = solve(&mut warm, &program);
        let cold = solve(&mut Session::default(), &program);
        tally.compare(what, "warm", &cold, &outcome);
        if let Some((last, optimum)) = &last {
            tally.compare(what, "after a restart", &cold, &solve(&mut after_a_restart(last, optimum), &program));
        }
        tally.compare(what, "from its aim turned round", &cold, &solve(&mut turned_round(&program), &program));
        let mut elsewhere = Session::default();
        solve(&mut elsewhere, other);
        tally.compare(what, "from another program", &cold, &solve(&mut elsewhere, &program));
        let Outcome::Optimal(optimum) = outcome else {
            // An edit that leaves no plan is taken back.
            let Some((last, _)) = &last else { return };
            program = edited(&mut rng, last, number);
            continue;
        };
        tally.inexact += usize::from(!optimum.exact);
        let next = if rng.below(3) == 0 {
            nearly_tied(&mut rng, &program, &optimum).unwrap_or_else(|| edited(&mut rng, &program, number))
        } else {
            edited(&mut rng, &program, number)
        };
        last = Some((std::mem::replace(&mut program, next), optimum));
    }
}

fn edited(rng: &mut Rng, program: &Program, number: usize) -> Program {
    let (_, edit) = *rng.pick(&EDITS);
    let mut edited = edit(rng, program);
    for column in edited.columns.iter_mut().filter(|column| column.key.as_str() == "activities.~new") {
        column.key = Key::new(&format!("activities.~{number:04}"));
    }
    for row in edited.rows.iter_mut().filter(|row| row.key.as_str() == "limits.~new") {
        row.key = Key::new(&format!("limits.~{number:04}"));
    }
    edited
}

/// Gives something idle a price at which it just pays, or just does not: by 1e-12 to 1e-6 of the price, or by nothing.
fn nearly_tied(rng: &mut Rng, program: &Program, optimum: &Optimum) -> Option<Program> {
    let idle = |&at: &usize| optimum.basis.columns[at] != Position::Basic && optimum.gains[at].abs() > 1e-3;
    let idle: Vec<usize> = (0..program.columns.len()).filter(idle).collect();
    if idle.is_empty() {
        return None;
    }
    let mut edited = program.clone();
    let at = *rng.pick(&idle);
    let aim = program.columns[at].aim - optimum.gains[at];
    let by = *rng.pick(&[0.0, 1e-12, 1e-11, 1e-10, 1e-9, 1e-8, 1e-7, 1e-6]);
    edited.columns[at].aim = aim + if rng.below(2) == 0 { by } else { -by } * aim.abs().max(1.0);
    Some(edited)
}

#[test]
fn small_works() {
    let mut tally = Tally::default();
    let other = works(1, 20);
    for seed in 0..100 * times() {
        let columns = 3 + Rng::new(seed).below(40);
        chain(&mut tally, "works", &works(seed, columns), seed, &other, LENGTH);
    }
    tally.done(5_000);
}

#[test]
fn works_of_some_size() {
    let mut tally = Tally::default();
    let other = works(1, 100);
    for seed in 0..24 * times() {
        let columns = 50 + Rng::new(seed).below(250);
        chain(&mut tally, "works", &works(seed, columns), seed, &other, LENGTH);
    }
    tally.done(1_000);
}

fn instance(name: &str) -> Program {
    build(&mps::read(&fs::read_to_string(netlib(name)).unwrap()).unwrap().model)
}

#[test]
fn netlib_programs() {
    let mut tally = Tally::default();
    let other = instance("afiro");
    for name in ["afiro", "adlittle", "israel", "e226", "standata", "standmps", "shell", "bandm", "scrs8"] {
        for seed in 0..times() {
            chain(&mut tally, name, &instance(name), seed, &other, LENGTH);
        }
    }
    for name in ["etamacro", "stair", "perold", "25fv47"] {
        for seed in 0..times() {
            chain(&mut tally, name, &instance(name), seed, &other, 4);
        }
    }
    tally.done(500);
}
