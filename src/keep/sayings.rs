//! What was said already: one message per cause until it changes, and only so many at a time. Time is passed in.

use std::collections::{BTreeMap, BTreeSet};
use std::path::{Path, PathBuf};
use std::time::{Duration, Instant};

use super::event::{Action, Weight};
use super::path::ModelPath;
use super::scan::Scan;
use super::twins;
use crate::model::escape::Plain;

/// Of several messages alike at one time, so many are said.
const ALIKE: usize = 20;
/// Of messages about failed models, [`ALIKE`] are said within this time.
const WINDOW: Duration = Duration::from_secs(60);

/// What a message about the folder as a whole is about. For each, one message stands at a time.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Cause {
    /// The folder cannot be read.
    Gone,
    /// The folder stands empty.
    Hollow,
    /// The folder cannot be claimed.
    Unclaimed,
    /// There are no file events.
    Unwatched,
}

/// What was said, as far as it still holds.
#[derive(Debug, Default)]
pub struct Sayings {
    /// What stands said about each cause: its key, and the words.
    standing: BTreeMap<Cause, (String, String)>,
    odd: BTreeSet<ModelPath>,
    unread: BTreeMap<PathBuf, String>,
    /// The models of the last scan, and what was said of those whose names are hard to tell apart.
    models: Vec<ModelPath>,
    twins: BTreeSet<String>,
    window: Option<Window>,
}

/// A stretch of time in which models failed.
#[derive(Debug)]
struct Window {
    end: Instant,
    said: usize,
    held_back: usize,
}

impl Sayings {
    /// A warning, unless `key`, which tells one message about `cause` from the next, was the last one about it.
    pub fn say(&mut self, cause: Cause, key: &str, text: impl FnOnce() -> String) -> Option<Action> {
        if self.standing.get(&cause).is_some_and(|(said, _)| said == key) {
            return None;
        }
        let text = text();
        self.standing.insert(cause, (key.to_owned(), text.clone()));
        Some(Action::Say(Weight::Warning, text))
    }

    /// Takes note that a cause is no more. Answers whether something had been said about it.
    pub fn settle(&mut self, cause: Cause) -> bool {
        self.standing.remove(&cause).is_some()
    }

    /// What stands said about the folder as a whole, apart from how it is watched.
    #[must_use]
    pub fn about_folder(&self) -> Vec<String> {
        let about = self.standing.iter().filter(|(cause, _)| **cause != Cause::Unwatched);
        about.map(|(_, (_, text))| text.clone()).collect()
    }

    /// Mentions what a scan saw in the way of models being planned and the scan before did not.
    pub fn mention(&mut self, scan: &Scan) -> Vec<Action> {
        let odd = scan.odd.difference(&self.odd).map(|model| {
            format!(
                "{model} is a link, a pipe or a folder, not a plain file: it is left alone; put the model itself there, or its parts into a \
                 folder whose name ends in .model"
            )
        });
        let mut said = alike(odd.collect(), "are not plain files");
        let new = |&(path, why): &(&PathBuf, &String)| self.unread.get(path) != Some(why);
        let unread = scan.unread.iter().filter(new).map(|(path, why)| unread(path, why));
        said.extend(alike(unread.collect(), "cannot be read"));
        said.extend(self.mention_twins(scan));
        self.odd.clone_from(&scan.odd);
        self.unread.clone_from(&scan.unread);
        said
    }

    /// Mentions models whose names are twins. Names are looked at only where there are others than before.
    fn mention_twins(&mut self, scan: &Scan) -> Vec<Action> {
        if self.models.iter().eq(scan.sights.keys()) {
            return Vec::new();
        }
        self.models = scan.sights.keys().cloned().collect();
        let twins: BTreeSet<_> = twins::find(self.models.iter()).into_iter().collect();
        let new = twins.difference(&self.twins).cloned().collect();
        self.twins = twins;
        alike(new, "are hard to tell from others by their names")
    }

    /// A message about a model that could not be planned, unless there have been too many of late; those are counted.
    pub fn failed(&mut self, now: Instant, text: String) -> Option<Action> {
        let window = self.window.get_or_insert(Window { end: now + WINDOW, said: 0, held_back: 0 });
        if window.said < ALIKE {
            window.said += 1;
            return Some(Action::Say(Weight::Warning, text));
        }
        window.held_back += 1;
        None
    }

    /// When [`Sayings::tick`] has something to do.
    #[must_use]
    pub fn next(&self) -> Option<Instant> {
        self.window.as_ref().map(|window| window.end)
    }

    /// Says how many messages about failed models were held back, once their time is over.
    pub fn tick(&mut self, now: Instant) -> Option<Action> {
        let window = self.window.take_if(|window| window.end <= now)?;
        let text = |count| {
            format!("{count} more messages about models that cannot be planned were left out; --status lists them")
        };
        (window.held_back > 0).then(|| Action::Say(Weight::Warning, text(window.held_back)))
    }
}

fn unread(path: &Path, why: &str) -> String {
    let shown = Plain(&path.to_string_lossy()).to_string();
    format!("{shown} cannot be read: {why}; the plans there are left as they are until it can")
}

/// The first few of several messages alike, and how many there are besides.
fn alike(texts: Vec<String>, what: &str) -> Vec<Action> {
    let more = texts.len().saturating_sub(ALIKE);
    let mut said: Vec<_> = texts.into_iter().take(ALIKE).map(|text| Action::Say(Weight::Warning, text)).collect();
    if more > 0 {
        said.push(Action::Say(Weight::Warning, format!("{more} more {what}")));
    }
    said
}

#[cfg(test)]
mod tests {
    use super::*;

    fn text(action: Option<Action>) -> Option<String> {
        action.map(|action| match action {
            Action::Say(Weight::Warning, text) => text,
            other => panic!("{other:?}"),
        })
    }

    #[test]
    fn a_message_is_said_once_until_it_changes_or_its_cause_has_gone() {
        let mut sayings = Sayings::default();
        let mut say = |key: &str| text(sayings.say(Cause::Gone, key, || format!("gone: {key}")));
        assert_eq!(say("a").as_deref(), Some("gone: a"));
        assert_eq!(say("a"), None);
        assert_eq!(say("b").as_deref(), Some("gone: b"));
        assert!(sayings.settle(Cause::Gone) && !sayings.settle(Cause::Gone));
        assert!(sayings.say(Cause::Gone, "b", String::new).is_some());
    }

    #[test]
    fn of_five_thousand_failures_at_once_twenty_are_told_and_the_others_counted() {
        let (mut sayings, start) = (Sayings::default(), Instant::now());
        let said = (0..5000).filter_map(|number| sayings.failed(start, format!("m{number}"))).count();
        assert_eq!((said, sayings.next()), (20, Some(start + WINDOW)));
        assert!(sayings.tick(start + WINDOW / 2).is_none());
        let told = text(sayings.tick(start + WINDOW)).unwrap();
        assert!(told.starts_with("4980 more messages"), "{told}");
        assert!(sayings.next().is_none() && sayings.failed(start + WINDOW, "next".to_owned()).is_some());
        assert!(sayings.tick(start + 2 * WINDOW).is_none());
    }
}
