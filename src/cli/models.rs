//! Which models a path on the command line means.

use std::collections::BTreeSet;
use std::fs;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use super::exit::{Error, shown};
use crate::keep::path::is_model;
use crate::keep::scan::{Scan, scan};
use crate::keep::{Ignore, ModelPath};
use crate::model::read;

/// How the name of a model file ends.
pub(crate) const MODEL: &str = read::FILE;
/// How the name of a folder ends that is a model in parts.
pub(crate) const FOLDER: &str = read::FOLDER;
/// What a model is, for whoever named none.
pub(crate) const WHAT_A_MODEL_IS: &str =
    "a model is a file whose name ends in .model.toml, or a folder of parts whose name ends in .model";
/// How the name of a plan file ends.
pub(crate) const PLAN: &str = ".plan.toml";
/// How the name of a release ends.
pub(crate) const RELEASE: &str = ".release.toml";
/// How the name of a note ends.
pub(crate) const NOTE: &str = ".note.md";

/// What a path on the command line means.
#[derive(Debug, Default, PartialEq, Eq)]
pub(crate) struct Found {
    /// The models, also those that are named like one and are no plain file.
    pub(crate) models: BTreeSet<PathBuf>,
    /// Where the models of plans would be that have none.
    pub(crate) gone: BTreeSet<PathBuf>,
    /// Folders that could not be read.
    pub(crate) unread: Vec<PathBuf>,
}

/// All models that `path` means: the model itself, or every model in the folder and those below it that `ignore` does not cover.
pub(crate) fn under(path: &Path, ignore: &Ignore) -> Result<Found, Error> {
    let about = fs::symlink_metadata(path).map_err(|error| Error::reading(path, &error))?;
    if about.is_dir() && path.file_name().is_some_and(read::is_folder_name) {
        // Without a slash at its end.
        let path = path.components().collect();
        return Ok(Found { models: BTreeSet::from([path]), ..Found::default() });
    }
    if path.is_dir() && (about.is_dir() || !names_model(path)) {
        let root = Arc::from(path);
        let Scan { sights, odd, unread, .. } = scan(&root, ignore).map_err(|error| Error::reading(path, &error))?;
        // A plan without a model is no model.
        let (there, gone): (Vec<_>, Vec<_>) = sights.into_iter().partition(|(_, sight)| sight.model.is_some());
        let models = there.into_iter().map(|(model, _)| model).chain(odd);
        return Ok(Found {
            models: models.map(|model: ModelPath| model.full()).collect(),
            gone: gone.into_iter().map(|(model, _)| model.full()).collect(),
            unread: unread.into_keys().map(|folder| root.join(folder)).collect(),
        });
    }
    if !names_model(path) {
        return Err(no_model(path));
    }
    Ok(Found { models: BTreeSet::from([path.to_owned()]), ..Found::default() })
}

/// That a path is no model; where it lies in one, in which.
pub(super) fn no_model(path: &Path) -> Error {
    let message = format!("{} is not a model", shown(path));
    match folder_of_part(path) {
        Some(folder) => {
            Error::usage(message, format_args!("the model is the folder {}, with all of its parts", shown(folder)))
        }
        None => Error::usage(message, WHAT_A_MODEL_IS),
    }
}

/// The folder of the model that a path lies in as a part, by its name.
fn folder_of_part(path: &Path) -> Option<&Path> {
    path.parent().filter(|folder| folder.file_name().is_some_and(read::is_folder_name))
}

/// Whether a path is that of a model, by its name.
pub(crate) fn names_model(path: &Path) -> bool {
    path.file_name().is_some_and(|name| is_model(name) || read::is_folder_name(name))
}

/// The folder that `path` lies in, or `path` itself where it is one and no model: whose settings hold for it.
pub(crate) fn folder_of(path: &Path) -> &Path {
    if path.is_dir() && !names_model(path) { path } else { path.parent().unwrap_or(path) }
}

/// Where the model of this name lies, or would as a file.
pub(crate) fn model_of(stem: &Path) -> PathBuf {
    let [file, folder] = [MODEL, FOLDER].map(|ending| with_ending(stem, ending));
    if !file.is_file() && folder.is_dir() { folder } else { file }
}

/// `path` with another ending: the model, the plan and the note of one name.
pub(crate) fn with_ending(stem: &Path, ending: &str) -> PathBuf {
    let mut path = stem.as_os_str().to_owned();
    path.push(ending);
    PathBuf::from(path)
}

/// `path` without the ending of a model, plan, release or note, if it has one: `works/tileworks`. A part leads to its model.
pub(crate) fn stem(path: &Path) -> PathBuf {
    let path = folder_of_part(path).unwrap_or(path);
    let name = path.file_name().unwrap_or_default().to_string_lossy();
    let stem = [MODEL, FOLDER, PLAN, RELEASE, NOTE]
        .iter()
        .find_map(|ending| name.strip_suffix(ending))
        .filter(|stem| !stem.is_empty());
    match stem {
        // Endings are ASCII, so cutting them off works on names that are not Unicode too.
        Some(stem) if path.file_name().is_some_and(|name| name.to_str().is_some()) => path.with_file_name(stem),
        _ => path.to_owned(),
    }
}

#[cfg(test)]
#[expect(clippy::disallowed_methods, reason = "tests lay out files as other programs would")]
mod tests {
    use super::*;

    #[test]
    fn a_folder_means_the_models_in_it_and_below() {
        let folder = tempfile::tempdir().unwrap();
        let at = |name: &str| folder.path().join(name);
        fs::create_dir_all(at("deep/er")).unwrap();
        fs::create_dir_all(at(".git")).unwrap();
        for name in [
            "b.model.toml",
            "deep/er/a.model.toml",
            "old.model.toml",
            "b.plan.toml",
            "gone.plan.toml",
            ".x.model.toml",
            ".model.toml",
        ] {
            fs::write(at(name), "").unwrap();
        }
        fs::write(at(".git/c.model.toml"), "").unwrap();
        let ignore = Ignore::new(&["old*".to_owned()]).unwrap();
        let found = under(folder.path(), &ignore).unwrap();
        assert_eq!(found.models.into_iter().collect::<Vec<_>>(), [at("b.model.toml"), at("deep/er/a.model.toml")]);
        assert_eq!(found.gone.into_iter().collect::<Vec<_>>(), [at("gone.model.toml")]);
        let alone = under(&at("old.model.toml"), &ignore).unwrap();
        assert_eq!(alone.models.into_iter().collect::<Vec<_>>(), [at("old.model.toml")]);
        assert_eq!(under(&at("b.plan.toml"), &ignore).unwrap_err().status(), 2);
        assert_eq!(under(&at("nothing"), &ignore).unwrap_err().status(), 2);
    }

    #[test]
    fn every_file_of_a_model_leads_to_its_name() {
        for path in [
            "w/tiles.model.toml",
            "w/tiles.model",
            "w/tiles.model/",
            "w/tiles.model/sales.toml",
            "w/tiles.plan.toml",
            "w/tiles.release.toml",
            "w/tiles.note.md",
            "w/tiles",
        ] {
            assert_eq!(stem(Path::new(path)), Path::new("w/tiles"));
        }
        assert_eq!(stem(Path::new(".model.toml")), Path::new(".model.toml"));
    }
}
