//! The walk over a parsed document: from its top-level keys to a model.

use std::collections::BTreeMap;

use toml::de::DeValue;

use super::calendar::Calendar;
use super::fields::Fields;
use super::findings::{Findings, shown};
use super::keys::{self, Keys};
use super::known::{self, Known, Summable, Supplies};
use super::named::name;
use super::number::Role;

use super::toml_types::{Table, kind};
use super::{activity, caps, limit, material, periods, resource};
use crate::model::name::Name;
use crate::model::types::{Aim, Model};
use crate::model::value::Value;

/// The version of the format that is read.
const FORMAT: &str = "1";
/// The sections of a model, each with an example of a table in it.
const SECTIONS: [(&str, &str); 4] = [
    ("resources", "[resources.kiln]"),
    ("activities", "[activities.floor_tile]"),
    ("materials", "[materials.slip]"),
    ("limits", "[limits.glazed_share]"),
];

/// The model in a document, and the working days in its periods. Where something is faulty its default stands, so that what follows can
/// still be checked.
pub(super) fn model(root: &Table<'_>, findings: &mut Findings) -> (Model, Option<Value>) {
    let mut model = Model::default();
    if !format(root, findings) {
        return (model, None);
    }
    let calendar = periods::calendar(root, findings);
    head(root, &mut model, &calendar, findings);
    model.horizon = calendar.horizon().clone();
    let mut walk = Walk { root, calendar: &calendar, findings };
    model.resources = walk.section("resources", &keys::RESOURCE, resource::read);
    model.materials = walk.section("materials", &keys::MATERIAL, material::read);
    let resources = Known::new(table(root, "resources"), &model.resources);
    let materials = Known::new(table(root, "materials"), &model.materials);
    let supplies = Supplies { resources, materials };
    let aim = model.aim;
    model.activities = walk.section("activities", &keys::ACTIVITY, |fields| activity::read(fields, aim, &supplies));
    let activities = Known::new(table(root, "activities"), &model.activities);
    let there = Summable { supplies, activities, tags: known::tags(&model.activities) };
    model.limits = walk.section("limits", &keys::LIMIT, |fields| limit::read(fields, &there));
    let tags = there.tags;
    caps::check(root, &model, &calendar, &tags, findings);
    (model, calendar.days().cloned())
}

/// The keys of the model itself; that its sections are tables is checked as well.
fn head(root: &Table<'_>, model: &mut Model, calendar: &Calendar, findings: &mut Findings) {
    let mut fields = Fields::open(root, 0..0, &keys::MODEL, calendar, findings);
    model.title = fields.text("title");
    model.currency = fields.text("currency");
    model.constant = fields.number("constant", Role::Amount).unwrap_or(0.0);
    model.aim = aim(&mut fields);
    for (section, example) in SECTIONS {
        fields.table(section, example);
    }
}

fn table<'a, 'i>(root: &'a Table<'i>, section: &str) -> Option<&'a Table<'i>> {
    root.get(section).and_then(|node| node.get_ref().as_table())
}

/// Whether the document says it is of the format read here.
pub(super) fn format(root: &Table<'_>, findings: &mut Findings) -> bool {
    let Some((key, node)) = root.get_key_value("format") else {
        let message = "`format` is missing".to_owned();
        findings.add(&(0..0), "no-format", message, "begin the file with `format = 1`");
        return true;
    };
    match node.get_ref() {
        DeValue::Integer(integer) if integer.as_str() == FORMAT => true,
        DeValue::Integer(integer) if integer.as_str().starts_with(|first: char| matches!(first, '1'..='9')) => {
            let version = shown(&integer.to_string());
            let message = format!("this file is of format {version}, written for a newer version of millreeve");
            findings.add(&node.span(), "newer-format", message, "this version reads format 1; update millreeve");
            false
        }
        _ => {
            findings.add(&key.span(), "bad-format", "`format` must be 1".to_owned(), "write `format = 1`");
            true
        }
    }
}

fn aim(fields: &mut Fields<'_, '_>) -> Aim {
    let Some(node) = fields.node("aim") else { return Aim::default() };
    let given = node.get_ref().as_str();
    let found = [Aim::Maximise, Aim::Minimise].into_iter().find(|aim| given == Some(aim.word()));
    found.unwrap_or_else(|| {
        let given = given.map_or_else(|| kind(node).to_owned(), |text| format!("`{}`", shown(text)));
        let message = format!("the aim is \"maximise\" or \"minimise\", not {given}");
        let help = match node.get_ref().as_str() {
            Some(text) if text.starts_with("min") => "write aim = \"minimise\"",
            _ => "write aim = \"maximise\", or leave it out",
        };
        fields.findings().add(&node.span(), "bad-aim", message, help);
        Aim::default()
    })
}

/// The walk through the sections of a document.
struct Walk<'a, 'i> {
    root: &'a Table<'i>,
    calendar: &'a Calendar,
    findings: &'a mut Findings,
}

impl Walk<'_, '_> {
    /// Every entry of a section, read by `read`. An entry whose name is faulty is read as well, for its own faults.
    fn section<T>(
        &mut self,
        section: &str,
        keys: &'static Keys,
        read: impl Fn(&mut Fields<'_, '_>) -> T,
    ) -> BTreeMap<Name, T> {
        let mut entries = BTreeMap::new();
        for (key, node) in table(self.root, section).into_iter().flatten() {
            let name = name(key.get_ref(), &key.span(), self.findings);
            let Some(table) = node.get_ref().as_table() else {
                let message = format!("`{section}` holds tables, but `{}` is {}", shown(key.get_ref()), kind(node));
                let help = format!("write it as a table that begins with [{section}.{}]", shown(key.get_ref()));
                self.findings.add(&key.span(), "wrong-type", message, help);
                continue;
            };
            let entry = read(&mut Fields::open(table, key.span(), keys, self.calendar, self.findings));
            if let Some(name) = name {
                entries.insert(name, entry);
            }
        }
        entries
    }
}
