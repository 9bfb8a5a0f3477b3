//! A model in parts: every TOML and CSV file of its folder, read each by itself and merged into one document.
//!
//! The merged document is walked as that of a single file is. Places tell the parts apart: their texts lie one behind the other
//! ([`sheets`]), so that a fault found anywhere in the walk leads back to its part, line and column.

mod again;
pub(super) mod bundle;
pub(super) mod folder;
mod merge;
mod sheets;
mod traces;

pub(super) use again::again;
pub use traces::Traces;

use std::ffi::{OsStr, OsString};
use std::os::unix::ffi::OsStrExt;
use std::path::Path;

use toml::Spanned;
use toml::de::DeValue;

use self::merge::{Merging, merge, merge_rates};
use self::sheets::{Sheet, Sheets, together};
use super::blocks::Block;
use super::csv::{self, Kind, Periods};
use super::findings::Findings;
use super::source::Places;
use super::toml_types::Table;
use super::{Reading, bytes, document, most, oddities, syntax};
use crate::model::fault::{Fault, Faults};
use crate::model::near;
use crate::model::types::Model;
use crate::model::value::Value;

/// What the model's folder must hold, for a cure.
const CURE_EMPTY: &str = "put the model's TOML and CSV files directly into it; one of them begins with `format = 1`";

/// Parts by name, in byte order of their names.
pub(super) type Parts<'a> = [(OsString, &'a [u8])];

/// The model that parts spell, and what is odd about it; `path` is their folder, and is only repeated in faults.
///
/// # Errors
/// All faults found, part by part. A part that is no UTF-8 text or no TOML keeps the others from being looked into further.
pub(super) fn read(path: &Path, parts: &Parts<'_>) -> Result<Reading, Faults> {
    with_document(path, parts, false, |Document { sheets, root, model, .. }| {
        let warnings = oddities::find(root, &model).finish(sheets, &model);
        Reading { model, warnings }
    })
}

/// As [`read`], but for the oddities, and with what lets parts be read by what was edited in them.
///
/// # Errors
/// As [`read`].
pub(super) fn read_tracing(path: &Path, parts: &Parts<'_>) -> Result<(Model, Traces), Faults> {
    with_document(path, parts, true, |Document { sheets, model, days, tables, .. }| {
        (model, Traces::of(sheets, tables, days))
    })
}

/// A document without a fault.
struct Document<'a> {
    sheets: &'a Sheets<'a>,
    root: &'a Table<'a>,
    model: Model,
    days: Option<Value>,
    /// Where the tables of each TOML part lie, if that was asked for.
    tables: Vec<Option<Vec<Block>>>,
}

fn with_document<T>(
    path: &Path,
    parts: &Parts<'_>,
    tracing: bool,
    made: impl FnOnce(Document<'_>) -> T,
) -> Result<T, Faults> {
    let sheets = laid_out(path, parts)?;
    let parsed = parsed(&sheets)?;
    let tables =
        parsed.iter().map(|(sheet, table)| if tracing { traces::tables(sheet.text, table) } else { None }).collect();
    let mut findings = Findings::default();
    let parsed = parsed.into_iter().map(|(sheet, table)| (sheet.base, table));
    let Some(root) = merged(&sheets, parsed, &mut findings) else {
        return Err(findings.finish(&sheets, &Model::default()));
    };
    let (model, days) = document::model(&root, &mut findings);
    if findings.is_empty() {
        Ok(made(Document { sheets: &sheets, root: &root, model, days, tables }))
    } else {
        Err(findings.finish(&sheets, &model))
    }
}

/// The texts of parts, one behind the other.
fn laid_out<'a>(path: &'a Path, parts: &Parts<'a>) -> Result<Sheets<'a>, Faults> {
    let mut sheets = Sheets::of(path);
    let mut faults = Vec::new();
    if parts.is_empty() {
        faults.push((&sheets).whole("no-parts", "the folder holds no part of a model".to_owned(), CURE_EMPTY));
    }
    faults.extend(too_much(&sheets, parts));
    for (name, bytes) in parts {
        match laid(path, name, bytes) {
            Ok((text, csv)) => sheets.push(path.join(name), text, csv),
            Err(fault) => faults.push(*fault),
        }
    }
    if faults.is_empty() { Ok(sheets) } else { Err(together([Faults { reported: faults, more: 0 }])) }
}

/// The tables of the TOML parts.
fn parsed<'a>(sheets: &'a Sheets<'a>) -> Result<Vec<(&'a Sheet<'a>, Table<'a>)>, Faults> {
    let (mut tables, mut faults) = (Vec::new(), Vec::new());
    for sheet in sheets.iter() {
        match sheet.csv {
            None => match syntax::parse(sheet.source()) {
                Ok(table) => tables.push((sheet, table.into_inner())),
                Err(told) => faults.push(told),
            },
            Some(_) => faults.extend(syntax::conflict(sheet.source())),
        }
    }
    if faults.is_empty() { Ok(tables) } else { Err(together(faults)) }
}

/// The text of a part and what it holds.
fn laid<'a>(folder: &Path, name: &OsStr, bytes: &'a [u8]) -> Result<(&'a str, Option<Kind>), Box<Fault>> {
    let path = folder.join(name);
    let is_csv = name.as_bytes().ends_with(b".csv");
    let name = name.to_string_lossy();
    let kind = if is_csv { Some(Kind::of(&name).ok_or_else(|| unknown_csv(&path, &name))?) } else { None };
    match bytes::str(&path, bytes) {
        Ok(text) => Ok((text, kind)),
        Err(mut fault) => {
            if fault.code == "empty-file" {
                fault.help = "take it out of the folder, or put its part of the model into it".to_owned();
            }
            Err(fault)
        }
    }
}

fn unknown_csv(path: &Path, name: &str) -> Box<Fault> {
    let names = csv::KINDS.map(|(name, _)| name);
    let message = "a CSV part is called by what it holds, and this is none of its names".to_owned();
    let list = || format!("the names are {}", names.join(", "));
    let help = near::help(name, names.into_iter(), list);
    Box::new(Fault { path: path.to_owned(), place: None, code: "unknown-part", message, help })
}

/// A fault where the parts together are more than is read of a model.
fn too_much(sheets: &Sheets<'_>, parts: &Parts<'_>) -> Option<Fault> {
    let bytes: usize = parts.iter().map(|(_, bytes)| bytes.len()).sum();
    let tokens = || parts.iter().map(|(_, part)| bytes::tokens(part)).sum::<usize>();
    let message = if parts.len() > most::MOST_PARTS {
        format!("{} parts are more than the {} that one model may have", parts.len(), most::MOST_PARTS)
    } else if bytes > most::MOST_BYTES {
        format!("its parts together are larger than {} MiB", most::MOST_BYTES >> 20)
    } else if bytes > most::MOST_TOKENS && tokens() > most::MOST_TOKENS {
        format!("its parts together have more than {} words and signs", most::MOST_TOKENS)
    } else {
        return None;
    };
    Some(sheets.whole("too-long", message, "split the model"))
}

/// The document that parts make together; `None`, with a fault added, where one of them is of a newer format.
fn merged<'a>(
    sheets: &'a Sheets<'a>,
    tables: impl Iterator<Item = (usize, Table<'a>)>,
    findings: &mut Findings,
) -> Option<Table<'a>> {
    let mut root = Table::new();
    let mut formats = Vec::new();
    for (base, mut table) in tables {
        // Whoever owns a part may say what it is written in; all must say the same.
        if let Some((key, node)) = table.remove_entry("format") {
            let mut alone = Table::new();
            merge(&mut alone, Table::from_iter([(key, node)]), base, &mut Merging::of(sheets, findings));
            formats.push(alone);
        }
        merge(&mut root, table, base, &mut Merging::of(sheets, findings));
    }
    let read: Vec<bool> = formats.iter().map(|format| document::format(format, findings)).collect();
    if read.contains(&false) {
        return None;
    }
    if formats.is_empty() {
        no_format(sheets, findings);
    }
    if let Ok(one) = DeValue::parse("1") {
        root.insert(Spanned::new(0..0, "format".into()), one);
    }
    let csv = {
        let periods = Periods::of(&root);
        csv_tables(sheets, &periods, findings)?
    };
    merge_csv(&mut root, csv, sheets, findings);
    Some(root)
}

/// The tables of the CSV parts; `None`, with a fault added, where the rows of one cannot be read: of what they may name nothing can be said.
fn csv_tables<'a>(
    sheets: &'a Sheets<'a>,
    periods: &Periods<'_>,
    findings: &mut Findings,
) -> Option<Vec<(Kind, Table<'a>)>> {
    let parts =
        sheets.iter().filter_map(|sheet| Some(csv::Part { text: sheet.text, base: sheet.base, kind: sheet.csv? }));
    let tables: Vec<_> = parts.map(|part| Some((part.kind, csv::table(part, periods, findings)?))).collect();
    tables.into_iter().collect()
}

/// Merges the tables of CSV parts into those of the TOML parts: first the entries, then what they use, draw and make.
fn merge_csv<'a>(
    root: &mut Table<'a>,
    tables: Vec<(Kind, Table<'a>)>,
    sheets: &'a Sheets<'a>,
    findings: &mut Findings,
) {
    let (entries, rates): (Vec<_>, Vec<_>) = tables.into_iter().partition(|(kind, _)| matches!(kind, Kind::Entries(_)));
    for (kind, table) in entries.into_iter().chain(rates) {
        let mut merging = Merging::of(sheets, findings);
        match kind {
            Kind::Entries(entries) => {
                let section = Spanned::new(0..0, entries.section.into());
                let table = Spanned::new(0..0, DeValue::Table(table));
                merge(root, Table::from_iter([(section, table)]), 0, &mut merging);
            }
            Kind::Rates(rates) => merge_rates(root, rates.key, table, &mut merging),
        }
    }
}

fn no_format(sheets: &Sheets<'_>, findings: &mut Findings) {
    let message = "`format` is missing: no part gives it".to_owned();
    let any = sheets.iter().any(|sheet| sheet.csv.is_none());
    let help = if any {
        "begin one of the TOML parts with `format = 1`"
    } else {
        "add a part such as works.toml that begins with `format = 1`"
    };
    findings.add(&(0..0), "no-format", message, help);
}
