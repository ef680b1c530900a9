//! Cures that are certain, put into the text: everything around them stays as it is.

use std::ops::Range;

use crate::finding::{Finding, Fix};

/// What became of a text.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Applied<'a> {
    /// The text with the edits in it.
    pub text: String,
    /// What was put in, in the order of the text.
    pub done: Vec<&'a Finding>,
    /// What was left alone: its place overlaps another edit's.
    pub refused: Vec<&'a Finding>,
}

/// `text` with the edits of those `findings` whose cure is certain; their spans all lie in it. Of
/// edits that overlap none is made, of equal ones one. An edit that does not fit is refused.
pub fn applied<'a>(text: &str, findings: impl IntoIterator<Item = &'a Finding>) -> Applied<'a> {
    let mut edits: Vec<(&Finding, &Fix)> = findings
        .into_iter()
        .filter_map(|finding| finding.fix.as_ref().filter(|fix| fix.safe).map(|fix| (finding, fix)))
        .collect();
    edits.sort_by_key(|(_, fix)| (fix.span.start, fix.span.end));
    edits.dedup_by(|a, b| a.1 == b.1);
    let mut out = Applied { text: String::with_capacity(text.len()), done: Vec::new(), refused: Vec::new() };
    let mut at = 0;
    for (index, (finding, fix)) in edits.iter().enumerate() {
        let range = fix.span.range();
        let clashes = |other: &Fix| {
            let (a, b) = (fix.span, other.span);
            // Two insertions at one place have no order; touching replacements have one.
            a.start < b.end && b.start < a.end || a == b
        };
        let alone = edits.iter().enumerate().all(|(other, (_, edit))| other == index || !clashes(edit));
        let fits = range.start >= at && text.get(range.clone()).is_some();
        if !(alone && fits) {
            out.refused.push(finding);
            continue;
        }
        let range = if fix.replacement.is_empty() { whole_line(text, range, at) } else { range };
        out.text.push_str(&text[at..range.start]);
        out.text.push_str(&fix.replacement);
        at = range.end;
        out.done.push(finding);
    }
    out.text.push_str(&text[at..]);
    out
}

/// `range`, or all of its lines where nothing else stands on them: what is removed leaves no empty
/// line behind. Never before `from`.
fn whole_line(text: &str, range: Range<usize>, from: usize) -> Range<usize> {
    let start = text[..range.start].rfind('\n').map_or(0, |at| at + 1);
    let end = text[range.end..].find('\n').map_or(text.len(), |at| range.end + at + 1);
    let bare = text[start..range.start].trim().is_empty() && text[range.end..end].trim().is_empty();
    if bare && start >= from && range.start < range.end { start..end } else { range }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::source::{SourceId, Span};

    fn edit(start: usize, end: usize, to: &str, safe: bool) -> Finding {
        let span = Span::new(SourceId(0), start, end);
        Finding::error("x.y", "m").at(span, "").fix(span, to, safe)
    }

    #[test]
    fn certain_cures_go_in_and_nothing_else_changes() {
        let text = "µ AllnP // keep\r\n3,5 um\n";
        let all = [edit(3, 8, "AlInP", true), edit(18, 21, "3.5", true), edit(0, 2, "u", false)];
        let out = applied(text, &all);
        assert_eq!(out.text, "µ AlInP // keep\r\n3.5 um\n");
        assert_eq!(out.done.len(), 2);
        assert!(out.refused.is_empty());
    }

    #[test]
    fn of_overlapping_edits_none_is_made_and_of_equal_ones_one() {
        let all =
            [edit(0, 3, "x", true), edit(2, 5, "y", true), edit(6, 7, "z", true), edit(6, 7, "z", true)];
        let out = applied("abcdefgh", &all);
        assert_eq!(out.text, "abcdefzh");
        assert_eq!((out.done.len(), out.refused.len()), (1, 2));
        let twice = [edit(1, 1, "x", true), edit(1, 1, "y", true)];
        assert_eq!(applied("ab", &twice).text, "ab");
        assert_eq!(applied("ab", &[edit(1, 9, "x", true)]).text, "ab", "does not fit");
    }

    #[test]
    fn a_statement_removed_takes_its_line_along_but_no_comment() {
        assert_eq!(applied("a\n  bc  \r\nd", &[edit(4, 6, "", true)]).text, "a\nd");
        assert_eq!(applied("a\n  bc // why\nd", &[edit(4, 6, "", true)]).text, "a\n   // why\nd");
        assert_eq!(applied("a; bc\n", &[edit(3, 5, "", true)]).text, "a; \n");
    }

    proptest::proptest! {
        /// Whatever the edits: what lies outside of those made is still there, in order.
        #[test]
        fn the_rest_of_the_text_stays(spans in proptest::collection::vec((0_usize..40, 0_usize..6), 0..8)) {
            let text = "abcdefghijklmnopqrstuvwxyzµ²°0123456789\n";
            let all: Vec<Finding> =
                spans.iter().map(|(start, length)| edit(*start, start + length, "", true)).collect();
            let out = applied(text, &all);
            let mut kept = text.chars();
            proptest::prop_assert!(out.text.chars().all(|c| kept.any(|k| k == c)));
        }
    }
}
