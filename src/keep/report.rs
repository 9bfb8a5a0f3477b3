//! What is told about one replan: as the object of `--json`, and as a line for the log.

use std::fmt;

use serde::Serialize;

use crate::model::escape::Plain;
use crate::model::fault::Fault;
use crate::plan::compare::Event;

/// What is told about one replan. Serialises to the object of `--json`; texts are not escaped.
#[derive(Clone, Debug, Default, PartialEq, Serialize)]
pub struct Report {
    /// The model's name.
    pub model: String,
    /// The model's path, relative to the watched folder.
    pub path: String,
    /// How its plan stands: `current`, `held`, `retired`, or `none` where there has never been one.
    pub standing: String,
    /// Why it is held; left out where it is not.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub held: Option<String>,
    /// The aim of the plan.
    pub aim: Option<f64>,
    /// The aim of the plan before, where there was one. Not part of the object.
    #[serde(skip)]
    pub aim_before: Option<f64>,
    /// Whether nothing in that plan was decided by a tolerance.
    pub exact: Option<bool>,
    /// Whether other plans earn as much.
    pub ties: Option<bool>,
    /// The kinds of edit, without repeats.
    pub edit: Vec<&'static str>,
    /// The start taken; none where nothing was solved.
    pub start: Option<&'static str>,
    /// The start that the kinds of edit foretold.
    pub expected_start: Option<String>,
    /// What the last basis broke under the new data; none where there was no basis to look at.
    pub infeasible: Option<Infeasible>,
    /// Simplex iterations.
    pub pivots: usize,
    /// Pivots in exact arithmetic after that, to the one plan.
    pub exact_pivots: usize,
    /// Whether a warm run was given up for taking more iterations than a fresh solve is worth.
    pub capped: bool,
    /// Where the time went.
    pub milliseconds: Milliseconds,
    /// Activities that entered the mix.
    pub entered: Vec<String>,
    /// Activities that left it.
    pub left: Vec<String>,
    /// Prospects whose price has passed their break-even.
    pub would_enter: Vec<String>,
    /// What happened that somebody may want to hear of.
    pub events: Vec<Event>,
    /// What is wrong with the model.
    pub faults: Vec<FaultLine>,
}

/// How far the last basis was from feasible, by our own count.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize)]
pub struct Infeasible {
    /// Bounds broken.
    pub primal: usize,
    /// Levels that could still improve the aim.
    pub dual: usize,
}

/// Where the time of a replan went, in milliseconds.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize)]
pub struct Milliseconds {
    /// Reading, checking, building and comparing.
    pub read: f64,
    /// Solving and proving.
    pub solve: f64,
    /// Writing plan and note.
    pub write: f64,
    /// From start to end.
    pub all: f64,
}

/// One fault, as the object of `--json` has it.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct FaultLine {
    /// The file.
    pub path: String,
    /// Line, from 1.
    pub line: Option<usize>,
    /// Column, from 1.
    pub column: Option<usize>,
    /// Stable identifier.
    pub code: String,
    /// What is wrong.
    pub message: String,
    /// What would mend it.
    pub help: String,
}

impl From<&Fault> for FaultLine {
    fn from(fault: &Fault) -> Self {
        Self {
            path: fault.path.to_string_lossy().into_owned(),
            line: fault.place.as_ref().map(|place| place.line),
            column: fault.place.as_ref().map(|place| place.column),
            code: fault.code.to_owned(),
            message: fault.message.clone(),
            help: fault.help.clone(),
        }
    }
}

impl fmt::Display for Report {
    /// One line, escaped: `tileworks: capacity; aim 43265.1 → 43019.8; dual, 3 pivots, 4.1 ms`.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}: ", Plain(&self.model))?;
        match &self.held {
            // The faults, told below, are the reason.
            Some(_) if !self.faults.is_empty() => f.write_str("held")?,
            Some(reason) => write!(f, "held: {}", Plain(reason))?,
            None if self.standing != "current" => f.write_str(&self.standing)?,
            None if self.edit.is_empty() && self.aim_before.is_none() => f.write_str("first plan")?,
            None if self.edit.is_empty() => f.write_str("as before")?,
            None => f.write_str(&self.edit.join(", "))?,
        }
        match (self.aim_before, self.aim) {
            (Some(before), Some(after)) if before.to_bits() != after.to_bits() => {
                write!(f, "; aim {before} → {after}")?
            }
            (_, Some(aim)) => write!(f, "; aim {aim}")?,
            (_, None) => {}
        }
        if let Some(start) = self.start {
            let plural = if self.pivots == 1 { "" } else { "s" };
            write!(f, "; {start}, {} pivot{plural}", self.pivots)?;
            write!(f, ", {:.1} ms", self.milliseconds.all)?;
        }
        if let Some(first) = self.faults.first() {
            write!(f, "; {}", Plain(&first.path))?;
            if let (Some(line), Some(column)) = (first.line, first.column) {
                write!(f, ":{line}:{column}")?;
            }
            write!(f, ": {}", Plain(&first.message))?;
            let more = self.faults.len() - 1;
            if more > 0 {
                write!(f, " (and {more} more)")?;
            }
        }
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn report() -> Report {
        Report {
            model: "tileworks".into(),
            path: "tileworks.model.toml".into(),
            standing: "current".into(),
            aim: Some(43_019.8),
            aim_before: Some(43_265.1),
            edit: vec!["capacity"],
            start: Some("dual"),
            expected_start: Some("dual".into()),
            pivots: 3,
            milliseconds: Milliseconds { all: 4.06, ..Milliseconds::default() },
            ..Report::default()
        }
    }

    #[test]
    fn a_replan_is_one_line() {
        assert_eq!(report().to_string(), "tileworks: capacity; aim 43265.1 → 43019.8; dual, 3 pivots, 4.1 ms");
        let fault = |line| FaultLine {
            path: "tileworks.model.toml".into(),
            line: Some(line),
            column: Some(3),
            code: "unknown-key".into(),
            message: "`capcity`\nis unknown".into(),
            help: String::new(),
        };
        let held = Report {
            standing: "held".into(),
            held: Some("the model cannot be read".into()),
            start: None,
            aim: None,
            faults: vec![fault(4), fault(9)],
            ..report()
        };
        assert_eq!(
            held.to_string(),
            "tileworks: held; tileworks.model.toml:4:3: `capcity`\\u{a}is unknown (and 1 more)"
        );
    }

    #[test]
    fn the_object_has_the_names_that_were_promised() {
        let value = serde_json::to_value(report()).unwrap();
        let keys: Vec<_> = value.as_object().unwrap().keys().cloned().collect();
        let mut promised = vec![
            "model",
            "path",
            "standing",
            "aim",
            "exact",
            "ties",
            "edit",
            "start",
            "expected_start",
            "infeasible",
            "pivots",
            "exact_pivots",
            "capped",
            "milliseconds",
            "entered",
            "left",
            "would_enter",
            "events",
            "faults",
        ];
        promised.sort_unstable();
        let mut keys = keys;
        keys.sort();
        assert_eq!(keys, promised);
        assert_eq!(value["milliseconds"]["all"], 4.06);
    }
}
