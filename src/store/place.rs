//! A folder held open, so that what is written lands in it and nowhere else: whatever its path leads to by then.

use std::collections::hash_map::RandomState;
use std::ffi::{OsStr, OsString};
use std::fs::{File, Permissions};
use std::hash::BuildHasher;
use std::io;
use std::os::unix::fs::{MetadataExt, PermissionsExt};
use std::path::{Component, Path};

use rustix::fs::{AtFlags, CWD, Mode, OFlags, openat, renameat, statat, unlinkat};
use rustix::io::Errno;

// How the name of a temporary file begins, how it ends, and how many letters stand in between.
pub(super) const TEMP_PREFIX: &str = ".millreeve-";
pub(super) const TEMP_SUFFIX: &str = ".tmp";
pub(super) const TEMP_RANDOM: usize = 8;

/// The mode of a new file, before the process's umask.
const NEW_MODE: u32 = 0o644;

/// What the owner of a new file may do, whatever the umask.
const OWNERS: u32 = 0o600;

/// How a folder is opened.
const FOLDER: OFlags = OFlags::RDONLY.union(OFlags::DIRECTORY).union(OFlags::CLOEXEC);

/// The place of a file that is to be written: its folder, open, and its name in it.
#[derive(Debug)]
pub(super) struct Place<'a> {
    folder: File,
    name: &'a OsStr,
    /// The folder below which no link is followed, if there is one.
    root: Option<&'a Path>,
    path: &'a Path,
}

impl<'a> Place<'a> {
    /// The place at `path`. Links on the way are followed; below `root`, which is the beginning of `path`, none is.
    ///
    /// # Errors
    /// The folder cannot be opened, one on the way is a link, or `path` names no file.
    pub(super) fn open(root: Option<&'a Path>, path: &'a Path) -> io::Result<Self> {
        let name = path.file_name().ok_or(io::ErrorKind::InvalidFilename)?;
        Ok(Self { folder: open_folder(root, path)?, name, root, path })
    }

    /// The folder.
    pub(super) fn folder(&self) -> &File {
        &self.folder
    }

    /// What stands there, by its mode; `None` where nothing does.
    pub(super) fn kind(&self) -> io::Result<Option<rustix::fs::FileType>> {
        match statat(&self.folder, self.name, AtFlags::SYMLINK_NOFOLLOW) {
            Ok(about) => Ok(Some(rustix::fs::FileType::from_raw_mode(about.st_mode))),
            Err(Errno::NOENT) => Ok(None),
            Err(error) => Err(error.into()),
        }
    }

    /// Opens what stands there for reading. Neither follows a link nor waits for the other end of a pipe.
    pub(super) fn read(&self) -> io::Result<File> {
        let flags = OFlags::RDONLY | OFlags::NOFOLLOW | OFlags::NONBLOCK | OFlags::CLOEXEC;
        Ok(openat(&self.folder, self.name, flags, Mode::empty())?.into())
    }

    /// Creates a temporary file beside it, locked so that no sweep takes it for an orphan.
    pub(super) fn create(&self) -> io::Result<Temp<'_>> {
        loop {
            let temp = Temp::new(&self.folder)?;
            // Where the file system knows no locks the name alone protects it.
            let _ = temp.file.lock();
            let about = temp.file.metadata()?;
            // A umask may have taken away what the owner needs in order to read the file again.
            if about.mode() & OWNERS != OWNERS {
                temp.file.set_permissions(Permissions::from_mode(about.mode() & 0o7777 | OWNERS))?;
            }
            // A sweep may have come upon it before the lock; it holds the lock itself until the file is gone.
            if about.nlink() > 0 {
                return Ok(temp);
            }
        }
    }

    /// Renames a temporary file to it, unless the path leads to another folder by now.
    pub(super) fn put(&self, mut temp: Temp<'_>) -> io::Result<()> {
        let there = open_folder(self.root, self.path)?.metadata()?;
        let here = self.folder.metadata()?;
        if (there.dev(), there.ino()) != (here.dev(), here.ino()) {
            return Err(io::Error::other("another folder has taken the place of its folder"));
        }
        renameat(&self.folder, &temp.name, &self.folder, self.name)?;
        temp.is_there = false;
        Ok(())
    }
}

/// A temporary file, removed when dropped unless it was put in its place.
#[derive(Debug)]
pub(super) struct Temp<'a> {
    folder: &'a File,
    name: OsString,
    is_there: bool,
    pub(super) file: File,
}

impl<'a> Temp<'a> {
    fn new(folder: &'a File) -> io::Result<Self> {
        let flags = OFlags::RDWR | OFlags::CREATE | OFlags::EXCL | OFlags::NOFOLLOW | OFlags::CLOEXEC;
        loop {
            let name = unforeseen();
            match openat(folder, &name, flags, Mode::from_raw_mode(NEW_MODE)) {
                Ok(file) => return Ok(Self { folder, name, is_there: true, file: file.into() }),
                Err(Errno::EXIST) => {}
                Err(error) => return Err(error.into()),
            }
        }
    }
}

impl Drop for Temp<'_> {
    fn drop(&mut self) {
        if self.is_there {
            // What cannot be removed now is swept away by the next start.
            let _ = unlinkat(self.folder, &self.name, AtFlags::empty());
        }
    }
}

/// A name for a temporary file that nobody can foresee: the hasher is keyed by the system's own chance.
fn unforeseen() -> OsString {
    const LETTERS: &[u8] = b"abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789";
    let mut number = RandomState::new().hash_one(0_u8);
    let mut name = TEMP_PREFIX.to_owned();
    for _ in 0..TEMP_RANDOM {
        let count = LETTERS.len() as u64;
        // Smaller than the count of letters.
        let at = usize::try_from(number % count).unwrap_or(0);
        name.push(char::from(LETTERS[at]));
        number /= count;
    }
    name.push_str(TEMP_SUFFIX);
    name.into()
}

/// Opens the folder of the file at `path`, step by step below `root`, so that a link on the way there is refused.
fn open_folder(root: Option<&Path>, path: &Path) -> io::Result<File> {
    let folder = match path.parent() {
        Some(folder) if !folder.as_os_str().is_empty() => folder,
        _ => Path::new("."),
    };
    let Some((root, below)) = root.and_then(|root| Some((root, folder.strip_prefix(root).ok()?))) else {
        return Ok(openat(CWD, folder, FOLDER, Mode::empty())?.into());
    };
    let mut open = openat(CWD, root, FOLDER, Mode::empty())?;
    for step in below.components() {
        let Component::Normal(name) = step else { return Err(io::ErrorKind::InvalidFilename.into()) };
        open = openat(&open, name, FOLDER | OFlags::NOFOLLOW, Mode::empty())?;
    }
    Ok(open.into())
}
