//! How often the solver has crashed over a model's content: so that what ended it twice is not tried again and again, not even by the
//! next start.
//!
//! A file of its own beside the model's record, there only while there is something to remember. Like all state it is a cache: lost, it
//! costs two more tries.

use std::fs;
use std::io::{ErrorKind, Read};
use std::path::{Path, PathBuf};

use serde::{Deserialize, Serialize};

use super::atomic::{self, Durability};
use super::error::{Step, StoreError};
use super::state::Records;

/// Version of the layout.
const VERSION: u32 = 1;

/// The largest file that is read, in bytes.
const LARGEST: u64 = 1 << 14;

/// Tries that came to a bad end.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Tries {
    version: u32,
    /// Hash of the bytes of the model that was tried.
    content: String,
    /// How many.
    pub crashes: u32,
    /// How the last one ended, in a few words.
    pub how: String,
}

impl Tries {
    /// None so far, of a model with these bytes.
    #[must_use]
    pub fn none(bytes: &[u8]) -> Self {
        let content = blake3::hash(bytes).to_hex().to_string();
        Self { version: VERSION, content, crashes: 0, how: String::new() }
    }

    /// One more, which ended so.
    pub fn add(&mut self, how: impl Into<String>) {
        self.crashes += 1;
        self.how = how.into();
    }
}

impl Records {
    /// What is remembered of earlier tries at a model, given by its path relative to the root, with these bytes. None where it has
    /// other bytes now, or nothing can be read.
    #[must_use]
    pub fn tries(&self, model: &Path, bytes: &[u8]) -> Tries {
        let none = Tries::none(bytes);
        let read = || {
            let mut text = Vec::new();
            atomic::open_plain(&self.tries_path(model)).ok()?.take(LARGEST).read_to_end(&mut text).ok()?;
            serde_json::from_slice::<Tries>(&text).ok()
        };
        read().filter(|tries| tries.version == VERSION && tries.content == none.content).unwrap_or(none)
    }

    /// Remembers tries at a model; where there were none, nothing is left behind. Whole after a crash, not necessarily there after a
    /// power cut.
    ///
    /// # Errors
    /// They cannot be written, or the file not be removed.
    pub fn remember_tries(&self, model: &Path, tries: &Tries) -> Result<(), StoreError> {
        let path = self.tries_path(model);
        if tries.crashes == 0 {
            return match fs::remove_file(&path) {
                Err(error) if error.kind() != ErrorKind::NotFound => Err(StoreError::failed(Step::Write, &path)(error)),
                _ => Ok(()),
            };
        }
        let failed = |error: serde_json::Error| StoreError::failed(Step::Write, &path)(error.into());
        let text = serde_json::to_vec(tries).map_err(failed)?;
        atomic::write(&path, &text, |_| true, Durability::Cached).map(|_| ())
    }

    fn tries_path(&self, model: &Path) -> PathBuf {
        self.path(model).with_extension("tries")
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn tries_are_those_at_the_same_bytes_and_outlive_the_process() {
        let state = tempfile::tempdir().unwrap();
        let model = Path::new("north/tile.model.toml");
        let records = Records::open(state.path()).unwrap();
        let mut tries = records.tries(model, b"one");
        assert_eq!(tries.crashes, 0);
        tries.add("SIGSEGV");
        records.remember_tries(model, &tries).unwrap();
        let records = Records::open(state.path()).unwrap();
        assert_eq!(records.tries(model, b"one"), tries);
        assert_eq!(records.tries(model, b"two").crashes, 0);
        assert_eq!(records.tries(Path::new("tile.model.toml"), b"one").crashes, 0);
        records.remember_tries(model, &Tries::none(b"one")).unwrap();
        records.remember_tries(model, &Tries::none(b"one")).unwrap();
        assert_eq!(records.tries(model, b"one").crashes, 0);
    }

    #[test]
    fn what_cannot_be_read_costs_nothing_but_tries() {
        let state = tempfile::tempdir().unwrap();
        let model = Path::new("m.model.toml");
        let records = Records::open(state.path()).unwrap();
        let mut tries = Tries::none(b"one");
        tries.add("SIGABRT");
        for damaged in ["", "{}", "\0\u{1}", r#"{"version":9,"content":"","crashes":7,"how":"x"}"#] {
            records.remember_tries(model, &tries).unwrap();
            atomic::write(&records.tries_path(model), damaged.as_bytes(), |_| true, Durability::Cached).unwrap();
            assert_eq!(records.tries(model, b"one").crashes, 0, "{damaged}");
        }
        records.remember_tries(model, &tries).unwrap();
        assert_eq!(records.tries(model, b"one").crashes, 1);
    }
}
