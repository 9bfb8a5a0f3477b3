//! Why one thing in a plan is as it is: for an activity the sum of what a unit earns and takes, for a resource or limit who
//! takes how much of it and what more would be worth.

mod activity;
mod share;
mod sum;

use std::fmt;

use super::super::exit::{Error, shown as shown_path};
use super::super::screen::Screen;
use super::Shown;
use crate::model::Model;
use crate::model::escape::Plain;

pub(super) fn run(screen: &mut Screen, shown: &Shown, asked: &str) -> Result<(), Error> {
    let Some(model) = &shown.model else {
        let message = format!("{} cannot be read, so nothing can be explained", shown_path(&shown.model_path));
        return Err(Error::faulty(message, "millreeve check points at its faults"));
    };
    if shown.standing.says_little() {
        // The sums of a plan that is not that of this model would not add up.
        return Err(Error::faulty(shown.standing.reason(shown), shown.standing.cure(shown)));
    }
    let subject = Subject { shown, model, currency: shown.plan.currency.as_deref().unwrap_or("") };
    let (table, name) = asked.split_once('.').map_or((None, asked), |(table, name)| (Some(table), name));
    let wanted = |what: &str| table.is_none_or(|table| table == what);
    let mut found = false;
    let plan = &shown.plan;
    if let Some(planned) = plan.activities.iter().find(|planned| wanted("activities") && planned.name.as_str() == name)
    {
        activity::tell(screen, &subject, planned);
        found = true;
    }
    if let Some(planned) = plan.resources.iter().find(|planned| wanted("resources") && planned.name.as_str() == name) {
        share::of_resource(screen, &subject, planned);
        found = true;
    }
    if let Some(planned) = plan.limits.iter().find(|planned| wanted("limits") && planned.name.as_str() == name) {
        share::of_limit(screen, &subject, planned);
        found = true;
    }
    if found { Ok(()) } else { Err(unknown(shown, asked)) }
}

/// What the explanations need.
struct Subject<'a> {
    shown: &'a Shown,
    model: &'a Model,
    currency: &'a str,
}

impl Subject<'_> {
    /// A number with the currency after it, where there is one.
    fn money(&self, number: f64) -> String {
        with_unit(number, Some(self.currency))
    }
}

/// A number with a unit after it, where there is one.
fn with_unit(number: f64, unit: Option<&str>) -> String {
    let number = super::number::short(number);
    match unit {
        Some(unit) if !unit.is_empty() => format!("{number} {}", Plain(unit)),
        _ => number,
    }
}

/// A name with its label in brackets, where it has one.
fn titled(name: &dyn fmt::Display, label: Option<&str>) -> String {
    label.map_or_else(|| name.to_string(), |label| format!("{name} ({})", Plain(label)))
}

/// A unit, or what stands for one.
fn unit_or<'a>(unit: Option<&'a str>, otherwise: &'a str) -> String {
    Plain(unit.unwrap_or(otherwise)).to_string()
}

fn unknown(shown: &Shown, asked: &str) -> Error {
    let plan = &shown.plan;
    let names = (plan.activities.iter().map(|planned| planned.name.as_str()))
        .chain(plan.resources.iter().map(|planned| planned.name.as_str()))
        .chain(plan.limits.iter().map(|planned| planned.name.as_str()));
    let nearest = names.map(|name| (strsim::damerau_levenshtein(asked, name), name)).min();
    let help = match nearest {
        Some((distance, name)) if distance <= 2.max(name.chars().count() / 3) => format!("did you mean `{name}`?"),
        _ => "--why takes the name of an activity, a resource or a limit of the plan".to_owned(),
    };
    Error::usage(format_args!("the plan has no `{}`", Plain(asked)), help)
}
