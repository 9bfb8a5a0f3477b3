//! Frames: a length in four bytes, the least significant first, then so many bytes.

use std::io::{self, ErrorKind, Read, Write};

/// The largest frame, in bytes: several times what the largest model that is read comes to.
pub const LARGEST: usize = 1 << 30;

/// The largest frame of those that come before the other side is known, in bytes.
pub const SMALL: usize = 1024;

/// So much is set aside for a frame before any of it has come, in bytes.
const AT_FIRST: usize = 1 << 16;

/// Why there is no frame.
#[derive(Debug, thiserror::Error)]
pub enum FrameError {
    /// The pipe failed.
    #[error("the pipe failed: {0}")]
    Pipe(#[from] io::Error),
    /// The other side ended within a frame.
    #[error("the other side ended in the middle of a message")]
    Cut,
    /// It claims to be larger than frames may be.
    #[error("a message of {0} bytes is larger than any may be")]
    TooLarge(usize),
}

/// Writes a frame.
///
/// # Errors
/// The pipe failed, or `body` is larger than [`LARGEST`].
pub fn write(to: &mut impl Write, body: &[u8]) -> Result<(), FrameError> {
    let length = u32::try_from(body.len()).ok().filter(|_| body.len() <= LARGEST);
    let length = length.ok_or(FrameError::TooLarge(body.len()))?;
    to.write_all(&length.to_le_bytes())?;
    to.write_all(body)?;
    Ok(to.flush()?)
}

/// Reads a frame of at most `largest` bytes; `None` where the other side has ended between two.
///
/// # Errors
/// The pipe failed or ended within a frame, or the frame is too large.
pub fn read(from: &mut impl Read, largest: usize) -> Result<Option<Vec<u8>>, FrameError> {
    let mut length = [0; 4];
    let mut come = 0;
    while come < length.len() {
        match from.read(&mut length[come..]) {
            Ok(0) if come == 0 => return Ok(None),
            Ok(0) => return Err(FrameError::Cut),
            Ok(more) => come += more,
            Err(error) if error.kind() == ErrorKind::Interrupted => {}
            Err(error) => return Err(error.into()),
        }
    }
    let claimed = u32::from_le_bytes(length);
    let length = usize::try_from(claimed).unwrap_or(usize::MAX);
    if length > largest {
        return Err(FrameError::TooLarge(length));
    }
    // What is claimed is not yet there: memory grows with what comes.
    let mut body = Vec::with_capacity(length.min(AT_FIRST));
    from.take(u64::from(claimed)).read_to_end(&mut body)?;
    if body.len() < length { Err(FrameError::Cut) } else { Ok(Some(body)) }
}
