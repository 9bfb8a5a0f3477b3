//! Files made by accident or malice: one bounded answer, never a panic.

use super::{bad, read};
use millreeve::model::Faults;
use millreeve::model::read::{MOST_ACTIVITIES, MOST_BYTES, MOST_LINES};

/// The most that may be said about one fault, in bytes.
const LONGEST: usize = 2048;

fn told(bytes: &[u8]) -> String {
    bounded(&bad(bytes))
}

fn bounded(faults: &Faults) -> String {
    for fault in &faults.reported {
        assert!(fault.terminal(false).to_string().len() <= LONGEST);
        assert!(fault.line().to_string().len() <= LONGEST);
        assert!(serde_json::to_string(fault).unwrap().len() <= LONGEST);
    }
    faults.terminal(false).to_string()
}

#[test]
fn bytes_that_are_no_text() {
    let utf16: Vec<u8> = "format = 1\n".encode_utf16().flat_map(u16::to_le_bytes).collect();
    let marked: Vec<u8> =
        [0xfe, 0xff].into_iter().chain("format = 1\n".encode_utf16().flat_map(u16::to_be_bytes)).collect();
    let cases: [&[u8]; 9] = [
        b"",
        b"  \n\t\n",
        b"\xef\xbb\xbf",
        &utf16,
        &marked,
        b"format = 1\ntitle = \"K\xf6ln\"\n",
        b"format = 1\ntitle = \"a\x00b\"\n",
        b"\xef\xbb\xbfformat = 1\rtitle = \"a\"\r",
        b"\x7fELF\x02\x01\x01\x00\x00",
    ];
    let told: Vec<String> = cases.iter().map(|bytes| told(bytes)).collect();
    insta::assert_snapshot!(told.join("\n"));
}

#[test]
fn nesting_without_end() {
    let deep =
        |open: &str, count| told(format!("format = 1\ntitle = \"t\"\nconstant = {}", open.repeat(count)).as_bytes());
    let header = told(format!("format = 1\n[{}]", vec!["a"; 100_000].join(".")).as_bytes());
    let dotted = told(format!("format = 1\n\nx{} = 1", ".a".repeat(100_000)).as_bytes());
    insta::assert_snapshot!([deep("[", 1000), deep("{a=", 1000), header, dotted].join("\n"));
    told(format!("format = 1\nx = {}", "[".repeat(2_000_000)).as_bytes());
    told(format!("format = 1\nx = {}", "{a=".repeat(1_000_000)).as_bytes());
}

#[test]
fn long_names_texts_and_lines_are_cut() {
    let long = "k".repeat(4_000_000);
    let cases = [
        format!("format = 1\n{long} = 1"),
        format!("format = 1\n[resources.{long}]"),
        format!("format = 1\ntitle = \"{long}\""),
        format!("format = 1\n[activities.a]\nuses = {{ {long} = 1 }}"),
        format!("format = 1\n[activities.a]\nprice = \"{long}\""),
        format!("format = 1\n[activities.a]\nprice = {}", "9".repeat(1_000_000)),
        format!("format = 1\n[activities.a]\nprice = 0.{}1", "0".repeat(1_000_000)),
        format!("format = 1\n[activities.a] # {long} \u{1b}"),
        format!("format = 1\n[activities.a]\nuses = {{ {} x }}", "a = 1, ".repeat(100_000)),
    ];
    let told: Vec<String> = cases.iter().map(|text| told(text.as_bytes())).collect();
    insta::assert_snapshot!(told.join("\n"));
}

#[test]
fn files_too_large_to_plan() {
    let cases = [
        "#".repeat(MOST_BYTES + 1),
        format!("format = 1{}", "\n".repeat(MOST_LINES + 1)),
        format!("format = 1\nx = [{}]", "1,".repeat(4_000_000)),
        format!(
            "format = 1\n{}",
            (0..=MOST_ACTIVITIES).fold(String::new(), |text, at| text + &format!("[activities.a{at}]\n"))
        ),
    ];
    let told: Vec<String> = cases.iter().map(|text| told(text.as_bytes())).collect();
    insta::assert_snapshot!(told.join("\n"));
}

#[test]
fn tags_that_multiply() {
    let mut text = String::from("format = 1\n");
    for at in 0..3000 {
        text +=
            &format!("[activities.a{at}]\ntags = [\"t\"]\n[limits.l{at}]\nat_most = 1\nterms = {{ \"tag:t\" = 1 }}\n");
    }
    insta::assert_snapshot!(told(text.as_bytes()));
}

#[test]
fn signs_that_steer_a_terminal_or_turn_a_line_round_are_shown_as_escapes() {
    let text = "format = 1\n\"\u{202e}nlik\" = 1\n\"a\\u001b]0;x\\u0007\" = 2\n[resources.\"ki\u{200b}ln\"]\n";
    let told = told(text.as_bytes());
    assert!(told.chars().all(|c| c == '\n' || !c.is_control()));
    insta::assert_snapshot!(told);
}

#[test]
fn a_million_faults_in_one_file_are_twenty_and_a_count() {
    for text in ["=\n".repeat(400_000), "[[\n".repeat(400_000), "x = 'a\n".repeat(100_000), "\"".repeat(1_000_000)] {
        bounded(&bad(text.as_bytes()));
    }
    let unknown =
        (0..200_000).fold(String::from("format = 1\n"), |text, at| text + &format!("k{} = 1\n", 900_000 - at));
    assert_eq!(bad(unknown.as_bytes()).more, 200_000 - 20);
}

#[test]
fn garbage_is_refused() {
    for text in
        ["\u{0}", "[", "]", "{", "'''", "\"\"\"", "a=[\n[", "=", ".", "a.b.=1", "[a]]", "[[a]", "\u{feff}\u{feff}"]
    {
        assert!(read(text.as_bytes()).is_err(), "{text:?}");
    }
}

#[test]
fn periods_that_multiply() {
    let periods = |count| {
        let names = (0..count).fold(String::new(), |text, at| format!("{text}\"{at}\", "));
        format!("format = 1\nperiods = [{names}]\n")
    };
    let activities =
        |count, keys: &str| (0..count).fold(String::new(), |text, at| format!("{text}[activities.a{at}]\n{keys}"));
    let wide = (0..60).fold(String::new(), |text, at| format!("{text}r{at} = {{ each = 1, 7 = 2 }}, "));
    let resources = (0..60).fold(String::new(), |text, at| format!("{text}[resources.r{at}]\n"));
    let cases = [
        periods(1000) + &activities(300, ""),
        periods(1000)
            + &activities(
                200,
                "uses = { r = 1, s = 1, t = 1, u = 1, v = 1, w = 1, x = 1, y = 1, z = 1, q = 1, p = 1 }\n",
            )
            + &["r", "s", "t", "u", "v", "w", "x", "y", "z", "q", "p"]
                .map(|name| format!("[resources.{name}]\n"))
                .concat(),
        periods(1000) + &(0..300).fold(String::new(), |text, at| format!("{text}[resources.a{at}]\n")),
        // Some thousand bytes of each would become megabytes of numbers.
        periods(1000) + &resources + &activities(150, &format!("uses = {{ {wide}}}\n")),
    ];
    let told: Vec<String> = cases.iter().map(|text| told(text.as_bytes())).collect();
    insta::assert_snapshot!(told.join("\n"));
}
