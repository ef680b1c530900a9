//! What is wrong with a text as a whole: its size, its brackets.

use std::collections::BTreeMap;

use crate::finding::Finding;
use crate::parse::{NESTING_LIMIT, SIZE_LIMIT};
use crate::source::{Source, Span, Spanned};

/// Words that open an item of the file and never a statement of a block.
const ITEM_STARTS: &[&str] = &["condition", "material", "spectrum", "alloy", "part", "stack", "use"];

/// What one linear pass over the text found, before pest sees it.
#[derive(Default)]
pub(super) struct Scan {
    /// Every `//` comment, in order.
    pub(super) comments: Vec<Spanned<String>>,
    /// The first bracket nested deeper than [`NESTING_LIMIT`].
    pub(super) too_deep: Option<Finding>,
    /// For a `{` that is left open: the `{` that was meant to be closed by the `}` that closed
    /// another block instead, and that `}`, judged by indentation.
    meant_open: BTreeMap<usize, (usize, usize)>,
    /// For a `}` too many: the earlier `}` that stands deeper than the block it closed.
    closed_early: BTreeMap<usize, usize>,
}

/// A `{` that is open.
struct Open {
    at: usize,
    /// Columns before the first character of its line.
    indent: usize,
}

/// A text over [`SIZE_LIMIT`].
pub(super) fn too_large(source: &Source) -> Option<Finding> {
    let size = source.text.len();
    (size > SIZE_LIMIT).then(|| {
        Finding::error("syntax.limit", format!("this file has {size} bytes; at most {SIZE_LIMIT} are read"))
            .at(Span::new(source.id, 0, 0), "")
            .help("split it and bring the pieces together with `use \"other.stack\"`")
    })
}

/// Finds comments, the depth of brackets and braces that do not pair as their indentation says,
/// reading quoted texts as the grammar does.
pub(super) fn scan(source: &Source) -> Scan {
    let bytes = source.text.as_bytes();
    let mut scan = Scan::default();
    let mut braces = Braces::default();
    let mut brackets = 0_usize;
    let mut line = Line::new(bytes, 0);
    let (mut last, mut at) = (b' ', 0);
    while let Some(&byte) = bytes.get(at) {
        match byte {
            b'"' => at = text_end(bytes, at),
            b'/' if bytes.get(at + 1) == Some(&b'/') => {
                let end = line_end(bytes, at);
                let span = Span::new(source.id, at, end);
                scan.comments.push(Spanned::new(source.slice(span).trim_end().to_owned(), span));
                at = end;
                continue;
            }
            b'{' => {
                brackets = 0;
                braces.open.push(Open { at, indent: line.indent });
            }
            b'}' => {
                brackets = 0;
                let first = line.start + line.indent == at;
                braces.close(at, first.then_some(line.indent), &mut scan);
            }
            b';' => brackets = 0,
            b'\n' => {
                line = Line::new(bytes, at + 1);
                if brackets > 0 && !goes_on(&bytes[line.start..line_end(bytes, line.start)], last) {
                    brackets = 0;
                }
                if starts_item(&source.text[line.start..]) {
                    braces.settle(&mut scan);
                }
            }
            b'(' | b'[' => brackets += 1,
            b')' | b']' => brackets = brackets.saturating_sub(1),
            _ => {}
        }
        if braces.open.len() + brackets > NESTING_LIMIT && scan.too_deep.is_none() {
            scan.too_deep = Some(too_deep(Span::new(source.id, at, at + 1)));
        }
        if !byte.is_ascii_whitespace() {
            last = byte;
        }
        at += 1;
    }
    braces.settle(&mut scan);
    scan
}

/// The braces of one item of the file.
#[derive(Default)]
struct Braces {
    open: Vec<Open>,
    /// Pairs whose `}` stands less deep than the line of its `{`.
    shallow: Vec<(usize, usize)>,
    /// The first `}` that stands deeper than the line of its `{`.
    deep: Option<usize>,
}

impl Braces {
    /// `column` where the `}` is the first on its line.
    fn close(&mut self, at: usize, column: Option<usize>, scan: &mut Scan) {
        match (self.open.pop(), column) {
            (None, _) => {
                scan.closed_early.extend(self.deep.take().map(|early| (at, early)));
                self.shallow.clear();
            }
            (Some(open), Some(column)) if column < open.indent => self.shallow.push((open.at, at)),
            (Some(open), Some(column)) if column > open.indent => {
                self.deep.get_or_insert(at);
            }
            _ => {}
        }
    }

    /// The end of the file or the start of the next item: what is open stays open.
    fn settle(&mut self, scan: &mut Scan) {
        for (open, meant) in self.open.drain(..).zip(self.shallow.drain(..)) {
            scan.meant_open.insert(open.at, meant);
        }
        self.shallow.clear();
        // A `}` too many may only show after the next items were read as strays.
    }
}

/// The line at hand.
struct Line {
    start: usize,
    /// Bytes of space before its first sign.
    indent: usize,
}

impl Line {
    fn new(bytes: &[u8], start: usize) -> Self {
        let line = bytes.get(start..).unwrap_or_default();
        let indent = line.iter().take_while(|byte| matches!(byte, b' ' | b'\t')).count();
        Self { start, indent }
    }
}

/// Whether a line opens an item in its first column.
pub(super) fn starts_item(line: &str) -> bool {
    ITEM_STARTS.iter().any(|word| {
        line.strip_prefix(word)
            .is_some_and(|rest| !rest.starts_with(|c: char| c.is_ascii_alphanumeric() || c == '_'))
    })
}

/// Whether brackets may go on in `line`, the one after a newline: the grammar lets them after `(`
/// or `,` and before `,` or `)`, but two words in a row are a statement of their own.
fn goes_on(line: &[u8], last: u8) -> bool {
    let line = line.trim_ascii();
    match line.first() {
        // An empty line decides nothing.
        None | Some(b',' | b')' | b']' | b'(' | b'[') => return true,
        Some(_) => {}
    }
    let word = line.iter().take_while(|byte| byte.is_ascii_alphanumeric() || **byte == b'_').count();
    let next = line[word..].trim_ascii_start();
    let apart = word > 0 && word + next.len() < line.len();
    let two_words = apart
        && line[0].is_ascii_alphabetic()
        && next.first().is_some_and(|byte| byte.is_ascii_alphanumeric() || *byte == b'"');
    matches!(last, b'(' | b'[' | b',') && !two_words
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
    Finding::error("syntax.limit", format!("brackets nested more than {NESTING_LIMIT} deep"))
        .at(span, format!("level {}", NESTING_LIMIT + 1))
        .help("close the brackets opened before this one, or name inner parts with `let` or `part`")
}

/// pest's own limits of stack and steps: a backstop no text is known to reach.
pub(super) fn gave_up(source: &Source) -> Finding {
    Finding::error("syntax.limit", "this file is too entangled to be read")
        .at(Span::new(source.id, 0, 0), "")
        .help("split it and bring the pieces together with `use \"other.stack\"`")
}

/// A `}` at file level.
pub(super) fn stray_close(span: Span, scan: &Scan) -> Finding {
    let finding =
        Finding::error("syntax.stray-close", "this `}` closes nothing").at(span, "no block is open here");
    match scan.closed_early.get(&(span.start as usize)) {
        Some(&early) => finding
            .beside(
                Span::new(span.source, early, early + 1),
                "this `}` stands deeper than the block it closes",
            )
            .help("remove one of the two `}`"),
        None => finding.help("remove this `}`, or the one above that closes a block too early"),
    }
}

/// A block that runs into the end of the file or into the next item.
pub(super) fn unclosed(source: &Source, open: usize, scan: &Scan) -> Finding {
    let (at, close) = match scan.meant_open.get(&open) {
        Some(&(meant, close)) => (meant, Some(close)),
        None => (open, None),
    };
    let place = |at: usize| Span::new(source.id, at, at + 1);
    let head = head_of(source, at);
    let finding = Finding::error("syntax.unclosed", format!("the block of `{head}` is never closed"))
        .at(place(at), "opened here");
    match close {
        Some(close) => finding
            .beside(place(close), "by its indentation this `}` closes another block")
            .help(format!("add `}}` where the block of `{head}` ends")),
        None => finding.help(format!("add `}}` where the block of `{head}` ends")),
    }
}

/// The words before a `{`, at most a line of them.
fn head_of(source: &Source, open: usize) -> &str {
    let before = source.text[..open].trim_end();
    let start = before.rfind(['\n', ';', '{', '}']).map_or(0, |at| at + 1);
    let head = before[start..].trim();
    if head.is_empty() { "{" } else { head }
}
