//! Reading edited parts by what was edited in them alone.
//!
//! The tables and rows that an edit touches name entries of the model. All that the parts say of these entries, and nothing else, is put
//! together, read as a model's parts are, and takes the place of what the entries were. It is a short cut and nothing else: whatever is out
//! of the ordinary, and any fault, is left to reading the whole.

use std::path::Path;
use std::sync::Arc;

use super::sheets::Sheets;
use super::traces::{self, Traces};
use super::{Kind, Merging, Parts, Periods, csv_tables, laid, merge, merge_csv, too_much};
use crate::model::read::again::{Edited, begins_with, may_begin};
use crate::model::read::blocks::Block;
use crate::model::read::calendar::Calendar;
use crate::model::read::findings::Findings;
use crate::model::read::replaced::{Entries, replaced};
use crate::model::read::source::Source;
use crate::model::read::toml_types::Table;
use crate::model::read::{bytes, syntax};
use crate::model::types::Model;

/// The model that parts spell, which is what reading them whole makes of them, and where its entries lie now. `before` are the parts that
/// spelt `model`.
///
/// `None` where they differ in more than plain tables and rows, or hold a fault.
pub(in crate::model::read) fn again(
    path: &Path,
    parts: &Parts<'_>,
    before: &Parts<'_>,
    (traces, model): (&Traces, &Model),
) -> Option<(Model, Traces)> {
    let names = |parts: &Parts<'_>| parts.iter().map(|(name, _)| name.clone()).collect::<Vec<_>>();
    if traces.parts.len() != parts.len()
        || names(parts) != names(before)
        || too_much(&Sheets::of(path), parts).is_some()
    {
        return None;
    }
    let mut now = traces.clone();
    let mut entries = Entries::default();
    let mut texts = Vec::with_capacity(parts.len());
    for (((name, new), (_, old)), blocks) in parts.iter().zip(before).zip(&mut now.parts) {
        let (text, kind) = laid(path, name, new).ok()?;
        if new != old {
            *blocks = Arc::new(edited(path, (bytes::str(path, old).ok()?, text), kind, blocks, &mut entries)?);
        }
        texts.push((text, kind));
    }
    let about = |(text, kind): &(&str, Option<Kind>), blocks: &Arc<Vec<Block>>| excerpt(text, *kind, blocks, &entries);
    let excerpts: Vec<String> =
        texts.iter().zip(&now.parts).map(|(text, blocks)| about(text, blocks)).collect::<Option<_>>()?;
    // Where most of it is to be read, reading all costs no more.
    let (read, all) =
        (excerpts.iter().map(String::len).sum::<usize>(), texts.iter().map(|(text, _)| text.len()).sum::<usize>());
    if 2 * read >= all {
        return None;
    }
    let mut sheets = Sheets::of(path);
    for ((name, _), (excerpt, (_, kind))) in parts.iter().zip(excerpts.iter().zip(&texts)) {
        sheets.push(path.join(name), excerpt, *kind);
    }
    let root = document(&sheets, model)?;
    let calendar = Calendar::of(model.horizon.clone(), traces.days.clone());
    let model = replaced(model, &root, &entries, &calendar)?;
    Some((model, now))
}

/// The blocks of a part, whose text was `old` and is `new`. Adds the entries that the edit touches.
fn edited(
    path: &Path,
    (old, new): (&str, &str),
    kind: Option<Kind>,
    blocks: &[Block],
    entries: &mut Entries,
) -> Option<Vec<Block>> {
    let edited = Edited::between(old, new, blocks)?;
    let piece = new.get(edited.text.clone())?;
    let header = match kind {
        Some(_) => old.get(..blocks.first()?.start)?,
        None => "",
    };
    let text = format!("{header}{piece}");
    let pieces = match kind {
        Some(kind) => traces::rows(&text, kind)?,
        None => {
            let root = syntax::parse(Source { path, text: &text }).ok()?;
            traces::tables(&text, root.get_ref())
                .filter(|tables| begins_with(&text, root.get_ref(), tables) && may_begin(blocks, tables))?
        }
    };
    entries.extend(blocks[edited.blocks.clone()].iter().chain(&pieces));
    let behind_header = |block: Block| Block { start: block.start - header.len(), ..block };
    Some(edited.tables(blocks, pieces.into_iter().map(behind_header).collect()))
}

/// What a part says of some entries, as a text of its own.
fn excerpt(text: &str, kind: Option<Kind>, blocks: &[Block], entries: &Entries) -> Option<String> {
    let mut excerpt = String::new();
    for (at, block) in blocks.iter().enumerate() {
        if !entries.contains(block) {
            continue;
        }
        if excerpt.is_empty() && kind.is_some() {
            excerpt.push_str(text.get(..blocks.first()?.start)?);
        }
        let end = blocks.get(at + 1).map_or(text.len(), |next| next.start);
        excerpt.push_str(text.get(block.start..end)?);
        if !excerpt.ends_with('\n') {
            excerpt.push('\n');
        }
    }
    Some(excerpt)
}

/// The document that excerpts make together; `None` where there is a fault.
fn document<'a>(sheets: &'a Sheets<'a>, model: &Model) -> Option<Table<'a>> {
    let mut findings = Findings::default();
    let mut root = Table::new();
    for sheet in sheets.iter().filter(|sheet| sheet.csv.is_none()) {
        let table = syntax::parse(sheet.source()).ok()?.into_inner();
        merge(&mut root, table, sheet.base, &mut Merging::of(sheets, &mut findings));
    }
    let labels: Vec<&str> = model.horizon.periods().filter_map(|period| model.horizon.label(period)).collect();
    let periods = if labels.is_empty() { Periods::None } else { Periods::Named(labels) };
    let tables = csv_tables(sheets, &periods, &mut findings)?;
    merge_csv(&mut root, tables, sheets, &mut findings);
    findings.is_empty().then_some(root)
}
