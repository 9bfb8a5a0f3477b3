//! The program as its users meet it: exit statuses, what goes where, and shapes of the objects.
#![expect(clippy::disallowed_methods, reason = "tests lay out files as other programs would")]
#![expect(clippy::unwrap_used, clippy::panic, reason = "helpers outside test functions")]

#[path = "cli/periods.rs"]
mod periods;
#[path = "cli/show.rs"]
mod show;
#[path = "cli/why.rs"]
mod why;

use std::fs;
use std::path::Path;
use std::process::{Output, Stdio};

use assert_cmd::Command;
use serde_json::Value;
use tempfile::TempDir;

/// The program, in `folder`, with nothing of the caller's environment that could change what it says.
fn millreeve(folder: &Path) -> Command {
    let mut command = Command::new(assert_cmd::cargo::cargo_bin!("millreeve"));
    command.current_dir(folder);
    for (name, _) in std::env::vars_os() {
        let name_text = name.to_string_lossy();
        if name_text.starts_with("MILLREEVE_")
            || name_text.starts_with("CLICOLOR")
            || name_text == "NO_COLOR"
            || name_text == "COLUMNS"
        {
            command.env_remove(&name);
        }
    }
    command
}

fn run(folder: &Path, arguments: &[&str]) -> (i32, String, String) {
    let Output { status, stdout, stderr } = millreeve(folder).args(arguments).output().unwrap();
    (status.code().unwrap(), String::from_utf8(stdout).unwrap(), String::from_utf8(stderr).unwrap())
}

/// The objects on standard output, one a line.
fn objects(text: &str) -> Vec<Value> {
    text.lines().map(|line| serde_json::from_str(line).unwrap()).collect()
}

const GOOD: &str = "format = 1\n[resources.kiln]\ncapacity = 9\n[activities.tile]\nprice = 3\nuses = { kiln = 1 }\n";
const BAD: &str = "format = 1\n[resources.kiln]\ncapcity = 9\n";

fn folder_with(files: &[(&str, &str)]) -> TempDir {
    let folder = tempfile::tempdir().unwrap();
    for (name, content) in files {
        fs::write(folder.path().join(name), content).unwrap();
    }
    folder
}

#[test]
fn check_says_by_its_status_whether_a_model_is_faulty() {
    let folder = folder_with(&[("a.model.toml", GOOD), ("b.model.toml", BAD)]);
    assert_eq!(run(folder.path(), &["check", "a.model.toml"]), (0, String::new(), String::new()));
    let (status, out, err) = run(folder.path(), &["check", "."]);
    assert_eq!((status, err.as_str()), (1, ""));
    assert!(out.contains("b.model.toml:3:1: ") && out.contains("did you mean `capacity`?"), "{out}");
    assert_eq!(run(folder.path(), &["check", "c.model.toml"]).0, 2);
    let (status, _, err) = run(folder.path(), &["check", "--config", "none.toml", "."]);
    assert_eq!(status, 2);
    assert!(err.contains("none.toml"), "{err}");
}

#[test]
fn check_tells_each_model_as_one_object() {
    let folder = folder_with(&[("a.model.toml", GOOD), ("b.model.toml", BAD)]);
    let (status, out, err) = run(folder.path(), &["--json", "check", "."]);
    assert_eq!((status, err.as_str()), (1, ""));
    let told = objects(&out);
    assert_eq!(told.len(), 2);
    assert_eq!(told[0]["model"], "a");
    assert_eq!(told[0]["faults"].as_array().unwrap().len(), 0);
    let fault = &told[1]["faults"][0];
    assert_eq!((fault["line"].as_u64(), fault["column"].as_u64()), (Some(3), Some(1)));
    assert_eq!(fault["help"], "did you mean `capacity`?");
    for key in ["path", "code", "message"] {
        assert!(fault[key].as_str().is_some_and(|text| !text.is_empty()), "{key}");
    }
}

#[test]
fn a_link_among_the_models_does_not_keep_the_others_from_being_checked() {
    let folder = folder_with(&[("b.model.toml", BAD)]);
    std::os::unix::fs::symlink("/etc/hostname", folder.path().join("a.model.toml")).unwrap();
    let (status, out, err) = run(folder.path(), &["check", "."]);
    assert_eq!(status, 1);
    assert!(err.contains("a.model.toml: a symbolic link"), "{err}");
    assert!(out.contains("capcity"), "{out}");
}

#[test]
fn a_folders_own_settings_are_heeded_and_held_in_bounds() {
    let folder = folder_with(&[("a.model.toml", GOOD), ("b.model.toml", BAD)]);
    fs::write(folder.path().join(".millreeve.toml"), "[watch]\nignore = [\"b.*\"]\n").unwrap();
    assert_eq!(run(folder.path(), &["check", "."]).0, 0);
    let with = millreeve(folder.path()).args(["check", "."]).env("MILLREEVE_WATCH_IGNORE", "a.*").output().unwrap();
    assert_eq!(with.status.code(), Some(1), "the environment wins over the folder");
    fs::write(folder.path().join(".millreeve.toml"), "[state]\ndir = \"/tmp/elsewhere\"\n").unwrap();
    let (status, _, err) = run(folder.path(), &["check", "."]);
    assert_eq!(status, 2);
    assert!(err.contains(".millreeve.toml:1: a folder's own settings cannot set [state]"), "{err}");
}

#[test]
fn a_variable_that_is_no_setting_is_refused() {
    let folder = folder_with(&[("a.model.toml", GOOD)]);
    let done = millreeve(folder.path()).args(["check", "."]).env("MILLREEVE_SOLVE_WORKRS", "2").output().unwrap();
    assert_eq!(done.status.code(), Some(2));
    assert!(String::from_utf8_lossy(&done.stderr).contains("did you mean `MILLREEVE_SOLVE_WORKERS`?"));
}

#[test]
fn colours_are_for_terminals_and_for_those_who_ask() {
    let folder = folder_with(&[("b.model.toml", BAD)]);
    let escapes = |arguments: &[&str], no_color: bool| {
        let mut command = millreeve(folder.path());
        command.args(arguments);
        if no_color {
            command.env("NO_COLOR", "1");
        }
        command.output().unwrap().stdout.contains(&0x1b)
    };
    assert!(!escapes(&["check", "."], false), "a pipe gets none");
    assert!(escapes(&["check", ".", "--color", "always"], false));
    assert!(escapes(&["check", ".", "--color", "always"], true), "what is asked for by flag wins over NO_COLOR");
    assert!(!escapes(&["check", ".", "--color", "never"], false));
}

#[test]
fn a_reader_that_goes_away_is_no_fault() {
    let folder = folder_with(&[("a.model.toml", GOOD)]);
    let many: Vec<&str> = std::iter::repeat_n("a.model.toml", 2000).collect();
    let mut child = std::process::Command::new(assert_cmd::cargo::cargo_bin!("millreeve"))
        .current_dir(folder.path())
        .args(["--json", "check"])
        .args(many)
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    drop(child.stdout.take());
    let done = child.wait_with_output().unwrap();
    assert_eq!(done.status.code(), Some(0));
    assert_eq!(String::from_utf8_lossy(&done.stderr), "");
}

#[test]
fn results_that_cannot_be_written_are_a_failure() {
    let folder = folder_with(&[("a.model.toml", GOOD)]);
    let full = fs::OpenOptions::new().write(true).open("/dev/full").unwrap();
    let done = std::process::Command::new(assert_cmd::cargo::cargo_bin!("millreeve"))
        .current_dir(folder.path())
        .args(["--json", "check", "."])
        .stdout(full)
        .output()
        .unwrap();
    assert_eq!(done.status.code(), Some(3));
    assert!(String::from_utf8_lossy(&done.stderr).contains("cannot write to standard output"));
}

#[test]
fn a_model_goes_to_mps_and_back_and_nothing_is_replaced_unasked() {
    let folder = folder_with(&[("a.model.toml", GOOD)]);
    let at = |name: &str| folder.path().join(name);
    assert_eq!(run(folder.path(), &["convert", "a.model.toml", "a.mps"]).0, 0);
    assert_eq!(run(folder.path(), &["convert", "a.mps", "b.model.toml"]).0, 0);
    assert_eq!(run(folder.path(), &["check", "b.model.toml"]).0, 0);
    let before = fs::read(at("b.model.toml")).unwrap();
    fs::write(at("a.mps"), "rubbish").unwrap();
    let (status, _, err) = run(folder.path(), &["convert", "a.mps", "b.model.toml"]);
    assert_eq!(status, 2);
    assert!(err.contains("--force"), "{err}");
    assert_eq!(run(folder.path(), &["convert", "--force", "a.mps", "b.model.toml"]).0, 1);
    assert_eq!(fs::read(at("b.model.toml")).unwrap(), before, "what cannot be read replaces nothing");
    assert_eq!(run(folder.path(), &["convert", "--force", "a.model.toml", "a.mps"]).0, 0);
    assert!(fs::read_to_string(at("a.mps")).unwrap().contains("ROWS"));
    assert_eq!(run(folder.path(), &["convert", "a.model.toml", "c.toml"]).0, 2);
    assert_eq!(run(folder.path(), &["convert", "a.model.toml", "c.model.toml"]).0, 2);
}

#[test]
fn the_demo_is_laid_out_once_and_is_without_fault() {
    let folder = tempfile::tempdir().unwrap();
    assert_eq!(run(folder.path(), &["demo", "works"]).0, 0);
    assert_eq!(run(folder.path(), &["check", "works"]), (0, String::new(), String::new()));
    let (status, _, err) = run(folder.path(), &["check", "works/tileworks.model/sales.toml"]);
    assert_eq!(status, 2);
    assert!(err.contains("the model is the folder `works/tileworks.model`"), "{err}");
    let works = folder.path().join("works");
    for name in ["fortnight.model.toml", "clay/body_mix.model.toml", "tileworks.model/mine.toml"] {
        fs::remove_dir_all(&works).unwrap();
        fs::create_dir_all(works.join(name).parent().unwrap()).unwrap();
        fs::write(works.join(name), GOOD).unwrap();
        assert_eq!(run(folder.path(), &["demo", "works"]).0, 2, "{name}");
        assert_eq!(fs::read_to_string(works.join(name)).unwrap(), GOOD, "what is there is left alone");
        assert_eq!(fs::read_dir(&works).unwrap().count(), 1, "and nothing is laid out beside {name}");
    }
}

#[test]
fn every_shell_gets_completions() {
    let folder = tempfile::tempdir().unwrap();
    for shell in ["bash", "zsh", "fish", "elvish", "powershell"] {
        let (status, out, _) = run(folder.path(), &["completions", shell]);
        assert!(status == 0 && out.contains("millreeve"), "{shell}");
    }
}

#[test]
fn names_of_files_cannot_steer_the_terminal() {
    let folder = folder_with(&[("a\u{1b}[31m\n\u{202e}.model.toml", BAD)]);
    for arguments in [&["check", "."][..], &["--json", "check", "."][..]] {
        let (_, out, err) = run(folder.path(), arguments);
        assert!(!out.contains(['\u{1b}', '\u{202e}']) && !err.contains(['\u{1b}', '\u{202e}']), "{out}{err}");
    }
}

#[test]
fn once_plans_what_needs_it_and_says_what_it_did() {
    let folder = folder_with(&[("a.model.toml", GOOD), ("b.model.toml", BAD)]);
    let (status, out, err) = run(folder.path(), &["--json", "once", "a.model.toml"]);
    assert_eq!((status, err.as_str()), (0, ""));
    let told = objects(&out);
    assert_eq!((told[0]["model"].as_str(), told[0]["standing"].as_str()), (Some("a"), Some("current")));
    // Nine hours of kiln at one an hour, sold at 3.
    assert_eq!((told[0]["aim"].as_f64(), told[0]["start"].as_str()), (Some(27.0), Some("cold")));
    assert_eq!(run(folder.path(), &["show", "a"]).0, 0);
    let plan = fs::read(folder.path().join("a.plan.toml")).unwrap();
    let (status, out, _) = run(folder.path(), &["once", "a.model.toml"]);
    assert_eq!((status, out.as_str()), (0, "a: unchanged\n"));
    assert_eq!(fs::read(folder.path().join("a.plan.toml")).unwrap(), plan);
    let (status, out, _) = run(folder.path(), &["--json", "once", "."]);
    assert_eq!(status, 1, "one of them is faulty");
    let faulty = objects(&out).into_iter().find(|told| told["model"] == "b").unwrap();
    assert_eq!(faulty["faults"][0]["line"], 3);
    assert_eq!(run(folder.path(), &["once", "c.model.toml"]).0, 2);
    assert_eq!(run(folder.path(), &["keep", "a.model.toml"]).0, 2);
}

#[test]
fn work_goes_on_where_nobody_takes_the_log() {
    let folder = folder_with(&[("a.model.toml", GOOD), ("b.model.toml", BAD)]);
    let program = assert_cmd::cargo::cargo_bin!("millreeve");
    for closed in ["2>&-", ">&- 2>&-", "2>/dev/full"] {
        let line = format!("exec \"$0\" -vv once . {closed}");
        let done =
            std::process::Command::new("sh").arg("-c").arg(line).arg(program).current_dir(folder.path()).output();
        assert_eq!(done.unwrap().status.code(), Some(1), "{closed}: one model is faulty, and nothing else is wrong");
        assert!(folder.path().join("a.plan.toml").exists(), "{closed}");
        fs::remove_file(folder.path().join("a.plan.toml")).unwrap();
    }
}
