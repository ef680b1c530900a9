//! Why a text fits no form: what was expected, what was found, and the way out.

use crate::finding::Finding;
use crate::parse::grammar::{self, Refusal, Rule};
use crate::source::{Source, Span};
use crate::syntax::DUTIES;

mod brackets;
mod cures;
mod names;

/// A slice that fits no form, and where it stops making sense.
struct Trouble<'a> {
    /// The slice: a statement, or the head of a block up to and including its `{`.
    text: &'a str,
    /// Offset in `text` of the token that does not fit; its length where the text ends too soon.
    at: usize,
    /// That token; empty where the text ends too soon.
    token: &'a str,
    /// What would have fitted there.
    rules: Vec<Rule>,
}

/// Says what is wrong with `span`: a statement, or the head of a block with its `{`. Without `cured`
/// the way out is the general form, not an edit that was tried.
pub(super) fn explain(source: &Source, span: Span, cured: bool) -> Finding {
    let text = source.slice(span);
    if let Some(finding) = brackets::unpaired(source, span) {
        return finding;
    }
    match grammar::explain(text) {
        Ok(()) => misplaced(text, span),
        Err(refusal) => Trouble::new(text, refusal).finding(span, cured),
    }
}

/// Text that is sound by itself but not where it stands.
fn misplaced(text: &str, span: Span) -> Finding {
    let head = first_word(text);
    let at = Span { end: span.start + head.len() as u32, ..span };
    let finding = Finding::error("syntax.unexpected", format!("`{head}` cannot stand inside a block"))
        .at(at, "belongs outside every block");
    match head {
        "stack" => finding.help("close the block above with `}` before this line"),
        "condition" => finding.help("move it in front of the stack and name it there with `conditions`"),
        _ => finding.help("move it out of the block, to the first column of a line of its own"),
    }
}

impl<'a> Trouble<'a> {
    fn new(text: &'a str, refusal: Refusal) -> Self {
        let rest = text.get(refusal.at..).unwrap_or_default();
        let skipped = rest.len() - rest.trim_start_matches([' ', '\t', '\r', '\n', '\u{a0}']).len();
        let at = refusal.at + skipped;
        let at = at.min(text.trim_end().len());
        // A letter names cannot hold stops the reader inside a word: show the whole word.
        let foreign = |c: char| c.is_alphabetic() && !c.is_ascii();
        let at =
            if text[at..].starts_with(foreign) { text[..at].trim_end_matches(is_word).len() } else { at };
        Self { text, at, token: token_at(text, at), rules: refusal.rules }
    }

    fn finding(&self, span: Span, cured: bool) -> Finding {
        let cure = cured.then(|| cures::find(self)).flatten();
        let place = self.place(span);
        let label = match (&cure, self.token.is_empty()) {
            (Some(cure), _) => cure.label.clone(),
            (None, true) => "something is missing after this".to_owned(),
            (None, false) => "does not fit here".to_owned(),
        };
        let finding = Finding::error("syntax.unexpected", self.message()).at(place, label);
        let Some(cure) = cure else {
            return finding.help(self.form());
        };
        let mut finding = finding.help(cure.help);
        if let Some((code, message)) = cure.instead {
            (finding.code, finding.message) = (code, message);
        }
        let Some(edit) = cure.edit else { return finding };
        let start = span.start as usize;
        let at = Span::new(span.source, start + edit.range.start, start + edit.range.end);
        finding.fix(at, edit.replacement, edit.safe)
    }

    /// What would have fitted, without what may stand almost anywhere and tells nobody anything.
    fn wanted(&self) -> Vec<Rule> {
        let noise = |rule: &Rule| {
            matches!(
                rule,
                Rule::unit
                    | Rule::operator
                    | Rule::sign
                    | Rule::group_word
                    | Rule::nested_formula
                    | Rule::replaces
            )
        };
        let telling = |rule: &Rule| !noise(rule) && !matches!(rule, Rule::open | Rule::EOI);
        let wanted: Vec<Rule> = self.rules.iter().copied().filter(telling).collect();
        if !wanted.is_empty() {
            return wanted;
        }
        self.rules.iter().copied().filter(|rule| !noise(rule)).collect()
    }

    /// Whether anything that is said of a layer might stand here: a list would be no help.
    fn anything_said(&self) -> bool {
        let head = first_word(self.text);
        self.rules.contains(&Rule::alias) && (DUTIES.contains(&head) || head.contains('.'))
    }

    fn message(&self) -> String {
        let mut wanted: Vec<&str> = Vec::new();
        for name in self.wanted().into_iter().map(names::human) {
            if !wanted.contains(&name) {
                wanted.push(name);
            }
        }
        let found = self.found();
        if self.anything_said() {
            wanted.clear();
        }
        match wanted.as_slice() {
            [one] => format!("expected {one}, found {found}"),
            [one, other] => format!("expected {one} or {other}, found {found}"),
            [one, other, third] => format!("expected {one}, {other} or {third}, found {found}"),
            _ if self.token.is_empty() => format!("`{}` is not finished", first_word(self.text)),
            _ => format!("{found} does not fit here"),
        }
    }

    fn found(&self) -> String {
        match self.token.chars().next() {
            None => "the end of the line".to_owned(),
            Some(sign) if is_invisible(sign) => format!("an invisible character (U+{:04X})", sign as u32),
            Some(_) => format!("`{}`", self.token),
        }
    }

    /// The token; where the text ends too soon, its last one.
    fn place(&self, span: Span) -> Span {
        let (from, to) = if self.token.is_empty() {
            let before = &self.text[..self.at];
            let word = before.trim_end_matches(is_word);
            let from = if word.len() < before.len() {
                word.len()
            } else {
                before.char_indices().next_back().map_or(0, |(at, _)| at)
            };
            (from, self.at)
        } else {
            (self.at, self.at + self.token.len())
        };
        let start = span.start as usize;
        Span::new(span.source, start + from, start + to)
    }

    /// How such a statement, or the words before the trouble, are written.
    fn form(&self) -> String {
        let head = first_word(self.text);
        let before = self.text[..self.at].split_whitespace().next_back().unwrap_or_default();
        match names::form(head).or_else(|| names::inner_form(before)) {
            Some(form) => format!("write it as `{form}`"),
            None if self.text.trim() == "{" => {
                "put `{` on the line of what the block belongs to, such as `junction top {`".to_owned()
            }
            None if DUTIES.contains(&head) => {
                "a layer is written as `base GaInP matched 600 nm p 1e17 /cm3 Zn`".to_owned()
            }
            None => "a statement is a name and its values, such as `temperature 25 degC`".to_owned(),
        }
    }
}

fn is_word(c: char) -> bool {
    c.is_alphanumeric() || c == '_' || c == '.'
}

fn is_invisible(c: char) -> bool {
    c.is_control()
        || matches!(c, '\u{ad}' | '\u{200b}'..='\u{200f}' | '\u{2028}'..='\u{202e}' | '\u{2060}'..='\u{2064}' | '\u{feff}')
}

fn first_word(text: &str) -> &str {
    token_at(text, text.len() - text.trim_start().len())
}

/// The word, number, quoted text or sign that begins at `at`.
fn token_at(text: &str, at: usize) -> &str {
    const SIGNS: &[&str] = &["...", "..", ">=", "<=", "=>", "=<", "==", ":=", "/*", "*/", "--", "+-"];
    let rest = text.get(at..).unwrap_or_default();
    let Some(first) = rest.chars().next() else { return "" };
    let length = if is_word(first) && !rest.starts_with("..") {
        rest.find(|c| !is_word(c)).unwrap_or(rest.len())
    } else if first == '"' {
        rest[1..].find('"').map_or(rest.len(), |end| end + 2)
    } else {
        SIGNS.iter().find(|sign| rest.starts_with(**sign)).map_or(first.len_utf8(), |sign| sign.len())
    };
    rest[..length].trim_end_matches(|c| length > 1 && c == '.' && first != '.')
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_rule_has_a_human_name() {
        for &rule in Rule::all_rules() {
            let name = names::human(rule);
            assert!(!name.is_empty() && !name.contains("::"), "{rule:?}");
            let identifier = format!("{rule:?}");
            assert!(
                !identifier.contains('_') || !name.contains(&identifier),
                "{rule:?} is shown as `{name}`"
            );
        }
    }

    #[test]
    fn every_form_shown_as_a_way_out_reads() {
        for head in names::HEADS {
            let form = names::form(head).expect("each head has a form");
            let text = form.replace("{ … }", "{ }");
            assert!(grammar::explain(&text).is_ok(), "{text}");
        }
    }

    #[test]
    fn tokens_are_words_numbers_texts_and_signs() {
        for (text, at, token) in [
            ("a >= 3", 2, ">="),
            ("free 3 ... 4", 7, "..."),
            ("AM1.5G x", 0, "AM1.5G"),
            ("x größe", 2, "größe"),
            ("a \"b c\" d", 2, "\"b c\""),
            ("a .5", 2, ".5"),
            ("a", 1, ""),
        ] {
            assert_eq!(token_at(text, at), token, "{text}");
        }
    }
}
