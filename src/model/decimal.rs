//! Numbers as they are written: a double stands for the shortest decimal that reads as it, so that 0.1 is a tenth.

use dashu_int::IBig;
use dashu_int::ops::{Abs, BitTest, DivRem};

/// A decimal: `mantissa · 10^exponent`. The mantissa has at most 17 digits and does not end in 0.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct Decimal {
    /// Its digits.
    pub(crate) mantissa: i64,
    /// The power of ten that they are multiplied by.
    pub(crate) exponent: i32,
}

impl Decimal {
    pub(crate) const ZERO: Self = Self { mantissa: 0, exponent: 0 };

    /// The shortest decimal that reads as `value`; `None` where it is no finite number.
    pub(crate) fn of(value: f64) -> Option<Self> {
        Self::short(value).or_else(|| Self::read(value))
    }

    /// The same where few places do: the double nearest to a decimal of at most 15 digits is nearest to no other one.
    fn short(value: f64) -> Option<Self> {
        let mut power = 1.0;
        for places in 0..8 {
            let scaled: f64 = value * power;
            if scaled.abs() >= 1e15 {
                return None;
            }
            #[expect(clippy::cast_possible_truncation, reason = "below 2^53")]
            let digits = (scaled + 0.5_f64.copysign(scaled)) as i64;
            #[expect(clippy::cast_precision_loss, reason = "below 2^53")]
            let whole = digits as f64;
            // Both are exact, so the quotient is what reading the decimal would give; the difference is but quicker to look at.
            if (scaled - whole).abs() <= scaled.abs() * f64::EPSILON
                && (whole / power).total_cmp(&(value + 0.0)).is_eq()
            {
                return Some(Self::trimmed(digits, -places));
            }
            power *= 10.0;
        }
        None
    }

    fn read(value: f64) -> Option<Self> {
        let text = format!("{value:e}");
        let (digits, exponent) = text.split_once('e')?;
        let (whole, places) = digits.split_once('.').unwrap_or((digits, ""));
        let shift: i32 = places.len().try_into().ok()?;
        let mantissa: i64 = format!("{whole}{places}").parse().ok()?;
        Some(Self::trimmed(mantissa, exponent.parse::<i32>().ok()? - shift))
    }

    fn trimmed(mut mantissa: i64, mut exponent: i32) -> Self {
        if mantissa == 0 {
            return Self::ZERO;
        }
        while mantissa % 10 == 0 {
            (mantissa, exponent) = (mantissa / 10, exponent + 1);
        }
        Self { mantissa, exponent }
    }

    pub(crate) fn is_zero(self) -> bool {
        self.mantissa == 0
    }

    /// The decimal times `10^places`, which must leave no decimal places.
    pub(crate) fn times_ten_to(self, places: i32) -> IBig {
        if self.is_zero() { IBig::ZERO } else { IBig::from(self.mantissa) * ten_to(self.exponent + places) }
    }
}

/// `10^places`, for `places` that are not negative.
pub(crate) fn ten_to(places: i32) -> IBig {
    IBig::from(10).pow(usize::try_from(places).unwrap_or(0))
}

/// The double nearest to `numerator / denominator`, ties to even; the denominator is positive.
pub(crate) fn nearest(numerator: &IBig, denominator: &IBig) -> f64 {
    if numerator.is_zero() {
        return 0.0;
    }
    // A quotient of 66 or 67 bits, its last one raised where something remains: rounding that once is rounding the true quotient.
    let up = 66 + signed(denominator.bit_len()) - signed(numerator.bit_len());
    let by = usize::try_from(up.unsigned_abs()).unwrap_or(0);
    let magnitude = numerator.abs();
    let (quotient, rest) =
        if up >= 0 { (magnitude << by).div_rem(denominator) } else { magnitude.div_rem(denominator << by) };
    let quotient = u128::try_from(quotient).unwrap_or(0) | u128::from(!rest.is_zero());
    #[expect(clippy::cast_precision_loss, reason = "this is the rounding")]
    let rounded = quotient as f64;
    let down = i32::try_from(-up).unwrap_or(0);
    let scaled = rounded * 2.0_f64.powi(down / 2) * 2.0_f64.powi(down - down / 2);
    if *numerator < IBig::ZERO { -scaled } else { scaled }
}

fn signed(count: usize) -> i64 {
    i64::try_from(count).unwrap_or(i64::MAX)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_double_is_the_decimal_it_is_written_as() {
        for (value, mantissa, exponent) in
            [(0.1, 1, -1), (-2000.0, -2, 3), (12.5, 125, -1), (1e-9, 1, -9), (0.1 + 0.2, 30_000_000_000_000_004, -17)]
        {
            assert_eq!(Decimal::of(value), Some(Decimal { mantissa, exponent }), "{value}");
        }
        for value in [0.0, 1.0, -0.007, 1234.5678, 0.123_456_78, -999_999_999_999_999.0, 1e15, 0.3, 1e7 + 1e-7] {
            assert_eq!(Decimal::of(value), Decimal::read(value), "{value}");
        }
        assert_eq!(Decimal::of(-0.0), Some(Decimal::ZERO));
        assert_eq!(Decimal::of(f64::INFINITY), None);
        assert_eq!(Decimal::of(12.5).unwrap().times_ten_to(3), IBig::from(12_500));
    }

    /// The expected doubles are those that the compiler reads from the decimals.
    #[test]
    fn quotients_become_the_nearest_double() {
        for (numerator, places, value) in
            [(1, 1, 0.1), (-3, 1, -0.3), (1, 22, 1e-22), (9_007_199_254_740_993_i64, 0, 9_007_199_254_740_992.0)]
        {
            let nearest = nearest(&IBig::from(numerator), &ten_to(places));
            assert_eq!(nearest.to_bits(), f64::to_bits(value), "{nearest} and {value}");
        }
        assert_eq!(nearest(&ten_to(300), &ten_to(1)).to_bits(), 1e299_f64.to_bits());
        assert_eq!(nearest(&IBig::from(2), &IBig::from(3)).to_bits(), (2.0_f64 / 3.0).to_bits());
    }
}
