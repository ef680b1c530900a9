//! Source texts and the byte spans that point into them.
//!
//! A [`Span`] is a half-open byte range in one source. Byte offsets are the only positions that
//! travel through the program; lines and columns are worked out at the edges, by [`Source`],
//! so that a `µ` earlier on a line never shifts a caret.

use std::path::{Path, PathBuf};
use std::sync::Arc;

/// Which source a span points into. Index into [`Sources`].
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct SourceId(pub u32);

/// A half-open byte range `start..end` in one source.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Span {
    /// The source the range lies in.
    pub source: SourceId,
    /// First byte.
    pub start: u32,
    /// One past the last byte.
    pub end: u32,
}

impl Span {
    /// A span over `start..end` of `source`.
    pub fn new(source: SourceId, start: usize, end: usize) -> Self {
        let clamp = |n: usize| u32::try_from(n).unwrap_or(u32::MAX);
        Self { source, start: clamp(start), end: clamp(end.max(start)) }
    }

    /// The smallest span that covers both; spans of another source are ignored.
    pub fn to(self, other: Self) -> Self {
        if self.source != other.source {
            return self;
        }
        Self { source: self.source, start: self.start.min(other.start), end: self.end.max(other.end) }
    }

    /// Whether `inner` lies within this span.
    pub fn contains(self, inner: Self) -> bool {
        self.source == inner.source && self.start <= inner.start && inner.end <= self.end
    }

    /// The byte range as `usize`.
    pub fn range(self) -> std::ops::Range<usize> {
        self.start as usize..self.end as usize
    }

    /// An empty span at the end of this one.
    pub fn after(self) -> Self {
        Self { start: self.end, ..self }
    }
}

/// A value and where it was written.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub struct Spanned<T> {
    /// The value.
    pub value: T,
    /// Where it was written.
    pub span: Span,
}

impl<T> Spanned<T> {
    /// Pairs `value` with `span`.
    pub fn new(value: T, span: Span) -> Self {
        Self { value, span }
    }

    /// Changes the value and keeps the place.
    pub fn map<U>(self, change: impl FnOnce(T) -> U) -> Spanned<U> {
        Spanned { value: change(self.value), span: self.span }
    }
}

/// A line and a column, both from 1. The column counts the unit the caller asked for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Position {
    /// Line, from 1.
    pub line: usize,
    /// Column, from 1.
    pub column: usize,
}

/// One text and its line index.
#[derive(Clone, Debug)]
pub struct Source {
    /// The handle spans carry.
    pub id: SourceId,
    /// The path as the user gave it, for display; forward slashes.
    pub path: PathBuf,
    /// The text, as read, without a byte order mark.
    pub text: Arc<str>,
    line_starts: Vec<u32>,
}

impl Source {
    /// Indexes the lines of `text`. A leading byte order mark is dropped.
    pub fn new(id: SourceId, path: impl Into<PathBuf>, text: &str) -> Self {
        let text: Arc<str> = text.strip_prefix('\u{feff}').unwrap_or(text).into();
        let mut line_starts = vec![0];
        line_starts
            .extend(text.bytes().enumerate().filter(|&(_, byte)| byte == b'\n').map(|(at, _)| at as u32 + 1));
        Self { id, path: path.into(), text, line_starts }
    }

    /// The whole text as a span.
    pub fn span(&self) -> Span {
        Span::new(self.id, 0, self.text.len())
    }

    /// The text of `span`, clamped to the source and to character boundaries.
    pub fn slice(&self, span: Span) -> &str {
        let end = self.floor(span.end as usize);
        let start = self.floor(span.start as usize).min(end);
        &self.text[start..end]
    }

    fn floor(&self, mut at: usize) -> usize {
        at = at.min(self.text.len());
        while !self.text.is_char_boundary(at) {
            at -= 1;
        }
        at
    }

    /// Line and column of a byte offset; the column counts characters.
    pub fn position(&self, offset: usize) -> Position {
        let (line, start, at) = self.locate(offset);
        Position { line, column: self.text[start..at].chars().count() + 1 }
    }

    /// Line and column of a byte offset; the column counts UTF-16 code units.
    pub fn position_utf16(&self, offset: usize) -> Position {
        let (line, start, at) = self.locate(offset);
        Position { line, column: self.text[start..at].encode_utf16().count() + 1 }
    }

    fn locate(&self, offset: usize) -> (usize, usize, usize) {
        let at = self.floor(offset);
        let line = self.line_starts.partition_point(|&start| start as usize <= at);
        (line, self.line_starts[line - 1] as usize, at)
    }

    /// How many lines the text has.
    pub fn line_count(&self) -> usize {
        self.line_starts.len()
    }
}

/// A path as shown to people and written to files: as given, with forward slashes.
pub fn shown(path: &Path) -> String {
    path.to_string_lossy().replace('\\', "/")
}

/// A path as it may stand in a file that is handed on: a relative one as given, of an absolute one
/// the last part, since the rest tells where somebody keeps his work and differs from host to host.
pub fn portable(path: &Path) -> String {
    match path.file_name() {
        Some(name) if path.is_absolute() => shown(Path::new(name)),
        _ => shown(path),
    }
}

/// Every source read in one run, so that a span can be shown whichever file it lies in.
#[derive(Clone, Debug, Default)]
pub struct Sources {
    all: Vec<Source>,
}

impl Sources {
    /// Adds a text and returns its handle.
    pub fn add(&mut self, path: impl Into<PathBuf>, text: &str) -> SourceId {
        let id = SourceId(self.all.len() as u32);
        self.all.push(Source::new(id, path, text));
        id
    }

    /// The source behind a handle.
    ///
    /// # Panics
    /// Where the handle came from another `Sources`: a fault of the program, not of the input.
    pub fn get(&self, id: SourceId) -> &Source {
        &self.all[id.0 as usize]
    }

    /// The source at `path`, if it was read.
    pub fn by_path(&self, path: &Path) -> Option<&Source> {
        self.all.iter().find(|source| source.path == path)
    }

    /// Every source, in the order read.
    pub fn iter(&self) -> impl Iterator<Item = &Source> {
        self.all.iter()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn columns_count_characters_after_a_micro_sign() {
        let source = Source::new(SourceId(0), "a.stack", "base GaAs 3 µm x\n😀 y\n");
        let x = source.text.find('x').expect("planted");
        assert_eq!(source.position(x), Position { line: 1, column: 16 });
        let y = source.text.find('y').expect("planted");
        assert_eq!(source.position(y), Position { line: 2, column: 3 });
        assert_eq!(source.position_utf16(y), Position { line: 2, column: 4 });
    }

    #[test]
    fn offsets_past_the_end_are_clamped() {
        let source = Source::new(SourceId(0), "a.stack", "µ");
        assert_eq!(source.position(99), Position { line: 1, column: 2 });
        assert_eq!(source.slice(Span::new(SourceId(0), 1, 99)), "µ");
    }
}
