//! Opening files: what is read, and what is left alone.

use std::fs;
use std::io::{ErrorKind, Write as _};
use std::os::unix::net::UnixListener;
use std::path::Path;

use millreeve::model::read::{self, FileProblem, MOST_BYTES};
use tempfile::TempDir;

fn problem(folder: &TempDir, name: &str) -> (ErrorKind, String) {
    let error = read::file(&folder.path().join(name)).unwrap_err();
    let place = format!("{}/", folder.path().display());
    (error.kind(), error.to_string().replace(&place, ""))
}

fn told(kind: ErrorKind, text: &str) -> (ErrorKind, String) {
    (kind, text.to_owned())
}

#[test]
fn a_file_is_read_whole() {
    let folder = TempDir::new().unwrap();
    let path = folder.path().join("works.model.toml");
    fs::File::create(&path).unwrap().write_all(b"format = 1\n").unwrap();
    assert_eq!(read::file(&path).unwrap(), b"format = 1\n");
}

#[test]
fn what_is_not_there_is_told_apart() {
    let folder = TempDir::new().unwrap();
    assert_eq!(problem(&folder, "gone"), told(ErrorKind::NotFound, "gone: there is no such file"));
}

#[test]
fn links_are_not_followed() {
    let folder = TempDir::new().unwrap();
    let link = |target: &str, name: &str| std::os::unix::fs::symlink(target, folder.path().join(name)).unwrap();
    fs::File::create(folder.path().join("real")).unwrap();
    for (target, name) in [("real", "inside"), ("/etc/hosts", "outside"), ("nowhere", "dangling"), ("loop", "loop")] {
        link(target, name);
        let text = format!("{name}: a symbolic link, which is not followed; put the file itself here");
        assert_eq!(problem(&folder, name), told(ErrorKind::InvalidInput, &text));
    }
}

#[test]
fn only_files_are_opened_and_none_is_waited_for() {
    let folder = TempDir::new().unwrap();
    let at = |name: &str| folder.path().join(name);
    fs::create_dir(at("folder")).unwrap();
    let owner = rustix::fs::Mode::RUSR | rustix::fs::Mode::WUSR;
    rustix::fs::mkfifoat(rustix::fs::CWD, at("pipe"), owner).unwrap();
    let _socket = UnixListener::bind(at("socket")).unwrap();
    assert_eq!(problem(&folder, "folder"), told(ErrorKind::InvalidInput, "folder: a folder, not a file"));
    assert_eq!(problem(&folder, "pipe"), told(ErrorKind::InvalidInput, "pipe: a named pipe, not a file"));
    assert_eq!(problem(&folder, "socket"), told(ErrorKind::InvalidInput, "socket: a socket, not a file"));
    let device = read::file(Path::new("/dev/zero")).unwrap_err();
    assert_eq!(device.to_string(), "/dev/zero: a device, not a file");
}

#[test]
fn a_file_too_large_is_not_read() {
    let folder = TempDir::new().unwrap();
    let file = fs::File::create(folder.path().join("sparse")).unwrap();
    file.set_len(5 << 30).unwrap();
    let text = "sparse: larger than the 16 MiB that are read; split the model";
    assert_eq!(problem(&folder, "sparse"), told(ErrorKind::FileTooLarge, text));
    file.set_len(MOST_BYTES as u64).unwrap();
    assert_eq!(read::file(&folder.path().join("sparse")).unwrap().len(), MOST_BYTES);
}

/// The system's own files say that they are empty.
#[test]
fn a_file_is_read_to_its_end_whatever_size_was_told() {
    assert!(!read::file(Path::new("/proc/self/status")).unwrap().is_empty());
}

#[test]
fn what_may_not_be_read_is_told_apart() {
    let error = FileProblem::Forbidden("works.model.toml".into());
    assert_eq!(
        (error.kind(), error.to_string()),
        told(ErrorKind::PermissionDenied, "works.model.toml: no permission to read it")
    );
}

#[test]
fn a_name_cannot_forge_a_message() {
    let error = FileProblem::Missing("a\nb\u{1b}[31m".into());
    assert_eq!(error.to_string(), "a\\u{a}b\\u{1b}[31m: there is no such file");
}
