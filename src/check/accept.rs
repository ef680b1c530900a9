//! `accept CODE on PATH because "…"`: takes findings out, and reports what took nothing out.

use super::{Accepted, Checked, Context, Found, Report, rule};
use crate::design::{Accept, Design};
use crate::finding::{Finding, Findings};
use crate::source::Span;

const CODE: &str = "accept.unused";

/// Splits what was found into what stands and what is accepted.
pub(super) fn sort_out(context: &Context, report: Report) -> Checked {
    let design = context.design;
    let mut used = vec![false; design.accepts.len()];
    let mut checked = Checked::default();
    for found in report.found {
        match design.accepts.iter().position(|accept| covers(design, accept, &found)) {
            Some(at) => {
                used[at] = true;
                let because = design.accepts[at].because.as_ref().map(|text| text.value.clone());
                let accepted = Accepted { finding: found.finding, because: because.unwrap_or_default() };
                if !checked.accepted.contains(&accepted) {
                    checked.accepted.push(accepted);
                }
            }
            None => checked.findings.push(found.finding),
        }
    }
    checked.findings.extend(unused(context, &used));
    checked
}

/// Whether `accept` speaks of this finding: same code, and the path given is what the finding is
/// about, or holds it (`top` holds `top.base`).
fn covers(design: &Design, accept: &Accept, found: &Found) -> bool {
    // Without a reason it silences nothing; that has been reported.
    if accept.because.is_none() || accept.code.value != found.finding.code {
        return false;
    }
    let Some(on) = &accept.on else { return true };
    let within = |path: &str| {
        path == on.value || path.strip_prefix(on.value.as_str()).is_some_and(|rest| rest.starts_with('.'))
    };
    if found.about.iter().any(|path| within(path)) {
        return true;
    }
    // Findings of other passes carry no path: the place decides.
    found.about.is_empty()
        && place_of(design, &on.value).is_some_and(|place| {
            found.finding.primary.as_ref().is_some_and(|label| place.contains(label.span))
        })
}

/// Where what `path` names was written.
fn place_of(design: &Design, path: &str) -> Option<Span> {
    design
        .layer(path)
        .map(|layer| layer.spans.statement)
        .or_else(|| design.junction(path).map(|(_, junction)| junction.span))
        .or_else(|| design.condition(path).map(|condition| condition.span))
        .or_else(|| design.interconnects.iter().find(|it| it.name.value == path).map(|it| it.span))
        .or_else(|| design.free_values.iter().find(|free| free.path == path).map(|free| free.span))
        .or_else(|| design.requirements.iter().find(|require| require.metric.value == path).map(|it| it.span))
}

fn unused(context: &Context, used: &[bool]) -> Findings {
    let design = context.design;
    let mut findings = Findings::new();
    for (accept, _) in
        design.accepts.iter().zip(used).filter(|(accept, used)| !**used && accept.because.is_some())
    {
        let code = &accept.code.value;
        if !super::limits::is_known(code) {
            findings.push(super::limits::unknown_code(&accept.code));
            continue;
        }
        // What would have been found may lie where something could not be read.
        if context.has_faults() {
            continue;
        }
        // Without figures, what only evaluation can find is still to come.
        if context.results.is_none() && rule(code).is_none_or(|rule| rule.needs_results) {
            continue;
        }
        let place = accept.on.as_ref().map_or_else(String::new, |on| format!(" on `{}`", on.value));
        findings.push(
            Finding::warning(CODE, format!("`{code}` is accepted{place}, but nothing of the kind is found"))
                .at(accept.span, "accepts nothing")
                .help(match &accept.on {
                    Some(on) if place_of(design, &on.value).is_none() => {
                        format!("`{}` names nothing in `{}`; correct the path", on.value, design.name.value)
                    }
                    _ => "remove the line".to_string(),
                }),
        );
    }
    findings
}
