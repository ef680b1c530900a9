//! `optics.coherent-thick`: waves or fluxes where a layer's thickness says the other.

use super::junctions::describe;
use super::show::length;
use super::{Context, Report, Rule};
use crate::design::{Design, Duty, Layer, OpticsModel};
use crate::finding::{Finding, Severity};
use crate::numerics::constants::HC_EV;
use crate::optics::interference::THICK_M;
use crate::optics::model::layers_without_index;

pub(super) static RULE: Rule = Rule {
    code: "optics.coherent-thick",
    severity: Severity::Advice,
    title: "a layer's light is added in a way its thickness does not bear out",
    threshold: None,
    needs_results: false,
    run,
};

/// Above this a film is seldom even to a tenth of a wave across a cell, m: one part in a hundred.
const UNEVEN_M: f64 = 5e-6;

fn run(context: &Context, report: &mut Report) {
    let design = context.design;
    let waves = matches!(design.optics, OpticsModel::Interference { .. });
    if !waves || context.has_faults() || !layers_without_index(design).is_empty() {
        return;
    }
    let Some(edge_m) = longest_edge_m(design) else { return };
    for (_, layer) in design.lit_layers() {
        let Some(thickness_m) = layer.thickness_m.filter(|thickness| *thickness <= THICK_M) else { continue };
        if layer.duty == Duty::Wafer {
            report.push(
                [layer.path.as_str()],
                Finding::warning(
                    RULE.code,
                    format!(
                        "{} is {} thick, and light in it is added without interference as in any wafer",
                        describe(design, layer),
                        length(thickness_m)
                    ),
                )
                .at(layer.spans.material, "so thin a layer shows fringes")
                .help("state the thickness of a whole wafer, such as `350 um`, or write `layer` in place of `wafer`"),
            );
        } else if let Some(spacing_m) = fringes(layer, (edge_m, thickness_m)) {
            report.push(
                [layer.path.as_str()],
                Finding::advice(
                    RULE.code,
                    format!(
                        "fringes in {} of {} stand {} apart at {}, and wash out where its thickness varies by one in a hundred",
                        describe(design, layer),
                        length(thickness_m),
                        length(spacing_m),
                        length(edge_m)
                    ),
                )
                .at(layer.spans.material, "followed as a wave")
                .help(format!("make it thicker than {} to have fluxes added, or thinner than {}", length(THICK_M), length(UNEVEN_M))),
            );
        }
    }
}

/// Where the last junction stops absorbing, m.
fn longest_edge_m(design: &Design) -> Option<f64> {
    let collecting = design.lit_layers().filter(|(_, layer)| layer.collects());
    let gaps = collecting.filter_map(|(_, layer)| layer.material.as_ref()?.gap(298.15));
    gaps.map(|gap| gap.ev).filter(|gap| *gap > 0.0).min_by(f64::total_cmp).map(|gap| HC_EV / gap)
}

/// How far apart the fringes of an uneven film are that is clear at that wavelength, `λ²/(2nd)`, m.
fn fringes(layer: &Layer, (edge_m, thickness_m): (f64, f64)) -> Option<f64> {
    let (n, k) = layer.material.as_ref()?.optics.index(edge_m, 0.0)?;
    let depth = 4.0 * std::f64::consts::PI * k / edge_m * thickness_m;
    (thickness_m > UNEVEN_M && depth < 1.0).then(|| edge_m * edge_m / (2.0 * n * thickness_m))
}
