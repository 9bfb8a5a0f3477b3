//! Periods as a note says them: which of them, and how much in each, in a few words however many there are.

use super::words::{change, difference, listed};
use crate::model::Name;
use crate::model::escape::Markdown;
use crate::plan::compare::PeriodMove;

/// The most stretches of periods that are told one by one where something moves.
const STRETCHES: usize = 3;

/// Which of the periods these are, given by their places in order: `all 8 periods`, `2027-W01 to 2027-W03`, `5 of 8 periods`.
pub(super) fn which(places: &[usize], periods: &[Name]) -> String {
    Markdown(&which_plainly(places, periods)).to_string()
}

/// As [`which`], not escaped.
pub(super) fn which_plainly(places: &[usize], periods: &[Name]) -> String {
    let stretches: Vec<&[usize]> = places.chunk_by(|&one, &next| next == one + 1).collect();
    match stretches.as_slice() {
        [] => "no period".to_owned(),
        _ if places.len() == periods.len() && places.len() > 1 => format!("all {} periods", periods.len()),
        [_] | [_, _] => {
            let told: Vec<String> = stretches.iter().map(|stretch| stretch_told(stretch, periods)).collect();
            listed(&told)
        }
        _ => format!("{} of {} periods", places.len(), periods.len()),
    }
}

/// The first and the last of the periods: `2027-W01 to 2027-W08`.
pub(super) fn from_to(periods: &[Name]) -> String {
    let places: Vec<usize> = (0..periods.len()).collect();
    Markdown(&stretch_told(&places, periods)).to_string()
}

/// A period's name, escaped; empty where it has none.
pub(super) fn name(place: usize, periods: &[Name]) -> String {
    Markdown(plain(place, periods)).to_string()
}

fn plain(place: usize, periods: &[Name]) -> &str {
    periods.get(place).map_or("", Name::as_str)
}

/// In which periods something moved and how far: `2027-W03 +120, 2027-W05 to 2027-W07 -80 each; 3 more`. The largest moves are told.
pub(super) fn moves(moves: &[PeriodMove]) -> String {
    let alike = |one: &PeriodMove, next: &PeriodMove| {
        next.place == one.place + 1 && change(one.before, one.after) == change(next.before, next.after)
    };
    let stretches: Vec<&[PeriodMove]> = moves.chunk_by(alike).collect();
    let size =
        |stretch: &[PeriodMove]| -> f64 { stretch.iter().map(|told| difference(told.before, told.after).abs()).sum() };
    let mut largest: Vec<usize> = (0..stretches.len()).collect();
    largest.sort_by(|&a, &b| size(stretches[b]).total_cmp(&size(stretches[a])).then(a.cmp(&b)));
    largest.truncate(STRETCHES);
    largest.sort_unstable();
    let told: Vec<String> = largest.iter().map(|&at| moved(stretches[at])).collect();
    let named: usize = largest.iter().map(|&at| stretches[at].len()).sum();
    match moves.len() - named {
        0 => told.join(", "),
        more => format!("{}; {more} more", told.join(", ")),
    }
}

fn moved(stretch: &[PeriodMove]) -> String {
    let (Some(first), Some(last)) = (stretch.first(), stretch.last()) else { return String::new() };
    let (by, start) = (change(first.before, first.after), Markdown(first.period.as_str()));
    match stretch.len() {
        1 => format!("{start} {by}"),
        _ => format!("{start} to {} {by} each", Markdown(last.period.as_str())),
    }
}

fn stretch_told(places: &[usize], periods: &[Name]) -> String {
    match places {
        [] => String::new(),
        [only] => plain(*only, periods).to_owned(),
        [first, .., last] => format!("{} to {}", plain(*first, periods), plain(*last, periods)),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn names(count: usize) -> Vec<Name> {
        (1..=count).map(|week| Name::new(&format!("w{week}")).unwrap()).collect()
    }

    #[test]
    fn periods_are_told_in_few_words() {
        for (places, told) in [
            (&[0, 1, 2, 3, 4, 5, 6, 7][..], "all 8 periods"),
            (&[0, 1, 2], "w1 to w3"),
            (&[4], "w5"),
            (&[0, 1, 5], "w1 to w2 and w6"),
            (&[0, 2, 4, 5, 6], "5 of 8 periods"),
            (&[], "no period"),
        ] {
            assert_eq!(which(places, &names(8)), told);
        }
        assert_eq!(which(&[0], &names(1)), "w1");
        assert_eq!(from_to(&names(8)), "w1 to w8");
    }

    #[test]
    fn of_many_moves_the_largest_are_told_in_order() {
        let moved = |changes: &[f64]| {
            let one =
                |(place, (&after, period)): (usize, (&f64, Name))| PeriodMove { period, place, before: 0.0, after };
            let all = changes.iter().zip(names(changes.len())).enumerate().map(one);
            moves(&all.filter(|told| told.after != 0.0).collect::<Vec<_>>())
        };
        assert_eq!(moved(&[0.0, 0.0, 120.0, 0.0, -80.0]), "w3 +120, w5 -80");
        assert_eq!(moved(&[5.0, 5.0, 5.0]), "w1 to w3 +5 each");
        assert_eq!(
            moved(&[1.0, 0.0, 120.0, 2.0, -80.0, -80.0, 0.0, 90.0]),
            "w3 +120, w5 to w6 -80 each, w8 +90; 2 more"
        );
    }
}
