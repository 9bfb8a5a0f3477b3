//! A release as text.

use serde::Deserialize;

use super::{FORMAT, Release};
use crate::plan::number;
use crate::plan::text::PlanError;
use crate::plan::text::entry::{ActivityEntry, all, periods_of};
use crate::plan::text::read::{meaning_of, message_of};
use crate::plan::text::write::{line, periods, quoted, seal_line, state, value};
use crate::plan::text::{seal_for, version};
use crate::plan::types::{Plan, Standing};

/// The first line of every release.
pub const HEADER: &str =
    "# Written by `millreeve release`: the plan that is worked to. Do not edit: release again instead.";

/// Why a file gives no release: a sentence about the release, safe to show.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum ReleaseError {
    /// Its first line is not that of our releases.
    #[error("its file was not written by millreeve")]
    NotOurs,
    /// A later version wrote it.
    #[error("its file was written by a newer millreeve: format {found}, this one knows up to {FORMAT}")]
    Newer {
        /// The format that the file states.
        found: u32,
    },
    /// Its first line is ours, but what follows is no release.
    #[error("its file is damaged: {0}")]
    Broken(String),
    /// It has been edited since it was written.
    #[error("its file has been edited by hand: its seal does not fit")]
    Edited,
}

/// Whether a file that begins with `bytes` is a release of ours, and may be replaced. One of a newer version may not.
#[must_use]
pub fn is_ours(bytes: &[u8]) -> bool {
    let text = String::from_utf8_lossy(bytes);
    text.lines().next() == Some(HEADER) && version(&text, "format").is_none_or(|found| found <= FORMAT)
}

/// The text of a release, sealed, in byte order of names.
#[must_use]
pub fn write(release: &Release) -> String {
    let plan = &release.plan;
    let mut out = format!("{HEADER}\n");
    line(&mut out, "format  ", |out| number::push(out, f64::from(FORMAT)));
    line(&mut out, "answers ", |out| quoted(out, &plan.answers.to_string()));
    line(&mut out, "pins    ", |out| quoted(out, &release.pins));
    let sealed_from = out.len();
    line(&mut out, "aim     ", |out| number::push(out, plan.aim));
    if plan.minimise {
        line(&mut out, "minimise", |out| out.push_str("true"));
    }
    if let Some(currency) = &plan.currency {
        line(&mut out, "currency", |out| quoted(out, currency));
    }
    periods(&mut out, &plan.periods);
    for planned in &plan.activities {
        out.push_str("\n[[activities]]\n");
        line(&mut out, "name ", |out| quoted(out, planned.name.as_str()));
        line(&mut out, "level", |out| value(out, &planned.level));
        line(&mut out, "state", |out| state(out, &planned.state));
    }
    let seal = seal_line(&seal_for(&out));
    out.insert_str(sealed_from, &seal);
    out
}

/// The release that `text` says.
///
/// # Errors
/// Says that the text is not ours, comes from a newer version, is no whole release, or has been edited: people may have worked to
/// either version of an edited one, so nothing can be compared with it.
pub fn read(text: &str) -> Result<Release, ReleaseError> {
    if text.lines().next() != Some(HEADER) {
        return Err(ReleaseError::NotOurs);
    }
    match version(text, "format") {
        Some(found) if found > FORMAT => return Err(ReleaseError::Newer { found }),
        Some(_) => {}
        None => return Err(ReleaseError::Broken("it does not say its `format`".to_owned())),
    }
    let file: File = toml::from_str(text).map_err(|error| ReleaseError::Broken(message_of(text, &error)))?;
    if file.seal != seal_for(text) {
        return Err(ReleaseError::Edited);
    }
    file.release()
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct File {
    #[serde(rename = "format")]
    _format: u32,
    answers: String,
    pins: String,
    seal: String,
    aim: f64,
    #[serde(default)]
    minimise: bool,
    currency: Option<String>,
    #[serde(default)]
    periods: Vec<String>,
    #[serde(default)]
    activities: Vec<ActivityEntry>,
}

impl File {
    fn release(self) -> Result<Release, ReleaseError> {
        let broken = |error| match error {
            PlanError::Broken(why) => ReleaseError::Broken(why),
            other => ReleaseError::Broken(other.to_string()),
        };
        let answers = meaning_of(&self.answers).map_err(broken)?;
        let periods = periods_of(&self.periods).map_err(broken)?;
        let count = periods.len();
        let activities = all(self.activities, |entry| entry.planned(count)).map_err(broken)?;
        let plan = Plan {
            answers,
            standing: Standing::Current,
            aim: self.aim,
            minimise: self.minimise,
            currency: self.currency,
            periods,
            exact: false,
            ties: false,
            may_vary_left_out: 0,
            complete: false,
            activities,
            resources: Vec::new(),
            limits: Vec::new(),
            materials: Vec::new(),
        };
        Ok(Release { pins: self.pins, plan })
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::model::meaning::Meaning;
    use crate::model::{Name, Value};
    use crate::plan::each::Each;
    use crate::plan::release::since;
    use crate::plan::types::{PlannedActivity, State};

    fn activity(name: &str, level: Value) -> PlannedActivity {
        let state = if level.numbers().iter().any(|&number| number > 0.0) { State::InTheMix } else { State::Idle };
        let name = Name::new(name).unwrap();
        let ranges = Some(Each::One((1.0, 2.0)));
        PlannedActivity {
            name,
            level,
            state: Each::One(state),
            may_vary: ranges.clone(),
            price_range: ranges,
            break_even: None,
            loses: Some(3.0.into()),
        }
    }

    fn plan(aim: f64, activities: Vec<PlannedActivity>) -> Plan {
        Plan {
            answers: Meaning::parse(&"0a".repeat(32)).unwrap(),
            standing: Standing::Current,
            aim,
            minimise: false,
            currency: Some("EU\"R".to_owned()),
            periods: vec![],
            exact: true,
            ties: true,
            may_vary_left_out: 0,
            complete: true,
            activities,
            resources: vec![],
            limits: vec![],
            materials: vec![],
        }
    }

    fn sample() -> Release {
        let activities = vec![activity("floor_tile", 4180.5.into()), activity("plaque", 12.0.into())];
        Release::of(&plan(-43265.1, activities), &"5e".repeat(32))
    }

    fn over(periods: &str, level: &[f64]) -> Plan {
        let periods = periods.split_whitespace().map(|label| Name::new(label).unwrap()).collect();
        Plan { periods, ..plan(100.0, vec![activity("floor_tile", Value::Listed(level.to_vec()))]) }
    }

    #[test]
    fn a_release_reads_back_and_says_the_same_each_time() {
        let bare = Plan { minimise: true, currency: None, ..plan(0.0, vec![]) };
        for release in
            [sample(), Release::of(&bare, "5e"), Release::of(&over("2027-W01 瓦", &[3.0, 0.0]), &"5e".repeat(32))]
        {
            let text = write(&release);
            assert!(is_ours(text.as_bytes()));
            let back = read(&text).unwrap();
            assert_eq!(write(&back), text);
            assert_eq!(
                (back.pins, back.plan.aim, back.plan.minimise),
                (release.pins, release.plan.aim, release.plan.minimise)
            );
            assert_eq!(back.plan.activities, release.plan.activities);
            assert_eq!(back.plan.periods, release.plan.periods);
            assert_eq!(read(&text.replace('\n', "\r\n")).unwrap().plan.currency, release.plan.currency);
        }
    }

    #[test]
    fn what_is_no_release_of_ours_is_told_in_one_line() {
        let text = write(&sample());
        let told = |text: &str| read(text).unwrap_err().to_string();
        assert_eq!(told(&text.replace("4180.5", "4180.6")), "its file has been edited by hand: its seal does not fit");
        assert_eq!(told(&text.replace("5e5e", "5e5f")), "its file has been edited by hand: its seal does not fit");
        assert_eq!(told("name = 1\n"), "its file was not written by millreeve");
        let newer = text.replace("format   = 1", "format   = 2");
        assert_eq!(told(&newer), "its file was written by a newer millreeve: format 2, this one knows up to 1");
        assert!(!is_ours(newer.as_bytes()) && !is_ours(b"name = 1\n") && !is_ours(b""));
        let broken = told(&text.replace("aim     ", "aim\u{1b}[31m"));
        assert!(broken.starts_with("its file is damaged: line 6: ") && !broken.contains('\u{1b}'), "{broken}");
        assert!(told(&text[..text.len() / 2]).starts_with("its file is damaged: "));
    }

    #[test]
    fn a_plan_is_compared_as_far_as_names_match() {
        let now = plan(-43000.0, vec![activity("floor_tile", 4000.0.into()), activity("slab", 0.0.into())]);
        let since = since(&sample(), &now);
        assert_eq!((since.new, since.gone), (1, 1));
        assert_eq!(since.comparison.aim, Some((-43265.1, -43000.0)));
        let names: Vec<_> = since.comparison.moved.iter().map(|told| told.name.as_str()).collect();
        assert_eq!(names, ["floor_tile", "plaque"]);
        assert_eq!(since.comparison.left.len(), 1);
    }

    #[test]
    fn a_release_of_another_horizon_is_compared_where_the_two_overlap() {
        let released = Release::of(&over("w1 w2 w3", &[1.0, 2.0, 3.0]), "5e");
        let told = since(&released, &over("w2 w3 w4", &[2.0, 5.0, 9.0])).comparison;
        assert_eq!((told.aim, told.overlap.shared.len()), (None, 2));
        let [moved] = told.moved.as_slice() else { panic!("{told:?}") };
        assert_eq!(moved.before, Some(Value::Listed(vec![2.0, 3.0])));
        let periods: Vec<_> = moved.periods.iter().map(|one| (one.period.as_str(), one.before, one.after)).collect();
        assert_eq!(periods, [("w3", 3.0, 5.0)]);
        // Nothing in common, so nothing moves.
        let told = since(&released, &over("w5", &[4.0])).comparison;
        assert!(told.overlap.is_empty() && told.moved.is_empty() && told.aim.is_none());
        assert!(since(&sample(), &over("w1", &[4.0])).comparison.overlap.is_empty());
    }
}
