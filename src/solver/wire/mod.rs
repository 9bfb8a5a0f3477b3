//! The solver behind a pipe: what a daemon and its worker processes say to each other, as frames of bytes.
//!
//! Each side first greets the other with the version of what it speaks; then orders go one way and words come back. Numbers cross bit
//! for bit. Whatever arrives is taken for what it is: a frame that is no message of ours is an error, never a panic, and makes nobody
//! set aside more memory than bytes have come.

pub mod frame;
pub mod serve;
#[cfg(test)]
mod tests;

use std::io::{self, Read, Write};

use serde::de::DeserializeOwned;
use serde::{Deserialize, Serialize};

use super::message::{Answer, Progress, Request, Task};
use crate::lp::Program;
use frame::FrameError;

/// Version of what is said. Raise it whenever a type that crosses changes.
pub const VERSION: u32 = 2;

/// The release that this side was built from.
pub const BUILD: &str = env!("CARGO_PKG_VERSION");

/// What every greeting begins with, in every version.
const MAGIC: &[u8] = b"millreeve worker\n";

/// What a worker is told.
#[derive(Clone, Debug, Serialize, Deserialize)]
pub enum Order {
    /// Answer this; comes only after the answer to the one before.
    Solve(Box<Request>),
    /// Give up what is being solved, if anything is.
    Interrupt,
}

/// What a worker tells.
#[derive(Clone, Debug, Serialize, Deserialize)]
pub enum Word {
    /// How far it is.
    Progress(Progress),
    /// The answer to what was asked.
    Answer(Box<Answer>),
}

/// Why nothing can be made of what the other side said.
#[derive(Debug, thiserror::Error)]
pub enum WireError {
    /// The pipe failed, or what came through is no frame.
    #[error(transparent)]
    Frame(#[from] FrameError),
    /// A frame holds something else than a message of ours.
    #[error("what came is no message of this version")]
    Garbled,
    /// The other side did not greet as a worker or its daemon does.
    #[error("what answered is not millreeve")]
    Stranger,
    /// The other side is another release.
    #[error("what answered is millreeve {build} and speaks version {version}; this is {BUILD} and speaks {VERSION}")]
    OtherVersion {
        /// Its release, not escaped.
        build: String,
        /// The version that it speaks.
        version: u32,
    },
}

impl From<io::Error> for WireError {
    fn from(error: io::Error) -> Self {
        Self::Frame(error.into())
    }
}

/// Greets the other side.
///
/// # Errors
/// The pipe failed.
pub fn greet(to: &mut impl Write) -> Result<(), WireError> {
    Ok(frame::write(to, &[MAGIC, &VERSION.to_le_bytes(), BUILD.as_bytes()].concat())?)
}

/// Takes the other side's greeting.
///
/// # Errors
/// It gave none, or is another release or something else altogether.
pub fn meet(from: &mut impl Read) -> Result<(), WireError> {
    let greeting = frame::read(from, frame::SMALL).map_err(|error| match error {
        FrameError::TooLarge(_) => WireError::Stranger,
        error => error.into(),
    })?;
    let rest = greeting.as_deref().and_then(|greeting| greeting.strip_prefix(MAGIC)).ok_or(WireError::Stranger)?;
    let (version, build) = rest.split_first_chunk().ok_or(WireError::Stranger)?;
    let version = u32::from_le_bytes(*version);
    if version == VERSION && build == BUILD.as_bytes() {
        return Ok(());
    }
    Err(WireError::OtherVersion { build: String::from_utf8_lossy(build).into_owned(), version })
}

/// A message as the bytes of a frame.
///
/// # Errors
/// It is larger than a frame may be.
pub fn encode(message: &impl Serialize) -> Result<Vec<u8>, WireError> {
    let bytes = postcard::to_stdvec(message).map_err(|_| WireError::Garbled)?;
    if bytes.len() > frame::LARGEST { Err(FrameError::TooLarge(bytes.len()).into()) } else { Ok(bytes) }
}

/// The message that the bytes of a frame spell.
///
/// # Errors
/// They spell none.
pub fn decode<T: DeserializeOwned + Sound>(bytes: &[u8]) -> Result<T, WireError> {
    let (message, rest) = postcard::take_from_bytes::<T>(bytes).map_err(|_| WireError::Garbled)?;
    if rest.is_empty() && message.is_sound() { Ok(message) } else { Err(WireError::Garbled) }
}

/// Can be gone by without a look at each position in it.
pub trait Sound {
    /// Whether every position in it is one that it has.
    fn is_sound(&self) -> bool;
}

impl Sound for Order {
    fn is_sound(&self) -> bool {
        let Self::Solve(request) = self else { return true };
        match &request.task {
            Task::Whole(program, last) => {
                has_its_rows(program) && last.as_ref().is_none_or(|last| has_its_rows(&last.program))
            }
            // Known by key; what does not fit is found when it is applied.
            Task::Change(_) => true,
        }
    }
}

impl Sound for Word {
    /// What an answer must be to fit its program, [`super::desk::Desk`] sees to.
    fn is_sound(&self) -> bool {
        true
    }
}

fn has_its_rows(program: &Program) -> bool {
    program.columns.iter().flat_map(|column| &column.entries).all(|(row, _)| row.0 < program.rows.len())
}
