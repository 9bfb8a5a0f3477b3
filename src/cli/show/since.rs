//! How a plan stands to the release.

use super::number::{short, signed};
use crate::keep::pinned::Pinned;
use crate::model::Value;
use crate::model::escape::Plain;
use crate::plan::Plan;
use crate::plan::compare::Move;
use crate::plan::release::{Release, since};

/// The most moves that are told.
const MOVES: usize = 6;

/// The remark below the tables.
pub(super) fn remark(pinned: &Pinned, plan: &Plan) -> String {
    match pinned.release() {
        Ok(release) => format!("Since the release: {}.", told(release, plan)),
        Err(why) => format!("Nothing is compared with the release: {why}."),
    }
}

/// What has become of the aim and the levels since a release: `+1240 EUR; floor_tile 4180 → 3900, wall_tile 1200 → 1439.2`.
pub(in crate::cli) fn told(release: &Release, plan: &Plan) -> String {
    let since = since(release, plan);
    let overlap = &since.comparison.overlap;
    if overlap.is_empty() {
        return "it plans none of these periods".to_owned();
    }
    let moves = &since.comparison.moved;
    let mut parts = Vec::new();
    match since.comparison.aim {
        None if !overlap.is_whole() => {
            let many = overlap.shared.len();
            let stay = if many == 1 { "period that both plan" } else { "periods that both plan" };
            let nothing = if moves.is_empty() { " nothing moves" } else { "" };
            parts.push(format!("it is of another horizon; in the {many} {stay}{nothing}"));
        }
        None => parts.push("the aim cannot be compared, as it or its currency was changed".to_owned()),
        Some((before, after))
            if short(before) != short(after) || (moves.is_empty() && before.to_bits() != after.to_bits()) =>
        {
            let costs = if plan.minimise { "costs " } else { "" };
            parts.push(format!("{costs}{}", with_currency(signed(after - before), plan)));
        }
        Some(_) if moves.is_empty() => parts.push("nothing moves".to_owned()),
        Some(_) => parts.push("the same aim".to_owned()),
    }
    if !moves.is_empty() {
        let mut names: Vec<String> = moves.iter().take(MOVES).map(one_move).collect();
        if moves.len() > MOVES {
            names.push(format!("{} more moves", moves.len() - MOVES));
        }
        parts.push(names.join(", "));
    }
    if since.new + since.gone > 0 {
        parts.push(format!("other activities than released: {} new, {} gone", since.new, since.gone));
    }
    parts.join("; ")
}

/// `earns 129080.21 EUR`.
pub(in crate::cli) fn aim(plan: &Plan) -> String {
    let verb = if plan.minimise { "costs" } else { "earns" };
    format!("{verb} {}", with_currency(short(plan.aim), plan))
}

/// `floor_tile 4180 → 3900`; over several periods the sums, unless these are the same.
fn one_move(told: &Move) -> String {
    let side = |level: &Option<Value>| {
        let sum = |level: &Value| short(level.numbers().iter().sum());
        level.as_ref().map_or("none".to_owned(), sum)
    };
    let (before, after) = (side(&told.before), side(&told.after));
    match told.periods.len() {
        0 => format!("{} {before} → {after}", told.name),
        many @ 2.. if before == after => format!("{} shifts between {many} periods", told.name),
        1 => format!("{} {before} → {after} in one period", told.name),
        many => format!("{} {before} → {after} in {many} periods", told.name),
    }
}

fn with_currency(number: String, plan: &Plan) -> String {
    match plan.currency.as_deref() {
        Some(currency) if !currency.is_empty() => format!("{number} {}", Plain(currency)),
        _ => number,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::model::Name;
    use crate::plan::compare::PeriodMove;

    #[test]
    fn what_is_only_shifted_is_not_told_as_two_equal_sums() {
        let moved = |place| PeriodMove { period: Name::new("w").unwrap(), place, before: 0.0, after: 0.0 };
        let periods = [0, 1].map(moved).to_vec();
        let told = |before: [f64; 2], after: [f64; 2]| {
            let [before, after] = [before, after].map(|level| Some(Value::Listed(level.to_vec())));
            one_move(&Move { name: Name::new("tile").unwrap(), before, after, periods: periods.clone() })
        };
        assert_eq!(told([10.0, 20.0], [15.0, 15.0]), "tile shifts between 2 periods");
        assert_eq!(told([10.0, 20.0], [15.0, 16.0]), "tile 30 → 31 in 2 periods");
    }
}
