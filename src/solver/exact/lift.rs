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
}

impl<'p> Matrix<'p> {
    /// Factorises the matrix with these columns.
    ///
    /// # Errors
    /// When it is singular, or its numbers have more digits than is provided for.
    pub(super) fn of(columns: Vec<&'p Entries>) -> Result<Self, Unsettled> {
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
            0..=WIDE_BITS => &[Field::WIDE, Field::NARROW],
            0..=NARROW_BITS => &[Field::NARROW],
            _ => return Err(Unsettled::TooLarge),
        };
        // A determinant that the first prime divides by chance is not likely to be divided by the other as well.
        let factors = fields.iter().find_map(|&field| Some((field, Factor::of(&columns, field)?)));
        let (field, factor) = factors.ok_or(Unsettled::Singular)?;
        let [row_bits, column_bits] = [row_bits, column_bits].map(|bits| usize::try_from(bits).unwrap_or(usize::MAX));
        Ok(Self { columns, field, factor, row_bits, column_bits })
    }

    /// Solves exactly. `work` is what may be spent, in entries looked at, and is lessened by what is.
    ///
    /// # Errors
    /// When the work does not suffice.
    pub(super) fn solve(&self, right: Vec<IBig>, turn: Turn, work: &mut u64) -> Result<Fractions, Unsettled> {
        let mut lift = Lift::of(self, right, turn);
        let mut next = 2;
        loop {
            let cost = self.factor.entries() + self.columns.iter().map(|column| column.len()).sum::<usize>();
            while lift.steps() < next {
                *work = work.checked_sub(u64::try_from(cost).unwrap_or(u64::MAX)).ok_or(Unsettled::OutOfWork)?;
                if lift.step() {
                    return Ok(lift.whole());
                }
            }
            // Putting a digit vector of k words together takes about k² / 2 products of words for each number.
            let cost = u64::try_from(self.columns.len() * next * next / 2).unwrap_or(u64::MAX);
            *work = work.checked_sub(cost).ok_or(Unsettled::OutOfWork)?;
            if let Some(fractions) = lift.fractions() {
                return Ok(fractions);
            }
            next += (next / 2).max(2);
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
    /// Divides the denominator, with all but certainty.
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
            divisor: IBig::ONE,
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
        let numerators = (0..self.rest.len()).map(|at| self.number(at)).collect();
        Fractions { numerators, denominator: IBig::ONE }
    }

    /// The number that the digits of a place spell.
    fn number(&self, at: usize) -> IBig {
        let bits = usize::try_from(self.matrix.field.bits()).unwrap_or(0);
        let mut number = IBig::ZERO;
        for digits in self.digits.iter().rev() {
            let shifted = &number << bits;
            number = shifted - number + IBig::from(digits[at]);
        }
        number
    }

    /// The solution, where the digits so far prove it.
    fn fractions(&mut self) -> Option<Fractions> {
        let modulus = IBig::from(self.matrix.field.prime()).pow(self.digits.len());
        let norm_bits = match self.turn {
            Turn::Plain => self.matrix.row_bits,
            Turn::Transposed => self.matrix.column_bits,
        };
        // Both sides of the proof must be smaller than half the modulus.
        let numerator_bits = modulus.bit_len().checked_sub(norm_bits + 2)?;
        let denominator_bits = modulus.bit_len().checked_sub(self.right_bits + 2)?;
        let size = self.rest.len();
        let mut numerators = vec![IBig::ZERO; size];
        let mut denominator = self.divisor.clone();
        let mut factors = vec![IBig::ONE; size];
        for at in (0..size).map(|at| (self.hardest + at) % size) {
            let number = balanced(self.number(at) * &denominator, &modulus);
            if number.bit_len() + MARGIN <= numerator_bits {
                numerators[at] = number;
                continue;
            }
            let Some((numerator, factor)) = reconstruct(&number, &modulus, MARGIN + norm_bits) else {
                (self.divisor, self.hardest) = (denominator, at);
                return None;
            };
            denominator *= &factor;
            (numerators[at], factors[at]) = (numerator, factor);
        }
        // Numbers told before the denominator grew are brought to the whole of it.
        let mut growth = IBig::ONE;
        for at in (0..size).rev().map(|at| (self.hardest + at) % size) {
            if growth > IBig::ONE {
                numerators[at] *= &growth;
            }
            growth *= &factors[at];
        }
        let proven = denominator.bit_len() <= denominator_bits
            && numerators.iter().all(|numerator| numerator.bit_len() <= numerator_bits);
        self.divisor = denominator.clone();
        proven.then_some(Fractions { numerators, denominator })
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
