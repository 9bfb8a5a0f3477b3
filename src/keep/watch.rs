//! The system's file events, as hints to look.

use std::collections::BTreeSet;
use std::fmt;
use std::fs::{self, File};
use std::io::ErrorKind as IoKind;
use std::path::{Path, PathBuf};
use std::thread;

use notify::event::{AccessKind, AccessMode, CreateKind, ModifyKind, RemoveKind, RenameMode};
use notify::{Config, ErrorKind, EventKind, RecommendedWatcher, RecursiveMode, Watcher as _};
use rustix::io::Errno;

use super::hints::{Hint, HintSender};
use super::path::{is_entered, may_concern};
use super::stamp::Stamp;
use crate::model::escape::Plain;
use crate::store::atomic::is_temp;
use crate::store::error::reason;

/// How edits are noticed now.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Watching {
    /// By events from all folders.
    Events,
    /// By events from some folders, and by scanning where there are none.
    Partly {
        /// How many folders send no events.
        missing: usize,
        /// How many folders there are.
        of: usize,
        /// Why, as words for people.
        why: String,
    },
    /// By scanning alone: why, as words for people.
    Scans(String),
    /// By scanning alone, as the settings say.
    Asked,
}

impl fmt::Display for Watching {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Events => f.write_str("edits are noticed by file events"),
            Self::Partly { missing, of, why } => write!(
                f,
                "{missing} of {of} folders send no file events: {why}; meanwhile edits there are found by scanning"
            ),
            Self::Scans(why) => write!(f, "there are no file events: {why}; edits are found by scanning"),
            Self::Asked => f.write_str("edits are found by scanning, as the settings say"),
        }
    }
}

/// Watches folders until it is dropped. Each is watched by itself, so that one that cannot be costs only its own events.
#[derive(Debug)]
pub struct Watcher {
    inner: RecommendedWatcher,
    root: PathBuf,
    /// The folders that are watched, relative to the root.
    watched: BTreeSet<PathBuf>,
}

/// What following a scan's folders came to.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Followed {
    /// How many folders are watched that were not before: what was written in them up to now brought no event.
    pub added: usize,
    /// How things stand now.
    pub watching: Watching,
}

impl Watcher {
    /// A watcher for folders under `root` that watches none yet.
    ///
    /// # Errors
    /// Why events cannot be had, as words for people that name the limit to raise where there is one.
    pub fn new(root: &Path, hints: HintSender) -> Result<Self, String> {
        // The library goes on without its thread, and panics when it is asked for something.
        thread::Builder::new().spawn(|| {}).map_err(|error| reason(&error))?;
        let base = root.to_owned();
        let handle = move |event| told_of(&base, event).into_iter().for_each(|hint| hints.send(hint));
        let config = Config::default().with_follow_symlinks(false);
        let inner = RecommendedWatcher::new(handle, config).map_err(|error| why(&error))?;
        Ok(Self { inner, root: root.to_owned(), watched: BTreeSet::new() })
    }

    /// Watches just these folders, given relative to the root.
    pub fn follow(&mut self, folders: &BTreeSet<PathBuf>) -> Followed {
        let gone: Vec<_> = self.watched.difference(folders).cloned().collect();
        for folder in gone {
            self.forget(&folder);
        }
        let missing: Vec<_> = folders.difference(&self.watched).cloned().collect();
        let (mut added, mut vanished, mut cause) = (0, 0, None);
        for folder in missing {
            match self.watch(folder) {
                Ok(()) => added += 1,
                Err(error) if is_gone(&error) => vanished += 1,
                Err(error) => {
                    cause = Some(why(&error));
                    // All others would be refused too.
                    if matches!(error.kind, ErrorKind::MaxFilesWatch) {
                        break;
                    }
                }
            }
        }
        let of = folders.len() - vanished;
        let missing = of.saturating_sub(self.watched.len());
        let watching = match cause {
            Some(why) => Watching::Partly { missing, of, why },
            None => Watching::Events,
        };
        Followed { added, watching }
    }

    /// Watches a folder that has just appeared, as soon as can be; the scan that follows makes up for what this cannot do.
    pub fn appeared(&mut self, path: &Path) {
        if let Ok(folder) = path.strip_prefix(&self.root) {
            // A folder of that name that was watched before is another one.
            self.forget(folder);
            // What fails here is tried again, and told, when the next scan's folders are followed.
            let _ = self.watch(folder.to_owned());
        }
    }

    /// Takes note that a folder is gone. Answers whether it was one that is watched.
    pub fn vanished(&mut self, path: &Path) -> bool {
        path.strip_prefix(&self.root).is_ok_and(|folder| self.watched.contains(folder) && self.forget(folder))
    }

    fn watch(&mut self, folder: PathBuf) -> notify::Result<()> {
        self.inner.watch(&self.root.join(&folder), RecursiveMode::NonRecursive)?;
        self.watched.insert(folder);
        Ok(())
    }

    /// Watches a folder, and those in it, no longer.
    fn forget(&mut self, folder: &Path) -> bool {
        let below: Vec<_> = self.watched.iter().filter(|watched| watched.starts_with(folder)).cloned().collect();
        for folder in &below {
            // The library may have forgotten it by itself.
            let _ = self.inner.unwatch(&self.root.join(folder));
            self.watched.remove(folder);
        }
        !below.is_empty()
    }
}

/// What an event of the library hints at.
fn told_of(root: &Path, event: notify::Result<notify::Event>) -> Vec<Hint> {
    let event = match event {
        Ok(event) => event,
        // Reading events has failed.
        Err(_) => return vec![Hint::Rescan],
    };
    // An overflow carries no paths.
    if event.need_rescan() {
        return vec![Hint::Rescan];
    }
    let kind = event.kind;
    event.paths.into_iter().filter_map(|path| hint(root, kind, path)).collect()
}

fn hint(root: &Path, kind: EventKind, path: PathBuf) -> Option<Hint> {
    let below = path.strip_prefix(root).ok()?;
    if below.as_os_str().is_empty() {
        let gone = matches!(kind, EventKind::Remove(_) | EventKind::Modify(ModifyKind::Name(_)));
        return gone.then_some(Hint::Rescan);
    }
    if !below.iter().all(is_entered) {
        return None;
    }
    let model = may_concern(below);
    match kind {
        EventKind::Access(AccessKind::Close(AccessMode::Write)) if model => Some(Hint::Closed(path)),
        EventKind::Modify(ModifyKind::Name(RenameMode::To)) if model => {
            let stamp = Stamp::of(&path);
            Some(Hint::Arrived(path, stamp))
        }
        EventKind::Modify(ModifyKind::Name(RenameMode::To)) => path.is_dir().then_some(Hint::Folder(path)),
        EventKind::Modify(ModifyKind::Name(RenameMode::From)) | EventKind::Remove(RemoveKind::File) if model => {
            Some(Hint::Gone(path))
        }
        EventKind::Modify(ModifyKind::Name(RenameMode::From)) | EventKind::Remove(RemoveKind::Folder) => {
            (!below.file_name().is_some_and(is_temp)).then_some(Hint::FolderGone(path))
        }
        EventKind::Modify(ModifyKind::Data(_)) if model => Some(Hint::Writing(path)),
        // A new file will be closed; a new name of an old file never is, and is found by a scan.
        EventKind::Create(CreateKind::Folder) => Some(Hint::Folder(path)),
        _ => None,
    }
}

/// Why there are no events, with the setting that cures it.
fn why(error: &notify::Error) -> String {
    match &error.kind {
        ErrorKind::MaxFilesWatch => limit("watches", "watches"),
        ErrorKind::Io(io) if io.raw_os_error() == Some(Errno::MFILE.raw_os_error()) => {
            // Of the two limits that the system tells in the same way, this is the one that also keeps other files from being opened.
            match File::open("/") {
                Err(own) => reason(&own),
                Ok(_) => limit("watchers", "instances"),
            }
        }
        ErrorKind::Io(io) => reason(io),
        _ => Plain(&error.to_string()).to_string(),
    }
}

/// A limit of the system, and what it is set to. In a container there is one of its own beside the system's; the lower one counts.
fn limit(what: &str, name: &str) -> String {
    let files = [("fs.inotify", format!("max_user_{name}")), ("user", format!("max_inotify_{name}"))];
    let set = files.into_iter().filter_map(|(group, key)| {
        let path = format!("/proc/sys/{}/{key}", group.replace('.', "/"));
        let set: u64 = fs::read_to_string(path).ok()?.trim().parse().ok()?;
        Some((set, format!("{group}.{key}")))
    });
    // Where both are equal, the one that is better known.
    let lowest = set.min_by_key(|&(set, _)| set);
    let cure = lowest.map(|(set, key)| format!("; raise {key} (sysctl), which is {set}")).unwrap_or_default();
    format!("the system allows no more file {what}{cure}")
}

/// Whether a folder could not be watched for not being there any more.
fn is_gone(error: &notify::Error) -> bool {
    match &error.kind {
        ErrorKind::PathNotFound => true,
        ErrorKind::Io(io) => matches!(io.kind(), IoKind::NotFound | IoKind::NotADirectory),
        _ => false,
    }
}

#[cfg(test)]
mod tests {
    use notify::event::{DataChange, Flag, MetadataKind};

    use super::*;

    fn one(kind: EventKind, path: &str) -> Vec<Hint> {
        told_of(Path::new("/works"), Ok(notify::Event::new(kind).add_path(path.into())))
    }

    #[test]
    fn only_what_may_concern_a_model_becomes_a_hint() {
        let closed = EventKind::Access(AccessKind::Close(AccessMode::Write));
        let to = EventKind::Modify(ModifyKind::Name(RenameMode::To));
        let from = EventKind::Modify(ModifyKind::Name(RenameMode::From));
        let data = EventKind::Modify(ModifyKind::Data(DataChange::Any));
        let m = "/works/a/m.model.toml";
        assert_eq!(one(closed, m), [Hint::Closed(m.into())]);
        assert_eq!(one(to, m), [Hint::Arrived(m.into(), None)]);
        assert_eq!(one(from, m), [Hint::Gone(m.into())]);
        assert_eq!(one(data, m), [Hint::Writing(m.into())]);
        assert_eq!(one(EventKind::Remove(RemoveKind::File), m), [Hint::Gone(m.into())]);
        let part = "/works/a/m.model/uses.csv";
        assert_eq!(
            (one(closed, part), one(to, part)),
            (vec![Hint::Closed(part.into())], vec![Hint::Arrived(part.into(), None)])
        );
        assert_eq!(
            (one(data, part), one(from, part)),
            (vec![Hint::Writing(part.into())], vec![Hint::Gone(part.into())])
        );
        assert_eq!(one(EventKind::Create(CreateKind::Folder), "/works/n"), [Hint::Folder("/works/n".into())]);
        assert_eq!(one(EventKind::Modify(ModifyKind::Metadata(MetadataKind::Any)), m), []);
        assert_eq!(one(EventKind::Create(CreateKind::File), m), []);
        for other in [
            "/works/m.plan.toml",
            "/works/.m.model.toml.swp",
            "/works/.git/m.model.toml",
            "/else/m.model.toml",
            "/works/m.model/.x.swp",
        ] {
            assert_eq!(one(closed, other), [], "{other}");
        }
        assert_eq!(one(EventKind::Remove(RemoveKind::Folder), "/works"), [Hint::Rescan]);
        assert_eq!(one(EventKind::Remove(RemoveKind::Folder), "/works/n"), [Hint::FolderGone("/works/n".into())]);
        assert_eq!(one(from, "/works/n"), [Hint::FolderGone("/works/n".into())]);
        assert_eq!(one(from, "/works/.millreeve-aB3dEf7h.tmp"), []);
    }

    #[test]
    fn lost_events_and_used_up_limits_are_told() {
        let lost = notify::Event::new(EventKind::Other).set_flag(Flag::Rescan);
        assert_eq!(told_of(Path::new("/works"), Ok(lost)), [Hint::Rescan]);
        assert!(why(&notify::Error::new(ErrorKind::MaxFilesWatch)).contains("_watches (sysctl), which is "));
        let many = notify::Error::io(std::io::Error::from_raw_os_error(24));
        assert!(why(&many).contains("_instances (sysctl), which is "), "{}", why(&many));
    }

    #[test]
    fn folders_are_followed_as_they_come_and_go() {
        let root = tempfile::tempdir().unwrap();
        for folder in ["a/b", "c"] {
            fs::create_dir_all(root.path().join(folder)).unwrap();
        }
        let folders = |names: &[&str]| names.iter().map(PathBuf::from).collect::<BTreeSet<_>>();
        let (sender, _hints) = super::super::hints::channel();
        let mut watcher = Watcher::new(root.path(), sender).unwrap();
        let followed = |added| Followed { added, watching: Watching::Events };
        assert_eq!(watcher.follow(&folders(&["", "a", "a/b", "c", "never"])), followed(4));
        assert_eq!(watcher.follow(&folders(&["", "a", "a/b", "c"])), followed(0));
        assert!(watcher.vanished(&root.path().join("a")) && !watcher.vanished(&root.path().join("never")));
        assert_eq!(watcher.watched, folders(&["", "c"]));
        watcher.appeared(&root.path().join("a"));
        assert_eq!(watcher.watched, folders(&["", "a", "c"]));
        assert_eq!(watcher.follow(&folders(&["", "a", "a/b"])), followed(1));
        assert_eq!(watcher.watched, folders(&["", "a", "a/b"]));
    }
}
