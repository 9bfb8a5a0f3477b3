//! The proof of an answer by our own arithmetic.

/// How well an answer keeps every law of optimality, each as the largest relative breach found.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Proof {
    /// Breach of rows and bounds.
    pub primal: f64,
    /// Breach of the signs of gains and worths.
    pub dual: f64,
    /// Breach of complementary slackness.
    pub slackness: f64,
    /// Gap between the aim and its bound by the worths.
    pub gap: f64,
}

impl Proof {
    /// The largest of the four.
    #[must_use]
    pub fn worst(&self) -> f64 {
        self.primal.max(self.dual).max(self.slackness).max(self.gap)
    }
}
