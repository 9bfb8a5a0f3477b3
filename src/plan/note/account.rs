//! The line on how a plan was worked out.

use super::Reckoning;
use super::words::count;
use crate::edits::Kind;
use crate::model::escape::Markdown;
use crate::plan::types::Plan;
use crate::solver::message::Start;

/// One line: kinds of edit, what became of the last basis, the start, pivots and, where there is a plan, the proof.
pub(super) fn line(reckoning: &Reckoning, plan: Option<&Plan>) -> String {
    let mut parts: Vec<String> = Vec::new();
    let kinds: Vec<String> = reckoning.kinds.iter().map(|&kind| kind_told(kind)).collect();
    if !kinds.is_empty() {
        parts.push(kinds.join(", "));
    }
    parts.push(basis(reckoning));
    parts.push(start(reckoning));
    if reckoning.taken != Start::None || reckoning.pivots > 0 {
        parts.push(count(reckoning.pivots, "pivot"));
    }
    if !reckoning.detours.is_empty() {
        let detours: Vec<String> = reckoning.detours.iter().map(|detour| Markdown(detour).to_string()).collect();
        parts.push(format!("given up on the way: {}", detours.join(", ")));
    }
    if reckoning.exact_pivots > 0 {
        parts.push(format!("settled by {}", count(reckoning.exact_pivots, "exact pivot")));
    }
    if let Some(plan) = plan {
        parts.push(match reckoning.worst {
            worst if worst > 0.0 => format!("proven to {worst:.0e}"),
            _ => "proven to the last digit".to_owned(),
        });
        if !plan.exact {
            parts.push("near ties not told apart exactly".to_owned());
        }
    }
    format!("Worked out: {}.", parts.join("; "))
}

fn kind_told(kind: Kind) -> String {
    match kind {
        Kind::Wording | Kind::Price | Kind::Aim | Kind::Capacity | Kind::Recipe => format!("{} edit", kind.words()),
        _ => kind.words().to_owned(),
    }
}

fn basis(reckoning: &Reckoning) -> String {
    let (Some(broken), Some(open)) = (reckoning.primal_infeasible, reckoning.dual_infeasible) else {
        return "no earlier basis to start from".to_owned();
    };
    let carried =
        if reckoning.by_name { "the last basis, kept by name where both plans overlap," } else { "the last basis" };
    let could_improve = format!("left {} that could improve the aim", count(open, "level"));
    match (broken, open) {
        (0, 0) => format!("{carried} stayed optimal"),
        (_, 0) => format!("{carried} broke {} and stayed dual feasible", count(broken, "bound")),
        (0, _) => format!("{carried} stayed primal feasible and {could_improve}"),
        _ => format!("{carried} broke {} and {could_improve}", count(broken, "bound")),
    }
}

fn start(reckoning: &Reckoning) -> String {
    let taken = told(reckoning.taken.word());
    let words =
        || reckoning.expected.split(|c: char| !c.is_alphabetic()).filter(|word| *word != "or" && !word.is_empty());
    if words().next().is_none() {
        taken.to_owned()
    } else if reckoning.expected == "look" {
        format!("{taken}, chosen by what was found")
    } else if words().any(|word| word == reckoning.taken.word()) {
        format!("{taken}, as expected")
    } else {
        let expected: Vec<&str> = words().map(told).collect();
        format!("{taken} (expected: {})", expected.join(" or "))
    }
}

fn told(start: &str) -> &str {
    const WORDS: [(Start, &str); 4] = [
        (Start::None, "no pivot needed"),
        (Start::Primal, "primal simplex"),
        (Start::Dual, "dual simplex"),
        (Start::Cold, "cold solve"),
    ];
    WORDS.into_iter().find(|(known, _)| known.word() == start).map_or("another start", |(_, words)| words)
}
