//! Worked examples as a planner would write them, with periods, stocks and blends: our answers held against the published ones.
//!
//! Each is a model and the answer expected of it, in `tests/published_language/`; the source stands in both.

#![expect(clippy::unwrap_used, reason = "helpers of tests fail the test")]

use std::collections::BTreeMap;
use std::fs;
use std::path::Path;
use std::time::Duration;

use millreeve::lp::{Key, build};
use millreeve::model::read;
use millreeve::solver::message::Outcome;
use millreeve::solver::session::Session;
use millreeve::solver::stop::Stop;
use serde::Deserialize;

const EXAMPLES: [&str; 5] =
    ["bhm-tires", "glpk-manual-plan", "highs-distillation", "nahmias-densepack", "winston-sailco"];

/// What is published for an example.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Expected {
    aim: Number,
    /// Relative difference that the digits published allow; 1e-9 where they are exact.
    within: Option<f64>,
    /// By column.
    levels: BTreeMap<String, Number>,
    /// By row: what one unit more of its bound would add to the aim. Of a balance, a bound more is a unit less at hand.
    #[serde(default)]
    worths: BTreeMap<String, Number>,
}

/// A decimal, or a fraction such as `"57520/3"`.
#[derive(Deserialize)]
#[serde(untagged)]
enum Number {
    Decimal(f64),
    Fraction(String),
}

impl Number {
    fn value(&self) -> f64 {
        match self {
            Self::Decimal(number) => *number,
            Self::Fraction(text) => {
                let (above, below) = text.split_once('/').unwrap();
                above.parse::<f64>().unwrap() / below.parse::<f64>().unwrap()
            }
        }
    }
}

#[test]
fn answers_are_those_published() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests").join("published_language");
    for id in EXAMPLES {
        let path = folder.join(format!("{id}.model.toml"));
        let model = match read::text(&path, &fs::read(&path).unwrap()) {
            Ok(reading) => reading.model,
            Err(faults) => panic!("{}", faults.terminal(false)),
        };
        let expected = fs::read_to_string(folder.join(format!("{id}.expected.toml"))).unwrap();
        let expected: Expected = toml::from_str(&expected).unwrap();
        let within = expected.within.unwrap_or(1e-9);
        let near = |a: f64, b: f64| (a - b).abs() <= within * a.abs().max(b.abs()).max(1.0);

        let program = build(&model);
        let answer = Session::default().solve(program.clone(), Duration::from_secs(60), &Stop::default());
        let Outcome::Optimal(optimum) = answer.outcome else { panic!("{id}: {:?}", answer.outcome) };
        assert!(optimum.proof.holds() && optimum.exact, "{id}: {:?}", optimum.proof);
        assert!(near(optimum.aim, expected.aim.value()), "{id}: aim {}", optimum.aim);
        for (key, level) in &expected.levels {
            let found = optimum.levels[program.column(&Key::new(key)).unwrap_or_else(|| panic!("{id}: no {key}")).0];
            assert!(near(found, level.value()), "{id}: {key} is {found} instead of {}", level.value());
        }
        for (key, worth) in &expected.worths {
            let found = optimum.worths[program.row(&Key::new(key)).unwrap_or_else(|| panic!("{id}: no {key}")).0];
            assert!(near(found, worth.value()), "{id}: {key} is worth {found} instead of {}", worth.value());
        }
    }
}
