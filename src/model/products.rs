//! Sums of products, exact on the decimals as they are written: 21.1 − 6.5 is 14.6, and 0.1 · 3 − 0.3 is 0.

use dashu_int::IBig;

use super::decimal::{Decimal, nearest, ten_to};

/// The double nearest to a sum of products, each factor read as the decimal that it is written as.
///
/// The order of the products does not matter. Where a factor is not finite, there is no such decimal, and the sum is that of the doubles.
pub(crate) fn sum(products: impl Iterator<Item = (f64, f64)> + Clone) -> f64 {
    let mut met = products.clone().filter(|&(number, factor)| number != 0.0 && factor != 0.0);
    match (met.next(), met.next()) {
        (None, _) => 0.0,
        (Some((number, factor)), None) if factor.total_cmp(&1.0).is_eq() => number,
        _ => {
            let decimals = products.clone().map(|(number, factor)| Some((Decimal::of(number)?, Decimal::of(factor)?)));
            short(decimals.clone()).or_else(|| long(decimals)).unwrap_or_else(|| products.map(|(a, b)| a * b).sum())
        }
    }
}

/// The sum, where it and its terms have few digits.
fn short(products: impl Iterator<Item = Option<(Decimal, Decimal)>>) -> Option<f64> {
    let (mut sum, mut exponent) = (0_i128, 0);
    for product in products {
        let (number, factor) = product?;
        let product = i128::from(number.mantissa) * i128::from(factor.mantissa);
        let places = number.exponent + factor.exponent;
        let least = exponent.min(places);
        sum = shifted(sum, exponent - least)?.checked_add(shifted(product, places - least)?)?;
        exponent = least;
    }
    rounded(sum, exponent)
}

/// `number · 10^places`; `None` where that is too large.
fn shifted(number: i128, places: i32) -> Option<i128> {
    const POWERS: [i64; 19] = {
        let mut powers = [1; 19];
        let mut at = 1;
        while at < powers.len() {
            powers[at] = 10 * powers[at - 1];
            at += 1;
        }
        powers
    };
    match places {
        0 => Some(number),
        _ if number == 0 => Some(0),
        _ => number.checked_mul(i128::from(*POWERS.get(usize::try_from(places).ok()?)?)),
    }
}

/// The double nearest to `sum · 10^exponent`, where both are doubles themselves: then one operation rounds once.
fn rounded(sum: i128, exponent: i32) -> Option<f64> {
    const POWERS: [f64; 23] = [
        1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19,
        1e20, 1e21, 1e22,
    ];
    let power = POWERS.get(usize::try_from(exponent.unsigned_abs()).ok()?)?;
    if sum.unsigned_abs() > 1 << f64::MANTISSA_DIGITS {
        return None;
    }
    #[expect(clippy::cast_precision_loss, reason = "it has no more bits than a double holds")]
    let sum = sum as f64;
    Some(if exponent < 0 { sum / power } else { sum * power })
}

/// The sum, whatever digits it takes; `None` where something is not finite.
fn long(products: impl Iterator<Item = Option<(Decimal, Decimal)>>) -> Option<f64> {
    let products: Vec<(Decimal, Decimal)> = products.collect::<Option<_>>()?;
    let places = |&(number, factor): &(Decimal, Decimal)| number.exponent + factor.exponent;
    let least = products.iter().map(places).min().unwrap_or(0).min(0);
    let whole = |product| {
        let (number, factor): &(Decimal, Decimal) = product;
        IBig::from(number.mantissa) * IBig::from(factor.mantissa) * ten_to(places(product) - least)
    };
    let sum: IBig = products.iter().map(whole).sum();
    Some(nearest(&sum, &ten_to(-least)))
}

#[cfg(test)]
mod tests {
    use std::str::FromStr;

    use dashu_int::UBig;
    use dashu_ratio::RBig;
    use proptest::collection::vec;
    use proptest::prelude::*;

    use super::*;

    fn of(products: &[(f64, f64)]) -> f64 {
        sum(products.iter().copied())
    }

    fn bits(number: f64) -> u64 {
        number.to_bits()
    }

    #[test]
    fn sums_are_those_of_the_decimals() {
        // Beside each the double that the compiler reads from the sum worked out by hand.
        for (products, expected) in [
            (&[(21.1, 1.0), (-6.5, 1.0)] as &[_], 14.6),
            (&[(0.1, 3.0), (-0.3, 1.0)], 0.0),
            (&[(0.1, 1.0), (0.2, 1.0)], 0.3),
            (&[(0.1, 3.0)], 0.3),
            (&[(1.1, 1.1)], 1.21),
            (&[(-0.7, 1.0)], -0.7),
            (&[(0.0, 5.0), (4.35, 1.0), (7.0, 0.0)], 4.35),
            (&[(-0.0, 1.0)], 0.0),
            (&[], 0.0),
            (&[(1e15, 1e15), (1.0, 1.0), (-1e15, 1e15)], 1.0),
            (&[(1e15, 1.0), (1e-9, 1e-9)], 1e15),
            (&[(1e-200, 1e-100), (2e-300, 1.0)], 3e-300),
            (&[(9_007_199_254_740_992.0, 1.0), (1.0, 1.0), (1e-9, 1.0)], 9_007_199_254_740_994.0),
        ] {
            let found = of(products);
            assert_eq!(bits(found), bits(expected), "{products:?}: {found} instead of {expected}");
        }
        // In doubles they come out otherwise, so something is tested.
        assert_ne!(bits(21.1 - 6.5), bits(14.6));
        assert_ne!(bits(0.1 * 3.0), bits(0.3));
    }

    #[test]
    fn what_is_not_finite_stays_so() {
        assert_eq!(bits(of(&[(f64::INFINITY, 1.0), (1.0, 1.0)])), bits(f64::INFINITY));
        assert!(of(&[(f64::INFINITY, 1.0), (f64::NEG_INFINITY, 1.0)]).is_nan());
        assert!(of(&[(f64::NAN, 1.0)]).is_nan());
    }

    /// A double as the shortest decimal that reads as it.
    fn fraction(value: f64) -> RBig {
        let text = format!("{value}");
        let (whole, places) = text.split_once('.').unwrap_or((&text, ""));
        let digits = IBig::from_str(&format!("{whole}{places}")).unwrap();
        RBig::from_parts(digits, UBig::from(10_u8).pow(places.len()))
    }

    /// Numbers as people write them, and any that a model may hold.
    fn numbers() -> impl Strategy<Value = f64> {
        let written = (-99_999..=99_999_i32, 0..6_i32)
            .prop_map(|(digits, places)| format!("{digits}e-{places}").parse::<f64>().unwrap());
        let sizes = (-1.0..1.0_f64, -12..16_i32).prop_map(|(mantissa, exponent)| mantissa * 10_f64.powi(exponent));
        prop_oneof![4 => written, 2 => sizes, 1 => Just(1.0), 1 => Just(0.0)]
    }

    proptest! {
        #![proptest_config(ProptestConfig::with_cases(2_000))]

        #[test]
        fn a_sum_is_the_double_nearest_to_that_of_the_fractions(products in vec((numbers(), numbers()), 0..6)) {
            let exact: RBig = products.iter().fold(RBig::ZERO, |sum, &(a, b)| sum + fraction(a) * fraction(b));
            let found = of(&products);
            prop_assert_eq!(bits(found), bits(exact.to_f64().value() + 0.0), "{} for {:?}", found, products);
        }

        #[test]
        fn the_order_does_not_matter(products in vec((numbers(), numbers()), 2..6).prop_shuffle()) {
            let turned = products.iter().rev().map(|&(a, b)| (b, a)).collect::<Vec<_>>();
            prop_assert_eq!(bits(of(&products)), bits(of(&turned)));
        }
    }
}
