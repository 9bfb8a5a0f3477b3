//! One model, one file: whole plan files, byte by byte, of models edited one pass after another by several workers, and of the same
//! models with their tables in another order in a folder of their own, planned from nothing by a single worker.

#![expect(
    clippy::unwrap_used,
    clippy::disallowed_methods,
    reason = "helpers of tests fail the test; they write as people do"
)]

#[path = "support/random.rs"]
mod random;
#[path = "support/random_edit.rs"]
mod random_edit;
#[path = "support/rng.rs"]
mod rng;

use std::fs;
use std::path::Path;

use assert_cmd::Command;
use millreeve::model::{Model, write};
use random_edit::edit;
use rng::Rng;

/// Models in the folder.
const MODELS: u64 = 120;

/// Passes over it, the first included.
const PASSES: usize = 6;

/// The same model with its tables the other way round: what stands before the first table stays there.
fn turned_round(text: &str) -> String {
    let mut blocks: Vec<&str> = text.split("\n[").collect();
    let head = blocks.remove(0);
    blocks.iter().rev().fold(head.to_owned(), |text, block| format!("{text}\n# moved\n[{}\n", block.trim_end()))
}

fn lay_out(folder: &Path, models: &[Model], turn: bool) {
    for (number, model) in models.iter().enumerate() {
        let text = write::model(model);
        let text = if turn { turned_round(&text) } else { text };
        fs::write(folder.join(format!("m{number:03}.model.toml")), text).unwrap();
    }
}

fn plan_once(folder: &Path, workers: usize) {
    let mut command = Command::cargo_bin("millreeve").unwrap();
    let output = command.env("MILLREEVE_SOLVE_WORKERS", workers.to_string()).arg("once").arg(folder).output().unwrap();
    // Some models have no plan.
    assert!(matches!(output.status.code(), Some(0 | 1)), "{output:?}");
}

fn plan(folder: &Path, number: usize) -> Option<String> {
    fs::read_to_string(folder.join(format!("m{number:03}.plan.toml"))).ok()
}

#[test]
fn whole_files_depend_on_the_model_alone() {
    let kept = tempfile::tempdir().unwrap();
    let mut models: Vec<Model> = (0..MODELS).map(random::model).collect();
    let mut rng = Rng::new(1);
    let mut compared = 0;
    for pass in 0..PASSES {
        lay_out(kept.path(), &models, false);
        plan_once(kept.path(), 2);
        let fresh = tempfile::tempdir().unwrap();
        lay_out(fresh.path(), &models, true);
        plan_once(fresh.path(), 1);
        for number in 0..models.len() {
            let (kept, fresh) = (plan(kept.path(), number), plan(fresh.path(), number));
            // What has no plan now may have had one: then the numbers of that stay, marked as held.
            if let Some(fresh) = fresh {
                assert_eq!(kept.unwrap(), fresh, "model {number}, pass {pass}");
                compared += 1;
            }
        }
        models = models.iter().map(|model| edit(&mut rng, model)).collect();
    }
    assert!(compared >= 300, "{compared} files compared");
}
