//! Finds published instances: the Netlib files that come with the sources of the solver.
#![expect(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot find its input must fail")]

use std::path::PathBuf;
use std::process::Command;
use std::sync::OnceLock;

/// The path of the instance `NAME.mps`.
pub(crate) fn netlib(name: &str) -> PathBuf {
    static FOLDER: OnceLock<PathBuf> = OnceLock::new();
    let path = FOLDER.get_or_init(folder).join(name).with_extension("mps");
    assert!(path.is_file(), "no instance {}", path.display());
    path
}

/// The folder of instances in the sources of the crate `highs-sys`, as cargo unpacked them.
fn folder() -> PathBuf {
    let output = run(Command::new("rustc").arg("-vV"));
    let host = output.lines().find_map(|line| line.strip_prefix("host: ")).expect("rustc names its host");
    let metadata = run(Command::new(env!("CARGO"))
        .args(["metadata", "--format-version", "1", "--offline", "--filter-platform", host])
        .current_dir(env!("CARGO_MANIFEST_DIR")));
    let metadata: serde_json::Value = serde_json::from_str(&metadata).unwrap();
    let packages = metadata["packages"].as_array().expect("a list of packages");
    let solver = packages.iter().find(|package| package["name"] == "highs-sys").expect("highs-sys is a dependency");
    let manifest = solver["manifest_path"].as_str().expect("a path");
    PathBuf::from(manifest).with_file_name("HiGHS").join("check").join("instances")
}

fn run(command: &mut Command) -> String {
    let output = command.output().unwrap();
    assert!(output.status.success(), "{command:?}: {}", String::from_utf8_lossy(&output.stderr));
    String::from_utf8(output.stdout).unwrap()
}
