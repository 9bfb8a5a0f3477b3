//! Addresses of what is planned of a material or a resource: `materials.slip.purchase.1`, `resources.kiln.surge`; and whether it is there.

use super::findings::{Among, Cure, Findings, shown};
use super::known::{Known, Tags};
use super::toml_types::Key;
use crate::model::name::Name;
use crate::model::types::{Flow, Material, Model, Resource, Term};

/// Whether a model has what a term stands for, as reading a limit asks.
pub(super) fn is_there(term: &Term, model: &Model, tags: &Tags) -> bool {
    match term {
        Term::All => true,
        Term::Activity(name) => model.activities.contains_key(name),
        Term::Tag(tag) => tags.contains_key(tag),
        Term::Material(name, flow) => {
            model.materials.get(name).is_some_and(|material| lacking(name, material, *flow).is_none())
        }
        Term::Surge(name, tier) => {
            let there = model.resources.get(name).map_or(0, |resource| resource.surge.len());
            no_tier("resources", name, "surge", there, *tier).is_none()
        }
    }
}

/// The term at `materials.` and `rest`.
pub(super) fn of_material(
    key: &Key<'_>,
    rest: &str,
    materials: &Known<'_, '_, Material>,
    findings: &mut Findings,
) -> Option<Term> {
    let (word, address) = rest.split_once('.').unwrap_or((rest, ""));
    let Some(name) = materials.find(word) else {
        if !materials.declares(word) {
            let cure = Cure::Nearest(shown(word), Among::Materials);
            findings.add(&key.span(), "unknown-material", format!("no material `{}`", shown(word)), cure);
        }
        return None;
    };
    let Some(flow) = flow(address) else {
        let message = format!("`{}` is nothing that a limit can sum", shown(key.get_ref()));
        let help = format!(
            "write \"materials.{name}.\" with purchase, sale, sale.late, stock or discard; one tier by its number, as in purchase.1"
        );
        findings.add(&key.span(), "bad-term", message, help);
        return None;
    };
    if let Some((message, help)) = materials.get(&name).and_then(|material| lacking(&name, material, flow)) {
        findings.add(&key.span(), "nothing-there", message, help);
        return None;
    }
    Some(Term::Material(name, flow))
}

/// The term at `resources.` and `rest`.
pub(super) fn of_resource(
    key: &Key<'_>,
    rest: &str,
    resources: &Known<'_, '_, Resource>,
    findings: &mut Findings,
) -> Option<Term> {
    let (word, address) = rest.split_once('.').unwrap_or((rest, ""));
    let Some(name) = resources.find(word) else {
        if !resources.declares(word) {
            let cure = Cure::Nearest(shown(word), Among::Resources);
            findings.add(&key.span(), "unknown-resource", format!("no resource `{}`", shown(word)), cure);
        }
        return None;
    };
    let Some(wanted) = tiers(address, "surge") else {
        let message = format!("`{}` is nothing that a limit can sum", shown(key.get_ref()));
        let help = format!("write \"resources.{name}.surge\"; one tier by its number, as in surge.1");
        findings.add(&key.span(), "bad-term", message, help);
        return None;
    };
    let there = resources.get(&name).map_or(0, |resource| resource.surge.len());
    if let Some((message, help)) = no_tier("resources", &name, "surge", there, wanted) {
        findings.add(&key.span(), "nothing-there", message, help);
        return None;
    }
    Some(Term::Surge(name, wanted))
}

fn flow(address: &str) -> Option<Flow> {
    match address {
        "stock" => Some(Flow::Stock),
        "discard" => Some(Flow::Discard),
        _ => {
            let late = || tiers(address.strip_suffix(".late")?, "sale").map(Flow::Late);
            late()
                .or_else(|| tiers(address, "purchase").map(Flow::Purchase))
                .or_else(|| tiers(address, "sale").map(Flow::Sale))
        }
    }
}

/// The tier that `WORD.TIER` names, or all tiers for `WORD` alone.
fn tiers(address: &str, word: &str) -> Option<Option<usize>> {
    let rest = address.strip_prefix(word)?;
    if rest.is_empty() {
        return Some(None);
    }
    let number = rest.strip_prefix('.')?;
    let tier: usize = number.parse().ok()?;
    (tier.to_string() == number).then_some(Some(tier))
}

/// What is wrong, and what would mend it, where a material has no such flow.
fn lacking(name: &Name, material: &Material, flow: Flow) -> Option<(String, String)> {
    match flow {
        Flow::Purchase(tier) => no_tier("materials", name, "purchase", material.purchase.len(), tier),
        Flow::Sale(tier) => no_tier("materials", name, "sale", material.sale.len(), tier),
        Flow::Late(tier) => no_tier("materials", name, "sale", material.sale.len(), tier).or_else(|| {
            let late = |at: usize| material.sale.get(at).is_some_and(|sale| sale.late.is_some());
            let any = match tier {
                Some(tier) => late(tier - 1),
                None => (0..material.sale.len()).any(late),
            };
            let help = format!("add `late` to it in [materials.{name}], or take the term out");
            let message = match tier {
                Some(tier) => format!("tier {tier} of the `sale` of `{name}` is never late"),
                None => format!("sales of `{name}` are never late"),
            };
            (!any).then_some((message, help))
        }),
        Flow::Stock if material.stock.is_none() && material.closing.is_none() => {
            let help = format!("add `stock` to [materials.{name}], or take the term out");
            Some((format!("`{name}` has no `stock`"), help))
        }
        Flow::Stock | Flow::Discard => None,
    }
}

fn no_tier(section: &str, name: &Name, word: &str, there: usize, wanted: Option<usize>) -> Option<(String, String)> {
    match (there, wanted) {
        (0, _) => {
            let help = format!("add `{word}` to [{section}.{name}], or take the term out");
            Some((format!("`{name}` has no `{word}`"), help))
        }
        (_, Some(tier)) if tier == 0 || tier > there => {
            let help = match there {
                1 => "there is one tier, number 1".to_owned(),
                _ => format!("tiers are counted from 1, and there are {there}"),
            };
            Some((format!("`{word}` of `{name}` has no tier {tier}"), help))
        }
        _ => None,
    }
}
