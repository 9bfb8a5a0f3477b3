//! What a plan says once, or once for each period.

use crate::model::Period;

/// One thing for the whole plan, or a list of one per period, first to last.
///
/// Numbers that differ by period are a [`Value`](crate::model::Value); this is the same for states and ranges.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Each<T> {
    /// The same in every period.
    One(T),
    /// One per period.
    Listed(Vec<T>),
}

/// A range: its least and its most, either of which may have no limit.
pub type Span = (f64, f64);

impl<T: Copy> Each<T> {
    /// That of a period; `None` past the end of a list.
    #[must_use]
    pub fn at(&self, period: Period) -> Option<T> {
        match self {
            Self::One(one) => Some(*one),
            Self::Listed(list) => list.get(period.position()).copied(),
        }
    }

    /// The one, or all of them.
    #[must_use]
    pub fn all(&self) -> &[T] {
        match self {
            Self::One(one) => std::slice::from_ref(one),
            Self::Listed(list) => list,
        }
    }

    /// The one that holds in every period.
    #[must_use]
    pub fn one(&self) -> Option<T> {
        if let Self::One(one) = self { Some(*one) } else { None }
    }
}

impl<T: Copy + PartialEq> Each<T> {
    /// A list of one per period, said once where all are alike. An empty list says nothing.
    #[must_use]
    pub fn folded(list: Vec<T>) -> Option<Self> {
        let &first = list.first()?;
        Some(if list.iter().all(|&other| other == first) { Self::One(first) } else { Self::Listed(list) })
    }

    /// Whether it is so in every period.
    #[must_use]
    pub fn is(&self, wanted: T) -> bool {
        self.all().iter().all(|&one| one == wanted)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::model::{Horizon, Name};

    #[test]
    fn what_is_alike_in_all_periods_is_said_once() {
        assert_eq!(Each::folded(vec![2, 2]), Some(Each::One(2)));
        assert_eq!(Each::folded(vec![2, 3]), Some(Each::Listed(vec![2, 3])));
        assert_eq!(Each::<u8>::folded(vec![]), None);
        assert!(Each::One(2).is(2) && !Each::Listed(vec![2, 3]).is(2));
    }

    #[test]
    fn each_period_has_its_own() {
        let horizon = Horizon::of(["w1", "w2", "w3"].map(|label| Name::new(label).unwrap()).into());
        let told = |each: Each<u8>| horizon.periods().map(|period| each.at(period)).collect::<Vec<_>>();
        assert_eq!(told(Each::One(7)), [Some(7), Some(7), Some(7)]);
        assert_eq!(told(Each::Listed(vec![7, 8])), [Some(7), Some(8), None]);
    }
}
