//! Whole numbers modulo a Mersenne prime, where products are reduced by shifts and additions.

/// The whole numbers modulo `2^bits − 1`, a prime.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Field {
    bits: u32,
    /// The prime's inverse modulo 2^128: exact division by the prime is a multiplication by it.
    inverse: u128,
}

impl Field {
    /// Modulo `2^61 − 1`.
    pub(super) const WIDE: Self = Self::new(61);

    /// Modulo `2^31 − 1`.
    pub(super) const NARROW: Self = Self::new(31);

    const fn new(bits: u32) -> Self {
        let prime = (1_u128 << bits) - 1;
        // Newton's iteration doubles the digits that are right; any odd number is its own inverse modulo 8.
        let mut inverse = prime;
        let mut digits = 3;
        while digits < 128 {
            inverse = inverse.wrapping_mul(2_u128.wrapping_sub(prime.wrapping_mul(inverse)));
            digits *= 2;
        }
        Self { bits, inverse }
    }

    /// Bits of the prime.
    pub(super) fn bits(self) -> u32 {
        self.bits
    }

    /// The prime.
    pub(super) fn prime(self) -> u64 {
        (1 << self.bits) - 1
    }

    pub(super) fn sub(self, a: u64, b: u64) -> u64 {
        if a >= b { a - b } else { a + self.prime() - b }
    }

    pub(super) fn mul(self, a: u64, b: u64) -> u64 {
        let product = u128::from(a) * u128::from(b);
        let prime = self.prime();
        #[expect(
            clippy::cast_possible_truncation,
            reason = "the lower bits are what is asked for; the upper are fewer than 64"
        )]
        let sum = (product as u64 & prime) + (product >> self.bits) as u64;
        if sum >= prime { sum - prime } else { sum }
    }

    /// The inverse of a number that is not 0, by Fermat's little theorem.
    pub(super) fn invert(self, number: u64) -> u64 {
        // 1 and −1, the most common ones, are their own.
        if number == 1 || number == self.prime() - 1 {
            return number;
        }
        let (mut power, mut base, mut exponent) = (1, number, self.prime() - 2);
        while exponent > 0 {
            if exponent & 1 == 1 {
                power = self.mul(power, base);
            }
            base = self.mul(base, base);
            exponent >>= 1;
        }
        power
    }

    /// The remainder of a whole number.
    pub(super) fn residue(self, number: i128) -> u64 {
        let mask = u128::from(self.prime());
        let mut rest = number.unsigned_abs();
        while rest > mask {
            rest = (rest & mask) + (rest >> self.bits);
        }
        #[expect(clippy::cast_possible_truncation, reason = "at most the prime, which has fewer than 64 bits")]
        let rest = if rest == mask { 0 } else { rest as u64 };
        if number < 0 { self.sub(0, rest) } else { rest }
    }

    /// The number nearest to 0 with this remainder.
    pub(super) fn balanced(self, residue: u64) -> i64 {
        let number =
            if residue > self.prime() / 2 { i128::from(residue) - i128::from(self.prime()) } else { residue.into() };
        #[expect(clippy::cast_possible_truncation, reason = "at most half a prime of 61 bits")]
        let number = number as i64;
        number
    }

    /// `number` divided by the prime, which must leave no rest.
    #[expect(
        clippy::cast_possible_wrap,
        clippy::cast_sign_loss,
        reason = "arithmetic modulo 2^128 in two's complement"
    )]
    pub(super) fn divide(self, number: i128) -> i128 {
        (number as u128).wrapping_mul(self.inverse) as i128
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn arithmetic_is_that_of_whole_numbers() {
        for field in [Field::WIDE, Field::NARROW] {
            let prime = i128::from(field.prime());
            for a in [
                0,
                1,
                2,
                5,
                1_234_567,
                prime / 2,
                prime / 2 + 1,
                prime - 1,
                prime,
                prime + 1,
                1 << 100,
                (1 << 126) + 77,
            ] {
                assert_eq!(i128::from(field.residue(a)), a.rem_euclid(prime));
                assert_eq!(i128::from(field.residue(-a)), (-a).rem_euclid(prime));
                assert_eq!((a - i128::from(field.balanced(field.residue(a)))) % prime, 0);
                let (b, c) = (field.residue(a), field.residue(3 * (a % prime) + 5));
                assert_eq!(u128::from(field.mul(b, c)), u128::from(b) * u128::from(c) % u128::from(field.prime()));
                assert_eq!(i128::from(field.sub(b, c)), (i128::from(b) - i128::from(c)).rem_euclid(prime));
                assert!(b == 0 || field.mul(b, field.invert(b)) == 1);
                assert_eq!(field.divide(-(a >> 64) * prime), -(a >> 64));
            }
        }
    }
}
