//! Numbers as MPS files write them, and the ones a model may hold.

use super::error::{Flaw, quoted};

/// From here on a bound or right-hand side means that there is none.
const NO_LIMIT: f64 = 1e20;
/// The largest magnitude a model may hold.
const LARGEST: f64 = 1e15;
/// The smallest magnitude of a coefficient that is not 0.
const SMALLEST_COEFFICIENT: f64 = 1e-9;

/// A coefficient, of a row or the objective.
pub(super) fn coefficient(text: &str) -> Result<f64, Flaw> {
    let number = within_reach(finite(text)?, text)?;
    if number != 0.0 && number.abs() < SMALLEST_COEFFICIENT {
        return Err(Flaw::new(
            format!("coefficient {} is smaller than {SMALLEST_COEFFICIENT:e}", quoted(text)),
            "leave it out or scale the row or column",
        ));
    }
    Ok(number)
}

/// The objective's right-hand side: a number that must be finite.
pub(super) fn constant(text: &str) -> Result<f64, Flaw> {
    within_reach(finite(text)?, text)
}

/// A bound, right-hand side or range; infinite where the file means no limit.
pub(super) fn bound(text: &str) -> Result<f64, Flaw> {
    let number = parse(text)?;
    if number.abs() >= NO_LIMIT {
        return Ok(f64::INFINITY.copysign(number));
    }
    within_reach(number, text)
}

/// Whether a model may hold this bound: it is infinite or not too large.
pub(super) fn may_bound(number: f64) -> bool {
    number.is_infinite() || number.abs() <= LARGEST
}

/// A number in its shortest exact form.
pub(super) fn shortest(number: f64) -> String {
    let mut text = format!("{:?}", number + 0.0);
    if text.ends_with(".0") {
        text.truncate(text.len() - 2);
    }
    text
}

fn finite(text: &str) -> Result<f64, Flaw> {
    let number = parse(text)?;
    if number.is_finite() {
        return Ok(number);
    }
    Err(Flaw::new(format!("{} is not finite", quoted(text)), "only bounds and right-hand sides may be infinite"))
}

fn within_reach(number: f64, text: &str) -> Result<f64, Flaw> {
    if number.abs() <= LARGEST {
        return Ok(number + 0.0);
    }
    Err(Flaw::new(
        format!("{} is larger than {LARGEST:e}", quoted(text)),
        "choose larger units; a bound or right-hand side from 1e20 on means that there is no limit",
    ))
}

/// A decimal number, its exponent after `e` or, as Fortran writes it, after `d`.
fn parse(text: &str) -> Result<f64, Flaw> {
    let number = match text.parse() {
        Err(_) if text.chars().all(|c| matches!(c, '0'..='9' | '+' | '-' | '.' | 'd' | 'D')) => {
            text.replacen(['d', 'D'], "e", 1).parse::<f64>()
        }
        parsed => parsed,
    };
    match number {
        Ok(number) if !number.is_nan() => Ok(number),
        _ => Err(Flaw::new(format!("{} is not a number", quoted(text)), "write it like 12.5 or 1.25e1")),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_are_read_as_files_write_them() {
        for (text, number) in [("1.5D+03", 1500.0), ("1d-2", 0.01), ("-.5", -0.5), ("3518.", 3518.0), ("+2E1", 20.0)] {
            assert_eq!(coefficient(text).unwrap().to_bits(), f64::to_bits(number), "{text}");
        }
        for text in ["", "x", "nan", "NaN", "1d2d3", "d", "0x10", "1,5", "--1"] {
            assert!(bound(text).is_err(), "{text}");
        }
    }

    #[test]
    fn only_bounds_may_be_without_limit() {
        for text in ["1e30", "Inf", "+infinity", "1e20", "1e999"] {
            assert!(bound(text).unwrap() == f64::INFINITY, "{text}");
            assert!(coefficient(text).is_err() && constant(text).is_err(), "{text}");
        }
        assert!(bound("-1D+30").unwrap() == f64::NEG_INFINITY);
        for text in ["1.1e15", "-9e19"] {
            assert!(bound(text).is_err() && coefficient(text).is_err(), "{text}");
        }
    }

    #[test]
    fn coefficients_are_zero_or_large_enough() {
        assert!(coefficient("9.99e-10").is_err());
        assert!(coefficient("1e-9").is_ok() && coefficient("0.0").is_ok());
        assert!(bound("1e-12").is_ok() && constant("1e-12").is_ok());
    }

    #[test]
    fn written_numbers_read_back_to_the_bit() {
        for number in [0.1, 1.0, -2.5, 1e15, 1e-9, 1.0 / 3.0, 123_456_789.0, f64::MIN_POSITIVE] {
            assert_eq!(shortest(number).parse::<f64>().unwrap().to_bits(), number.to_bits());
        }
        assert_eq!([shortest(1.0), shortest(-0.0), shortest(1e-9)], ["1", "0", "1e-9"]);
    }
}
