//! Limits: any other linear rule.

use std::collections::BTreeMap;
use std::fmt;

use crate::model::name::Name;
use crate::model::value::{Period, Value};

/// A linear rule over levels: `at_least · per ≤ Σ terms ≤ at_most · per`, or `Σ terms = equals · per`.
///
/// Without `per` the bounds stand alone.
#[derive(Clone, Debug, PartialEq)]
pub struct Limit {
    /// Shown beside the name; decides nothing.
    pub label: Option<String>,
    /// What is summed: coefficient per unit of level.
    pub terms: BTreeMap<Term, Value>,
    /// What the bounds are multiplied by; `None` where they stand alone.
    pub per: Option<BTreeMap<Term, Value>>,
    /// The bounds.
    pub bound: Bound,
    /// Over which periods it holds.
    pub over: Over,
}

impl Limit {
    /// What it sums: its terms, and what its bounds are multiplied by.
    pub fn sums(&self) -> impl Iterator<Item = &BTreeMap<Term, Value>> {
        std::iter::once(&self.terms).chain(&self.per)
    }
}

impl Default for Limit {
    fn default() -> Self {
        let bound = Bound::Between(Value::Every(f64::NEG_INFINITY), Value::Every(f64::INFINITY));
        Self { label: None, terms: BTreeMap::new(), per: None, bound, over: Over::Each }
    }
}

/// Over which periods a limit holds.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub enum Over {
    /// In each period on its own.
    #[default]
    Each,
    /// Over all periods together; its bounds are single numbers.
    All,
    /// Over some periods together, in order; its bounds are single numbers.
    Some(Vec<Period>),
}

/// What bounds a limit.
#[derive(Clone, Debug, PartialEq)]
pub enum Bound {
    /// From the first to the second; one of the two may be infinite.
    Between(Value, Value),
    /// Exactly so much.
    Equals(Value),
}

/// What a limit sums over.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Term {
    /// The level of one activity.
    Activity(Name),
    /// The levels of all activities with a tag.
    Tag(Name),
    /// The levels of all activities (`activities.*`).
    All,
    /// A flow of a material (`materials.slip.purchase`); all of its tiers, or one, counted from 1.
    Material(Name, Flow),
    /// The extra capacity of a resource (`resources.kiln.surge`); all of its tiers, or one, counted from 1.
    Surge(Name, Option<usize>),
}

/// A way in which a material comes, goes or waits, as far as it is planned. Tiers are counted from 1; `None` is all of them.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Flow {
    /// Bought.
    Purchase(Option<usize>),
    /// Sold.
    Sale(Option<usize>),
    /// Sold firmly, and not delivered yet at the end of the period.
    Late(Option<usize>),
    /// Left at the end of the period.
    Stock,
    /// Thrown away.
    Discard,
}

impl fmt::Display for Term {
    /// As a model spells it.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Activity(name) => write!(f, "{name}"),
            Self::Tag(tag) => write!(f, "tag:{tag}"),
            Self::All => f.write_str("activities.*"),
            Self::Material(name, flow) => write!(f, "materials.{name}.{flow}"),
            Self::Surge(name, tier) => {
                write!(f, "resources.{name}.surge")?;
                tier.map_or(Ok(()), |tier| write!(f, ".{tier}"))
            }
        }
    }
}

impl fmt::Display for Flow {
    /// As an address spells it.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let tiers = |f: &mut fmt::Formatter<'_>, word: &str, tier: Option<usize>| {
            f.write_str(word)?;
            tier.map_or(Ok(()), |tier| write!(f, ".{tier}"))
        };
        match *self {
            Self::Purchase(tier) => tiers(f, "purchase", tier),
            Self::Sale(tier) => tiers(f, "sale", tier),
            Self::Late(tier) => tiers(f, "sale", tier).and_then(|()| f.write_str(".late")),
            Self::Stock => f.write_str("stock"),
            Self::Discard => f.write_str("discard"),
        }
    }
}
