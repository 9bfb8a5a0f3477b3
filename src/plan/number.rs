//! Numbers as a plan writes them: ten significant digits, in the shortest form.

use std::fmt::Write as _;

/// How many significant digits a plan keeps.
pub const DIGITS: usize = 10;

/// Digits after the first, as the formatter counts them.
const AFTER_FIRST: usize = DIGITS - 1;

/// Digits after the first in which a number is taken before it is rounded to those of a plan.
///
/// Numbers of a plan are often short decimals that end in a 5 just behind the last digit kept, and what is computed lies on either side
/// of it by its own rounding. Taken in thirteen digits first it is that decimal again, so that both sides round alike.
const TAKEN: usize = 12;

/// Exponents of ten that are written out; others take the form `1.5e20`.
const WRITTEN_OUT: std::ops::RangeInclusive<i32> = -5..=14;

/// Appends `number` with ten significant digits and nothing to spare: `4180`, `43265.1`, `1e-7`, `inf`. There is one zero, `0`.
pub fn push(out: &mut String, number: f64) {
    push_digits(out, number, AFTER_FIRST);
}

/// As [`push`], with `digits` significant digits (at least 1, at most 17).
pub fn push_significant(out: &mut String, number: f64, digits: usize) {
    push_digits(out, number, digits.clamp(1, 17) - 1);
}

fn push_digits(out: &mut String, number: f64, after_first: usize) {
    if !number.is_finite() {
        out.push_str(if number.is_nan() {
            "nan"
        } else if number > 0.0 {
            "inf"
        } else {
            "-inf"
        });
        return;
    }
    let quick = if after_first == AFTER_FIRST { taken_apart_quickly(number) } else { None };
    let (digits, exponent) = quick.unwrap_or_else(|| {
        let number = if after_first == AFTER_FIRST { taken(number) } else { number };
        taken_apart(&format!("{number:.after_first$e}"))
    });
    if number < 0.0 {
        out.push('-');
    }
    match exponent {
        e if !WRITTEN_OUT.contains(&e) => push_with_exponent(out, digits.as_str(), e),
        e if e < 0 => {
            out.push_str("0.");
            push_zeros(out, -e - 1);
            out.push_str(digits.as_str());
        }
        e => {
            let whole = usize::try_from(e).unwrap_or(0) + 1;
            match digits.as_str().split_at_checked(whole) {
                Some((before, after)) if !after.is_empty() => {
                    out.push_str(before);
                    out.push('.');
                    out.push_str(after);
                }
                _ => {
                    out.push_str(digits.as_str());
                    let written = i32::try_from(digits.length).unwrap_or(0);
                    push_zeros(out, e + 1 - written);
                }
            }
        }
    }
}

fn push_with_exponent(out: &mut String, digits: &str, exponent: i32) {
    let (first, rest) = digits.split_at(1);
    out.push_str(first);
    if !rest.is_empty() {
        out.push('.');
        out.push_str(rest);
    }
    let _ = write!(out, "e{exponent}");
}

fn push_zeros(out: &mut String, count: i32) {
    for _ in 0..count {
        out.push('0');
    }
}

/// The significant digits of a number, without trailing zeros; at least one.
struct Significant {
    bytes: [u8; 17],
    length: usize,
}

impl Significant {
    fn as_str(&self) -> &str {
        std::str::from_utf8(&self.bytes[..self.length]).unwrap_or("0")
    }
}

/// Ten digits and the exponent of a number of common size, by one multiplication. `None` where that could round another way than
/// the exact decimal value of the number does.
fn taken_apart_quickly(number: f64) -> Option<(Significant, i32)> {
    const POWERS: [f64; 16] = [1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15];
    let size = number.abs();
    if !(1e-5..1e15).contains(&size) {
        return None;
    }
    // Where the first digit stands: before the point by so many places, or behind it.
    let before = POWERS.partition_point(|&power| power <= size).checked_sub(1);
    let (scaled, mut exponent) = match before {
        Some(places) if places <= AFTER_FIRST => (size * POWERS[AFTER_FIRST - places], i32::try_from(places).ok()?),
        Some(places) => (size / POWERS[places - AFTER_FIRST], i32::try_from(places).ok()?),
        None => {
            let behind = (1..=5).find(|&places| size * POWERS[places] >= 1.0)?;
            (size * POWERS[AFTER_FIRST + behind], -i32::try_from(behind).ok()?)
        }
    };
    // The product is wrong by less than 2e-6, and thirteen digits are within 5e-4: a half is the only place where either could matter.
    if (scaled.fract() - 0.5).abs() < 1e-3 {
        return None;
    }
    let mut rounded = scaled.round();
    if rounded >= 1e10 {
        rounded = 1e9;
        exponent += 1;
    }
    #[expect(clippy::cast_possible_truncation, clippy::cast_sign_loss, reason = "whole, and between 1e9 and 1e10")]
    let mut whole = rounded as u64;
    let mut digits = Significant { bytes: [b'0'; 17], length: DIGITS };
    for digit in digits.bytes[..DIGITS].iter_mut().rev() {
        *digit = b'0' + u8::try_from(whole % 10).unwrap_or(0);
        whole /= 10;
    }
    while digits.length > 1 && digits.bytes[digits.length - 1] == b'0' {
        digits.length -= 1;
    }
    Some((digits, exponent))
}

/// Digits and exponent of a number in the form `-1.23400e5`.
fn taken_apart(scientific: &str) -> (Significant, i32) {
    let (mantissa, exponent) = scientific.split_once('e').unwrap_or((scientific, "0"));
    let mut digits = Significant { bytes: [b'0'; 17], length: 0 };
    let mut kept = 1;
    for digit in mantissa.bytes().filter(u8::is_ascii_digit).take(17) {
        digits.bytes[digits.length] = digit;
        digits.length += 1;
        if digit != b'0' {
            kept = digits.length;
        }
    }
    digits.length = kept;
    (digits, exponent.parse().unwrap_or(0))
}

/// `number` in thirteen digits.
fn taken(number: f64) -> f64 {
    format!("{number:.TAKEN$e}").parse().unwrap_or(number)
}

/// `number` as a plan keeps it: rounded to ten significant digits.
#[must_use]
pub fn rounded(number: f64) -> f64 {
    if is_short(number) {
        return number + 0.0;
    }
    format!("{:.AFTER_FIRST$e}", taken(number)).parse().unwrap_or(number)
}

/// `number`, the difference of numbers as large as `scale`, rounded to the decimal place where the tenth digit of `scale` stands:
/// what lies below it is noise that depends on the route to the answer.
#[must_use]
pub fn rounded_to(number: f64, scale: f64) -> f64 {
    if (is_short(number) && scale < 1e10) || !(scale.is_normal() && number.is_finite()) {
        return number + 0.0;
    }
    let (_, exponent) = taken_apart(&format!("{scale:.AFTER_FIRST$e}"));
    match usize::try_from(9 - exponent) {
        Ok(places) => {
            // First to three places more, for what lies next to a half.
            let further = places + TAKEN - AFTER_FIRST;
            let number: f64 = format!("{number:.further$}").parse().unwrap_or(number);
            format!("{number:.places$}").parse().unwrap_or(number) + 0.0
        }
        Err(_) => {
            let unit = 10_f64.powi(exponent - 9);
            ((number / unit * 1e3).round() / 1e3).round() * unit + 0.0
        }
    }
}

/// Whether a number is whole and so short that rounding cannot change it.
fn is_short(number: f64) -> bool {
    number.abs() < 1e10 && number.fract() == 0.0
}

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::*;

    fn written(number: f64) -> String {
        let mut out = String::new();
        push(&mut out, number);
        out
    }

    #[test]
    fn numbers_take_their_shortest_form() {
        for (number, text) in [
            (0.0, "0"),
            (-0.0, "0"),
            (4180.0, "4180"),
            (43265.1, "43265.1"),
            (0.1 + 0.2, "0.3"),
            (1e-7, "1e-7"),
            (0.00001, "0.00001"),
            (-2.5e-9, "-2.5e-9"),
            (1.0 / 3.0, "0.3333333333"),
            (2e6 / 3.0, "666666.6667"),
            (9_999_999_999.6, "10000000000"),
            (123_456_789_012_345.0, "123456789000000"),
            (1e15, "1e15"),
            (1.5e300, "1.5e300"),
            (f64::INFINITY, "inf"),
            (f64::NEG_INFINITY, "-inf"),
        ] {
            assert_eq!(written(number), text);
        }
    }

    #[test]
    fn a_difference_keeps_no_more_places_than_its_terms() {
        let spare = 168.0 - 167.999_999_9;
        assert_eq!(rounded_to(spare, 168.0).to_string(), "0.0000001");
        assert_eq!(rounded_to(1e-9, 168.0).to_string(), "0");
        assert_eq!(rounded_to(-1e-9, 168.0).to_string(), "0");
        assert_eq!(rounded_to(12345.0, 1e13).to_string(), "10000");
        assert_eq!(rounded_to(2.25, 0.0).to_string(), "2.25");
    }

    proptest! {
        #[test]
        fn what_is_written_reads_back_within_ten_digits(number in any::<f64>().prop_filter("finite", |n| n.is_finite())) {
            let text = written(number);
            let back: f64 = text.parse().unwrap();
            prop_assert!((back - number).abs() <= 5.001e-10 * number.abs());
            prop_assert_eq!(written(back), text.clone());
            prop_assert!(text.len() <= 17, "{}", text);
            prop_assert_eq!(written(rounded(number)), text);
        }

        #[test]
        fn what_ends_in_a_half_rounds_alike_from_either_side(whole in 1_000_000_000..9_999_999_999_u64, exponent in -20..5_i32) {
            let half: f64 = format!("{whole}5e{exponent}").parse().unwrap();
            let (below, above) = (half * (1.0 - 1e-14), half * (1.0 + 1e-14));
            prop_assert_eq!(written(below), written(half));
            prop_assert_eq!(written(above), written(half));
            prop_assert_eq!(rounded(below).to_bits(), rounded(above).to_bits());
            prop_assert_eq!(rounded_to(below, half).to_bits(), rounded_to(above, half).to_bits());
        }

        #[test]
        fn the_quick_way_rounds_as_the_exact_one(exponent in -6..16_i32, mantissa in 1.0..10.0_f64, places in 0..14_i32) {
            let shortened = (mantissa * 10_f64.powi(places)).round() / 10_f64.powi(places);
            for number in [mantissa, shortened, shortened + 0.5 * 10_f64.powi(-9)].map(|m| m * 10_f64.powi(exponent)) {
                let (exact, exact_exponent) = taken_apart(&format!("{:.AFTER_FIRST$e}", taken(number)));
                if let Some((quick, exponent)) = taken_apart_quickly(number) {
                    prop_assert_eq!((quick.as_str(), exponent), (exact.as_str(), exact_exponent));
                }
            }
        }
    }
}
