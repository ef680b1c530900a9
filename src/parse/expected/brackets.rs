//! Quotes and round brackets that do not pair within one statement.

use crate::finding::Finding;
use crate::parse::expected::cures;
use crate::parse::grammar;
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
    let finding = Finding::error("syntax.unclosed", "this `(` is never closed").at(place(at), "opened here");
    let end = text.trim_end_matches(['{', ' ', '\t', '\r', '\n']).len();
    let edited = format!("{}){}", &text[..end], &text[end..]);
    let help = grammar::explain(&edited).ok().and_then(|()| cures::write(&edited));
    let end = span.start as usize + end;
    Some(match help {
        Some(help) => finding.help(help).fix(Span::new(span.source, end, end), ")", false),
        None => finding.help("add `)` before the end of the statement"),
    })
}

fn unterminated(text: &str, at: usize, span: Span) -> Finding {
    let rest = text[at..].trim_end();
    let start = span.start as usize + at;
    let whole = Span::new(span.source, start, start + rest.len());
    // A comment at the end of the line was hardly meant to be quoted.
    let quoted = rest.split(" //").next().unwrap_or(rest).trim_end();
    let finding = Finding::error("syntax.unterminated", "this text has no closing quote")
        .at(whole, "runs to the end of the line");
    let end = Span { end: whole.start + quoted.len() as u32, ..whole }.after();
    match cures::write(&format!("{quoted}\"")) {
        Some(help) => finding.help(help),
        None => finding.help("add `\"` where the text ends"),
    }
    .fix(end, "\"", false)
}
