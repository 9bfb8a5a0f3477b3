//! Gathering faults while a model is walked: any number found, a few kept, told in the order of the file.

use std::ops::Range;

use super::calendar::{EACH, PER_DAY};
use super::source::Source;
use crate::model::fault::{Fault, Faults, MOST_REPORTED};
use crate::model::name::{LONGEST, Name, NameError};
use crate::model::near;
use crate::model::types::Model;

/// A place in the text, as byte offsets.
pub(super) type Span = Range<usize>;

/// The longest name or value a message repeats, in characters.
const LONGEST_SHOWN: usize = 72;

/// A fault before its place has been worked out.
#[derive(Debug)]
struct Finding {
    span: Span,
    code: &'static str,
    message: String,
    cure: Cure,
}

/// What would mend a fault.
#[derive(Debug)]
pub(super) enum Cure {
    /// This.
    Say(String),
    /// The nearest of the names that are there. Looked up at the end, when all names are known and few faults are left.
    Nearest(String, Among),
}

impl From<&str> for Cure {
    fn from(text: &str) -> Self {
        Self::Say(text.to_owned())
    }
}

impl From<String> for Cure {
    fn from(text: String) -> Self {
        Self::Say(text)
    }
}

/// The names among which a misspelt one is looked for.
#[derive(Clone, Debug)]
pub(super) enum Among {
    /// These words; what to say where none is near.
    Words(Vec<&'static str>, String),
    /// The model's resources.
    Resources,
    /// The model's activities.
    Activities,
    /// The model's materials.
    Materials,
    /// The tags that activities carry.
    Tags,
    /// The model's periods, and the other words that a table of numbers may have; what the periods are, in words.
    Periods(String),
}

/// The faults found so far. Holds a bounded number of them, the first ones in the file.
#[derive(Debug, Default)]
pub(super) struct Findings {
    kept: Vec<Finding>,
    dropped: usize,
}

impl Findings {
    /// Adds a fault.
    pub(super) fn add(&mut self, span: &Span, code: &'static str, message: String, cure: impl Into<Cure>) {
        self.kept.push(Finding { span: span.clone(), code, message, cure: cure.into() });
        if self.kept.len() >= 4 * MOST_REPORTED {
            self.prune();
        }
    }

    /// Counts faults that come after those that are reported.
    pub(super) fn pass_over(&mut self, count: usize) {
        self.dropped += count;
    }

    /// Whether nothing was found.
    pub(super) fn is_empty(&self) -> bool {
        self.kept.is_empty()
    }

    /// The faults to report, in order of place. `model` is what could be read, for the names it has.
    pub(super) fn finish(mut self, source: Source<'_>, model: &Model) -> Faults {
        self.prune();
        let told = |finding: Finding| tell(finding, source, model);
        Faults { reported: self.kept.into_iter().map(told).collect(), more: self.dropped }
    }

    fn prune(&mut self) {
        self.kept.sort_by_key(|finding| (finding.span.start, finding.span.end));
        self.dropped += self.kept.len().saturating_sub(MOST_REPORTED);
        self.kept.truncate(MOST_REPORTED);
    }
}

fn tell(finding: Finding, source: Source<'_>, model: &Model) -> Fault {
    let help = match finding.cure {
        Cure::Say(text) => text,
        Cure::Nearest(wrong, among) => nearest(&wrong, among, model),
    };
    source.fault(finding.span, finding.code, finding.message, help)
}

fn nearest(wrong: &str, among: Among, model: &Model) -> String {
    match among {
        Among::Words(words, otherwise) => near::help(wrong, words.into_iter(), || otherwise),
        Among::Resources => near::help(wrong, model.resources.keys().map(Name::as_str), || declare("resources", wrong)),
        Among::Activities => {
            near::help(wrong, model.activities.keys().map(Name::as_str), || declare("activities", wrong))
        }
        Among::Materials => near::help(wrong, model.materials.keys().map(Name::as_str), || declare("materials", wrong)),
        Among::Periods(told) => {
            let labels = model.horizon.periods().filter_map(|period| model.horizon.label(period));
            near::help(wrong, labels.chain([EACH, PER_DAY]), || format!("the model plans {told}"))
        }
        Among::Tags => {
            let tags = model.activities.values().flat_map(|activity| &activity.tags).map(Name::as_str);
            near::help(wrong, tags, || "add it to the `tags` of an activity, or take the term out".to_owned())
        }
    }
}

fn declare(section: &str, name: &str) -> String {
    match Name::new(name) {
        Ok(_) => format!("add a table `[{section}.{}]`, or take it out here", quoted(name)),
        // The name may have been cut, so its own length would mislead.
        Err(NameError::TooLong(_)) => format!("a name has at most {LONGEST} characters"),
        Err(error) => error.to_string(),
    }
}

/// A name as a key of a TOML header: bare where that is allowed.
fn quoted(name: &str) -> String {
    let bare = name.bytes().all(|byte| byte.is_ascii_alphanumeric() || matches!(byte, b'_' | b'-'));
    if bare { name.to_owned() } else { format!("\"{name}\"") }
}

/// A name or value as a message repeats it: cut to a readable length.
pub(super) fn shown(text: &str) -> String {
    match text.char_indices().nth(LONGEST_SHOWN) {
        Some((end, _)) => format!("{}…", &text[..end]),
        None => text.to_owned(),
    }
}
