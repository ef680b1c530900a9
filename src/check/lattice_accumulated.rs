//! `lattice.accumulated`: strained layers, each thin enough, that add up to too much.

use super::lattice_mismatch::{self, relaxing};
use super::show::{count, length, significant};
use super::{Context, Report, Rule, Threshold};
use crate::design::{Layer, Strain};
use crate::finding::{Finding, Severity};
use crate::growth::accumulated::{Region, Step, coherent_strain_thickness, regions};
use crate::growth::balance::{Balanced, zero_stress_thickness};
use crate::growth::critical::Critical;
use crate::growth::order;

pub(super) static RULE: Rule = Rule {
    code: "lattice.accumulated",
    severity: Severity::Warning,
    title: "strained layers add up to more than stays coherent",
    threshold: Some(Threshold {
        default: 1.0,
        unit: "%",
        meaning: "net strain times thickness, as a share of what stays coherent",
    }),
    needs_results: false,
    run,
};

/// A layer on the ground at hand, in growth order.
struct Stacked {
    layer: usize,
    step: Step,
}

fn run(context: &Context, report: &mut Report) {
    let (design, fits) = (context.design, context.threshold(&lattice_mismatch::RULE));
    let reported = relaxing(context);
    let mut ground: Option<usize> = None;
    let mut stacked: Vec<Stacked> = Vec::new();
    for index in order(design) {
        let Some(state) = context.lattice[index] else { continue };
        let Some(beneath) = state.beneath else { continue };
        if ground != Some(beneath) {
            judge(context, report, &stacked);
            (ground, stacked) = (Some(beneath), Vec::new());
        }
        let layer = &design.layers[index];
        let counts = layer.strain != Strain::Relaxed
            && state.mismatch_at_growth.abs() > fits
            && !reported.contains(&index);
        let mismatch = if counts { state.mismatch_at_growth } else { 0.0 };
        let thickness_m = layer.thickness_m.unwrap_or(0.0);
        stacked.push(Stacked { layer: index, step: Step { mismatch, thickness_m } });
    }
    judge(context, report, &stacked);
}

/// Reports the regions on one ground whose strain is too much.
fn judge(context: &Context, report: &mut Report, stacked: &[Stacked]) {
    let steps: Vec<Step> = stacked.iter().map(|it| it.step).collect();
    for region in regions(&steps) {
        let layers = &stacked[region.steps.clone()];
        let strained: Vec<usize> =
            layers.iter().filter(|it| it.step.mismatch != 0.0).map(|it| it.layer).collect();
        // One layer by itself is `lattice.mismatch`.
        if strained.len() < 2 {
            continue;
        }
        if let Some(finding) = finding(context, &region, layers, &strained) {
            report.push(strained.iter().map(|index| context.design.layers[*index].path.as_str()), finding);
        }
    }
}

fn finding(context: &Context, region: &Region, layers: &[Stacked], strained: &[usize]) -> Option<Finding> {
    let design = context.design;
    let first = strained.first()?;
    let critical = Critical::of(design, &context.lattice, *first)?;
    let allowed = context.threshold(&RULE)
        * coherent_strain_thickness(region.height_m, critical.poisson, critical.step_m);
    let net = region.strain_thickness_m.abs();
    if net <= allowed {
        return None;
    }
    let passes = crossing(region, layers, allowed)?;
    let (bottom, here) = (&design.layers[*first], &design.layers[layers[passes].layer]);
    let finding = Finding::warning(
        RULE.code,
        format!(
            "{} from `{}` to `{}` add up to a strain times thickness of {}, beyond the {} that stay coherent",
            count(strained.len(), "strained layer"),
            bottom.path,
            design.layers[*strained.last()?].path,
            length(net),
            length(allowed)
        ),
    )
    .at(here.spans.statement, format!("here it is {}", length(allowed)))
    .help(help(context, region, layers, passes));
    Some(if bottom.spans.statement == here.spans.statement {
        finding
    } else {
        finding.beside(bottom.spans.statement, "the strain begins here")
    })
}

/// The first layer, counted in `layers`, with which the net strain passes `allowed`.
fn crossing(region: &Region, layers: &[Stacked], allowed: f64) -> Option<usize> {
    let sign = region.strain_thickness_m.signum();
    let mut sum = 0.0;
    layers.iter().position(|it| {
        sum += sign * it.step.mismatch * it.step.thickness_m;
        sum > allowed
    })
}

/// The thickness of the opposite layers that balances the strain, where there are such layers of
/// one material; else how many may stay.
fn help(context: &Context, region: &Region, layers: &[Stacked], passes: usize) -> String {
    let sign = region.strain_thickness_m.signum();
    let adds = |it: &&Stacked| it.step.mismatch * sign > 0.0;
    if let Some(text) = balanced(context, layers, sign) {
        return text;
    }
    let may_stay = layers[..passes].iter().filter(adds).count();
    let other = if sign > 0.0 { "smaller" } else { "larger" };
    match may_stay {
        0 => format!("thin it, or grow layers with a {other} lattice between that balance the strain"),
        _ => format!(
            "keep {} of them, or grow layers with a {other} lattice between that balance the strain",
            significant(may_stay as f64, 3)
        ),
    }
}

fn balanced(context: &Context, layers: &[Stacked], sign: f64) -> Option<String> {
    let of_sign = |sign: f64| layers.iter().find(move |it| it.step.mismatch * sign > 0.0).map(|it| it.layer);
    let (adding, taking) = (of_sign(sign)?, of_sign(-sign)?);
    let design = context.design;
    let state = context.lattice[adding]?;
    let temperature_k = state.growth_temperature_k;
    let ground = design.layers[state.beneath?].material.as_ref()?.lattice_constant(temperature_k)?;
    let of = |layer: &Layer| -> Option<Balanced> {
        let material = layer.material.as_ref()?;
        Some(Balanced { lattice: material.lattice_constant(temperature_k)?, elastic: material.elastic? })
    };
    let (well, barrier) = (&design.layers[adding], &design.layers[taking]);
    let thickness = zero_stress_thickness(of(well)?, well.thickness_m?, of(barrier)?, ground)?;
    let label = &barrier.material.as_ref()?.label;
    Some(format!(
        "make `{label}` {} thick beside {} of `{}`: together they pull on nothing",
        length(thickness),
        length(well.thickness_m?),
        well.material.as_ref()?.label
    ))
}
