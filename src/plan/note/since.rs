//! What a note says of the release.

use super::ReleaseTold;
use super::layout::section;
use super::moves::move_table;
use super::periods::from_to;
use super::words::{amount, count, counted, difference, signed, text, with_unit};
use crate::model::Model;
use crate::plan::compare::moved;
use crate::plan::release::{Since, since};
use crate::plan::types::Plan;

/// The heading of the part of a note that tells of the release.
const TITLE: &str = "Since the release";

/// What the line begins with that says which release a note tells of. It is not shown.
const MARK: &str = "<!-- Release: ";

/// What stands at the end of every note, below what it says of the release.
pub(super) const ADVICE: &str = "\nA plan is advice: safety rules, permits and labour law bind before it does.\n";

/// The part of a note that holds `plan` against the release; empty without one.
pub(super) fn told(pinned: Option<ReleaseTold<'_>>, plan: &Plan, model: Option<&Model>) -> String {
    let Some(pinned) = pinned else { return String::new() };
    let body = match pinned.release {
        Ok(release) => compared(&since(release, plan), plan, model),
        Err(why) => format!("Nothing is compared with it: {}.", text(why)),
    };
    section(TITLE, &format!("{MARK}{} -->\n\n{body}", pinned.mark))
}

/// The mark of the release that a note tells of, if it tells of one.
pub(super) fn mark(note: &str) -> Option<&str> {
    note.lines().find_map(|line| line.strip_prefix(MARK)?.strip_suffix(" -->"))
}

/// A note with another part about the release in the place of the one it had, or of none.
pub(super) fn retold(note: &str, part: &str) -> String {
    let Some(end) = note.rfind(ADVICE) else { return note.to_owned() };
    let start = note[..end].rfind(&format!("\n## {TITLE}\n\n{MARK}")).unwrap_or(end);
    format!("{}{part}{}", &note[..start], &note[end..])
}

fn compared(since: &Since, plan: &Plan, model: Option<&Model>) -> String {
    let mut out = format!("{}.\n", lead(since, plan));
    let moves = &since.comparison.moved;
    if !moves.is_empty() {
        out.push_str(&format!("\n{}", move_table(model, moves, "released")));
    }
    if since.new + since.gone > 0 {
        let parts = [(since.new, "new since"), (since.gone, "gone")];
        let told: Vec<String> = parts
            .iter()
            .filter(|(number, _)| *number > 0)
            .map(|(number, what)| {
                format!("{} {} {what}", count(*number, "activity"), if *number == 1 { "is" } else { "are" })
            })
            .collect();
        out.push_str(&format!("\nThe release is of a model with other activities: {}.\n", told.join(", ")));
    }
    out
}

/// `+1 240 EUR, two moves`.
fn lead(since: &Since, plan: &Plan) -> String {
    let moves = since.comparison.moved.len();
    let moves_told = counted(moves, "move");
    let overlap = &since.comparison.overlap;
    if overlap.is_empty() {
        return "Nothing is compared with it: it plans none of these periods".to_owned();
    }
    match since.comparison.aim {
        None if !overlap.is_whole() => {
            let shared = match overlap.shared.len() {
                1 => format!("in {}, the one period that both plan", from_to(&overlap.shared)),
                many => format!("in {}, the {many} periods that both plan", from_to(&overlap.shared)),
            };
            let told = if moves == 0 { "nothing moves".to_owned() } else { moves_told };
            format!("It is of another horizon, so aims are not compared; {shared}, {told}")
        }
        None => format!("The aim cannot be compared, as it or its currency was changed; {moves_told}"),
        Some((before, after)) if moved(before, after) => {
            let by = difference(before, after);
            let size = |told: String| with_unit(&told, plan.currency.as_deref());
            match (plan.minimise, by > 0.0) {
                (false, _) => format!("{}, {moves_told}", size(signed(by))),
                (true, true) => format!("Costs {} more, {moves_told}", size(amount(by.abs()))),
                (true, false) => format!("Costs {} less, {moves_told}", size(amount(by.abs()))),
            }
        }
        Some(_) if moves == 0 => "As released: nothing moves".to_owned(),
        Some(_) => format!("The same aim, {moves_told}"),
    }
}
