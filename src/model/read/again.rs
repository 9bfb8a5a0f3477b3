//! Reading an edited text by what was edited alone.
//!
//! What a table means depends on nothing before it but that a table may begin there, and on the names that others have. So where the
//! edit lies within some of the tables of a text that was read before, these are parsed on their own and take the place of what they
//! were. It is a short cut and nothing else: whatever is out of the ordinary, and any fault, is left to reading the whole.

use std::ops::Range;
use std::path::Path;

use super::blocks::{Block, Blocks, Section};
use super::calendar::Calendar;
use super::fields::Fields;
use super::findings::Findings;
use super::known::{self, Known, Summable, Supplies};
use super::toml_types::Table;
use super::{activity, bytes, caps, limit, material, resource, syntax};
use crate::model::types::{Material, Model};

/// A text that was read before.
#[derive(Clone, Copy, Debug)]
pub struct Before<'a> {
    /// Its bytes.
    pub bytes: &'a [u8],
    /// Where its tables lie.
    pub blocks: &'a Blocks,
    /// The model that it spells.
    pub model: &'a Model,
}

/// The model that `bytes` spell, which is what [`text`](super::text) makes of them, and where its tables lie.
///
/// `None` where they differ from the text before in more than the inside of tables, or hold a fault: then they must be read whole.
#[must_use]
pub fn again(path: &Path, bytes: &[u8], before: Before<'_>) -> Option<(Model, Blocks)> {
    let (old, new) = (bytes::text(path, before.bytes).ok()?, bytes::text(path, bytes).ok()?);
    let edited = Edited::between(old.text, new.text, &before.blocks.tables)?;
    let piece = new.text.get(edited.text.clone())?;
    let root = syntax::parse(super::source::Source { path, text: piece }).ok()?;
    let pieces = Blocks::of(piece, root.get_ref(), None);
    let known = &before.blocks.tables[edited.blocks.clone()];
    let same = |(old, new): (&Block, &Block)| old.section == new.section && old.name == new.name;
    // Every key of the piece lies in a block, and the blocks are those that were there.
    let first = pieces.tables.first().is_some_and(|block| block.start == 0);
    if !first || known.len() != pieces.tables.len() || !known.iter().zip(&pieces.tables).all(same) {
        return None;
    }
    let calendar = Calendar::of(before.model.horizon.clone(), before.blocks.days.clone());
    let model = replaced(before.model, root.get_ref(), &pieces, &calendar)?;
    Some((model, edited.moved(before.blocks, pieces)))
}

/// The part of a text that was edited, as whole blocks.
struct Edited {
    /// The blocks.
    blocks: Range<usize>,
    /// Where they lie in the new text.
    text: Range<usize>,
    /// How far what follows has moved, as new place less old place.
    moved: isize,
}

impl Edited {
    fn between(old: &str, new: &str, blocks: &[Block]) -> Option<Self> {
        let from = common(old.as_bytes().chunks(STRIDE).zip(new.as_bytes().chunks(STRIDE)), |(a, b)| {
            a.iter().zip(b).take_while(|(a, b)| a == b).count()
        });
        let rest = old.len().min(new.len()) - from;
        let (old_rest, new_rest) = (&old.as_bytes()[old.len() - rest..], &new.as_bytes()[new.len() - rest..]);
        let upto = common(old_rest.rchunks(STRIDE).zip(new_rest.rchunks(STRIDE)), |(a, b)| {
            a.iter().rev().zip(b.iter().rev()).take_while(|(a, b)| a == b).count()
        });
        let first = blocks.partition_point(|block| block.start <= from).checked_sub(1)?;
        let last = blocks.partition_point(|block| block.start < old.len() - upto).max(first + 1);
        let start = blocks[first].start;
        let end = blocks.get(last).map_or(old.len(), |block| block.start);
        let moved = isize::try_from(new.len()).ok()? - isize::try_from(old.len()).ok()?;
        let text = start..end.checked_add_signed(moved)?;
        // The next block must go on beginning a line.
        let whole = last == blocks.len() || new.get(text.clone())?.ends_with('\n');
        // Where most of the text is new, reading it whole costs no more.
        let worth_it = 2 * text.len() < new.len();
        (whole && worth_it).then_some(Self { blocks: first..last, text, moved })
    }

    /// The blocks of the new text: those of `old`, with `pieces` in place of those edited.
    fn moved(&self, old: &Blocks, pieces: Blocks) -> Blocks {
        let mut blocks = old.clone();
        for (block, piece) in blocks.tables[self.blocks.clone()].iter_mut().zip(pieces.tables) {
            block.start = self.text.start + piece.start;
        }
        for block in &mut blocks.tables[self.blocks.end..] {
            block.start = block.start.saturating_add_signed(self.moved);
        }
        blocks
    }
}

/// Bytes that are compared at once.
const STRIDE: usize = 4096;

/// How many bytes agree from the start of two texts, which come in pairs of equal pieces; `within` counts those of the first pair
/// that differs.
fn common<'a>(
    pairs: impl Iterator<Item = (&'a [u8], &'a [u8])>,
    within: impl Fn((&'a [u8], &'a [u8])) -> usize,
) -> usize {
    let mut count = 0;
    for pair in pairs {
        if pair.0 != pair.1 {
            return count + within(pair);
        }
        count += pair.0.len();
    }
    count
}

/// `model` with the entries of a piece in place of what they were. `None` where what others refer to has changed, or for a fault.
fn replaced(model: &Model, root: &Table<'_>, pieces: &Blocks, calendar: &Calendar) -> Option<Model> {
    let mut findings = Findings::default();
    let mut edited = model.clone();
    let supplies =
        Supplies { resources: Known::new(None, &model.resources), materials: Known::new(None, &model.materials) };
    let activities = Known::new(None, &model.activities);
    let there = Summable { supplies, activities, tags: known::tags(&model.activities) };
    for Block { section, name, .. } in &pieces.tables {
        let (key, node) = root.get(section.word())?.get_ref().as_table()?.get_key_value(name.as_str())?;
        let (table, span) = (node.get_ref().as_table()?, key.span());
        let mut fields = Fields::open(table, span, section.keys(), calendar, &mut findings);
        match section {
            Section::Resources => {
                let read = resource::read(&mut fields);
                replace(edited.resources.get_mut(name)?, read, |resource| resource.surge.len())?;
            }
            Section::Activities => {
                let read = activity::read(&mut fields, model.aim, &there.supplies);
                replace(edited.activities.get_mut(name)?, read, |activity| activity.tags.clone())?;
            }
            Section::Materials => {
                let read = material::read(&mut fields);
                replace(edited.materials.get_mut(name)?, read, flows)?;
            }
            Section::Limits => {
                *edited.limits.get_mut(name)? = limit::read(&mut fields, &there);
            }
        }
    }
    let fits = findings.is_empty() && caps::fit(&edited, &there.tags);
    fits.then_some(edited)
}

/// Puts an entry in the place of what it was, where what limits ask of it has stayed.
fn replace<T, A: PartialEq>(old: &mut T, new: T, asked: impl Fn(&T) -> A) -> Option<()> {
    let same = asked(old) == asked(&new);
    *old = new;
    same.then_some(())
}

/// What there is of a material that a limit can sum.
fn flows(material: &Material) -> (usize, Vec<bool>, bool) {
    let late = material.sale.iter().map(|sale| sale.late.is_some()).collect();
    (material.purchase.len(), late, material.stock.is_some() || material.closing.is_some())
}
