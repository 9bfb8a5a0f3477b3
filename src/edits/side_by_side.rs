//! Two maps, walked together.

use std::cmp::Ordering;
use std::collections::BTreeMap;

use crate::model::Name;

/// What was there and what is.
pub(super) type Pair<'a, T> = (Option<&'a T>, Option<&'a T>);

/// Every name of two maps, in byte order, with what each map has under it.
pub(super) fn side_by_side<'a, T>(
    old: &'a BTreeMap<Name, T>,
    new: &'a BTreeMap<Name, T>,
) -> impl Iterator<Item = (&'a Name, Pair<'a, T>)> {
    let (mut old, mut new) = (old.iter().peekable(), new.iter().peekable());
    std::iter::from_fn(move || {
        let order = match (old.peek(), new.peek()) {
            (Some((was, _)), Some((is, _))) => was.cmp(is),
            (Some(_), None) => Ordering::Less,
            (None, _) => Ordering::Greater,
        };
        let was = old.next_if(|_| order.is_le());
        let is = new.next_if(|_| order.is_ge());
        let name = was.or(is)?.0;
        Some((name, (was.map(|(_, thing)| thing), is.map(|(_, thing)| thing))))
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_name_comes_once_and_in_order() {
        let map = |names: &[&str]| -> BTreeMap<Name, usize> {
            names.iter().enumerate().map(|(at, name)| (Name::new(name).unwrap(), at)).collect()
        };
        let (old, new) = (map(&["a", "c", "d"]), map(&["b", "c", "e", "f"]));
        let told: Vec<_> = side_by_side(&old, &new).map(|(name, (was, is))| (name.as_str(), was, is)).collect();
        let expected = [
            ("a", Some(&0), None),
            ("b", None, Some(&0)),
            ("c", Some(&1), Some(&1)),
            ("d", Some(&2), None),
            ("e", None, Some(&2)),
            ("f", None, Some(&3)),
        ];
        assert_eq!(told, expected);
    }
}
