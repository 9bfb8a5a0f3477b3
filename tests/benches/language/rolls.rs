//! Rolled horizons: what a solve from nothing takes, and one from the last basis, kept by name where the weeks overlap.

use std::path::Path;
use std::time::Duration;

use millreeve::lp::{Key, Program, build};
use millreeve::model::Model;
use millreeve::model::read::Writing;
use millreeve::solver::message::{Account, Answer, Optimum, Outcome};
use millreeve::solver::session::Session;
use millreeve::solver::stop::Stop;

use crate::works::Works;

/// Tiles and weeks of the works that roll.
const SIZES: [(usize, usize); 5] = [(10, 8), (40, 8), (40, 13), (40, 26), (40, 52)];
/// Weeks that each rolls on by.
const ROLLS: usize = 6;
const LIMIT: Duration = Duration::from_secs(120);

/// Prints the pivots and times of both ways, over all rolls of a works.
pub(crate) fn tell() {
    println!("{:>8} {:>6} | {:>17} {:>17} | {:>8} {:>8}", "rolls", "", "cold", "by name", "broken", "gains");
    for (tiles, weeks) in SIZES {
        let mut works = Works::new(tiles, weeks);
        let mut program = build(&read(&works));
        let (mut last, mut cold) = solved(&mut Session::default(), &program);
        let mut sums = [Sum::default(), Sum::default()];
        for _ in 0..ROLLS {
            works.opening = (0..tiles / 2).map(|good| stock(&program, &last, good, works.first)).collect();
            works.first += 1;
            let next = build(&read(&works));
            let basis = last.basis.named(&program);
            let mut remembered = Session::remembered(program, &basis, Some(cold.pivots));
            sums[1].add(&solved(&mut remembered, &next).1);
            program = next;
            (last, cold) = solved(&mut Session::default(), &program);
            sums[0].add(&cold);
        }
        let [cold, warm] = sums;
        let name = format!("{tiles}x{weeks}");
        print!(
            "{name:>8} {:>6} | {:>7} {:>6.0} ms {:>7} {:>6.0} ms",
            "", cold.pivots, cold.time, warm.pivots, warm.time
        );
        println!(
            " | {:>8} {:>8}   {} of {ROLLS} by name, {} given up",
            warm.broken, warm.gains, warm.by_name, warm.capped
        );
    }
}

/// What solves took together.
#[derive(Default)]
struct Sum {
    pivots: usize,
    time: f64,
    broken: usize,
    gains: usize,
    by_name: usize,
    capped: usize,
}

impl Sum {
    fn add(&mut self, account: &Account) {
        self.pivots += account.pivots;
        self.time += 1e3 * account.time.as_secs_f64();
        self.broken += account.primal_infeasible.unwrap_or(0);
        self.gains += account.dual_infeasible.unwrap_or(0);
        self.by_name += usize::from(account.by_name);
        self.capped += usize::from(account.capped);
    }
}

/// What is left of a good at the end of a week.
fn stock(program: &Program, optimum: &Optimum, good: usize, week: usize) -> f64 {
    let key = Key::new(&format!("materials.good_{good}.stock.w{week}"));
    let level = program.column(&key).map_or(0.0, |at| optimum.levels[at.0]);
    (level * 100.0).round() / 100.0
}

fn read(works: &Works) -> Model {
    let parts = works.parts();
    let parts: Vec<_> = parts.iter().map(|(name, text)| (*name, text.as_bytes())).collect();
    Writing::in_parts(&parts).read_tracing(Path::new("tiles.model")).unwrap().0
}

fn solved(session: &mut Session, program: &Program) -> (Box<Optimum>, Account) {
    let Answer { outcome, account } = session.solve(program.clone(), LIMIT, &Stop::default());
    match outcome {
        Outcome::Optimal(optimum) => (optimum, account),
        other => unreachable!("the works has a plan: {other:?}"),
    }
}
