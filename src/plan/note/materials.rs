//! What a note says of materials: what is bought, sold, late and left, and where that touches a bound.

use super::layout::{ROWS, section};
use super::scarce::farthest;
use super::words::{amount, labelled, per_unit, total, with_unit};
use super::{Report, periods};
use crate::model::{Material, Name, Value};
use crate::plan::compare::{Comparison, find, moved};
use crate::plan::make::NIL;
use crate::plan::types::{Plan, PlannedMaterial};

/// A line of the list, and how urgent it is: the more, the earlier it stands.
struct Line {
    touches: usize,
    worth: f64,
    name: Name,
    text: String,
}

/// A line for each material that is bought, sold or late, that touches a bound, or of which more would be worth something.
pub(super) fn told(report: &Report<'_>, plan: &Plan, comparison: Option<&Comparison>) -> String {
    let comparable = comparison.is_some_and(|comparison| comparison.overlap.is_whole());
    let before = report.before.filter(|_| comparable);
    let mut lines: Vec<Line> = plan
        .materials
        .iter()
        .filter_map(|planned| {
            let known = report.model.and_then(|model| model.materials.get(&planned.name));
            let was = before.and_then(|before| find(&before.materials, &planned.name, |planned| &planned.name));
            Teller { plan, planned, known, was }.line()
        })
        .collect();
    lines.sort_by(|a, b| b.touches.cmp(&a.touches).then(b.worth.total_cmp(&a.worth)).then_with(|| a.name.cmp(&b.name)));
    let mut body: String = lines.iter().take(ROWS).map(|line| format!("- {}\n", line.text)).collect();
    if lines.len() > ROWS {
        body.push_str(&format!("- … and {} more materials\n", lines.len() - ROWS));
    }
    section("What is bought, sold and left", &body)
}

/// Tells of one material.
struct Teller<'a> {
    plan: &'a Plan,
    planned: &'a PlannedMaterial,
    /// The material in the model, for its bounds and unit.
    known: Option<&'a Material>,
    /// The same material in the plan before.
    was: Option<&'a PlannedMaterial>,
}

impl Teller<'_> {
    fn line(&self) -> Option<Line> {
        let (mut parts, mut touches) = (Vec::new(), 0);
        for (part, touch) in [self.bought(), self.sold(), self.late(), self.left(), self.thrown()].into_iter().flatten()
        {
            touches += touch;
            parts.push(part);
        }
        let worth = self.planned.worth_of_more.as_ref().and_then(farthest).filter(|(_, worth)| worth.abs() > 0.0);
        parts.extend(worth.as_ref().map(|(places, worth)| self.worth(places, *worth)));
        if parts.is_empty() {
            return None;
        }
        let name = labelled(&self.planned.name, self.known.and_then(|known| known.label.as_deref()));
        Some(Line {
            touches,
            worth: worth.map_or(0.0, |(_, worth)| worth.abs() * total(Some(&self.planned.drawn))),
            name: self.planned.name.clone(),
            text: format!("{name}: {}", parts.join("; ")),
        })
    }

    /// `bought 540 t (480 before), at its most in 2027-W03`.
    fn bought(&self) -> Option<(String, usize)> {
        let purchase = self.planned.purchase.as_ref()?;
        let was = self.was.and_then(|was| was.purchase.as_ref());
        let bought = self.amount("bought", purchase, was)?;
        let most = |place| {
            let tiers = self.known.map_or(&[][..], |known| &known.purchase);
            tiers.iter().map(|tier| number(&tier.at_most, place)).sum::<f64>()
        };
        let full = self.places(purchase, |place, bought| bought > 0.0 && reaches(bought, most(place)));
        Some(self.touching(bought, ", at its most", &full))
    }

    fn sold(&self) -> Option<(String, usize)> {
        let was = self.was.and_then(|was| was.sale.as_ref());
        Some((self.amount("sold", self.planned.sale.as_ref()?, was)?, 0))
    }

    /// `firm sales late in 2027-W03 to 2027-W04, 6 t at most`.
    fn late(&self) -> Option<(String, usize)> {
        let late = self.planned.late.as_ref()?;
        let places = self.places(late, |_, late| late > 0.0);
        let (_, most) = farthest(late).filter(|_| !places.is_empty())?;
        let most = self.united(most);
        Some((format!("firm sales late{}, {most} at most", self.in_periods(&places)), places.len()))
    }

    /// `stock at its least in 2027-W05, full in 2027-W02; 12 t left at the end`.
    fn left(&self) -> Option<(String, usize)> {
        let stock = self.planned.stock.as_ref()?;
        let bounds = self.known.and_then(|known| known.stock.as_ref());
        let least = |place| bounds.map_or(0.0, |bounds| number(&bounds.at_least, place));
        let most = |place| bounds.map_or(f64::INFINITY, |bounds| number(&bounds.at_most, place));
        let low = self.places(stock, |place, left| least(place) > 0.0 && reaches(least(place), left));
        let full =
            self.places(stock, |place, left| left > 0.0 && least(place) < most(place) && reaches(left, most(place)));
        let last = stock.numbers().last().copied().unwrap_or(0.0);
        let mut parts = Vec::new();
        if !low.is_empty() {
            parts.push(format!("down to its safety stock{}", self.in_periods(&low)));
        }
        if !full.is_empty() {
            parts.push(format!("stock full{}", self.in_periods(&full)));
        }
        if last > 0.0 {
            parts.push(format!("{} left at the end", self.united(last)));
        }
        (!parts.is_empty()).then(|| (parts.join(", "), low.len() + full.len()))
    }

    fn thrown(&self) -> Option<(String, usize)> {
        let discard = self.planned.discard.as_ref()?;
        let was = self.was.and_then(|was| was.discard.as_ref());
        Some((self.amount("thrown away", discard, was)?, self.places(discard, |_, thrown| thrown > 0.0).len()))
    }

    /// `one more is worth 42 EUR per t at most, in 2027-W03`.
    fn worth(&self, places: &[usize], worth: f64) -> String {
        let rate = per_unit(worth, self.plan.currency.as_deref(), self.known.and_then(|known| known.unit.as_deref()));
        if self.plan.periods.len() < 2 || places.len() == self.plan.periods.len() {
            return format!("one more is worth {rate}");
        }
        format!("one more is worth {rate} at most,{}", self.in_periods(places))
    }

    /// `bought 540 t (480 before)`; `None` where it is nothing and was nothing.
    fn amount(&self, verb: &str, value: &Value, was: Option<&Value>) -> Option<String> {
        let (now, was) = (total(Some(value)), was.map(|was| total(Some(was))));
        if now <= 0.0 && was.is_none_or(|was| was <= 0.0) {
            return None;
        }
        let earlier =
            was.filter(|&was| moved(was, now)).map_or(String::new(), |was| format!(" ({} before)", amount(was)));
        Some(format!("{verb} {}{earlier}", self.united(now)))
    }

    fn touching(&self, text: String, words: &str, places: &[usize]) -> (String, usize) {
        if places.is_empty() {
            return (text, 0);
        }
        (format!("{text}{words}{}", self.in_periods(places)), places.len())
    }

    fn places(&self, value: &Value, holds: impl Fn(usize, f64) -> bool) -> Vec<usize> {
        let numbers = value.numbers().iter().enumerate();
        numbers.filter(|&(place, &number)| holds(place, number)).map(|(place, _)| place).collect()
    }

    /// ` in 2027-W03`; empty where there is one period only.
    fn in_periods(&self, places: &[usize]) -> String {
        if self.plan.periods.len() < 2 {
            return String::new();
        }
        format!(" in {}", periods::which(places, &self.plan.periods))
    }

    fn united(&self, number: f64) -> String {
        with_unit(&amount(number), self.known.and_then(|known| known.unit.as_deref()))
    }
}

fn number(value: &Value, place: usize) -> f64 {
    let numbers = value.numbers();
    numbers.get(place).or(numbers.last()).copied().unwrap_or(0.0)
}

/// Whether a number comes up to a bound, in the digits that a plan keeps.
fn reaches(number: f64, bound: f64) -> bool {
    bound.is_finite() && number >= bound - NIL * bound.abs()
}
