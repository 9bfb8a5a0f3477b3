//! The release of a model as it lies on disk.

use std::io::ErrorKind;
use std::path::Path;

use crate::plan::note::ReleaseTold;
use crate::plan::release::{self, Release};
use crate::store::error::reason;
use crate::store::reading;

/// A release, or why a file that lies in its place gives none.
#[derive(Clone, Debug)]
pub struct Pinned {
    mark: String,
    release: Result<Release, String>,
}

impl Pinned {
    /// Looks for a release at `path`; `None` where there is none. What cannot be used never stops anything: it is told.
    #[must_use]
    pub fn look(path: &Path) -> Option<Self> {
        let (bytes, release) = match reading::text(path) {
            Ok(text) => {
                let release = release::read(&text).map_err(|error| error.to_string());
                (text, release)
            }
            Err(error) if error.kind() == ErrorKind::NotFound => return None,
            Err(error) => {
                let why = format!("its file cannot be read: {}", reason(&error));
                (why.clone(), Err(why))
            }
        };
        Some(Self { mark: blake3::hash(bytes.as_bytes()).to_hex().to_string(), release })
    }

    /// What it says, or why that cannot be told, as a sentence about it.
    pub fn release(&self) -> Result<&Release, &str> {
        self.release.as_ref().map_err(String::as_str)
    }

    /// As a note tells of it.
    #[must_use]
    pub fn told(&self) -> ReleaseTold<'_> {
        ReleaseTold { mark: &self.mark, release: self.release() }
    }
}
