//! Values: one number, or, written by period, a list of one number per period or a table of numbers by the names of periods.

use toml::de::{DeArray, DeValue};

use super::calendar::{Calendar, EACH, PER_DAY};
use super::findings::{Among, Cure, Findings, Span, shown};
use super::number::{self, Role};
use super::toml_types::{Key, Node, Table};
use crate::model::value::{Period, Value};

/// The value of `key`: a number, a list of one per period, or a table of numbers by period.
pub(super) fn value(
    key: &str,
    node: &Node<'_>,
    role: Role,
    calendar: &Calendar,
    findings: &mut Findings,
) -> Option<Value> {
    match node.get_ref() {
        DeValue::Table(table) => ByPeriod { key, role, calendar }.table(table, &node.span(), findings),
        DeValue::Array(list) => ByPeriod { key, role, calendar }.list(list, &node.span(), findings),
        _ => number::number(key, node, role, findings).map(Value::Every),
    }
}

/// One value that is written by period.
struct ByPeriod<'a> {
    key: &'a str,
    role: Role,
    calendar: &'a Calendar,
}

impl ByPeriod<'_> {
    /// The value in a list.
    fn list(&self, list: &DeArray<'_>, span: &Span, findings: &mut Findings) -> Option<Value> {
        if !self.calendar.is_faulty() {
            self.check_length(list.len(), span, findings);
        }
        let numbers: Vec<_> = list.iter().map(|item| number::number(self.key, item, self.role, findings)).collect();
        let numbers = numbers.into_iter().collect::<Option<_>>()?;
        self.calendar.kept(Value::of(numbers))
    }

    fn check_length(&self, length: usize, span: &Span, findings: &mut Findings) {
        let (key, wanted) = (shown(self.key), self.calendar.horizon().count());
        if !self.calendar.horizon().is_named() {
            let message = format!("a list for `{key}` gives one number per period, but the model names no periods");
            findings.add(span, "no-periods", message, NAME_THEM);
        } else if length != wanted {
            let numbers = if length == 1 { "number" } else { "numbers" };
            let message = format!("`{key}` lists {length} {numbers}, but {wanted} are wanted");
            let each = if wanted == 1 { "" } else { "each of " };
            let help = format!("give one number for {each}{}", self.calendar.told());
            findings.add(span, "wrong-length", message, help);
        }
    }

    /// The value in a table.
    fn table(&self, table: &Table<'_>, span: &Span, findings: &mut Findings) -> Option<Value> {
        if table.is_empty() {
            let message = format!("`{}` has an empty table where a number is meant", shown(self.key));
            findings.add(span, "wrong-type", message, "give a number, such as 168");
            return None;
        }
        if self.calendar.is_full() {
            return None;
        }
        let rest = self.rest(table, findings);
        let named = table.iter().filter(|(word, _)| ![EACH, PER_DAY].contains(&word.get_ref().as_ref()));
        let named: Vec<_> = named.map(|(word, node)| self.of_one(word, node, findings)).collect();
        let (rest, named) = (rest?, named.into_iter().collect::<Option<Vec<_>>>()?);
        let value = match rest {
            Some(value) if named.is_empty() => value,
            rest => self.filled(rest.as_ref(), &named, span, findings)?,
        };
        self.calendar.kept(value)
    }

    /// What `each` or `per_day` gives for the periods that are not named. The outer `None` is for what is faulty.
    fn rest(&self, table: &Table<'_>, findings: &mut Findings) -> Option<Option<Value>> {
        match (table.get_key_value(EACH), table.get_key_value(PER_DAY)) {
            (None, None) => Some(None),
            (Some((_, node)), None) => {
                number::number(self.key, node, self.role, findings).map(|number| Some(Value::Every(number)))
            }
            (None, Some((word, node))) => self.per_day(word, node, findings).map(Some),
            (Some((each, _)), Some((per_day, _))) => {
                let (each, per_day) = (each.span(), per_day.span());
                let later = if each.start > per_day.start { each } else { per_day };
                let message = format!("`each` and `per_day` cannot stand together for `{}`", shown(self.key));
                findings.add(&later, "each-and-per-day", message, "keep one of the two");
                None
            }
        }
    }

    fn per_day(&self, word: &Key<'_>, node: &Node<'_>, findings: &mut Findings) -> Option<Value> {
        if !self.role.is_bound() {
            let message = format!("`{}` cannot be given `per_day`: only capacities and bounds can", shown(self.key));
            findings.add(&word.span(), "not-per-day", message, "give the number itself, for each period");
            return None;
        }
        let per_day = number::number(PER_DAY, node, Role::Amount, findings)?;
        let Some(numbers) = self.calendar.of_days(per_day) else {
            if !self.calendar.is_faulty() {
                let message = "`per_day` asks for the working days in each period, but the model has no `days`";
                let help = match self.calendar.horizon().is_named() {
                    true => "add `days` to the model, one number per period, as in days = [5, 4]",
                    false => "add `days` to the model, as in days = 10",
                };
                findings.add(&word.span(), "no-days", message.to_owned(), help);
            }
            return None;
        };
        for &number in &numbers {
            if let Err(refusal) = number::allowed(self.key, number, self.role) {
                refusal.tell(&node.span(), findings);
                return None;
            }
        }
        Some(Value::of(numbers))
    }

    fn of_one(&self, word: &Key<'_>, node: &Node<'_>, findings: &mut Findings) -> Option<(Period, f64)> {
        let number = number::number(self.key, node, self.role, findings);
        let label: &str = word.get_ref();
        let period = self.calendar.period(label);
        if period.is_none() && !self.calendar.is_faulty() {
            if self.calendar.horizon().is_named() {
                let cure = Cure::Nearest(shown(label), Among::Periods(self.calendar.told()));
                findings.add(&word.span(), "unknown-period", format!("no period `{}`", shown(label)), cure);
            } else {
                let message =
                    format!("`{}` is not `each`, so it would be a period, but the model names none", shown(label));
                findings.add(&word.span(), "no-periods", message, NAME_THEM);
            }
        }
        Some((period?, number?))
    }

    /// The numbers of the periods that are named, and of the others from the rest.
    fn filled(
        &self,
        rest: Option<&Value>,
        named: &[(Period, f64)],
        span: &Span,
        findings: &mut Findings,
    ) -> Option<Value> {
        let horizon = self.calendar.horizon();
        let mut numbers: Vec<_> = horizon.periods().map(|period| rest.map(|rest| rest.at(period))).collect();
        for (period, number) in named {
            numbers[period.position()] = Some(*number);
        }
        if let Some(left_out) = horizon.periods().find(|period| numbers[period.position()].is_none()) {
            let label = horizon.label(left_out).unwrap_or_default();
            let message = format!("`{}` has no number for period `{label}`", shown(self.key));
            let help =
                "add one, or one for all periods that are not named: `each` in a table, a column without `@` in CSV";
            findings.add(span, "period-missing", message, help);
            return None;
        }
        Some(Value::of(numbers.into_iter().flatten().collect()))
    }
}

/// The cure where a value is given by period and there are none.
const NAME_THEM: &str =
    "name the periods in the model, as in periods = [\"2027-W01\", \"2027-W02\"], or give one number";
