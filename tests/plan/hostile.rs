//! Strings that would steer a reader, a terminal or a page.

use millreeve::edits::{Edit, Kind, Subject};
use millreeve::model::escape::is_unsafe;
use millreeve::plan::note::{EditTold, ReleaseTold, Report, Verdict, write};
use millreeve::plan::release::Release;
use millreeve::plan::{Plan, Standing, text};
use proptest::prelude::*;

use crate::tileworks::{model, planned};

/// Signs with a meaning somewhere, and any others.
fn hostile() -> impl Strategy<Value = String> {
    let signs = prop_oneof![
        "[<>&\"'`*_\\[\\]|!#~\\\\\n\r\t -]{0,12}",
        any::<String>(),
        Just("\u{202e}evil\u{2066}\u{200b}\u{feff}".to_owned()),
        Just("</td><script>alert(1)</script>".to_owned()),
        Just("\"\"\"\n[[activities]]\nname = \"x\"".to_owned()),
        Just("| a | b |\n| --- | --- |\n# Title".to_owned()),
        Just("\u{1b}]0;owned\u{7}".to_owned()),
        Just("--> <!-- ".to_owned()),
    ];
    prop::collection::vec(signs, 1..3).prop_map(|parts| parts.concat())
}

/// What a page shows unescaped: signs that no backslash stands before.
fn bare(line: &str, sign: char) -> usize {
    let mut escaped = false;
    let mut count = 0;
    for character in line.chars() {
        count += usize::from(character == sign && !escaped);
        escaped = character == '\\' && !escaped;
    }
    count
}

proptest! {
    #[test]
    fn a_plan_gives_back_what_people_wrote(currency in hostile(), reason in hostile()) {
        let plan = Plan { currency: Some(currency), standing: Standing::Held(reason), ..planned(&model()) };
        let text = text::write(&plan);
        prop_assert!(text.chars().all(|c| c == '\n' || !is_unsafe(c)));
        let read = text::read(&text).unwrap();
        prop_assert!(read.sealed);
        prop_assert_eq!(&read.plan.currency, &plan.currency);
        prop_assert_eq!(&read.plan.standing, &plan.standing);
        prop_assert_eq!(read.plan.activities.len(), plan.activities.len());
    }

    #[test]
    fn a_note_keeps_its_shape(strings in prop::collection::vec(hostile(), 7)) {
        let shape = |strings: &[String]| {
            let mut model = model();
            model.title = Some(strings[0].clone());
            model.currency = Some(strings[1].clone());
            model.activities.get_mut("floor_tile").unwrap().label = Some(strings[2].clone());
            model.activities.get_mut("floor_tile").unwrap().unit = Some(strings[3].clone());
            model.resources.get_mut("kiln").unwrap().label = Some(strings[4].clone());
            let plan = planned(&model);
            let mut before = plan.clone();
            before.activities[0].level = 7.0.into();
            let edit = Edit {
                address: format!("activities.{}", strings[5]),
                subject: Subject::Model,
                old: Some(strings[6].clone()),
                new: None,
                kind: Kind::Wording,
            };
            let release = Release::of(&before, "5e");
            write(&Report {
                title: model.title.as_deref(),
                file: "tileworks.model.toml",
                model: Some(&model),
                before: Some(&before),
                edits: &[EditTold { edit: &edit, worth: None }],
                verdict: Verdict::Planned(&plan),
                seal: None,
                release: Some(ReleaseTold { mark: "5e", release: Ok(&release) }),
                reckoning: None,
            })
        };
        let tame = shape(&vec!["x".to_owned(); 7]);
        let note = shape(&strings);
        prop_assert!(text::is_ours(note.as_bytes()));
        prop_assert!(note.chars().all(|c| c == '\n' || !is_unsafe(c)), "{}", note);
        prop_assert_eq!(note.lines().count(), tame.lines().count());
        for (line, tame) in note.lines().zip(tame.lines()).skip(1) {
            for sign in ['|', '`', '[', '#', '*'] {
                prop_assert_eq!(bare(line, sign), bare(tame, sign), "{} in {}", sign, line);
            }
            // The mark of the release is the one tag that a note is meant to have.
            prop_assert!(!line.contains('<') || line == "<!-- Release: 5e -->", "{}", line);
        }
    }
}
