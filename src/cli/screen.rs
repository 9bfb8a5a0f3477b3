//! Where a command speaks: results on standard output, everything else on standard error.

use std::fmt;
use std::io::{self, IsTerminal, Write};

use anstream::{AutoStream, ColorChoice};
use anstyle::{AnsiColor, Style};
use serde::Serialize;

use super::args::Color;
use super::exit::Error;
use super::json;

/// A fault, an error.
pub(crate) const BAD: Style = AnsiColor::Red.on_default().bold();
/// Something to look at.
pub(crate) const WARN: Style = AnsiColor::Yellow.on_default().bold();
/// All is well.
pub(crate) const GOOD: Style = AnsiColor::Green.on_default().bold();
/// What to do about it.
pub(crate) const HINT: Style = AnsiColor::Cyan.on_default();
/// A heading.
pub(crate) const HEAD: Style = Style::new().bold();

/// The two streams of a command. Nothing it does panics or fails when a reader has gone; what could not be written for another
/// reason is told by [`Screen::finish`].
pub(crate) struct Screen {
    out: AutoStream<io::Stdout>,
    err: AutoStream<io::Stderr>,
    /// Whether results are JSON objects.
    json: bool,
    out_is_terminal: bool,
    err_is_terminal: bool,
    lost: Option<io::Error>,
    progress: bool,
}

impl Screen {
    /// The process's own streams.
    pub(crate) fn new(color: Color, json: bool) -> Self {
        let choice = match color {
            Color::Auto => ColorChoice::Auto,
            Color::Always => ColorChoice::AlwaysAnsi,
            Color::Never => ColorChoice::Never,
        };
        Self {
            out_is_terminal: io::stdout().is_terminal(),
            err_is_terminal: io::stderr().is_terminal(),
            out: AutoStream::new(io::stdout(), choice),
            err: AutoStream::new(io::stderr(), choice),
            json,
            lost: None,
            progress: false,
        }
    }

    /// Whether results are JSON objects.
    pub(crate) fn json(&self) -> bool {
        self.json
    }

    /// Whether a person looks at the results.
    pub(crate) fn out_is_terminal(&self) -> bool {
        self.out_is_terminal
    }

    /// How many columns fit on a line of results: those of the terminal, else what `COLUMNS` says; `None` where nothing limits them.
    pub(crate) fn width(&self) -> Option<usize> {
        let of_terminal = || rustix::termios::tcgetwinsize(io::stdout()).ok().map(|size| usize::from(size.ws_col));
        let told = || std::env::var("COLUMNS").ok()?.trim().parse().ok();
        of_terminal().filter(|_| self.out_is_terminal).or_else(told).filter(|&width| width > 0)
    }

    /// One or several lines of results for people; the last line's end is added.
    pub(crate) fn say(&mut self, text: impl fmt::Display) {
        self.clear_progress();
        let written = writeln!(self.out, "{text}");
        self.note(written);
    }

    /// One object of results for programs.
    pub(crate) fn object(&mut self, value: &impl Serialize) {
        self.line(json::line(value));
    }

    /// The same, already a line of JSON.
    pub(crate) fn line(&mut self, line: String) {
        self.say(line);
        let flushed = self.out.flush();
        self.note(flushed);
    }

    /// Bytes of results, as they are.
    pub(crate) fn raw(&mut self, bytes: &[u8]) {
        let written = io::stdout().write_all(bytes);
        self.note(written);
    }

    /// A line beside the results, on standard error.
    pub(crate) fn aside(&mut self, text: impl fmt::Display) {
        self.clear_progress();
        // Standard error is where this would be told.
        let _ = writeln!(self.err, "{text}");
    }

    /// How long work is getting on: one line that the next replaces, on a terminal only.
    pub(crate) fn progress(&mut self, text: impl fmt::Display) {
        if self.err_is_terminal {
            let _ = write!(self.err, "\r\x1b[2K{text}");
            let _ = self.err.flush();
            self.progress = true;
        }
    }

    /// Tells an error, with its cure where there is one.
    pub(crate) fn error(&mut self, error: &Error) {
        if self.json {
            self.aside(json::line(&serde_json::json!({ "error": error.message(), "help": error.help() })));
            return;
        }
        self.aside(format_args!("{BAD}error:{BAD:#} {}", error.message()));
        if !error.help().is_empty() {
            self.aside(format_args!("  {HINT}{}{HINT:#}", error.help()));
        }
    }

    /// Flushes the results.
    ///
    /// # Errors
    /// Where some of them could not be written, for another reason than that nobody reads on.
    pub(crate) fn finish(&mut self) -> Result<(), Error> {
        self.clear_progress();
        let flushed = self.out.flush();
        self.note(flushed);
        self.lost
            .take()
            .map_or(Ok(()), |error| Err(Error::failure(format_args!("cannot write to standard output: {error}"), "")))
    }

    fn clear_progress(&mut self) {
        if std::mem::take(&mut self.progress) {
            let _ = write!(self.err, "\r\x1b[2K");
        }
    }

    /// Takes note of how results were written elsewhere.
    pub(crate) fn note(&mut self, written: io::Result<()>) {
        if let Err(error) = written
            && error.kind() != io::ErrorKind::BrokenPipe
        {
            self.lost.get_or_insert(error);
        }
    }
}
