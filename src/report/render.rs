//! The templates, and what fills them.
//!
//! Names ending in `.html` are escaped by themselves; the forms a [`crate::report::text::Text`]
//! carries are escaped already and go in with `| safe`. Markdown is not escaped by the engine:
//! there every user's word is a `Text`, too.

use sha2::{Digest, Sha256};
use tera::{Context, ErrorKind, Tera};

use crate::report::palette;
use crate::report::view::Sheet;
use crate::report::{ReportError, Templates};

/// Every template with its text; a user's folder may replace each by name.
pub const BUILT_IN: &[(&str, &str)] = &[
    ("sheet.html", include_str!("../../report_templates/sheet.html")),
    ("sheet.css", include_str!("../../report_templates/sheet.css")),
    ("sheet.md", include_str!("../../report_templates/sheet.md")),
    ("parts/components.html", include_str!("../../report_templates/parts/components.html")),
    ("parts/title.html", include_str!("../../report_templates/parts/title.html")),
    ("parts/verdict.html", include_str!("../../report_templates/parts/verdict.html")),
    ("parts/headline.html", include_str!("../../report_templates/parts/headline.html")),
    ("parts/findings.html", include_str!("../../report_templates/parts/findings.html")),
    ("parts/signatures.html", include_str!("../../report_templates/parts/signatures.html")),
    ("parts/components.md", include_str!("../../report_templates/parts/components.md")),
];

/// The text in force under a name.
fn text<'a>(templates: &'a Templates, name: &str) -> &'a str {
    let replaced = templates.replaced.iter().find(|(other, _)| other == name).map(|(_, text)| text.as_str());
    replaced.unwrap_or_else(|| BUILT_IN.iter().find(|(other, _)| *other == name).map_or("", |(_, text)| text))
}

/// The engine with every template, the user's in place of the built-in ones. Names that are not
/// built in come along, so that a user's template may include others.
///
/// # Errors
/// Where a template does not parse.
pub fn engine(templates: &Templates) -> Result<Tera, ReportError> {
    let mut tera = Tera::new();
    tera.autoescape_on([".html", ".svg"]);
    let own = templates.replaced.iter().map(|(name, text)| (name.as_str(), text.as_str()));
    let built_in = BUILT_IN.iter().map(|(name, _)| (*name, text(templates, name)));
    let is_template = |name: &str| name != "sheet.css";
    let all: Vec<(&str, &str)> = built_in
        .chain(own.filter(|(name, _)| !BUILT_IN.iter().any(|(other, _)| other == name)))
        .filter(|(name, _)| is_template(name))
        .collect();
    tera.add_raw_templates(all).map_err(|error| plain(&error))?;
    Ok(tera)
}

/// `sheet.html`.
///
/// # Errors
/// Where a replaced template asks for what the view does not have.
pub fn html(engine: &Tera, sheet: &Sheet, templates: &Templates) -> Result<String, ReportError> {
    let css = style(text(templates, "sheet.css"), &sheet.running);
    let mut context = context(sheet)?;
    context.insert("style_hash", &base64(&Sha256::digest(css.as_bytes())));
    context.insert("style", &css);
    engine.render("sheet.html", &context).map_err(|error| plain(&error))
}

/// `sheet.md`.
///
/// # Errors
/// As [`html`].
pub fn markdown(engine: &Tera, sheet: &Sheet) -> Result<String, ReportError> {
    let text = engine.render("sheet.md", &context(sheet)?).map_err(|error| plain(&error))?;
    // Blank lines that loops leave behind would only make the file longer.
    let mut out = String::with_capacity(text.len());
    let mut blank = true;
    for line in text.lines().map(str::trim_end) {
        if line.is_empty() && blank {
            continue;
        }
        blank = line.is_empty();
        out.push_str(line);
        out.push('\n');
    }
    Ok(out)
}

fn context(sheet: &Sheet) -> Result<Context, ReportError> {
    let mut context = Context::new();
    context.insert("sheet", sheet);
    Ok(context)
}

/// The whole style block: colours, page, figures, and the head of printed pages, whose words are
/// the user's and are written as escapes so that they can end neither string nor block.
fn style(page: &str, running: &str) -> String {
    let mut words = String::new();
    for c in running.chars() {
        if c.is_ascii_alphanumeric() || matches!(c, ' ' | ',' | '.') {
            words.push(c);
        } else {
            words.push_str(&format!("\\{:06X}", c as u32));
        }
    }
    let heads = format!(
        "@page{{@top-left{{content:\"{words}\";font:8pt sans-serif;color:{quiet}}}@top-right{{content:\"sheet \" counter(page) \" of \" counter(pages);font:8pt sans-serif;color:{quiet}}}}}\n",
        quiet = palette::LIGHT.quiet
    );
    let css = format!("{}{page}\n{}{heads}", palette::page_css(), palette::figure_css(None));
    // A user's style sheet must not be able to leave the block either.
    css.replace("</", "<\\/")
}

/// RFC 4648, with padding.
fn base64(bytes: &[u8]) -> String {
    const ALPHABET: &[u8; 64] = b"ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/";
    let mut out = String::new();
    for chunk in bytes.chunks(3) {
        let word =
            chunk.iter().fold(0u32, |word, byte| word << 8 | u32::from(*byte)) << (8 * (3 - chunk.len()));
        for index in 0..4 {
            if index <= chunk.len() {
                out.push(char::from(ALPHABET[(word >> (18 - 6 * index) & 63) as usize]));
            } else {
                out.push('=');
            }
        }
    }
    out
}

/// The engine's error as a plain one: template, line, one line of message.
fn plain(error: &tera::Error) -> ReportError {
    let one_line = |text: &str| text.split_whitespace().collect::<Vec<_>>().join(" ");
    match error.kind() {
        ErrorKind::SyntaxError(report) | ErrorKind::RenderingError(report) => ReportError {
            template: Some(report.filename().to_string()),
            line: Some(report.span().start_line),
            message: one_line(report.message()),
        },
        other => ReportError { template: None, line: None, message: one_line(&other.to_string()) },
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// RFC 4648, section 10.
    #[test]
    fn base64_is_the_one_of_the_standard() {
        assert_eq!(base64(b"foobar"), "Zm9vYmFy");
        assert_eq!(base64(b"fooba"), "Zm9vYmE=");
        assert_eq!(base64(b"foob"), "Zm9vYg==");
    }

    #[test]
    fn a_name_cannot_leave_the_style_block() {
        let css = style("", "x\"}</style><script>");
        assert!(!css.contains("</") && !css.contains("x\""), "{css}");
    }

    #[test]
    fn a_broken_template_is_named_with_its_line() {
        let templates = Templates {
            replaced: vec![("parts/title.html".into(), "one\n{{ sheet.name.html | safe }\n".into())],
        };
        let error = engine(&templates).expect_err("it does not parse");
        assert_eq!(error.template.as_deref(), Some("parts/title.html"));
        assert_eq!(error.line, Some(2));
    }
}
