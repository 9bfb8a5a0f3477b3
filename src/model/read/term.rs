//! Terms of a limit: an activity, a tag, or an address of something that is planned.

use super::findings::{Among, Cure, Findings, shown};
use super::flow;
use super::known::Summable;
use super::toml_types::{Key, Node};
use crate::model::types::Term;

/// What a key of `terms` or `per` stands for; `None` with a fault added where it stands for nothing that is there.
pub(super) fn read(key: &Key<'_>, there: &Summable<'_, '_>, findings: &mut Findings) -> Option<Term> {
    let word: &str = key.get_ref();
    match word.split_once('.') {
        None => plain(key, word, there, findings),
        Some(("activities", "*")) => Some(Term::All),
        Some(("activities", rest)) if rest.contains('.') => {
            let help = "a term is the level of an activity: \"activities.NAME\"";
            let message = format!("`{}` is not the address of an activity", shown(word));
            findings.add(&key.span(), "bad-term", message, help);
            None
        }
        Some(("activities", rest)) => plain(key, rest, there, findings),
        Some(("materials", rest)) => flow::of_material(key, rest, &there.supplies.materials, findings),
        Some(("resources", rest)) if rest.contains(".surge") => {
            flow::of_resource(key, rest, &there.supplies.resources, findings)
        }
        Some(_) => {
            let message = format!("`{}` is not a term", shown(word));
            let help = "a term is an activity, \"tag:NAME\", or an address such as \"activities.*\" or \"materials.slip.purchase\"";
            findings.add(&key.span(), "bad-term", message, help);
            None
        }
    }
}

fn plain(key: &Key<'_>, word: &str, there: &Summable<'_, '_>, findings: &mut Findings) -> Option<Term> {
    if let Some(tag) = word.strip_prefix("tag:") {
        let Some((name, _)) = there.tags.get_key_value(tag) else {
            let message = format!("no activity has the tag `{}`", shown(tag));
            findings.add(&key.span(), "unknown-tag", message, Cure::Nearest(shown(tag), Among::Tags));
            return None;
        };
        return Some(Term::Tag(name.clone()));
    }
    let found = there.activities.find(word);
    if found.is_none() && !there.activities.declares(word) {
        let message = format!("no activity `{}`", shown(word));
        let cure = match word {
            "*" => Cure::from("for all activities write \"activities.*\""),
            tag if there.tags.contains_key(tag) => Cure::Say(format!("for the tag write \"tag:{tag}\"")),
            material if there.supplies.materials.find(material).is_some() => Cure::Say(format!(
                "for the material write what of it is summed, as in \"materials.{material}.purchase\""
            )),
            _ => Cure::Nearest(shown(word), Among::Activities),
        };
        findings.add(&key.span(), "unknown-activity", message, cure);
    }
    found.map(Term::Activity)
}

/// An address without quotes, which TOML takes for tables within tables.
pub(super) fn refuse_dotted(key: &Key<'_>, node: &Node<'_>, findings: &mut Findings) -> bool {
    let dotted = matches!(key.get_ref().as_ref(), "activities" | "resources" | "materials");
    let Some(within) = node.get_ref().as_table().filter(|_| dotted) else { return false };
    let rest = within.keys().next().map_or("NAME", |word| word.get_ref());
    let message = format!("an address such as `{}.{}` needs quotes here", key.get_ref(), shown(rest));
    let help = format!("put the whole address in double quotes: \"{}.{}\"", key.get_ref(), shown(rest));
    findings.add(&key.span(), "bad-term", message, help);
    true
}
