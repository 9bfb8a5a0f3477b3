//! Lines for a reader who may be slow, or never read at all: whoever tells them does not wait.

use std::collections::VecDeque;
use std::fs::File;
use std::io::{self, ErrorKind, Write};
use std::os::fd::AsFd;
use std::sync::{Arc, Condvar, Mutex, MutexGuard, PoisonError};
use std::thread;
use std::time::Duration;

use serde_json::json;

/// Lines that wait take at most so many bytes; beyond, the oldest are left out.
const MOST: usize = 8 << 20;

/// How long the end waits for lines that have not been taken yet.
const LINGER: Duration = Duration::from_millis(300);

/// Lines on their way out.
pub(super) struct Outbox(Arc<Shared>);

#[derive(Default)]
struct Shared {
    state: Mutex<State>,
    changed: Condvar,
}

#[derive(Default)]
struct State {
    lines: VecDeque<String>,
    bytes: usize,
    /// How many lines were left out since the last one was written.
    left_out: u64,
    /// Whether a line is being written.
    writing: bool,
    /// Whether nobody reads any more, or something else is wrong; that is told at the end.
    broken: Option<Option<io::Error>>,
}

impl Outbox {
    /// One whose lines go to standard output.
    ///
    /// # Errors
    /// The system has no descriptor or thread left.
    pub(super) fn to_stdout() -> io::Result<Self> {
        // A descriptor of its own: whoever waits to write through the library's holds a lock that the end would wait for.
        Self::to(File::from(io::stdout().as_fd().try_clone_to_owned()?))
    }

    fn to(out: impl Write + Send + 'static) -> io::Result<Self> {
        let shared = Arc::new(Shared::default());
        let of_writer = shared.clone();
        thread::Builder::new().name("outbox".to_owned()).spawn(move || of_writer.write_to(out))?;
        Ok(Self(shared))
    }

    /// Sends a line, without waiting.
    pub(super) fn send(&self, line: String) {
        let mut state = self.0.state();
        if state.broken.is_some() {
            return;
        }
        state.bytes += line.len();
        state.lines.push_back(line);
        while state.bytes > MOST
            && let Some(oldest) = state.lines.pop_front()
        {
            state.bytes -= oldest.len();
            state.left_out += 1;
        }
        self.0.changed.notify_all();
    }

    /// Gives the reader a moment to take what is left.
    ///
    /// # Errors
    /// Lines could not be written, for another reason than that nobody reads on.
    pub(super) fn finish(self) -> io::Result<()> {
        let is_busy = |state: &mut State| state.broken.is_none() && (state.writing || !state.lines.is_empty());
        let waited = self.0.changed.wait_timeout_while(self.0.state(), LINGER, is_busy);
        let (mut state, _) = waited.unwrap_or_else(PoisonError::into_inner);
        state.broken.take().flatten().map_or(Ok(()), Err)
    }
}

impl Shared {
    fn state(&self) -> MutexGuard<'_, State> {
        // It is whole after every statement.
        self.state.lock().unwrap_or_else(PoisonError::into_inner)
    }

    fn write_to(&self, mut out: impl Write) {
        loop {
            let mut line = self.next();
            line.push('\n');
            // In one go: whoever reads on sees whole lines.
            let written = out.write_all(line.as_bytes()).and_then(|()| out.flush());
            let mut state = self.state();
            state.writing = false;
            if let Err(error) = written {
                state.broken = Some((error.kind() != ErrorKind::BrokenPipe).then_some(error));
                state.lines.clear();
                self.changed.notify_all();
                return;
            }
            self.changed.notify_all();
        }
    }

    /// Waits for the next line. In the place of those that were left out comes one that counts them.
    fn next(&self) -> String {
        let waited = self.changed.wait_while(self.state(), |state| state.lines.is_empty());
        let mut state = waited.unwrap_or_else(PoisonError::into_inner);
        state.writing = true;
        if state.left_out > 0 {
            return json!({ "left_out": std::mem::take(&mut state.left_out) }).to_string();
        }
        let line = state.lines.pop_front().unwrap_or_default();
        state.bytes -= line.len();
        line
    }
}

#[cfg(test)]
mod tests {
    use std::sync::mpsc::{Receiver, Sender, channel};

    use super::*;

    /// Takes a line each time it is let.
    struct Slow(Receiver<()>, Sender<Vec<u8>>);

    impl Write for Slow {
        fn write(&mut self, bytes: &[u8]) -> io::Result<usize> {
            self.0.recv().map_err(|_| ErrorKind::BrokenPipe)?;
            self.1.send(bytes.to_vec()).map_err(|_| ErrorKind::BrokenPipe)?;
            Ok(bytes.len())
        }

        fn flush(&mut self) -> io::Result<()> {
            Ok(())
        }
    }

    #[test]
    fn a_reader_that_does_not_read_loses_the_oldest_lines_and_is_told_how_many() {
        let ((let_it, may), (took, taken)) = (channel(), channel());
        let outbox = Outbox::to(Slow(may, took)).unwrap();
        outbox.send("first".to_owned());
        // From here on the writer is stuck with the first line, and of twelve more ten fit.
        while !outbox.0.state().writing {
            thread::yield_now();
        }
        ('a'..='l').for_each(|letter| outbox.send(letter.to_string().repeat(MOST / 10)));
        assert!(outbox.0.state().bytes <= MOST);
        (0..100).for_each(|_| let_it.send(()).unwrap());
        let mut read = Vec::new();
        // The first, the count of those left out, and the ten that fit.
        while read.iter().filter(|&&byte| byte == b'\n').count() < 12 {
            read.extend(taken.recv().unwrap());
        }
        outbox.finish().unwrap();
        let text = String::from_utf8(read).unwrap();
        let lines: Vec<_> = text.lines().map(|line| &line[..line.len().min(14)]).collect();
        assert_eq!(lines[..3], ["first", "{\"left_out\":2}", "cccccccccccccc"]);
        assert_eq!(lines[11], "llllllllllllll");
    }

    #[test]
    fn a_reader_that_has_gone_is_no_failure() {
        let ((_, may), (took, _)) = (channel(), channel());
        let outbox = Outbox::to(Slow(may, took)).unwrap();
        (0..1000).for_each(|number| outbox.send(number.to_string()));
        outbox.finish().unwrap();
    }
}
