//! What a worker says on standard error: a few lines of it go into the log, the rest is counted.

use std::io::{BufRead, BufReader, Read};
use std::time::{Duration, Instant};

use crate::model::escape::Plain;

/// A line is cut after so many bytes.
const LONGEST: u64 = 400;

/// So many lines go into the log within [`SPAN`].
const LINES: u32 = 10;

/// See [`LINES`].
const SPAN: Duration = Duration::from_secs(60);

/// What Rust and C++ say when there is no memory to be had.
const OUT_OF_MEMORY: [&str; 2] = ["memory allocation of ", "bad_alloc"];

/// What mattered of it.
#[derive(Debug, Default)]
pub(super) struct Said {
    out_of_memory: bool,
}

impl Said {
    /// Listens until the worker ends.
    pub(super) fn listen(from: impl Read, number: usize) -> Self {
        let mut said = Self::default();
        let mut from = BufReader::new(from);
        let mut measure = Measure::new(Instant::now());
        let mut line = Vec::new();
        loop {
            line.clear();
            match (&mut from).take(LONGEST).read_until(b'\n', &mut line) {
                Ok(0) | Err(_) => return said,
                Ok(_) => {}
            }
            let text = String::from_utf8_lossy(&line);
            let text = text.trim();
            said.out_of_memory |= OUT_OF_MEMORY.iter().any(|sign| text.contains(sign));
            if !text.is_empty() && measure.allows(Instant::now()) {
                tracing::warn!("worker {number}: {}{}", Plain(text), measure.told());
            }
        }
    }

    /// Words for an end for lack of memory, if it was one.
    pub(super) fn out_of_memory(&self) -> Option<&'static str> {
        self.out_of_memory.then_some("it ran out of the memory that it may take")
    }
}

/// Lets through a few things in a span of time, and counts what it kept back.
struct Measure {
    since: Instant,
    passed: u32,
    kept_back: u64,
}

impl Measure {
    fn new(now: Instant) -> Self {
        Self { since: now, passed: 0, kept_back: 0 }
    }

    fn allows(&mut self, now: Instant) -> bool {
        if now.saturating_duration_since(self.since) >= SPAN {
            (self.since, self.passed) = (now, 0);
        }
        let allows = self.passed < LINES;
        if allows {
            self.passed += 1;
        } else {
            self.kept_back += 1;
        }
        allows
    }

    /// Says how much was kept back since it was last asked.
    fn told(&mut self) -> String {
        match std::mem::take(&mut self.kept_back) {
            0 => String::new(),
            count => format!(" (after {count} more lines that are not shown)"),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_flood_is_cut_to_a_few_lines_and_counted() {
        let start = Instant::now();
        let mut measure = Measure::new(start);
        let passed = (0..1000).filter(|_| measure.allows(start)).count();
        assert_eq!(passed, LINES as usize);
        assert!(measure.allows(start + SPAN));
        assert_eq!(measure.told(), " (after 990 more lines that are not shown)");
        assert_eq!(measure.told(), "");
    }

    #[test]
    fn a_lack_of_memory_is_known_by_what_is_said_last() {
        let flood = "x".repeat(1 << 20);
        let listen = |text: &str| Said::listen(text.as_bytes(), 1).out_of_memory();
        assert_eq!(listen(&format!("{flood}\n\u{1b}[2J\0\n")), None);
        let told = "it ran out of the memory that it may take";
        assert_eq!(listen(&format!("{flood}\nmemory allocation of 8 bytes failed\n")), Some(told));
        assert_eq!(listen("terminate called after throwing an instance of 'std::bad_alloc'"), Some(told));
    }
}
