//! Why a text fits no form: what was expected, what was found, and the way out.

use crate::finding::Finding;
use crate::parse::grammar;
use crate::source::{Source, Span};

/// Reads the slice again by itself and says where it stops making sense.
pub(super) fn explain(source: &Source, span: Span) -> Finding {
    let text = source.slice(span);
    let at = match grammar::explain(text) {
        Ok(_) => 0,
        Err(error) => match error.location {
            pest::error::InputLocation::Pos(at) | pest::error::InputLocation::Span((at, _)) => at,
        },
    };
    let start = span.start as usize + at;
    let here = Span::new(source.id, start, start + 1);
    Finding::error("syntax.unexpected", "this cannot be read").at(here, "unexpected here")
}
