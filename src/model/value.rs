//! Values that may differ by period, and the periods they differ by.

/// One period of the horizon, by position.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Period(usize);

/// The periods a model plans, in order. A model that names none plans a single, nameless one.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Horizon {
    labels: Vec<String>,
}

impl Horizon {
    /// The horizon of a model that names no periods.
    #[must_use]
    pub fn single() -> Self {
        Self::default()
    }

    /// The periods, first to last.
    pub fn periods(&self) -> impl Iterator<Item = Period> + use<> {
        (0..self.labels.len().max(1)).map(Period)
    }

    /// What people call a period; `None` where the horizon is a single nameless one.
    #[must_use]
    pub fn label(&self, period: Period) -> Option<&str> {
        self.labels.get(period.0).map(String::as_str)
    }
}

/// A number that may differ by period.
#[derive(Clone, Debug, PartialEq)]
pub enum Value {
    /// The same in every period.
    Every(f64),
    /// One number per period, first to last.
    Listed(Vec<f64>),
}

impl Value {
    /// The number in a period. A list that is too short answers with its last number; reading never lets one through.
    #[must_use]
    pub fn at(&self, period: Period) -> f64 {
        match self {
            Self::Every(number) => *number,
            Self::Listed(list) => list.get(period.0).or(list.last()).copied().unwrap_or(0.0),
        }
    }

    /// The numbers, one or one per period.
    #[must_use]
    pub fn numbers(&self) -> &[f64] {
        match self {
            Self::Every(number) => std::slice::from_ref(number),
            Self::Listed(list) => list,
        }
    }
}

impl From<f64> for Value {
    fn from(number: f64) -> Self {
        Self::Every(number)
    }
}
