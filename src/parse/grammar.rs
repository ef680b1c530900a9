//! The parser that pest makes of `grammar/bandloom.pest`.

use std::num::NonZeroUsize;
use std::sync::Mutex;

use pest::Parser as _;
use pest::error::{Error, ErrorVariant, InputLocation};
use pest::iterators::{Pair, Pairs};

/// One rule's match.
pub(crate) type Node<'t> = Pair<'t, Rule>;

/// Made by pest; each variant of `Rule` carries the grammar's own comment.
#[derive(pest_derive::Parser)]
#[grammar = "../grammar/bandloom.pest"]
struct Grammar;

/// Steps per byte that no valid or broken text comes near (about 60 are used); a backstop against
/// a grammar that tries the same text over and over.
const STEPS_PER_BYTE: usize = 1_000;

/// Reads a whole file.
pub(crate) fn read(text: &str) -> Result<Pairs<'_, Rule>, Box<Error<Rule>>> {
    allow_steps(text.len());
    Grammar::parse(Rule::file, text).map_err(Box::new)
}

/// Where a text alone stops making sense.
pub(crate) struct Refusal {
    /// Offset in the text.
    pub(crate) at: usize,
    /// What would have fitted there.
    pub(crate) rules: Vec<Rule>,
}

/// Reads one statement, or the head of a block with its `{`, alone.
pub(crate) fn explain(text: &str) -> Result<(), Refusal> {
    allow_steps(text.len());
    match Grammar::parse(Rule::explain, text) {
        Ok(_) => Ok(()),
        Err(error) => {
            let at = match error.location {
                InputLocation::Pos(at) | InputLocation::Span((at, _)) => at,
            };
            let rules = match error.variant {
                ErrorVariant::ParsingError { positives, .. } => positives,
                ErrorVariant::CustomError { .. } => Vec::new(),
            };
            Err(Refusal { at, rules })
        }
    }
}

/// pest keeps one limit for the whole process and takes it when a parse starts, so it only ever
/// grows: a text is never refused for the sake of a smaller one read at the same time.
fn allow_steps(bytes: usize) {
    static LARGEST: Mutex<usize> = Mutex::new(0);
    let steps = bytes.saturating_mul(STEPS_PER_BYTE).saturating_add(1_000_000);
    let mut largest = LARGEST.lock().unwrap_or_else(std::sync::PoisonError::into_inner);
    if steps > *largest {
        *largest = steps;
        pest::set_call_limit(NonZeroUsize::new(steps));
    }
}
