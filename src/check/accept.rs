//! `accept CODE on PATH because "…"`: takes findings out, and reports what took nothing out.

use super::{Accepted, Checked, Context, Found, Report, rule};
use crate::design::{Accept, Design};
use crate::finding::{Finding, Findings};
use crate::source::Span;

const CODE: &str = "accept.unused";

/// Splits what was found into what stands and what is accepted.
pub(super) fn sort_out(context: &Context, report: Report) -> Checked {
    let design = context.design;
    // Those of the stack come first: they are closer.
    let all: Vec<&Accept> = design.accepts.iter().chain(&design.file_accepts).collect();
    let mut used = vec![false; all.len()];
    let mut checked = Checked::default();
    for found in report.found {
        match all.iter().position(|accept| covers(design, accept, &found)) {
            Some(at) => {
                used[at] = true;
                let because = all[at].because.as_ref().map(|text| text.value.clone());
                let accepted = Accepted { finding: found.finding, because: because.unwrap_or_default() };
                if !checked.accepted.contains(&accepted) {
                    checked.accepted.push(accepted);
                }
            }
            None => checked.findings.push(found.finding),
        }
    }
    let file = design.accepts.len();
    checked.findings.extend(unused(context, &used[..file]));
    for accept in design.file_accepts.iter().filter(|accept| !super::limits::is_known(&accept.code.value)) {
        checked.findings.push(super::limits::unknown_code(&accept.code));
    }
    let of_file = design.file_accepts.iter().zip(&used[file..]);
    checked.of_file = of_file
        .map(|(accept, used)| Settled { accept: accept.span, used: *used || !may_judge(context, accept) })
        .collect();
    checked
}

/// Whether an `accept` of the whole file did something in one stack.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Settled {
    /// The statement.
    pub accept: Span,
    /// Whether it took something out, or nobody can tell.
    pub used: bool,
}

/// What an `accept` of the whole file says that took nothing out of any of its stacks.
pub(crate) fn unused_in_file(designs: &[(&Design, &[Settled])]) -> Findings {
    let Some((first, settled)) = designs.first() else { return Findings::new() };
    let idle = first.file_accepts.iter().zip(settled.iter()).filter(|(_, own)| {
        designs.iter().all(|(_, other)| other.iter().all(|it| it.accept != own.accept || !it.used))
    });
    let known = idle.filter(|(accept, _)| super::limits::is_known(&accept.code.value));
    Findings(known.map(|(accept, _)| of_nothing(accept, "in any stack of the file", None)).collect())
}

/// Whether everything was looked at that `accept` could have silenced.
fn may_judge(context: &Context, accept: &Accept) -> bool {
    // What would have been found may lie where something could not be read, and without figures
    // what only evaluation can find is still to come.
    let evaluated = rule(&accept.code.value).is_some_and(|rule| !rule.needs_results);
    !context.has_faults() && (context.results.is_some() || evaluated)
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
        if !may_judge(context, accept) {
            continue;
        }
        let wrong = accept.on.as_ref().filter(|on| place_of(design, &on.value).is_none());
        let help = wrong
            .map(|on| format!("`{}` names nothing in `{}`; correct the path", on.value, design.name.value));
        findings.push(of_nothing(accept, "", help));
    }
    findings
}

/// An `accept` that takes nothing out; without `help` it can go.
fn of_nothing(accept: &Accept, whole: &str, help: Option<String>) -> Finding {
    let code = &accept.code.value;
    let place = accept.on.as_ref().map_or_else(String::new, |on| format!(" on `{}`", on.value));
    let whole = if whole.is_empty() { String::new() } else { format!(" {whole}") };
    let finding = Finding::warning(
        CODE,
        format!("`{code}` is accepted{place}, but nothing of the kind is found{whole}"),
    )
    .at(accept.span, "accepts nothing");
    match help {
        Some(help) => finding.help(help),
        None => finding.help("remove the line").fix(accept.span, "", true),
    }
}
