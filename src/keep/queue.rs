//! Who is planned when: for each model at most one running and one waiting, newest wins, first ready first served.

use std::collections::{BTreeMap, VecDeque};

use super::path::ModelPath;
use super::pool::{What, Worker};

/// After so many interruptions in a row a solve runs to its end.
pub const MOST_INTERRUPTIONS: u32 = 3;

#[derive(Debug, Default)]
struct Places {
    waiting: Option<What>,
    running: Option<Running>,
    interruptions: u32,
    /// The worker that planned it last, and holds what lives on from that.
    home: Option<Worker>,
}

#[derive(Clone, Copy, Debug)]
struct Running {
    worker: Worker,
    interrupted: bool,
}

/// The queue of all models.
#[derive(Debug)]
pub struct Queue {
    models: BTreeMap<ModelPath, Places>,
    /// Models with something waiting, in the order in which they became ready.
    order: VecDeque<ModelPath>,
    idle: Vec<bool>,
}

impl Queue {
    /// An empty queue for so many workers.
    #[must_use]
    pub fn new(workers: usize) -> Self {
        Self { models: BTreeMap::new(), order: VecDeque::new(), idle: vec![true; workers] }
    }

    /// Puts a model in its waiting place; what waited there gives way. Returns the worker to interrupt, if its solve is outdated by this.
    pub fn push(&mut self, model: &ModelPath, what: What) -> Option<Worker> {
        let places = self.models.entry(model.clone()).or_default();
        if places.waiting.replace(what).is_none() {
            self.order.push_back(model.clone());
        }
        let running = places.running.as_mut()?;
        if running.interrupted || places.interruptions >= MOST_INTERRUPTIONS {
            return None;
        }
        running.interrupted = true;
        Some(running.worker)
    }

    /// Somebody writes to a model: what waits is dropped, for it would be read half written. Returns the worker to interrupt, if one
    /// may be reading it now.
    pub fn withhold(&mut self, model: &ModelPath) -> Option<Worker> {
        let places = self.models.get_mut(model)?;
        if places.waiting.take().is_some() {
            self.order.retain(|waiting| waiting != model);
        }
        let running = places.running.as_mut()?;
        if running.interrupted || places.interruptions >= MOST_INTERRUPTIONS {
            return None;
        }
        running.interrupted = true;
        Some(running.worker)
    }

    /// The next job to start, and the worker to give it to: the model's own if that is free. `None` while none can start.
    pub fn take(&mut self) -> Option<(Worker, ModelPath, What)> {
        let any = Worker(self.idle.iter().position(|&idle| idle)?);
        let startable = |model: &ModelPath| self.models.get(model).is_some_and(|places| places.running.is_none());
        let model = self.order.iter().position(startable).and_then(|at| self.order.remove(at))?;
        let places = self.models.get_mut(&model)?;
        let what = places.waiting.take()?;
        let worker = places.home.filter(|home| self.idle[home.0]).unwrap_or(any);
        self.idle[worker.0] = false;
        places.home = Some(worker);
        places.running = Some(Running { worker, interrupted: false });
        Some((worker, model, what))
    }

    /// A worker is done with a model; `interrupted` if it gave up before the end.
    pub fn done(&mut self, worker: Worker, model: &ModelPath, interrupted: bool) {
        self.idle[worker.0] = true;
        if let Some(places) = self.models.get_mut(model) {
            places.running = None;
            places.interruptions = if interrupted { places.interruptions + 1 } else { 0 };
        }
    }

    /// Whether a model waits.
    #[must_use]
    pub fn is_waiting(&self, model: &ModelPath) -> bool {
        self.models.get(model).is_some_and(|places| places.waiting.is_some())
    }

    /// How many models wait.
    #[must_use]
    pub fn waiting(&self) -> usize {
        self.order.len()
    }

    /// Whether a model is being planned.
    #[must_use]
    pub fn is_running(&self, model: &ModelPath) -> bool {
        self.models.get(model).is_some_and(|places| places.running.is_some())
    }

    /// Drops all that waits, and returns the workers still at work.
    pub fn close(&mut self) -> Vec<Worker> {
        self.order.clear();
        for places in self.models.values_mut() {
            places.waiting = None;
        }
        self.idle.iter().enumerate().filter(|&(_, &idle)| !idle).map(|(at, _)| Worker(at)).collect()
    }

    /// Whether nothing runs and nothing waits.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.order.is_empty() && self.idle.iter().all(|&idle| idle)
    }

    /// Forgets a model that is gone, unless it has work.
    pub fn forget(&mut self, model: &ModelPath) {
        if !self.is_waiting(model) && !self.is_running(model) {
            self.models.remove(model);
        }
    }
}

#[cfg(test)]
mod tests {
    use std::path::Path;
    use std::sync::Arc;

    use super::*;

    fn model(name: &str) -> ModelPath {
        ModelPath::new(&Arc::from(Path::new("/works")), Path::new(&format!("{name}.model.toml"))).unwrap()
    }

    fn started(queue: &mut Queue) -> Option<(usize, String)> {
        queue.take().map(|(worker, model, _)| (worker.0, model.name()))
    }

    #[test]
    fn thirty_pushes_make_one_running_and_one_waiting() {
        let mut queue = Queue::new(2);
        assert_eq!(queue.push(&model("a"), What::Replan), None);
        assert_eq!(started(&mut queue), Some((0, "a".into())));
        let interrupts: Vec<_> = (0..30).filter_map(|_| queue.push(&model("a"), What::Replan)).collect();
        assert_eq!(interrupts, [Worker(0)]);
        assert_eq!(started(&mut queue), None);
        queue.done(Worker(0), &model("a"), true);
        assert_eq!(started(&mut queue), Some((0, "a".into())));
        queue.done(Worker(0), &model("a"), false);
        assert!(queue.take().is_none() && queue.is_empty());
    }

    #[test]
    fn after_three_interruptions_in_a_row_a_solve_runs_to_its_end() {
        let mut queue = Queue::new(1);
        queue.push(&model("a"), What::Replan);
        for _ in 0..3 {
            queue.take().unwrap();
            assert_eq!(queue.push(&model("a"), What::Replan), Some(Worker(0)));
            queue.done(Worker(0), &model("a"), true);
        }
        queue.take().unwrap();
        assert_eq!(queue.push(&model("a"), What::Replan), None);
        queue.done(Worker(0), &model("a"), false);
        queue.take().unwrap();
        assert_eq!(queue.push(&model("a"), What::Replan), Some(Worker(0)));
    }

    #[test]
    fn first_ready_is_first_served_and_each_goes_home_where_it_can() {
        let mut queue = Queue::new(2);
        for name in ["a", "b", "c"] {
            queue.push(&model(name), What::Replan);
        }
        assert_eq!(started(&mut queue), Some((0, "a".into())));
        assert_eq!(started(&mut queue), Some((1, "b".into())));
        assert_eq!(started(&mut queue), None);
        queue.done(Worker(1), &model("b"), false);
        queue.push(&model("b"), What::Replan);
        assert_eq!(started(&mut queue), Some((1, "c".into())));
        queue.done(Worker(0), &model("a"), false);
        queue.done(Worker(1), &model("c"), false);
        // Both are free: b goes to 1, where it was, though 0 comes first.
        assert_eq!(started(&mut queue), Some((1, "b".into())));
        // c's home is taken: it goes where there is room.
        queue.push(&model("c"), What::Replan);
        assert_eq!(started(&mut queue), Some((0, "c".into())));
    }

    #[test]
    fn a_model_that_is_always_wanted_delays_no_other_by_more_than_one_slot() {
        let mut queue = Queue::new(1);
        queue.push(&model("poison"), What::Replan);
        for name in ["a", "b", "c"] {
            assert_eq!(started(&mut queue), Some((0, "poison".into())));
            // While it runs it is saved over and over, and another model is saved once.
            for _ in 0..9 {
                queue.push(&model("poison"), What::Replan);
            }
            queue.push(&model(name), What::Replan);
            queue.done(Worker(0), &model("poison"), true);
            // It was there first and has one more run, for which it now waits behind the other.
            assert_eq!(started(&mut queue), Some((0, "poison".into())));
            queue.push(&model("poison"), What::Replan);
            queue.done(Worker(0), &model("poison"), true);
            assert_eq!(started(&mut queue), Some((0, name.into())));
            queue.done(Worker(0), &model(name), false);
        }
    }

    #[test]
    fn a_model_that_is_being_written_is_not_started() {
        let mut queue = Queue::new(1);
        queue.push(&model("a"), What::Replan);
        assert_eq!(queue.withhold(&model("a")), None);
        assert!(queue.take().is_none() && queue.is_empty());
        queue.push(&model("a"), What::Replan);
        queue.take().unwrap();
        assert_eq!(queue.withhold(&model("a")), Some(Worker(0)));
        assert_eq!(queue.withhold(&model("a")), None);
    }

    #[test]
    fn the_newest_order_wins() {
        let mut queue = Queue::new(1);
        queue.push(&model("a"), What::Retire);
        queue.push(&model("a"), What::Replan);
        assert_eq!(queue.take(), Some((Worker(0), model("a"), What::Replan)));
        assert_eq!(queue.push(&model("b"), What::Replan), None);
        assert_eq!(queue.close(), [Worker(0)]);
        queue.done(Worker(0), &model("a"), true);
        assert!(queue.is_empty());
    }
}
