//! Sums that do not lose digits: a running sum kept in two numbers, with error-free products.
//!
//! Ogita, Rump & Oishi, "Accurate sum and dot product", SIAM Journal on Scientific Computing 26 (2005).

/// A running sum with about twice the digits of an `f64`.
#[derive(Clone, Copy, Debug, Default)]
pub struct Sum {
    high: f64,
    low: f64,
}

impl Sum {
    /// Adds a number.
    pub fn add(&mut self, number: f64) {
        let sum = self.high + number;
        let part = sum - self.high;
        self.low += (self.high - (sum - part)) + (number - part);
        self.high = sum;
    }

    /// Adds a product.
    pub fn add_product(&mut self, a: f64, b: f64) {
        let product = a * b;
        self.add(product);
        self.low += a.mul_add(b, -product);
    }

    /// Takes another sum away.
    pub fn take(&mut self, other: Self) {
        self.add(-other.high);
        self.add(-other.low);
    }

    /// The sum, rounded once.
    #[must_use]
    pub fn value(self) -> f64 {
        self.high + self.low
    }
}

/// The power of two next below a size, by which numbers are divided without rounding; 1 where there is none.
pub(super) fn power_of_two(size: f64) -> f64 {
    let power = f64::from_bits(size.to_bits() & f64::INFINITY.to_bits());
    if power.is_normal() { power } else { 1.0 }
}

#[cfg(test)]
#[expect(clippy::float_cmp, reason = "what is tested is that nothing is lost")]
mod tests {
    use super::Sum;

    #[test]
    fn what_cancels_leaves_the_rest_whole() {
        let mut sum = Sum::default();
        for number in [1e16, 1.0, -1e16] {
            sum.add(number);
        }
        assert_eq!(sum.value(), 1.0);
        // (1 + ε)(1 − ε) − 1 = −ε², all of it the product's own rounding error.
        let mut sum = Sum::default();
        sum.add_product(1.0 + f64::EPSILON, 1.0 - f64::EPSILON);
        sum.add(-1.0);
        assert_eq!(sum.value(), -(f64::EPSILON * f64::EPSILON));
    }
}
