//! Numbers, names and counts as a note says them.

use crate::model::escape::Markdown;
use crate::model::{Model, Name, Value};
use crate::plan::compare::moved;
use crate::plan::number::{push_significant, rounded_to};

/// Significant digits shown to people; whole numbers keep all of theirs.
const SHOWN: usize = 6;

/// The most digits that telling two numbers apart may take.
const MOST: usize = 12;

/// A number with thousands set apart: `43 265.1`.
pub(super) fn amount(number: f64) -> String {
    with_digits(number, SHOWN)
}

/// Two numbers, with as many digits as it takes to tell them apart.
pub(super) fn amounts(before: f64, after: f64) -> (String, String) {
    let mut digits = SHOWN;
    loop {
        let texts = (with_digits(before, digits), with_digits(after, digits));
        if texts.0 != texts.1 || digits >= MOST || !moved(before, after) {
            return texts;
        }
        digits += 1;
    }
}

/// The change from `before` to `after`, with its sign.
pub(super) fn change(before: f64, after: f64) -> String {
    signed(difference(before, after))
}

/// `after` less `before`, without the noise below the digits of both.
pub(super) fn difference(before: f64, after: f64) -> f64 {
    rounded_to(after - before, before.abs().max(after.abs()))
}

/// A number with its sign, also where that is plus.
pub(super) fn signed(number: f64) -> String {
    if number > 0.0 { format!("+{}", amount(number)) } else { amount(number) }
}

/// A share in per cent, to two digits: `1.8 %`.
pub(super) fn per_cent(share: f64) -> String {
    let mut text = String::new();
    push_significant(&mut text, 100.0 * share.abs(), if share.abs() >= 1.0 { 3 } else { 2 });
    format!("{} %", grouped(&text))
}

fn with_digits(number: f64, digits: usize) -> String {
    let mut whole = 0;
    let mut rest = number.abs();
    while rest >= 1.0 && whole < MOST {
        rest /= 10.0;
        whole += 1;
    }
    let mut text = String::new();
    push_significant(&mut text, number, digits.max(whole));
    grouped(&text)
}

/// A written number with its whole part in groups of three.
fn grouped(text: &str) -> String {
    let (sign, text) = text.strip_prefix('-').map_or(("", text), |rest| ("-", rest));
    let whole = text.bytes().take_while(u8::is_ascii_digit).count();
    if text.contains('e') || whole < 4 {
        return format!("{sign}{text}");
    }
    let mut out = sign.to_owned();
    for (position, digit) in text[..whole].char_indices() {
        if position > 0 && (whole - position).is_multiple_of(3) {
            out.push(' ');
        }
        out.push(digit);
    }
    out.push_str(&text[whole..]);
    out
}

/// A text from people, escaped and cut to a readable length.
pub(super) fn text(text: &str) -> String {
    const LONGEST: usize = 300;
    match text.char_indices().nth(LONGEST) {
        Some((at, _)) => format!("{}…", Markdown(&text[..at])),
        None => Markdown(text).to_string(),
    }
}

/// A text with its unit, if it has one.
pub(super) fn with_unit(amount: &str, unit: Option<&str>) -> String {
    match unit {
        Some(unit) if !unit.is_empty() => format!("{amount} {}", text(unit)),
        _ => amount.to_owned(),
    }
}

/// A rate: `38.2 EUR per h`.
pub(super) fn per_unit(rate: f64, currency: Option<&str>, unit: Option<&str>) -> String {
    let earned = with_unit(&amount(rate), currency);
    match unit {
        Some(unit) if !unit.is_empty() => format!("{earned} per {}", text(unit)),
        _ => earned,
    }
}

/// The number of a value; where it has one per period, what they come to.
pub(super) fn value(value: &Value) -> String {
    amount(total(Some(value)))
}

/// Two values, with as many digits as it takes to tell them apart.
pub(super) fn values(before: &Value, after: &Value) -> (String, String) {
    amounts(total(Some(before)), total(Some(after)))
}

/// What all periods come to.
pub(super) fn total(value: Option<&Value>) -> f64 {
    let numbers = match value {
        None => return 0.0,
        Some(Value::Every(number)) => return *number,
        Some(Value::Listed(numbers)) => numbers,
    };
    let sum: f64 = numbers.iter().sum();
    // Below the digits of the largest there is but noise.
    rounded_to(sum, numbers.iter().fold(sum.abs(), |most, number| most.max(number.abs())))
}

/// A name with the label that stands beside it.
pub(super) fn labelled(name: &Name, label: Option<&str>) -> String {
    match label {
        Some(label) if !label.is_empty() && label != name.as_str() => {
            format!("{} ({})", Markdown(name.as_str()), text(label))
        }
        _ => Markdown(name.as_str()).to_string(),
    }
}

/// Names in a row: `a, b and c`.
pub(super) fn listed(names: &[String]) -> String {
    match names {
        [] => String::new(),
        [one] => one.clone(),
        [first @ .., last] => format!("{} and {last}", first.join(", ")),
    }
}

/// A count with its noun, in the right number.
pub(super) fn count(count: usize, noun: &str) -> String {
    match count {
        0 => format!("no {noun}"),
        1 => format!("1 {noun}"),
        _ => format!("{count} {}", plural(noun)),
    }
}

/// As [`count`], with small numbers as words: `two moves`.
pub(super) fn counted(number: usize, noun: &str) -> String {
    const WORDS: [&str; 13] =
        ["no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten", "eleven", "twelve"];
    match WORDS.get(number) {
        Some(word) if number == 1 => format!("{word} {noun}"),
        Some(word) => format!("{word} {}", plural(noun)),
        None => count(number, noun),
    }
}

fn plural(noun: &str) -> String {
    noun.strip_suffix('y').map_or_else(|| format!("{noun}s"), |stem| format!("{stem}ies"))
}

/// The unit of an activity's level.
pub(super) fn unit_of_activity<'a>(model: Option<&'a Model>, name: &Name) -> Option<&'a str> {
    model?.activities.get(name)?.unit.as_deref()
}

/// The unit of a resource.
pub(super) fn unit_of_resource<'a>(model: Option<&'a Model>, name: &Name) -> Option<&'a str> {
    model?.resources.get(name)?.unit.as_deref()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn people_get_few_digits_in_groups() {
        for (number, text) in [
            (43265.1, "43 265.1"),
            (0.0, "0"),
            (4180.0, "4 180"),
            (-1234567.8, "-1 234 568"),
            (1.0 / 3.0, "0.333333"),
            (123456.7, "123 457"),
            (1e-7, "1e-7"),
            (2.5e18, "2.5e18"),
        ] {
            assert_eq!(amount(number), text);
        }
    }

    #[test]
    fn a_change_that_is_shown_never_vanishes() {
        assert_eq!(amounts(43265.10, 43265.12), ("43 265.1".to_owned(), "43 265.12".to_owned()));
        assert_eq!(amounts(2.0, 2.000_000_1), ("2".to_owned(), "2.0000001".to_owned()));
        assert_eq!(amounts(2.0, 2.0), ("2".to_owned(), "2".to_owned()));
        assert_eq!(change(43265.1, 43265.12), "+0.02");
        assert_eq!(change(5.0, 3.0), "-2");
    }
}
