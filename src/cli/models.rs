//! Which models a path on the command line means.

use std::collections::BTreeSet;
use std::fs;
use std::path::{Path, PathBuf};

use globset::{Glob, GlobSet, GlobSetBuilder};

use super::exit::{Error, shown};

/// How the name of a model file ends.
pub(crate) const MODEL: &str = ".model.toml";
/// How the name of a plan file ends.
pub(crate) const PLAN: &str = ".plan.toml";
/// How the name of a note ends.
pub(crate) const NOTE: &str = ".note.md";

/// How deep folders are followed.
const DEEPEST: usize = 64;

/// Which files of a folder are not looked at.
pub(crate) struct Ignored(GlobSet);

impl Ignored {
    /// What `globs` match.
    pub(crate) fn new(globs: &[Glob]) -> Result<Self, Error> {
        let mut builder = GlobSetBuilder::new();
        for glob in globs {
            builder.add(glob.clone());
        }
        let set =
            builder.build().map_err(|error| Error::usage(format_args!("`watch.ignore` is too much: {error}"), ""))?;
        Ok(Self(set))
    }
}

/// All models that `path` means, in byte order: the file itself, or every model in the folder and those below it that `ignored`
/// does not match. Links are not followed and hidden folders not entered.
pub(crate) fn under(path: &Path, ignored: &Ignored) -> Result<BTreeSet<PathBuf>, Error> {
    let about = fs::symlink_metadata(path).map_err(|error| Error::reading(path, &error))?;
    let mut models = BTreeSet::new();
    if about.is_dir() {
        walk(path, path, ignored, 0, &mut models)?;
    } else if is_model(path) {
        models.insert(path.to_owned());
    } else {
        let help = format!("the name of a model ends in {MODEL}");
        return Err(Error::usage(format_args!("{} is not a model", shown(path)), help));
    }
    Ok(models)
}

fn walk(
    root: &Path,
    folder: &Path,
    ignored: &Ignored,
    depth: usize,
    models: &mut BTreeSet<PathBuf>,
) -> Result<(), Error> {
    let entries = fs::read_dir(folder).map_err(|error| Error::reading(folder, &error))?;
    for entry in entries {
        let entry = entry.map_err(|error| Error::reading(folder, &error))?;
        let path = entry.path();
        if hidden(&path) || ignored.0.is_match(path.strip_prefix(root).unwrap_or(&path)) {
            continue;
        }
        let kind = entry.file_type().map_err(|error| Error::reading(&path, &error))?;
        if kind.is_dir() && depth < DEEPEST {
            walk(root, &path, ignored, depth + 1, models)?;
        } else if !kind.is_dir() && is_model(&path) {
            models.insert(path);
        }
    }
    Ok(())
}

fn hidden(path: &Path) -> bool {
    path.file_name().is_some_and(|name| name.as_encoded_bytes().starts_with(b"."))
}

/// Whether a file is a model by its name: it ends in [`MODEL`], with something before, and is no editor's lock or hidden file.
pub(crate) fn is_model(path: &Path) -> bool {
    let Some(name) = path.file_name().map(std::ffi::OsStr::as_encoded_bytes) else { return false };
    name.len() > MODEL.len() && name.ends_with(MODEL.as_bytes()) && !matches!(name.first(), Some(b'.' | b'#'))
}

/// `path` with another ending: the model, the plan and the note of one name.
pub(crate) fn with_ending(stem: &Path, ending: &str) -> PathBuf {
    let mut path = stem.as_os_str().to_owned();
    path.push(ending);
    PathBuf::from(path)
}

/// `path` without the ending of a model, plan or note, if it has one: `works/tileworks`.
pub(crate) fn stem(path: &Path) -> PathBuf {
    let name = path.file_name().unwrap_or_default().to_string_lossy();
    let stem = [MODEL, PLAN, NOTE].iter().find_map(|ending| name.strip_suffix(ending)).filter(|stem| !stem.is_empty());
    match stem {
        // Endings are ASCII, so cutting them off works on names that are not Unicode too.
        Some(stem) if path.file_name().is_some_and(|name| name.to_str().is_some()) => path.with_file_name(stem),
        _ => path.to_owned(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_folder_means_the_models_in_it_and_below() {
        let folder = tempfile::tempdir().unwrap();
        let at = |name: &str| folder.path().join(name);
        fs::create_dir_all(at("deep/er")).unwrap();
        fs::create_dir_all(at(".git")).unwrap();
        for name in
            ["b.model.toml", "deep/er/a.model.toml", "old.model.toml", "b.plan.toml", ".x.model.toml", ".model.toml"]
        {
            fs::write(at(name), "").unwrap();
        }
        fs::write(at(".git/c.model.toml"), "").unwrap();
        let ignored = Ignored::new(&[Glob::new("old*").unwrap()]).unwrap();
        let found = under(folder.path(), &ignored).unwrap();
        assert_eq!(found.into_iter().collect::<Vec<_>>(), [at("b.model.toml"), at("deep/er/a.model.toml")]);
    }

    #[test]
    fn every_file_of_a_model_leads_to_its_name() {
        for path in ["w/tiles.model.toml", "w/tiles.plan.toml", "w/tiles.note.md", "w/tiles"] {
            assert_eq!(stem(Path::new(path)), Path::new("w/tiles"));
        }
        assert_eq!(stem(Path::new(".model.toml")), Path::new(".model.toml"));
    }
}
