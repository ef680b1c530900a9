//! Findings one a line: `file:line:column: severity[code]: message`, which editors and `grep` read.

use crate::finding::Finding;
use crate::finding::excerpt::visible;
use crate::source::{Sources, shown};

/// One finding as one line, ended by a line break. Without a place it begins with the severity.
pub fn line(finding: &Finding, sources: &Sources) -> String {
    let place = finding.primary.as_ref().map_or_else(String::new, |label| {
        let source = sources.get(label.span.source);
        let at = source.position(label.span.start as usize);
        format!("{}:{}:{}: ", visible(&shown(&source.path)), at.line, at.column)
    });
    format!("{place}{}[{}]: {}\n", finding.severity.word(), finding.code, visible(&finding.message))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::source::Span;

    #[test]
    fn one_line_with_its_place() {
        let mut sources = Sources::default();
        let id = sources.add("a.stack", "µ 3\n 3 %\n");
        let finding = Finding::error("unit.missing", "3 of\u{1b} what").at(Span::new(id, 6, 7), "here");
        let text = line(&finding, &sources);
        assert!(text.starts_with("a.stack:2:2: error[unit.missing]: 3 of"), "{text}");
        assert!(text.ends_with(" what\n") && !text.contains('\u{1b}'));
        assert_eq!(line(&Finding::advice("x.y", "so"), &sources), "advice[x.y]: so\n");
    }
}
