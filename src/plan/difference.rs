//! What differs between a plan as it lies in its file and as it was worked out afresh, told as a difference of plans.

use super::compare::{Comparison, compare, find, moved};
use super::each::Each;
use super::types::{Plan, State};
use crate::model::Name;

/// What differs. `before` is the file everywhere, `after` what was worked out.
#[derive(Clone, Debug, PartialEq)]
pub struct Difference {
    /// Aim and levels, what entered and what left.
    pub comparison: Comparison,
    /// Activities that both have and that stand otherwise.
    pub states: Vec<(Name, Each<State>, Each<State>)>,
    /// The first lines that differ.
    pub lines: Vec<LinePair>,
    /// How many more lines differ.
    pub more_lines: usize,
    /// Whether nothing but the ends of lines differs.
    pub line_ends_only: bool,
}

/// A line of the file beside the one worked out; empty where one text has ended.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct LinePair {
    /// Its number in the file, from 1.
    pub number: usize,
    /// The file's.
    pub written: String,
    /// The one worked out.
    pub afresh: String,
}

/// The most lines that are told.
const LINES: usize = 8;

/// The longest line that is told whole, in characters.
const LONGEST: usize = 160;

impl Difference {
    /// Between two plans, each with its text.
    #[must_use]
    pub fn between((written, written_text): (&Plan, &str), (afresh, afresh_text): (&Plan, &str)) -> Self {
        let (lines, more_lines) = lines(written_text, afresh_text);
        let line_ends_only = written_text.replace("\r\n", "\n") == afresh_text;
        let (comparison, states) = (compare(written, afresh), states(written, afresh));
        Self { comparison, states, lines, more_lines, line_ends_only }
    }

    /// Whether aim, levels and states agree, so that only lines differ.
    #[must_use]
    pub fn in_bytes_only(&self) -> bool {
        let Comparison { moved: moves, entered, left, aim, .. } = &self.comparison;
        let same_aim = aim.is_some_and(|(before, after)| !moved(before, after));
        same_aim && moves.is_empty() && entered.is_empty() && left.is_empty() && self.states.is_empty()
    }
}

fn states(written: &Plan, afresh: &Plan) -> Vec<(Name, Each<State>, Each<State>)> {
    let other = |name: &Name| find(&afresh.activities, name, |planned| &planned.name);
    let states = written.activities.iter().filter_map(|planned| Some((planned, other(&planned.name)?)));
    let differing = states.filter(|(before, after)| before.state != after.state);
    differing.map(|(before, after)| (before.name.clone(), before.state.clone(), after.state.clone())).collect()
}

/// The first lines that differ, and how many more do. Line ends count.
fn lines(written: &str, afresh: &str) -> (Vec<LinePair>, usize) {
    let (mut left, mut right) = (written.split('\n'), afresh.split('\n'));
    let (mut pairs, mut more) = (Vec::new(), 0);
    for number in 1.. {
        let (one, other) = (left.next(), right.next());
        if one.is_none() && other.is_none() {
            break;
        }
        if one == other {
            continue;
        }
        if pairs.len() < LINES {
            pairs.push(LinePair { number, written: cut(one), afresh: cut(other) });
        } else {
            more += 1;
        }
    }
    (pairs, more)
}

fn cut(line: Option<&str>) -> String {
    let line = line.unwrap_or_default();
    match line.char_indices().nth(LONGEST) {
        Some((at, _)) => format!("{}…", &line[..at]),
        None => line.to_owned(),
    }
}
