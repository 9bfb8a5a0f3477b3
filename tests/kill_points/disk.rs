//! A small model of a disk: what a power cut may leave of the changes that were asked for, when what was not synced may be lost, torn or
//! reordered.
//!
//! More is lost here than by any one file system: a synced file keeps its content, a synced folder the names in it, and nothing else
//! is promised. A rename is there whole or not at all.

use std::collections::{BTreeMap, BTreeSet};
use std::fs;
use std::path::{Path, PathBuf};

use crate::rng::Rng;

/// A change that a program asked for, in the order in which it was made. Paths are below the folder that is looked at.
#[derive(Clone, Debug)]
pub(crate) enum Change {
    /// A new, empty file.
    Create(PathBuf),
    /// What a file holds from now on.
    Content(PathBuf, Vec<u8>),
    Rename(PathBuf, PathBuf),
    Remove(PathBuf),
    NewFolder(PathBuf),
    /// A file is synced.
    Sync(PathBuf),
    /// A folder is synced.
    SyncFolder(PathBuf),
}

impl Change {
    /// Which one it is, and of what.
    pub(crate) fn what(&self) -> String {
        match self {
            Self::Content(path, bytes) => format!("{} bytes in {path:?}", bytes.len()),
            other => format!("{other:?}"),
        }
    }
}

/// What becomes of what was not synced.
#[derive(Clone, Copy, Debug)]
pub(crate) enum Cut {
    /// All of it is lost.
    AllLost,
    /// Names are there and what the files held is not, as where a file system writes its own books first.
    ContentLost,
    /// Whatever chance has it: some names, in any order, and some content, whole, cut short or as zeros.
    Chance,
}

#[derive(Clone, Debug, Default)]
struct Stored {
    now: Vec<u8>,
    synced: Vec<u8>,
    is_synced: bool,
}

/// A name that was changed and not synced yet.
#[derive(Clone, Debug)]
enum Pending {
    Name(PathBuf, usize),
    Rename(PathBuf, PathBuf, usize),
    Remove(PathBuf),
    Folder(PathBuf),
}

impl Pending {
    fn folder(&self) -> &Path {
        let (Self::Name(path, _) | Self::Rename(_, path, _) | Self::Remove(path) | Self::Folder(path)) = self;
        path.parent().unwrap()
    }

    fn apply(&self, names: &mut BTreeMap<PathBuf, usize>, folders: &mut BTreeSet<PathBuf>) {
        match self {
            Self::Name(path, file) => drop(names.insert(path.clone(), *file)),
            Self::Rename(from, to, file) => {
                names.remove(from);
                names.insert(to.clone(), *file);
            }
            Self::Remove(path) => drop(names.remove(path)),
            Self::Folder(path) => drop(folders.insert(path.clone())),
        }
    }
}

/// A folder on such a disk.
#[derive(Clone, Debug, Default)]
pub(crate) struct Disk {
    files: Vec<Stored>,
    names: BTreeMap<PathBuf, usize>,
    synced_names: BTreeMap<PathBuf, usize>,
    synced_folders: BTreeSet<PathBuf>,
    pending: Vec<Pending>,
}

impl Disk {
    /// The folder as it lies there, all of it synced.
    pub(crate) fn of(root: &Path) -> Self {
        let mut disk = Self::default();
        disk.take_in(root, Path::new(""));
        disk.synced_names = disk.names.clone();
        disk
    }

    fn take_in(&mut self, root: &Path, folder: &Path) {
        self.synced_folders.insert(folder.to_owned());
        for entry in fs::read_dir(root.join(folder)).unwrap() {
            let entry = entry.unwrap();
            let path = folder.join(entry.file_name());
            if entry.file_type().unwrap().is_dir() {
                self.take_in(root, &path);
            } else {
                let now = fs::read(entry.path()).unwrap();
                self.names.insert(path, self.files.len());
                self.files.push(Stored { synced: now.clone(), now, is_synced: true });
            }
        }
    }

    /// A change is made. What it says of files that are gone is of no account.
    pub(crate) fn change(&mut self, change: &Change) {
        match change {
            Change::Create(path) => {
                let file = self.files.len();
                self.files.push(Stored::default());
                self.names.insert(path.clone(), file);
                self.pending.push(Pending::Name(path.clone(), file));
            }
            Change::Content(path, bytes) => {
                if let Some(&file) = self.names.get(path) {
                    self.files[file].now.clone_from(bytes);
                    self.files[file].is_synced = false;
                }
            }
            Change::Rename(from, to) => {
                let file = self.names.remove(from).unwrap();
                self.names.insert(to.clone(), file);
                self.pending.push(Pending::Rename(from.clone(), to.clone(), file));
            }
            Change::Remove(path) => {
                self.names.remove(path).unwrap();
                self.pending.push(Pending::Remove(path.clone()));
            }
            Change::NewFolder(path) => self.pending.push(Pending::Folder(path.clone())),
            Change::Sync(path) => {
                if let Some(&file) = self.names.get(path) {
                    let stored = &mut self.files[file];
                    stored.synced.clone_from(&stored.now);
                    stored.is_synced = true;
                }
            }
            Change::SyncFolder(folder) => {
                let (synced, pending) = self.pending.drain(..).partition(|pending| pending.folder() == folder);
                self.pending = pending;
                let synced: Vec<Pending> = synced;
                synced.iter().for_each(|name| name.apply(&mut self.synced_names, &mut self.synced_folders));
            }
        }
    }

    /// Checks that plans, notes and models at `root` are just what they are here.
    pub(crate) fn expect(&self, root: &Path) {
        let here = self.names.iter().filter(|(path, _)| path.parent() == Some(Path::new("")));
        let here: BTreeMap<_, _> = here.map(|(path, &file)| (path.clone(), self.files[file].now.clone())).collect();
        let there = Self::of(root).names;
        let there = there.into_keys().filter(|path| path.parent() == Some(Path::new("")));
        let there: BTreeMap<_, _> = there.map(|path| (path.clone(), fs::read(root.join(path)).unwrap())).collect();
        assert_eq!(here, there);
    }

    /// Lays out at `root` what a power cut leaves just now.
    pub(crate) fn cut(&self, cut: Cut, rng: &mut Rng, root: &Path) {
        let (mut names, mut folders) = (self.synced_names.clone(), self.synced_folders.clone());
        let mut pending: Vec<_> = self.pending.iter().collect();
        match cut {
            Cut::AllLost => pending.clear(),
            Cut::ContentLost => {}
            Cut::Chance => {
                pending.retain(|_| rng.below(2) == 0);
                for last in (1..pending.len()).rev() {
                    pending.swap(last, rng.below(last + 1));
                }
            }
        }
        pending.iter().for_each(|name| name.apply(&mut names, &mut folders));
        // Outer folders come first: a folder is there only if the one that it lies in is.
        for folder in &folders {
            if folder.parent().is_none_or(|outer| root.join(outer).is_dir()) {
                fs::create_dir_all(root.join(folder)).unwrap();
            }
        }
        for (name, &file) in &names {
            if root.join(name).parent().unwrap().is_dir() {
                crate::scenario::write_bytes(&root.join(name), &self.files[file].after(cut, rng));
            }
        }
    }
}

impl Stored {
    /// What a power cut leaves of it.
    fn after(&self, cut: Cut, rng: &mut Rng) -> Vec<u8> {
        let left = match cut {
            _ if self.is_synced => 0,
            Cut::AllLost => 1,
            Cut::ContentLost => 2,
            Cut::Chance => rng.below(5),
        };
        match left {
            0 => self.now.clone(),
            1 => self.synced.clone(),
            2 => Vec::new(),
            3 => self.now[..self.now.len() / 2].to_vec(),
            _ => vec![0; self.now.len()],
        }
    }
}

/// That the model loses what it should and nothing else.
#[test]
fn what_is_not_synced_may_be_lost_and_what_is_stays() {
    let folder = tempfile::tempdir().unwrap();
    let path = |name: &str| PathBuf::from(name);
    let mut disk = Disk::of(folder.path());
    let mut at = 0;
    let mut left = |disk: &Disk, cut| {
        at += 1;
        let root = folder.path().join(at.to_string());
        disk.cut(cut, &mut Rng::new(1), &root);
        ["temp", "plan"].map(|name| fs::read_to_string(root.join(name)).ok())
    };
    let some = |text: &str| Some(text.to_owned());
    disk.change(&Change::Create(path("temp")));
    disk.change(&Change::Content(path("temp"), b"new".to_vec()));
    assert_eq!(left(&disk, Cut::AllLost), [None, None]);
    assert_eq!(left(&disk, Cut::ContentLost), [some(""), None]);
    // Renamed without a sync of the file: the name may be there and the content not.
    let mut careless = disk.clone();
    careless.change(&Change::Rename(path("temp"), path("plan")));
    careless.change(&Change::SyncFolder(path("")));
    assert_eq!(left(&careless, Cut::AllLost), [None, some("")]);
    disk.change(&Change::Sync(path("temp")));
    disk.change(&Change::Rename(path("temp"), path("plan")));
    assert_eq!(left(&disk, Cut::AllLost), [None, None]);
    assert_eq!(left(&disk, Cut::ContentLost), [None, some("new")]);
    disk.change(&Change::SyncFolder(path("")));
    for cut in [Cut::AllLost, Cut::ContentLost, Cut::Chance] {
        assert_eq!(left(&disk, cut), [None, some("new")]);
    }
}
