//! Numbers for people: as many digits as they can use, aligned at the point.

use crate::model::Value;

/// A number with four decimal places at most, fewer as it grows: `4081.79`, `46.8852`, `0.0137`, `inf`. What is not 0 never
/// shows as 0.
pub(super) fn short(number: f64) -> String {
    if !number.is_finite() {
        return if number > 0.0 { "inf".to_owned() } else { "-inf".to_owned() };
    }
    let size = number.abs();
    if size == 0.0 {
        return "0".to_owned();
    }
    if !(1e-3..1e13).contains(&size) {
        return tidy(&format!("{number:.3e}"));
    }
    let places = if size >= 100.0 {
        2
    } else if size >= 0.1 {
        4
    } else {
        6
    };
    tidy(&format!("{number:.places$}"))
}

/// Takes the zeros at the end of the digits after the point away.
fn tidy(text: &str) -> String {
    let (digits, exponent) = text.split_once('e').map_or((text, None), |(digits, exponent)| (digits, Some(exponent)));
    let digits = if digits.contains('.') { digits.trim_end_matches('0').trim_end_matches('.') } else { digits };
    exponent.map_or_else(|| digits.to_owned(), |exponent| format!("{digits}e{exponent}"))
}

/// As [`short`], with its sign always.
pub(super) fn signed(number: f64) -> String {
    let text = short(number);
    if number > 0.0 { format!("+{text}") } else { text }
}

/// A value: its number, or its numbers one after the other.
pub(super) fn value(value: &Value) -> String {
    value.numbers().iter().map(|&number| short(number)).collect::<Vec<_>>().join("  ")
}

/// Between which numbers: `19.2 to 22.75`, `up to 22.75`, `from 19.2`, `any`.
pub(super) fn range((least, most): (f64, f64)) -> String {
    match (least.is_finite(), most.is_finite()) {
        (true, true) => format!("{} to {}", short(least), short(most)),
        (true, false) => format!("from {}", short(least)),
        (false, true) => format!("up to {}", short(most)),
        (false, false) => "any".to_owned(),
    }
}

/// Pads the numbers of one column at their end, so that set flush right their points stand under each other.
pub(super) fn align(column: &mut [String]) {
    let after = |text: &str| text.find('.').map_or(0, |point| text.len() - point);
    let is_number = |text: &str| text.ends_with(|c: char| c.is_ascii_digit());
    let most = column.iter().filter(|text| is_number(text)).map(|text| after(text)).max().unwrap_or(0);
    for text in column.iter_mut().filter(|text| is_number(text)) {
        text.extend(std::iter::repeat_n(' ', most - after(text)));
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_are_short_but_never_false() {
        let cases = [
            (0.0, "0"),
            (-0.0, "0"),
            (168.0, "168"),
            (4_081.792_717, "4081.79"),
            (46.885_154_06, "46.8852"),
            (0.02, "0.02"),
            (0.013_7, "0.0137"),
            (-2.5, "-2.5"),
            (0.000_04, "4e-5"),
            (1.234_56e15, "1.235e15"),
            (f64::NEG_INFINITY, "-inf"),
            (100.0, "100"),
            (1200.0, "1200"),
        ];
        for (number, text) in cases {
            assert_eq!(short(number), text);
        }
        assert_eq!(signed(2.0), "+2");
        assert_eq!(signed(0.0), "0");
    }

    #[test]
    fn ranges_read_as_words_where_they_have_no_end() {
        assert_eq!(range((19.2, 22.75)), "19.2 to 22.75");
        assert_eq!(range((f64::NEG_INFINITY, 3.0)), "up to 3");
        assert_eq!(range((3.0, f64::INFINITY)), "from 3");
    }

    #[test]
    fn points_stand_under_each_other() {
        let mut column = ["1.25", "100", "-3.5", "", "any"].map(str::to_owned);
        align(&mut column);
        assert_eq!(column, ["1.25", "100   ", "-3.5 ", "", "any"]);
    }
}
