//! From bytes to text: what no model file may hold, told in one line.

use std::path::Path;

use super::most;
use super::source::{Places as _, Source};
use crate::model::fault::Fault;

/// The text that `bytes` spell, without a byte order mark.
///
/// # Errors
/// Where the bytes are no UTF-8 text, hold a NUL byte or a carriage return alone, or are more than is read.
pub(super) fn text<'a>(path: &'a Path, bytes: &'a [u8]) -> Result<Source<'a>, Box<Fault>> {
    str(path, bytes).map(|text| Source { path, text })
}

/// As [`text()`], for a text that outlives its path.
pub(super) fn str<'a>(path: &Path, bytes: &'a [u8]) -> Result<&'a str, Box<Fault>> {
    let whole = |code, message: String, help: &str| Box::new(Source { path, text: "" }.whole(code, message, help));
    if bytes.len() > most::MOST_BYTES {
        return Err(Box::new(too_large(path)));
    }
    if looks_like_utf16(bytes) {
        return Err(whole("not-utf8", "the file looks like UTF-16".to_owned(), "save it as UTF-8"));
    }
    let text = std::str::from_utf8(bytes).map_err(|error| not_utf8(path, bytes, error.valid_up_to()))?;
    let mark = '\u{feff}'.len_utf8();
    let (skipped, text) = text.strip_prefix('\u{feff}').map_or((0, text), |rest| (mark, rest));
    let source = Source { path, text };
    if let Some(at) = text.find('\0') {
        let message = format!("byte {} is NUL, which no text file holds", at + skipped);
        return Err(Box::new(source.fault(at..at + 1, "nul-byte", message, "save the file as UTF-8 text".to_owned())));
    }
    if let Some(at) = lone_return(text) {
        let message = format!("byte {} is a carriage return without a line feed", at + skipped);
        let help = "save the file with line ends LF or CRLF".to_owned();
        return Err(Box::new(source.fault(at..at + 1, "lone-return", message, help)));
    }
    if text.trim_ascii().is_empty() {
        return Err(whole("empty-file", "the file is empty".to_owned(), "a model begins with `format = 1`"));
    }
    count(source).map_or(Ok(text), Err)
}

/// The fault of a file of more bytes than are read.
pub(super) fn too_large(path: &Path) -> Fault {
    let message = format!("the file is larger than {} MiB", most::MOST_BYTES >> 20);
    Source { path, text: "" }.whole("too-long", message, "split the model")
}

/// A fault where the text has more lines, or more words and signs, than is read.
fn count(source: Source<'_>) -> Option<Box<Fault>> {
    let bytes = source.text.as_bytes();
    let lines = || bytes.iter().filter(|&&byte| byte == b'\n').count();
    if bytes.len() > most::MOST_LINES && lines() > most::MOST_LINES {
        let message = format!("the file has more than {} lines", most::MOST_LINES);
        return Some(Box::new(source.whole("too-long", message, "split the model")));
    }
    if bytes.len() > most::MOST_TOKENS && tokens(bytes) > most::MOST_TOKENS {
        let message = format!("the file has more than {} words and signs", most::MOST_TOKENS);
        return Some(Box::new(source.whole("too-long", message, "split the model")));
    }
    None
}

/// At least as many as the parser will see: runs of letters, runs of blanks, and every sign.
pub(super) fn tokens(bytes: &[u8]) -> usize {
    let class = |byte: u8| match byte {
        b' ' | b'\t' => 1,
        b'_' | b'-' | b'+' | 0x80.. => 2,
        _ if byte.is_ascii_alphanumeric() => 2,
        _ => 0,
    };
    let starts = bytes.windows(2).filter(|pair| class(pair[1]) == 0 || class(pair[0]) != class(pair[1]));
    starts.count() + 1
}

fn looks_like_utf16(bytes: &[u8]) -> bool {
    if bytes.starts_with(&[0xff, 0xfe]) || bytes.starts_with(&[0xfe, 0xff]) {
        return true;
    }
    let start = &bytes[..bytes.len().min(256)];
    let (pairs, _) = start.as_chunks::<2>();
    let half_empty = pairs.iter().filter(|pair| (pair[0] == 0) != (pair[1] == 0)).count();
    !pairs.is_empty() && 4 * half_empty > 3 * pairs.len()
}

fn not_utf8(path: &Path, bytes: &[u8], at: usize) -> Box<Fault> {
    let text = std::str::from_utf8(&bytes[..at]).unwrap_or_default();
    let message = format!("byte {at} (0x{:02x}) is not UTF-8 text", bytes.get(at).copied().unwrap_or_default());
    Box::new(Source { path, text }.fault(at..at, "not-utf8", message, "save the file as UTF-8".to_owned()))
}

fn lone_return(text: &str) -> Option<usize> {
    let mut returns = text.match_indices('\r').map(|(at, _)| at);
    returns.find(|&at| text.as_bytes().get(at + 1) != Some(&b'\n'))
}
