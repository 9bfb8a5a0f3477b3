//! The system's file events, as hints to look.

use std::io::ErrorKind as IoKind;
use std::path::{Path, PathBuf};

use notify::event::{AccessKind, AccessMode, CreateKind, ModifyKind, RemoveKind, RenameMode};
use notify::{Config, ErrorKind, EventKind, RecommendedWatcher, RecursiveMode, Watcher as _};

use super::path::{is_entered, is_model};
use crate::model::escape::Plain;

/// A hint that something may have changed. Paths are absolute; what an event means for a model is for settling to say.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Hint {
    /// A file was closed by somebody who could write to it.
    Closed(PathBuf),
    /// A file was moved here: whoever did that had finished it.
    Arrived(PathBuf),
    /// Somebody is writing to a file.
    Writing(PathBuf),
    /// A file was removed or moved away.
    Gone(PathBuf),
    /// A folder appeared; what was written into it before it was watched brought no event.
    Folder(PathBuf),
    /// Events were lost: nothing that was told before can be relied on.
    Rescan,
    /// Events will be missing from now on: why, as a sentence for people.
    Trouble(String),
}

/// Watches a folder until it is dropped.
#[derive(Debug)]
pub struct Watcher(#[expect(dead_code, reason = "watching ends when it is dropped")] RecommendedWatcher);

/// Starts watching `root` and all folders below. `send` is called on the watcher's own thread and must not block.
///
/// # Errors
/// Why events cannot be had, as a sentence for people that names the limit to raise where there is one.
pub fn watch(root: &Path, send: impl Fn(Hint) + Send + 'static) -> Result<Watcher, String> {
    let base = root.to_owned();
    let handle = move |event| hints(&base, event).into_iter().for_each(&send);
    let config = Config::default().with_follow_symlinks(false);
    let mut watcher = RecommendedWatcher::new(handle, config).map_err(|error| told(&error))?;
    watcher.watch(root, RecursiveMode::Recursive).map_err(|error| told(&error))?;
    Ok(Watcher(watcher))
}

/// What an event of the library hints at.
fn hints(root: &Path, event: notify::Result<notify::Event>) -> Vec<Hint> {
    let event = match event {
        Ok(event) => event,
        Err(error) => return vec![Hint::Trouble(told(&error))],
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
    let model = below.file_name().is_some_and(is_model);
    match kind {
        EventKind::Access(AccessKind::Close(AccessMode::Write)) if model => Some(Hint::Closed(path)),
        EventKind::Modify(ModifyKind::Name(RenameMode::To)) if model => Some(Hint::Arrived(path)),
        EventKind::Modify(ModifyKind::Name(RenameMode::To)) => path.is_dir().then_some(Hint::Folder(path)),
        EventKind::Modify(ModifyKind::Name(RenameMode::From)) | EventKind::Remove(RemoveKind::File) if model => {
            Some(Hint::Gone(path))
        }
        EventKind::Modify(ModifyKind::Data(_)) if model => Some(Hint::Writing(path)),
        // A new file will be closed; a new name of an old file never is, and is found by a scan.
        EventKind::Create(CreateKind::Folder) => Some(Hint::Folder(path)),
        _ => None,
    }
}

/// A watcher's error, with the setting that cures it.
fn told(error: &notify::Error) -> String {
    match &error.kind {
        ErrorKind::MaxFilesWatch => {
            "the system allows no more file watches; raise fs.inotify.max_user_watches (sysctl)".to_owned()
        }
        // EMFILE of inotify_init: instances, in nearly every case.
        ErrorKind::Io(io) if io.raw_os_error() == Some(24) => {
            "the system allows no more file watchers; raise fs.inotify.max_user_instances (sysctl)".to_owned()
        }
        ErrorKind::Io(io) if io.kind() == IoKind::NotFound => "the folder is gone".to_owned(),
        _ => format!("file events cannot be had: {}", Plain(&error.to_string())),
    }
}

#[cfg(test)]
mod tests {
    use notify::event::{DataChange, Flag, MetadataKind};

    use super::*;

    fn one(kind: EventKind, path: &str) -> Vec<Hint> {
        hints(Path::new("/works"), Ok(notify::Event::new(kind).add_path(path.into())))
    }

    #[test]
    fn only_what_may_concern_a_model_becomes_a_hint() {
        let closed = EventKind::Access(AccessKind::Close(AccessMode::Write));
        let to = EventKind::Modify(ModifyKind::Name(RenameMode::To));
        let from = EventKind::Modify(ModifyKind::Name(RenameMode::From));
        let data = EventKind::Modify(ModifyKind::Data(DataChange::Any));
        let m = "/works/a/m.model.toml";
        assert_eq!(one(closed, m), [Hint::Closed(m.into())]);
        assert_eq!(one(to, m), [Hint::Arrived(m.into())]);
        assert_eq!(one(from, m), [Hint::Gone(m.into())]);
        assert_eq!(one(data, m), [Hint::Writing(m.into())]);
        assert_eq!(one(EventKind::Remove(RemoveKind::File), m), [Hint::Gone(m.into())]);
        assert_eq!(one(EventKind::Create(CreateKind::Folder), "/works/n"), [Hint::Folder("/works/n".into())]);
        assert_eq!(one(EventKind::Modify(ModifyKind::Metadata(MetadataKind::Any)), m), []);
        assert_eq!(one(EventKind::Create(CreateKind::File), m), []);
        for other in
            ["/works/m.plan.toml", "/works/.m.model.toml.swp", "/works/.git/m.model.toml", "/else/m.model.toml"]
        {
            assert_eq!(one(closed, other), [], "{other}");
        }
        assert_eq!(one(EventKind::Remove(RemoveKind::Folder), "/works"), [Hint::Rescan]);
    }

    #[test]
    fn lost_events_and_used_up_limits_are_told() {
        let lost = notify::Event::new(EventKind::Other).set_flag(Flag::Rescan);
        assert_eq!(hints(Path::new("/works"), Ok(lost)), [Hint::Rescan]);
        let full = notify::Error::new(ErrorKind::MaxFilesWatch);
        assert!(matches!(&hints(Path::new("/"), Err(full))[..], [Hint::Trouble(t)] if t.contains("max_user_watches")));
        let many = notify::Error::io(std::io::Error::from_raw_os_error(24));
        assert!(told(&many).contains("max_user_instances"));
    }
}
