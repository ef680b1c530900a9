//! Quotes and round brackets that do not pair within one statement.

use crate::finding::Finding;
use crate::source::{Source, Span};

/// An open quote, an open `(` or a `)` too many in the statement at `span`.
pub(super) fn unpaired(source: &Source, span: Span) -> Option<Finding> {
    let text = source.slice(span);
    let mut open = Vec::new();
    let mut characters = text.char_indices();
    let place = |at: usize| Span::new(span.source, span.start as usize + at, span.start as usize + at + 1);
    while let Some((at, character)) = characters.next() {
        match character {
            '"' => {
                let closed = loop {
                    match characters.next() {
                        Some((_, '\\')) => {
                            characters.next();
                        }
                        Some((_, '"')) => break true,
                        Some(_) => {}
                        None => break false,
                    }
                };
                if !closed {
                    return Some(unterminated(text, at, span));
                }
            }
            '(' => open.push(at),
            ')' if open.pop().is_none() => {
                return Some(
                    Finding::error("syntax.stray-close", "this `)` closes nothing")
                        .at(place(at), "no `(` is open here")
                        .help("remove it, or add the `(` it belongs to")
                        .fix(place(at), "", false),
                );
            }
            _ => {}
        }
    }
    let at = open.pop()?;
    Some(
        Finding::error("syntax.unclosed", "this `(` is never closed")
            .at(place(at), "opened here")
            .help("add `)` before the end of the statement"),
    )
}

fn unterminated(text: &str, at: usize, span: Span) -> Finding {
    let rest = text[at..].trim_end();
    let start = span.start as usize + at;
    let whole = Span::new(span.source, start, start + rest.len());
    let shown: String = rest.chars().take(40).collect();
    let cut = if shown.len() < rest.len() { "…" } else { "" };
    Finding::error("syntax.unterminated", "this text has no closing quote")
        .at(whole, "runs to the end of the line")
        .help(format!("write `{shown}{cut}\"`"))
        .fix(whole.after(), "\"", false)
}
