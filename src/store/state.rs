//! What is remembered of each model from one plan to the next: a cache that may be lost at any time.
//!
//! A record is also the log of an intended publication. It is written before the plan is renamed into place, and holds the text of
//! plan and note, so that a start can finish what was interrupted without solving.
//!
//! Layout of a record file: a line with the version, a line with the BLAKE3 hash of all that follows, a line of JSON with the small
//! things and the lengths of the texts, then the texts as they are: source, plan, note, the columns of the basis and its rows. A basis
//! has a line for each, a letter for the position and the key: it is written at every replan, and may be long.

use std::borrow::Cow;
use std::fs;
use std::io::{ErrorKind, Read};
use std::os::unix::ffi::OsStrExt;
use std::path::{Path, PathBuf};

use serde::{Deserialize, Serialize};

use super::atomic::{self, Durability};
use super::error::{Step, StoreError, reason};
use crate::lp::Key;
use crate::solver::basis::{NamedBasis, Position};

/// Version of the layout.
pub const VERSION: u32 = 2;

const MAGIC: &str = "millreeve record ";
const SUBFOLDER: &str = "records";

/// The largest record file that is read, in bytes.
const LARGEST: u64 = 1 << 30;

/// What is remembered of one model.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Record {
    /// The model, relative to the root of the watched folder.
    pub model: PathBuf,
    /// Hash of the meaning that the plan answers, as text.
    pub answers: String,
    /// The model's text as last accepted.
    pub source: Vec<u8>,
    /// The last optimal basis.
    pub basis: Option<NamedBasis>,
    /// The text of the plan.
    pub plan: String,
    /// The text of the note.
    pub note: String,
    /// How many pivots the last cold solve took.
    pub cold_pivots: Option<usize>,
}

/// Why there is no record to go by. Planning goes on without.
#[derive(Debug, thiserror::Error)]
pub enum Lost {
    /// There was none.
    #[error("nothing is remembered of this model yet")]
    Missing,
    /// It is not what was written.
    #[error("what was remembered of this model is damaged ({0}) and is made again")]
    Damaged(&'static str),
    /// Another version of Millreeve wrote it.
    #[error(
        "what is remembered of this model is in layout {0}, this release knows {VERSION}; it is left out of account"
    )]
    Version(u32),
    /// It cannot be read.
    #[error("what is remembered of this model cannot be read: {}", reason(.0))]
    Unreadable(std::io::Error),
}

/// The records of one state folder.
#[derive(Clone, Debug)]
pub struct Records {
    folder: PathBuf,
}

/// The JSON line of a record file.
#[derive(Serialize, Deserialize)]
struct Small<'a> {
    /// The model's path as bytes in hexadecimal: paths need not be UTF-8.
    model: String,
    answers: Cow<'a, str>,
    cold_pivots: Option<usize>,
    has_basis: bool,
    /// Bytes of source, plan, note, columns and rows.
    lengths: [usize; 5],
}

impl Records {
    /// The records under a state folder; makes the folder for them and clears away what a killed process left half written.
    ///
    /// # Errors
    /// The folder cannot be made.
    pub fn open(state: &Path) -> Result<Self, StoreError> {
        let folder = state.join(SUBFOLDER);
        fs::create_dir_all(&folder).map_err(StoreError::failed(Step::MakeFolder, &folder))?;
        atomic::sweep_folder(&folder).map_err(StoreError::failed(Step::Look, &folder))?;
        Ok(Self { folder })
    }

    /// What is remembered of a model, given by its path relative to the root.
    ///
    /// # Errors
    /// Says why nothing is; no reason to stop planning.
    pub fn load(&self, model: &Path) -> Result<Record, Lost> {
        let file = match atomic::open_plain(&self.path(model)) {
            Ok(file) => file,
            Err(error) if error.kind() == ErrorKind::NotFound => return Err(Lost::Missing),
            Err(error) => return Err(Lost::Unreadable(error)),
        };
        let mut bytes = atomic::room_for(&file, LARGEST);
        file.take(LARGEST).read_to_end(&mut bytes).map_err(Lost::Unreadable)?;
        let record = decode(&bytes)?;
        if record.model == model { Ok(record) } else { Err(Lost::Damaged("it is about another model")) }
    }

    /// Remembers a record in place of the last. Whole after a crash, not necessarily there after a power cut.
    ///
    /// # Errors
    /// It cannot be written; what was remembered before still is. A record of a newer layout is not replaced.
    pub fn save(&self, record: &Record) -> Result<(), StoreError> {
        let bytes = encode(record)?;
        // The watched folder may have been removed and made again, and this one with it.
        fs::create_dir_all(&self.folder).map_err(StoreError::failed(Step::MakeFolder, &self.folder))?;
        atomic::write(&self.path(&record.model), &bytes, replaceable, Durability::Cached).map(|_| ())
    }

    /// Forgets a model; nothing happens where nothing is known.
    ///
    /// # Errors
    /// The record cannot be removed.
    pub fn forget(&self, model: &Path) -> Result<(), StoreError> {
        let path = self.path(model);
        match fs::remove_file(&path) {
            Err(error) if error.kind() != ErrorKind::NotFound => Err(StoreError::failed(Step::Write, &path)(error)),
            _ => Ok(()),
        }
    }

    pub(super) fn path(&self, model: &Path) -> PathBuf {
        let hash = blake3::hash(model.as_os_str().as_bytes());
        self.folder.join(format!("{}.record", &hash.to_hex()[..32]))
    }
}

/// Whether a file in the place of a record may be replaced: anything but a record of a newer layout.
fn replaceable(head: &[u8]) -> bool {
    version(head).is_none_or(|version| version <= VERSION)
}

fn version(bytes: &[u8]) -> Option<u32> {
    let line = bytes.strip_prefix(MAGIC.as_bytes())?.split(|&byte| byte == b'\n').next()?;
    std::str::from_utf8(line).ok()?.parse().ok()
}

fn encode(record: &Record) -> Result<Vec<u8>, StoreError> {
    let lists = record.basis.as_ref().map(|basis| (listed(&basis.columns), listed(&basis.rows)));
    let (columns, rows) = lists.unwrap_or_default();
    let texts = [&record.source, record.plan.as_bytes(), record.note.as_bytes(), columns.as_bytes(), rows.as_bytes()];
    let small = Small {
        model: hexadecimal(record.model.as_os_str().as_bytes()),
        answers: Cow::Borrowed(&record.answers),
        cold_pivots: record.cold_pivots,
        has_basis: record.basis.is_some(),
        lengths: texts.map(<[u8]>::len),
    };
    let json =
        serde_json::to_string(&small).map_err(|error| StoreError::failed(Step::Write, &record.model)(error.into()))?;
    let mut hasher = blake3::Hasher::new();
    let parts = [json.as_bytes(), b"\n"].into_iter().chain(texts);
    for part in parts.clone() {
        hasher.update(part);
    }
    let mut bytes = format!("{MAGIC}{VERSION}\n{}\n", hasher.finalize().to_hex()).into_bytes();
    bytes.reserve_exact(parts.clone().map(<[u8]>::len).sum());
    for part in parts {
        bytes.extend_from_slice(part);
    }
    Ok(bytes)
}

fn decode(bytes: &[u8]) -> Result<Record, Lost> {
    match version(bytes) {
        Some(VERSION) => {}
        Some(other) => return Err(Lost::Version(other)),
        None => return Err(Lost::Damaged("no version")),
    }
    let (_, rest) = line(bytes)?;
    let (hash, body) = line(rest)?;
    if blake3::Hash::from_hex(hash).ok() != Some(blake3::hash(body)) {
        return Err(Lost::Damaged("checksum"));
    }
    let (json, mut rest) = line(body)?;
    let small: Small<'_> = serde_json::from_slice(json).map_err(|_| Lost::Damaged("layout"))?;
    let mut texts = [&[] as &[u8]; 5];
    for (text, length) in texts.iter_mut().zip(small.lengths) {
        (*text, rest) = rest.split_at_checked(length).ok_or(Lost::Damaged("length"))?;
    }
    if !rest.is_empty() {
        return Err(Lost::Damaged("length"));
    }
    let [source, plan, note, columns, rows] = texts;
    let basis = || Ok(NamedBasis { columns: read_list(text(columns)?)?, rows: read_list(text(rows)?)? });
    Ok(Record {
        model: path_of(&small.model).ok_or(Lost::Damaged("path"))?,
        answers: small.answers.into_owned(),
        source: source.to_owned(),
        basis: small.has_basis.then(basis).transpose()?,
        plan: text(plan)?.to_owned(),
        note: text(note)?.to_owned(),
        cold_pivots: small.cold_pivots,
    })
}

fn text(bytes: &[u8]) -> Result<&str, Lost> {
    std::str::from_utf8(bytes).map_err(|_| Lost::Damaged("text"))
}

/// One side of a basis as text: a letter and a key on each line.
fn listed(list: &[(Key, Position)]) -> String {
    let mut out = String::with_capacity(list.iter().map(|(key, _)| key.as_str().len() + 2).sum());
    for (key, position) in list {
        out.push(match position {
            Position::Basic => 'b',
            Position::AtLower => 'l',
            Position::AtUpper => 'u',
            Position::AtZero => 'z',
        });
        out.push_str(key.as_str());
        out.push('\n');
    }
    out
}

fn read_list(text: &str) -> Result<Vec<(Key, Position)>, Lost> {
    let read = |line: &str| {
        let mut signs = line.chars();
        let position = match signs.next()? {
            'b' => Position::Basic,
            'l' => Position::AtLower,
            'u' => Position::AtUpper,
            'z' => Position::AtZero,
            _ => return None,
        };
        Some((Key::new(signs.as_str()), position))
    };
    let list: Option<Vec<_>> = text.split_terminator('\n').map(read).collect();
    // Positions are looked up by halving.
    let ascending = |list: &Vec<(Key, Position)>| list.is_sorted_by(|left, right| left.0 < right.0);
    list.filter(ascending).ok_or(Lost::Damaged("order"))
}

/// The first line, without its end, and what follows it.
fn line(bytes: &[u8]) -> Result<(&[u8], &[u8]), Lost> {
    let end = bytes.iter().position(|&byte| byte == b'\n').ok_or(Lost::Damaged("cut short"))?;
    Ok((&bytes[..end], &bytes[end + 1..]))
}

fn hexadecimal(bytes: &[u8]) -> String {
    bytes.iter().map(|byte| format!("{byte:02x}")).collect()
}

fn path_of(text: &str) -> Option<PathBuf> {
    let byte = |pair: &[u8]| u8::from_str_radix(std::str::from_utf8(pair).ok()?, 16).ok();
    let bytes: Vec<u8> = text.as_bytes().chunks(2).map(byte).collect::<Option<_>>()?;
    Some(PathBuf::from(std::ffi::OsStr::from_bytes(&bytes)))
}

#[cfg(test)]
#[expect(clippy::disallowed_methods, reason = "tests damage records as a disk would")]
mod tests {
    use std::ffi::OsStr;

    use super::*;

    fn record() -> Record {
        let columns = vec![
            (Key::new("activities.floor_tile"), Position::Basic),
            (Key::new("activities.wall_tile"), Position::AtUpper),
            (Key::new("activities.плитка"), Position::AtZero),
        ];
        let rows = vec![(Key::new("resources.kiln"), Position::AtLower)];
        Record {
            model: Path::new("north").join(OsStr::from_bytes(b"tile\n\xff.model.toml")),
            answers: "ab".repeat(32),
            source: b"format = 1\n\xff".to_vec(),
            basis: Some(NamedBasis { columns, rows }),
            plan: "# plan\n".to_owned(),
            note: "note é\n".to_owned(),
            cold_pivots: Some(7),
        }
    }

    #[test]
    fn a_record_reads_back_as_it_was() {
        let state = tempfile::tempdir().unwrap();
        let records = Records::open(state.path()).unwrap();
        let full = record();
        assert!(matches!(records.load(&full.model), Err(Lost::Missing)));
        let small = Record { basis: None, cold_pivots: None, note: String::new(), ..record() };
        for record in [full, small] {
            records.save(&record).unwrap();
            assert_eq!(records.load(&record.model).unwrap(), record);
        }
        records.forget(&record().model).unwrap();
        records.forget(&record().model).unwrap();
        assert!(matches!(records.load(&record().model), Err(Lost::Missing)));
    }

    #[test]
    fn no_cut_and_no_flipped_byte_passes_for_a_record() {
        let bytes = encode(&record()).unwrap();
        assert_eq!(decode(&bytes).unwrap(), record());
        for length in 0..bytes.len() {
            assert!(decode(&bytes[..length]).is_err(), "cut to {length}");
        }
        for at in 0..bytes.len() {
            let mut damaged = bytes.clone();
            damaged[at] ^= 1;
            assert!(decode(&damaged).is_err(), "flipped at {at}");
        }
    }

    #[test]
    fn an_older_layout_is_not_read_but_replaced() {
        let state = tempfile::tempdir().unwrap();
        let records = Records::open(state.path()).unwrap();
        fs::write(records.path(&record().model), format!("{MAGIC}{}\nwhatever", VERSION - 1)).unwrap();
        assert!(matches!(records.load(&record().model), Err(Lost::Version(version)) if version == VERSION - 1));
        records.save(&record()).unwrap();
        assert_eq!(records.load(&record().model).unwrap(), record());
    }

    #[test]
    fn a_newer_layout_is_neither_read_nor_replaced_and_a_damaged_record_is() {
        let state = tempfile::tempdir().unwrap();
        let records = Records::open(state.path()).unwrap();
        let path = records.path(&record().model);
        fs::write(&path, format!("{MAGIC}{}\nwhatever", VERSION + 1)).unwrap();
        assert!(matches!(records.load(&record().model), Err(Lost::Version(version)) if version == VERSION + 1));
        assert!(matches!(records.save(&record()), Err(StoreError::NotOurs { .. })));
        fs::write(&path, "").unwrap();
        assert!(matches!(records.load(&record().model), Err(Lost::Damaged(_))));
        records.save(&record()).unwrap();
        assert_eq!(records.load(&record().model).unwrap(), record());
    }

    #[test]
    fn what_a_killed_process_left_is_cleared_away() {
        let state = tempfile::tempdir().unwrap();
        Records::open(state.path()).unwrap();
        let left = state.path().join(SUBFOLDER).join(".millreeve-aB3dEf7h.tmp");
        fs::write(&left, "half").unwrap();
        Records::open(state.path()).unwrap();
        assert!(!left.exists());
    }
}
