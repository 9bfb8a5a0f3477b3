//! Looking at the whole folder: what correctness rests on.

use std::collections::{BTreeMap, BTreeSet};
use std::ffi::OsString;
use std::fs::{self, Metadata};
use std::io;
use std::os::unix::fs::MetadataExt;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use super::path::{Beside, Form, Ignore, ModelPath, file_of_folder, is_entered, is_model, model_beside};
use super::stamp::{Lying, Sight, Stamp, leads_to_folder, present};
use crate::store::atomic::is_temp;
use crate::store::error::reason;

/// Tells one folder from another that takes its place: device and inode.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct FolderId(u64, u64);

impl FolderId {
    /// The folder at `path`.
    ///
    /// # Errors
    /// It cannot be looked at, or is no folder.
    pub fn of(path: &Path) -> io::Result<Self> {
        let metadata = fs::metadata(path)?;
        if metadata.is_dir() {
            Ok(Self(metadata.dev(), metadata.ino()))
        } else {
            Err(io::ErrorKind::NotADirectory.into())
        }
    }
}

/// What a scan found.
#[derive(Clone, Debug)]
pub struct Scan {
    /// Which folder stood at the root's path.
    pub root: FolderId,
    /// Every model, and every plan without a model.
    pub sights: BTreeMap<ModelPath, Sight>,
    /// What is named as a model and is neither a plain file nor a folder of parts: links, pipes, folders named as a file.
    pub odd: BTreeSet<ModelPath>,
    /// Temporary files of ours.
    pub temps: Vec<PathBuf>,
    /// The folders that were looked into and those that are models, relative to the root, which is the empty path. These are to be watched.
    pub folders: BTreeSet<PathBuf>,
    /// Folders and models, relative to the root, that could not be read, and why. Nothing is known about what is in them.
    pub unread: BTreeMap<PathBuf, String>,
}

impl Scan {
    /// Whether nothing was found at all: neither a model nor a plan.
    #[must_use]
    pub fn is_hollow(&self) -> bool {
        self.sights.is_empty() && self.odd.is_empty()
    }

    /// Whether a model that was not found may be there nevertheless.
    #[must_use]
    pub fn may_hide(&self, model: &ModelPath) -> bool {
        self.odd.contains(model) || self.unread.keys().any(|folder| model.relative().starts_with(folder))
    }
}

/// Scans the folder `root`. Linked folders are not entered.
///
/// # Errors
/// The root itself cannot be read; what is wrong further down is in the result.
pub fn scan(root: &Arc<Path>, ignore: &Ignore) -> io::Result<Scan> {
    let id = FolderId::of(root)?;
    let mut scan = Scan {
        root: id,
        sights: BTreeMap::new(),
        odd: BTreeSet::new(),
        temps: Vec::new(),
        folders: BTreeSet::new(),
        unread: BTreeMap::new(),
    };
    let mut folders = vec![PathBuf::new()];
    while let Some(folder) = folders.pop() {
        match look_into(root, &folder, ignore, &mut scan) {
            Ok(inner) => {
                folders.extend(inner);
                scan.folders.insert(folder);
            }
            Err(error) if folder.as_os_str().is_empty() => return Err(error),
            // Removed since its parent was read.
            Err(error) if error.kind() == io::ErrorKind::NotFound => {}
            Err(error) => {
                scan.unread.insert(folder, reason(&error));
            }
        }
    }
    // What was seen of a folder before it failed says nothing either.
    let unread = &scan.unread;
    scan.sights.retain(|model, _| model.relative().parent().is_none_or(|folder| !unread.contains_key(folder)));
    Ok(scan)
}

/// What a folder's list says of one model. Only what is on it need be looked at, from within the folder: that is what a scan's time goes into.
#[derive(Debug, Default)]
struct Listed {
    file: Option<io::Result<Metadata>>,
    folder: bool,
    plan: Option<io::Result<Metadata>>,
    note: Option<Stamp>,
    release: Option<Stamp>,
}

/// Looks into one folder, and returns the folders in it.
fn look_into(root: &Arc<Path>, folder: &Path, ignore: &Ignore, scan: &mut Scan) -> io::Result<Vec<PathBuf>> {
    let mut inner = Vec::new();
    let mut models: BTreeMap<OsString, Listed> = BTreeMap::new();
    for entry in fs::read_dir(root.join(folder))? {
        let entry = entry?;
        let name = entry.file_name();
        let is_folder = entry.file_type().is_ok_and(|kind| kind.is_dir());
        if is_model(&name) {
            models.entry(name).or_default().file = present(entry.metadata());
        } else if let Some(model) = file_of_folder(&name) {
            let relative = folder.join(&name);
            // A plain file of such a name is somebody else's.
            if !ignore.covers(&relative) && (is_folder || leads_to_folder(&entry.path())) {
                models.entry(model).or_default().folder = true;
                scan.folders.extend(is_folder.then_some(relative));
            }
        } else if let Some((model, kind)) = model_beside(&name) {
            let (listed, about) = (models.entry(model).or_default(), present(entry.metadata()));
            match kind {
                Beside::Plan => listed.plan = about,
                Beside::Note => listed.note = stamp(about),
                Beside::Release => listed.release = stamp(about),
            }
        } else if is_temp(&name) {
            scan.temps.push(entry.path());
        } else if is_folder && is_entered(&name) && !ignore.covers(&folder.join(&name)) {
            inner.push(folder.join(&name));
        }
    }
    for (name, listed) in models {
        let relative = folder.join(name);
        if let Some(model) = ModelPath::new(root, &relative).filter(|_| !ignore.covers(&relative)) {
            look_at(model, listed, scan)?;
        }
    }
    Ok(inner)
}

/// Looks at one model. Fails where the folder lets names be read and nothing behind them: then nothing is known of the others either.
fn look_at(model: ModelPath, listed: Listed, scan: &mut Scan) -> io::Result<()> {
    match look(&model, listed) {
        Ok(Some((form, sight))) => {
            scan.sights.insert(model.lying(form), sight);
        }
        Ok(None) => {}
        Err(error) if error.kind() == io::ErrorKind::InvalidInput => {
            let form = if model.lying(Form::Folder).full().is_dir() { Form::Folder } else { Form::File };
            scan.odd.insert(model.lying(form));
        }
        Err(error) if error.kind() == io::ErrorKind::PermissionDenied => return Err(error),
        Err(error) => {
            scan.unread.insert(model.relative().to_owned(), reason(&error));
        }
    }
    Ok(())
}

/// What is to be seen of a model, or of a plan without one; `None` where there is neither.
///
/// # Errors
/// What the system says; [`io::ErrorKind::InvalidInput`] where the model is no plain file.
fn look(model: &ModelPath, listed: Listed) -> io::Result<Option<(Form, Sight)>> {
    let Listed { file, folder, plan, note, release } = listed;
    let lying = match file.transpose()? {
        _ if folder => Lying::look(&model.full())?,
        Some(file) if file.is_file() => Some(Lying { form: Form::File, stamp: Stamp::from(&file) }),
        Some(_) => return Err(io::ErrorKind::InvalidInput.into()),
        None => None,
    };
    let Some(Lying { form, stamp: model }) = lying else {
        let plan = plan.transpose()?.filter(Metadata::is_file).map(|plan| Stamp::from(&plan));
        return Ok(plan.map(|plan| (Form::File, Sight { plan: Some(plan), note, release, ..Sight::default() })));
    };
    Ok(Some((form, Sight { model: Some(model), plan: stamp(plan), note, release })))
}

/// The stamp of what lies beside a model, where that is a plain file that can be looked at.
fn stamp(about: Option<io::Result<Metadata>>) -> Option<Stamp> {
    about?.ok().filter(Metadata::is_file).map(|metadata| Stamp::from(&metadata))
}

#[cfg(test)]
#[expect(clippy::disallowed_methods, reason = "tests lay out files as other programs would")]
mod tests {
    use std::os::unix::fs::symlink;

    use super::*;

    fn found(root: &Path, globs: &[&str]) -> Scan {
        let globs: Vec<_> = globs.iter().map(|&glob| glob.to_owned()).collect();
        scan(&Arc::from(root), &Ignore::new(&globs).unwrap()).unwrap()
    }

    fn names<'a>(models: impl IntoIterator<Item = &'a ModelPath>) -> Vec<String> {
        models.into_iter().map(ToString::to_string).collect()
    }

    #[test]
    fn models_and_orphaned_plans_are_found_and_nothing_else_is_looked_at() {
        let root = tempfile::tempdir().unwrap();
        let outside = tempfile::tempdir().unwrap();
        fs::write(outside.path().join("far.model.toml"), "").unwrap();
        for folder in ["a/b", ".git", ".millreeve", "old", "d.model.toml"] {
            fs::create_dir_all(root.path().join(folder)).unwrap();
        }
        let files = [
            "m.model.toml",
            "m.plan.toml",
            "a/b/n.model.toml",
            "gone.plan.toml",
            "lone.note.md",
            ".git/g.model.toml",
            ".millreeve/s.model.toml",
            "old/o.model.toml",
            "x.txt",
            ".millreeve-aB3dEf7h.tmp",
        ];
        for file in files {
            fs::write(root.path().join(file), "").unwrap();
        }
        symlink(outside.path(), root.path().join("linked")).unwrap();
        symlink(outside.path().join("far.model.toml"), root.path().join("l.model.toml")).unwrap();
        let scan = found(root.path(), &["old"]);
        assert_eq!(names(scan.sights.keys()), ["a/b/n.model.toml", "gone.model.toml", "m.model.toml"]);
        let shape: Vec<_> =
            scan.sights.values().map(|s| (s.model.is_some(), s.plan.is_some(), s.note.is_some())).collect();
        assert_eq!(shape, [(true, false, false), (false, true, false), (true, true, false)]);
        assert_eq!(names(&scan.odd), ["d.model.toml", "l.model.toml"]);
        assert_eq!(scan.temps, [root.path().join(".millreeve-aB3dEf7h.tmp")]);
        assert!(scan.unread.is_empty() && !scan.is_hollow());
        assert_eq!(scan.folders.iter().collect::<Vec<_>>(), [Path::new(""), Path::new("a"), Path::new("a/b")]);
    }

    #[test]
    fn folders_of_parts_are_models_and_are_watched_but_not_searched() {
        let root = tempfile::tempdir().unwrap();
        let outside = tempfile::tempdir().unwrap();
        for folder in ["m.model/deep", "a/n.model", "both.model", "old.model", ".x.model"] {
            fs::create_dir_all(root.path().join(folder)).unwrap();
        }
        let files = [
            "m.model/works.toml",
            "m.model/inner.model.toml",
            "m.model/deep/far.model.toml",
            "m.plan.toml",
            "both.model.toml",
            "file.model",
            ".x.model/x.model.toml",
        ];
        for file in files {
            fs::write(root.path().join(file), "").unwrap();
        }
        symlink(outside.path(), root.path().join("linked.model")).unwrap();
        symlink(root.path().join("file.model"), root.path().join("lead.model")).unwrap();
        let scan = found(root.path(), &["old.model"]);
        assert_eq!(names(scan.sights.keys()), [".x.model/x.model.toml", "a/n.model", "both.model.toml", "m.model"]);
        assert_eq!(names(&scan.odd), ["linked.model"]);
        let watched = ["", ".x.model", "a", "a/n.model", "both.model", "m.model"];
        assert_eq!(scan.folders.iter().collect::<Vec<_>>(), watched.map(Path::new));
        let m = scan.sights.iter().find(|(model, _)| model.name() == "m").unwrap();
        assert!(m.1.plan.is_some() && m.1.model == Stamp::of_model(&m.0.full()));
    }

    #[test]
    fn a_missing_root_is_an_error_and_not_an_empty_folder() {
        let root = tempfile::tempdir().unwrap();
        let none = root.path().join("none");
        assert!(scan(&Arc::from(none.as_path()), &Ignore::new(&[]).unwrap()).is_err());
        assert!(found(root.path(), &[]).is_hollow());
    }
}
