//! Findings as workflow commands, which GitHub shows beside the lines of a pull request.

use crate::finding::{Finding, Severity};
use crate::source::{Sources, shown};

/// One finding as one line, ended by a line break.
///
/// Escapes as the workflow commands want them: `%`, CR and LF everywhere, `:` and `,` also in
/// properties.
pub fn annotation(finding: &Finding, sources: &Sources) -> String {
    let kind = match finding.severity {
        Severity::Error => "error",
        Severity::Warning => "warning",
        Severity::Advice => "notice",
    };
    let mut properties = Vec::new();
    if let Some(label) = &finding.primary {
        let source = sources.get(label.span.source);
        let start = source.position(label.span.start as usize);
        let end = source.position(label.span.end as usize);
        properties.push(format!("file={}", property(&shown(&source.path))));
        properties.push(format!("line={}", start.line));
        properties.push(format!("endLine={}", end.line));
        // Columns are only read where the range stays on one line.
        if start.line == end.line {
            properties.push(format!("col={}", start.column));
            properties.push(format!("endColumn={}", end.column));
        }
    }
    properties.push(format!("title={}", property(finding.code)));
    let mut message = finding.message.clone();
    for help in &finding.helps {
        message.push_str("\nhelp: ");
        message.push_str(help);
    }
    format!("::{kind} {}::{}\n", properties.join(","), data(&message))
}

fn data(text: &str) -> String {
    text.replace('%', "%25").replace('\r', "%0D").replace('\n', "%0A")
}

fn property(text: &str) -> String {
    data(text).replace(':', "%3A").replace(',', "%2C")
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::source::Span;

    #[test]
    fn what_would_end_a_command_is_escaped() {
        let mut sources = Sources::default();
        let id = sources.add("a,b:c.stack", "µ 3 %\n");
        let finding =
            Finding::error("unit.missing", "3 % of\r\nit: so").at(Span::new(id, 3, 6), "").help("x");
        assert_eq!(
            annotation(&finding, &sources),
            "::error file=a%2Cb%3Ac.stack,line=1,endLine=1,col=3,endColumn=6,title=unit.missing\
             ::3 %25 of%0D%0Ait: so%0Ahelp: x\n"
        );
    }
}
