//! Exact arithmetic at a basis: held against a dense exact simplex, started from anywhere, with near-ties, and on Netlib programs.

#![expect(clippy::unwrap_used, clippy::panic, reason = "helpers of tests fail the test")]

#[path = "support/instances.rs"]
mod instances;
#[path = "support/random.rs"]
mod random;
#[path = "support/rational.rs"]
mod rational;
#[path = "support/rng.rs"]
mod rng;

use std::fs;
use std::path::Path;
use std::time::Duration;

use instances::netlib;
use millreeve::lp::{Key, Program, Sense, build, mps};
use millreeve::model::meaning::Meaning;
use millreeve::plan;
use millreeve::solver::basis::{Basis, Position};
use millreeve::solver::exact::{Settled, Unsettled, settle};
use millreeve::solver::message::Outcome;
use millreeve::solver::proof;
use millreeve::solver::session::Session;
use millreeve::solver::stop::Stop;
use rational::{Found, best};
use rng::Rng;

/// Weights in [1, 2) that the columns' names decide.
fn weights(program: &Program) -> Vec<f64> {
    let weight = |key: &str| {
        let seed = key.bytes().fold(0_u64, |seed, byte| seed.wrapping_mul(1_000_003).wrapping_add(byte.into()));
        1.0 + Rng::new(seed).share()
    };
    program.columns.iter().map(|column| weight(column.key.as_str())).collect()
}

/// The basis that the solver ends with, cold; `None` where there is no plan or no end to it, or where it cannot tell: a program may
/// lack a plan by less than its tolerance.
fn solved(program: &Program) -> Option<Basis> {
    let answer = Session::default().solve(program.clone(), Duration::from_secs(60), &Stop::default());
    match answer.outcome {
        Outcome::Optimal(optimum) => Some(optimum.basis),
        Outcome::Infeasible(_) | Outcome::Unbounded(_) | Outcome::Undecided(_) => None,
        other => panic!("{other:?}"),
    }
}

/// The basis of rows alone.
fn slack(program: &Program) -> Basis {
    Basis { columns: vec![Position::AtLower; program.columns.len()], rows: vec![Position::Basic; program.rows.len()] }
}

/// A basis drawn by lot; it may be singular.
fn drawn(program: &Program, rng: &mut Rng) -> Basis {
    let mut basis = slack(program);
    for row in 0..program.rows.len() {
        let column = rng.below(program.columns.len());
        if rng.below(2) == 0 && basis.columns[column] != Position::Basic {
            basis.columns[column] = Position::Basic;
            basis.rows[row] = *rng.pick(&[Position::AtLower, Position::AtUpper]);
        }
    }
    basis
}

/// Bases to start from: the solver's, one for the aim turned round, rows alone, and some drawn by lot.
fn starts(program: &Program, seed: u64) -> Vec<Basis> {
    let turned = Program {
        sense: if program.sense == Sense::Maximise { Sense::Minimise } else { Sense::Maximise },
        ..program.clone()
    };
    let mut rng = Rng::new(seed);
    let mut starts: Vec<Basis> = solved(program).into_iter().chain(solved(&turned)).collect();
    starts.push(slack(program));
    starts.extend((0..3).map(|_| drawn(program, &mut rng)));
    starts
}

/// Holds a settled plan against the one found by the dense simplex; what it took.
fn compare(what: &str, program: &Program, from: &Basis, second: &[f64], expected: &Found) -> Option<Settled> {
    match (settle(program, from, second), expected) {
        (Ok(settled), Found::Plan(levels, aim)) => {
            let levels: Vec<f64> = levels.iter().map(|level| level.to_f64().value()).collect();
            assert_eq!(settled.levels, levels, "{what}: {settled:?}");
            assert_eq!(settled.aim.to_bits(), aim.to_f64().value().to_bits(), "{what}: {settled:?} instead of {aim}");
            check(what, program, &settled);
            Some(settled)
        }
        (Err(Unsettled::Infeasible), Found::Nothing) | (Err(Unsettled::Unbounded), Found::NoEnd) => None,
        // A basis drawn by lot may be none.
        (Err(Unsettled::Singular), _) if what.contains("drawn") => None,
        (other, expected) => panic!("{what}: {other:?} instead of {expected:?}"),
    }
}

/// The proof that other plans must pass holds for this one, and its basis is settled without a pivot.
fn check(what: &str, program: &Program, settled: &Settled) {
    let checked = proof::check(program, &settled.levels, &settled.worths);
    assert!(checked.proof.holds(), "{what}: {:?}", checked.proof);
    for (sum, told) in checked.sums.iter().zip(&settled.sums) {
        assert!((sum - told).abs() <= 1e-9 * sum.abs().max(1.0), "{what}: {sum} and {told}");
    }
}

fn name_of(start: usize, of: usize) -> &'static str {
    if start + 3 >= of { "drawn by lot" } else { "told by name" }
}

#[test]
fn plans_are_those_of_an_independent_exact_simplex_from_wherever_they_start() {
    let (mut plans, mut ties, mut degenerate, mut nothing, mut no_end) = (0, 0, 0, 0, 0);
    for seed in 0..2000 {
        let program = build(&random::model(seed));
        let second = weights(&program);
        let expected = best(&program, &second);
        match &expected {
            Found::Plan(..) => plans += 1,
            Found::Nothing => nothing += 1,
            Found::NoEnd => no_end += 1,
        }
        let starts = starts(&program, seed);
        for (at, from) in starts.iter().enumerate() {
            let what = format!("seed {seed}, start {at} {}", name_of(at, starts.len()));
            if let Some(settled) = compare(&what, &program, from, &second, &expected).filter(|_| at == 0) {
                ties += usize::from(settled.ties);
                degenerate += usize::from(settled.degenerate);
                let again = settle(&program, &settled.basis, &second).unwrap();
                assert_eq!(again.pivots, 0, "{what}");
                assert_eq!(again.levels, settled.levels, "{what}");
            }
        }
    }
    assert!(
        plans > 1000 && ties > 100 && degenerate > 100 && nothing > 100 && no_end > 100,
        "{plans} plans, {ties} with ties, {degenerate} degenerate, {nothing} without a plan, {no_end} without an end"
    );
}

/// Where the second aim leaves a choice, names decide.
#[test]
fn the_start_does_not_matter_where_the_second_aim_is_tied_too() {
    let mut tied = 0;
    for seed in (1..3000).step_by(3) {
        let program = build(&random::model(seed));
        let second = vec![1.0; program.columns.len()];
        let expected = best(&program, &second);
        let starts = starts(&program, seed);
        for (at, from) in starts.iter().enumerate() {
            let what = format!("seed {seed}, start {at} {}", name_of(at, starts.len()));
            let settled = compare(&what, &program, from, &second, &expected);
            tied += usize::from(settled.is_some_and(|settled| settled.ties));
        }
    }
    assert!(tied > 200, "{tied} with ties");
}

/// A price or a capacity off a tie by a share from 1e-12 to 1e-6.
#[test]
fn near_ties_are_decided() {
    let mut moved = 0;
    for seed in 0..2000 {
        let mut program = build(&random::model(3 * (seed / 7) + seed % 2));
        let mut rng = Rng::new(seed);
        let share = 10.0_f64.powi(-6 - i32::try_from(seed % 7).unwrap()) * if rng.below(2) == 0 { 1.0 } else { -1.0 };
        let tied = solved(&program);
        for _ in 0..3 {
            let column = rng.below(program.columns.len());
            program.columns[column].aim *= 1.0 + share;
            let row = rng.below(program.rows.len());
            program.rows[row].upper = (program.rows[row].upper * (1.0 + share)).max(program.rows[row].lower);
        }
        let second = weights(&program);
        let expected = best(&program, &second);
        for from in tied.iter().chain(&solved(&program)).chain([&slack(&program)]) {
            let settled = compare(&format!("seed {seed}"), &program, from, &second, &expected);
            moved += usize::from(settled.is_some_and(|settled| settled.pivots > 0));
        }
    }
    assert!(moved > 200, "{moved} took a pivot");
}

/// Optimal values. Koch, The final NETLIB-LP results, Operations Research Letters 32 (2004) 138–142; see `tests/netlib.rs`.
#[expect(clippy::excessive_precision, reason = "the digits as published")]
const OPTIMA: [(&str, f64); 8] = [
    ("adlittle", 225_494.963_162_380_382_281),
    ("afiro", -464.753_142_857_142_857_142),
    ("bandm", -158.628_018_450_120_640_521),
    ("etamacro", -755.715_233_374_913_335_079),
    ("israel", -896_644.821_863_045_729_662),
    ("scrs8", 904.296_953_800_791_435_791),
    ("stair", -251.266_951_192_963_303_528),
    ("standmps", 1406.0175),
];

/// By hand: a floor tile earns 21.1 − 6.5 = 14.6, as a wall tile does, and a mosaic 18.6 − 0.1 · 40 = 14.6, each for one of 100 hours; of
/// a share of 0.3 the three take 0.1 + 0.2 − 0.3 · 1 = 0. In doubles the first earns 14.600000000000001, and 0.1 + 0.2 is more than 0.3.
#[test]
fn what_earns_as_much_on_paper_ties() {
    let text = r#"
        format = 1
        [resources.kiln]
        capacity = 100
        [resources.sand]
        cost = 0.1
        [activities.floor_tile]
        price = 21.1
        cost = 6.5
        uses = { kiln = 1 }
        tags = ["fired"]
        [activities.mosaic]
        price = 18.6
        uses = { kiln = 1, sand = 40 }
        tags = ["fired"]
        [activities.wall_tile]
        price = 14.6
        uses = { kiln = 1 }
        tags = ["fired"]
        [limits.share]
        terms = { "tag:fired" = 0.1, "activities.*" = 0.2 }
        per = { "activities.*" = 1 }
        at_most = 0.3
    "#;
    let model = millreeve::model::read::text(Path::new("tiles.model.toml"), text.as_bytes()).unwrap().model;
    let program = build(&model);
    let aims: Vec<f64> = program.columns.iter().map(|column| column.aim).collect();
    assert_eq!(aims, [14.6; 3]);
    let share = program.row(&Key::new("limits.share.at_most")).unwrap();
    assert!(program.columns.iter().all(|column| column.entries.iter().all(|&(row, _)| row != share)));

    let answer = Session::default().solve(program.clone(), Duration::from_secs(60), &Stop::default());
    let Outcome::Optimal(optimum) = answer.outcome else { panic!("{:?}", answer.outcome) };
    let plan = plan::make(&model, Meaning::of(&model), &program, &optimum).unwrap();
    assert!(plan.exact && plan.ties);
    assert_eq!(plan.aim.to_bits(), 1460.0_f64.to_bits());
    assert!(
        plan.activities.iter().all(|planned| planned.may_vary == Some(plan::Each::One((0.0, 100.0)))),
        "{:?}",
        plan.activities
    );
}

#[test]
fn netlib_programs_come_to_their_published_optima() {
    for (name, published) in OPTIMA {
        let program = build(&mps::read(&fs::read_to_string(netlib(name)).unwrap()).unwrap().model);
        let settled = settle(&program, &solved(&program).unwrap(), &weights(&program)).unwrap();
        assert_eq!(settled.aim.to_bits(), published.to_bits(), "{name}: {} instead of {published}", settled.aim);
        check(name, &program, &settled);
    }
}
