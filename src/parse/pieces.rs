//! Long texts, read in pieces side by side.
//!
//! A line that opens an item in its first column closes whatever is open, in the grammar as here,
//! so a sound text means the same whole or cut at such lines. The pieces are only used where none
//! of them holds a mistake: how mistakes are told (which brace was meant, how many cures are
//! sought) looks at the text as a whole.

use rayon::prelude::*;

use crate::finding::Findings;
use crate::parse::recover::{Scan, starts_item};
use crate::parse::{build, grammar};
use crate::source::Source;
use crate::syntax::Item;

/// Bytes below which a text is read whole: cutting pays from a few thousand lines on.
pub(super) const LONG: usize = 48 * 1024;

/// The items of a long sound text; `None` where it is short, of one piece, or not sound.
pub(super) fn items(source: &Source, scan: &Scan) -> Option<Vec<Item>> {
    if source.text.len() < LONG {
        return None;
    }
    let cuts = cuts(&source.text, source.text.len().div_ceil(2 * rayon::current_num_threads()));
    if cuts.len() < 3 {
        return None;
    }
    let pieces: Vec<(usize, usize)> = cuts.windows(2).map(|pair| (pair[0], pair[1])).collect();
    let read: Vec<Option<Vec<Item>>> = pieces
        .par_iter()
        .map(|&(start, end)| {
            let pairs = grammar::read(&source.text[start..end]).ok()?;
            let mut findings = Findings::new();
            let items = build::items((source, start), pairs, scan, &mut findings);
            findings.is_empty().then_some(items)
        })
        .collect();
    read.into_iter().collect::<Option<Vec<_>>>().map(|pieces| pieces.into_iter().flatten().collect())
}

/// Offsets from 0 to the length of `text`, each but the last where an item opens in the first
/// column, at least `apart` bytes from each other.
fn cuts(text: &str, apart: usize) -> Vec<usize> {
    let mut cuts = vec![0];
    let mut last = 0;
    for (at, _) in text.match_indices('\n') {
        let line = at + 1;
        if line - last >= apart && starts_item(&text[line..]) {
            cuts.push(line);
            last = line;
        }
    }
    cuts.push(text.len());
    cuts
}
