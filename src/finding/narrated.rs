//! Findings in sentences, for screen readers and Braille lines: no frames, no arrows, every place
//! said in words.

use crate::finding::excerpt::visible;
use crate::finding::{Finding, Label, Severity};
use crate::source::{Sources, shown};

/// One finding as a few lines, followed by an empty one.
pub fn told(finding: &Finding, sources: &Sources) -> String {
    let kind = match finding.severity {
        Severity::Error => "Error",
        Severity::Warning => "Warning",
        Severity::Advice => "Advice",
    };
    let mut out = format!("{kind} {}: {}.\n", finding.code, visible(&finding.message));
    if let Some(label) = &finding.primary {
        out.push_str(&format!("At {}", place(label, sources)));
    }
    for label in &finding.secondary {
        out.push_str(&format!("See also {}", place(label, sources)));
    }
    for help in &finding.helps {
        out.push_str(&format!("Help: {}.\n", visible(help)));
    }
    out.push('\n');
    out
}

/// `a.stack line 3, columns 5 to 9, reads: base GaAs. Note: no such thing.`
fn place(label: &Label, sources: &Sources) -> String {
    let source = sources.get(label.span.source);
    let (start, end) = (source.position(label.span.start as usize), source.position(label.span.end as usize));
    let columns = if end.line != start.line {
        format!("column {} to line {}", start.column, end.line)
    } else if end.column > start.column + 1 {
        format!("columns {} to {}", start.column, end.column - 1)
    } else {
        format!("column {}", start.column)
    };
    let line = source.text.lines().nth(start.line - 1).unwrap_or_default();
    let text = source.slice(label.span);
    // What is marked, on one line; a whole block is named by its first line.
    let marked = if text.trim().is_empty() || text.contains('\n') { line } else { text };
    let marked: String = visible(marked.trim()).chars().take(MOST).collect();
    let reads = if marked.is_empty() { String::new() } else { format!(", reads: {marked}") };
    let note =
        if label.text.is_empty() { String::new() } else { format!(" Note: {}.", visible(&label.text)) };
    format!("{} line {}, {columns}{reads}.{note}\n", visible(&shown(&source.path)), start.line)
}

/// Characters of a marked text that are read out.
const MOST: usize = 120;

#[cfg(test)]
mod tests {
    use super::*;
    use crate::source::Span;

    #[test]
    fn everything_is_said_in_words() {
        let mut sources = Sources::default();
        let id = sources.add("a.stack", "µ {\n  base GaAss 3 um\n}\n");
        let finding = Finding::error("name.unknown", "no material is called `GaAss`")
            .at(Span::new(id, 12, 17), "did you mean `GaAs`?")
            .beside(Span::new(id, 0, 24), "in this")
            .help("write `GaAs`");
        assert_eq!(
            told(&finding, &sources),
            "Error name.unknown: no material is called `GaAss`.\n\
             At a.stack line 2, columns 8 to 12, reads: GaAss. Note: did you mean `GaAs`?.\n\
             See also a.stack line 1, column 1 to line 3, reads: µ {. Note: in this.\n\
             Help: write `GaAs`.\n\n"
        );
    }
}
