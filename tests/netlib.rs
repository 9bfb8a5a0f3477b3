//! Netlib programs: optima and outcomes held against published ones, solved cold, from a remembered basis, and after edits.

#![expect(clippy::unwrap_used, clippy::panic, reason = "helpers of tests fail the test")]

#[path = "support/instances.rs"]
mod instances;
#[path = "support/program_edit.rs"]
mod program_edit;
#[path = "support/rng.rs"]
mod rng;

use std::collections::BTreeMap;
use std::fs;
use std::path::Path;
use std::process::Command;
use std::time::Duration;

use instances::netlib;
use millreeve::lp::{Program, build, mps};
use millreeve::model::{Model, read, write};
use millreeve::solver::message::{Answer, Optimum, Outcome, Start};
use millreeve::solver::session::Session;
use millreeve::solver::stop::Stop;
use program_edit::EDITS;
use rng::Rng;

/// Optimal values. Koch, The final NETLIB-LP results, Operations Research Letters 32 (2004) 138–142, which gives them exactly; the
/// second table in the readme of Netlib's lp/data agrees in the digits it prints (its main table is wrong in late digits of
/// 80bau3b, greenbea, perold and scrs8). For standgub the readme says that it equals standata.
///
/// The published value of e226, −18.7519…, leaves out the objective row's right-hand side of −7.113. The aim includes that constant, with
/// its sign turned, and is 7.113 higher.
#[expect(clippy::excessive_precision, reason = "the digits as published")]
const OPTIMA: [(&str, f64); 16] = [
    ("25fv47", 5_501.845_888_286_744_794_58),
    ("80bau3b", 987_224.192_409_090_257_579),
    ("adlittle", 225_494.963_162_380_382_281),
    ("afiro", -464.753_142_857_142_857_142),
    ("bandm", -158.628_018_450_120_640_521),
    ("e226", -18.751_929_066_370_549_102 + 7.113),
    ("etamacro", -755.715_233_374_913_335_079),
    ("greenbea", -72_555_248.129_845_987_457_5),
    ("israel", -896_644.821_863_045_729_662),
    ("perold", -9_380.755_278_235_160_673_48),
    ("scrs8", 904.296_953_800_791_435_791),
    ("shell", 1_208_825_346.0),
    ("stair", -251.266_951_192_963_303_528),
    ("standata", 1257.6995),
    ("standgub", 1257.6995),
    ("standmps", 1406.0175),
];

/// Programs without a plan: Netlib's lp/infeas.
const INFEASIBLE: [&str; 11] =
    ["woodinfe", "klein1", "forest6", "bgetam", "galenet", "box1", "ex72a", "cplex1", "refinery", "vol1", "gams10am"];

/// A program without an end: the solver's own list of unbounded instances.
const UNBOUNDED: &str = "gas11";

/// Relative difference of aims that passes for none.
const TOLERANCE: f64 = 1e-9;

fn model(name: &str) -> Model {
    let text = fs::read_to_string(netlib(name)).unwrap();
    mps::read(&text).unwrap_or_else(|error| panic!("{name}: {error}")).model
}

/// The program of an instance, by way of the model's own text, as a conversion takes it.
fn program(name: &str) -> Program {
    let model = model(name);
    let text = write::model(&model);
    match read::text(Path::new("netlib.model.toml"), text.as_bytes()) {
        Ok(reading) => build(&reading.model),
        Err(faults) => panic!("{name}: {}", faults.terminal(false)),
    }
}

fn solve(session: &mut Session, program: Program) -> Answer {
    session.solve(program, Duration::from_secs(60), &Stop::default())
}

fn cold(program: Program) -> Answer {
    solve(&mut Session::default(), program)
}

fn optimum(name: &str, answer: Answer) -> Optimum {
    match answer.outcome {
        Outcome::Optimal(optimum) => *optimum,
        other => panic!("{name}: {other:?} after {:?}", answer.account),
    }
}

fn far_apart(a: f64, b: f64) -> bool {
    (a - b).abs() > TOLERANCE * a.abs().max(b.abs()).max(1.0)
}

#[test]
fn optima_are_those_published() {
    for (name, published) in OPTIMA {
        let direct = build(&model(name));
        assert!(program(name) == direct, "{name}: its model's text reads back as another program");
        let optimum = optimum(name, cold(direct));
        assert!(!far_apart(optimum.aim, published), "{name}: {} instead of {published}", optimum.aim);
        assert!(optimum.proof.holds(), "{name}: {:?}", optimum.proof);
    }
}

/// All of them through the commands that a planner would use: `convert` each, `once` for the folder.
#[test]
fn converted_files_are_planned_in_one_pass() {
    let folder = tempfile::tempdir().unwrap();
    let millreeve = || Command::new(env!("CARGO_BIN_EXE_millreeve"));
    let published: BTreeMap<&str, f64> = OPTIMA.into_iter().collect();
    for name in published.keys().copied().chain(INFEASIBLE).chain([UNBOUNDED]) {
        let to = folder.path().join(name).with_extension("model.toml");
        let output = millreeve().arg("convert").arg(netlib(name)).arg(&to).output().unwrap();
        assert!(output.status.success(), "{name}: {}", String::from_utf8_lossy(&output.stderr));
    }
    let output = millreeve().args(["--json", "once"]).arg(folder.path()).output().unwrap();
    assert_eq!(output.status.code(), Some(1), "some have no plan: {}", String::from_utf8_lossy(&output.stderr));
    let mut told = BTreeMap::new();
    for line in String::from_utf8(output.stdout).unwrap().lines() {
        let object: serde_json::Value = serde_json::from_str(line).unwrap();
        told.insert(object["model"].as_str().unwrap().to_owned(), object);
    }
    assert_eq!(told.len(), published.len() + INFEASIBLE.len() + 1);
    for (name, published) in published {
        let aim = told[name]["aim"].as_f64().unwrap();
        assert!(!far_apart(aim, published), "{name}: {aim} instead of {published}");
        assert_eq!(told[name]["standing"], "current", "{name}");
    }
    for (names, reason) in [(&INFEASIBLE[..], "cannot all be kept"), (&[UNBOUNDED][..], "nothing limits")] {
        for &name in names {
            assert_eq!(told[name]["standing"], "held", "{name}");
            assert!(told[name]["held"].as_str().unwrap().contains(reason), "{name}: {}", told[name]["held"]);
        }
    }
}

#[test]
fn what_has_no_plan_is_proven_to_have_none() {
    for name in INFEASIBLE {
        match cold(program(name)).outcome {
            Outcome::Infeasible(conflict) => assert!(conflict.proven && !conflict.rules.is_empty(), "{name}"),
            other => panic!("{name}: {other:?}"),
        }
    }
}

/// A minimal contradiction of each, found by deletion with the solver and confirmed by it; the program of woodinfe has one only.
#[test]
fn contradictions_are_as_small_as_can_be() {
    let told = |name: &str| match cold(program(name)).outcome {
        Outcome::Infeasible(conflict) => conflict,
        other => panic!("{name}: {other:?}"),
    };
    let woodinfe = told("woodinfe");
    let sides: Vec<_> = woodinfe.rules.iter().map(|rule| (rule.key.as_str(), rule.upper)).collect();
    assert_eq!(sides, [("limits.DMOSE", false), ("activities.DMOSE1", false)]);
    for (name, most) in [("woodinfe", 2), ("gams10am", 21), ("galenet", 8)] {
        let conflict = told(name);
        assert!(conflict.minimal && conflict.rules.len() <= most, "{name}: {} rules", conflict.rules.len());
    }
}

#[test]
fn what_has_no_end_is_proven_to_have_none() {
    match cold(program(UNBOUNDED)).outcome {
        Outcome::Unbounded(growth) => assert!(growth.proven && !growth.rates.is_empty()),
        other => panic!("{other:?}"),
    }
}

#[test]
fn a_remembered_basis_needs_no_pivot() {
    for (name, _) in OPTIMA {
        let program = program(name);
        let first = optimum(name, cold(program.clone()));
        let mut session = Session::remembered(program.clone(), &first.basis.named(&program), None);
        let answer = solve(&mut session, program);
        assert_eq!((answer.account.start, answer.account.pivots), (Start::None, 0), "{name}: {:?}", answer.account);
        let second = optimum(name, answer);
        assert!(!far_apart(second.aim, first.aim), "{name}: {} and {}", first.aim, second.aim);
    }
}

/// After each edit, the solve from the last basis and the solve from nothing come to the same.
fn edits_agree(names: &[&str], times: usize) {
    let mut faults = Vec::new();
    for name in names {
        let program = program(name);
        let mut session = Session::default();
        optimum(name, solve(&mut session, program.clone()));
        for (kind, edit) in EDITS {
            for seed in 0..times {
                let mut rng = Rng::new(u64::try_from(seed).unwrap());
                let edited = edit(&mut rng, &program);
                let (warm, cold) = (solve(&mut session, edited.clone()), cold(edited));
                if let Some(fault) = differ(&warm.outcome, &cold.outcome) {
                    faults.push(format!("{name}, {kind} {seed}: {fault}; {:?}", warm.account));
                }
                // Every edit is one of the program as published.
                solve(&mut session, program.clone());
            }
        }
    }
    assert!(faults.is_empty(), "{}", faults.join("\n"));
}

fn differ(warm: &Outcome, cold: &Outcome) -> Option<String> {
    match (warm, cold) {
        (Outcome::Optimal(warm), Outcome::Optimal(cold)) => {
            let wrong = far_apart(warm.aim, cold.aim) || !warm.proof.holds() || !cold.proof.holds();
            wrong.then(|| format!("{} and {}, {:?} and {:?}", warm.aim, cold.aim, warm.proof, cold.proof))
        }
        (Outcome::Infeasible(warm), Outcome::Infeasible(cold)) => {
            (!warm.proven || !cold.proven).then(|| "a conflict that is not proven".to_owned())
        }
        (Outcome::Unbounded(warm), Outcome::Unbounded(cold)) => {
            (!warm.proven || !cold.proven).then(|| "a growth that is not proven".to_owned())
        }
        (warm, cold) => Some(format!("{} and {}", kind(warm), kind(cold))),
    }
}

fn kind(outcome: &Outcome) -> String {
    match outcome {
        Outcome::Optimal(optimum) => format!("optimal {}", optimum.aim),
        Outcome::Infeasible(conflict) => format!("infeasible, proven {}", conflict.proven),
        Outcome::Unbounded(growth) => format!("unbounded, proven {}", growth.proven),
        other => format!("{other:?}"),
    }
}

#[test]
fn edits_of_small_programs_come_to_the_same_warm_and_cold() {
    edits_agree(&["adlittle", "afiro", "bandm", "e226", "israel", "scrs8", "shell", "stair", "standata"], 12);
}

#[test]
fn edits_of_middling_programs_come_to_the_same_warm_and_cold() {
    edits_agree(&["etamacro", "perold", "standgub", "standmps", "25fv47"], 4);
}

#[test]
fn edits_of_large_programs_come_to_the_same_warm_and_cold() {
    edits_agree(&["80bau3b", "greenbea"], 1);
}
