//! What came of a look at a model, told as a line or as an object.

use serde_json::json;

use super::exit::{Outcome, text};
use super::json;
use super::screen::{BAD, Screen, WARN};
use crate::keep::{ModelPath, Replanned, Report};
use crate::model::escape::Plain;

/// What came of one model means for the command as a whole.
pub(super) fn outcome(replanned: &Replanned) -> Outcome {
    match replanned {
        Replanned::Done(report) | Replanned::Unchanged(report) => {
            Outcome::good_if(matches!(report.standing.as_str(), "current" | "retired"))
        }
        Replanned::Interrupted | Replanned::Vanished => Outcome::Amiss,
        Replanned::Failed { .. } => Outcome::Failed,
    }
}

/// Tells one object.
pub(super) fn object(screen: &mut Screen, model: &ModelPath, replanned: &Replanned) {
    screen.line(object_line(model, replanned));
}

/// One object as a line of JSON; for a look that gave no plan, `standing` is `vanished`, `interrupted` or `failed`.
pub(super) fn object_line(model: &ModelPath, replanned: &Replanned) -> String {
    let without = |standing: &str, error: Option<&str>| {
        let mut object = json!({ "model": model.name(), "path": text(&model.seen()), "standing": standing });
        if let Some(error) = error {
            object["error"] = error.into();
        }
        json::line(&object)
    };
    match replanned {
        Replanned::Done(report) | Replanned::Unchanged(report) => json::line(report),
        Replanned::Vanished => without("vanished", None),
        Replanned::Interrupted => without("interrupted", None),
        Replanned::Failed { message, .. } => without("failed", Some(message)),
    }
}

/// Tells one line for people; a model with faults has one more for each after the first.
pub(super) fn line(screen: &mut Screen, model: &ModelPath, replanned: &Replanned) {
    let good = outcome(replanned) == Outcome::Good;
    match replanned {
        Replanned::Done(report) if good => screen.say(report),
        Replanned::Unchanged(_) if good => screen.say(format_args!("{}: unchanged", Plain(&model.name()))),
        Replanned::Done(report) | Replanned::Unchanged(report) => {
            screen.say(format_args!("{WARN}{}{WARN:#}", faults(report)));
        }
        Replanned::Vanished => screen.aside(format_args!("{BAD}{model}: there is no such file{BAD:#}")),
        Replanned::Interrupted => screen.aside(format_args!("{WARN}{model}: given up{WARN:#}")),
        Replanned::Failed { message, .. } => screen.aside(format_args!("{BAD}{model}: {message}{BAD:#}")),
    }
}

/// The report's line, and all faults after it, one a line.
fn faults(report: &Report) -> String {
    let mut text = report.to_string();
    for fault in report.faults.iter().skip(1) {
        text.push_str(&format!("\n  {}", Plain(&fault.path)));
        if let (Some(line), Some(column)) = (fault.line, fault.column) {
            text.push_str(&format!(":{line}:{column}"));
        }
        text.push_str(&format!(": {}", Plain(&fault.message)));
    }
    text
}
