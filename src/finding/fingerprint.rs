//! One number for a finding that stays when lines move, so that services tell old from new.

use std::collections::HashMap;

use sha2::{Digest, Sha256};

use crate::finding::Finding;
use crate::source::{Sources, shown};

/// Fingerprints of one run: the code, the file and the words of the line, and for equal ones how
/// many came before.
#[derive(Debug, Default)]
pub(crate) struct Fingerprints {
    seen: HashMap<String, usize>,
}

impl Fingerprints {
    /// The next one, 32 hexadecimal digits.
    pub(crate) fn next(&mut self, finding: &Finding, sources: &Sources) -> String {
        let mut hash = Sha256::new();
        let mut put = |text: &str| {
            hash.update(text.as_bytes());
            hash.update([0]);
        };
        put(finding.code);
        if let Some(label) = &finding.primary {
            let source = sources.get(label.span.source);
            let line = source.position(label.span.start as usize).line;
            put(&shown(&source.path));
            let words = source.text.lines().nth(line - 1).unwrap_or_default();
            put(&words.split_whitespace().collect::<Vec<_>>().join(" "));
        } else {
            put(&finding.message);
        }
        let plain = hex(&hash.clone().finalize());
        let before = self.seen.entry(plain.clone()).or_default();
        *before += 1;
        if *before == 1 {
            return plain;
        }
        hash.update(before.to_string().as_bytes());
        hex(&hash.finalize())
    }
}

fn hex(bytes: &[u8]) -> String {
    bytes.iter().take(16).map(|byte| format!("{byte:02x}")).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::source::Span;

    #[test]
    fn stays_when_lines_move_and_is_never_given_twice() {
        let of = |text: &str, at: usize, times: usize| -> Vec<String> {
            let mut sources = Sources::default();
            let id = sources.add("a.stack", text);
            let finding = Finding::error("x.y", "m").at(Span::new(id, at, at + 1), "");
            let mut prints = Fingerprints::default();
            (0..times).map(|_| prints.next(&finding, &sources)).collect()
        };
        let first = of("base GaAs\n", 0, 3);
        assert_eq!(first[0], of("// more\n\n   base  GaAs\n", 12, 1)[0]);
        assert!(first[0] != first[1] && first[1] != first[2] && first[0] != first[2]);
        assert_ne!(first[0], of("base GaP\n", 0, 1)[0]);
    }
}
