//! Reading back a text that Millreeve wrote.

use std::io::{self, Read as _};
use std::path::Path;

use super::atomic;

/// The largest plan, note or release that is read, in bytes; far above what the largest model gets.
const LARGEST: u64 = 64 << 20;

/// The text of a plain file of at most 64 MiB. A link is not followed and a pipe is not waited for: whatever lies where a plan
/// should must not keep whoever looks.
///
/// # Errors
/// What the system says; [`io::ErrorKind::InvalidInput`] where `path` is no plain file, [`io::ErrorKind::InvalidData`] where it holds
/// no UTF-8, [`io::ErrorKind::FileTooLarge`] where it is larger.
pub fn text(path: &Path) -> io::Result<String> {
    let file = atomic::open_plain(path)?;
    let mut bytes = atomic::room_for(&file, LARGEST);
    file.take(LARGEST + 1).read_to_end(&mut bytes)?;
    let text = String::from_utf8(bytes).map_err(|error| io::Error::new(io::ErrorKind::InvalidData, error))?;
    if text.len() as u64 > LARGEST { Err(io::ErrorKind::FileTooLarge.into()) } else { Ok(text) }
}
