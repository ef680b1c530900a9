//! Edits that may have been meant. One is offered only if the statement reads with it.

use crate::finding::suggest::near;
use crate::parse::expected::{Trouble, first_word, is_invisible, is_word, names, token_at};
use crate::parse::grammar::{self, Rule};

/// An edit after which the statement reads.
pub(super) struct Cure {
    /// Byte range in the statement that is replaced.
    pub(super) from: usize,
    /// Its end.
    pub(super) to: usize,
    /// The new text.
    pub(super) replacement: String,
    /// What to say at the place of the trouble.
    pub(super) label: String,
    /// What to do.
    pub(super) help: String,
    /// Whether nothing else can have been meant.
    pub(super) safe: bool,
}

/// A longer statement is not repeated in a help line.
const SHOWN: usize = 72;

/// The first of the likely edits that makes the statement readable.
pub(super) fn find(trouble: &Trouble<'_>) -> Option<Cure> {
    let tries: [fn(&Trouble<'_>) -> Option<Cure>; 9] = [
        odd_sign,
        sign_between,
        comparison,
        missing_sign,
        quotes,
        range,
        misspelt,
        superfluous,
        missing_block,
    ];
    tries.into_iter().find_map(|attempt| attempt(trouble))
}

impl Trouble<'_> {
    /// The edit, if the statement reads with it.
    fn try_edit(&self, from: usize, to: usize, replacement: &str, label: &str, safe: bool) -> Option<Cure> {
        let edited = format!("{}{replacement}{}", &self.text[..from], &self.text[to..]);
        grammar::explain(&edited).ok()?;
        let shown = edited.trim_end_matches(['{', ' ']).split_whitespace().collect::<Vec<_>>().join(" ");
        let block = if edited.trim_end().ends_with('{') { " {" } else { "" };
        let help = if shown.len() <= SHOWN {
            format!("write `{shown}{block}`")
        } else if replacement.trim().is_empty() {
            format!("leave out `{}`", self.text[from..to].trim())
        } else if from == to {
            format!("write `{}` before it", replacement.trim())
        } else {
            format!("write `{}` instead of `{}`", replacement.trim(), self.text[from..to].trim())
        };
        Some(Cure { from, to, replacement: replacement.to_owned(), label: label.to_owned(), help, safe })
    }

    fn token_end(&self) -> usize {
        self.at + self.token.len()
    }

    /// The word before the place of the trouble.
    fn word_before(&self) -> (usize, &str) {
        let before = self.text[..self.at].trim_end();
        let from = before.trim_end_matches(is_word).len();
        (from, &before[from..])
    }
}

/// Signs a word processor, another language or a foreign keyboard puts in.
fn odd_sign(trouble: &Trouble<'_>) -> Option<Cure> {
    let first = trouble.token.chars().next()?;
    let (at, end) = (trouble.at, trouble.at + first.len_utf8());
    let label = |word: &str| format!("the sign here is `{word}`");
    match first {
        '“' | '”' | '„' | '‟' | '«' | '»' | '‘' | '’' | '\'' | '`' => {
            let rest = &trouble.text[end..];
            let close = rest.find(['“', '”', '‟', '«', '»', '‘', '’', '\'', '`'])?;
            let length = rest[close..].chars().next().map_or(1, char::len_utf8);
            let quoted = format!("\"{}\"", &rest[..close]);
            trouble.try_edit(at, end + close + length, &quoted, "texts stand in straight double quotes", true)
        }
        '–' | '—' | '‐' | '‑' => trouble
            .try_edit(at, end, "-", &label("-"), false)
            .or_else(|| trouble.try_edit(at, end, " .. ", &label(".."), false)),
        '…' => trouble.try_edit(at, end, "..", &label(".."), true),
        '×' => trouble.try_edit(at, end, "*", &label("*"), true),
        '÷' | '∕' => trouble.try_edit(at, end, "/", &label("/"), true),
        '#' => {
            trouble.try_edit(at, trouble.text.len(), "", "comments begin with `//`", false).map(|cure| Cure {
                to: end,
                replacement: "//".to_owned(),
                help: "write `//` instead of `#`".to_owned(),
                ..cure
            })
        }
        '.' if trouble.token.len() > 1 => {
            trouble.try_edit(at, at, "0", "a digit stands before the point", true)
        }
        _ if is_invisible(first) => {
            let cure = trouble.try_edit(at, end, " ", "an invisible character", true)?;
            Some(Cure { help: "delete the invisible character".to_owned(), ..cure })
        }
        _ => None,
    }
}

/// `shading: 3 %`, `shading = 3 %`
fn sign_between(trouble: &Trouble<'_>) -> Option<Cure> {
    if !matches!(trouble.token, ":" | "=" | ":=" | "==") {
        return None;
    }
    let before = trouble.text[..trouble.at].trim_end().len();
    let after = &trouble.text[trouble.token_end()..];
    let value = trouble.text.len() - after.trim_start().len();
    if first_word(trouble.text) == "let" {
        return trouble.try_edit(trouble.at, trouble.token_end(), "=", "`let` takes `=`", true);
    }
    trouble.try_edit(before, value, " ", "a space is all that stands between a name and its value", true)
}

/// `require efficiency = 28 %`, `require efficiency => 28 %`, `efficiency >= 28 %`
fn comparison(trouble: &Trouble<'_>) -> Option<Cure> {
    if !matches!(trouble.token, ">=" | "<=" | ">" | "<" | "=>" | "=<" | "=" | "==" | ":") {
        return None;
    }
    let (at, end) = (trouble.at, trouble.token_end());
    let sign = if trouble.token == "=<" { "<=" } else { ">=" };
    let certain = matches!(trouble.token, "=>" | "=<");
    let label = "the comparisons are `>=`, `<=`, `>` and `<`";
    trouble.try_edit(at, end, sign, label, certain).or_else(|| {
        let start = trouble.text.len() - trouble.text.trim_start().len();
        trouble.try_edit(start, start, "require ", "what must hold begins with `require`", false)
    })
}

/// `let d 700 nm`, `require efficiency 28 %`
fn missing_sign(trouble: &Trouble<'_>) -> Option<Cure> {
    let at = trouble.at;
    let wants = |rule| trouble.rules.contains(&rule);
    let found = if trouble.token.is_empty() { "nothing" } else { "no `=`" };
    if wants(Rule::equals) {
        return trouble.try_edit(at, at, "= ", &format!("{found} between the name and its value"), true);
    }
    if wants(Rule::comparison) {
        return trouble.try_edit(at, at, ">= ", "no comparison before this", false);
    }
    None
}

/// `stack Sandpiper {`, `use parts/tunnels.stack`, `condition "noon" {`
fn quotes(trouble: &Trouble<'_>) -> Option<Cure> {
    let (at, end) = (trouble.at, trouble.token_end());
    if let Some(inside) = trouble.token.strip_prefix('"').and_then(|rest| rest.strip_suffix('"')) {
        return trouble.try_edit(at, end, inside, "a name stands without quotes", true);
    }
    if trouble.token.is_empty() || !trouble.rules.contains(&Rule::string) {
        return None;
    }
    let rest = trouble.text[at..].trim_end_matches(['{', ' ', '\t']);
    let label = "a text stands in quotes";
    let quoted = |text: &str| format!("\"{text}\"");
    trouble
        .try_edit(at, end, &quoted(trouble.token), label, true)
        .or_else(|| trouble.try_edit(at, at + rest.len(), &quoted(rest), label, false))
}

/// `free 300 to 1200 nm`, `free 300 - 1200 nm`
fn range(trouble: &Trouble<'_>) -> Option<Cure> {
    if !trouble.rules.contains(&Rule::dots) && trouble.token != "..." && trouble.token != "to" {
        let minus = trouble.text.rfind('-').filter(|_| first_word(trouble.text) != "let")?;
        let label = "a range is written with `..`";
        return trouble.try_edit(minus, minus + 1, "..", label, false);
    }
    trouble.try_edit(trouble.at, trouble.token_end(), "..", "a range is written with `..`", true)
}

/// A keyword with a slip: where the text stops making sense, right before, or at its head.
fn misspelt(trouble: &Trouble<'_>) -> Option<Cure> {
    let attempt = |from: usize, word: &str, known: &[&'static str]| {
        let meant = near(word, known.iter().copied())?;
        let label = if from == trouble.at {
            format!("did you mean `{meant}`?")
        } else {
            format!("`{word}` before this may mean `{meant}`")
        };
        trouble.try_edit(from, from + word.len(), &meant, &label, false)
    };
    let here: Vec<&str> = trouble.rules.iter().flat_map(|rule| names::opening(*rule)).copied().collect();
    let (before_at, before) = trouble.word_before();
    let start = trouble.text.len() - trouble.text.trim_start().len();
    let head = token_at(trouble.text, start);
    attempt(trouble.at, trouble.token, &here)
        .or_else(|| attempt(trouble.at, trouble.token, names::KEYWORDS))
        .or_else(|| attempt(before_at, before, names::KEYWORDS))
        .or_else(|| attempt(start, head, names::HEADS))
}

/// A sign or a word too many: `base GaAs, 3 um`.
fn superfluous(trouble: &Trouble<'_>) -> Option<Cure> {
    let (at, end) = (trouble.at, trouble.token_end());
    match trouble.token {
        "," | ":" | "=" | "|" | "[" | "]" => {
            trouble.try_edit(at, end, " ", &format!("no `{}` stands here", trouble.token), true)
        }
        "" if trouble.text.trim_end().ends_with(',') => {
            let comma = trouble.text.trim_end().len() - 1;
            trouble.try_edit(comma, comma + 1, "", "nothing follows this comma", false)
        }
        _ => None,
    }
}

/// `junction top` alone on its line.
fn missing_block(trouble: &Trouble<'_>) -> Option<Cure> {
    if !trouble.token.is_empty() {
        return None;
    }
    let cure = trouble.try_edit(trouble.at, trouble.at, " {", "its block is missing", false)?;
    Some(Cure {
        help: format!("write `{} {{ … }}`", trouble.text.trim()),
        replacement: " { }".to_owned(),
        ..cure
    })
}
