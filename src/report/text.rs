//! Words for people, with just enough markup for a sheet, written out for HTML and for Markdown.
//!
//! A [`Text`] is the only thing that carries a user's words into a template: both of its forms
//! are escaped here, in one place, so that a template may put them in as they are.

use serde::ser::{Serialize, SerializeStruct, Serializer};

/// What a run of words is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Style {
    /// Running words.
    Plain,
    /// A value or a name that the sentence is about.
    Strong,
    /// What fails.
    Fail,
    /// Words of the file.
    Code,
    /// A lowered index.
    Sub,
}

/// Words with markup.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Text {
    runs: Vec<(Style, String)>,
}

impl Text {
    /// Nothing yet.
    pub fn new() -> Self {
        Self::default()
    }

    /// Plain words.
    pub fn of(words: impl Into<String>) -> Self {
        Self::new().p(words)
    }

    /// Words of the file.
    pub fn code(words: impl Into<String>) -> Self {
        Self::new().c(words)
    }

    /// A finding's message or help: what stands between backticks is code.
    pub fn message(message: &str) -> Self {
        let pieces: Vec<&str> = message.split('`').collect();
        if pieces.len().is_multiple_of(2) {
            return Self::of(message);
        }
        pieces.into_iter().enumerate().fold(Self::new(), |text, (index, piece)| {
            text.push(if index % 2 == 1 { Style::Code } else { Style::Plain }, piece)
        })
    }

    /// A material's label; in a chemical formula the fractions are lowered.
    pub fn material(label: &str) -> Self {
        formula(label).into_iter().fold(Self::new(), |text, (lowered, piece)| {
            text.push(if lowered { Style::Sub } else { Style::Plain }, piece)
        })
    }

    /// A symbol of the trade with its index: V oc.
    #[must_use]
    pub fn symbol(self, letter: &str, index: &str) -> Self {
        self.push(Style::Plain, letter).push(Style::Sub, index)
    }

    /// Adds plain words.
    #[must_use]
    pub fn p(self, words: impl Into<String>) -> Self {
        self.push(Style::Plain, words)
    }

    /// Adds strong words.
    #[must_use]
    pub fn b(self, words: impl Into<String>) -> Self {
        self.push(Style::Strong, words)
    }

    /// Adds failing words.
    #[must_use]
    pub fn fail(self, words: impl Into<String>) -> Self {
        self.push(Style::Fail, words)
    }

    /// Adds words of the file.
    #[must_use]
    pub fn c(self, words: impl Into<String>) -> Self {
        self.push(Style::Code, words)
    }

    /// Adds another text.
    #[must_use]
    pub fn then(mut self, other: Self) -> Self {
        self.runs.extend(other.runs);
        self
    }

    fn push(mut self, style: Style, words: impl Into<String>) -> Self {
        let words = visible(&words.into());
        if !words.is_empty() {
            self.runs.push((style, words));
        }
        self
    }

    /// Whether there are no words.
    pub fn is_empty(&self) -> bool {
        self.runs.is_empty()
    }

    /// The words alone.
    pub fn plain(&self) -> String {
        self.runs.iter().map(|(_, words)| words.as_str()).collect()
    }

    /// Escaped for HTML content and for attribute values in double quotes.
    pub fn html(&self) -> String {
        self.runs
            .iter()
            .map(|(style, words)| {
                let words = escape_html(words);
                match style {
                    Style::Plain => words,
                    Style::Strong => format!("<strong>{words}</strong>"),
                    Style::Fail => format!("<strong class=\"bad\">{words}</strong>"),
                    Style::Code => format!("<code>{words}</code>"),
                    Style::Sub => format!("<sub>{words}</sub>"),
                }
            })
            .collect()
    }

    /// Escaped for Markdown, also inside the cell of a table.
    pub fn markdown(&self) -> String {
        self.runs
            .iter()
            .map(|(style, words)| match style {
                Style::Plain => escape_markdown(words),
                Style::Strong | Style::Fail => emphasised(words),
                Style::Code => code_markdown(words),
                Style::Sub => format!("<sub>{}</sub>", escape_markdown(words)),
            })
            .collect()
    }
}

impl Serialize for Text {
    /// `{ html, md, plain }`
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        let mut map = serializer.serialize_struct("Text", 3)?;
        map.serialize_field("html", &self.html())?;
        map.serialize_field("md", &self.markdown())?;
        map.serialize_field("plain", &self.plain())?;
        map.end()
    }
}

/// Characters that turn the direction of writing, or that show nothing, are named instead: a
/// sheet that is signed must read as it is.
pub fn visible(words: &str) -> String {
    let hidden = |c: char| {
        c.is_control()
            || matches!(c as u32, 0xad | 0x61c | 0x180e | 0x200b..=0x200f | 0x2028..=0x202e | 0x2060..=0x206f
                | 0xfeff | 0xfff9..=0xfffb | 0xe0000..=0xe007f)
    };
    if !words.chars().any(hidden) {
        return words.to_string();
    }
    let mut out = String::new();
    for c in words.chars() {
        match c {
            '\n' | '\r' | '\t' => out.push(' '),
            c if hidden(c) => out.push_str(&format!("⟨U+{:04X}⟩", c as u32)),
            c => out.push(c),
        }
    }
    out
}

/// Safe in HTML and SVG, as content and inside a quoted attribute.
pub fn escape_html(words: &str) -> String {
    let mut out = String::with_capacity(words.len());
    for c in words.chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            '\'' => out.push_str("&#39;"),
            c => out.push(c),
        }
    }
    out
}

/// Plain words in Markdown: nothing of them is markup, a link, a mention or a cell's border.
pub fn escape_markdown(words: &str) -> String {
    let mut out = String::with_capacity(words.len());
    for (index, c) in words.char_indices() {
        match c {
            '\\' | '`' | '*' | '[' | ']' | '~' | '$' | '^' | '{' | '}' | '!' => {
                out.push('\\');
                out.push(c);
            }
            '_' => {
                // Between letters an underscore is no markup.
                let inner = words[..index].ends_with(char::is_alphanumeric)
                    && words[index + 1..].starts_with(char::is_alphanumeric);
                out.push_str(if inner { "_" } else { "\\_" });
            }
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '|' => out.push_str("&#124;"),
            '#' => out.push_str("&#35;"),
            '@' => out.push_str("&#64;"),
            ':' if words[index..].starts_with("://") => out.push_str("&#58;"),
            c => out.push(c),
        }
    }
    out
}

/// Emphasis ends wherever a space touches its marks; an element does not.
fn emphasised(words: &str) -> String {
    let safe =
        words.starts_with(|c: char| c.is_alphanumeric()) && words.ends_with(|c: char| c.is_alphanumeric());
    if safe {
        format!("**{}**", escape_markdown(words))
    } else {
        format!("<b>{}</b>", escape_markdown(words))
    }
}

fn code_markdown(words: &str) -> String {
    let mut rest = words.chars().peekable();
    let mut plain = !words.starts_with(' ') && !words.ends_with(' ');
    while let Some(c) = rest.next() {
        // Between backticks all is literal but backticks, and a bar still ends a cell. `<` stays
        // where it compares; before a letter it might open an element in a careless reader.
        plain &= match c {
            '`' | '|' | '\\' | '&' => false,
            '<' => rest.peek().is_some_and(|next| matches!(next, '=' | ' ')),
            _ => true,
        };
    }
    if plain && !words.is_empty() {
        return format!("`{words}`");
    }
    let entities: String = words
        .chars()
        .map(|c| if c.is_alphanumeric() || c == ' ' { c.to_string() } else { format!("&#{};", c as u32) })
        .collect();
    format!("<code>{entities}</code>")
}

/// Splits a label into pieces and whether each is lowered. Only what is made of element symbols,
/// brackets and fractions is a formula; anything else comes back whole.
pub fn formula(label: &str) -> Vec<(bool, String)> {
    let whole = || vec![(false, label.to_string())];
    let bytes = label.as_bytes();
    let mut pieces: Vec<(bool, String)> = Vec::new();
    let mut at = 0;
    let mut elements = 0;
    while at < bytes.len() {
        let start = at;
        match bytes[at] {
            b'A'..=b'Z' => {
                at += 1;
                if bytes.get(at).is_some_and(u8::is_ascii_lowercase) {
                    at += 1;
                }
                if bytes.get(at).is_some_and(u8::is_ascii_lowercase) {
                    return whole();
                }
                elements += 1;
            }
            b'(' | b')' => at += 1,
            b'0'..=b'9' if elements > 0 => {
                while bytes.get(at).is_some_and(|b| b.is_ascii_digit() || *b == b'.') {
                    at += 1;
                }
                pieces.push((true, label[start..at].to_string()));
                continue;
            }
            _ => return whole(),
        }
        match pieces.last_mut() {
            Some((false, piece)) => piece.push_str(&label[start..at]),
            _ => pieces.push((false, label[start..at].to_string())),
        }
    }
    pieces
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn hostile_names_are_words_in_both_forms() {
        let text = Text::of("<script>alert(1)</script> | `x` **b** @all #1 https://x.y");
        assert_eq!(text.html(), "&lt;script&gt;alert(1)&lt;/script&gt; | `x` **b** @all #1 https://x.y");
        assert_eq!(
            text.markdown(),
            "&lt;script&gt;alert(1)&lt;/script&gt; &#124; \\`x\\` \\*\\*b\\*\\* &#64;all &#35;1 https&#58;//x.y"
        );
    }

    #[test]
    fn code_with_pipes_or_backticks_still_is_one_cell() {
        assert_eq!(Text::code("efficiency >= 28 %").markdown(), "`efficiency >= 28 %`");
        assert_eq!(Text::code("current_mismatch <= 3 %").markdown(), "`current_mismatch <= 3 %`");
        assert_eq!(Text::code("a|`b`").markdown(), "<code>a&#124;&#96;b&#96;</code>");
        assert_eq!(Text::code("<img>").markdown(), "<code>&#60;img&#62;</code>");
    }

    #[test]
    fn characters_that_turn_the_text_around_are_named() {
        assert_eq!(visible("a\u{202e}b\u{200b}"), "a⟨U+202E⟩b⟨U+200B⟩");
        assert_eq!(visible("two\nlines"), "two lines");
    }

    #[test]
    fn fractions_of_a_formula_are_lowered() {
        let lowered =
            |label| formula(label).into_iter().filter(|(low, _)| *low).map(|(_, t)| t).collect::<Vec<_>>();
        assert_eq!(lowered("(Al0.36Ga0.64)0.516In0.484P"), ["0.36", "0.64", "0.516", "0.484"]);
        assert_eq!(lowered("MgF2"), ["2"]);
        assert!(lowered("ideal 1.42 eV").is_empty());
        assert!(lowered("window2").is_empty() && lowered("Glass2").is_empty());
    }

    #[test]
    fn backticks_in_a_message_are_code() {
        assert_eq!(Text::message("write `GaInP matched`").html(), "write <code>GaInP matched</code>");
        assert_eq!(Text::message("one ` only").html(), "one ` only");
    }
}
