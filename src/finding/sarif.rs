//! Findings as SARIF 2.1.0 (OASIS), which code scanning services read.
//!
//! Lines and columns count from 1, columns in code points, the end is exclusive. Paths stay as
//! given, relative, percent-encoded; absolute ones become `file:` addresses. What is accepted is a
//! suppressed result with its reason; a file that could not be read is a notification.

use serde_json::{Value, json};

use crate::finding::fingerprint::Fingerprints;
use crate::finding::run::{About, Run};
use crate::finding::{Finding, Label, Severity};
use crate::source::{Sources, Span, shown};

const SCHEMA: &str =
    "https://docs.oasis-open.org/sarif/sarif/v2.1.0/errata01/os/schemas/sarif-schema-2.1.0.json";

/// The document of `run`.
pub fn document(run: &Run) -> String {
    let codes = run.codes();
    let mut prints = Fingerprints::default();
    let mut results = Vec::new();
    for file in &run.files {
        let accepted = file.accepted.iter().map(|(finding, because)| (*finding, Some(*because)));
        for (finding, because) in file.findings.iter().map(|it| (*it, None)).chain(accepted) {
            let index = codes.iter().position(|(code, _)| *code == finding.code).unwrap_or(0);
            let mut result = result(finding, file.sources, index);
            result["partialFingerprints"] =
                json!({ "bandloomFinding/v1": prints.next(finding, file.sources) });
            if let Some(because) = because {
                result["suppressions"] = json!([{ "kind": "inSource", "justification": because }]);
            }
            results.push(result);
        }
    }
    let unreadable: Vec<Value> = run
        .files
        .iter()
        .filter_map(|file| {
            let why = file.unreadable.as_ref()?;
            Some(json!({
                "level": "error",
                "message": { "text": format!("cannot read `{}`: {why}", file.path) },
                "locations": [{ "physicalLocation": { "artifactLocation": { "uri": uri(&file.path) } } }],
            }))
        })
        .collect();
    let rules = |(code, severity): &(&'static str, Severity)| {
        rule(code, *severity, &run.about.map_or_else(About::default, |about| about(code)))
    };
    let document = json!({
        "$schema": SCHEMA,
        "version": "2.1.0",
        "runs": [{
            "tool": { "driver": {
                "name": "bandloom",
                "version": env!("CARGO_PKG_VERSION"),
                "rules": codes.iter().map(rules).collect::<Vec<_>>(),
            } },
            "columnKind": "unicodeCodePoints",
            "invocations": [{
                "executionSuccessful": unreadable.is_empty(),
                "toolExecutionNotifications": unreadable,
            }],
            "results": results,
            "properties": { "leftOut": run.left_out },
        }],
    });
    // Strings and whole numbers only: this cannot fail.
    let mut text = serde_json::to_string_pretty(&document).unwrap_or_default();
    text.push('\n');
    text
}

fn level(severity: Severity) -> &'static str {
    match severity {
        Severity::Error => "error",
        Severity::Warning => "warning",
        Severity::Advice => "note",
    }
}

fn rule(code: &str, severity: Severity, about: &About) -> Value {
    let or_code = |text: &str| if text.is_empty() { code.to_owned() } else { text.to_owned() };
    json!({
        "id": code,
        "shortDescription": { "text": or_code(&about.title) },
        "fullDescription": { "text": or_code(&about.reports) },
        "help": { "text": format!("bandloom why {code}") },
        "defaultConfiguration": { "level": level(severity) },
    })
}

fn result(finding: &Finding, sources: &Sources, rule: usize) -> Value {
    let mut text = finding.message.clone();
    for help in &finding.helps {
        text.push_str("\nhelp: ");
        text.push_str(help);
    }
    let mut result = json!({
        "ruleId": finding.code,
        "ruleIndex": rule,
        "level": level(finding.severity),
        "message": { "text": text },
    });
    if let Some(label) = &finding.primary {
        result["locations"] = json!([{ "physicalLocation": physical(label.span, sources) }]);
    }
    if !finding.secondary.is_empty() {
        let related = |(id, label): (usize, &Label)| {
            json!({
                "id": id,
                "physicalLocation": physical(label.span, sources),
                "message": { "text": label.text },
            })
        };
        result["relatedLocations"] =
            Value::Array(finding.secondary.iter().enumerate().map(related).collect());
    }
    if let Some(fix) = &finding.fix {
        result["fixes"] = json!([{
            "description": { "text": finding.helps.first().map_or("replace", String::as_str) },
            "artifactChanges": [{
                "artifactLocation": { "uri": uri(&shown(&sources.get(fix.span.source).path)) },
                "replacements": [{
                    "deletedRegion": region(fix.span, sources),
                    "insertedContent": { "text": fix.replacement },
                }],
            }],
        }]);
    }
    result
}

fn physical(span: Span, sources: &Sources) -> Value {
    json!({
        "artifactLocation": { "uri": uri(&shown(&sources.get(span.source).path)) },
        "region": region(span, sources),
    })
}

fn region(span: Span, sources: &Sources) -> Value {
    let source = sources.get(span.source);
    let (start, end) = (source.position(span.start as usize), source.position(span.end as usize));
    json!({
        "startLine": start.line,
        "startColumn": start.column,
        "endLine": end.line,
        "endColumn": end.column,
    })
}

/// A path with forward slashes as a URI reference: what is not allowed in one is percent-encoded;
/// one with a drive or from the root names its scheme, so that `d:` is not taken for one.
fn uri(path: &str) -> String {
    let path = path.strip_prefix("./").unwrap_or(path);
    let drive = path.as_bytes().get(1) == Some(&b':');
    let mut out = match (path.starts_with('/'), drive) {
        (true, _) => "file://".to_owned(),
        (false, true) => "file:///".to_owned(),
        (false, false) => String::new(),
    };
    for (at, byte) in path.bytes().enumerate() {
        match byte {
            b'A'..=b'Z' | b'a'..=b'z' | b'0'..=b'9' | b'/' | b'-' | b'.' | b'_' | b'~' => {
                out.push(char::from(byte));
            }
            b':' if drive && at == 1 => out.push(':'),
            byte => out.push_str(&format!("%{byte:02X}")),
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn paths_are_uri_references() {
        for (path, expected) in [
            ("stacks/a b.stack", "stacks/a%20b.stack"),
            ("./a.stack", "a.stack"),
            ("/tmp/a.stack", "file:///tmp/a.stack"),
            ("d:/lab/µ.stack", "file:///d:/lab/%C2%B5.stack"),
            ("<stdin>", "%3Cstdin%3E"),
            ("a:b.stack", "file:///a:b.stack"),
        ] {
            assert_eq!(uri(path), expected);
        }
    }
}
