//! `keep --status`: what the daemon that keeps a folder says of itself.

use std::path::Path;

use super::exit::{Error, Outcome, shown};
use super::once::locked;
use super::screen::{BAD, HEAD, Screen, WARN};
use crate::keep::Status;
use crate::model::escape::Plain;
use crate::store::{Folder, Lock};

/// Tells it. Fails where no daemon keeps the folder.
pub(super) fn tell(screen: &mut Screen, dir: &Path, state: Option<&Path>) -> Result<Outcome, Error> {
    let none = || {
        Error::failure(
            format_args!("nothing keeps {}", shown(dir)),
            format_args!("`millreeve keep {}` does", Plain(&dir.to_string_lossy())),
        )
    };
    let Some(folder) = Folder::find(dir, state) else { return Err(none()) };
    let holder = Lock::holder(&folder).map_err(|error| locked(&error))?.ok_or_else(none)?;
    let status = Status::read(folder.state()).map_err(|error| {
        Error::failure(format_args!("{} is kept by {holder}, but says nothing of itself: {error}", shown(dir)), "")
    })?;
    if screen.json() {
        screen.object(&status);
    } else {
        screen.say(words(&status, &holder).trim_end());
    }
    Ok(Outcome::Good)
}

/// The lines for people.
fn words(status: &Status, holder: &str) -> String {
    let models: usize = status.models.values().sum();
    let counts = status.models.iter().map(|(standing, count)| format!("{count} {}", Plain(standing)));
    let counts: Vec<_> = counts.chain([format!("{} waiting", status.waiting)]).collect();
    let done = &status.done;
    let mut text = format!(
        "{HEAD}{}{HEAD:#}\n  kept by   {holder}\n  as of     {} after its start, when something last happened\n  watching  {}\n  models    {models}: {}\n  done      {} replanned, {} unchanged, {} given up for a newer edit, {} failed\n",
        Plain(&status.folder),
        lasting(status.seconds),
        Plain(&status.watching.words),
        counts.join(", "),
        done.replanned,
        done.unchanged,
        done.interrupted,
        done.failed,
    );
    if status.waiting > 0 {
        let models = if status.waiting == 1 { "model" } else { "models" };
        text.push_str(&format!("  waiting   {} {models}, for {}\n", status.waiting, lasting(status.waiting_seconds)));
    }
    for running in &status.running {
        text.push_str(&format!("  running   {}, for {}\n", Plain(&running.path), lasting(running.seconds)));
    }
    for trouble in &status.trouble {
        text.push_str(&format!("  {BAD}trouble{BAD:#}   {}\n", Plain(trouble)));
    }
    for amiss in &status.amiss {
        let standing = format!("{:<8}", amiss.standing);
        text.push_str(&format!(
            "  {WARN}{}{WARN:#}  {}: {}\n",
            Plain(&standing),
            Plain(&amiss.path),
            Plain(&amiss.why)
        ));
    }
    if status.more > 0 {
        text.push_str(&format!("  and {} more\n", status.more));
    }
    text
}

/// A stretch of time to its two largest units: `3 h 12 min`.
fn lasting(seconds: u64) -> String {
    let (minutes, hours, days) = (seconds / 60, seconds / 3600, seconds / 86_400);
    match (days, hours, minutes) {
        (0, 0, 0) => format!("{seconds} s"),
        (0, 0, _) => format!("{minutes} min {} s", seconds % 60),
        (0, _, _) => format!("{hours} h {} min", minutes % 60),
        _ => format!("{days} d {} h", hours % 24),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::keep::status::{Amiss, Running};

    #[test]
    fn times_are_told_to_two_units() {
        let told = [0, 59, 61, 3600, 90_061].map(lasting);
        assert_eq!(told, ["0 s", "59 s", "1 min 1 s", "1 h 0 min", "1 d 1 h"]);
    }

    #[test]
    fn a_status_is_told_line_by_line_and_escaped() {
        let mut status = Status {
            folder: "/works\u{1b}".into(),
            seconds: 7,
            waiting: 2,
            waiting_seconds: 61,
            more: 3,
            ..Status::default()
        };
        status.watching.words = "edits are noticed by file events".into();
        status.models = [("current", 4), ("held", 1)].map(|(standing, count)| (standing.to_owned(), count)).into();
        status.running = vec![Running { path: "a.model.toml".into(), seconds: 3 }];
        status.amiss =
            vec![Amiss { path: "b.model.toml".into(), standing: "held".into(), why: "line 2:\nno such key".into() }];
        let told = anstream::adapter::strip_str(&words(&status, "process 7 on host mill")).to_string();
        assert_eq!(
            told,
            "/works\\u{1b}\n  kept by   process 7 on host mill\n  as of     7 s after its start, when something last \
             happened\n  watching  edits are noticed by file events\n  \
             models    5: 4 current, 1 held, 2 waiting\n  done      0 replanned, 0 unchanged, 0 given up for a newer edit, \
             0 failed\n  waiting   2 models, for 1 min 1 s\n  running   a.model.toml, for 3 s\n  held      b.model.toml: line 2:\\u{a}no such key\n  and 3 more\n"
        );
    }
}
