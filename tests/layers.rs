//! The layers run one way: each folder of `src/` uses those before it, never those after it.
#![expect(clippy::unwrap_used, reason = "a test that cannot read the sources must fail")]

use std::fs;
use std::path::{Path, PathBuf};

/// From the first to the last; a folder may use itself and those before it.
const LAYERS: [&str; 8] = ["model", "lp", "edits", "solver", "plan", "store", "keep", "cli"];

#[test]
fn no_layer_uses_a_later_one() {
    let sources = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let mut breaches = Vec::new();
    for (height, layer) in LAYERS.iter().enumerate() {
        let files = rust_files(&sources.join(layer));
        assert!(!files.is_empty(), "no layer `{layer}`");
        for file in files {
            let text = fs::read_to_string(&file).unwrap();
            for used in uses(&text) {
                let later = LAYERS.iter().position(|name| *name == used).is_none_or(|other| other > height);
                if later {
                    breaches.push(format!("{} uses crate::{used}", file.display()));
                }
            }
        }
    }
    assert!(breaches.is_empty(), "{}", breaches.join("\n"));
}

#[test]
fn every_folder_is_a_layer_and_every_file_says_what_it_is_for() {
    let sources = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    for entry in fs::read_dir(&sources).unwrap() {
        let path = entry.unwrap().path();
        let name = path.file_name().unwrap().to_string_lossy().into_owned();
        assert!(!path.is_dir() || LAYERS.contains(&name.as_str()), "`{name}` is no layer");
    }
    for file in rust_files(&sources) {
        let text = fs::read_to_string(&file).unwrap();
        assert!(text.starts_with("//! "), "{} does not open with a `//!` line", file.display());
    }
}

#[test]
fn only_the_live_solver_is_unsafe() {
    let sources = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let live = sources.join("solver").join("live.rs");
    for file in rust_files(&sources) {
        let text = fs::read_to_string(&file).unwrap();
        let is_unsafe =
            text.lines().any(|line| line.contains("unsafe_code") || line.trim_start().starts_with("unsafe "));
        assert_eq!(is_unsafe, file == live, "{}", file.display());
    }
}

/// The layers that a file names after `crate::`, alone or in braces.
fn uses(text: &str) -> Vec<String> {
    let mut names = Vec::new();
    for (at, _) in text.match_indices("crate::") {
        let rest = &text[at + "crate::".len()..];
        let list = rest.strip_prefix('{').and_then(|inner| inner.split('}').next());
        for part in list.map_or_else(|| vec![rest], |list| list.split(',').collect()) {
            let name: String = part.trim().chars().take_while(|c| c.is_ascii_lowercase() || *c == '_').collect();
            if !name.is_empty() {
                names.push(name);
            }
        }
    }
    names
}

fn rust_files(folder: &Path) -> Vec<PathBuf> {
    let mut files = Vec::new();
    for entry in fs::read_dir(folder).unwrap() {
        let path = entry.unwrap().path();
        if path.is_dir() {
            files.extend(rust_files(&path));
        } else if path.extension().is_some_and(|ending| ending == "rs") {
            files.push(path);
        }
    }
    files
}
