//! Findings for people: a frame around the source, through miette, which is named here only.
//!
//! miette lays out; what it is given is decided here: colour and width, the excerpt of the
//! source with characters counted as characters, control characters made visible, and lines too
//! long for a screen cut to the neighbourhood of their labels.

use std::fmt;

use miette::{
    Diagnostic, GraphicalReportHandler, GraphicalTheme, LabeledSpan, MietteError, MietteSpanContents,
    SourceCode, SourceSpan, SpanContents, ThemeCharacters, ThemeStyles,
};

use crate::finding::excerpt::{Excerpt, visible};
use crate::finding::{Finding, Label, Severity};
use crate::source::{Sources, shown};

/// How the terminal wants it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Look {
    /// Whether escape sequences for colour are written.
    pub color: bool,
    /// Columns to wrap text at.
    pub width: usize,
}

/// Columns where nothing is known of a terminal.
pub const PLAIN_WIDTH: usize = 80;

const TAB_WIDTH: usize = 4;

/// Lays out one finding, ending in a line break: code, message, framed source, helps.
pub fn render(finding: &Finding, sources: &Sources, look: Look) -> String {
    let styles = if look.color { ThemeStyles::ansi() } else { ThemeStyles::none() };
    let theme = GraphicalTheme { characters: ThemeCharacters::unicode(), styles };
    let handler = GraphicalReportHandler::new_themed(theme)
        .with_width(look.width.max(40))
        .with_context_lines(0)
        .tab_width(TAB_WIDTH)
        .with_links(false)
        .without_cause_chain()
        .without_syntax_highlighting();

    let here = finding.primary.as_ref().map(|label| label.span.source);
    let near = finding.secondary.iter().filter(|label| Some(label.span.source) == here);
    let labels: Vec<(&Label, bool)> =
        finding.primary.iter().map(|label| (label, true)).chain(near.map(|label| (label, false))).collect();
    let mut out = String::new();
    let framed = Framed::new(finding, sources, &labels);
    // The writer is a string: it cannot fail.
    let _ = handler.render_report(&mut out, &framed);

    // miette knows one text a report; labels in other files get frames of their own.
    let mut elsewhere: Vec<&Label> =
        finding.secondary.iter().filter(|label| Some(label.span.source) != here).collect();
    elsewhere.sort_by_key(|label| label.span);
    let mut frames = String::new();
    for group in elsewhere.chunk_by(|a, b| a.span.source == b.span.source) {
        let labels: Vec<(&Label, bool)> = group.iter().map(|label| (*label, false)).collect();
        let framed = Framed::new(finding, sources, &labels);
        let mut whole = String::new();
        let _ = handler.render_report(&mut whole, &framed);
        frames.extend(whole.split_inclusive('\n').filter(|line| is_frame(line)));
    }
    out.push_str(&frames);
    for help in &finding.helps {
        help_line(&mut out, help, look);
    }
    let place = finding.primary.as_ref().map(|label| {
        let source = sources.get(label.span.source);
        let at = source.position(label.span.start as usize);
        format!("{}:{}:{}", visible(&shown(&source.path)), at.line, at.column)
    });
    joined(&out, place.as_deref())
}

/// The head and the message stand left of every frame.
fn is_frame(line: &str) -> bool {
    let plain = without_escapes(line);
    let first = plain.trim_start_matches([' ', '0', '1', '2', '3', '4', '5', '6', '7', '8', '9']);
    first.starts_with(['╭', '│', '·', '╰']) && !plain.starts_with("  │")
}

fn help_line(out: &mut String, help: &str, look: Look) {
    let (on, off) = if look.color { ("\u{1b}[36m", "\u{1b}[0m") } else { ("", "") };
    let width = look.width.max(40).saturating_sub(10);
    for (index, line) in wrapped(&visible(help), width).iter().enumerate() {
        if index == 0 {
            out.push_str(&format!("  {on}help:{off} {line}\n"));
        } else {
            out.push_str(&format!("        {line}\n"));
        }
    }
}

/// Breaks at spaces so that no line has more than `width` characters, save a single long word.
fn wrapped(text: &str, width: usize) -> Vec<String> {
    let mut lines = vec![String::new()];
    let mut used = 0;
    for word in text.split(' ') {
        let length = word.chars().count();
        if used > 0 && used + 1 + length > width {
            lines.push(String::new());
            used = 0;
        }
        if let Some(line) = lines.last_mut() {
            if used > 0 {
                line.push(' ');
                used += 1;
            }
            line.push_str(word);
        }
        used += length;
    }
    lines
}

/// Frames of the same file that follow each other become one, with `⋮` between; all have the
/// gutter of the widest; the first is headed by `place`, the primary one, also where a secondary
/// label stands above it.
fn joined(report: &str, place: Option<&str>) -> String {
    let lines: Vec<&str> = report.split_inclusive('\n').collect();
    let gutter = lines.iter().filter(|line| opened(line).is_some()).map(|line| indent(line)).max();
    let gutter = gutter.unwrap_or(0);
    let mut out = String::with_capacity(report.len());
    let mut file: Option<String> = None;
    // Spaces that the frame at hand lacks; `None` outside of frames.
    let mut lacking: Option<usize> = None;
    let mut skip = false;
    for (index, line) in lines.iter().enumerate() {
        if let Some((name, own)) = opened(line) {
            let lacks = gutter - indent(line);
            lacking = Some(lacks);
            let first = file.is_none();
            file = Some(name);
            if !skip {
                out.push_str(&" ".repeat(lacks));
                out.push_str(&line.replacen(&own, place.filter(|_| first).unwrap_or(&own), 1));
            }
            skip = false;
            continue;
        }
        let next = lines.get(index + 1).and_then(|next| opened(next)).map(|(name, _)| name);
        if lacking.is_some() && closes(line) && next.is_some() && next == file {
            out.push_str(&format!("{}⋮\n", " ".repeat(gutter)));
            skip = true;
            continue;
        }
        out.push_str(&" ".repeat(lacking.unwrap_or(0)));
        out.push_str(line);
        if closes(line) {
            lacking = None;
        }
    }
    out
}

fn indent(line: &str) -> usize {
    line.len() - line.trim_start_matches(' ').len()
}

fn closes(line: &str) -> bool {
    line.trim().chars().all(|c| matches!(c, '╰' | '─')) && line.trim().starts_with('╰')
}

/// The file that a frame's first line names, and the whole place.
fn opened(line: &str) -> Option<(String, String)> {
    let plain = without_escapes(line);
    let place = plain.trim().strip_prefix("╭─[")?.strip_suffix(']')?;
    let mut parts = place.rsplitn(3, ':');
    parts.nth(2).map(|file| (file.to_owned(), place.to_owned()))
}

fn without_escapes(line: &str) -> String {
    let mut out = String::new();
    let mut inside = false;
    for c in line.chars() {
        match (inside, c) {
            (false, '\u{1b}') => inside = true,
            (true, 'm') => inside = false,
            (false, c) => out.push(c),
            (true, _) => {}
        }
    }
    out
}

/// A finding in the shape miette reads.
#[derive(Debug)]
struct Framed {
    head: String,
    message: String,
    severity: Severity,
    excerpt: Option<Excerpt>,
    labels: Vec<LabeledSpan>,
}

impl Framed {
    /// `labels` all lie in one source; `true` marks the primary one.
    fn new(finding: &Finding, sources: &Sources, labels: &[(&Label, bool)]) -> Self {
        let source = labels.first().map(|(label, _)| sources.get(label.span.source));
        let spans: Vec<_> = labels.iter().map(|(label, _)| label.span.range()).collect();
        let excerpt = source.map(|source| Excerpt::new(&visible(&shown(&source.path)), source, &spans));
        let labels = excerpt.iter().flat_map(|excerpt| {
            labels.iter().zip(excerpt.spans()).map(|((label, primary), range)| {
                let text = (!label.text.is_empty()).then(|| visible(&label.text));
                let span = SourceSpan::from(range.clone());
                if *primary {
                    LabeledSpan::new_primary_with_span(text, span)
                } else {
                    LabeledSpan::new_with_span(text, span)
                }
            })
        });
        Self {
            head: format!("{}: {}", finding.severity.word(), finding.code),
            message: visible(&finding.message),
            severity: finding.severity,
            labels: labels.collect(),
            excerpt,
        }
    }
}

impl fmt::Display for Framed {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.message)
    }
}

impl std::error::Error for Framed {}

impl Diagnostic for Framed {
    fn code<'a>(&'a self) -> Option<Box<dyn fmt::Display + 'a>> {
        Some(Box::new(&self.head))
    }

    fn severity(&self) -> Option<miette::Severity> {
        Some(match self.severity {
            Severity::Advice => miette::Severity::Advice,
            Severity::Warning => miette::Severity::Warning,
            Severity::Error => miette::Severity::Error,
        })
    }

    fn source_code(&self) -> Option<&dyn SourceCode> {
        self.excerpt.as_ref().map(|excerpt| excerpt as &dyn SourceCode)
    }

    fn labels(&self) -> Option<Box<dyn Iterator<Item = LabeledSpan> + '_>> {
        Some(Box::new(self.labels.iter().cloned()))
    }
}

/// Lines further apart than this are framed apart.
const LINES_BETWEEN: usize = 2;

impl SourceCode for Excerpt {
    fn read_span<'a>(
        &'a self,
        span: &SourceSpan,
        _lines_before: usize,
        _lines_after: usize,
    ) -> Result<Box<dyn SpanContents<'a> + 'a>, MietteError> {
        let view = self.view(span.offset()..span.offset() + span.len());
        Ok(Box::new(MietteSpanContents::new_named(
            self.name().to_owned(),
            view.text.as_bytes(),
            SourceSpan::from(view.range.clone()),
            view.line,
            view.column,
            view.lines + LINES_BETWEEN,
        )))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const PLAIN: Look = Look { color: false, width: 80 };

    fn label(sources: &Sources, file: usize, word: &str) -> crate::source::Span {
        let source = sources.iter().nth(file).expect("added");
        let start = source.text.find(word).expect("planted");
        crate::source::Span::new(source.id, start, start + word.len())
    }

    #[test]
    fn a_caret_stands_under_its_word_after_a_micro_sign_a_tab_and_a_wide_character() {
        let mut sources = Sources::default();
        sources.add("a.stack", "\tbase 3 µm 硅 GaAs\n");
        let finding = Finding::error("name.unknown", "no such thing")
            .at(label(&sources, 0, "GaAs"), "here")
            .help("write `GaP`");
        let text = render(&finding, &sources, PLAIN);
        let expected = "\
error: name.unknown

  × no such thing
   ╭─[a.stack:1:14]
 1 │     base 3 µm 硅 GaAs
   ·                  ──┬─
   ·                    ╰── here
   ╰────
  help: write `GaP`
";
        assert_eq!(text, expected);
    }

    #[test]
    fn far_lines_of_one_file_share_a_frame_and_another_file_has_its_own() {
        let mut sources = Sources::default();
        sources.add("a.stack", "one\n2\n3\n4\n5\n6\n7\n8\n9\nsecond\n");
        sources.add("b.stack", "\n\nthird\n");
        let finding = Finding::warning("name.duplicate", "twice")
            .at(label(&sources, 0, "second"), "again")
            .beside(label(&sources, 0, "one"), "first")
            .beside(label(&sources, 1, "third"), "and here");
        let expected = "\
warning: name.duplicate

  ⚠ twice
    ╭─[a.stack:10:1]
  1 │ one
    · ─┬─
    ·  ╰── first
    ⋮
 10 │ second
    · ───┬──
    ·    ╰── again
    ╰────
    ╭─[b.stack:3:1]
  3 │ third
    · ──┬──
    ·   ╰── and here
    ╰────
";
        assert_eq!(render(&finding, &sources, PLAIN), expected);
    }

    #[test]
    fn nothing_hostile_reaches_the_terminal() {
        let mut sources = Sources::default();
        sources.add("a\u{1b}[2J.stack", "x \u{1b}]0;title\u{7} bad\r\n");
        let finding = Finding::error("syntax.word", "`\u{1b}[31m` and \u{202e} are odd")
            .at(label(&sources, 0, "bad"), "\u{9b}1m")
            .help("drop \u{0}");
        let text = render(&finding, &sources, PLAIN);
        assert!(!text.contains(|c: char| c.is_control() && c != '\n'), "{text:?}");
        assert!(!text.contains('\u{202e}'));
    }

    #[test]
    fn a_place_at_the_end_of_a_text_and_a_span_over_everything_are_drawn() {
        let mut sources = Sources::default();
        let id = sources.add("a.stack", "stack {\n\n");
        let end = crate::source::Span::new(id, 9, 9);
        let text = render(&Finding::error("syntax.end", "ends").at(end, "`}` is due"), &sources, PLAIN);
        assert!(text.contains("╰── `}` is due"), "{text}");
        assert!(text.contains("[a.stack:3:1]"), "{text}");
        let all = crate::source::Span::new(id, 0, 9);
        let text = render(&Finding::error("x.y", "all").at(all, "all of it"), &sources, PLAIN);
        assert!(text.contains("all of it"), "{text}");
        let empty = sources.add("e.stack", "");
        let text = render(
            &Finding::error("x.y", "empty").at(crate::source::Span::new(empty, 0, 0), "nothing"),
            &sources,
            PLAIN,
        );
        assert!(text.contains("nothing"), "{text}");
    }

    #[test]
    fn text_wraps_at_the_width_asked_for() {
        let sources = Sources::default();
        let long = "word ".repeat(40);
        let finding = Finding::advice("x.y", long.trim()).help(long.trim());
        let text = render(&finding, &sources, Look { color: false, width: 60 });
        assert!(text.lines().all(|line| line.chars().count() <= 60), "{text}");
    }

    proptest::proptest! {
        /// Whatever the text and wherever the labels: a frame, no panic, nothing that acts on a
        /// terminal, and the place that the line index says.
        #[test]
        fn every_span_of_every_text_is_drawn(
            text in "[a-z µ²°硅é\u{0}\u{1b}\u{301}\u{200d}\u{202e}\t\r\n{};]{0,200}",
            start in 0_usize..220,
            length in 0_usize..220,
            other in 0_usize..220,
        ) {
            let mut sources = Sources::default();
            let id = sources.add("a.stack", &text);
            let floor = |mut at: usize| {
                at = at.min(text.len());
                while !text.is_char_boundary(at) { at -= 1; }
                at
            };
            let (start, end) = (floor(start), floor(start + length));
            let span = crate::source::Span::new(id, start, end);
            let beside = crate::source::Span::new(id, floor(other), floor(other + 3));
            let finding = Finding::error("x.y", "m").at(span, "here").beside(beside, "there");
            let drawn = render(&finding, &sources, PLAIN);
            let acts = |c: char| (c.is_control() && c != '\n') || c == '\u{202e}';
            // Tabs inside the source are expanded.
            proptest::prop_assert!(!drawn.contains(acts), "{drawn:?}");
            let at = sources.get(id).position(start);
            let place = format!("[a.stack:{}:{}]", at.line, at.column);
            proptest::prop_assert!(drawn.contains(&place), "{place}\n{drawn}");
            proptest::prop_assert!(drawn.contains("here"), "{drawn}");
        }
    }
}
