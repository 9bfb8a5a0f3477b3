//! Writing a file whole or not at all: beside, synced, renamed over, folder synced.

use std::fs::{self, File, OpenOptions, Permissions};
use std::io::{self, Read, Write};
use std::os::unix::fs::{MetadataExt, OpenOptionsExt, PermissionsExt};
use std::path::{Path, PathBuf};

use rustix::fs::{FileType, OFlags};

use super::error::{Step, StoreError};
use super::place::{Place, TEMP_PREFIX, TEMP_RANDOM, TEMP_SUFFIX};

/// How much of the file that stands there is shown to the caller's `ours`, in bytes.
pub const HEAD: usize = 1024;

const A_FOLDER: &str = "a folder";
const A_LINK: &str = "a symbolic link";
const NO_FILE: &str = "not a plain file";

/// What a write came to.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Written {
    /// There was nothing; the file is new.
    New,
    /// The file replaced an older one.
    Replaced,
    /// The same bytes stood there already; nothing was touched.
    Same,
}

/// Whether a write must outlive a power cut.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Durability {
    /// File and folder are synced before the call returns.
    Synced,
    /// Whole after a crash of the process; a power cut may lose it. For what can be made again.
    Cached,
}

/// Puts `bytes` at `path`, whole or not at all.
///
/// A reader sees the old file or the new one at every instant. The temporary file is created exclusively beside the target, so a
/// link planted in its place is never followed. A file that stands at `path` is replaced only if it is a plain file whose first
/// [`HEAD`] bytes `ours` recognises; its mode, and where possible its group, are kept. Equal bytes are not written again.
///
/// # Errors
/// Says which call failed on what, or what stands in the way; see [`StoreError`] for what is then on disk.
pub fn write(
    path: &Path,
    bytes: &[u8],
    ours: fn(&[u8]) -> bool,
    durability: Durability,
) -> Result<Written, StoreError> {
    write_checked((None, path), bytes, ours, durability, &mut |_| Ok(()))
}

/// As [`write()`], and no link below `root`, which is the beginning of `path`, is followed on the way to the file: nothing is written through
/// one, be it put there at the last moment.
///
/// # Errors
/// As [`write()`]; a link on the way, or another folder in the place of the one that the write began in, fails it.
pub fn write_below(
    root: &Path,
    path: &Path,
    bytes: &[u8],
    ours: fn(&[u8]) -> bool,
    durability: Durability,
) -> Result<Written, StoreError> {
    write_checked((Some(root), path), bytes, ours, durability, &mut |_| Ok(()))
}

/// As [`write_below`], asking `permit` before each step; tests let steps fail there.
fn write_checked(
    (root, path): (Option<&Path>, &Path),
    bytes: &[u8],
    ours: fn(&[u8]) -> bool,
    durability: Durability,
    permit: &mut dyn FnMut(Step) -> io::Result<()>,
) -> Result<Written, StoreError> {
    let failed = |step| StoreError::failed(step, path);
    permit(Step::Look).map_err(failed(Step::Look))?;
    let place = Place::open(root, path).map_err(failed(Step::Look))?;
    let old = look(&place, path, bytes, ours)?;
    if let Some(Old { same: true, .. }) = old {
        return Ok(Written::Same);
    }
    let mut temp = permit(Step::Create).and_then(|()| place.create()).map_err(failed(Step::Create))?;
    permit(Step::Write).and_then(|()| temp.file.write_all(bytes)).map_err(failed(Step::Write))?;
    if let Some(old) = &old {
        permit(Step::Mode).and_then(|()| old.dress(&temp.file)).map_err(failed(Step::Mode))?;
    }
    if durability == Durability::Synced {
        // A failed sync leaves the fate of the pages unknown: the file is dropped, never synced a second time.
        permit(Step::Sync).and_then(|()| temp.file.sync_all()).map_err(failed(Step::Sync))?;
    }
    permit(Step::Rename).and_then(|()| place.put(temp)).map_err(failed(Step::Rename))?;
    if durability == Durability::Synced {
        permit(Step::SyncFolder).and_then(|()| place.folder().sync_all()).map_err(failed(Step::SyncFolder))?;
    }
    Ok(if old.is_some() { Written::Replaced } else { Written::New })
}

/// The file that a write is about to replace.
struct Old {
    mode: u32,
    group: u32,
    same: bool,
}

impl Old {
    /// Gives a new file the mode of the old one, and its group where that is allowed.
    fn dress(&self, file: &File) -> io::Result<()> {
        if file.metadata()?.gid() != self.group {
            // Only members of a group may give files to it; a plan in the writer's own group is still a good plan.
            let _ = rustix::fs::fchown(file, None, Some(rustix::fs::Gid::from_raw(self.group)));
        }
        file.set_permissions(Permissions::from_mode(self.mode))
    }
}

/// Looks at what stands at a place: `None` where nothing does.
fn look(place: &Place<'_>, path: &Path, bytes: &[u8], ours: fn(&[u8]) -> bool) -> Result<Option<Old>, StoreError> {
    let failed = || StoreError::failed(Step::Look, path);
    let what = match place.kind().map_err(failed())? {
        None => return Ok(None),
        Some(FileType::RegularFile) => None,
        Some(FileType::Directory) => Some(A_FOLDER),
        Some(FileType::Symlink) => Some(A_LINK),
        Some(_) => Some(NO_FILE),
    };
    if let Some(what) = what {
        return Err(StoreError::InTheWay { path: path.to_owned(), what });
    }
    let file = place.read().and_then(plain).map_err(failed())?;
    let metadata = file.metadata().map_err(failed())?;
    let most = bytes.len().max(HEAD);
    let mut there = Vec::with_capacity(most + 1);
    let most = u64::try_from(most).unwrap_or(u64::MAX).saturating_add(1);
    file.take(most).read_to_end(&mut there).map_err(failed())?;
    if !ours(&there[..there.len().min(HEAD)]) {
        return Err(StoreError::NotOurs { path: path.to_owned() });
    }
    Ok(Some(Old { mode: metadata.mode() & 0o7777, group: metadata.gid(), same: there == bytes }))
}

/// Opens a plain file for reading. Neither follows a link nor waits for the other end of a pipe.
///
/// # Errors
/// What the system says; [`io::ErrorKind::InvalidInput`] where `path` is something other than a plain file.
pub fn open_plain(path: &Path) -> io::Result<File> {
    let flags = OFlags::NOFOLLOW | OFlags::NONBLOCK | OFlags::CLOEXEC;
    let file = OpenOptions::new().read(true).custom_flags(flags.bits().cast_signed()).open(path)?;
    plain(file)
}

fn plain(file: File) -> io::Result<File> {
    if file.metadata()?.is_file() { Ok(file) } else { Err(io::Error::new(io::ErrorKind::InvalidInput, NO_FILE)) }
}

/// An empty buffer with room for what a file holds now, up to a limit: without it a small file takes a handful of reads.
pub(super) fn room_for(file: &File, most: u64) -> Vec<u8> {
    let length = file.metadata().map_or(0, |metadata| metadata.len()).min(most);
    Vec::with_capacity(usize::try_from(length).unwrap_or(0).saturating_add(1))
}

/// The words for what is not a plain file.
pub(crate) fn kind(kind: fs::FileType) -> &'static str {
    if kind.is_dir() {
        A_FOLDER
    } else if kind.is_symlink() {
        A_LINK
    } else {
        NO_FILE
    }
}

/// Whether a file's name is that of a temporary file of ours.
#[must_use]
pub fn is_temp(name: &std::ffi::OsStr) -> bool {
    let name = name.as_encoded_bytes();
    name.len() == TEMP_PREFIX.len() + TEMP_RANDOM + TEMP_SUFFIX.len()
        && name.starts_with(TEMP_PREFIX.as_bytes())
        && name.ends_with(TEMP_SUFFIX.as_bytes())
        && name[TEMP_PREFIX.len()..][..TEMP_RANDOM].iter().all(u8::is_ascii_alphanumeric)
}

/// Removes temporary files that a killed process left behind, and says how many.
///
/// What is not named as ours, is not a plain file, or is locked by a process that is still writing stays.
pub fn sweep<'a>(candidates: impl IntoIterator<Item = &'a PathBuf>) -> usize {
    candidates.into_iter().filter(|path| path.file_name().is_some_and(is_temp) && remove_orphan(path)).count()
}

/// As [`sweep`], for all that lies in one folder of ours.
///
/// # Errors
/// The folder cannot be read.
pub fn sweep_folder(folder: &Path) -> io::Result<usize> {
    let entries = fs::read_dir(folder)?.flatten().filter(|entry| is_temp(&entry.file_name()));
    Ok(sweep(&entries.map(|entry| entry.path()).collect::<Vec<_>>()))
}

/// Removes a file unless its writer still has it locked. The lock is held over the removal, so that a writer that comes just then
/// finds out.
fn remove_orphan(path: &Path) -> bool {
    let Ok(file) = open_plain(path) else { return false };
    !matches!(file.try_lock(), Err(fs::TryLockError::WouldBlock)) && fs::remove_file(path).is_ok()
}

#[cfg(test)]
#[expect(clippy::disallowed_methods, reason = "tests lay out files as other programs would")]
mod tests {
    use std::os::unix::fs::symlink;

    use super::*;

    fn ours(head: &[u8]) -> bool {
        head.starts_with(b"ours")
    }

    fn put(path: &Path, text: &str) -> Result<Written, StoreError> {
        write(path, text.as_bytes(), ours, Durability::Synced)
    }

    fn names(folder: &Path) -> Vec<String> {
        let mut names: Vec<_> =
            fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().file_name().into_string().unwrap()).collect();
        names.sort();
        names
    }

    #[test]
    fn equal_bytes_leave_the_file_untouched() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("p");
        assert_eq!(put(&path, "ours 1").unwrap(), Written::New);
        let before = fs::metadata(&path).unwrap();
        assert_eq!(put(&path, "ours 1").unwrap(), Written::Same);
        let after = fs::metadata(&path).unwrap();
        assert_eq!((before.ino(), before.mtime_nsec()), (after.ino(), after.mtime_nsec()));
        assert_eq!(put(&path, "ours 2").unwrap(), Written::Replaced);
        assert_eq!(fs::read_to_string(&path).unwrap(), "ours 2");
        assert_eq!(names(folder.path()), ["p"]);
    }

    #[test]
    fn a_shorter_text_replaces_a_longer_one_that_begins_with_it() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("p");
        put(&path, &format!("ours{}", "x".repeat(5000))).unwrap();
        assert_eq!(put(&path, "ours").unwrap(), Written::Replaced);
        assert_eq!(fs::read_to_string(&path).unwrap(), "ours");
    }

    #[test]
    fn the_mode_of_the_old_file_is_kept_even_when_it_is_read_only() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("p");
        put(&path, "ours 1").unwrap();
        for mode in [0o440, 0o664] {
            fs::set_permissions(&path, Permissions::from_mode(mode)).unwrap();
            put(&path, &format!("ours {mode}")).unwrap();
            assert_eq!(fs::metadata(&path).unwrap().mode() & 0o7777, mode);
        }
    }

    #[test]
    fn what_is_not_ours_is_left_alone() {
        let folder = tempfile::tempdir().unwrap();
        let outside = folder.path().join("outside");
        fs::write(&outside, "ours, but elsewhere").unwrap();
        let [foreign, link, dangling, directory] =
            ["foreign", "link", "dangling", "directory"].map(|name| folder.path().join(name));
        fs::write(&foreign, "somebody's").unwrap();
        symlink(&outside, &link).unwrap();
        symlink("nowhere", &dangling).unwrap();
        fs::create_dir(&directory).unwrap();
        assert!(matches!(put(&foreign, "ours"), Err(StoreError::NotOurs { .. })));
        for path in [&link, &dangling, &directory] {
            assert!(matches!(put(path, "ours"), Err(StoreError::InTheWay { .. })), "{path:?}");
        }
        assert_eq!(fs::read_to_string(&foreign).unwrap(), "somebody's");
        assert_eq!(fs::read_to_string(&outside).unwrap(), "ours, but elsewhere");
        assert_eq!(names(folder.path()), ["dangling", "directory", "foreign", "link", "outside"]);
    }

    #[test]
    fn a_failure_at_any_step_leaves_the_old_file_or_the_new_one_and_no_temporary_file() {
        let steps = [Step::Look, Step::Create, Step::Write, Step::Mode, Step::Sync, Step::Rename, Step::SyncFolder];
        for broken in steps {
            let folder = tempfile::tempdir().unwrap();
            let path = folder.path().join("p");
            put(&path, "ours, old").unwrap();
            let mut permit =
                |step| if step == broken { Err(io::Error::from(io::ErrorKind::StorageFull)) } else { Ok(()) };
            let error = write_checked((None, &path), b"ours, new", ours, Durability::Synced, &mut permit).unwrap_err();
            assert!(matches!(&error, StoreError::Failed { step, .. } if *step == broken), "{error}");
            assert!(error.may_pass() && error.to_string().contains("the disk is full"), "{error}");
            let expected = if broken == Step::SyncFolder { "ours, new" } else { "ours, old" };
            assert_eq!(fs::read_to_string(&path).unwrap(), expected, "{broken:?}");
            assert_eq!(names(folder.path()), ["p"], "{broken:?}");
            put(&path, "ours, new").unwrap();
            assert_eq!(fs::read_to_string(&path).unwrap(), "ours, new");
        }
    }

    /// Someone who may write there swaps the folder for a link, just before any of the steps.
    #[test]
    fn h4_a_folder_swapped_for_a_link_is_not_written_through() {
        let steps = [Step::Look, Step::Create, Step::Write, Step::Mode, Step::Sync, Step::Rename];
        for swapped in steps {
            let works = tempfile::tempdir().unwrap();
            let [root, trap, moved] = ["root", "trap", "moved"].map(|name| works.path().join(name));
            for folder in [&root.join("deep"), &trap] {
                fs::create_dir_all(folder).unwrap();
                fs::write(folder.join("p"), "ours, old").unwrap();
            }
            let mut permit = |step| {
                if step == swapped {
                    fs::rename(root.join("deep"), &moved)?;
                    symlink(&trap, root.join("deep"))?;
                }
                Ok(())
            };
            let path = root.join("deep/p");
            let below = (Some(root.as_path()), path.as_path());
            let error = write_checked(below, b"ours, new", ours, Durability::Synced, &mut permit).unwrap_err();
            assert!(error.may_pass(), "{error}");
            for folder in [&trap, &moved] {
                assert_eq!(names(folder), ["p"], "{swapped:?}");
                assert_eq!(fs::read_to_string(folder.join("p")).unwrap(), "ours, old", "{swapped:?}");
            }
            // Put back, it is written to again.
            fs::remove_file(root.join("deep")).unwrap();
            fs::rename(&moved, root.join("deep")).unwrap();
            assert_eq!(write_below(&root, &path, b"ours, new", ours, Durability::Synced).unwrap(), Written::Replaced);
        }
    }

    #[test]
    fn a_name_that_does_not_fit_is_told_and_not_retried() {
        let folder = tempfile::tempdir().unwrap();
        let error = put(&folder.path().join("n".repeat(300)), "ours").unwrap_err();
        assert!(!error.may_pass() && error.to_string().contains("too long"), "{error}");
        // The temporary name is short, so the longest name a file system takes can be written.
        assert_eq!(put(&folder.path().join("n".repeat(255)), "ours").unwrap(), Written::New);
    }

    #[test]
    fn a_missing_folder_is_an_error_and_not_a_new_file() {
        let folder = tempfile::tempdir().unwrap();
        let error = put(&folder.path().join("gone/p"), "ours").unwrap_err();
        assert!(error.to_string().contains("gone"), "{error}");
    }

    #[test]
    fn a_sweep_takes_orphans_only() {
        let folder = tempfile::tempdir().unwrap();
        let orphan = folder.path().join(".millreeve-aB3dEf7h.tmp");
        let other = folder.path().join(".millreeve-notes.tmp");
        fs::write(&orphan, "half").unwrap();
        fs::write(&other, "somebody's").unwrap();
        let target = folder.path().join("p");
        let place = Place::open(None, &target).unwrap();
        let _live = place.create().unwrap();
        let all: Vec<_> = fs::read_dir(folder.path()).unwrap().map(|entry| entry.unwrap().path()).collect();
        assert_eq!(sweep(&all), 1);
        assert!(!orphan.exists() && other.exists());
        assert_eq!(names(folder.path()).len(), 2, "the other and the live one");
    }

    #[test]
    fn a_writer_loses_nothing_to_a_sweep_that_comes_in_between() {
        let folder = tempfile::tempdir().unwrap();
        let done = std::sync::atomic::AtomicBool::new(false);
        std::thread::scope(|scope| {
            scope.spawn(|| {
                while !done.load(std::sync::atomic::Ordering::Relaxed) {
                    let entries = fs::read_dir(folder.path()).unwrap();
                    sweep(&entries.map(|entry| entry.unwrap().path()).collect::<Vec<_>>());
                }
            });
            let written = (0..2000).map(|number| put(&folder.path().join("p"), &format!("ours {number}")));
            let lost: Vec<_> = written.filter_map(Result::err).map(|error| error.to_string()).collect();
            done.store(true, std::sync::atomic::Ordering::Relaxed);
            assert!(lost.is_empty(), "{lost:?}");
        });
    }
}
