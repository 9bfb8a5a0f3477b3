//! When a model is at rest: closed by its writer, or seen unchanged for a settling time. Time is passed in.

use std::collections::{BTreeMap, BTreeSet};
use std::ffi::{OsStr, OsString};
use std::time::{Duration, Instant};

use super::path::ModelPath;
use super::pool::What;
use super::settings::Pace;
use super::stamp::Sight;

/// Parts that are saved within this time of each other are taken for one edit: a checkout, or a change that needs two of them.
const BURST: Duration = Duration::from_millis(100);

/// What an event tells about one model, or about one of its parts.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Touch {
    /// Its writer has closed it, or it was moved here whole.
    Finished,
    /// It is being written.
    Writing,
    /// It was removed or moved away.
    Gone,
}

/// What is known of a model that is not at rest.
#[derive(Clone, Copy, Debug)]
#[expect(clippy::large_enum_variant, reason = "only models in motion have one")]
enum Phase {
    /// Somebody writes to it and has not closed it; `told` once that has been reported.
    Writing { since: Instant, last: Instant, told: bool },
    /// A scan saw it so, without any event.
    Seen { sight: Sight, since: Instant },
    /// It is not there.
    Missing { since: Instant },
    /// Parts of it were saved, put there or taken away, and it is to be read when that has been over for a while.
    Saved { due: Instant },
}

/// Parts of one model that are not at rest.
#[derive(Debug, Default)]
struct Parts {
    /// Somebody writes to them and has not closed them.
    open: BTreeSet<OsString>,
    /// They were taken away, and may come back: editors and git do that to save.
    gone: BTreeSet<OsString>,
}

impl Phase {
    /// Whether it comes from what a writer does: the writer's next event ends it, not a look.
    fn is_of_writer(&self) -> bool {
        matches!(self, Self::Writing { .. } | Self::Saved { .. })
    }
}

/// A model that is still open for writing, though nobody has written to it for long.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct StillOpen {
    /// The model.
    pub model: ModelPath,
    /// How long ago the writing began.
    pub age: Duration,
    /// Whether its writer is waited for no longer: the model is to be read as it is.
    pub given_up: bool,
}

/// The models that are not at rest.
#[derive(Debug)]
pub struct Settling {
    pace: Pace,
    phases: BTreeMap<ModelPath, Phase>,
    parts: BTreeMap<ModelPath, Parts>,
}

impl Settling {
    /// Nothing in motion.
    #[must_use]
    pub fn new(pace: Pace) -> Self {
        Self { pace, phases: BTreeMap::new(), parts: BTreeMap::new() }
    }

    /// Takes note of an event, and says whether the model is to be read now.
    pub fn touch(&mut self, now: Instant, model: &ModelPath, touch: Touch) -> bool {
        let phase = match touch {
            Touch::Finished => {
                self.phases.remove(model);
                return true;
            }
            Touch::Writing => self.writing(now, model),
            Touch::Gone => Phase::Missing { since: now },
        };
        self.phases.insert(model.clone(), phase);
        false
    }

    /// Takes note of an event about a part of a model. The model is to be read when [`Settling::due`] says so: once no part is open and
    /// none has been touched for a while.
    pub fn touch_part(&mut self, now: Instant, model: &ModelPath, part: &OsStr, touch: Touch) {
        let parts = self.parts.entry(model.clone()).or_default();
        parts.open.remove(part);
        parts.gone.remove(part);
        match touch {
            Touch::Finished => {}
            Touch::Writing => drop(parts.open.insert(part.to_owned())),
            Touch::Gone => drop(parts.gone.insert(part.to_owned())),
        }
        let phase = if !parts.open.is_empty() {
            self.writing(now, model)
        } else if parts.gone.is_empty() {
            Phase::Saved { due: now + BURST.min(self.pace.settle) }
        } else {
            Phase::Saved { due: now + self.pace.settle }
        };
        self.phases.insert(model.clone(), phase);
    }

    fn writing(&self, now: Instant, model: &ModelPath) -> Phase {
        match self.phases.get(model) {
            Some(&Phase::Writing { since, told, .. }) => Phase::Writing { since, last: now, told },
            _ => Phase::Writing { since: now, last: now, told: false },
        }
    }

    /// The models whose parts have come to rest, which are to be read now.
    pub fn due(&mut self, now: Instant) -> Vec<ModelPath> {
        let is_due = |phase: &Phase| matches!(phase, Phase::Saved { due } if *due <= now);
        let due: Vec<_> =
            self.phases.iter().filter(|(_, phase)| is_due(phase)).map(|(model, _)| model.clone()).collect();
        for model in &due {
            self.phases.remove(model);
            self.parts.remove(model);
        }
        due
    }

    /// When [`Settling::due`] is next to be asked.
    #[must_use]
    pub fn next_due(&self) -> Option<Instant> {
        let time = |phase: &Phase| match *phase {
            Phase::Saved { due } => Some(due),
            _ => None,
        };
        self.phases.values().filter_map(time).min()
    }

    /// Takes note of what a scan begun at `began` saw of a model that was not planned so; says what is to be done about it now.
    pub fn look(&mut self, began: Instant, now: Instant, model: &ModelPath, sight: Sight) -> Option<What> {
        let still = |since: Instant, time: Duration| began.checked_duration_since(since).is_some_and(|age| age >= time);
        let phase = self.phases.get(model).copied();
        let ready = match (phase, sight.model) {
            // Events are there and tell more than a look.
            (Some(Phase::Writing { .. } | Phase::Saved { .. }), Some(_)) => return None,
            (Some(Phase::Seen { sight: before, since }), Some(_)) if before == sight => {
                still(since, self.pace.settle).then_some(What::Replan)
            }
            (Some(Phase::Missing { since }), None) => still(since, self.pace.grace).then_some(What::Retire),
            (_, Some(_)) => {
                self.phases.insert(model.clone(), Phase::Seen { sight, since: now });
                return None;
            }
            (_, None) => {
                self.phases.insert(model.clone(), Phase::Missing { since: now });
                return None;
            }
        };
        if ready.is_some() {
            self.phases.remove(model);
        }
        ready
    }

    /// A scan saw a model as it was planned: it is at rest, unless somebody writes to it.
    pub fn rest(&mut self, model: &ModelPath) {
        if !self.is_being_written(model) {
            self.phases.remove(model);
        }
    }

    /// Whether somebody writes to a model, or has just done so, and it will be read once that is over.
    #[must_use]
    pub fn is_being_written(&self, model: &ModelPath) -> bool {
        self.phases.get(model).is_some_and(Phase::is_of_writer)
    }

    /// Forgets looks at models that the last scan did not see any more.
    pub fn forget_unseen(&mut self, seen: impl Fn(&ModelPath) -> bool) {
        self.phases.retain(|model, phase| phase.is_of_writer() || seen(model));
        self.parts.retain(|model, _| self.phases.get(model).is_some_and(Phase::is_of_writer));
    }

    /// Forgets everything: events were lost, or another folder stands in the place of this one.
    pub fn clear(&mut self) {
        self.phases.clear();
        self.parts.clear();
    }

    /// The models whose writers have been quiet for too long, told of twice: when that is to be reported, and when they are given up.
    pub fn quiet(&mut self, now: Instant) -> Vec<StillOpen> {
        let pace = self.pace;
        let mut open = Vec::new();
        for (model, phase) in &mut self.phases {
            let Phase::Writing { since, last, told } = phase else { continue };
            let still = now.saturating_duration_since(*last);
            let given_up = still >= pace.patience;
            if given_up || (still >= pace.quiet && !*told) {
                *told = true;
                let age = now.saturating_duration_since(*since);
                open.push(StillOpen { model: model.clone(), age, given_up });
            }
        }
        for still in open.iter().filter(|still| still.given_up) {
            self.phases.remove(&still.model);
            self.parts.remove(&still.model);
        }
        open
    }

    /// When [`Settling::quiet`] is next to be asked.
    #[must_use]
    pub fn next_quiet(&self) -> Option<Instant> {
        let time = |phase: &Phase| match *phase {
            Phase::Writing { last, told: false, .. } => Some(last + self.pace.quiet.min(self.pace.patience)),
            Phase::Writing { last, told: true, .. } => Some(last + self.pace.patience),
            _ => None,
        };
        self.phases.values().filter_map(time).min()
    }

    /// When a scan would next settle something.
    #[must_use]
    pub fn next_look(&self) -> Option<Instant> {
        let time = |phase: &Phase| match *phase {
            Phase::Writing { .. } | Phase::Saved { .. } => None,
            Phase::Seen { since, .. } => Some(since + self.pace.settle),
            Phase::Missing { since } => Some(since + self.pace.grace),
        };
        self.phases.values().filter_map(time).min()
    }
}

#[cfg(test)]
mod tests {
    use std::path::Path;
    use std::sync::Arc;

    use super::*;
    use crate::keep::stamp::Stamp;

    const SECOND: Duration = Duration::from_secs(1);

    fn model() -> ModelPath {
        ModelPath::new(&Arc::from(Path::new("/works")), Path::new("m.model.toml")).unwrap()
    }

    /// Sights of two states of a real file, and of none.
    fn sights() -> [Sight; 3] {
        let file = tempfile::NamedTempFile::new().unwrap();
        let one = Stamp::of(file.path());
        file.as_file().set_len(7).unwrap();
        [one, Stamp::of(file.path()), None].map(|model| Sight { model, ..Sight::default() })
    }

    #[test]
    fn a_model_being_written_waits_for_its_close() {
        let (mut settling, start) = (Settling::new(Pace::default()), Instant::now());
        let [one, two, _] = sights();
        assert!(!settling.touch(start, &model(), Touch::Writing));
        for second in 1..9 {
            let now = start + second * SECOND;
            assert_eq!(settling.look(now, now, &model(), if second % 2 == 0 { one } else { two }), None);
            assert!(settling.quiet(now).is_empty());
        }
        assert!(settling.touch(start + 9 * SECOND, &model(), Touch::Finished));
        assert_eq!((settling.next_quiet(), settling.next_look()), (None, None));
    }

    #[test]
    fn a_writer_that_never_closes_is_reported_once_and_given_up_much_later() {
        let (mut settling, start) = (Settling::new(Pace::default()), Instant::now());
        settling.touch(start, &model(), Touch::Writing);
        settling.touch(start + 4 * SECOND, &model(), Touch::Writing);
        assert_eq!(settling.next_quiet(), Some(start + 14 * SECOND));
        assert!(settling.quiet(start + 13 * SECOND).is_empty());
        let still = |age, given_up| StillOpen { model: model(), age: age * SECOND, given_up };
        assert_eq!(settling.quiet(start + 14 * SECOND), [still(14, false)]);
        assert_eq!(settling.next_quiet(), Some(start + 604 * SECOND));
        assert!(settling.quiet(start + 603 * SECOND).is_empty());
        assert_eq!(settling.quiet(start + 604 * SECOND), [still(604, true)]);
        assert_eq!(settling.next_quiet(), None);
    }

    #[test]
    fn a_writer_that_goes_on_after_a_report_is_waited_for_anew() {
        let (mut settling, start) = (Settling::new(Pace::default()), Instant::now());
        settling.touch(start, &model(), Touch::Writing);
        assert_eq!(settling.quiet(start + 10 * SECOND).len(), 1);
        settling.touch(start + 500 * SECOND, &model(), Touch::Writing);
        assert!(settling.quiet(start + 1099 * SECOND).is_empty());
        assert!(settling.touch(start + 1099 * SECOND, &model(), Touch::Finished));
        assert_eq!(settling.next_quiet(), None);
    }

    #[test]
    fn without_events_two_equal_looks_a_settling_time_apart_are_needed() {
        let (mut settling, start) = (Settling::new(Pace::default()), Instant::now());
        let [one, two, _] = sights();
        let mut look = |seconds: u32, sight| {
            let now = start + seconds * SECOND;
            settling.look(now, now, &model(), sight)
        };
        assert_eq!(look(0, one), None);
        assert_eq!(look(1, one), None);
        assert_eq!(look(2, two), None);
        assert_eq!(look(3, two), None);
        assert_eq!(look(4, two), Some(What::Replan));
    }

    #[test]
    fn a_scan_that_began_too_early_does_not_count_as_the_second_look() {
        let (mut settling, start) = (Settling::new(Pace::default()), Instant::now());
        let [one, ..] = sights();
        settling.look(start, start + SECOND, &model(), one);
        assert_eq!(settling.look(start + 2 * SECOND, start + 9 * SECOND, &model(), one), None);
        assert_eq!(settling.look(start + 3 * SECOND, start + 9 * SECOND, &model(), one), Some(What::Replan));
    }

    #[test]
    fn a_model_moved_away_and_back_is_not_retired() {
        let (mut settling, start) = (Settling::new(Pace::default()), Instant::now());
        let [one, _, none] = sights();
        settling.touch(start, &model(), Touch::Gone);
        assert_eq!(settling.look(start + SECOND, start + SECOND, &model(), none), None);
        assert!(settling.touch(start + SECOND, &model(), Touch::Finished));
        assert_eq!(settling.look(start + 3 * SECOND, start + 3 * SECOND, &model(), none), None);
        assert_eq!(settling.look(start + 4 * SECOND, start + 4 * SECOND, &model(), one), None);
        let late = start + 5 * SECOND;
        assert_eq!(settling.look(late, late, &model(), none), None);
        assert_eq!(settling.look(late + 2 * SECOND, late + 2 * SECOND, &model(), none), Some(What::Retire));
    }

    /// A model in parts whose parts are touched one after the other, each at its millisecond; answers when it is due, in milliseconds.
    fn due_after(touches: &[(u32, &str, Touch)]) -> Option<u128> {
        let (mut settling, start) = (Settling::new(Pace::default()), Instant::now());
        for &(at, part, touch) in touches {
            let now = start + at * SECOND / 1000;
            assert_eq!(settling.due(now), [], "before {at}");
            settling.touch_part(now, &model(), OsStr::new(part), touch);
            assert!(settling.is_being_written(&model()));
        }
        let due = settling.next_due()?;
        assert_eq!(settling.due(due), [model()]);
        assert!(settling.next_due().is_none() && settling.parts.is_empty() && !settling.is_being_written(&model()));
        Some(due.duration_since(start).as_millis())
    }

    #[test]
    fn parts_saved_one_after_the_other_are_one_edit() {
        use Touch::{Finished, Gone, Writing};
        assert_eq!(due_after(&[(0, "a", Finished)]), Some(100));
        assert_eq!(due_after(&[(0, "a", Finished), (90, "b", Finished), (180, "c", Finished)]), Some(280));
        assert_eq!(due_after(&[(0, "a", Writing), (500, "a", Finished)]), Some(600));
        // Another part that is closed meanwhile does not end the wait for one that is open.
        assert_eq!(due_after(&[(0, "a", Writing), (50, "b", Finished)]), None);
        assert_eq!(due_after(&[(0, "a", Writing), (50, "b", Finished), (400, "a", Finished)]), Some(500));
        // What is moved away and back is saved; what stays away is gone after a while.
        assert_eq!(due_after(&[(0, "a", Gone), (1, "a", Writing), (2, "a", Finished)]), Some(102));
        assert_eq!(due_after(&[(0, "a", Gone)]), Some(2000));
        assert_eq!(due_after(&[(0, "a", Gone), (10, "b", Finished)]), Some(2010));
        assert_eq!(due_after(&[(0, "a", Writing), (10, "a", Gone)]), Some(2010));
    }

    #[test]
    fn a_look_does_not_end_the_wait_for_parts() {
        let (mut settling, start) = (Settling::new(Pace::default()), Instant::now());
        let [one, ..] = sights();
        settling.touch_part(start, &model(), OsStr::new("a"), Touch::Writing);
        settling.rest(&model());
        settling.forget_unseen(|_| false);
        assert_eq!(settling.look(start, start, &model(), one), None);
        settling.touch_part(start + SECOND, &model(), OsStr::new("a"), Touch::Finished);
        settling.rest(&model());
        assert_eq!(settling.look(start + 9 * SECOND, start + 9 * SECOND, &model(), one), None);
        assert_eq!(settling.due(start + 2 * SECOND), [model()]);
    }
}
