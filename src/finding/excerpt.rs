//! The part of a source that a finding shows, fit for a terminal.

use std::fmt::Write;
use std::ops::Range;

use crate::source::Source;

/// Characters of a line that are shown before it is cut.
const LINE_LIMIT: usize = 160;
/// Characters left and right of the labels that stay when a line is cut.
const MARGIN: usize = 40;
/// Lines of one label that are shown; a longer one is shown by its first line.
const LABEL_LINES: usize = 6;

/// A run of whole lines around the labels. Offsets count in the text shown.
#[derive(Clone, Debug)]
pub(crate) struct Excerpt {
    name: String,
    text: String,
    /// For each line: where it starts in `text`.
    starts: Vec<usize>,
    /// Number of the first line, from 0.
    first_line: usize,
    /// Column (characters of the original, from 0) of the start of each label.
    columns: Vec<usize>,
    spans: Vec<Range<usize>>,
}

/// What stands at a span.
pub(crate) struct View<'a> {
    /// Whole lines.
    pub(crate) text: &'a str,
    /// Where they lie in the excerpt.
    pub(crate) range: Range<usize>,
    /// Number of the first line, from 0.
    pub(crate) line: usize,
    /// Column of the span's start in the original, characters from 0.
    pub(crate) column: usize,
    /// How many lines.
    pub(crate) lines: usize,
}

impl Excerpt {
    /// The lines of `source` that hold `labels`, byte ranges of it; ranges that do not fit are
    /// fitted.
    pub(crate) fn new(name: &str, source: &Source, labels: &[Range<usize>]) -> Self {
        let text: &str = &source.text;
        let labels: Vec<Range<usize>> = labels.iter().map(|label| fitted(text, label)).collect();
        let from = labels.iter().map(|label| line_start(text, label.start)).min().unwrap_or(0);
        let to = labels.iter().map(|label| line_end(text, label.end)).max().unwrap_or(0);
        let mut excerpt = Self {
            name: name.to_owned(),
            text: String::new(),
            starts: Vec::new(),
            first_line: source.position(from).line - 1,
            columns: labels
                .iter()
                .map(|label| text[line_start(text, label.start)..label.start].chars().count())
                .collect(),
            spans: labels.iter().map(|_| 0..0).collect(),
        };
        let mut at = from;
        for line in text[from..to].split('\n') {
            excerpt.push_line(line, at, &labels);
            at += line.len() + 1;
        }
        excerpt
    }

    fn push_line(&mut self, line: &str, at: usize, labels: &[Range<usize>]) {
        self.starts.push(self.text.len());
        let shown = window(line, at, labels);
        if shown.start > 0 {
            self.text.push('…');
        }
        let mut offset = at + shown.start;
        self.mark(offset, at..=offset, labels);
        for c in line[shown.clone()].chars() {
            // A line that ends in CR LF ends in LF here.
            if c == '\r' && offset + 1 == at + line.len() {
                break;
            }
            self.mark(offset, offset..=offset, labels);
            push_visible(&mut self.text, c, true);
            offset += c.len_utf8();
        }
        self.mark(offset, offset..=at + line.len(), labels);
        if shown.end < line.len() {
            self.text.push('…');
        }
        self.text.push('\n');
    }

    /// Label edges within `original` lie at the present end of the text.
    fn mark(&mut self, _offset: usize, original: std::ops::RangeInclusive<usize>, labels: &[Range<usize>]) {
        let here = self.text.len();
        for (label, span) in labels.iter().zip(&mut self.spans) {
            if original.contains(&label.start) {
                span.start = here;
            }
            if original.contains(&label.end) {
                span.end = here;
            }
        }
    }

    pub(crate) fn name(&self) -> &str {
        &self.name
    }

    /// The labels, in the order given.
    pub(crate) fn spans(&self) -> &[Range<usize>] {
        &self.spans
    }

    /// The whole lines that `span` touches.
    pub(crate) fn view(&self, span: Range<usize>) -> View<'_> {
        let line_of = |offset: usize| self.starts.partition_point(|&start| start <= offset).max(1) - 1;
        let first = line_of(span.start.min(self.text.len()));
        let last = line_of(span.end.min(self.text.len())).max(first);
        let start = self.starts.get(first).copied().unwrap_or(0);
        let end = self.starts.get(last + 1).copied().unwrap_or(self.text.len());
        let label = self.spans.iter().position(|known| known.start == span.start);
        View {
            text: &self.text[start..end],
            range: start..end,
            line: self.first_line + first,
            column: label.map_or(0, |label| self.columns[label]),
            lines: last - first + 1,
        }
    }
}

/// A label inside the text, on character boundaries, of at most [`LABEL_LINES`] lines.
fn fitted(text: &str, label: &Range<usize>) -> Range<usize> {
    let floor = |mut at: usize| {
        at = at.min(text.len());
        while !text.is_char_boundary(at) {
            at -= 1;
        }
        at
    };
    let start = floor(label.start);
    let end = floor(label.end).max(start);
    if text[start..end].bytes().filter(|&byte| byte == b'\n').count() < LABEL_LINES {
        return start..end;
    }
    let first = text[start..end].find('\n').map_or(end, |length| start + length);
    start..start + text[start..first].trim_end().len()
}

fn line_start(text: &str, at: usize) -> usize {
    text[..at].rfind('\n').map_or(0, |newline| newline + 1)
}

fn line_end(text: &str, at: usize) -> usize {
    text[at..].find('\n').map_or(text.len(), |length| at + length)
}

/// The part of a line that is shown: all of it, or the neighbourhood of its labels.
fn window(line: &str, at: usize, labels: &[Range<usize>]) -> Range<usize> {
    if line.len() <= LINE_LIMIT {
        return 0..line.len();
    }
    let line_range = at..at + line.len() + 1;
    let starts = labels.iter().map(|label| label.start).filter(|start| line_range.contains(start));
    let first = starts.clone().min().unwrap_or(at) - at;
    let last = starts.max().unwrap_or(at) - at;
    let floor = |mut at: usize| {
        at = at.min(line.len());
        while !line.is_char_boundary(at) {
            at -= 1;
        }
        at
    };
    let from = floor(first.saturating_sub(MARGIN));
    // Labels far apart on one line: the first is shown.
    let anchor = if last - first < LINE_LIMIT { last } else { first };
    floor(from)..floor((anchor + 2 * MARGIN).max(from + LINE_LIMIT - MARGIN))
}

/// `text` with every character that would act on a terminal shown instead.
pub(crate) fn visible(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        push_visible(&mut out, c, false);
    }
    out
}

fn push_visible(out: &mut String, c: char, tabs_stay: bool) {
    match c {
        '\t' if tabs_stay => out.push(c),
        '\u{0}'..='\u{1f}' => {
            out.extend(char::from_u32(0x2400 + c as u32));
        }
        '\u{7f}' => out.push('\u{2421}'),
        // C1 controls, and marks that turn the direction of text or take no room.
        '\u{80}'..='\u{9f}'
        | '\u{ad}'
        | '\u{61c}'
        | '\u{200b}'..='\u{200f}'
        | '\u{2028}'..='\u{202e}'
        | '\u{2060}'..='\u{206f}'
        | '\u{feff}'
        | '\u{fff9}'..='\u{fffb}'
        | '\u{e0000}'..='\u{e007f}' => {
            let _ = write!(out, "<U+{:04X}>", c as u32);
        }
        c => out.push(c),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::source::SourceId;

    fn label(text: &str, word: &str) -> Range<usize> {
        let start = text.find(word).expect("planted");
        start..start + word.len()
    }

    fn excerpt(text: &str, labels: &[Range<usize>]) -> Excerpt {
        Excerpt::new("a", &Source::new(SourceId(0), "a", text), labels)
    }

    fn shown(excerpt: &Excerpt, index: usize) -> &str {
        &excerpt.text[excerpt.spans[index].clone()]
    }

    #[test]
    fn columns_count_characters_and_lines_from_the_whole_text() {
        let text = "one\ntwo µ² here\nthree\n";
        let drawn = excerpt(text, &[label(text, "here")]);
        assert_eq!(drawn.text, "two µ² here\n");
        assert_eq!(shown(&drawn, 0), "here");
        let view = drawn.view(drawn.spans[0].clone());
        assert_eq!((view.line, view.column, view.lines), (1, 7, 1));
    }

    #[test]
    fn what_acts_on_a_terminal_is_shown() {
        let text = "a\u{1b}[31mred\u{0} \u{202e}x\u{7f}\r\nb";
        let drawn = excerpt(text, &[label(text, "red"), label(text, "x")]);
        assert_eq!(drawn.text, "a␛[31mred␀ <U+202E>x␡\n");
        assert_eq!((shown(&drawn, 0), shown(&drawn, 1)), ("red", "x"));
        assert_eq!(visible("tab\tend\n"), "tab␉end␊");
    }

    #[test]
    fn a_long_line_is_cut_around_its_label() {
        let text = format!("{}here{}", "µ(".repeat(5_000), "]".repeat(9_000));
        let drawn = excerpt(&text, &[label(&text, "here")]);
        assert!(drawn.text.chars().count() < LINE_LIMIT + 3, "{}", drawn.text);
        assert!(drawn.text.starts_with('…') && drawn.text.ends_with("…\n"));
        assert_eq!(shown(&drawn, 0), "here");
        assert_eq!(drawn.view(drawn.spans[0].clone()).column, 10_000);
    }

    #[test]
    fn a_label_of_many_lines_is_shown_by_its_first() {
        let text = "stack {\n".to_owned() + &"x\n".repeat(50) + "}";
        let whole = 0..text.len();
        let drawn = excerpt(&text, &[whole]);
        assert_eq!(drawn.text, "stack {\n");
        assert_eq!(shown(&drawn, 0), "stack {");
    }

    #[test]
    fn the_end_of_a_text_is_a_place() {
        for text in ["", "a\n", "a"] {
            let drawn = excerpt(text, std::slice::from_ref(&(text.len()..text.len())));
            assert!(drawn.text.ends_with('\n'));
            let view = drawn.view(drawn.spans[0].clone());
            assert_eq!(view.lines, 1, "{text:?}");
        }
        let past = excerpt("µ", std::slice::from_ref(&(1..99)));
        assert_eq!(shown(&past, 0), "µ");
    }
}
