//! The far side of the pipe: takes orders, answers them, and tells how far it is.

use std::io::{Read, Write};
use std::sync::mpsc::{self, RecvTimeoutError};
use std::sync::{Arc, Mutex, PoisonError};
use std::thread;
use std::time::Duration;

use super::frame::{self, LARGEST};
use super::{Order, WireError, Word, decode, encode, greet, meet};
use crate::solver::message::{Progress, Request};
use crate::solver::stop::Stop;
use crate::solver::worker::Solver;

/// How often a running solve tells how far it is.
const TELL_EVERY: Duration = Duration::from_millis(100);

/// Answers orders until there are no more.
///
/// Orders are read by a thread of their own, so that an interrupt reaches a running solve. That thread calls `ended` as soon as
/// nothing more can come, with what was wrong if something was: a solve may be running, which then is for nobody.
///
/// # Errors
/// The other side is not what it should be, or what it says is no order, or the pipe to it failed.
pub fn serve(
    mut from: impl Read + Send + 'static,
    to: impl Write + Send + 'static,
    solver: &mut dyn Solver,
    ended: impl FnOnce(Option<&WireError>) + Send + 'static,
) -> Result<(), WireError> {
    let to = Arc::new(Mutex::new(to));
    greet(&mut *lock(&to))?;
    meet(&mut from)?;
    let (orders, inbox) = mpsc::channel();
    let reader = thread::Builder::new().name("orders".to_owned()).spawn(move || {
        let done = take_orders(&mut from, &orders);
        ended(done.as_ref().err());
        done
    })?;
    let (solving, progress) = mpsc::channel();
    let teller = to.clone();
    thread::Builder::new().name("progress".to_owned()).spawn(move || tell_progress(&progress, &teller))?;
    for (request, stop) in inbox {
        // The thread that listens ends only when this function does.
        let _ = solving.send(Some(stop.clone()));
        let answer = solver.ask(request, &stop);
        let _ = solving.send(None);
        frame::write(&mut *lock(&to), &encode(&Word::Answer(Box::new(answer)))?)?;
    }
    reader.join().unwrap_or(Err(WireError::Garbled))
}

/// Passes requests on, and raises the flag of the last one where it is to be given up.
fn take_orders(from: &mut impl Read, requests: &mpsc::Sender<(Request, Stop)>) -> Result<(), WireError> {
    let mut last = Stop::default();
    while let Some(bytes) = frame::read(from, LARGEST)? {
        match decode(&bytes)? {
            Order::Solve(request) => {
                last = Stop::default();
                if requests.send((*request, last.clone())).is_err() {
                    return Ok(());
                }
            }
            Order::Interrupt => last.stop(),
        }
    }
    Ok(())
}

/// Tells now and then how far the solve under way is, if it has moved.
fn tell_progress(solves: &mpsc::Receiver<Option<Stop>>, to: &Mutex<impl Write>) {
    let mut told = 0;
    while let Ok(mut under_way) = solves.recv() {
        while let Some(stop) = under_way {
            under_way = match solves.recv_timeout(TELL_EVERY) {
                Ok(next) => next,
                Err(RecvTimeoutError::Disconnected) => return,
                Err(RecvTimeoutError::Timeout) => {
                    let pivots = stop.pivots();
                    // Where the pipe fails, the answer will say so.
                    if pivots != told
                        && let Ok(bytes) = encode(&Word::Progress(Progress { pivots }))
                        && frame::write(&mut *lock(to), &bytes).is_ok()
                    {
                        told = pivots;
                    }
                    Some(stop)
                }
            };
        }
    }
}

fn lock<T>(mutex: &Mutex<T>) -> std::sync::MutexGuard<'_, T> {
    mutex.lock().unwrap_or_else(PoisonError::into_inner)
}
