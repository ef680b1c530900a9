//! [`Design`] → [`Results`]: the physics rooms, called in order for each condition.

pub mod bands;
mod charts;
mod coats;
mod collect;
mod condition;
mod coupling;
mod dark;
mod findings;
mod finite;
pub mod gap_map;
mod grid;
mod growth;
mod hash;
mod junctions;
mod layers;
mod ledger;
mod lit;
mod measured;
pub mod metrics;
mod models;
mod season;
mod spectral;
mod temperature;
mod transport;
mod tunnels;
mod wiring;

use std::sync::Arc;

use rayon::prelude::*;

use crate::design::{Condition, Design};
use crate::evaluate::condition::Detail;
use crate::evaluate::lit::Lit;
use crate::finding::Outcome;
use crate::materials::optics::Optics;
use crate::optics::model::MOST_LAYERS;
use crate::results::{ConditionResult, FreeValueResult, RequirementResult, Results, SCHEMA_VERSION};

pub use hash::design_hash;

/// Evaluates every condition of a design. `source` is the path shown in the numbers file.
///
/// There is no value where the design is not whole, all of which is reported elsewhere: a material
/// that could not be resolved, an absorber without a thickness (`value.missing`), a free value
/// without a number (`free.unsettled`), no junction or one without an absorber
/// (`structure.no-absorber`), light without photons (`light.range`), more layers than are evaluated (`structure.too-many`). Requirements are checked for
/// unknown metrics in any case. What is stated but not evaluated yet is reported by `resolve`.
pub fn evaluate(design: &Design, source: &str) -> Outcome<Results> {
    let mut findings = metrics::check(design);
    if !is_whole(design) {
        return Outcome::nothing(findings);
    }
    let around = warmer_and_colder(design);
    let mut lit = lit_by_condition(design, &around);
    let warmth = lit.split_off(design.conditions.len());
    let Some(lit) = lit.into_iter().collect::<Option<Vec<Arc<Lit>>>>() else {
        findings.extend(findings::too_short_waves(design));
        return Outcome::nothing(findings);
    };
    let mut conditions: Vec<ConditionResult> = design
        .conditions
        .par_iter()
        .zip(lit.par_iter())
        .map(|(condition, lit)| {
            let mut result = condition::condition_result(design, condition, lit, Detail::All);
            result.remaining_factor = remaining_factor(design, condition, result.power_w_per_m2);
            result
        })
        .collect();
    warm(design, &mut conditions, &around, &warmth);
    let mut results = Results {
        schema_version: SCHEMA_VERSION,
        tool: concat!("bandloom ", env!("CARGO_PKG_VERSION")).to_owned(),
        stack: design.name.value.clone(),
        design_hash: design_hash(design),
        source: source.to_owned(),
        conditions,
        layers: layers::layer_results(design, &lit[0]),
        growth: growth::growth_result(design),
        coats: coats::coats(design, &lit[0]),
        bands: None,
        gap_map: gap_map::gap_map(design),
        requirements: Vec::new(),
        free_values: free_values(design),
        sensitivities: Vec::new(),
        season: None,
        charts: Vec::new(),
        measured: Vec::new(),
        models: models::model_notes(design, &lit[0]),
    };
    if let Some(finding) = finite::first_not_finite(design, &results) {
        findings.push(finding);
        return Outcome::nothing(findings);
    }
    if let Some((season, here)) =
        design.season.as_ref().and_then(|it| Some((it, results.conditions.get(it.condition)?)))
    {
        match season::season(design, season, here) {
            Ok(found) if found.energy_kwh_per_m2.is_finite() => results.season = Some(found),
            Ok(_) => findings.push(findings::season_beyond(season)),
            Err(light) => findings.push(findings::season_without_current(season, &light)),
        }
    }
    results.charts = charts::charts(design);
    results.measured = design
        .measured
        .iter()
        .filter_map(|it| measured::measured(design, it, lit.get(it.condition)?))
        .filter(|it| it.predicted.iter().chain([&it.rms]).all(|value| value.is_finite()))
        .collect();
    findings.extend(findings::after(design, &results, &lit));
    let under = design.conditions.iter().zip(lit.iter().map(|lit| &**lit));
    findings.extend(transport::findings(design, under));
    let (judged, unjudged) = metrics::judge(design, &results);
    findings.extend(unjudged);
    results.requirements = judged.iter().map(|judged| requirement(design, judged)).collect();
    Outcome::with(results, findings)
}

/// Power over what the same condition gives without particles; `None` where it states none.
fn remaining_factor(design: &Design, condition: &Condition, power_w_per_m2: f64) -> Option<f64> {
    condition.fluence?;
    let before = Condition { fluence: None, ..condition.clone() };
    let lit = Lit::new(design, &before)?;
    let power_before = condition::power_w_per_m2(design, &before, &lit);
    (power_before > 0.0).then(|| power_w_per_m2 / power_before)
}

fn is_whole(design: &Design) -> bool {
    let resolved = design.layers.iter().all(|layer| layer.material.is_some());
    let settled = design.free_values.iter().all(|free| free.value.is_some());
    let thick = design.lit_layers().all(|(_, layer)| {
        let ideal = layer.material.as_ref().is_some_and(|m| matches!(m.optics, Optics::Ideal(_)));
        !layer.collects() || ideal || layer.thickness_m.is_some()
    });
    let few = design.lit_layers().count() <= MOST_LAYERS;
    resolved && settled && thick && few && !design.junctions.is_empty() && !design.conditions.is_empty()
}

/// Conditions a little colder and a little warmer than each, two for each that has them, in order.
fn warmer_and_colder(design: &Design) -> Vec<(usize, Condition)> {
    let both = |(index, condition): (usize, &Condition)| {
        temperature::around(condition).into_iter().flatten().map(move |it| (index, it))
    };
    design.conditions.iter().enumerate().flat_map(both).collect()
}

/// Fills in what a kelvin does, out of figures at the temperatures `around`.
fn warm(
    design: &Design,
    conditions: &mut [ConditionResult],
    around: &[(usize, Condition)],
    lit: &[Option<Arc<Lit>>],
) {
    let figures: Vec<Option<ConditionResult>> = around
        .par_iter()
        .zip(lit.par_iter())
        .map(|((_, condition), lit)| {
            Some(condition::condition_result(design, condition, lit.as_deref()?, Detail::Figures))
        })
        .collect();
    for (pair, both) in around.chunks(2).zip(figures.chunks(2)) {
        let ([(index, _), _], [Some(below), Some(above)]) = (pair, both) else { continue };
        conditions[*index].temperature_coefficients =
            temperature::coefficients(&conditions[*index], below, above);
    }
}

/// One [`Lit`] per condition, then one for each of `more`; those that share light, angle,
/// temperature and fluence share the work. `None` where there is no light or no gap.
fn lit_by_condition(design: &Design, more: &[(usize, Condition)]) -> Vec<Option<Arc<Lit>>> {
    let all: Vec<&Condition> = design.conditions.iter().chain(more.iter().map(|(_, it)| it)).collect();
    let first_of =
        |condition: &&Condition| all.iter().position(|other| lit::same_light(other, condition)).unwrap_or(0);
    let firsts: Vec<usize> = all.iter().map(first_of).collect();
    let made: Vec<Option<Arc<Lit>>> = all
        .par_iter()
        .enumerate()
        .map(|(index, condition)| {
            (firsts[index] == index).then(|| Lit::new(design, condition)).flatten().map(Arc::new)
        })
        .collect();
    firsts.iter().map(|&first| made[first].clone()).collect()
}

fn requirement(design: &Design, judged: &metrics::Judged) -> RequirementResult {
    let requirement = &design.requirements[judged.requirement];
    RequirementResult {
        text: requirement.text.clone(),
        condition: judged.condition.map(|at| design.conditions[at].name.clone()),
        value: judged.value,
        bound: judged.bound,
        unit: judged.unit.to_owned(),
        met: judged.met(requirement.comparison),
        margin: judged.margin(requirement.comparison),
    }
}

fn free_values(design: &Design) -> Vec<FreeValueResult> {
    design
        .free_values
        .iter()
        .map(|free| FreeValueResult {
            path: free.path.clone(),
            range: [free.range.0, free.range.1],
            value: free.value,
            settled: free.value.is_some(),
        })
        .collect()
}
