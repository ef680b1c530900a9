//! Requirements and findings as JUnit XML, which test dashboards read: one suite a file, one case
//! a requirement that holds, one case a finding. Errors fail; warnings and advice are skipped
//! cases, which dashboards show without failing; what is accepted passes with its reason.

use crate::finding::run::{FileRun, Run};
use crate::finding::{Finding, Severity};
use crate::source::{Sources, shown};

/// The document of `run`.
pub fn document(run: &Run) -> String {
    let suites: Vec<Suite> = run.files.iter().map(suite).collect();
    let sum = |of: fn(&Suite) -> usize| -> usize { suites.iter().map(of).sum() };
    let mut out = String::from("<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n");
    out.push_str(&format!(
        "<testsuites name=\"bandloom\" tests=\"{}\" failures=\"{}\" errors=\"{}\" skipped=\"{}\">\n",
        sum(|it| it.tests),
        sum(|it| it.failures),
        sum(|it| it.errors),
        sum(|it| it.skipped)
    ));
    for suite in &suites {
        out.push_str(&format!(
            "  <testsuite name=\"{}\" tests=\"{}\" failures=\"{}\" errors=\"{}\" skipped=\"{}\">\n{}  </testsuite>\n",
            escaped(&suite.name),
            suite.tests,
            suite.failures,
            suite.errors,
            suite.skipped,
            suite.cases
        ));
    }
    out.push_str("</testsuites>\n");
    out
}

#[derive(Default)]
struct Suite {
    name: String,
    tests: usize,
    failures: usize,
    errors: usize,
    skipped: usize,
    cases: String,
}

impl Suite {
    fn case(&mut self, name: &str, class: &str, inside: &str) {
        self.tests += 1;
        let head = format!("    <testcase name=\"{}\" classname=\"{}\"", escaped(name), escaped(class));
        let rest = if inside.is_empty() { "/>\n".to_owned() } else { format!(">{inside}</testcase>\n") };
        self.cases.push_str(&(head + &rest));
    }
}

fn suite(file: &FileRun) -> Suite {
    let mut suite = Suite { name: file.path.clone(), ..Suite::default() };
    if let Some(why) = &file.unreadable {
        suite.errors += 1;
        suite.case("read", &file.path, &format!("<error message=\"{}\" type=\"unreadable\"/>", escaped(why)));
    }
    // One that does not hold is a finding.
    for asked in file.asked.iter().filter(|asked| asked.met) {
        let under = asked.condition.as_ref().map_or_else(String::new, |name| format!(" (under {name})"));
        let text = format!("<system-out>{}</system-out>", escaped(&asked.value));
        suite.case(&format!("{}{under}", asked.text), &asked.stack, &text);
    }
    for finding in &file.findings {
        let (name, detail) = (title(finding, file.sources), detail(finding, file.sources));
        let message = escaped(&finding.message);
        let inside = match finding.severity {
            Severity::Error => {
                suite.failures += 1;
                format!(
                    "<failure message=\"{message}\" type=\"{}\">{}</failure>",
                    finding.code,
                    escaped(&detail)
                )
            }
            _ => {
                suite.skipped += 1;
                let word = finding.severity.word();
                format!(
                    "<skipped message=\"{word}: {message}\"/><system-out>{}</system-out>",
                    escaped(&detail)
                )
            }
        };
        suite.case(&name, finding.code, &inside);
    }
    for (finding, because) in &file.accepted {
        let text = format!("accepted: {because}\n{}", finding.message);
        let inside = format!("<system-out>{}</system-out>", escaped(&text));
        suite.case(&title(finding, file.sources), finding.code, &inside);
    }
    suite
}

/// `gap.order at a.stack:3:5`
fn title(finding: &Finding, sources: &Sources) -> String {
    match &finding.primary {
        None => finding.code.to_owned(),
        Some(label) => {
            let source = sources.get(label.span.source);
            let at = source.position(label.span.start as usize);
            format!("{} at {}:{}:{}", finding.code, shown(&source.path), at.line, at.column)
        }
    }
}

fn detail(finding: &Finding, sources: &Sources) -> String {
    let mut text = format!("{}\n{}", title(finding, sources), finding.message);
    for help in &finding.helps {
        text.push_str("\nhelp: ");
        text.push_str(help);
    }
    text
}

/// Escapes for text and attributes; characters that XML 1.0 does not allow become U+FFFD.
fn escaped(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            '\n' => out.push_str("&#10;"),
            '\t' => out.push_str("&#9;"),
            '\r' => out.push_str("&#13;"),
            c if c < ' ' || c == '\u{fffe}' || c == '\u{ffff}' => out.push('\u{fffd}'),
            c => out.push(c),
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::finding::run::Asked;

    #[test]
    fn requirements_pass_errors_fail_and_nothing_breaks_the_markup() {
        let sources = Sources::default();
        let error = Finding::error("x.y", "a < b & \"c\" \u{1b}");
        let warning = Finding::warning("x.z", "hm");
        let asked = |met| Asked {
            stack: "A".into(),
            text: "require efficiency >= 28 %".into(),
            condition: Some("noon".into()),
            met,
            value: "29.1 %".into(),
        };
        let file = FileRun {
            path: "a.stack".into(),
            sources: &sources,
            findings: vec![&error, &warning],
            accepted: vec![(&warning, "why not")],
            asked: vec![asked(true), asked(false)],
            unreadable: None,
        };
        let text = document(&Run { files: vec![file], ..Run::default() });
        assert!(text.contains("tests=\"4\" failures=\"1\" errors=\"0\" skipped=\"1\""), "{text}");
        assert!(
            text.contains("name=\"require efficiency &gt;= 28 % (under noon)\" classname=\"A\""),
            "{text}"
        );
        assert!(text.contains("a &lt; b &amp; &quot;c&quot; \u{fffd}"), "{text}");
        assert!(text.contains("accepted: why not"));
    }
}
