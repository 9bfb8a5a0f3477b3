//! When a model is at rest: closed by its writer, or seen unchanged for a settling time. Time is passed in.

use std::collections::BTreeMap;
use std::time::{Duration, Instant};

use super::path::ModelPath;
use super::pool::What;
use super::scan::Sight;
use super::settings::Pace;

/// What an event tells about one model.
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
}

impl Settling {
    /// Nothing in motion.
    #[must_use]
    pub fn new(pace: Pace) -> Self {
        Self { pace, phases: BTreeMap::new() }
    }

    /// Takes note of an event, and says whether the model is to be read now.
    pub fn touch(&mut self, now: Instant, model: &ModelPath, touch: Touch) -> bool {
        let phase = match touch {
            Touch::Finished => {
                self.phases.remove(model);
                return true;
            }
            Touch::Writing => match self.phases.get(model) {
                Some(&Phase::Writing { since, told, .. }) => Phase::Writing { since, last: now, told },
                _ => Phase::Writing { since: now, last: now, told: false },
            },
            Touch::Gone => Phase::Missing { since: now },
        };
        self.phases.insert(model.clone(), phase);
        false
    }

    /// Takes note of what a scan begun at `began` saw of a model that was not planned so; says what is to be done about it now.
    pub fn look(&mut self, began: Instant, now: Instant, model: &ModelPath, sight: Sight) -> Option<What> {
        let still = |since: Instant, time: Duration| began.checked_duration_since(since).is_some_and(|age| age >= time);
        let phase = self.phases.get(model).copied();
        let ready = match (phase, sight.model) {
            // Events are there and tell more than a look.
            (Some(Phase::Writing { .. }), Some(_)) => return None,
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
        if !matches!(self.phases.get(model), Some(Phase::Writing { .. })) {
            self.phases.remove(model);
        }
    }

    /// Whether somebody writes to a model and has not closed it.
    #[must_use]
    pub fn is_being_written(&self, model: &ModelPath) -> bool {
        matches!(self.phases.get(model), Some(Phase::Writing { .. }))
    }

    /// Forgets looks at models that the last scan did not see any more.
    pub fn forget_unseen(&mut self, seen: impl Fn(&ModelPath) -> bool) {
        self.phases.retain(|model, phase| matches!(phase, Phase::Writing { .. }) || seen(model));
    }

    /// Forgets everything: events were lost, or another folder stands in the place of this one.
    pub fn clear(&mut self) {
        self.phases.clear();
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
            Phase::Writing { .. } => None,
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
    use crate::keep::scan::Stamp;

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
}
