//! What is wrong with the text as a whole, and what to say of text that fits no form.

use crate::finding::{Finding, Findings};
use crate::parse::expected;
use crate::parse::grammar::Rule;
use crate::parse::{NESTING_LIMIT, SIZE_LIMIT};
use crate::source::{Source, Span, Spanned};

/// What one linear pass over the text found, before pest sees it.
pub(super) struct Scan {
    /// Every `//` comment, in order.
    pub(super) comments: Vec<Spanned<String>>,
    /// Brackets nested deeper than [`NESTING_LIMIT`].
    pub(super) too_deep: Option<Finding>,
}

/// A text over [`SIZE_LIMIT`].
pub(super) fn too_large(source: &Source) -> Option<Finding> {
    let size = source.text.len();
    (size > SIZE_LIMIT).then(|| {
        Finding::error(
            "syntax.too-large",
            format!("this file has {size} bytes; at most {SIZE_LIMIT} are read"),
        )
        .help("split it and bring the pieces together with `use \"other.stack\"`")
    })
}

/// Finds comments and the depth of brackets, reading quoted texts as the grammar does.
pub(super) fn scan(source: &Source) -> Scan {
    let bytes = source.text.as_bytes();
    let mut scan = Scan { comments: Vec::new(), too_deep: None };
    let (mut braces, mut brackets) = (0_usize, 0_usize);
    let mut last = b' ';
    let mut at = 0;
    while let Some(&byte) = bytes.get(at) {
        match byte {
            b'"' => at = text_end(bytes, at),
            b'/' if bytes.get(at + 1) == Some(&b'/') => {
                let end = line_end(bytes, at);
                let span = Span::new(source.id, at, end);
                scan.comments.push(Spanned::new(source.slice(span).trim_end_matches('\r').to_owned(), span));
                at = end;
                continue;
            }
            b'{' => (braces, brackets) = (braces + 1, 0),
            b'}' => (braces, brackets) = (braces.saturating_sub(1), 0),
            b';' => brackets = 0,
            b'\n' if !goes_on(bytes, at, last) => brackets = 0,
            b'(' | b'[' => brackets += 1,
            b')' | b']' => brackets = brackets.saturating_sub(1),
            _ => {}
        }
        if braces + brackets > NESTING_LIMIT && scan.too_deep.is_none() {
            scan.too_deep = Some(too_deep(Span::new(source.id, at, at + 1)));
        }
        if !byte.is_ascii_whitespace() {
            last = byte;
        }
        at += 1;
    }
    scan
}

/// Whether brackets may go on after this newline: the grammar lets them after `(` or `,` and
/// before `,` or `)`.
fn goes_on(bytes: &[u8], newline: usize, last: u8) -> bool {
    let next = bytes.get(newline..).and_then(|rest| rest.iter().find(|byte| !byte.is_ascii_whitespace()));
    matches!(last, b'(' | b'[' | b',') || matches!(next, Some(b',' | b')' | b']' | b'(' | b'['))
}

/// The last byte of the quoted text that begins at `start`, or the last before the line ends.
fn text_end(bytes: &[u8], start: usize) -> usize {
    let mut at = start + 1;
    while let Some(&byte) = bytes.get(at) {
        match byte {
            b'"' => return at,
            b'\n' => return at - 1,
            b'\\' if bytes.get(at + 1).is_some_and(|&next| next != b'\n') => at += 2,
            _ => at += 1,
        }
    }
    bytes.len().saturating_sub(1).max(start)
}

fn line_end(bytes: &[u8], start: usize) -> usize {
    bytes[start..].iter().position(|&byte| byte == b'\n').map_or(bytes.len(), |n| start + n)
}

fn too_deep(span: Span) -> Finding {
    Finding::error("syntax.nesting", format!("brackets nested more than {NESTING_LIMIT} deep"))
        .at(span, format!("level {}", NESTING_LIMIT + 1))
        .help("close the brackets opened before this one, or name inner parts with `let` or `part`")
}

/// pest's own limits: never reached by a text that passed the caps above, kept as a backstop.
pub(super) fn gave_up(source: &Source, _error: &pest::error::Error<Rule>) -> Finding {
    Finding::error("syntax.nesting", "this file is too entangled to be read".to_owned())
        .at(Span::new(source.id, 0, 0), "")
        .help("split it and bring the pieces together with `use \"other.stack\"`")
}

/// A `}` at file level.
pub(super) fn stray_close(_source: &Source, span: Span, _scan: &Scan) -> Finding {
    Finding::error("syntax.stray-close", "this `}` closes nothing")
        .at(span, "no block is open here")
        .help("remove it, or remove the `}` above that closes the block too early")
}

/// A block that runs into the end of the file.
pub(super) fn unclosed(source: &Source, open: usize, _scan: &Scan) -> Findings {
    let mut findings = Findings::new();
    findings.push(
        Finding::error("syntax.unclosed", "this block is never closed")
            .at(Span::new(source.id, open, open + 1), "opened here")
            .help("add `}` where the block ends"),
    );
    findings
}

/// A statement that fits no form.
pub(super) fn bad_statement(source: &Source, span: Span) -> Finding {
    expected::explain(source, span)
}

/// The head of a block that fits no form; `span` reaches to the `{`.
pub(super) fn bad_head(source: &Source, span: Span) -> Finding {
    expected::explain(source, span)
}
