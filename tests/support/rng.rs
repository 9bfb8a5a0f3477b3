//! A small seeded generator (SplitMix64: Steele, Lea & Flood, OOPSLA 2014), so that a failing case is named by its seed alone.

/// A stream of numbers that its seed decides.
pub(crate) struct Rng(u64);

impl Rng {
    pub(crate) fn new(seed: u64) -> Self {
        Self(seed)
    }

    fn next(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut mixed = self.0;
        mixed = (mixed ^ (mixed >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        mixed = (mixed ^ (mixed >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        mixed ^ (mixed >> 31)
    }

    /// A whole number below `end`, which is not 0.
    pub(crate) fn below(&mut self, end: usize) -> usize {
        let end = u64::try_from(end).unwrap();
        usize::try_from(self.next() % end).unwrap()
    }

    /// A number from 0 (included) to 1 (excluded).
    #[expect(clippy::cast_precision_loss, reason = "53 bits fit")]
    pub(crate) fn share(&mut self) -> f64 {
        (self.next() >> 11) as f64 / (1_u64 << 53) as f64
    }

    /// A number between two.
    pub(crate) fn between(&mut self, least: f64, most: f64) -> f64 {
        least + (most - least) * self.share()
    }

    /// One of a list that is not empty.
    pub(crate) fn pick<'a, T>(&mut self, list: &'a [T]) -> &'a T {
        &list[self.below(list.len())]
    }
}
