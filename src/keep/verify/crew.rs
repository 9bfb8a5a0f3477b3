//! Several plans verified at a time.

use std::collections::BTreeMap;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::atomic::{AtomicUsize, Ordering};
use std::sync::mpsc;
use std::thread;

use super::{Finding, Pair, examine};
use crate::keep::settings::Settings;

/// Verifies plans with as many threads as the settings allow, and tells of each in the order given, as soon as it is its turn.
pub fn verify(pairs: &[Pair], settings: &Settings, mut tell: impl FnMut(&Pair, Finding)) {
    let next = AtomicUsize::new(0);
    let workers = settings.workers.clamp(1, pairs.len().max(1));
    thread::scope(|scope| {
        let (found, inbox) = mpsc::channel();
        for _ in 0..workers {
            let (found, next) = (found.clone(), &next);
            scope.spawn(move || {
                while let Some((number, pair)) = take(next, pairs) {
                    // Nobody listens any more once the teller has panicked.
                    let _ = found.send((number, attempt(pair, settings)));
                }
            });
        }
        drop(found);
        let mut waiting = BTreeMap::new();
        let mut turn = 0;
        for (number, finding) in inbox {
            waiting.insert(number, finding);
            while let Some(finding) = waiting.remove(&turn) {
                if let Some(finding) = finding {
                    tell(&pairs[turn], finding);
                }
                turn += 1;
            }
        }
    });
}

fn take<'a>(next: &AtomicUsize, pairs: &'a [Pair]) -> Option<(usize, &'a Pair)> {
    let number = next.fetch_add(1, Ordering::Relaxed);
    pairs.get(number).map(|pair| (number, pair))
}

/// A panic costs one model, not the others.
fn attempt(pair: &Pair, settings: &Settings) -> Option<Finding> {
    let panicked = "an error inside millreeve stopped the work; please report it with the model";
    let examined = catch_unwind(AssertUnwindSafe(|| examine(pair, settings.time_limit)));
    examined.unwrap_or_else(|_| Some(Finding::Untold(panicked.to_owned())))
}
