//! How a model lies on disk, told from one state to the next without reading it.

use std::fs::{self, Metadata};
use std::io;
use std::os::unix::fs::MetadataExt;
use std::path::Path;

use super::path::{Form, ModelPath};
use crate::model::read::{self, Listing};
use crate::store::error::reason;

/// What tells one state of a file from another without reading it. Compared by `!=` only: times may go backwards.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Stamp {
    device: u64,
    inode: u64,
    size: u64,
    /// Seconds since 1970, and nanoseconds.
    modified: (i64, i64),
    /// The same; moves with every write and cannot be set back.
    changed: (i64, i64),
    /// A mark of the parts in a model's folder.
    parts: Option<u64>,
}

impl Stamp {
    /// The stamp of a plain file; `None` where there is none. Links are not followed.
    #[must_use]
    pub fn of(path: &Path) -> Option<Self> {
        fs::symlink_metadata(path).ok().filter(Metadata::is_file).map(|metadata| Self::from(&metadata))
    }

    /// The stamp of a model at a path of either form, be it a file, a folder with all its parts, or both; `None` where there is neither.
    #[must_use]
    pub fn of_model(path: &Path) -> Option<Self> {
        Lying::look(path).ok().flatten().map(|lying| lying.stamp)
    }

    /// When the file last changed by the clock of its file system, in nanoseconds since 1970.
    #[must_use]
    pub fn changed(&self) -> i128 {
        i128::from(self.changed.0) * 1_000_000_000 + i128::from(self.changed.1)
    }
}

impl From<&Metadata> for Stamp {
    fn from(metadata: &Metadata) -> Self {
        Self {
            device: metadata.dev(),
            inode: metadata.ino(),
            size: metadata.size(),
            modified: (metadata.mtime(), metadata.mtime_nsec()),
            changed: (metadata.ctime(), metadata.ctime_nsec()),
            parts: None,
        }
    }
}

/// A model as it lies on disk.
pub(super) struct Lying {
    pub(super) form: Form,
    pub(super) stamp: Stamp,
}

impl Lying {
    /// Looks at the model whose path in one of the two forms is `path`; `None` where there is none in either.
    ///
    /// # Errors
    /// What the system says; [`io::ErrorKind::InvalidInput`] where what lies there is neither a plain file nor a folder.
    pub(super) fn look(path: &Path) -> io::Result<Option<Self>> {
        let Some((file, folder)) = read::forms(path) else { return Ok(None) };
        let parts = Self::in_parts(&folder)?;
        match about(&file)? {
            Some(metadata) if metadata.is_file() => {
                // Where both are there, neither can be planned until one is gone.
                let parts = parts.and_then(|lying| lying.stamp.parts);
                Ok(Some(Self { form: Form::File, stamp: Stamp { parts, ..Stamp::from(&metadata) } }))
            }
            None if parts.is_none() && leads_to_folder(&folder) => Err(io::ErrorKind::InvalidInput.into()),
            Some(_) if parts.is_none() => Err(io::ErrorKind::InvalidInput.into()),
            _ => Ok(parts),
        }
    }

    fn in_parts(folder: &Path) -> io::Result<Option<Self>> {
        let Some(metadata) = about(folder)?.filter(Metadata::is_dir) else { return Ok(None) };
        let parts = match Listing::of(folder) {
            Ok(parts) => parts,
            Err(error) if error.kind() == io::ErrorKind::NotFound => return Ok(None),
            // Of the other models in the folder that it lies in this says nothing.
            Err(error) => return Err(io::Error::other(reason(&error))),
        };
        let stamp = Stamp {
            device: metadata.dev(),
            inode: metadata.ino(),
            size: parts.size(),
            modified: (0, 0),
            changed: parts.changed(),
            parts: Some(parts.mark()),
        };
        Ok(Some(Self { form: Form::Folder, stamp }))
    }
}

/// Whether a path is a link to a folder.
pub(super) fn leads_to_folder(path: &Path) -> bool {
    fs::symlink_metadata(path).is_ok_and(|metadata| metadata.is_symlink()) && path.is_dir()
}

/// The stamps of a model and of what was written for it.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Sight {
    /// The model; `None` where a plan lies there without one.
    pub model: Option<Stamp>,
    /// The plan.
    pub plan: Option<Stamp>,
    /// The note.
    pub note: Option<Stamp>,
    /// The release, which the note tells of.
    pub release: Option<Stamp>,
}

impl Sight {
    /// Looks at one model now.
    #[must_use]
    pub fn of(model: &ModelPath) -> Self {
        Self::of_inputs(model).with_outputs(model)
    }

    /// Looks at what people write for one model now.
    #[must_use]
    pub fn of_inputs(model: &ModelPath) -> Self {
        Self { model: Stamp::of_model(&model.full()), release: Stamp::of(&model.release()), ..Self::default() }
    }

    /// The same with plan and note as they are now.
    #[must_use]
    pub fn with_outputs(self, model: &ModelPath) -> Self {
        Self { plan: Stamp::of(&model.plan()), note: Stamp::of(&model.note()), ..self }
    }
}

/// What the system says of a path; `None` where nothing is.
fn about(path: &Path) -> io::Result<Option<Metadata>> {
    present(fs::symlink_metadata(path)).transpose()
}

/// What the system said of something; `None` where it is not there.
pub(super) fn present(about: io::Result<Metadata>) -> Option<io::Result<Metadata>> {
    // The name of a plan's model may be too long to be there.
    let is_missing =
        |error: &io::Error| matches!(error.kind(), io::ErrorKind::NotFound | io::ErrorKind::InvalidFilename);
    (!about.as_ref().is_err_and(is_missing)).then_some(about)
}

#[cfg(test)]
#[expect(clippy::disallowed_methods, reason = "tests lay out files as other programs would")]
mod tests {
    use super::*;

    #[test]
    fn any_change_of_a_part_changes_the_stamp_and_nothing_else_does() {
        let root = tempfile::tempdir().unwrap();
        let folder = root.path().join("m.model");
        let stamp = || Stamp::of_model(&root.path().join("m.model.toml"));
        let mut stamps = vec![stamp()];
        let mut differs = || {
            let now = stamp();
            assert!(!stamps.contains(&now), "{now:?}");
            stamps.push(now);
        };
        fs::create_dir(&folder).unwrap();
        differs();
        fs::write(folder.join("a.toml"), "one").unwrap();
        differs();
        fs::write(folder.join("a.toml"), "three").unwrap();
        differs();
        fs::rename(folder.join("a.toml"), folder.join("b.toml")).unwrap();
        differs();
        let whole = stamp();
        fs::write(folder.join(".a.toml.swp"), "swap").unwrap();
        fs::write(folder.join("notes.md"), "notes").unwrap();
        assert_eq!(stamp(), whole);
        fs::write(root.path().join("m.model.toml"), "both").unwrap();
        let both = stamp();
        assert!(both.is_some() && both != whole);
        fs::remove_dir_all(&folder).unwrap();
        assert!(stamp().is_some() && stamp() != both);
    }

    #[test]
    fn any_change_changes_the_stamp_even_one_that_sets_the_time_back() {
        let root = tempfile::tempdir().unwrap();
        let path = root.path().join("m.model.toml");
        fs::write(&path, "one").unwrap();
        let first = Stamp::of(&path).unwrap();
        let file = fs::File::options().write(true).open(&path).unwrap();
        let time = file.metadata().unwrap().modified().unwrap();
        file.set_modified(time - std::time::Duration::from_secs(1_000_000)).unwrap();
        let second = Stamp::of(&path).unwrap();
        assert_ne!(first, second);
        fs::rename(&path, root.path().join("kept")).unwrap();
        fs::write(&path, "one").unwrap();
        assert_ne!(second, Stamp::of(&path).unwrap());
    }
}
