//! What a solver may do by accident, done on purpose, so that tests can see what comes of it.
//!
//! The variable [`FAULT`] holds pairs `WHAT=COLUMN` with commas in between, and what it says is done when a worker is asked about a
//! program that has the column: `abort`, `hang`, `memory` (take all there is), `print` (to standard output), `conflict` (a call of the
//! solver's that is known to crash on some infeasible programs).

use std::hint::black_box;
use std::io::{self, Write as _};

use crate::keep::workers::FAULT;
use crate::lp::{Key, Program, RowIndex};
use crate::solver::live::Live;
use crate::solver::message::{Answer, Request, Task};
use crate::solver::stop::Stop;
use crate::solver::worker::Solver;

/// Orders in which the call that may crash is made.
const ORDERS: u32 = 64;

/// A solver with the faults that are asked for.
pub(super) struct Faulty<S> {
    solver: S,
    faults: Vec<(String, Key)>,
}

impl<S: Solver> Faulty<S> {
    pub(super) fn new(solver: S) -> Self {
        let asked = std::env::var(FAULT).unwrap_or_default();
        let pairs = asked.split(',').filter_map(|pair| pair.split_once('='));
        Self { solver, faults: pairs.map(|(what, column)| (what.to_owned(), Key::new(column))).collect() }
    }
}

impl<S: Solver> Solver for Faulty<S> {
    fn ask(&mut self, request: Request, stop: &Stop) -> Answer {
        for (what, _) in self.faults.iter().filter(|(_, column)| brings(&request.task, column)) {
            bring_about(what, &request.task);
        }
        self.solver.ask(request, stop)
    }
}

fn brings(task: &Task, column: &Key) -> bool {
    match task {
        Task::Whole(program, _) => program.column(column).is_some(),
        Task::Change(difference) => difference.added_columns.iter().any(|added| added.key == *column),
    }
}

fn bring_about(what: &str, task: &Task) {
    match (what, task) {
        ("abort", _) => std::process::abort(),
        ("hang", _) => loop {
            std::thread::park();
        },
        ("memory", _) => {
            // Taken and not touched, so that only this process goes short of anything.
            let mut taken: Vec<Vec<u8>> = Vec::new();
            loop {
                taken.push(black_box(Vec::with_capacity(1 << 26)));
            }
        }
        ("print", _) => {
            let _ = writeln!(io::stdout(), "Coefficients are\u{1b}[2J in trouble");
            let _ = io::stdout().flush();
        }
        ("conflict", Task::Whole(program, _)) => conflict(program),
        _ => {}
    }
}

/// Whether the call crashes depends on the order of columns and rows, so that it is made in several.
fn conflict(program: &Program) {
    for order in 0..ORDERS {
        if let Ok(mut live) = Live::new(&shuffled(program, order)) {
            live.conflict_with_statuses();
        }
    }
}

/// The same program in another order of columns and rows.
fn shuffled(program: &Program, order: u32) -> Program {
    let place = |key: &Key| *blake3::hash(format!("{order} {key}").as_bytes()).as_bytes();
    let Program { mut columns, rows, .. } = program.clone();
    let mut from: Vec<usize> = (0..rows.len()).collect();
    from.sort_by_cached_key(|&at| place(&rows[at].key));
    let mut to = vec![RowIndex(0); rows.len()];
    for (place, &at) in from.iter().enumerate() {
        to[at] = RowIndex(place);
    }
    columns.sort_by_cached_key(|column| place(&column.key));
    columns.iter_mut().flat_map(|column| &mut column.entries).for_each(|(row, _)| *row = to[row.0]);
    Program { columns, rows: from.iter().map(|&at| rows[at].clone()).collect(), ..*program }
}
