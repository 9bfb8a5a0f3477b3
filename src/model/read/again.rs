//! Reading an edited text by what was edited alone.
//!
//! What a table means depends on nothing before it but that a table may begin there, and on the names that others have. So where the
//! edit lies within some of the tables of a text that was read before, or puts tables in or takes some out, these are parsed on their own
//! and take the place of what was there. It is a short cut and nothing else: whatever is out of the ordinary, and any fault, is left to
//! reading the whole.

use std::ops::Range;
use std::path::Path;

use super::blocks::{Block, Blocks};
use super::calendar::Calendar;
use super::replaced::{self, Entries, replaced};
use super::toml_types::Table;
use super::{bytes, syntax};
use crate::model::types::Model;

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
/// `None` where they differ from the text before in more than plain tables, or hold a fault: then they must be read whole.
#[must_use]
pub fn again(path: &Path, bytes: &[u8], before: Before<'_>) -> Option<(Model, Blocks)> {
    let (old, new) = (bytes::text(path, before.bytes).ok()?, bytes::text(path, bytes).ok()?);
    let edited = Edited::between(old.text, new.text, &before.blocks.tables)?;
    // Where most of the text is new, reading it whole costs no more.
    if 2 * edited.text.len() >= new.text.len() {
        return None;
    }
    let piece = new.text.get(edited.text.clone())?;
    let root = syntax::parse(super::source::Source { path, text: piece }).ok()?;
    let pieces = Blocks::of(piece, root.get_ref(), None);
    let gone = &before.blocks.tables[edited.blocks.clone()];
    let mut entries = Entries::default();
    entries.extend(gone);
    // Given once more, what is there already would be a fault.
    let twice = |block: &&Block| !entries.contains(block) && replaced::is_there(before.model, block);
    if !begins_with(piece, root.get_ref(), &pieces.tables)
        || !may_begin(&before.blocks.tables, &pieces.tables)
        || pieces.tables.iter().any(|block| twice(&block))
    {
        return None;
    }
    entries.extend(&pieces.tables);
    let calendar = Calendar::of(before.model.horizon.clone(), before.blocks.days.clone());
    let model = replaced(before.model, root.get_ref(), &entries, &calendar)?;
    Some((model, edited.moved(before.blocks, pieces)))
}

/// Whether nothing but these tables is in a piece of text that was parsed into `root`: what stands before them would belong to another.
pub(super) fn begins_with(piece: &str, root: &Table<'_>, tables: &[Block]) -> bool {
    let Some(first) = tables.first() else { return root.is_empty() };
    let before = piece.get(..first.start).unwrap_or_default();
    before.lines().map(str::trim_ascii_start).all(|line| line.is_empty() || line.starts_with('#'))
}

/// Whether tables of these sections may begin in a text that had those of `old`. Where a section has none, it may be spelt otherwise.
pub(super) fn may_begin(old: &[Block], tables: &[Block]) -> bool {
    let mut missing: Vec<_> = tables.iter().map(|block| block.section).collect();
    missing.sort_unstable();
    missing.dedup();
    missing.iter().all(|&section| old.iter().any(|block| block.section == section))
}

/// The part of a text that was edited, as whole blocks.
pub(super) struct Edited {
    /// The blocks.
    pub(super) blocks: Range<usize>,
    /// Where they lie in the new text.
    pub(super) text: Range<usize>,
    /// How far what follows has moved, as new place less old place.
    pub(super) moved: isize,
}

impl Edited {
    /// What is different in `new`, where the text before had these blocks.
    pub(super) fn between(old: &str, new: &str, blocks: &[Block]) -> Option<Self> {
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
        let piece = new.get(text.clone())?;
        let whole = last == blocks.len() || piece.is_empty() || piece.ends_with('\n');
        whole.then_some(Self { blocks: first..last, text, moved })
    }

    /// The blocks of the new text: those of `old`, with `pieces` in place of those edited.
    fn moved(&self, old: &Blocks, pieces: Blocks) -> Blocks {
        Blocks { tables: self.tables(&old.tables, pieces.tables), days: old.days.clone() }
    }

    /// As [`moved`](Self::moved); the places of `pieces` count from where the edited text begins.
    pub(super) fn tables(&self, old: &[Block], pieces: Vec<Block>) -> Vec<Block> {
        let (first, rest) = (&old[..self.blocks.start], &old[self.blocks.end..]);
        let placed = |block: Block| Block { start: self.text.start + block.start, ..block };
        let moved = |block: &Block| Block { start: block.start.saturating_add_signed(self.moved), ..block.clone() };
        first.iter().cloned().chain(pieces.into_iter().map(placed)).chain(rest.iter().map(moved)).collect()
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
