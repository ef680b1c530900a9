//! What is asked of a stack: requirements, what is sought, charts, measurements, rules accepted
//! and thresholds set.

use crate::design::{Design, Limit, Requirement, Seek};
use crate::finding::{Finding, Severity};
use crate::resolve::properties::pending;
use crate::resolve::quantities::{Expected, Role};
use crate::resolve::tree::Body;
use crate::resolve::{Resolver, charts, measured, names};
use crate::source::Spanned;
use crate::syntax::{self, SeekTarget, Statement, Value};
use crate::units::{Dimension, parse};

/// Resolves every request of `body`; `conditions_whole` where every condition of the stack is right.
pub(super) fn requests<'s>(
    resolver: &mut Resolver<'_, 's>,
    design: &mut Design,
    body: &Body<'s>,
    conditions_whole: bool,
) {
    resolver.conditions_whole = conditions_whole;
    let here = resolver.scope.here();
    for (statement, frame) in &body.requests {
        resolver.scope.enter(*frame);
        match statement {
            Statement::Require(it) => require(resolver, design, it),
            Statement::Seek(it) => seek(resolver, design, it),
            Statement::Chart(it) => {
                if let Some(under) = conditions(resolver, design, &it.under) {
                    charts::chart(resolver, design, it, under);
                }
            }
            Statement::Vary(it) => vary(resolver, design, it),
            Statement::Measured(it) => {
                let named = it.under.as_ref().map(|under| {
                    conditions(resolver, design, std::slice::from_ref(under)).and_then(|_| {
                        design.conditions.iter().position(|condition| condition.name == under.value)
                    })
                });
                let first = (!design.conditions.is_empty()).then_some(0);
                measured::measured(resolver, design, it, named.unwrap_or(first));
            }
            Statement::Accept(it) => accept(resolver, design, it),
            Statement::Limit(it) => limit(resolver, design, it),
            _ => {}
        }
    }
    for statement in resolver.items.for_all.clone() {
        resolver.scope.enter(0);
        match statement {
            Statement::Accept(it) if reasoned(resolver, it) => design.file_accepts.push(it.clone()),
            Statement::Limit(it) => limit(resolver, design, it),
            _ => {}
        }
    }
    resolver.scope.close(here);
}

fn require(resolver: &mut Resolver<'_, '_>, design: &mut Design, it: &syntax::Require) {
    let under = conditions(resolver, design, &it.under);
    let at_yield = it.at_yield.as_ref().and_then(|value| {
        pending(
            &mut resolver.scope,
            Severity::Warning,
            "the yield against a requirement is",
            value.span,
            "read the verdict as that of the nominal design",
        );
        resolver.scope.quantity(value, Expected::new("yield", Dimension::NONE, Role::PositiveShare))
    });
    let bound = match measure(&it.metric.value) {
        Some((dimension, role)) => {
            let expected = Expected::new(&it.metric.value, dimension, role);
            resolver.scope.quantity(&it.bound, expected)
        }
        // A metric nobody knows is told where metrics are evaluated; its bound is read as it is.
        None => match resolver.scope.dimension(&it.bound) {
            Some((dimension, _)) => {
                let expected = Expected::new(&it.metric.value, dimension, Role::Any);
                resolver.scope.quantity(&it.bound, expected)
            }
            None => None,
        },
    };
    let (Some(bound), Some(under)) = (bound, under) else { return };
    design.requirements.push(Requirement {
        metric: it.metric.clone(),
        comparison: it.comparison.value,
        bound,
        bound_text: resolver.text(it.bound.span),
        under,
        at_yield,
        text: resolver.text(it.span),
        span: it.span,
    });
}

/// What a metric is compared in, and how its bound is written. Shares say `%`; a fill factor is
/// written either way.
fn measure(metric: &str) -> Option<(Dimension, Role)> {
    let dimension = crate::evaluate::metrics::dimension(metric)?;
    let word = metric.rsplit('.').next().unwrap_or(metric);
    let role = match word {
        "efficiency" => Role::Share,
        "current_mismatch" | "mismatch" => Role::Ratio,
        "gap" => Role::Gap,
        "voc_temperature_coefficient"
        | "jsc_temperature_coefficient"
        | "efficiency_temperature_coefficient" => Role::Any,
        "strain" | "voc" | "jsc" | "vmp" | "jmp" | "voltage_at_mpp" | "power" => Role::Any,
        _ => Role::NotNegative,
    };
    Some((dimension, role))
}

/// Names after `under`, each one of the stack's conditions; `None` where one is not.
fn conditions(
    resolver: &mut Resolver<'_, '_>,
    design: &Design,
    under: &[Spanned<String>],
) -> Option<Vec<Spanned<String>>> {
    let mut whole = true;
    for name in under {
        if design.condition(&name.value).is_some() {
            continue;
        }
        whole = false;
        if let Some(item) = resolver.items.conditions.get(&name.value) {
            // A condition of the file that was wrong has been reported where it stands.
            if !resolver.conditions_whole || resolver.condition(&name.value).is_none() {
                continue;
            }
            let word = &name.value;
            resolver.scope.report(
                Finding::error(
                    "name.unknown",
                    format!("stack `{}` does not work under `{word}`", design.name.value),
                )
                .at(name.span, "not one of the stack's conditions")
                .beside(item.name.span, "stated here")
                .help(format!("write `{word}` behind `conditions` of the stack")),
            );
            continue;
        }
        let own = design.conditions.iter().map(|condition| condition.name.as_str());
        let list: Vec<String> = own.clone().map(|name| format!("`{name}`")).collect();
        let known = own.chain(resolver.items.conditions.all.iter().map(|item| item.name.value.as_str()));
        let finding = names::unknown(
            "condition",
            name,
            known,
            &match list.is_empty() {
                true => "name the stack's conditions first, such as `conditions noon`".to_owned(),
                false => format!("write one of {}", list.join(", ")),
            },
        );
        resolver.scope.report(finding);
    }
    whole.then(|| under.to_vec())
}

fn seek(resolver: &mut Resolver<'_, '_>, design: &mut Design, it: &syntax::Seek) {
    conditions(resolver, design, &it.under);
    let weighed: Vec<Spanned<String>> = it.weighing.iter().map(|(name, _)| name.clone()).collect();
    conditions(resolver, design, &weighed);
    for (name, weight) in &it.weighing {
        let slot = format!("weight of `{}`", name.value);
        resolver.scope.quantity(weight, Expected::new(&slot, Dimension::NONE, Role::NotNegative));
    }
    if let SeekTarget::Equal(value) = &it.target
        && let Some((dimension, role)) = measure(&it.metric.value)
    {
        resolver.scope.quantity(value, Expected::new(&it.metric.value, dimension, role));
    }
    pending(
        &mut resolver.scope,
        Severity::Advice,
        "settling free values is",
        it.span,
        "write the values you want to see evaluated",
    );
    design.seek.push(Seek { text: resolver.text(it.span), span: it.span });
}

fn vary(resolver: &mut Resolver<'_, '_>, design: &mut Design, it: &syntax::Vary) {
    if it.tolerance.meaning.is_none() {
        let text = resolver.text(it.tolerance.span);
        resolver.scope.report(
            Finding::error("value.missing", format!("`{text}` does not say what it means"))
                .at(it.tolerance.span, "one standard deviation, or limits?")
                .help(format!("write `{text} sigma` for one standard deviation, or `{text} limits`")),
        );
    }
    pending(
        &mut resolver.scope,
        Severity::Advice,
        "tolerances that vary together are",
        it.span,
        "read the figures as those of the nominal design",
    );
    design.vary_together.push(Spanned::new(resolver.text(it.span), it.span));
}

fn accept(resolver: &mut Resolver<'_, '_>, design: &mut Design, it: &syntax::Accept) {
    reasoned(resolver, it);
    design.accepts.push(it.clone());
}

/// Whether it says why; if not, that is reported.
fn reasoned(resolver: &mut Resolver<'_, '_>, it: &syntax::Accept) -> bool {
    let given = it.because.as_ref().is_some_and(|reason| !reason.value.trim().is_empty());
    if !given {
        let code = &it.code.value;
        resolver.scope.report(
            Finding::error("accept.no-reason", format!("`accept {code}` gives no reason"))
                .at(it.because.as_ref().map_or(it.span, |reason| reason.span), "why is it accepted?")
                .help("write why at its end, such as `because \"graded buffer relaxes it\"`"),
        );
    }
    given
}

fn limit(resolver: &mut Resolver<'_, '_>, design: &mut Design, it: &syntax::Limit) {
    let threshold = crate::check::rule(&it.code.value).and_then(|rule| rule.threshold);
    let unit = threshold.and_then(|threshold| parse(threshold.unit).ok());
    let slot = format!("limit {}", it.code.value);
    let value = match unit {
        Some(unit) => {
            let role = if unit.dimension.is_none() { Role::Ratio } else { Role::Any };
            resolver.scope.quantity(&it.value, Expected::new(&slot, unit.dimension, role))
        }
        // A code without a threshold is told where rules are known.
        None => plain(resolver, &slot, &it.value),
    };
    let Some(value) = value else { return };
    design.limits.push(Limit {
        code: it.code.clone(),
        value,
        text: resolver.text(it.value.span),
        span: it.span,
    });
}

/// A value of whatever dimension it has.
fn plain(resolver: &mut Resolver<'_, '_>, slot: &str, value: &Value) -> Option<f64> {
    let (dimension, _) = resolver.scope.dimension(value)?;
    resolver.scope.quantity(value, Expected::new(slot, dimension, Role::Any))
}
