//! Partial and odd writes.

use std::collections::BTreeSet;
use std::fs::{self, File};
use std::io::Write;
use std::os::unix::fs::{MetadataExt, PermissionsExt};
use std::os::unix::net::UnixListener;
use std::path::Path;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::{Duration, UNIX_EPOCH};

use millreeve::model::meaning::Meaning;
use millreeve::model::read;
use millreeve::plan::text;
use millreeve::store::atomic::is_temp;

use crate::lab::{Tampered, cannot};
use crate::support::{Works, aim, identity, pause, tiles, wait_until, write};

fn meaning(model: &str) -> Option<Meaning> {
    read::text(Path::new("m.model.toml"), model.as_bytes()).ok().map(|reading| Meaning::of(&reading.model))
}

#[test]
fn a1_a_save_that_empties_the_file_first() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let mut file = File::create(works.model("m")).unwrap();
    daemon.wait_events(&works);
    file.write_all(tiles(2).as_bytes()).unwrap();
    drop(file);
    daemon.wait_current("m", aim(2));
    daemon.wait_scan(&works);
    daemon.stop();
    assert_eq!(daemon.told("m").len(), 2, "{:#?}", daemon.objects);
    assert!(daemon.log.iter().all(|line| !line.contains("WARN")), "{:#?}", daemon.log);
    works.check();
}

#[test]
fn a2_a_slow_writer() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let model = tiles(2);
    let mut file = File::create(works.model("m")).unwrap();
    for chunk in model.as_bytes().chunks(model.len() / 5 + 1) {
        file.write_all(chunk).unwrap();
        file.sync_data().unwrap();
        pause(80);
    }
    drop(file);
    daemon.wait_current("m", aim(2));
    daemon.wait_events(&works);
    assert_eq!(daemon.told("m").len(), 2, "{:#?}", daemon.objects);
    works.check();
}

#[test]
fn a3_a_cut_that_is_a_whole_model_in_itself() {
    let extra =
        "[activities.rim]\nprice = 2\nuses = { kiln = 0.1 }\n[activities.edge]\nprice = 1\nuses = { kiln = 2 }\n";
    let whole = format!("{}{extra}", tiles(7));
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let first = works.plan_text("m");
    let mut cuts = BTreeSet::new();
    let mut file = File::create(works.model("m")).unwrap();
    for line in whole.split_inclusive('\n') {
        assert_eq!(works.plan_text("m"), first);
        file.write_all(line.as_bytes()).unwrap();
        daemon.wait_events(&works);
        cuts.insert(meaning(&fs::read_to_string(works.model("m")).unwrap()).map(|cut| cut.to_string()));
    }
    assert!(cuts.iter().flatten().count() >= 3, "several cuts are models: {cuts:?}");
    drop(file);
    daemon.wait("the whole", |object| object["model"] == "m");
    assert_eq!(text::read(&works.plan_text("m")).unwrap().plan.answers, meaning(&whole).unwrap());
    works.check();
}

#[test]
fn a4_an_edit_between_reading_and_publishing() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let Some(slow) = Tampered::calls(&works, &daemon, "fsync", "delay_enter=300000") else {
        // `saves_in_a_burst_make_one_run_and_one_waiting` has it in the dispatcher.
        return cannot("strace, to make a write slow");
    };
    works.save("m", &tiles(2));
    // The plan of what was read is being written.
    let writing = || fs::read_dir(works.root()).unwrap().flatten().any(|entry| is_temp(&entry.file_name()));
    wait_until("a plan being written", writing);
    works.save("m", &tiles(3));
    daemon.wait_current("m", aim(3));
    drop(slow);
    daemon.wait_scan(&works);
    let aims = daemon.aims("m");
    assert!(aims == [aim(1), aim(2), aim(3)] || aims == [aim(1), aim(3)], "{aims:?}");
    works.check();
}

/// Reads plan and note over and over until told to stop, and fails if one is there and not whole.
fn reader(works: &Works, stop: &Arc<AtomicBool>) -> std::thread::JoinHandle<usize> {
    let (plan, note, stop) = (works.plan("m"), works.note("m"), stop.clone());
    std::thread::spawn(move || {
        let mut read = 0;
        while !stop.load(Ordering::Acquire) {
            if let Ok(found) = fs::read_to_string(&plan) {
                assert!(text::read(&found).unwrap().sealed, "{found}");
                read += 1;
            }
            if let Ok(found) = fs::read_to_string(&note) {
                assert!(millreeve::plan::note::speaks_of(&found).is_some(), "{found}");
                assert!(found.ends_with('\n'), "{found}");
            }
            // The daemon, too, needs a processor.
            pause(1);
        }
        read
    })
}

#[test]
fn a9_thirty_saves_in_a_second() {
    let (works, mut daemon) = Works::kept(&[("m", 100)]);
    let stop = Arc::new(AtomicBool::new(false));
    let reader = reader(&works, &stop);
    for save in 101..=130 {
        works.save("m", &tiles(save));
        pause(30);
    }
    daemon.wait_current("m", aim(130));
    daemon.wait_scan(&works);
    stop.store(true, Ordering::Release);
    assert!(reader.join().unwrap() > 0);
    let told = daemon.told("m");
    assert!(told.len() <= 31, "{}", told.len());
    let aims: Vec<_> = told.iter().map(|object| object["aim"].as_f64().unwrap()).collect();
    let saved: Vec<_> = (100..=130).map(aim).collect();
    assert!(aims.iter().all(|aim| saved.contains(aim)), "a plan of something never saved: {aims:?}");
    assert!(aims.is_sorted(), "an older version after a newer one: {aims:?}");
    assert_eq!(aims.last(), Some(&aim(130)));
    works.check();
}

#[test]
fn a10_the_same_bytes_again() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let before = [works.plan("m"), works.note("m")].map(|path| identity(&path));
    for second in 0..100 {
        let file = File::options().append(true).open(works.model("m")).unwrap();
        file.set_modified(UNIX_EPOCH + Duration::from_secs(second)).unwrap();
    }
    fs::set_permissions(works.model("m"), fs::Permissions::from_mode(0o600)).unwrap();
    works.save("m", &tiles(1));
    daemon.wait_scan(&works);
    assert_eq!(daemon.solves("m"), 1, "{:#?}", daemon.told("m"));
    assert_eq!([works.plan("m"), works.note("m")].map(|path| identity(&path)), before);
    works.check();
}

#[test]
fn a11_a_file_older_than_the_one_it_replaces() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let older = works.outside("older");
    write(&older, tiles(2));
    File::options()
        .append(true)
        .open(&older)
        .unwrap()
        .set_modified(UNIX_EPOCH + Duration::from_secs(978_307_200))
        .unwrap();
    fs::rename(&older, works.model("m")).unwrap();
    daemon.wait_current("m", aim(2));
    works.check();
}

#[test]
fn a13_byte_order_marks_line_ends_and_what_is_no_text() {
    let works = Works::new(&[("plain", &tiles(5))]);
    write(&works.model("windows"), format!("\u{feff}{}", tiles(5).replace('\n', "\r\n")));
    let utf16: Vec<u8> = [0xfeff].into_iter().chain(tiles(5).encode_utf16()).flat_map(u16::to_le_bytes).collect();
    let bad: [(&str, Vec<u8>, &str); 4] = [
        ("lone-cr", tiles(5).replace('\n', "\r").into_bytes(), "line"),
        ("utf16", utf16, "UTF-16"),
        ("nul", tiles(5).replace("price", "pri\0ce").into_bytes(), "NUL"),
        ("invalid", [tiles(5).as_bytes(), b"# \xff\xfe\n"].concat(), "UTF-8"),
    ];
    for (name, bytes, _) in &bad {
        write(&works.model(name), bytes);
    }
    let mut daemon = works.keep();
    daemon.wait_told(&["plain", "windows", "lone-cr", "utf16", "nul", "invalid"]);
    let answers = |name| text::read(&works.plan_text(name)).unwrap().plan.answers;
    assert_eq!(answers("plain"), answers("windows"));
    for (name, _, word) in &bad {
        let told = daemon.told(name);
        assert_eq!(told.len(), 1, "{name}: {told:#?}");
        let message = format!("{} {}", told[0]["faults"][0]["message"], told[0]["faults"][0]["help"]);
        assert!(message.contains(word) && !message.contains('\n'), "{name}: {message}");
        assert!(!works.plan(name).exists());
    }
    works.check();
}

#[test]
fn a14_what_is_no_file_or_has_no_end() {
    let works = Works::new(&[("m", &tiles(1))]);
    let mode = rustix::fs::Mode::RUSR | rustix::fs::Mode::WUSR;
    rustix::fs::mknodat(rustix::fs::CWD, works.model("pipe"), rustix::fs::FileType::Fifo, mode, 0).unwrap();
    let _socket = UnixListener::bind(works.model("socket")).unwrap();
    std::os::unix::fs::symlink("/dev/zero", works.model("zero")).unwrap();
    fs::create_dir(works.model("folder")).unwrap();
    File::create(works.model("vast")).unwrap().set_len(5 << 30).unwrap();
    let mut daemon = works.keep();
    daemon.wait_told(&["m", "vast"]);
    daemon.wait_scan(&works);
    daemon.stop();
    assert_eq!(daemon.aims("m"), [aim(1)]);
    let vast = daemon.told("vast");
    assert_eq!((vast.len(), &vast[0]["standing"]), (1, &"held".into()), "{vast:#?}");
    assert!(vast[0]["held"].as_str().unwrap().contains("larger than 16 MiB"), "{vast:#?}");
    for name in ["pipe", "socket", "zero", "folder"] {
        assert!(daemon.told(name).is_empty());
        let mentions = daemon.log.iter().filter(|line| line.contains(&format!("{name}.model.toml is a "))).count();
        assert_eq!(mentions, 1, "{name}: {:#?}", daemon.log);
        assert!(!works.plan(name).exists());
    }
    // A file that outgrows the cap while it is read is tested beside the reader.
    assert_eq!(fs::metadata(works.model("vast")).unwrap().size(), 5 << 30);
    works.check();
}
