//! The daemon's own folder, `.millreeve/` at the root of a watched folder, and the folder where its state lies.

use std::fs;
use std::io::ErrorKind;
use std::path::{Path, PathBuf};

use super::atomic::{self, Durability};
use super::error::{Step, StoreError};
use crate::model::read::is_folder_name;

/// Name of the daemon's own folder.
pub const OWN: &str = ".millreeve";

/// A watched folder, with the daemon's own folder in it made ready.
#[derive(Clone, Debug)]
pub struct Folder {
    root: PathBuf,
    own: PathBuf,
    state: PathBuf,
}

impl Folder {
    /// Makes `.millreeve/` under `root`, with a `.gitignore` that hides it, and the state folder: `state` where one is given, else `.millreeve/`.
    /// What a killed process left half written in it is cleared away.
    ///
    /// # Errors
    /// `root` does not exist, `.millreeve` is not a folder, or one of them cannot be written.
    pub fn open(root: &Path, state: Option<&Path>) -> Result<Self, StoreError> {
        let root = root.canonicalize().map_err(StoreError::failed(Step::Look, root))?;
        let own = root.join(OWN);
        make(&own)?;
        atomic::sweep_folder(&own).map_err(StoreError::failed(Step::Look, &own))?;
        // A `.gitignore` that somebody has changed is theirs.
        match atomic::write(&own.join(".gitignore"), b"*\n", |_| false, Durability::Cached) {
            Ok(_) | Err(StoreError::NotOurs { .. } | StoreError::InTheWay { .. }) => {}
            Err(error) => return Err(error),
        }
        let state = match state {
            Some(state) => {
                fs::create_dir_all(state).map_err(StoreError::failed(Step::MakeFolder, state))?;
                state.canonicalize().map_err(StoreError::failed(Step::Look, state))?
            }
            None => own.clone(),
        };
        Ok(Self { root, own, state })
    }

    /// The watched folder `root` as it stands; none where it was never opened. Makes nothing.
    #[must_use]
    pub fn find(root: &Path, state: Option<&Path>) -> Option<Self> {
        let root = root.canonicalize().ok()?;
        let own = root.join(OWN);
        let state = state.map_or_else(|| Some(own.clone()), |state| state.canonicalize().ok())?;
        own.is_dir().then_some(Self { root, own, state })
    }

    /// The root of the folder that `path` belongs to: the nearest folder at or above it that holds a `.millreeve/`, else `path` itself if
    /// it is a folder of models, else the folder it lies in.
    ///
    /// # Errors
    /// `path` does not exist.
    pub fn root_of(path: &Path) -> Result<PathBuf, StoreError> {
        let failed = || StoreError::failed(Step::Look, path);
        let whole = std::path::absolute(path).map_err(failed())?;
        let start = if fs::symlink_metadata(&whole).map_err(failed())?.is_dir() {
            whole.as_path()
        } else {
            whole.parent().unwrap_or(&whole)
        };
        let mut start = start.canonicalize().map_err(failed())?;
        // Nothing of ours lies in a folder that is a model.
        if start.file_name().is_some_and(is_folder_name) {
            start.pop();
        }
        let kept = start.ancestors().find(|folder| folder.join(OWN).is_dir());
        Ok(kept.unwrap_or(&start).to_owned())
    }

    /// The watched folder, absolute and free of links.
    #[must_use]
    pub fn root(&self) -> &Path {
        &self.root
    }

    /// The daemon's own folder in it.
    #[must_use]
    pub fn own(&self) -> &Path {
        &self.own
    }

    /// The folder where the daemon's state lies.
    #[must_use]
    pub fn state(&self) -> &Path {
        &self.state
    }
}

/// Makes one folder, unless it is there; a link to one is not good enough.
fn make(path: &Path) -> Result<(), StoreError> {
    match fs::create_dir(path) {
        Err(error) if error.kind() == ErrorKind::AlreadyExists => {
            let metadata = fs::symlink_metadata(path).map_err(StoreError::failed(Step::Look, path))?;
            if metadata.is_dir() {
                Ok(())
            } else {
                let what = if metadata.is_file() { "a file" } else { atomic::kind(metadata.file_type()) };
                Err(StoreError::InTheWay { path: path.to_owned(), what })
            }
        }
        made => made.map_err(StoreError::failed(Step::MakeFolder, path)),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_own_folder_hides_itself_and_opens_again() {
        let root = tempfile::tempdir().unwrap();
        for _ in 0..2 {
            let folder = Folder::open(root.path(), None).unwrap();
            assert_eq!(folder.state(), folder.own());
            assert_eq!(fs::read_to_string(folder.own().join(".gitignore")).unwrap(), "*\n");
        }
    }

    #[test]
    fn what_a_killed_process_left_in_the_own_folder_is_cleared_away() {
        let root = tempfile::tempdir().unwrap();
        let own = Folder::open(root.path(), None).unwrap().own().to_owned();
        let left = own.join(".millreeve-aB3dEf7h.tmp");
        fs::File::create(&left).unwrap();
        Folder::open(root.path(), None).unwrap();
        assert!(!left.exists());
    }

    #[test]
    fn a_link_in_place_of_the_own_folder_is_refused() {
        let root = tempfile::tempdir().unwrap();
        let elsewhere = tempfile::tempdir().unwrap();
        std::os::unix::fs::symlink(elsewhere.path(), root.path().join(OWN)).unwrap();
        let error = Folder::open(root.path(), None).unwrap_err();
        assert!(error.to_string().contains("a symbolic link"), "{error}");
        assert_eq!(fs::read_dir(elsewhere.path()).unwrap().count(), 0);
    }

    #[test]
    fn a_path_belongs_to_the_nearest_kept_folder() {
        let root = tempfile::tempdir().unwrap();
        let deep = root.path().join("a/b");
        fs::create_dir_all(&deep).unwrap();
        assert_eq!(Folder::root_of(&deep).unwrap(), deep.canonicalize().unwrap());
        let folder = Folder::open(root.path(), None).unwrap();
        assert_eq!(Folder::root_of(&deep).unwrap(), folder.root());
        assert!(Folder::root_of(&deep.join("none")).is_err());
        let model = deep.join("tile.model");
        fs::create_dir(&model).unwrap();
        assert_eq!(Folder::root_of(&model).unwrap(), folder.root());
        let alone = tempfile::tempdir().unwrap();
        fs::create_dir(alone.path().join("tile.model")).unwrap();
        let root = Folder::root_of(&alone.path().join("tile.model/")).unwrap();
        assert_eq!(root, alone.path().canonicalize().unwrap());
    }
}
