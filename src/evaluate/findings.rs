//! What evaluation itself has to say.

use std::sync::Arc;

use crate::design::{Design, OpticsModel, Season, VoltageModel};
use crate::evaluate::grid;
use crate::evaluate::junctions::fit_at;
use crate::evaluate::lit::{Lit, junction_gap};
use crate::finding::{Finding, Findings};
use crate::light::DATA_START_M;
use crate::materials::optics::Optics;
use crate::optics::model::layers_without_index;
use crate::results::Results;
use crate::units::number;

/// Share of a current from which held end values are worth a warning.
const HELD_SHARE: f64 = 1e-3;

/// Lights that end before currents start.
pub(super) fn too_short_waves(design: &Design) -> Findings {
    let mut findings = Findings::new();
    for condition in &design.conditions {
        let light = &condition.light;
        let Some((_, last)) = light.range_m().filter(|(_, last)| *last <= DATA_START_M) else { continue };
        let nm = |metres: f64| number(metres * 1e9);
        findings.push(
            Finding::error(
                "light.range",
                format!(
                    "`{}` ends at {} nm, before {} nm where currents start",
                    light.name,
                    nm(last),
                    nm(DATA_START_M)
                ),
            )
            .at(condition.span, format!("light `{}`", light.name))
            .help("give a spectrum that reaches the edges of the junctions, such as `AM1.5G`"),
        );
    }
    findings
}

/// A light of a season's table that drives no current.
pub(super) fn season_without_current(season: &Season, light: &str) -> Finding {
    let message = format!("`{light}` of `{}` reaches no junction's absorption", season.file);
    Finding::error("light.range", message)
        .at(season.span, "so there is no energy over it")
        .help("name a light that reaches the edges of the junctions, such as `AM1.5G`")
}

/// A season whose energy is no number.
pub(super) fn season_beyond(season: &Season) -> Finding {
    let message = format!("the energy over `{}` is beyond what can be computed", season.file);
    Finding::error("value.range", message)
        .at(season.span, "a row is beyond all measure")
        .help("bring light and temperature of its rows to what a cell can meet")
}

/// What the figures show.
pub(super) fn after(design: &Design, results: &Results, lit: &[Arc<Lit>]) -> Findings {
    let mut findings = Findings::new();
    findings.extend(no_index(design));
    if let Some(finding) = texture_in_one_pass(design) {
        findings.push(finding);
    }
    findings.extend(held_ends(design, results, lit));
    findings.extend(fits_below_the_limit(design, lit));
    findings.extend(no_sheet(design));
    findings
}

/// Waves asked for where a lit layer has no index to follow them by.
fn no_index(design: &Design) -> Findings {
    let mut findings = Findings::new();
    let OpticsModel::Interference { stated: Some(stated) } = design.optics else { return findings };
    let last = design.lit_layers().filter(|(_, layer)| layer.collects()).map(|(index, _)| index).last();
    for index in layers_without_index(design) {
        let layer = &design.layers[index];
        let Some(material) = &layer.material else { continue };
        // Without any optical data down to the last absorber a layer is reported in any case.
        if material.optics == Optics::None && Some(index) <= last {
            continue;
        }
        findings.push(
            Finding::warning(
                "optics.no-index",
                format!(
                    "`{}` has no refractive index for `{}`: one pass without reflection stands in for interference",
                    material.label, layer.path
                ),
            )
            .at(layer.spans.material, "nothing tells how this reflects")
            .beside(stated, "interference is asked for here")
            .help("give it `n` and `k`, or write `optics one_pass { front_reflectance 3 % }`"),
        );
    }
    findings
}

/// Faces that scatter where light goes straight through once.
fn texture_in_one_pass(design: &Design) -> Option<Finding> {
    let texture = design.texture?;
    let help = match (&design.optics, layers_without_index(design).first()) {
        (OpticsModel::OnePass { .. }, _) => "leave out `optics one_pass`".to_owned(),
        (_, Some(&layer)) => format!("give `{}` an index", design.layers[layer].path),
        _ => return None,
    };
    let message = "texture in one pass of light is not evaluated yet";
    Some(Finding::warning("feature.pending", message).at(texture.span, "has no effect here").help(help))
}

/// Current absorbed where a table's end value is held, worst condition of each layer. Beyond the
/// longest edge nothing is made of the light, so nothing is lost there.
fn held_ends(design: &Design, results: &Results, lit: &[Arc<Lit>]) -> Findings {
    let mut worst: Vec<Option<(f64, String)>> = vec![None; design.layers.len()];
    for (result, lit) in results.conditions.iter().zip(lit) {
        let useful: f64 = (0..lit.gap_ev.len()).map(|junction| lit.photocurrent(junction)).sum();
        for (row, first, last) in lit.optics.table_ranges_m() {
            let (layer, junction) = lit.rows[row];
            let whole = junction.map_or(useful, |junction| lit.photocurrent(junction));
            let held: f64 = (0..lit.useful_points())
                .filter(|&at| lit.wavelength_m[at] < first || lit.wavelength_m[at] > last)
                .map(|at| lit.shares.absorbed[row][at] * lit.current_weight[at])
                .sum();
            let share = if whole > 0.0 { held / whole } else { 0.0 };
            if share >= HELD_SHARE && worst[layer].as_ref().is_none_or(|(most, _)| share > *most) {
                worst[layer] = Some((share, result.name.clone()));
            }
        }
    }
    let mut findings = Findings::new();
    for (layer, worst) in design.layers.iter().zip(worst) {
        let (Some((share, condition)), Some(material)) = (worst, &layer.material) else { continue };
        let Some((first, last)) = material.optics.range(0.0) else { continue };
        let range = format!("{} to {} nm", number(first * 1e9), number(last * 1e9));
        findings.push(
            Finding::warning(
                "optics.data-range",
                format!(
                    "{} % of the current is absorbed in `{}` outside its optical data ({range}) under `{condition}`",
                    number(100.0 * share),
                    layer.path
                ),
            )
            .at(layer.spans.material, format!("`{}` has data over {range}", material.label))
            .help(format!(
                "give a material with data beyond that, or write `accept optics.data-range on {} because \"…\"`",
                layer.path
            )),
        );
    }
    findings
}

/// Fits whose dark current is less than their own junction must emit.
fn fits_below_the_limit(design: &Design, lit: &[Arc<Lit>]) -> Findings {
    let mut findings = Findings::new();
    for (index, junction) in design.junctions.iter().enumerate() {
        let VoltageModel::Fit(fit) = &junction.voltage else { continue };
        let below = design.conditions.iter().zip(lit).find_map(|(condition, lit)| {
            let gap_then = junction_gap(design, index, fit.at_k)?;
            let (j01, _) = fit_at(fit, gap_then, (condition, lit.gap_ev[index]));
            let limit = lit.emission[index].dark_a_per_m2();
            (j01 < limit).then_some((j01, limit, condition))
        });
        let Some((j01, limit, condition)) = below else { continue };
        let per_cm2 = |current: f64| number(1e-4 * current);
        let stated = fit.j01_a_per_m2 * limit / j01.max(f64::MIN_POSITIVE);
        findings.push(
            Finding::warning(
                "fit.below-radiative",
                format!(
                    "`j01` of `{}` is {} A/cm2 under `{}`, below the {} A/cm2 it must emit: the radiative limit is used",
                    junction.name.value,
                    per_cm2(j01),
                    condition.name,
                    per_cm2(limit)
                ),
            )
            .at(junction.voltage_span.unwrap_or(junction.span), "no junction recombines less than it radiates")
            .help(if fit.j01_a_per_m2 > 0.0 && stated.is_finite() {
                format!("write `j01 {} A/cm2` or more", per_cm2(stated * 1.001))
            } else {
                format!("write `j01 {} A/cm2` or more", per_cm2(limit * 1.001))
            }),
        );
    }
    findings
}

/// A grid whose resistance follows from its shape over layers that do not tell what they conduct.
fn no_sheet(design: &Design) -> Findings {
    let mut findings = Findings::new();
    let shape = design.fingers.as_ref().and_then(|fingers| Some((fingers, fingers.shape.as_ref()?)));
    let (Some((fingers, shape)), Some(condition)) = (shape, design.conditions.first()) else {
        return findings;
    };
    if grid::sheet_ohm(design, shape, condition.temperature_k).is_none() {
        findings.push(
            Finding::error("value.missing", "no front layer tells the sheet resistance under the fingers")
                .at(fingers.span, "needs doping and mobility of the emitter")
                .help("write `sheet_resistance 300 ohm/sq` in `fingers`"),
        );
    }
    findings
}
