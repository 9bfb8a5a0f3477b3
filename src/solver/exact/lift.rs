//! Solving `B · x = b` and `Bᵀ · y = c` exactly: digit by digit in the base of a prime, from one factorisation modulo the prime.
//!
//! Each step solves for the next digit modulo the prime, takes its product off the right-hand side and divides by the prime, all in
//! machine words (Dixon, *Numerische Mathematik* 40, 1982, 137–141). With enough digits the fractions are known; for matrices as sparse
//! as bases this beats elimination in fractions where numbers grow (Cook & Steffy, *ACM Transactions on Mathematical Software* 37, 2011).
//!
//! Whether the digits are enough is proven, not guessed: where `B·n ≡ d·b` modulo M and both sides are smaller than M/2, they are equal.

use dashu_int::IBig;
use dashu_int::ops::{BitTest, DivRem};

use super::Unsettled;
use super::factor::{Entries, Factor};
use super::field::Field;
use super::fractions::{Fractions, reconstruct};

/// Sums of absolute entries up to so many bits can be taken times a digit of [`Field::WIDE`] in 128 bits.
const WIDE_BITS: u32 = 63;

/// The same for [`Field::NARROW`].
const NARROW_BITS: u32 = 93;

/// A fraction that needs so many bits less than there are is no find by chance.
const MARGIN: usize = 24;

/// Whether the matrix or its transpose is meant.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Turn {
    /// `B · x = b`: the right-hand side is by row, the solution by column.
    Plain,
    /// `Bᵀ · y = c`: the right-hand side is by column, the solution by row.
    Transposed,
}

/// A nonsingular square matrix, ready to be solved with.
#[derive(Debug)]
pub(super) struct Matrix<'p> {
    columns: Vec<&'p Entries>,
    field: Field,
    factor: Factor,
    /// Bits of the largest sum of absolute entries of a row, and of a column.
    row_bits: usize,
    column_bits: usize,
    /// Divides the denominators of solutions, with all but certainty: they divide the determinant, and most of them are much of it.
    divisor: IBig,
}

impl<'p> Matrix<'p> {
    /// Factorises the matrix with these columns. `divisor` is a guess at what divides the denominators of solutions: a good one halves
    /// the digits needed, a bad one costs some; 1 is always right.
    ///
    /// # Errors
    /// When it is singular, or its numbers have more digits than is provided for.
    pub(super) fn of(columns: Vec<&'p Entries>, divisor: IBig) -> Result<Self, Unsettled> {
        let mut row_sums = vec![0_u128; columns.len()];
        let mut column_bits = 0;
        for column in &columns {
            let mut sum = 0_u128;
            for &(row, entry) in *column {
                row_sums[row] = row_sums[row].saturating_add(entry.unsigned_abs());
                sum = sum.saturating_add(entry.unsigned_abs());
            }
            column_bits = column_bits.max(128 - sum.leading_zeros());
        }
        let row_bits = row_sums.iter().map(|sum| 128 - sum.leading_zeros()).max().unwrap_or(0);
        let fields: &[Field] = match row_bits.max(column_bits) {
            bits if bits <= WIDE_BITS => &[Field::WIDE, Field::NARROW],
            bits if bits <= NARROW_BITS => &[Field::NARROW],
            _ => return Err(Unsettled::TooLarge),
        };
        // A determinant that the first prime divides by chance is not likely to be divided by the other as well.
        let factors = fields.iter().find_map(|&field| Some((field, Factor::of(&columns, field)?)));
        let (field, factor) = factors.ok_or(Unsettled::Singular)?;
        let [row_bits, column_bits] = [row_bits, column_bits].map(|bits| usize::try_from(bits).unwrap_or(usize::MAX));
        Ok(Self { columns, field, factor, row_bits, column_bits, divisor })
    }

    /// Solves exactly. `work` is what may be spent, in entries looked at, and is lessened by what is.
    ///
    /// # Errors
    /// When the work does not suffice.
    pub(super) fn solve(&mut self, right: Vec<IBig>, turn: Turn, work: &mut u64) -> Result<Fractions, Unsettled> {
        let mut lift = Lift::of(self, right, turn);
        let mut spend = |cost: usize| {
            *work = work.checked_sub(u64::try_from(cost).unwrap_or(u64::MAX)).ok_or(Unsettled::OutOfWork)?;
            Ok(())
        };
        let entries = self.factor.entries() + self.columns.iter().map(|column| column.len()).sum::<usize>();
        let bits = usize::try_from(self.field.bits()).unwrap_or(1);
        let guessed = self.divisor > IBig::ONE;
        // Fewer digits than the denominator and the right-hand side have cannot do.
        let mut next = 2 + (self.divisor.bit_len() + if guessed { lift.right_bits } else { 0 }) / bits;
        loop {
            while lift.steps() < next {
                spend(entries)?;
                if lift.step() {
                    return Ok(lift.whole());
                }
            }
            // Putting k digits together takes about k² / 2 products of words for each number.
            spend(self.columns.len() * next * next / 2)?;
            if let Some(fractions) = lift.fractions() {
                self.divisor = fractions.denominator.clone();
                return Ok(fractions);
            }
            next += 2 + if guessed { next / 8 } else { next / 2 };
        }
    }
}

/// A solution in the making.
struct Lift<'m, 'p> {
    matrix: &'m Matrix<'p>,
    turn: Turn,
    /// Bits of the largest number of the right-hand side.
    right_bits: usize,
    /// What is left of the right-hand side beyond the digits so far: the word now in reach, and what lies above it.
    rest: Vec<i128>,
    above: Vec<(usize, IBig)>,
    /// The digits found, least first: a vector for each step.
    digits: Vec<Vec<i64>>,
    /// See [`Matrix::divisor`].
    divisor: IBig,
    /// The number that could not be told from so many digits; looked at first the next time.
    hardest: usize,
    residues: Vec<u64>,
    solution: Vec<u64>,
}

impl<'m, 'p> Lift<'m, 'p> {
    fn of(matrix: &'m Matrix<'p>, right: Vec<IBig>, turn: Turn) -> Self {
        let size = matrix.columns.len();
        Self {
            matrix,
            turn,
            right_bits: right.iter().map(BitTest::bit_len).max().unwrap_or(0),
            rest: vec![0; size],
            above: right.into_iter().enumerate().filter(|(_, number)| !number.is_zero()).collect(),
            digits: Vec::new(),
            divisor: matrix.divisor.clone(),
            hardest: 0,
            residues: vec![0; size],
            solution: vec![0; size],
        }
    }

    fn steps(&self) -> usize {
        self.digits.len()
    }

    /// Finds one digit more of each number; whether these were the last, the numbers being whole.
    fn step(&mut self) -> bool {
        self.bring_down();
        let field = self.matrix.field;
        for (residue, &rest) in self.residues.iter_mut().zip(&self.rest) {
            *residue = field.residue(rest);
        }
        match self.turn {
            Turn::Plain => self.matrix.factor.solve(&mut self.residues, &mut self.solution),
            Turn::Transposed => self.matrix.factor.solve_transposed(&mut self.residues, &mut self.solution),
        }
        let digits: Vec<i64> = self.solution.iter().map(|&residue| field.balanced(residue)).collect();
        self.take_off(&digits);
        for rest in &mut self.rest {
            *rest = field.divide(*rest);
        }
        self.digits.push(digits);
        self.above.is_empty() && self.rest.iter().all(|&rest| rest == 0)
    }

    /// Adds the next digit of the right-hand side to what is left.
    fn bring_down(&mut self) {
        let prime = IBig::from(self.matrix.field.prime());
        for (at, number) in &mut self.above {
            let (quotient, digit) = std::mem::take(number).div_rem(&prime);
            // Smaller than the prime, so it fits.
            self.rest[*at] += i128::try_from(digit).unwrap_or(0);
            *number = quotient;
        }
        self.above.retain(|(_, number)| !number.is_zero());
    }

    /// Takes the product of the matrix and the digits off what is left. [`WIDE_BITS`] and [`NARROW_BITS`] see to it that nothing
    /// overflows: what is left before stays below the sum of absolute entries plus the prime.
    fn take_off(&mut self, digits: &[i64]) {
        let times = |entry: i128, digit: i64| entry.wrapping_mul(i128::from(digit));
        match self.turn {
            Turn::Plain => {
                for (column, &digit) in self.matrix.columns.iter().zip(digits).filter(|(_, digit)| **digit != 0) {
                    for &(row, entry) in *column {
                        self.rest[row] = self.rest[row].wrapping_sub(times(entry, digit));
                    }
                }
            }
            Turn::Transposed => {
                for (column, rest) in self.matrix.columns.iter().zip(&mut self.rest) {
                    for &(row, entry) in *column {
                        *rest = rest.wrapping_sub(times(entry, digits[row]));
                    }
                }
            }
        }
    }

    /// The solution, where it is whole and complete.
    fn whole(&self) -> Fractions {
        let numerators = (0..self.rest.len()).map(|at| self.number(at, self.steps())).collect();
        Fractions { numerators, denominator: IBig::ONE }
    }

    /// The number that the first so many digits of a place spell.
    fn number(&self, at: usize, steps: usize) -> IBig {
        let prime = self.matrix.field.prime();
        self.digits[..steps].iter().rev().fold(IBig::ZERO, |number, digits| number * prime + digits[at])
    }

    /// The solution, where the digits so far prove it.
    ///
    /// Telling a fraction takes twice the digits of its numerator; once the denominator is known, little more than half of them will do.
    fn fractions(&mut self) -> Option<Fractions> {
        let all = Digits::first(self, self.steps());
        let few = Digits::first(self, self.steps() * 5 / 8 + 1);
        match self.told(&few, &all) {
            Ok(fractions) => Some(fractions),
            Err(Untold::MoreDigits) => None,
            Err(Untold::AllDigits) => self.told(&all, &all).ok(),
        }
    }

    /// The solution, as proven by `digits`; denominators are looked for in `all`.
    fn told(&mut self, digits: &Digits, all: &Digits) -> Result<Fractions, Untold> {
        let size = self.rest.len();
        let order = |from: usize| (0..size).map(move |at| (from + at) % size);
        let first = self.hardest;
        let mut numerators = vec![IBig::ZERO; size];
        let mut factors = vec![IBig::ONE; size];
        for at in order(first) {
            let number = digits.times(self, at);
            numerators[at] = if number.bit_len() + MARGIN <= digits.numerator_bits {
                number
            } else {
                let (numerator, factor) = self.told_alone(at, all)?;
                self.divisor *= &factor;
                factors[at] = factor;
                numerator
            };
        }
        // Numbers told before the denominator grew are brought to the whole of it.
        let mut growth = IBig::ONE;
        for at in order(first).rev() {
            if growth > IBig::ONE {
                numerators[at] *= &growth;
            }
            growth *= &factors[at];
        }
        let proven = self.divisor.bit_len() <= digits.denominator_bits
            && numerators.iter().all(|numerator| numerator.bit_len() <= digits.numerator_bits);
        let fractions = Fractions { numerators, denominator: self.divisor.clone() };
        if proven { Ok(fractions) } else { Err(Untold::AllDigits) }
    }

    /// A number times the divisor, as a fraction of its own.
    fn told_alone(&mut self, at: usize, all: &Digits) -> Result<(IBig, IBig), Untold> {
        let number = all.times(self, at);
        if number.bit_len() + MARGIN <= all.numerator_bits {
            return Err(Untold::AllDigits);
        }
        self.hardest = at;
        let margin = MARGIN + all.modulus.bit_len() - all.numerator_bits;
        reconstruct(&number, &all.modulus, margin).ok_or(Untold::MoreDigits)
    }
}

/// Why a solution is not told yet.
enum Untold {
    /// All the digits there are may do, where a part of them does not.
    AllDigits,
    /// More digits are needed than there are.
    MoreDigits,
}

/// So many of the digits of each number, and what they prove.
struct Digits {
    steps: usize,
    modulus: IBig,
    /// Numerators and denominators up to so many bits are proven right: both sides are smaller than half the modulus.
    numerator_bits: usize,
    denominator_bits: usize,
}

impl Digits {
    fn first(lift: &Lift<'_, '_>, steps: usize) -> Self {
        let modulus = IBig::from(lift.matrix.field.prime()).pow(steps);
        let norm_bits = match lift.turn {
            Turn::Plain => lift.matrix.row_bits,
            Turn::Transposed => lift.matrix.column_bits,
        };
        let bits = modulus.bit_len();
        let numerator_bits = bits.saturating_sub(norm_bits + 2);
        let denominator_bits = bits.saturating_sub(lift.right_bits + 2);
        Self { steps, modulus, numerator_bits, denominator_bits }
    }

    /// A number times the divisor, as far as these digits tell.
    fn times(&self, lift: &Lift<'_, '_>, at: usize) -> IBig {
        balanced(lift.number(at, self.steps) * &lift.divisor, &self.modulus)
    }
}

/// The number nearest to 0 with the same remainder.
fn balanced(number: IBig, modulus: &IBig) -> IBig {
    let rest = number % modulus;
    if (&rest << 1) > *modulus {
        rest - modulus
    } else if (&rest << 1) < -modulus {
        rest + modulus
    } else {
        rest
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Numbers that look random, from a linear congruence (Knuth's MMIX constants, from memory).
    fn draw(state: &mut u64, end: u64) -> u64 {
        *state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (*state >> 33) % end
    }

    fn columns(size: usize, bits: u32, state: &mut u64) -> Vec<Vec<(usize, i128)>> {
        let entry = |state: &mut u64| {
            let number = i128::from(draw(state, 1 << 20)) << (bits - 20) | i128::from(draw(state, 1 << 20));
            if draw(state, 2) == 0 { number } else { -number }
        };
        (0..size)
            .map(|column| {
                let rows: Vec<usize> = (0..size).filter(|&row| row == column || draw(state, 4) == 0).collect();
                rows.into_iter().map(|row| (row, entry(state))).filter(|entry| entry.1 != 0).collect()
            })
            .collect()
    }

    /// `matrix · numerators`, or `matrixᵀ · numerators`.
    fn product(columns: &[Vec<(usize, i128)>], numerators: &[IBig], turn: Turn) -> Vec<IBig> {
        let mut product = vec![IBig::ZERO; columns.len()];
        for (column, entries) in columns.iter().enumerate() {
            for &(row, entry) in entries {
                let (to, from) = if turn == Turn::Plain { (row, column) } else { (column, row) };
                product[to] += &numerators[from] * IBig::from(entry);
            }
        }
        product
    }

    #[test]
    fn solutions_are_exact_whatever_the_digits_and_the_guess() {
        let mut state = 1;
        for round in 0..240_u32 {
            let size = 1 + usize::try_from(draw(&mut state, 14)).unwrap();
            // From small entries to such as only the narrow field takes.
            let columns = columns(size, [20, 24, 50, 62, 70, 86][usize::try_from(round % 6).unwrap()], &mut state);
            let guess = IBig::from(1 + draw(&mut state, 3));
            let Ok(mut matrix) = Matrix::of(columns.iter().map(Vec::as_slice).collect(), guess) else { continue };
            for turn in [Turn::Plain, Turn::Transposed, Turn::Plain] {
                let long = draw(&mut state, 3) == 0;
                let number = |at: usize| IBig::from(at + 1) * if long { IBig::from(10).pow(40) } else { IBig::ONE };
                let right: Vec<IBig> = (0..size).map(number).collect();
                let Fractions { numerators, denominator } = matrix.solve(right.clone(), turn, &mut 1_000_000).unwrap();
                let expected: Vec<IBig> = right.iter().map(|right| right * &denominator).collect();
                assert_eq!(product(&columns, &numerators, turn), expected, "round {round}");
                assert!(denominator > IBig::ZERO);
            }
        }
    }

    #[test]
    fn denominators_that_have_nothing_in_common_are_all_found() {
        // The primes below 100: 25 rows with a denominator each.
        let primes: Vec<i128> = (2..100).filter(|number| (2..*number).all(|other| number % other != 0)).collect();
        let columns: Vec<Vec<(usize, i128)>> =
            primes.iter().enumerate().map(|(at, &prime)| vec![(at, prime)]).collect();
        let mut matrix = Matrix::of(columns.iter().map(Vec::as_slice).collect(), IBig::ONE).unwrap();
        let solution = matrix.solve(vec![IBig::ONE; primes.len()], Turn::Plain, &mut 1_000_000).unwrap();
        for (numerator, prime) in solution.numerators.iter().zip(primes) {
            assert_eq!(numerator * IBig::from(prime), solution.denominator);
        }
        let right = vec![IBig::ONE; columns.len()];
        assert_eq!(matrix.solve(right, Turn::Plain, &mut 10).err(), Some(Unsettled::OutOfWork));
    }
}
