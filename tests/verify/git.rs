//! The hook, the recipe and the attributes in `config/`, in a real repository.

use std::fs;
use std::os::unix::fs::PermissionsExt;
use std::path::Path;
use std::process::Command;

use crate::support::{TILES, Works, clean, ended};

fn config(name: &str) -> std::path::PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("config").join(name)
}

/// Runs git in the folder, as somebody in particular at no particular time.
pub(crate) fn git(works: &Works, arguments: &[&str]) -> (i32, String, String) {
    let mut command = clean(Command::new("git"));
    command.current_dir(works.root()).args(arguments);
    command.env("MILLREEVE", env!("CARGO_BIN_EXE_millreeve"));
    command.env("GIT_CONFIG_GLOBAL", "/dev/null").env("GIT_CONFIG_SYSTEM", "/dev/null");
    for (name, value) in [("NAME", "Planner"), ("EMAIL", "planner@works.invalid"), ("DATE", "2027-01-04T06:00:00Z")] {
        command.env(format!("GIT_AUTHOR_{name}"), value).env(format!("GIT_COMMITTER_{name}"), value);
    }
    ended(command)
}

/// As [`git`], of what must succeed.
pub(crate) fn git_done(works: &Works, arguments: &[&str]) -> String {
    let (status, out, err) = git(works, arguments);
    assert_eq!(status, 0, "{arguments:?}: {out}{err}");
    out
}

/// A repository with hook and attributes, and no commit.
fn repository() -> Works {
    let works = Works::with(&[]);
    git_done(&works, &["init", "--quiet", "--initial-branch", "main"]);
    for hook in ["pre-commit", "pre-merge-commit"] {
        let path = works.path(".git/hooks").join(hook);
        fs::create_dir_all(path.parent().unwrap()).unwrap();
        fs::copy(config("pre-commit.sh"), &path).unwrap();
        fs::set_permissions(&path, fs::Permissions::from_mode(0o755)).unwrap();
    }
    fs::copy(config("gitattributes"), works.path(".gitattributes")).unwrap();
    works
}

/// Adds all, and says what the hook says of it.
fn commit(works: &Works) -> (i32, String) {
    git_done(works, &["add", "--all"]);
    let (status, out, err) = git(works, &["commit", "--quiet", "-m", "An edit"]);
    (status, out + &err)
}

fn plan(works: &Works) {
    assert_eq!(works.run(&["once", "."]).0, 0);
}

#[test]
fn the_hook_refuses_a_commit_until_its_plans_are_right() {
    let works = repository();
    works.save("works/tiles.model.toml", TILES);
    let (status, told) = commit(&works);
    assert_eq!(status, 1, "{told}");
    assert!(told.contains("./works/tiles.model.toml: no plan, though there could be one"), "{told}");
    plan(&works);
    assert_eq!(commit(&works), (0, String::new()));

    works.replace("works/tiles.model.toml", "capacity = 90", "capacity = 91");
    let (status, told) = commit(&works);
    assert_eq!(status, 1, "{told}");
    assert!(told.contains("millreeve once ./works/tiles.model.toml brings it up to date"), "{told}");
    assert!(told.ends_with("`git add` what was written, and commit again.\n"), "{told}");
    // The cure, as it is told, from the root of the repository.
    assert_eq!(works.run(&["once", "./works/tiles.model.toml"]).0, 0);
    assert_eq!(commit(&works), (0, String::new()));

    works.replace("works/tiles.plan.toml", "level       = 41.8\n", "level       = 42\n");
    let (status, told) = commit(&works);
    assert!(status == 1 && told.contains("edited by hand"), "{told}");
    assert_eq!(git(&works, &["commit", "--quiet", "--no-verify", "-m", "All the same"]).0, 0);
}

#[test]
fn the_hook_looks_at_what_is_committed_and_at_nothing_else() {
    let works = repository();
    let odd = "a b\n\u{fc}'\"\\/tiles.model.toml";
    works.save("tiles.model.toml", TILES);
    works.save(odd, TILES);
    plan(&works);
    assert_eq!(commit(&works), (0, String::new()));
    // The model is edited and planned, but only the model is added.
    works.replace(odd, "capacity = 90", "capacity = 91");
    plan(&works);
    git_done(&works, &["add", odd]);
    let (status, _, told) = git(&works, &["commit", "--quiet", "-m", "Half"]);
    assert!(status == 1 && told.contains("stale"), "{told}");
    // Both are added, and what lies about is stale again.
    git_done(&works, &["add", "--all"]);
    works.replace(odd, "capacity = 91", "capacity = 92");
    works.replace("tiles.model.toml", "capacity = 90", "capacity = 93");
    assert_eq!(git(&works, &["commit", "--quiet", "-m", "Whole"]), (0, String::new(), String::new()));
    // A commit that touches no model asks nothing.
    works.save("notes.txt", "x");
    git_done(&works, &["add", "notes.txt"]);
    let mut command = clean(Command::new("git"));
    command.current_dir(works.root()).env("MILLREEVE", "true").args([
        "-c",
        "user.name=P",
        "-c",
        "user.email=p@works.invalid",
    ]);
    command.args(["commit", "--quiet", "-m", "Notes"]);
    assert_eq!(ended(command).0, 0);
}

#[test]
fn the_hook_says_so_where_the_program_is_missing_and_heeds_models_that_go() {
    let works = repository();
    works.save("tiles.model.toml", TILES);
    plan(&works);
    git_done(&works, &["add", "--all"]);
    let mut command = clean(Command::new("git"));
    command.current_dir(works.root()).env("MILLREEVE", "no-such-program").args(["commit", "-m", "First"]);
    let (status, _, told) = ended(command);
    assert_eq!(status, 1);
    assert!(told.contains("there is no program `no-such-program`"), "{told}");
    assert_eq!(commit(&works), (0, String::new()));
    works.remove("tiles.model.toml");
    let (status, told) = commit(&works);
    assert!(status == 1 && told.contains("the model is gone"), "{told}");
    plan(&works);
    assert_eq!(commit(&works), (0, String::new()), "retired");
    for file in ["tiles.plan.toml", "tiles.note.md"] {
        works.remove(file);
    }
    assert_eq!(commit(&works), (0, String::new()), "and gone altogether");
}

/// Two branches with an edit each, in places that git can merge.
fn branches(works: &Works) {
    works.save("tiles.model.toml", TILES);
    plan(works);
    assert_eq!(commit(works), (0, String::new()));
    for (branch, from, to) in [("one", "price    = 31", "price    = 32"), ("two", "price    = 40", "price    = 41")] {
        git_done(works, &["checkout", "--quiet", "-b", branch, "main"]);
        works.replace("tiles.model.toml", from, to);
        plan(works);
        assert_eq!(commit(works), (0, String::new()));
    }
}

#[test]
fn after_a_merge_plans_are_made_again_and_never_put_together() {
    let works = repository();
    branches(&works);
    let (status, told, _) = git(&works, &["merge", "--quiet", "one"]);
    assert_eq!(status, 1, "git stops at the plan: {told}");
    assert!(!works.read("tiles.plan.toml").contains("<<<<<<<"));
    let model = works.read("tiles.model.toml");
    assert!(model.contains("price    = 32") && model.contains("price    = 41"), "{model}");
    // Whoever just goes on is told.
    let (status, told) = commit(&works);
    assert!(status == 1 && told.contains("stale"), "{told}");
    plan(&works);
    assert_eq!(commit(&works), (0, String::new()));
    assert_eq!(works.verify().0, 0);
    assert_eq!(git_done(&works, &["rev-list", "--count", "--merges", "HEAD"]).trim(), "1");
}

#[test]
fn without_the_attributes_marks_and_mixtures_are_told() {
    let works = repository();
    fs::remove_file(works.path(".gitattributes")).unwrap();
    branches(&works);
    assert_eq!(git(&works, &["merge", "--quiet", "one"]).0, 1);
    let (status, told) = commit(&works);
    assert!(status == 1 && told.contains("holds the marks of a merge conflict"), "{told}");
    plan(&works);
    assert_eq!(commit(&works), (0, String::new()));
}

#[test]
fn the_recipe_passes_the_status_on() {
    let works = Works::planned();
    let recipe = |arguments: &[&str]| {
        let mut command = clean(Command::new("sh"));
        command.arg(config("ci-verify.sh")).args(arguments).current_dir(works.root());
        command.env("MILLREEVE", env!("CARGO_BIN_EXE_millreeve"));
        ended(command)
    };
    assert_eq!(recipe(&[]), (0, "./tiles.model.toml: verified\n".to_owned(), String::new()));
    assert_eq!(recipe(&["tiles.model.toml"]).0, 0);
    works.replace("tiles.model.toml", "capacity = 90", "capacity = 91");
    assert_eq!(recipe(&[]).0, 1);
    assert_eq!(recipe(&["nowhere"]).0, 2);
}
