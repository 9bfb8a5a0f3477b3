//! Values that may differ by period, and the periods they differ by.

use super::name::Name;

/// One period of the horizon, by position.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Period(usize);

impl Period {
    /// Its position in the horizon, from 0.
    #[must_use]
    pub fn position(self) -> usize {
        self.0
    }

    /// The period so many periods before; `None` before the first.
    #[must_use]
    pub fn before(self, periods: usize) -> Option<Self> {
        self.0.checked_sub(periods).map(Self)
    }
}

/// The periods a model plans, in order. A model that names none plans a single, nameless one.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Horizon {
    labels: Vec<Name>,
}

impl Horizon {
    /// The horizon of a model that names no periods.
    #[must_use]
    pub fn single() -> Self {
        Self::default()
    }

    /// The horizon of these periods, in order; the single nameless one where there are none. Reading sees to it that no two are called the same.
    #[must_use]
    pub fn of(labels: Vec<Name>) -> Self {
        Self { labels }
    }

    /// Whether the periods have names.
    #[must_use]
    pub fn is_named(&self) -> bool {
        !self.labels.is_empty()
    }

    /// How many periods there are: at least one.
    #[must_use]
    pub fn count(&self) -> usize {
        self.labels.len().max(1)
    }

    /// The period called `label`.
    #[must_use]
    pub fn period(&self, label: &str) -> Option<Period> {
        self.labels.iter().position(|name| name.as_str() == label).map(Period)
    }

    /// The periods, first to last.
    pub fn periods(&self) -> impl Iterator<Item = Period> + use<> {
        (0..self.count()).map(Period)
    }

    /// What people call a period; `None` where the horizon is a single nameless one.
    #[must_use]
    pub fn label(&self, period: Period) -> Option<&str> {
        self.labels.get(period.0).map(Name::as_str)
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

    /// The value of a list of one number per period: a single number where all are the same, which means the same.
    #[must_use]
    pub fn of(list: Vec<f64>) -> Self {
        match list.first() {
            Some(&first) if list.iter().all(|&number| number.total_cmp(&first).is_eq()) => Self::Every(first),
            _ => Self::Listed(list),
        }
    }

    /// The numbers of two values side by side, once where neither differs by period.
    pub fn beside<'a>(&'a self, other: &'a Self) -> impl Iterator<Item = (Period, f64, f64)> + 'a {
        let count = self.numbers().len().max(other.numbers().len());
        (0..count).map(Period).map(|period| (period, self.at(period), other.at(period)))
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
