//! What people wrote for one model, as it lay on disk at one moment: a file, or the parts in a folder.

use std::borrow::Cow;
use std::ffi::{OsStr, OsString};
use std::fs;
use std::os::unix::ffi::{OsStrExt, OsStringExt};
use std::path::{Path, PathBuf};

use super::parts::{self, bundle, folder};
use super::{Before, Blocks, FileProblem, Reading, Traces, again, file, text, text_and_blocks};
use crate::model::fault::{Fault, Faults};
use crate::model::types::Model;

/// How the name of a model in one file ends.
pub const FILE: &str = ".model.toml";
/// How the name of a folder ends that holds a model in parts.
pub const FOLDER: &str = ".model";

/// What people wrote for one model.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Writing {
    bytes: Vec<u8>,
    /// What keeps it from being read at all, with paths relative to the model's folder.
    amiss: Vec<Fault>,
}

/// Both paths that a model's name can have, of which `path` is one: that of a file and that of a folder.
#[must_use]
pub fn forms(path: &Path) -> Option<(PathBuf, PathBuf)> {
    let name = path.file_name()?.as_bytes();
    let stem = name.strip_suffix(FILE.as_bytes()).or_else(|| name.strip_suffix(FOLDER.as_bytes()))?;
    let form = |ending: &str| path.with_file_name(OsString::from_vec([stem, ending.as_bytes()].concat()));
    (!stem.is_empty()).then(|| (form(FILE), form(FOLDER)))
}

/// Reads from disk what people wrote for the model that `path` names, in whichever form it lies there; any other path is read as a file.
///
/// # Errors
/// There is nothing, or it may not be read, is no plain file or folder, or is too large. What people can mend in parts, and a model that
/// lies there in both forms, is told by [`Writing::read`].
pub fn writing(path: &Path) -> Result<Writing, FileProblem> {
    let Some((single, folder)) = forms(path) else { return file(path).map(Writing::of) };
    let kind = |path: &Path| fs::symlink_metadata(path).map(|about| about.file_type()).ok();
    let is_folder = kind(&folder).is_some_and(|kind| kind.is_dir());
    match kind(&single) {
        Some(kind) if kind.is_file() && is_folder => {
            Ok(Writing { bytes: Vec::new(), amiss: vec![both(&single, &folder)] })
        }
        _ if is_folder => in_parts(&folder),
        // A link to a folder is not followed either.
        None if kind(&folder).is_some() => Err(FileProblem::Link(folder)),
        _ => file(&single).map(Writing::of).map_err(|problem| match problem {
            FileProblem::Missing(_) => FileProblem::Missing(path.to_owned()),
            problem => problem,
        }),
    }
}

fn in_parts(path: &Path) -> Result<Writing, FileProblem> {
    let parts = folder::parts(path)?;
    let amiss = parts.iter().filter_map(|(name, part)| Some(part.as_ref().err()?.fault(Path::new(name)))).collect();
    let read = parts.iter().filter_map(|(name, part)| Some((name.as_os_str(), part.as_deref().ok()?)));
    Ok(Writing { bytes: bundle::bundled(read), amiss })
}

fn both(single: &Path, folder: &Path) -> Fault {
    let name = |path: &Path| path.file_name().unwrap_or_default().to_string_lossy().into_owned();
    let message =
        format!("`{}` and the folder `{}` are both there, and a model is one of the two", name(single), name(folder));
    let help = "take one of them away, or give it another name".to_owned();
    Fault { path: PathBuf::new(), place: None, code: "both-forms", message, help }
}

impl Writing {
    /// What has these bytes, which are a file's, or were those of a writing in parts.
    #[must_use]
    pub fn of(bytes: Vec<u8>) -> Self {
        Self { bytes, amiss: Vec::new() }
    }

    /// What parts with these names and bytes are together, as if they lay in a folder.
    #[must_use]
    pub fn in_parts(parts: &[(&str, &[u8])]) -> Self {
        let mut parts = parts.to_vec();
        parts.sort_unstable();
        Self::of(bundle::bundled(parts.iter().map(|&(name, text)| (OsStr::new(name), text))))
    }

    /// All of it as bytes: equal where the file is, or every part by name and text.
    #[must_use]
    pub fn bytes(&self) -> &[u8] {
        &self.bytes
    }

    /// The same bytes without copying them.
    #[must_use]
    pub fn into_bytes(self) -> Vec<u8> {
        self.bytes
    }

    /// Whether it says what has these bytes, and can be gone by.
    #[must_use]
    pub fn is(&self, bytes: &[u8]) -> bool {
        self.amiss.is_empty() && self.bytes == bytes
    }

    /// Whether it is in parts.
    #[must_use]
    pub fn is_in_parts(&self) -> bool {
        is_in_parts(&self.bytes)
    }

    /// The path of the model, given in either form, in the form that it was read in.
    #[must_use]
    pub fn path<'a>(&self, path: &'a Path) -> Cow<'a, Path> {
        match forms(path) {
            Some((_, folder)) if self.is_in_parts() => Cow::Owned(folder),
            Some((single, _)) => Cow::Owned(single),
            None => Cow::Borrowed(path),
        }
    }

    /// The model it spells. Pure: `path`, in either form, is only repeated in faults.
    ///
    /// # Errors
    /// As [`text()`].
    pub fn read(&self, path: &Path) -> Result<Reading, Faults> {
        let path = self.sound(path)?;
        if self.is_in_parts() { parts::read(&path, &bundle::parts(&self.bytes)) } else { text(&path, &self.bytes) }
    }

    /// As [`Writing::read`], but for the oddities, and with what lets it be read again once it is edited.
    ///
    /// # Errors
    /// As [`text()`].
    pub fn read_tracing(&self, path: &Path) -> Result<(Model, Traced), Faults> {
        let path = self.sound(path)?;
        if self.is_in_parts() {
            let (model, traces) = parts::read_tracing(&path, &bundle::parts(&self.bytes))?;
            return Ok((model, Traced::Parts(traces)));
        }
        let (model, blocks) = text_and_blocks(&path, &self.bytes)?;
        Ok((model, Traced::File(blocks)))
    }

    /// The model it spells, read by what differs from `before`, which had these bytes and traces and spelt this model. `None` where all of
    /// it must be read.
    #[must_use]
    pub fn read_again(&self, path: &Path, before: (&[u8], &Traced, &Model)) -> Option<(Model, Traced)> {
        let path = self.sound(path).ok()?;
        let (bytes, traced, model) = before;
        match traced {
            Traced::File(blocks) if !self.is_in_parts() => {
                let (model, blocks) = again(&path, &self.bytes, Before { bytes, blocks, model })?;
                Some((model, Traced::File(blocks)))
            }
            Traced::Parts(traces) if self.is_in_parts() => {
                let (now, before) = (bundle::parts(&self.bytes), bundle::parts(bytes));
                let (model, traces) = parts::again(&path, &now, &before, (traces, model))?;
                Some((model, Traced::Parts(traces)))
            }
            _ => None,
        }
    }

    /// The path in the form that it was read in, where it can be gone by.
    fn sound<'a>(&self, path: &'a Path) -> Result<Cow<'a, Path>, Faults> {
        let path = self.path(path);
        if self.amiss.is_empty() {
            return Ok(path);
        }
        let placed = |fault: &Fault| {
            let whole = fault.path.as_os_str().is_empty();
            Fault { path: if whole { path.to_path_buf() } else { path.join(&fault.path) }, ..fault.clone() }
        };
        Err(Faults { reported: self.amiss.iter().map(placed).collect(), more: 0 })
    }
}

/// Where what a writing says lies in it, as far as that is plain to see: what lets it be read by what was edited.
#[derive(Clone, Debug, PartialEq)]
pub enum Traced {
    /// In a file.
    File(Blocks),
    /// In parts.
    Parts(Traces),
}

impl Default for Traced {
    fn default() -> Self {
        Self::File(Blocks::default())
    }
}

/// Whether these are the bytes of a writing in parts.
#[must_use]
pub fn is_in_parts(bytes: &[u8]) -> bool {
    bundle::is_bundle(bytes)
}

/// Whether a folder of this name holds a model in parts.
#[must_use]
pub fn is_folder_name(name: &OsStr) -> bool {
    let stem = name.as_bytes().strip_suffix(FOLDER.as_bytes());
    stem.is_some_and(|stem| !stem.is_empty() && !stem.starts_with(b".") && !stem.starts_with(b"#"))
}
