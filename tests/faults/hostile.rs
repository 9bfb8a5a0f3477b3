//! Hostile models and hostile names, through the program: bounded answers, nothing that steers a terminal, and no other model held up.

use std::process::Command;

use millreeve::model::read::{MOST_ACTIVITIES, MOST_BYTES, MOST_LINES};
use millreeve::plan::text;

use crate::support::{Works, aim, tiles, write};

/// Models that no reader should take for one: name, text.
fn hostile() -> Vec<(&'static str, Vec<u8>)> {
    let model = |body: &str| format!("format = 1\n{body}\n").into_bytes();
    let activity = |body: &str| model(&format!("[resources.kiln]\n[activities.tile]\n{body}"));
    let long = "k".repeat(4_000_000);
    let many = |count: usize, line: fn(usize) -> String| (0..count).map(line).collect::<String>();
    vec![
        ("i1-brackets", model(&format!("x = {}", "[".repeat(1_000_000)))),
        ("i1-braces", model(&format!("x = {}", "{a=".repeat(1_000_000)))),
        ("i2-dotted", model(&format!("x{} = 1", ".a".repeat(100_000)))),
        ("i2-header", model(&format!("[{}]", vec!["a"; 100_000].join(".")))),
        ("i3-elements", model(&format!("x = [{}]", "1,".repeat(2_000_000)))),
        ("i3-keys", model(&many(400_000, |at| format!("k{at} = 1\n")))),
        ("i3-lines", model(&"\n".repeat(MOST_LINES))),
        ("i3-newlines", vec![b'\n'; MOST_BYTES]),
        ("i3-activities", model(&many(MOST_ACTIVITIES + 1, |at| format!("[activities.a{at}]\n")))),
        ("i4-key", model(&format!("{long} = 1"))),
        ("i4-text", model(&format!("title = \"{long}\""))),
        ("i4-line", model(&format!("x = 1 {}", "y".repeat(1_000_000)))),
        ("i5-key-twice", activity("price = 1\nprice = 2")),
        ("i5-table-twice", activity("[activities.tile]")),
        ("i5-undefined", activity("uses = { kilm = 1 }")),
        ("i6-nan", activity("price = nan")),
        ("i6-inf", activity("price = inf")),
        ("i6-overflow", activity("price = 1e309")),
        ("i6-large", activity("price = 1e308")),
        ("i6-underflow", activity("uses = { kiln = 1e-400 }")),
        ("i6-small", activity("uses = { kiln = 5e-324 }")),
        ("i7-integer", activity("price = 9223372036854775808")),
        ("i7-digits", activity(&format!("price = {}", "9".repeat(1_000_000)))),
        ("i8-typo", activity("capcity = 1")),
        ("i9-text", activity("price = \"12\"")),
        ("i9-date", activity("price = 1979-05-27")),
        ("i9-mixed", activity("price = [1, \"2\"]")),
        ("i11-unterminated", model("title = \"never ends")),
        ("i11-garbage", (0_u8..=255).cycle().take(100_000).collect()),
        ("i12-errors", "=\n".repeat(400_000).into_bytes()),
    ]
}

/// The most that the program may say about one model, to people or to programs, in bytes.
const MOST_SAID: usize = 20 * 2048;

/// A check, with what memory it may take; far less than the file's text as a tree of any kind without caps would.
fn check(works: &Works, name: &str) -> (Option<i32>, String) {
    let limited = "ulimit -v 2000000; exec \"$0\" \"$@\"";
    let mut shell = Command::new("sh");
    shell.args(["-c", limited, env!("CARGO_BIN_EXE_millreeve"), "check"]).arg(works.model(name));
    let output = shell.output().unwrap();
    assert!(output.stderr.is_empty(), "{name}: {}", String::from_utf8_lossy(&output.stderr));
    (output.status.code(), String::from_utf8(output.stdout).unwrap())
}

#[test]
fn i1_to_i12_through_check() {
    let works = Works::new(&[]);
    for (name, bytes) in hostile() {
        write(&works.model(name), &bytes);
        let (status, out) = check(&works, name);
        assert_eq!(status, Some(1), "{name}: {out}");
        assert!(out.contains(&format!("{name}.model.toml")) && out.len() < MOST_SAID, "{name}: {}", out.len());
        assert_clean(&out);
    }
}

#[test]
fn i1_to_i12_through_keep() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let hostile = hostile();
    for (name, bytes) in &hostile {
        write(&works.model(name), bytes);
    }
    works.save("m", &tiles(2));
    daemon.wait_current("m", aim(2));
    let names: Vec<_> = hostile.iter().map(|(name, _)| *name).collect();
    daemon.wait_told(&names);
    for (name, _) in &hostile {
        let told = daemon.told(name);
        assert_eq!((told.len(), &told[0]["standing"]), (1, &"held".into()), "{told:#?}");
        assert!(told[0].to_string().len() < MOST_SAID, "{name}");
        assert!(!works.plan(name).exists(), "{name}");
        let note = works.note_text(name);
        assert!(note.len() < MOST_SAID, "{name}: {}", note.len());
    }
    assert!(daemon.log.iter().all(|line| line.len() <= 2048), "{:#?}", daemon.log);
    works.check();
}

#[test]
fn i10_names_that_look_alike() {
    let works = Works::new(&[]);
    // Latin and Cyrillic `a`; composed and decomposed `é`.
    let twins =
        "[activities.\"caf\u{e9}\"]\n[activities.\"cafe\u{301}\"]\n[activities.tap]\n[activities.\"t\u{430}p\"]\n";
    works.save("m", &format!("format = 1\n{twins}"));
    let (status, out, err) = works.run(&["--json", "check", "."]);
    let checked: serde_json::Value = serde_json::from_str(&out).unwrap();
    let odd = checked["warnings"].as_array().unwrap().len() + checked["faults"].as_array().unwrap().len();
    assert!(odd > 0, "{status:?} {out} {err}");
    works.save("m", "format = 1\n[activities.\"ti\u{202e}le\"]\n");
    let (status, out, _) = works.run(&["check", "."]);
    assert_eq!(status, Some(1), "{out}");
    assert_clean(&out);
    assert!(out.contains("\\u{202e}"), "{out}");
}

/// Nothing steers a terminal, turns a line round or forges one.
fn assert_clean(text: &str) {
    let steers =
        |c: &char| c.is_control() && *c != '\n' || matches!(c, '\u{202a}'..='\u{202e}' | '\u{2066}'..='\u{2069}');
    assert_eq!(text.chars().find(steers), None, "{text:?}");
}

/// Everything that could be mistaken for something else, as a TOML text.
const NASTY: &str = r"=cmd|' /C x'!A0 \u001b]0;x\u0007 \r\n2027-01-01T00:00:00Z INFO forged \u202Eback\u2066 \u009b31m <script>alert(1)</script> ]]> `|` [a](http://x) \u0085";

#[test]
fn j1_names_that_steer_a_terminal() {
    let works = Works::new(&[]);
    let name = "a\u{1b}]0;x\u{7}\r\nforged \u{202e}b\u{2066} \u{9b}31m";
    let labelled = tiles(1).replace("capacity", &format!("label = \"{NASTY}\"\nunit = \"{NASTY}\"\ncapacity"));
    works.save(
        name,
        &labelled.replace("[resources", &format!("title = \"{NASTY}\"\ncurrency = \"\\u001b\"\n[resources")),
    );
    works.save("bad", &format!("format = 1\n\"{NASTY}\" = 1\n[activities.\"{NASTY}\"]\n"));
    let file = works.model(name);
    let file = file.to_str().unwrap();
    for arguments in [&["check", "."] as &[&str], &["--json", "check", "."], &["once", "."], &["--json", "once", "."]] {
        let (status, out, err) = works.run(arguments);
        assert_eq!(status, Some(1), "{arguments:?} {out} {err}");
        assert_clean(&out);
        assert_clean(&err);
    }
    for arguments in [&["show", file] as &[&str], &["--json", "show", file], &["show", file, "--why", NASTY]] {
        let (_, out, err) = works.run(arguments);
        assert!(!out.is_empty() || !err.is_empty());
        assert_clean(&out);
        assert_clean(&err);
    }
    // A daemon's log, line by line.
    let mut daemon = works.keep();
    works.save("bad", &format!("format = 1\n\"{NASTY}\" = 2\n"));
    daemon.wait_standing("bad", "held");
    daemon.wait_scan(&works);
    for line in &daemon.log {
        assert_clean(line);
        assert!(line.starts_with(|c: char| c.is_ascii_digit()) && !line.starts_with("2027-01-01T00:00:00Z"), "{line}");
    }
    works.check();
}

#[test]
fn j4_names_in_plan_and_note() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let text = format!("title = \"{NASTY}\"\ncurrency = \"{NASTY}\"\n[resources").replace("INFO", "\\\"\\\"\\\"");
    let model = tiles(2).replace("[resources", &text).replace("price", &format!("label = \"{NASTY}\"\nprice"));
    works.save("m", &model);
    daemon.wait("the plan", |object| object["model"] == "m");
    works.check();
    let read = millreeve::model::read::text(&works.model("m"), model.as_bytes()).map(|reading| reading.model.currency);
    match read {
        Ok(currency) => assert_eq!(text::read(&works.plan_text("m")).unwrap().plan.currency, currency),
        Err(faults) => panic!("{faults:?}"),
    }
    let note = works.note_text("m");
    assert_clean(&note);
    assert!(!note.contains("<script>") && !note.contains("[a](http"), "{note}");
    assert_clean(&works.plan_text("m"));
    // A spreadsheet takes what begins with = for a formula.
    let (status, out, err) = works.run(&["show", "m.model.toml", "--csv"]);
    assert_eq!(status, Some(0), "{err}");
    assert!(out.split([',', '\n']).all(|field| !field.trim_start_matches('"').starts_with('=')), "{out}");
}
