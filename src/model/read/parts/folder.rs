//! The parts of a model as they lie in its folder: which files they are, and all of them as they stood at one moment.

use std::ffi::{OsStr, OsString};
use std::fs::{self, Metadata};
use std::io;
use std::os::unix::ffi::OsStrExt;
use std::os::unix::fs::MetadataExt;
use std::path::Path;

use crate::model::read::FileProblem;
use crate::model::read::file::file;
use crate::model::read::most::{MOST_BYTES, MOST_PARTS};

/// How often a folder that changes while it is read is read again.
const TRIES: usize = 4;

/// Whether a file of this name in a model's folder is a part. What editors and spreadsheets leave (`.x`, `#x#`, `~$x`, `x~`, `x.bak` …) is
/// none.
#[must_use]
pub fn is_part(name: &OsStr) -> bool {
    let name = name.as_bytes();
    let stem = name.strip_suffix(b".toml").or_else(|| name.strip_suffix(b".csv"));
    stem.is_some_and(|stem| !stem.is_empty() && ![b'.', b'#', b'~'].contains(&stem[0]))
}

/// The parts in a folder and what tells one state of each from another without reading it. Two that are equal are lists of the same files.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Listing(Vec<(OsString, Seen)>);

/// What the system says of one part.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
struct Seen {
    device: u64,
    inode: u64,
    mode: u32,
    size: u64,
    modified: (i64, i64),
    changed: (i64, i64),
}

impl From<&Metadata> for Seen {
    fn from(metadata: &Metadata) -> Self {
        Self {
            device: metadata.dev(),
            inode: metadata.ino(),
            mode: metadata.mode(),
            size: metadata.len(),
            modified: (metadata.mtime(), metadata.mtime_nsec()),
            changed: (metadata.ctime(), metadata.ctime_nsec()),
        }
    }
}

impl Listing {
    /// The parts in the folder at `path` as they are now, in byte order of their names. Links are not followed.
    ///
    /// # Errors
    /// The folder cannot be read, or one of its files cannot be looked at.
    pub fn of(path: &Path) -> io::Result<Self> {
        let mut parts = Vec::new();
        for entry in fs::read_dir(path)? {
            let entry = entry?;
            let name = entry.file_name();
            if !is_part(&name) {
                continue;
            }
            match fs::symlink_metadata(path.join(&name)) {
                Ok(metadata) => parts.push((name, Seen::from(&metadata))),
                // Removed since.
                Err(error) if error.kind() == io::ErrorKind::NotFound => {}
                Err(error) => return Err(error),
            }
        }
        parts.sort_unstable_by(|(a, _), (b, _)| a.cmp(b));
        Ok(Self(parts))
    }

    /// A number that differs where the lists do.
    #[must_use]
    pub fn mark(&self) -> u64 {
        let mut hasher = blake3::Hasher::new();
        for (name, seen) in &self.0 {
            hasher.update(&name.len().to_le_bytes());
            hasher.update(name.as_bytes());
            for number in [seen.device, seen.inode, u64::from(seen.mode), seen.size] {
                hasher.update(&number.to_le_bytes());
            }
            for (seconds, nanoseconds) in [seen.modified, seen.changed] {
                hasher.update(&seconds.to_le_bytes());
                hasher.update(&nanoseconds.to_le_bytes());
            }
        }
        let mut mark = [0; 8];
        hasher.finalize_xof().fill(&mut mark);
        u64::from_le_bytes(mark)
    }

    /// The bytes of all parts together.
    #[must_use]
    pub fn size(&self) -> u64 {
        self.0.iter().map(|(_, seen)| seen.size).sum()
    }

    /// When a part last changed, in seconds and nanoseconds since 1970 by the clock of the file system.
    #[must_use]
    pub fn changed(&self) -> (i64, i64) {
        self.0.iter().map(|(_, seen)| seen.changed).max().unwrap_or_default()
    }
}

/// The bytes of a part, or why there are none.
pub(in crate::model::read) type Part = (OsString, Result<Vec<u8>, FileProblem>);

/// All parts in the folder at `path`, as they stood together at one moment: listed, read, and listed again without a difference.
///
/// # Errors
/// The folder or a part may not be read, its parts are too many or too large, or it changes all the time.
pub(in crate::model::read) fn parts(path: &Path) -> Result<Vec<Part>, FileProblem> {
    parts_while(path, || {})
}

/// As [`parts`]; `reading` is called when all have been read and are about to be listed again.
fn parts_while(path: &Path, mut reading: impl FnMut()) -> Result<Vec<Part>, FileProblem> {
    let listed = || Listing::of(path).map_err(|error| FileProblem::of(path, error));
    let mut before = listed()?;
    for _ in 0..TRIES {
        if before.0.len() > MOST_PARTS || before.size() > MOST_BYTES as u64 {
            return Err(FileProblem::TooLarge(path.to_owned()));
        }
        let mut read = Vec::with_capacity(before.0.len());
        for (name, _) in &before.0 {
            match file(&path.join(name)) {
                Err(problem @ (FileProblem::Forbidden(_) | FileProblem::Other { .. })) => return Err(problem),
                part => read.push((name.clone(), part)),
            }
        }
        reading();
        let after = listed()?;
        if after == before {
            return Ok(read);
        }
        before = after;
    }
    Err(FileProblem::Moving(path.to_owned()))
}

#[cfg(test)]
#[expect(clippy::disallowed_methods, reason = "tests lay out files as other programs would")]
mod tests {
    use super::*;

    #[test]
    fn parts_are_told_from_what_editors_leave() {
        for good in ["a.toml", "activities.csv", "a b (copy).toml", "x.model.toml", "x.plan.toml"] {
            assert!(is_part(OsStr::new(good)), "{good}");
        }
        for bad in [
            ".a.toml",
            ".toml",
            ".csv",
            "#a.toml",
            ".#a.toml",
            "#a.toml#",
            "a.toml~",
            "a.toml.swp",
            "a.csv.bak",
            "~$activities.csv",
            ".~lock.activities.csv#",
            "a.TOML",
            "notes.md",
            "a.xlsx",
            "",
        ] {
            assert!(!is_part(OsStr::new(bad)), "{bad}");
        }
    }

    #[test]
    fn a_folder_that_changes_while_it_is_read_is_read_again() {
        let folder = tempfile::tempdir().unwrap();
        let save = |name: &str, text: &str| fs::write(folder.path().join(name), text).unwrap();
        save("a.toml", "one");
        save("b.toml", "one");
        // Both parts are saved between the reading of the one and the look at the end: what was read is of no use.
        let mut saves = 0;
        let read = parts_while(folder.path(), || {
            saves += 1;
            if saves == 1 {
                save("a.toml", "two");
                save("b.toml", "two");
            }
        });
        let texts: Vec<_> =
            read.unwrap().into_iter().map(|(_, text)| String::from_utf8(text.unwrap()).unwrap()).collect();
        assert_eq!((texts, saves), (vec!["two".to_owned(), "two".to_owned()], 2));
        let mut number = 0;
        let restless = parts_while(folder.path(), || {
            number += 1;
            save("a.toml", &"x".repeat(number));
        });
        assert!(matches!(restless, Err(FileProblem::Moving(_))), "{restless:?}");
    }

    #[test]
    fn lists_differ_where_files_do() {
        let folder = tempfile::tempdir().unwrap();
        let mark = || Listing::of(folder.path()).unwrap().mark();
        let mut marks = vec![mark()];
        fs::write(folder.path().join("a.toml"), "one").unwrap();
        marks.push(mark());
        fs::write(folder.path().join("a.toml"), "three").unwrap();
        marks.push(mark());
        fs::rename(folder.path().join("a.toml"), folder.path().join("b.toml")).unwrap();
        marks.push(mark());
        fs::write(folder.path().join("notes.md"), "no part").unwrap();
        assert_eq!(marks.last(), Some(&mark()));
        marks.sort_unstable();
        marks.dedup();
        assert_eq!(marks.len(), 4);
    }
}
