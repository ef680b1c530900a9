//! Text to [`syntax::File`]: the only room that sees pest.
//!
//! The grammar recovers by itself: what cannot be read becomes a junk rule up to the next end of a
//! statement, so that every independent mistake is reported, each once.

use crate::finding::{Findings, Outcome};
use crate::source::Source;
use crate::syntax;

mod build;
mod expected;
mod grammar;
mod pieces;
mod recover;

/// The largest text that is read, in bytes.
pub const SIZE_LIMIT: usize = 10_000_000;
/// How deep brackets of any kind may nest.
pub const NESTING_LIMIT: usize = 64;
/// How many arithmetic signs one expression may hold, those in its brackets included.
pub const OPERATOR_LIMIT: usize = 512;

/// Parses a whole file. Every independent mistake is reported, each once.
///
/// There is no value where the text is too large or nested too deeply; everywhere else what could
/// not be read stands in the tree as `Invalid` and is already reported.
pub fn parse(source: &Source) -> Outcome<syntax::File> {
    let mut findings = Findings::new();
    if let Some(finding) = recover::too_large(source) {
        findings.push(finding);
        return Outcome::nothing(findings);
    }
    let scan = recover::scan(source);
    if let Some(finding) = scan.too_deep {
        findings.push(finding);
        return Outcome::nothing(findings);
    }
    if let Some(items) = pieces::items(source, &scan) {
        return Outcome::of(syntax::File { items, comments: scan.comments });
    }
    match grammar::read(&source.text) {
        Ok(pairs) => {
            let items = build::items((source, 0), pairs, &scan, &mut findings);
            Outcome::with(syntax::File { items, comments: scan.comments }, findings)
        }
        Err(_) => {
            findings.push(recover::gave_up(source));
            Outcome::nothing(findings)
        }
    }
}

#[cfg(test)]
mod tests;
