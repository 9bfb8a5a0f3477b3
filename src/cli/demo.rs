//! `demo`: lays out the models of a small works to try things on.

use std::fs;
use std::path::Path;

use super::exit::{Error, Outcome, shown, text};
use super::screen::{HINT, Screen};
use crate::model::escape::Plain;
use crate::store::{Durability, StoreError, atomic};

/// The models of the works.
const MODELS: [&str; 3] = ["fortnight.model.toml", "clay/body_mix.model.toml", "tileworks.model"];

/// Their files: where each goes, and what it says.
const FILES: [(&str, &str); 7] = [
    ("fortnight.model.toml", include_str!("../../examples/tileworks/fortnight.model.toml")),
    ("clay/body_mix.model.toml", include_str!("../../examples/tileworks/clay/body_mix.model.toml")),
    ("tileworks.model/works.toml", include_str!("../../examples/tileworks/tileworks.model/works.toml")),
    ("tileworks.model/sales.toml", include_str!("../../examples/tileworks/tileworks.model/sales.toml")),
    ("tileworks.model/maintenance.toml", include_str!("../../examples/tileworks/tileworks.model/maintenance.toml")),
    ("tileworks.model/uses.csv", include_str!("../../examples/tileworks/tileworks.model/uses.csv")),
    ("tileworks.model/draws.csv", include_str!("../../examples/tileworks/tileworks.model/draws.csv")),
];

pub(super) fn run(screen: &mut Screen, dir: &Path) -> Result<Outcome, Error> {
    // A folder of parts is all or nothing: ours would mix with those of another.
    for name in MODELS {
        let path = dir.join(name);
        if fs::symlink_metadata(&path).is_ok() {
            let help = "nothing was written; name another folder, or move that away";
            return Err(Error::usage(format_args!("{} is there already", shown(&path)), help));
        }
    }
    for (name, content) in FILES {
        let path = dir.join(name);
        if let Some(folder) = path.parent() {
            fs::create_dir_all(folder).map_err(|error| {
                Error::failure(format_args!("cannot make the folder {}: {error}", shown(folder)), "")
            })?;
        }
        atomic::write(&path, content.as_bytes(), |_| false, Durability::Cached).map_err(|error| failed(&error))?;
        if screen.json() {
            screen.object(&serde_json::json!({ "path": text(&path) }));
        } else {
            screen.say(format_args!("laid out {}", Plain(&path.to_string_lossy())));
        }
    }
    if !screen.json() {
        let dir = quoted(dir);
        screen.say(format_args!(
            "\nNow work out its plans:\n  {HINT}millreeve once {dir}{HINT:#}\nand look at one:\n  {HINT}millreeve show \
             {dir}/tileworks{HINT:#}\nor keep them while you edit the models in another window:\n  {HINT}millreeve keep {dir}{HINT:#}"
        ));
    }
    Ok(Outcome::Good)
}

/// What a failed write means for the command.
pub(super) fn failed(error: &StoreError) -> Error {
    match error {
        StoreError::Failed { .. } => Error::failure(error, ""),
        StoreError::InTheWay { .. } | StoreError::NotOurs { .. } => Error::usage(error, ""),
    }
}

/// A path as it can be pasted into a shell.
pub(super) fn quoted(path: &Path) -> String {
    let text = path.to_string_lossy();
    let plain = |c: char| c.is_alphanumeric() || "/._-+,:@%".contains(c);
    if !text.is_empty() && text.chars().all(plain) && !text.starts_with('-') {
        return text.into_owned();
    }
    let text = if text.starts_with('-') { format!("./{text}") } else { text.into_owned() };
    format!("'{}'", Plain(&text.replace('\'', "'\\''")))
}
