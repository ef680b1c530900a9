//! Edits that may have been meant. One is offered only if the statement reads with it.

use std::ops::Range;

use crate::finding::suggest::{latin, near};
use crate::parse::expected::{Trouble, first_word, is_invisible, is_word, names};
use crate::parse::grammar::{self, Rule};
use crate::syntax::DUTIES;

/// A way out.
pub(super) struct Cure {
    /// What to say at the place of the trouble.
    pub(super) label: String,
    /// What to do.
    pub(super) help: String,
    /// The edit, where there is one.
    pub(super) edit: Option<Edit>,
    /// A code and a message of its own, where the trouble is not one of syntax.
    pub(super) instead: Option<(&'static str, String)>,
}

/// An edit after which the statement reads.
pub(super) struct Edit {
    /// Byte range in the statement that is replaced.
    pub(super) range: Range<usize>,
    /// The new text.
    pub(super) replacement: String,
    /// Whether nothing else can have been meant.
    pub(super) safe: bool,
}

/// A longer statement is not repeated in a help line.
const SHOWN: usize = 72;

/// The first of the likely edits that makes the statement readable.
pub(super) fn find(trouble: &Trouble<'_>) -> Option<Cure> {
    let tries: [fn(&Trouble<'_>) -> Option<Cure>; 12] = [
        odd_sign,
        foreign_letter,
        sign_between,
        comparison,
        missing_sign,
        range,
        superfluous,
        misspelt,
        quotes,
        expected_word,
        late_phrase,
        missing_block,
    ];
    tries.into_iter().find_map(|attempt| attempt(trouble))
}

/// "write …", with the whole statement where it is short.
pub(super) fn write(edited: &str) -> Option<String> {
    let words: Vec<&str> = edited.split_whitespace().collect();
    let shown = words.join(" ");
    (shown.len() <= SHOWN).then(|| format!("write `{shown}`"))
}

impl Trouble<'_> {
    /// The edit, if the statement reads with it.
    fn try_edit(&self, range: Range<usize>, replacement: &str, label: &str, safe: bool) -> Option<Cure> {
        let (from, to) = (range.start, range.end);
        let edited = format!("{}{replacement}{}", &self.text[..from], &self.text[to..]);
        grammar::explain(&edited).ok()?;
        let help = write(&edited).unwrap_or_else(|| {
            let old = self.text[from..to].trim();
            match (old, replacement.trim()) {
                (_, "") => format!("leave out `{old}`"),
                ("", new) => format!("write `{new}` here"),
                (_, new) => format!("write `{new}` instead of `{old}`"),
            }
        });
        let edit = Some(Edit { range, replacement: replacement.to_owned(), safe });
        Some(Cure { label: label.to_owned(), help, edit, instead: None })
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
            trouble.try_edit(at..end + close + length, &quoted, "texts stand in straight double quotes", true)
        }
        '–' | '—' | '‐' | '‑' => trouble
            .try_edit(at..end, "-", &label("-"), false)
            .or_else(|| trouble.try_edit(at..end, " .. ", &label(".."), false)),
        '…' => trouble.try_edit(at..end, "..", &label(".."), true),
        '×' => trouble.try_edit(at..end, "*", &label("*"), true),
        '÷' | '∕' => trouble.try_edit(at..end, "/", &label("/"), true),
        '#' => {
            let edit = Edit { range: at..end, replacement: "//".to_owned(), safe: true };
            Some(Cure {
                label: "comments begin with `//`".to_owned(),
                help: "write `//` instead of `#`".to_owned(),
                edit: Some(edit),
                instead: None,
            })
        }
        '.' if trouble.token.len() > 1 => {
            trouble.try_edit(at..at, "0", "a digit stands before the point", true)
        }
        _ if is_invisible(first) => {
            let cure = trouble.try_edit(at..end, " ", "an invisible character", true)?;
            Some(Cure { help: "delete the invisible character".to_owned(), ..cure })
        }
        _ => None,
    }
}

/// `größe 3`
fn foreign_letter(trouble: &Trouble<'_>) -> Option<Cure> {
    let token = trouble.token;
    let letter = token.chars().find(|c| c.is_alphabetic() && !c.is_ascii())?;
    if let Some(plain) = latin(token) {
        let sign = latin(&letter.to_string())?;
        return Some(Cure {
            label: format!("`{letter}` here is U+{:04X}, not the letter `{sign}`", letter as u32),
            help: format!("write `{plain}` with Latin letters"),
            edit: Some(Edit { range: trouble.at..trouble.token_end(), replacement: plain, safe: true }),
            instead: Some((
                "name.look-alike",
                format!("`{token}` holds `{letter}`, which only looks like the letter `{sign}`"),
            )),
        });
    }
    Some(Cure {
        label: format!("`{letter}` cannot be part of a name"),
        help: "write names with the letters a to z, digits and `_`".to_owned(),
        edit: None,
        instead: None,
    })
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
        return trouble.try_edit(trouble.at..trouble.token_end(), "=", "`let` takes `=`", true);
    }
    trouble.try_edit(before..value, " ", "a space is all that stands between a name and its value", true)
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
    trouble.try_edit(at..end, sign, label, certain).or_else(|| {
        let start = trouble.text.len() - trouble.text.trim_start().len();
        trouble.try_edit(start..start, "require ", "what must hold begins with `require`", false)
    })
}

/// `let d 700 nm`, `require efficiency 28 %`
fn missing_sign(trouble: &Trouble<'_>) -> Option<Cure> {
    let at = trouble.at;
    let wants = |rule| trouble.rules.contains(&rule);
    let found = if trouble.token.is_empty() { "nothing" } else { "no `=`" };
    if wants(Rule::equals) {
        return trouble.try_edit(at..at, "= ", &format!("{found} between the name and its value"), true);
    }
    if wants(Rule::comparison) {
        return trouble.try_edit(at..at, ">= ", "no comparison before this", false);
    }
    None
}

/// `stack Sandpiper {`, `use parts/tunnels.stack`, `condition "noon" {`
fn quotes(trouble: &Trouble<'_>) -> Option<Cure> {
    let (at, end) = (trouble.at, trouble.token_end());
    if let Some(inside) = trouble.token.strip_prefix('"').and_then(|rest| rest.strip_suffix('"')) {
        return trouble.try_edit(at..end, inside, "a name stands without quotes", true);
    }
    if trouble.token.is_empty() || trouble.wanted() != [Rule::string] {
        return None;
    }
    let rest = trouble.text[at..].trim_end_matches(['{', ' ', '\t', '\r']);
    let word = rest.split_whitespace().next().unwrap_or(rest);
    let quoted = |text: &str| format!("\"{text}\"");
    let label = "a text stands in quotes";
    trouble
        .try_edit(at..at + word.len(), &quoted(word), label, true)
        .or_else(|| trouble.try_edit(at..at + rest.len(), &quoted(rest), label, false))
}

/// `free 300 to 1200 nm`, `free 300 - 1200 nm`, `300 ... 1200 nm`
fn range(trouble: &Trouble<'_>) -> Option<Cure> {
    const LABEL: &str = "a range is written with `..`";
    let (at, end) = (trouble.at, trouble.token_end());
    if trouble.token.starts_with('.') && trouble.text[..at].ends_with("..") {
        return trouble.try_edit(at..at + 1, "", LABEL, true);
    }
    if !trouble.rules.contains(&Rule::dots) {
        return None;
    }
    trouble.try_edit(at..end, "..", LABEL, true).or_else(|| {
        let minus = trouble.text[..at].rfind('-')?;
        trouble.try_edit(minus..minus + 1, "..", LABEL, false)
    })
}

/// A keyword with a slip: where the text stops making sense, right before, or at its head.
fn misspelt(trouble: &Trouble<'_>) -> Option<Cure> {
    let attempt = |from: usize, word: &str, known: &[&'static str]| {
        if names::HEADS.contains(&word) || names::KEYWORDS.contains(&word) || DUTIES.contains(&word) {
            return None;
        }
        let meant = near(word, known.iter().copied())?;
        let label = if from == trouble.at {
            format!("did you mean `{meant}`?")
        } else {
            format!("`{word}` before this may mean `{meant}`")
        };
        trouble.try_edit(from..from + word.len(), &meant, &label, false)
    };
    let here: Vec<&str> = trouble.rules.iter().flat_map(|rule| names::opening(*rule)).copied().collect();
    let (before_at, before) = trouble.word_before();
    let start = trouble.text.len() - trouble.text.trim_start().len();
    attempt(trouble.at, trouble.token, &here)
        .or_else(|| attempt(trouble.at, trouble.token, names::KEYWORDS))
        .or_else(|| attempt(before_at, before, names::KEYWORDS))
        .or_else(|| attempt(start, first_word(trouble.text), names::HEADS))
}

/// `of bandgap 1.9 eV`, `vary top.* ± 2 %`: the word that is due, instead of this one or before it.
fn expected_word(trouble: &Trouble<'_>) -> Option<Cure> {
    let due: Vec<&str> = trouble.wanted().iter().flat_map(|rule| names::opening(*rule)).copied().collect();
    let (at, end) = (trouble.at, trouble.token_end());
    if due.len() > 3
        || trouble.anything_said()
        || !trouble.token.starts_with(|c: char| c.is_ascii_alphabetic())
    {
        return None;
    }
    due.into_iter().find_map(|word| {
        trouble.try_edit(at..end, word, &format!("`{word}` is due here"), false).or_else(|| {
            trouble.try_edit(at..at, &format!("{word} "), &format!("`{word}` is due here"), false)
        })
    })
}

/// `base GaInP 612 nm matched`: what narrows a material down stands right after it.
fn late_phrase(trouble: &Trouble<'_>) -> Option<Cure> {
    if !matches!(trouble.token, "matched" | "of" | "ordered" | "with" | "graded" | "diffused") {
        return None;
    }
    let place = match trouble.token {
        "graded" | "diffused" => "before",
        _ => "after",
    };
    let head = first_word(trouble.text);
    (DUTIES.contains(&head) || head.contains('.')).then(|| Cure {
        label: "belongs to the material".to_owned(),
        help: format!("write `{}` right {place} the material", trouble.token),
        edit: None,
        instead: None,
    })
}

/// A sign or a word too many: `base GaAs, 3 um`.
fn superfluous(trouble: &Trouble<'_>) -> Option<Cure> {
    let (at, end) = (trouble.at, trouble.token_end());
    match trouble.token {
        "," | ":" | "=" | "|" | "[" | "]" => {
            trouble.try_edit(at..end, " ", &format!("`{}` has no meaning here", trouble.token), true)
        }
        "" if trouble.text.trim_end().ends_with(',') => {
            let comma = trouble.text.trim_end().len() - 1;
            trouble.try_edit(comma..comma + 1, "", "nothing follows this comma", false)
        }
        _ => None,
    }
}

/// `junction top` alone on its line.
fn missing_block(trouble: &Trouble<'_>) -> Option<Cure> {
    if !trouble.token.is_empty() {
        return None;
    }
    let at = trouble.at;
    trouble.try_edit(at..at, " {", "its block is missing", false)?;
    Some(Cure {
        label: "its block is missing".to_owned(),
        help: format!("write `{} {{ … }}`", trouble.text.trim()),
        edit: Some(Edit { range: at..at, replacement: " { }".to_owned(), safe: false }),
        instead: None,
    })
}
