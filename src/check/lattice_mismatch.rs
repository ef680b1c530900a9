//! `lattice.mismatch`: a layer too thick to stay coherent on the lattice it is grown on.
//!
//! Criterion: neighbours in growth order that are off by the same amount count as one slab. A
//! slab is reported when its relaxed mismatch at growth temperature is beyond the threshold and it
//! is thicker than Matthews and Blakeslee's critical thickness of an uncovered layer (every layer
//! is uncovered while it grows): a warning, since growth often overshoots it; an error beyond
//! People and Bean's estimate.

use super::families::matched;
use super::junctions::describe;
use super::show::{celsius, count, length, percent, significant};
use super::{Context, Report, Rule, Threshold};
use crate::design::{Layer, Strain};
use crate::finding::{Finding, Severity};
use crate::growth::critical::Critical;
use crate::growth::{LayerGrowth, order};
use crate::materials::Material;

pub(super) static RULE: Rule = Rule {
    code: "lattice.mismatch",
    severity: Severity::Error,
    title: "a layer does not fit the lattice beneath",
    threshold: Some(Threshold { default: 1e-3, unit: "%", meaning: "the relaxed mismatch" }),
    needs_results: false,
    run,
};

/// Share of the threshold that holds for an alloy another composition of which fits.
const NEAR_MISS: f64 = 0.5;

/// Nobody grows a closed layer thinner than this, m.
const LEAST_LAYER_M: f64 = 3e-9;

/// Layers that follow each other in growth and are off by the same amount.
struct Slab {
    layers: Vec<usize>,
    beneath: usize,
    mismatch: f64,
}

fn run(context: &Context, report: &mut Report) {
    judge(context, report, RULE.code, |strain| strain == Strain::Unstated);
}

/// Reports the slabs of layers whose strain is said as `speaks` wants it; of the steps of one
/// graded statement only the first.
pub(super) fn judge(context: &Context, report: &mut Report, code: &'static str, speaks: fn(Strain) -> bool) {
    let mut told = None;
    for (slab, thickness, critical) in too_thick(context, speaks) {
        let layers: Vec<&Layer> = slab.layers.iter().map(|index| &context.design.layers[*index]).collect();
        let statement = layers.first().map(|layer| layer.spans.statement);
        if std::mem::replace(&mut told, statement) == statement {
            continue;
        }
        let severity = if critical.hopeless_m.is_none_or(|most| thickness > most) {
            Severity::Error
        } else {
            Severity::Warning
        };
        if let Some(finding) = finding(context, &slab, (code, severity), (thickness, critical.safe_m)) {
            report.push(layers.iter().map(|layer| layer.path.as_str()), finding);
        }
    }
}

/// The layers that are too thick by themselves, whatever is said of their strain.
pub(super) fn relaxing(context: &Context) -> Vec<usize> {
    let slabs = too_thick(context, |strain| strain != Strain::Relaxed);
    slabs.into_iter().flat_map(|(slab, ..)| slab.layers).collect()
}

/// The slabs that are thicker than what stays coherent, with their thickness.
fn too_thick(context: &Context, speaks: fn(Strain) -> bool) -> Vec<(Slab, f64, Critical)> {
    let design = context.design;
    let judged = slabs(context, speaks).into_iter().filter_map(|slab| {
        let thickness: f64 = slab.layers.iter().filter_map(|index| design.layers[*index].thickness_m).sum();
        let critical = Critical::of(design, &context.lattice, *slab.layers.first()?)?;
        // Less than a step of the lattice is no layer yet: dots and wetting layers start so.
        let most = critical.safe_m.unwrap_or(0.0).max(critical.step_m);
        (thickness > most).then_some((slab, thickness, critical))
    });
    judged.collect()
}

/// Whether another composition of the layer's own alloy fits: then a small mismatch is a slip of
/// composition. An alloy that only fits as one of its end members is as near as it gets.
fn could_match(context: &Context, index: usize, beneath: usize) -> bool {
    let (design, state) = (context.design, context.lattice[index]);
    let of = |at: usize| design.layers[at].material.as_ref();
    let found = of(index)
        .zip(of(beneath))
        .zip(state)
        .and_then(|((material, ground), state)| matched(material, ground, state.growth_temperature_k));
    found.is_some_and(|(label, _)| is_mixed(&label))
}

/// Whether a label is that of a mixture and not of an end member.
fn is_mixed(label: &str) -> bool {
    label.contains(|c: char| c.is_ascii_digit())
}

/// The coherent slabs beyond the threshold, in growth order.
fn slabs(context: &Context, speaks: fn(Strain) -> bool) -> Vec<Slab> {
    let limit = context.threshold(&RULE);
    let mut slabs: Vec<Slab> = Vec::new();
    let mut open = false;
    for index in order(context.design) {
        let Some(state) = &context.lattice[index] else { continue };
        let LayerGrowth { beneath: Some(beneath), mismatch_at_growth: mismatch, .. } = *state else {
            continue;
        };
        let layer = &context.design.layers[index];
        let allowed = if mismatch.abs() > NEAR_MISS * limit && could_match(context, index, beneath) {
            NEAR_MISS * limit
        } else {
            limit
        };
        if !speaks(layer.strain) || mismatch.abs() <= allowed {
            open = false;
            continue;
        }
        match slabs.last_mut() {
            Some(slab) if open && slab.beneath == beneath && (slab.mismatch - mismatch).abs() <= limit => {
                slab.layers.push(index);
            }
            _ => slabs.push(Slab { layers: vec![index], beneath, mismatch }),
        }
        open = true;
    }
    slabs
}

fn finding(
    context: &Context,
    slab: &Slab,
    (code, severity): (&'static str, Severity),
    (thickness, safe): (f64, Option<f64>),
) -> Option<Finding> {
    let design = context.design;
    let first = *slab.layers.first()?;
    let (layer, ground) = (&design.layers[first], &design.layers[slab.beneath]);
    let (material, beneath) = (layer.material.as_ref()?, ground.material.as_ref()?);
    let temperature_k = context.lattice[first]?.growth_temperature_k;
    let constant = |of: &Material| of.lattice_constant(temperature_k).map(|a| format!("{a:.4} Å"));
    let with = match slab.layers.len() - 1 {
        0 => String::new(),
        more => format!(" with {} above it", count(more, "layer")),
    };
    let stays = match safe {
        Some(safe) => {
            format!("{}{with} is beyond the {} that stay coherent", length(thickness), length(safe))
        }
        None => format!("{}{with} cannot stay coherent", length(thickness)),
    };
    let mut finding = Finding::new(
        severity,
        code,
        format!(
            "{} is {} {} than {} at {}: {stays}",
            describe(design, layer),
            percent(slab.mismatch.abs()),
            if slab.mismatch > 0.0 { "larger" } else { "smaller" },
            describe(design, ground),
            celsius(temperature_k),
        ),
    )
    .at(layer.spans.material, format!("lattice constant {}", constant(material)?))
    .beside(ground.spans.material, format!("the lattice beneath, {}", constant(beneath)?));
    for more in &slab.layers[1..] {
        finding = finding.beside(design.layers[*more].spans.material, "off by the same amount");
    }
    let thin =
        safe.filter(|safe| *safe >= LEAST_LAYER_M).map(|safe| format!("keep it below {}", whole_nm(safe)));
    if code == super::lattice_critical_thickness::RULE.code {
        let thin = thin.map_or_else(String::new, |thin| format!("{thin}, or "));
        return Some(
            finding.help(format!("{thin}write `relaxed` for `pseudomorphic` if it is meant to relax")),
        );
    }
    let found = matched(material, beneath, temperature_k);
    Some(match (found, thin) {
        // A whole alloy, such as GaInP on GaAs; an alloy that only fits as one of its end members
        // was meant to be strained.
        (Some((label, phrase)), _) if is_mixed(&label) => finding
            .help(format!("`{label}` matches; write `{phrase}`"))
            .fix(layer.spans.material, phrase, false),
        (Some((label, _)), Some(thin)) => finding.help(format!("{thin}, or write `{label}`, which matches")),
        (_, Some(thin)) => {
            finding.help(format!("{thin}, or grow it on {}", own_ground(material, constant(material)?)))
        }
        _ => finding.help(format!("grow it on {}", own_ground(material, constant(material)?))),
    })
}

/// `16 nm`, rounded down.
fn whole_nm(metres: f64) -> String {
    format!("{} nm", significant((metres * 1e9).floor(), 3))
}

/// What a layer would fit on.
fn own_ground(material: &Material, constant: String) -> String {
    match material.family {
        None => format!("`{}` or a relaxed buffer of {constant}", material.name),
        Some(_) => format!("a relaxed buffer of {constant}"),
    }
}
