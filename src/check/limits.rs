//! `limit CODE value`: whether the code is one and has a threshold. The value itself was judged
//! when it was read.

use super::{RULES, rule};
use crate::design::Design;
use crate::finding::suggest::near;
use crate::finding::{Finding, Findings};
use crate::source::Spanned;
use crate::why;

/// Reports limits that set nothing.
pub(super) fn check(design: &Design) -> Findings {
    let mut findings = Findings::new();
    for limit in &design.limits {
        let code = &limit.code.value;
        let Some(rule) = rule(code) else {
            findings.push(if is_known(code) {
                without_threshold(&limit.code)
            } else {
                unknown_code(&limit.code)
            });
            continue;
        };
        if rule.threshold.is_none() {
            findings.push(without_threshold(&limit.code));
        }
    }
    findings
}

/// Whether any pass can report this code.
pub(super) fn is_known(code: &str) -> bool {
    rule(code).is_some() || why::page(code).is_some()
}

/// A code nobody reports.
pub(super) fn unknown_code(code: &Spanned<String>) -> Finding {
    let finding = Finding::error("name.unknown", format!("`{}` is no code of a finding", code.value))
        .at(code.span, "unknown code");
    let known = RULES.iter().map(|rule| rule.code).chain(why::PAGES.iter().map(|(code, _)| *code));
    match near(&code.value, known) {
        Some(known) => finding.help(format!("write `{known}`")).fix(code.span, known, false),
        None => finding.help("`bandloom why` lists every code"),
    }
}

fn without_threshold(code: &Spanned<String>) -> Finding {
    let adjustable: Vec<String> =
        RULES.iter().filter(|rule| rule.threshold.is_some()).map(|rule| format!("`{}`", rule.code)).collect();
    Finding::error("name.unknown", format!("`{}` has no threshold to set", code.value))
        .at(code.span, "judges by no number")
        .help(format!("thresholds can be set for {}", adjustable.join(", ")))
}
