//! Folders that come, go, move and are mounted, and edits that no event tells of.

use std::fs::{self, File};
use std::process::Command;
use std::time::{Duration, UNIX_EPOCH};

use rustix::fs::{CWD, RenameFlags, renameat_with};
use rustix::process::Signal;

use crate::lab::{Mount, PROGRAM, cannot};
use crate::support::{Daemon, Works, aim, command, identity, tiles, wait_until, within, write};

#[test]
fn a6_a_writer_through_a_mapping() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let script = "import mmap,os,sys\nf=os.open(sys.argv[1],os.O_RDWR)\nm=mmap.mmap(f,0)\nos.close(f)\n\
                  at=m.find(b'capacity =     1')\nm[at+15:at+16]=b'7'\nm.flush()\nm.close()\n";
    let Ok(mapped) = Command::new("python3").args(["-c", script]).arg(works.model("m")).status() else {
        return cannot("python3, to write through a mapping");
    };
    assert!(mapped.success());
    daemon.wait_current("m", aim(7));
    works.check();
}

#[test]
fn a7_a8_hard_links_from_and_to_the_outside() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    fs::hard_link(works.model("m"), works.outside("m")).unwrap();
    write(&works.outside("m"), tiles(2));
    daemon.wait_current("m", aim(2));
    write(&works.outside("n"), tiles(3));
    fs::hard_link(works.outside("n"), works.model("n")).unwrap();
    daemon.wait_current("n", aim(3));
    works.check();
}

#[test]
fn a12_the_same_size_and_the_same_times() {
    let works = Works::new(&[("m", &tiles(1))]);
    let mut daemon = Daemon::spawn(command(&["--json", "keep"]).arg(works.root()).env("MILLREEVE_WATCH_BY", "poll"));
    daemon.wait_current("m", aim(1));
    let time = UNIX_EPOCH + Duration::from_secs(1_700_000_000);
    for capacity in [2, 3] {
        works.save("m", &tiles(capacity));
        File::options().append(true).open(works.model("m")).unwrap().set_modified(time).unwrap();
        daemon.wait_current("m", aim(capacity));
    }
    // Polling was asked for, so nobody is warned of it.
    assert_eq!((daemon.logged("found by scanning, as the settings say"), daemon.logged("WARN")), (1, 0));
    works.check();
}

#[test]
fn b4_two_models_exchanged() {
    let (works, mut daemon) = Works::kept(&[("m", 1), ("n", 2)]);
    renameat_with(CWD, works.model("m"), CWD, works.model("n"), RenameFlags::EXCHANGE).unwrap();
    daemon.wait_current("m", aim(2));
    wait_until("the other one", || works.standing("n") == ("current".to_owned(), aim(1)));
    daemon.wait_grace(&works);
    works.check();
}

#[test]
fn d1_the_folder_removed_and_made_again() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    // The daemon may be writing there.
    wait_until("the removal", || fs::remove_dir_all(works.root()).is_ok());
    daemon.wait_log("cannot be read; its plans are left as they are until it can");
    fs::create_dir(works.root()).unwrap();
    works.save("m", &tiles(2));
    daemon.wait_current("m", aim(2));
    // Events come from the new folder, and it is ours: another daemon is refused.
    daemon.wait_events(&works);
    assert_eq!(works.run(&["keep", "."]).0, Some(3));
    daemon.stop();
    assert_eq!((daemon.logged("cannot be read"), daemon.logged("the folder is back")), (1, 1), "{:#?}", daemon.log);
    works.check();
}

#[test]
fn d2_another_folder_in_its_place() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let old = works.outside("old");
    let before = identity(&works.plan("m"));
    fs::rename(works.root(), &old).unwrap();
    fs::create_dir(works.root()).unwrap();
    works.save("m", &tiles(2));
    daemon.wait_current("m", aim(2));
    write(&old.join("m.model.toml"), tiles(3));
    daemon.wait_scan(&works);
    assert_eq!(identity(&old.join("m.plan.toml")), before, "nothing is written into the folder that was moved away");
    assert_eq!(daemon.aims("m"), [aim(1), aim(2)]);
    works.check();
}

#[test]
fn d3_the_folder_unmounted_and_mounted_again() {
    let works = Works::new(&[]);
    let disk = works.outside("disk");
    fs::create_dir(&disk).unwrap();
    let Some(mount) = Mount::of(&disk, works.root()) else {
        // The dispatcher is shown an empty folder in `a_bare_mount_point_is_not_claimed_and_what_comes_back_is`.
        return cannot("mounting");
    };
    works.save("m", &tiles(1));
    let mut daemon = works.keep();
    daemon.wait_current("m", aim(1));
    let plan = identity(&works.plan("m"));
    drop(mount);
    daemon.wait_log("in case it was unmounted, nothing is taken for removed");
    write(&disk.join("n.model.toml"), tiles(2));
    assert_eq!(fs::read_dir(works.root()).unwrap().count(), 0, "nothing is written into a bare mount point");
    let _mount = Mount::of(&disk, works.root()).unwrap();
    daemon.wait_current("n", aim(2));
    daemon.wait_grace(&works);
    assert_eq!((identity(&works.plan("m")), daemon.told("m").len()), (plan, 1), "{:#?}", daemon.told("m"));
    assert_eq!((daemon.logged("unmounted"), daemon.logged("the folder is back")), (1, 1), "{:#?}", daemon.log);
    daemon.stop();
    works.check();
}

#[test]
fn d4_models_written_at_once_into_new_folders() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let names: Vec<_> = (0..60).map(|number| format!("new-{number}/n{number}")).collect();
    for (name, capacity) in names.iter().zip(100..) {
        fs::create_dir_all(works.model(name).parent().unwrap()).unwrap();
        works.save(name, &tiles(capacity));
    }
    let models: Vec<_> = (0..60).map(|number| format!("n{number}")).collect();
    daemon.wait_told(&models.iter().map(String::as_str).collect::<Vec<_>>());
    // From now on they are watched: an edit needs no scan to be found, and has one that would come too late to tell.
    works.save("new-59/n59", &tiles(7));
    daemon.wait_current("n59", aim(7));
    works.check();
}

#[test]
fn d5_a_folder_with_models_moved_in_and_out() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    fs::create_dir_all(works.outside("pack/inner")).unwrap();
    write(&works.outside("pack/a.model.toml"), tiles(2));
    write(&works.outside("pack/inner/b.model.toml"), tiles(3));
    fs::rename(works.outside("pack"), works.path("pack")).unwrap();
    daemon.wait_told(&["a", "b"]);
    fs::rename(works.path("pack"), works.path("renamed")).unwrap();
    // Plans have moved along; the models need no solve, whatever the name of their folder.
    let told = daemon.wait("a under its new path", |object| object["path"] == "renamed/a.model.toml");
    assert_eq!((&told["standing"], &told["pivots"]), (&"current".into(), &0.into()), "{told}");
    works.save("renamed/inner/b", &tiles(4));
    daemon.wait_current("b", aim(4));
    works.check();
}

#[test]
fn d7_a_network_file_system() {
    let works = Works::new(&[("m", &tiles(1))]);
    // `f_type`, the first word of what `statfs` answers, as NFS has it.
    let traced = |when: &str| {
        let inject = format!("inject=statfs:poke_exit=@arg2=6969000000000000{when}");
        let arguments =
            ["-D", "-f", "-qq", "-o", "/dev/null", "-e", "trace=statfs", "-e", &inject, PROGRAM, "--json", "keep"];
        let mut traced = within(Command::new("strace"), &arguments);
        traced.arg(works.root());
        traced
    };
    let Ok(refused) = traced("").output() else {
        // Which file systems are taken for such is tested beside the list of them.
        return cannot("strace, to answer for the system");
    };
    let told = String::from_utf8_lossy(&refused.stderr).into_owned();
    if !told.contains("where the daemon's state cannot lie") && !told.contains("keeping") {
        return cannot("tracing");
    }
    assert_eq!(refused.status.code(), Some(2), "{told}");
    assert!(told.contains("is on a network file system (NFS)") && told.contains("MILLREEVE_STATE_DIR"), "{told}");
    // The first two questions are about the state, which may lie elsewhere.
    let mut daemon = Daemon::spawn(&mut traced(":when=3+"));
    daemon.wait_current("m", aim(1));
    daemon.wait_log("there are no file events: the folder is on NFS");
    works.save("m", &tiles(2));
    daemon.wait_current("m", aim(2));
    assert_eq!(daemon.logged("no file events"), 1, "{:#?}", daemon.log);
    works.check();
}

#[test]
fn d9_a_folder_full_of_other_files() {
    let works = Works::new(&[("m", &tiles(1))]);
    (0..20_000).for_each(|number| drop(File::create(works.path(&format!("part-{number}.txt"))).unwrap()));
    let mut daemon = works.keep();
    daemon.wait_current("m", aim(1));
    // One watch for the folder, none for a file.
    let folder = format!("/proc/{}/fdinfo", daemon.pid().as_raw_nonzero());
    let told = fs::read_dir(folder).unwrap().flatten().filter_map(|entry| fs::read_to_string(entry.path()).ok());
    assert_eq!(told.map(|told| told.matches("inotify wd:").count()).sum::<usize>(), 1);
}

#[test]
fn e8_g5_stopped_while_the_system_loses_events() {
    let models = ["a", "b", "c", "d"];
    let (works, mut daemon) = Works::kept(&models.map(|name| (name, 1)));
    let queue: usize = fs::read_to_string("/proc/sys/fs/inotify/max_queued_events").unwrap().trim().parse().unwrap();
    if queue > 100_000 {
        return cannot("filling a queue of this length in reasonable time");
    }
    daemon.signal(Signal::STOP);
    fs::hard_link(works.model("a"), works.outside("a")).unwrap();
    // Three events a save.
    for save in 0..queue / 2 {
        works.save(models[save % 4], &tiles(2 + u32::try_from(save % 9000).unwrap()));
    }
    write(&works.outside("a"), tiles(99_000));
    for model in &models[1..] {
        works.save(model, &tiles(99_000));
    }
    daemon.signal(Signal::CONT);
    let mut missing = models.to_vec();
    while !missing.is_empty() {
        let told = daemon.wait("the last save of each", |object| object["aim"] == aim(99_000));
        missing.retain(|&model| told["model"] != model);
    }
    daemon.wait_scan(&works);
    wait_until("word of the loss", || {
        let (status, out, err) = works.run(&["--json", "keep", ".", "--status"]);
        assert_eq!(status, Some(0), "{err}");
        serde_json::from_str::<serde_json::Value>(&out).unwrap()["done"]["events_lost"].as_u64() > Some(0)
    });
    let planned = daemon.objects.iter().filter(|object| object["model"] == "b").count();
    assert!(planned < 10, "saves that nobody could see are not planned one by one: {planned}");
    works.check();
}

#[test]
fn g4_times_that_cannot_be() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    for (seconds, capacity) in [(0, 2), (4_290_000_000, 3)] {
        let beside = works.path("beside");
        write(&beside, tiles(capacity));
        let file = File::options().append(true).open(&beside).unwrap();
        file.set_modified(UNIX_EPOCH + Duration::from_secs(seconds)).unwrap();
        fs::rename(&beside, works.model("m")).unwrap();
        daemon.wait_current("m", aim(capacity));
    }
    daemon.stop();
    let mut daemon = works.keep();
    daemon.wait_current("m", aim(3));
    works.check();
}
