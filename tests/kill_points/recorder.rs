//! What a traced program changes in a folder, change by change.

use std::collections::BTreeSet;
use std::fs;
use std::path::{Path, PathBuf};

use nix::libc::{O_CREAT, O_TRUNC, user_regs_struct};
use nix::unistd::Pid;

use crate::calls::{About, by_number};
use crate::disk::Change;
use crate::tracer::file;

/// Takes down the changes to files of one folder, as the calls that make them come back.
pub(crate) struct Recorder {
    root: PathBuf,
    /// The files that are there.
    there: BTreeSet<PathBuf>,
    pub(crate) changes: Vec<Change>,
}

impl Recorder {
    pub(crate) fn new(root: &Path) -> Self {
        let mut recorder = Self { root: root.to_owned(), there: BTreeSet::new(), changes: Vec::new() };
        recorder.look_into(root);
        recorder
    }

    fn look_into(&mut self, folder: &Path) {
        for entry in fs::read_dir(folder).unwrap() {
            let path = entry.unwrap().path();
            if path.is_dir() {
                self.look_into(&path);
            } else {
                self.there.insert(self.below(&path).unwrap());
            }
        }
    }

    fn below(&self, path: &Path) -> Option<PathBuf> {
        path.strip_prefix(&self.root).ok().map(Path::to_owned)
    }

    /// A call was made and has not failed.
    pub(crate) fn made(&mut self, pid: Pid, registers: &user_regs_struct) {
        let Some(call) = by_number(registers.orig_rax) else { return };
        let path = |about: About| file(pid, registers, about).and_then(|path| self.below(&path));
        let Some(at) = path(call.about) else { return };
        match call.name {
            "open" => self.opened(at, registers.rsi),
            "openat" => self.opened(at, registers.rdx),
            "write" | "pwrite64" | "ftruncate" => {
                // Through the descriptor: the file may have another name by now, or none.
                if let Ok(bytes) = fs::read(format!("/proc/{pid}/fd/{}", registers.rdi.cast_signed())) {
                    self.changes.push(Change::Content(at, bytes));
                }
            }
            "fsync" | "fdatasync" if self.root.join(&at).is_dir() => self.changes.push(Change::SyncFolder(at)),
            "fsync" | "fdatasync" => self.changes.push(Change::Sync(at)),
            "rename" => {
                let from = path(About::Path(0));
                self.renamed(from.unwrap(), at);
            }
            "renameat" | "renameat2" => {
                let from = path(About::Below(0, 1));
                self.renamed(from.unwrap(), at);
            }
            "unlink" | "unlinkat" => {
                self.there.remove(&at);
                self.changes.push(Change::Remove(at));
            }
            "mkdir" | "mkdirat" => self.changes.push(Change::NewFolder(at)),
            _ => {}
        }
    }

    fn opened(&mut self, path: PathBuf, flags: u64) {
        let has = |flag: i32| flags & u64::from(flag.cast_unsigned()) != 0;
        if has(O_CREAT) && self.there.insert(path.clone()) {
            self.changes.push(Change::Create(path));
        } else if has(O_TRUNC) {
            self.changes.push(Change::Content(path, Vec::new()));
        }
    }

    fn renamed(&mut self, from: PathBuf, to: PathBuf) {
        self.there.remove(&from);
        self.there.insert(to.clone());
        self.changes.push(Change::Rename(from, to));
    }
}
