//! What came of a look at a model, told as a line or as an object.

use serde_json::json;

use super::exit::{Outcome, text};
use super::screen::{BAD, GOOD, Screen, WARN};
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

/// Tells one object; for a look that gave no plan, `standing` is `vanished`, `interrupted` or `failed`.
pub(super) fn object(screen: &mut Screen, model: &ModelPath, replanned: &Replanned) {
    let without = |standing: &str, error: Option<&str>| {
        let mut object = json!({ "model": model.name(), "path": text(model.relative()), "standing": standing });
        if let Some(error) = error {
            object["error"] = error.into();
        }
        object
    };
    match replanned {
        Replanned::Done(report) | Replanned::Unchanged(report) => screen.object(report),
        Replanned::Vanished => screen.object(&without("vanished", None)),
        Replanned::Interrupted => screen.object(&without("interrupted", None)),
        Replanned::Failed { message, .. } => screen.object(&without("failed", Some(message))),
    }
}

/// Tells one line for people.
pub(super) fn line(screen: &mut Screen, model: &ModelPath, replanned: &Replanned) {
    match replanned {
        Replanned::Done(report) => {
            let look = if outcome(replanned) == Outcome::Good { GOOD } else { WARN };
            screen.say(format_args!("{look}{:<9}{look:#}  {}", Plain(&report.standing), faults(report)));
        }
        Replanned::Unchanged(_) if outcome(replanned) == Outcome::Good => {
            screen.say(format_args!("unchanged  {model}"));
        }
        Replanned::Unchanged(report) => {
            screen.say(format_args!("{WARN}{:<9}{WARN:#}  {}, unchanged", Plain(&report.standing), faults(report)));
        }
        Replanned::Vanished => screen.aside(format_args!("{BAD}gone{BAD:#}       {model}: there is no such file")),
        Replanned::Interrupted => screen.aside(format_args!("{WARN}given up{WARN:#}   {model}")),
        Replanned::Failed { message, .. } => screen.aside(format_args!("{BAD}failed{BAD:#}     {model}: {message}")),
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
