//! Why one thing in a plan is as it is: for an activity the sum of what a unit earns and takes, for a resource or limit who
//! takes how much of it and what more would be worth, for a material what comes in and goes out. One period at a time.

mod account;
mod across;
mod activity;
mod limit;
mod material;
mod resource;
mod share;
mod sum;

use std::fmt;

use super::super::exit::{Error, shown as shown_path};
use super::super::screen::Screen;
use super::Shown;
use crate::model::escape::Plain;
use crate::model::{Model, Name, Over, Period};
use crate::plan::{Plan, PlannedActivity, PlannedLimit, PlannedMaterial, PlannedResource};

pub(super) fn run(screen: &mut Screen, shown: &Shown, asked: &str) -> Result<(), Error> {
    let Some(model) = &shown.model else {
        let message = format!("{} cannot be read, so nothing can be explained", shown_path(&shown.model_path));
        return Err(Error::faulty(message, "millreeve check points at its faults"));
    };
    if shown.standing.says_little() {
        // The sums of a plan that is not that of this model would not add up.
        return Err(Error::faulty(shown.standing.reason(shown), shown.standing.cure(shown)));
    }
    let thing = Thing::of(&shown.plan, asked).ok_or_else(|| unknown(shown, asked))?;
    let currency = shown.plan.currency.as_deref().unwrap_or("");
    let horizon = &model.horizon;
    let periods: Vec<Period> = match thing.period {
        Some(label) => vec![horizon.period(label).ok_or_else(|| no_period(shown, label))?],
        None if thing.is_of_several_periods(model) => horizon.periods().take(1).collect(),
        None => horizon.periods().collect(),
    };
    if periods.len() > 1 && !screen.json() {
        across::tell(screen, shown, model, &thing);
        return Ok(());
    }
    for period in periods {
        let subject = Subject { shown, model, currency, period };
        thing.tell(screen, &subject);
    }
    Ok(())
}

/// What was asked about: of each kind what bears the name, and the period.
struct Thing<'a> {
    name: &'a str,
    period: Option<&'a str>,
    activity: Option<&'a PlannedActivity>,
    resource: Option<&'a PlannedResource>,
    limit: Option<&'a PlannedLimit>,
    material: Option<&'a PlannedMaterial>,
}

impl<'a> Thing<'a> {
    /// What `asked` names: a name, or an address with the table before it or the period after it. `None` where nothing is called so.
    fn of(plan: &'a Plan, asked: &'a str) -> Option<Self> {
        const TABLES: [&str; 4] = ["activities", "resources", "limits", "materials"];
        let parts: Vec<&str> = asked.split('.').collect();
        let readings: Vec<(Option<&str>, &str, Option<&str>)> = match *parts.as_slice() {
            [name] => vec![(None, name, None)],
            [first, second] if TABLES.contains(&first) => {
                vec![(Some(first), second, None), (None, first, Some(second))]
            }
            [name, period] => vec![(None, name, Some(period))],
            [table, name, period] if TABLES.contains(&table) => vec![(Some(table), name, Some(period))],
            _ => vec![],
        };
        readings.into_iter().map(|(table, name, period)| Self::named(plan, table, name, period)).find(Self::is_any)
    }

    fn named(plan: &'a Plan, table: Option<&str>, name: &'a str, period: Option<&'a str>) -> Self {
        let wanted = |what: &str| table.is_none_or(|table| table == what);
        let called = |other: &Name, what: &str| wanted(what) && other.as_str() == name;
        Self {
            name,
            period,
            activity: plan.activities.iter().find(|planned| called(&planned.name, "activities")),
            resource: plan.resources.iter().find(|planned| called(&planned.name, "resources")),
            limit: plan.limits.iter().find(|planned| called(&planned.name, "limits")),
            material: plan.materials.iter().find(|planned| called(&planned.name, "materials")),
        }
    }

    fn is_any(&self) -> bool {
        self.activity.is_some() || self.resource.is_some() || self.limit.is_some() || self.material.is_some()
    }

    /// Whether it is a limit over several periods together, of which there is nothing to say in one.
    fn is_of_several_periods(&self, model: &Model) -> bool {
        let alone = self.activity.is_none() && self.resource.is_none() && self.material.is_none();
        let limit = self.limit.and_then(|planned| model.limits.get(&planned.name));
        alone && limit.is_some_and(|limit| limit.over != Over::Each)
    }

    fn tell(&self, screen: &mut Screen, subject: &Subject<'_>) {
        if let Some(planned) = self.activity {
            activity::tell(screen, subject, planned);
        }
        if let Some(planned) = self.resource {
            resource::tell(screen, subject, planned);
        }
        if let Some(planned) = self.limit {
            limit::tell(screen, subject, planned);
        }
        if let Some(planned) = self.material {
            material::tell(screen, subject, planned);
        }
    }
}

/// What the explanations need.
struct Subject<'a> {
    shown: &'a Shown,
    model: &'a Model,
    currency: &'a str,
    /// The period told of.
    period: Period,
}

impl Subject<'_> {
    /// A number with the currency after it, where there is one.
    fn money(&self, number: f64) -> String {
        with_unit(number, Some(self.currency))
    }

    /// ` in 2027-W03`; empty where the period has no name.
    fn in_period(&self) -> String {
        self.label().map(|label| format!(" in {}", Plain(label))).unwrap_or_default()
    }

    /// The name of the period, where it has one.
    fn label(&self) -> Option<&str> {
        self.model.horizon.label(self.period)
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
        .chain(plan.limits.iter().map(|planned| planned.name.as_str()))
        .chain(plan.materials.iter().map(|planned| planned.name.as_str()));
    let help = nearest(asked, names).unwrap_or_else(|| {
        "--why takes the name of an activity, a resource, a limit or a material of the plan".to_owned()
    });
    Error::usage(format_args!("the plan has no `{}`", Plain(asked)), help)
}

fn no_period(shown: &Shown, label: &str) -> Error {
    let periods = &shown.plan.periods;
    let help = match periods.as_slice() {
        [] => "it plans a single period without a name".to_owned(),
        [first, .., last] => {
            nearest(label, periods.iter().map(Name::as_str)).unwrap_or_else(|| format!("it plans {first} to {last}"))
        }
        [only] => format!("it plans {only} alone"),
    };
    Error::usage(format_args!("the plan has no period `{}`", Plain(label)), help)
}

fn nearest<'n>(asked: &str, names: impl Iterator<Item = &'n str>) -> Option<String> {
    let (distance, name) = names.map(|name| (strsim::damerau_levenshtein(asked, name), name)).min()?;
    (distance <= 2.max(name.chars().count() / 3)).then(|| format!("did you mean `{name}`?"))
}
