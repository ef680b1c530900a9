//! Expected findings as comments, strict both ways.
//!
//! `//~ error[gap.order] 3-10: start of the message` on the lines directly above the line it
//! points to: severity, code, columns of the primary label's first line (characters from 1, end
//! exclusive), and how the message starts. Without columns at the end of the file: a finding that
//! has no place.

use std::fmt;

use bandloom::finding::Finding;
use bandloom::source::Source;

/// A finding reduced to what a fixture states. Line 0: no place.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(crate) struct Stated {
    pub(crate) line: usize,
    pub(crate) columns: Option<(usize, usize)>,
    pub(crate) severity: String,
    pub(crate) code: String,
    pub(crate) message: String,
}

impl fmt::Display for Stated {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Self { severity, code, message, .. } = self;
        match self.columns {
            Some((start, end)) => write!(f, "//~ {severity}[{code}] {start}-{end}: {message}"),
            None => write!(f, "//~ {severity}[{code}]: {message}"),
        }
    }
}

impl Stated {
    /// What `finding` would be stated as.
    pub(crate) fn of(finding: &Finding, source: &Source) -> Self {
        let place = finding.primary.as_ref().map(|label| {
            let start = source.position(label.span.start as usize);
            let end = source.position(label.span.end as usize);
            let column = if end.line == start.line {
                end.column
            } else {
                let line = source.text.lines().nth(start.line - 1).unwrap_or_default();
                line.chars().count() + 1
            };
            (start.line, (start.column, column))
        });
        Self {
            line: place.map_or(0, |(line, _)| line),
            columns: place.map(|(_, columns)| columns),
            severity: finding.severity.word().to_owned(),
            code: finding.code.to_owned(),
            message: finding.message.clone(),
        }
    }

    fn met_by(&self, found: &Self) -> bool {
        self.line == found.line
            && self.columns == found.columns
            && self.severity == found.severity
            && self.code == found.code
            && found.message.starts_with(&self.message)
    }
}

/// The expectations of one text.
pub(crate) fn read(text: &str) -> Result<Vec<Stated>, String> {
    let lines: Vec<&str> = text.lines().collect();
    let mut stated = Vec::new();
    for (index, line) in lines.iter().enumerate() {
        let Some(body) = line.trim_start().strip_prefix("//~") else { continue };
        let one = one(body.trim())
            .ok_or_else(|| format!("line {}: `//~` wants `severity[code] start-end: message`", index + 1))?;
        let below = lines[index + 1..].iter().position(|line| !line.trim_start().starts_with("//~"));
        let line = match (one.columns, below) {
            (None, _) => 0,
            (Some(_), Some(skip)) => index + 1 + skip + 1,
            (Some(_), None) => lines.len() + 1,
        };
        stated.push(Stated { line, ..one });
    }
    Ok(stated)
}

fn one(body: &str) -> Option<Stated> {
    let (head, message) = body.split_once(": ").or_else(|| body.strip_suffix(':').map(|head| (head, "")))?;
    let (kind, columns) = match head.split_once(' ') {
        Some((kind, columns)) => {
            let (start, end) = columns.trim().split_once('-')?;
            (kind, Some((start.parse().ok()?, end.parse().ok()?)))
        }
        None => (head, None),
    };
    let (severity, code) = kind.strip_suffix(']')?.split_once('[')?;
    Some(Stated {
        line: 0,
        columns,
        severity: severity.to_owned(),
        code: code.to_owned(),
        message: message.trim().to_owned(),
    })
}

/// Every stated finding found, every found one stated.
pub(crate) fn compare(stated: &[Stated], found: &[Stated]) -> Result<(), String> {
    let mut left: Vec<&Stated> = found.iter().collect();
    let mut trouble = Vec::new();
    for wanted in stated {
        match left.iter().position(|found| wanted.met_by(found)) {
            Some(index) => {
                left.remove(index);
            }
            None => trouble.push(format!("expected, not found: line {}: {wanted}", wanted.line)),
        }
    }
    trouble.extend(left.iter().map(|found| format!("found, not expected: line {}: {found}", found.line)));
    if trouble.is_empty() { Ok(()) } else { Err(trouble.join("\n")) }
}

/// `text` with its `//~` lines replaced by what was found.
pub(crate) fn rewrite(text: &str, found: &[Stated]) -> String {
    // The line numbers found count the old `//~` lines.
    let mut out = String::new();
    let put = |out: &mut String, indent: &str, one: &Stated| {
        out.push_str(indent);
        out.push_str(&one.to_string());
        out.push('\n');
    };
    let mut last = 0;
    for (index, line) in text.split_inclusive('\n').enumerate() {
        last = index + 1;
        if line.trim_start().starts_with("//~") {
            continue;
        }
        let indent = &line[..line.len() - line.trim_start_matches([' ', '\t']).len()];
        for one in found.iter().filter(|one| one.line == index + 1) {
            put(&mut out, indent, one);
        }
        out.push_str(line);
    }
    let rest = found.iter().filter(|one| one.line > last || one.line == 0);
    for one in rest {
        if !out.is_empty() && !out.ends_with('\n') {
            out.push('\n');
        }
        put(&mut out, "", one);
    }
    out
}
