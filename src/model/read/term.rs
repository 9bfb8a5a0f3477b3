//! Terms of a limit: an activity, a tag, or an address of activities.

use super::findings::{Among, Cure, Findings, shown};
use super::keys::Later;
use super::known::{Known, Tags};
use super::toml_types::{Key, Node};
use crate::model::types::{Activity, Term};

/// What a key of `terms` or `per` stands for; `None` with a fault added where it stands for nothing that is there.
pub(super) fn read(
    key: &Key<'_>,
    activities: &Known<'_, '_, Activity>,
    tags: &Tags,
    findings: &mut Findings,
) -> Option<Term> {
    let word: &str = key.get_ref();
    match word.split_once('.') {
        None => plain(key, word, activities, tags, findings),
        Some(("activities", "*")) => Some(Term::All),
        Some(("activities", rest)) if rest.contains('.') => {
            let help = "a term is the level of an activity: \"activities.NAME\"";
            let message = format!("`{}` is not the address of an activity", shown(word));
            findings.add(&key.span(), "bad-term", message, help);
            None
        }
        Some(("activities", rest)) => plain(key, rest, activities, tags, findings),
        Some(("materials", _)) => refused(key, Later::Materials, findings),
        Some(("resources", rest)) if rest.contains(".surge") => refused(key, Later::Surge, findings),
        Some(_) => {
            let message = format!("`{}` is not a term", shown(word));
            let help = "a term is an activity, \"tag:NAME\", or an address such as \"activities.*\"";
            findings.add(&key.span(), "bad-term", message, help);
            None
        }
    }
}

fn refused(key: &Key<'_>, later: Later, findings: &mut Findings) -> Option<Term> {
    later.refuse(&format!("the address `{}`", shown(key.get_ref())), &key.span(), findings);
    None
}

fn plain(
    key: &Key<'_>,
    word: &str,
    activities: &Known<'_, '_, Activity>,
    tags: &Tags,
    findings: &mut Findings,
) -> Option<Term> {
    if let Some(tag) = word.strip_prefix("tag:") {
        let Some((name, _)) = tags.get_key_value(tag) else {
            let message = format!("no activity has the tag `{}`", shown(tag));
            findings.add(&key.span(), "unknown-tag", message, Cure::Nearest(shown(tag), Among::Tags));
            return None;
        };
        return Some(Term::Tag(name.clone()));
    }
    let found = activities.find(word);
    if found.is_none() && !activities.declares(word) {
        let message = format!("no activity `{}`", shown(word));
        let cure = match word {
            "*" => Cure::from("for all activities write \"activities.*\""),
            tag if tags.contains_key(tag) => Cure::Say(format!("for the tag write \"tag:{tag}\"")),
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
