//! Vectors of fractions over one denominator: no common divisors need to be looked for, and signs are those of the numerators.

use dashu_int::IBig;
use dashu_int::ops::{Abs, BitTest, DivRem};

use crate::model::decimal::nearest;

/// Fractions with one positive denominator.
#[derive(Clone, Debug)]
pub(super) struct Fractions {
    pub(super) numerators: Vec<IBig>,
    pub(super) denominator: IBig,
}

impl Fractions {
    /// So many zeros.
    pub(super) fn zeros(count: usize) -> Self {
        Self { numerators: vec![IBig::ZERO; count], denominator: IBig::ONE }
    }

    /// The doubles nearest to the fractions divided by `unit`.
    pub(super) fn nearest(&self, unit: &IBig) -> Vec<f64> {
        let denominator = &self.denominator * unit;
        self.numerators.iter().map(|numerator| nearest(numerator, &denominator)).collect()
    }
}

/// The fraction `n / d` that is `value` modulo `modulus`, with numerator and denominator so small that `|n|·d` has at least
/// `margin` bits less than the modulus. `None` where there is none; a chance find has a probability of about `2^-margin`.
///
/// The convergent before the largest quotient of Euclid's algorithm (Monagan, *Maximal quotient rational reconstruction*, ISSAC 2004);
/// the first one large enough is taken.
pub(super) fn reconstruct(value: &IBig, modulus: &IBig, margin: usize) -> Option<(IBig, IBig)> {
    let negative = *value < IBig::ZERO;
    let (mut above, mut below) = (modulus.clone(), value.abs());
    let (mut before, mut cofactor) = (IBig::ZERO, IBig::ONE);
    while !below.is_zero() {
        let (quotient, rest) = above.div_rem(&below);
        if quotient.bit_len() > margin {
            // The signs of the cofactors alternate.
            let flip = (cofactor < IBig::ZERO) != negative;
            return Some((if flip { -below } else { below }, cofactor.abs()));
        }
        let next = before - quotient * &cofactor;
        (above, below) = (below, rest);
        (before, cofactor) = (cofactor, next);
    }
    None
}

#[cfg(test)]
mod tests {
    use dashu_int::ops::ExtendedGcd;

    use super::*;

    #[test]
    fn fractions_are_found_again_from_their_remainder() {
        // A power of a prime that divides none of the denominators.
        let modulus = ((IBig::ONE << 61) - IBig::ONE).pow(4);
        for (numerator, denominator) in [(5, 1), (-7, 3), (1, 1_000_003), (-123_456_789, 987_654_322_i64)] {
            let (_, inverse, _) = IBig::from(denominator).gcd_ext(modulus.clone());
            let mut value = (IBig::from(numerator) * inverse) % &modulus;
            if (&value << 1) > modulus {
                value -= &modulus;
            }
            let found = reconstruct(&value, &modulus, 40);
            assert_eq!(found, Some((IBig::from(numerator), IBig::from(denominator))));
        }
        // Drawn by lot; no small fraction comes to it.
        let other = IBig::from(0x9E37_79B9_7F4A_7C15_u64).pow(3) * IBig::from(0x94D0_49BB_1331_11EB_u64) % &modulus;
        assert_eq!(reconstruct(&other, &modulus, 40), None);
    }
}
