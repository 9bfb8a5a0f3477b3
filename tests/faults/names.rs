//! Names of all kinds, and plans that are not what they were: modes, owners, links, folders.

use std::ffi::OsStr;
use std::fs;
use std::os::unix::ffi::OsStrExt;
use std::os::unix::fs::{MetadataExt, PermissionsExt};
use std::path::PathBuf;
use std::process::Command;

use crate::lab::{Mount, PROGRAM, as_a_user_with_rights, cannot, does};
use crate::support::{Daemon, Works, aim, identity, tiles, within, write};

#[test]
fn b6_b7_h5_names_of_all_kinds() {
    let longest = format!("{}.model.toml", "n".repeat(244));
    let names: [&[u8]; 12] = [
        "caf\u{e9}.model.toml".as_bytes(),
        "cafe\u{301}.model.toml".as_bytes(),
        b"m (copy).model.toml",
        b"m.sync-conflict-20270104-083102.model.toml",
        b"-x.model.toml",
        b"two\nlines.model.toml",
        b"2027-01-04T00:00:00Z INFO forged\x1b[2J.model.toml",
        b"q'uo\"te$(x)`y`.model.toml",
        b"not\xff\xfeutf8.model.toml",
        b"CON.model.toml",
        b"tab\there.model.toml",
        longest.as_bytes(),
    ];
    let works = Works::new(&[]);
    let path = |name: &[u8], ending: &str| -> PathBuf {
        let stem = name.strip_suffix(b".model.toml").unwrap();
        works.root().join(OsStr::from_bytes(&[stem, ending.as_bytes()].concat()))
    };
    let mut daemon = works.keep();
    for (name, capacity) in names.iter().zip(1..) {
        write(&path(name, ".model.toml"), tiles(capacity));
    }
    while daemon.objects.len() < names.len() {
        daemon.wait("each", |object| object["standing"] == "current");
    }
    for (name, capacity) in names.iter().zip(1..) {
        let plan = fs::read_to_string(path(name, ".plan.toml")).unwrap();
        let plan = millreeve::plan::text::read(&plan).unwrap().plan;
        assert_eq!((plan.standing.word(), plan.aim), ("current", aim(capacity)), "{:?}", String::from_utf8_lossy(name));
        assert!(path(name, ".note.md").exists());
    }
    daemon.stop();
    for line in &daemon.log {
        assert!(!line.contains(char::is_control) && line.starts_with("20"), "{line:?}");
        assert!(line.len() <= 2048, "{}", line.len());
    }
    // Each lies where its own model does, and nowhere else.
    let outputs = |ending: &str| {
        let entries = fs::read_dir(works.root()).unwrap().flatten();
        entries.filter(|entry| entry.file_name().as_bytes().ends_with(ending.as_bytes())).count()
    };
    assert_eq!((outputs(".plan.toml"), outputs(".note.md")), (names.len(), names.len()));
    let mut again = works.keep();
    while again.objects.len() < names.len() {
        again.wait("each", |object| object["standing"] == "current" && object["start"].is_null());
    }
}

#[test]
fn g6_a_folder_that_is_immutable() {
    let works = Works::new(&[]);
    let sub = works.path("sub");
    fs::create_dir(&sub).unwrap();
    works.save("sub/m", &tiles(1));
    let mut daemon = works.keep();
    daemon.wait_current("m", aim(1));
    let plan = identity(&works.plan("sub/m"));
    if !does("chattr", &["+i".as_ref(), sub.as_os_str()]) {
        return cannot("chattr");
    }
    works.save("sub/m", &tiles(2));
    let failed = daemon.wait_standing("m", "failed");
    assert!(failed["error"].as_str().unwrap().contains("permission denied"), "{failed}");
    assert_eq!(identity(&works.plan("sub/m")), plan);
    assert!(does("chattr", &["-i".as_ref(), sub.as_os_str()]));
    daemon.wait_current("m", aim(2));
    assert_eq!(daemon.logged("permission denied"), 1, "{:#?}", daemon.log);
    works.check();
}

#[test]
fn g6_a_file_system_that_turns_read_only() {
    let works = Works::new(&[("good", &tiles(9))]);
    let sub = works.path("sub");
    fs::create_dir(&sub).unwrap();
    let Some(mount) = Mount::small(&sub, "size=1m") else {
        return cannot("mounting");
    };
    works.save("sub/m", &tiles(1));
    let mut daemon = works.keep();
    daemon.wait_current("m", aim(1));
    daemon.signal(rustix::process::Signal::STOP);
    works.save("sub/m", &tiles(2));
    mount.remount("ro");
    daemon.signal(rustix::process::Signal::CONT);
    let failed = daemon.wait_standing("m", "failed");
    assert!(failed["error"].as_str().unwrap().contains("the file system is read-only"), "{failed}");
    works.save("good", &tiles(10));
    daemon.wait_current("good", aim(10));
    assert_eq!(works.standing("sub/m"), ("current".to_owned(), aim(1)));
    mount.remount("rw");
    daemon.wait_current("m", aim(2));
    assert_eq!(daemon.logged("read-only"), 1, "{:#?}", daemon.log);
    works.check();
    daemon.stop();
}

#[test]
fn g7_models_that_may_not_be_read() {
    let works = Works::new(&[]);
    let sub = works.path("sub");
    fs::create_dir(&sub).unwrap();
    works.save("m", &tiles(1));
    works.save("sub/n", &tiles(2));
    let mut keep = as_a_user_with_rights(&works, &[&sub]);
    let mut daemon = Daemon::spawn(&mut keep);
    daemon.wait_told(&["m", "n"]);
    let mode = |path: PathBuf, mode| fs::set_permissions(path, fs::Permissions::from_mode(mode)).unwrap();
    let before = [works.plan("m"), works.plan("sub/n")].map(|path| identity(&path));
    works.save("m", &tiles(3));
    daemon.wait_current("m", aim(3));
    let plan = identity(&works.plan("m"));
    mode(works.model("m"), 0o000);
    let failed = daemon.wait_standing("m", "failed");
    assert!(failed["error"].as_str().unwrap().contains("no permission to read it"), "{failed}");
    // Its names can be read, but nothing behind them.
    mode(sub.clone(), 0o444);
    daemon.wait_log("sub cannot be read: permission denied");
    daemon.wait_scan(&works);
    assert_eq!(identity(&works.plan("m")), plan);
    mode(sub, 0o755);
    assert_eq!(identity(&works.plan("sub/n")), before[1], "nothing was taken for removed");
    mode(works.model("m"), 0o644);
    daemon.wait_current("m", aim(3));
    works.save("sub/n", &tiles(4));
    daemon.wait_current("n", aim(4));
    assert_eq!(identity(&works.plan("m")), plan);
    assert_eq!(
        (daemon.logged("no permission to read it"), daemon.logged("sub cannot be read")),
        (1, 1),
        "{:#?}",
        daemon.log
    );
    works.check();
}

#[test]
fn g8_plans_with_another_mode_another_name_or_no_file_at_all() {
    let (works, mut daemon) = Works::kept(&[("mode", 1), ("linked", 2)]);
    fs::set_permissions(works.plan("mode"), fs::Permissions::from_mode(0o440)).unwrap();
    fs::hard_link(works.plan("linked"), works.outside("archive")).unwrap();
    let archived = fs::read_to_string(works.outside("archive")).unwrap();
    for (name, capacity) in [("mode", 3), ("linked", 4)] {
        works.save(name, &tiles(capacity));
        daemon.wait_current(name, aim(capacity));
    }
    assert_eq!(fs::metadata(works.plan("mode")).unwrap().mode() & 0o7777, 0o440);
    assert_eq!(
        fs::read_to_string(works.outside("archive")).unwrap(),
        archived,
        "another name of the old plan keeps it"
    );
    fs::create_dir(works.plan("folder")).unwrap();
    works.save("folder", &tiles(5));
    let failed = daemon.wait_standing("folder", "failed");
    assert!(failed["error"].as_str().unwrap().contains("is a folder: it is left alone; move it away"), "{failed}");
    fs::remove_dir(works.plan("folder")).unwrap();
    works.save("folder", &tiles(6));
    daemon.wait_current("folder", aim(6));
    works.check();
}

#[test]
fn g9_any_umask() {
    for (umask, mode) in [("0000", 0o644), ("0027", 0o640), ("0777", 0o600)] {
        let works = Works::new(&[("m", &tiles(1))]);
        let script = format!("umask {umask}; exec \"$0\" \"$@\"");
        let mut shell = within(Command::new("sh"), &["-c", &script, PROGRAM, "--json", "once"]);
        let ended = shell.arg(works.root()).output().unwrap();
        // The folder of the state is made under that umask too: who sets 0777 must be the superuser.
        if ended.status.success() {
            for path in [works.plan("m"), works.note("m")] {
                assert_eq!(fs::metadata(&path).unwrap().mode() & 0o7777, mode, "{umask} {path:?}");
            }
            works.check();
        } else {
            assert!(
                umask == "0777" && String::from_utf8_lossy(&ended.stderr).contains("permission denied"),
                "{ended:?}"
            );
        }
    }
}

#[test]
fn g10_a_kept_folder_on_another_file_system_than_the_temporary_files() {
    let works = Works::new(&[]);
    let Some(_mount) = Mount::small(works.root(), "size=4m") else {
        return cannot("mounting");
    };
    works.save("m", &tiles(1));
    let mut daemon = works.keep();
    daemon.wait_current("m", aim(1));
    works.check();
}

#[test]
fn h3_names_in_a_model_form_no_path() {
    let works = Works::new(&[]);
    let longest = "n".repeat(200);
    let hostile = ["../../up", "/tmp/absolute", "a/b", ".", "..", "CON", longest.as_str()];
    let mut model = "format = 1\ntitle = \"../title\"\n[resources.kiln]\ncapacity = 5\n".to_owned();
    for name in hostile {
        model.push_str(&format!("[activities.\"{name}\"]\nprice = 3\nuses = {{ kiln = 1 }}\n"));
    }
    let mut daemon = works.keep();
    works.save("m", &model);
    daemon.wait("a word of it", |object| object["model"] == "m");
    daemon.wait_scan(&works);
    daemon.stop();
    let mut found: Vec<_> =
        fs::read_dir(works.root()).unwrap().flatten().map(|entry| entry.file_name().into_string().unwrap()).collect();
    found.retain(|name| !name.starts_with("mark-"));
    let ours = [".millreeve", "m.model.toml", "m.note.md", "m.plan.toml"];
    assert!(found.iter().all(|name| ours.contains(&name.as_str())), "{found:?}");
    let outside: Vec<_> = fs::read_dir(works.outside("")).unwrap().flatten().map(|entry| entry.file_name()).collect();
    assert!(outside.iter().all(|name| name == "works" || name.as_bytes().starts_with(b"mark-")), "{outside:?}");
}
