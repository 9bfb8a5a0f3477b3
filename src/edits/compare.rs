//! Comparing two models: every edit, in planners' terms.

use std::collections::{BTreeMap, BTreeSet};

use super::edit::{Edit, Kind, Subject};
use super::rename::Renames;
use super::side_by_side::{Pair, side_by_side};
use crate::model::{Activity, Bound, Limit, Model, Name, Resource, Term, Value};

/// Every edit that turns `old` into `new`, in the order of the model: its own keys, resources, activities, limits.
///
/// A rename is a withdrawal and something new, unless every number agrees: then it is wording, told under the new name.
#[must_use]
pub fn compare(old: &Model, new: &Model) -> Vec<Edit> {
    compare_renamed(old, new, &Renames::between(old, new))
}

/// As [`compare`], where the renames are known: those [between](Renames::between) the two models.
#[must_use]
pub fn compare_renamed(old: &Model, new: &Model, renames: &Renames) -> Vec<Edit> {
    if renames.is_empty() {
        return compared(old, new).0;
    }
    let mut edits = compared(&renames.applied(old), new);
    edits.renames(renames);
    edits.0
}

fn compared(old: &Model, new: &Model) -> Edits {
    let mut edits = Edits::default();
    edits.model(old, new);
    for (name, pair) in pairs(&old.resources, &new.resources) {
        edits.resource(name, pair);
    }
    let concerned = Concerned { old, new, asked: asked_tags(old, new) };
    for (name, pair) in pairs(&old.activities, &new.activities) {
        edits.activity(name, pair, &concerned);
    }
    for (name, pair) in pairs(&old.limits, &new.limits) {
        edits.limit(name, pair, &concerned);
    }
    edits
}

/// What differs between two maps, by name.
fn pairs<'a, T: PartialEq>(
    old: &'a BTreeMap<Name, T>,
    new: &'a BTreeMap<Name, T>,
) -> impl Iterator<Item = (&'a Name, Pair<'a, T>)> {
    side_by_side(old, new).filter(|(_, (was, is))| was != is)
}

/// The tags that limits ask for, before or after.
fn asked_tags<'a>(old: &'a Model, new: &'a Model) -> BTreeSet<&'a Name> {
    let limits = old.limits.values().chain(new.limits.values());
    let terms = limits.flat_map(|limit| limit.terms.keys().chain(limit.per.iter().flat_map(BTreeMap::keys)));
    terms.filter_map(|term| if let Term::Tag(tag) = term { Some(tag) } else { None }).collect()
}

/// The models, for finding out what else an edit of one of their parts concerns.
struct Concerned<'a> {
    old: &'a Model,
    new: &'a Model,
    /// Tags that limits ask for.
    asked: BTreeSet<&'a Name>,
}

impl Concerned<'_> {
    /// Activities of both models: what is new or withdrawn brings or takes its terms with it.
    fn by(&self, term: &Term) -> Vec<Name> {
        let all = self.old.activities.iter().chain(&self.new.activities);
        let concerned = all.filter(|(name, activity)| {
            let asked = match term {
                Term::Activity(one) => one == *name,
                Term::Tag(tag) => activity.tags.contains(tag),
                Term::All => true,
                Term::Material(..) | Term::Surge(..) => false,
            };
            asked && self.old.activities.contains_key(*name) && self.new.activities.contains_key(*name)
        });
        let names: BTreeSet<&Name> = concerned.map(|(name, _)| name).collect();
        names.into_iter().cloned().collect()
    }

    /// What a changed rate of `activity` is about: a resource that is new or withdrawn brings or takes its rates with it.
    fn rate(&self, activity: &Subject, resource: &Name) -> (Subject, Kind) {
        let is_in = |model: &Model| model.resources.contains_key(resource);
        match (is_in(self.old), is_in(self.new)) {
            (false, true) => (Subject::Resource(resource.clone()), Kind::NewConstraint),
            (true, false) => (Subject::Resource(resource.clone()), Kind::WithdrawnConstraint),
            _ => (activity.clone(), Kind::Recipe),
        }
    }
}

#[derive(Default)]
struct Edits(Vec<Edit>);

impl Edits {
    fn push(&mut self, address: String, subject: &Subject, kind: Kind, old: Option<String>, new: Option<String>) {
        if old != new {
            self.0.push(Edit { address, subject: subject.clone(), old, new, kind });
        }
    }

    fn renames(&mut self, renames: &Renames) {
        self.renamed("resources", &renames.resources, Subject::Resource);
        self.renamed("activities", &renames.activities, Subject::Activity);
        self.renamed("limits", &renames.limits, |name| Subject::Limit(name, Vec::new()));
    }

    fn renamed(&mut self, table: &str, names: &BTreeMap<Name, Name>, subject: impl Fn(Name) -> Subject) {
        for (was, is) in names {
            let (old, new) = (Some(was.to_string()), Some(is.to_string()));
            self.push(format!("{table}.{is}"), &subject(is.clone()), Kind::Wording, old, new);
        }
    }

    /// A text that decides nothing.
    fn words(&mut self, address: String, subject: &Subject, old: Option<&String>, new: Option<&String>) {
        self.push(address, subject, Kind::Wording, old.cloned(), new.cloned());
    }

    fn number(&mut self, address: String, subject: &Subject, kind: Kind, old: &Value, new: &Value) {
        self.push(address, subject, kind, Some(shown(old)), Some(shown(new)));
    }

    /// Two bounds: each moved, put there, or taken away.
    fn bounds(&mut self, addresses: [String; 2], subject: &Subject, old: [&Value; 2], new: [&Value; 2]) {
        let let_go = let_go(old, new);
        for (at, address) in addresses.into_iter().enumerate() {
            let gone = has_bound(old[at]) && !has_bound(new[at]);
            let kind = bound_kind(let_go.map(|let_go| let_go[at]), gone);
            self.push(address, subject, kind, bound_shown(old[at]), bound_shown(new[at]));
        }
    }

    fn model(&mut self, old: &Model, new: &Model) {
        let subject = Subject::Model;
        self.words("title".into(), &subject, old.title.as_ref(), new.title.as_ref());
        self.words("currency".into(), &subject, old.currency.as_ref(), new.currency.as_ref());
        let aims = (Some(old.aim.word().to_owned()), Some(new.aim.word().to_owned()));
        self.push("aim".into(), &subject, Kind::Aim, aims.0, aims.1);
        self.push(
            "constant".into(),
            &subject,
            Kind::Wording,
            Some(old.constant.to_string()),
            Some(new.constant.to_string()),
        );
    }

    fn resource(&mut self, name: &Name, pair: Pair<'_, Resource>) {
        let subject = Subject::Resource(name.clone());
        let address = format!("resources.{name}");
        match pair {
            (Some(old), Some(new)) => {
                self.words(format!("{address}.label"), &subject, old.label.as_ref(), new.label.as_ref());
                self.words(format!("{address}.unit"), &subject, old.unit.as_ref(), new.unit.as_ref());
                let addresses = ["at_least", "capacity"].map(|word| format!("{address}.{word}"));
                let (was, is) = ([&old.at_least, &old.capacity], [&new.at_least, &new.capacity]);
                self.bounds(addresses, &subject, was, is);
                self.number(format!("{address}.cost"), &subject, Kind::Price, &old.cost, &new.cost);
            }
            (None, Some(new)) => {
                self.push(address.clone(), &subject, Kind::NewConstraint, None, Some(resource_in_short(new)));
                self.number(format!("{address}.cost"), &subject, Kind::Price, &Value::Every(0.0), &new.cost);
            }
            (Some(old), None) => {
                self.push(address.clone(), &subject, Kind::WithdrawnConstraint, Some(resource_in_short(old)), None);
                self.number(format!("{address}.cost"), &subject, Kind::Price, &old.cost, &Value::Every(0.0));
            }
            (None, None) => {}
        }
    }

    fn activity(&mut self, name: &Name, pair: Pair<'_, Activity>, concerned: &Concerned<'_>) {
        let subject = Subject::Activity(name.clone());
        let address = format!("activities.{name}");
        match pair {
            (Some(old), Some(new)) => self.activity_changed(&address, &subject, old, new, concerned),
            (None, Some(new)) => {
                self.push(address, &subject, new_activity(new), None, Some(activity_in_short(new)));
            }
            (Some(old), None) => {
                self.push(address, &subject, Kind::WithdrawnActivity, Some(activity_in_short(old)), None);
            }
            (None, None) => {}
        }
    }

    fn activity_changed(
        &mut self,
        address: &str,
        subject: &Subject,
        old: &Activity,
        new: &Activity,
        concerned: &Concerned<'_>,
    ) {
        self.words(format!("{address}.label"), subject, old.label.as_ref(), new.label.as_ref());
        self.words(format!("{address}.unit"), subject, old.unit.as_ref(), new.unit.as_ref());
        if old.prospect != new.prospect {
            let kind = if new.prospect { Kind::WithdrawnActivity } else { new_activity(new) };
            let flag = |activity: &Activity| Some(activity.prospect.to_string());
            self.push(format!("{address}.prospect"), subject, kind, flag(old), flag(new));
        }
        self.number(format!("{address}.price"), subject, Kind::Price, &old.price, &new.price);
        self.number(format!("{address}.cost"), subject, Kind::Price, &old.cost, &new.cost);
        for (resource, (old, new)) in pairs(&old.uses, &new.uses) {
            let address = format!("{address}.uses.{resource}");
            let (subject, kind) = concerned.rate(subject, resource);
            self.push(address, &subject, kind, old.map(shown), new.map(shown));
        }
        let addresses = ["at_least", "at_most"].map(|word| format!("{address}.{word}"));
        self.bounds(addresses, subject, [&old.at_least, &old.at_most], [&new.at_least, &new.at_most]);
        for tag in old.tags.symmetric_difference(&new.tags) {
            let kind = if concerned.asked.contains(tag) { Kind::Recipe } else { Kind::Wording };
            let carried = |activity: &Activity| activity.tags.contains(tag).then(|| tag.to_string());
            self.push(format!("{address}.tags"), subject, kind, carried(old), carried(new));
        }
    }

    fn limit(&mut self, name: &Name, pair: Pair<'_, Limit>, concerned: &Concerned<'_>) {
        let address = format!("limits.{name}");
        let whole = Subject::Limit(name.clone(), Vec::new());
        match pair {
            // With `per` it stands in rows of their own: another rule under the same name.
            (Some(old), Some(new)) if old.per.is_some() != new.per.is_some() => {
                self.push(address.clone(), &whole, Kind::WithdrawnConstraint, Some(limit_in_short(old)), None);
                self.push(address, &whole, Kind::NewConstraint, None, Some(limit_in_short(new)));
            }
            (Some(old), Some(new)) => {
                self.words(format!("{address}.label"), &whole, old.label.as_ref(), new.label.as_ref());
                self.terms(&format!("{address}.terms"), name, &old.terms, &new.terms, concerned);
                let none = BTreeMap::new();
                let (old_per, new_per) = (old.per.as_ref().unwrap_or(&none), new.per.as_ref().unwrap_or(&none));
                self.terms(&format!("{address}.per"), name, old_per, new_per, concerned);
                self.limit_bounds(&address, name, old, new, concerned);
            }
            (None, Some(new)) => self.push(address, &whole, Kind::NewConstraint, None, Some(limit_in_short(new))),
            (Some(old), None) => self.push(address, &whole, Kind::WithdrawnConstraint, Some(limit_in_short(old)), None),
            (None, None) => {}
        }
    }

    fn terms(
        &mut self,
        address: &str,
        limit: &Name,
        old: &BTreeMap<Term, Value>,
        new: &BTreeMap<Term, Value>,
        concerned: &Concerned<'_>,
    ) {
        let terms: BTreeSet<&Term> = old.keys().chain(new.keys()).collect();
        for term in terms {
            let subject = Subject::Limit(limit.clone(), concerned.by(term));
            let address = format!("{address}.{term}");
            self.push(address, &subject, Kind::Recipe, old.get(term).map(shown), new.get(term).map(shown));
        }
    }

    /// With `per`, a bound is a coefficient of the row, and each bound has a row of its own.
    fn limit_bounds(&mut self, address: &str, name: &Name, old: &Limit, new: &Limit, concerned: &Concerned<'_>) {
        let (olds, news) = (bounds(&old.bound), bounds(&new.bound));
        let let_go = let_go([&olds[0].1, &olds[1].1], [&news[0].1, &news[1].1]);
        let per: Vec<Name> =
            new.per.iter().chain(&old.per).flat_map(BTreeMap::keys).flat_map(|term| concerned.by(term)).collect();
        for (at, ((word, old_bound), (_, new_bound))) in olds.into_iter().zip(news).enumerate() {
            let (was, is) = (has_bound(&old_bound), has_bound(&new_bound));
            let by_per = old.per.is_some() || new.per.is_some();
            let kind = match (was, is) {
                (true, true) if by_per => Kind::Recipe,
                (false, true) if by_per => Kind::NewConstraint,
                (true, false) if by_per => Kind::WithdrawnConstraint,
                _ => bound_kind(let_go.and_then(|let_go| let_go.get(at).copied()), was && !is),
            };
            let subject = Subject::Limit(name.clone(), per.clone());
            self.push(format!("{address}.{word}"), &subject, kind, bound_shown(&old_bound), bound_shown(&new_bound));
        }
    }
}

fn new_activity(activity: &Activity) -> Kind {
    let (leasts, mosts) = (activity.at_least.numbers(), activity.at_most.numbers());
    // Out of the basis it stands at a bound, or at 0 where it is free.
    let needless = all_are(leasts, 0.0) || all_are(mosts, 0.0);
    let free = all_are(leasts, f64::NEG_INFINITY) && all_are(mosts, f64::INFINITY);
    let crossed = leasts.iter().any(|&least| least > 0.0) || mosts.iter().any(|&most| most < 0.0);
    let rests_at_0 = (needless || free) && !crossed;
    if rests_at_0 || activity.prospect { Kind::NewActivity } else { Kind::NewCommitment }
}

#[expect(clippy::float_cmp, reason = "numbers are read, not computed")]
fn all_are(numbers: &[f64], bound: f64) -> bool {
    numbers.iter().all(|&number| number == bound)
}

/// The three ways to bound a limit, each with its number; infinite where it is not used.
fn bounds(bound: &Bound) -> [(&'static str, Value); 3] {
    let none = || Value::Every(f64::INFINITY);
    match bound {
        Bound::Between(least, most) => [("at_least", least.clone()), ("at_most", most.clone()), ("equals", none())],
        Bound::Equals(value) => [("at_least", none()), ("at_most", none()), ("equals", value.clone())],
    }
}

/// Where both bounds were one and part: which of them lets go of what they held. Where both have moved, what they held stands at
/// neither, which is as if one of them were taken away and the other moved. `None` where they do not part.
fn let_go(old: [&Value; 2], new: [&Value; 2]) -> Option<[bool; 2]> {
    let parted = has_bound(old[0]) && old[0] == old[1] && new[0] != new[1];
    parted.then(|| [old[0] != new[0] && old[1] == new[1], old[1] != new[1]])
}

fn bound_kind(lets_go: Option<bool>, gone: bool) -> Kind {
    if lets_go.unwrap_or(gone) { Kind::BoundRemoved } else { Kind::Capacity }
}

fn has_bound(value: &Value) -> bool {
    value.numbers().iter().any(|number| number.is_finite())
}

fn bound_shown(value: &Value) -> Option<String> {
    has_bound(value).then(|| shown(value))
}

fn shown(value: &Value) -> String {
    match value.numbers() {
        [number] => number.to_string(),
        numbers => format!("{numbers:?}"),
    }
}

fn resource_in_short(resource: &Resource) -> String {
    let parts = [("at least", &resource.at_least), ("capacity", &resource.capacity)];
    in_short(parts.into_iter().filter_map(|(word, value)| Some(format!("{word} {}", bound_shown(value)?))))
}

fn activity_in_short(activity: &Activity) -> String {
    let price = (activity.price != Value::Every(0.0)).then(|| format!("price {}", shown(&activity.price)));
    let cost = (activity.cost != Value::Every(0.0)).then(|| format!("cost {}", shown(&activity.cost)));
    let prospect = activity.prospect.then(|| "prospect".to_owned());
    in_short(price.into_iter().chain(cost).chain(prospect))
}

fn limit_in_short(limit: &Limit) -> String {
    let bounds = bounds(&limit.bound)
        .into_iter()
        .filter_map(|(word, value)| Some(format!("{} {}", word.replace('_', " "), bound_shown(&value)?)));
    in_short(bounds)
}

fn in_short(parts: impl Iterator<Item = String>) -> String {
    let text = parts.collect::<Vec<_>>().join(", ");
    if text.is_empty() { "as written".to_owned() } else { text }
}
