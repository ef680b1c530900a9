//! Energy over a set of weighted conditions.

use std::sync::Arc;

use rayon::prelude::*;

use crate::design::{Condition, Design, Season};
use crate::evaluate::condition::power_w_per_m2;
use crate::evaluate::lit::Lit;
use crate::results::{ConditionResult, SeasonResult, SeasonRowResult};

/// Farthest apart two temperatures are at which light is worked out, K. Between them power is
/// linear in the temperature: a curvature of 1e-6 /K2 would leave 3e-6 of it.
const STEP_K: f64 = 5.0;

/// Angles of incidence are worked out for whole degrees; the light received is that of the angle
/// itself.
const STEP_RAD: f64 = std::f64::consts::PI / 180.0;

/// J to kWh.
const KWH: f64 = 1.0 / 3.6e6;

/// Rows that share the light of one temperature, each with its part in it.
struct Node<'a> {
    condition: Condition,
    rows: Vec<(usize, &'a Condition, f64)>,
}

/// Power of every row and the energy over all; `here` is the condition the rows start from. The
/// error is the name of a light of the table that drives no current at all.
pub(super) fn season(
    design: &Design,
    season: &Season,
    here: &ConditionResult,
) -> Result<SeasonResult, String> {
    let nodes = nodes(season);
    let parts: Vec<Result<Vec<(usize, f64)>, String>> = nodes
        .par_iter()
        .map(|node| {
            let lit = Lit::new(design, &node.condition).ok_or(&node.condition.light.name)?;
            let power = |(row, condition, part): &(usize, &Condition, f64)| {
                // At the node's temperature and angle, with the row's own strength of light: the
                // cosine of the row goes into the concentration.
                let slanted = condition.incidence_rad.cos() / node.condition.incidence_rad.cos();
                let at =
                    Condition { concentration: condition.concentration * slanted, ..node.condition.clone() };
                (*row, part * power_w_per_m2(design, &at, &lit))
            };
            Ok(node.rows.iter().map(power).collect())
        })
        .collect();
    let mut powers = vec![0.0; season.rows.len()];
    for part in parts {
        for (row, power) in part? {
            powers[row] += power;
        }
    }
    let rows: Vec<SeasonRowResult> = season
        .rows
        .iter()
        .zip(powers)
        .map(|(row, power_w_per_m2)| SeasonRowResult {
            hours: row.seconds / 3600.0,
            light: row.condition.light.name.clone(),
            temperature_k: row.condition.temperature_k,
            concentration: row.condition.concentration,
            incident_w_per_m2: row.condition.incident_w_per_m2(),
            power_w_per_m2,
        })
        .collect();
    let sum = |of: fn(&SeasonRowResult) -> f64| -> f64 { rows.iter().map(of).sum() };
    let incident = KWH * 3600.0 * sum(|row| row.hours * row.incident_w_per_m2);
    let energy = KWH * 3600.0 * sum(|row| row.hours * row.power_w_per_m2);
    let efficiency = if incident > 0.0 { energy / incident } else { 0.0 };
    Ok(SeasonResult {
        file: season.file.clone(),
        condition: here.name.clone(),
        hours: sum(|row| row.hours),
        incident_kwh_per_m2: incident,
        energy_kwh_per_m2: energy,
        efficiency,
        harvest_ratio: if here.efficiency > 0.0 { efficiency / here.efficiency } else { 0.0 },
        rows,
    })
}

/// The lights to work out: for each light, whole degree and fluence, temperatures no more than
/// [`STEP_K`] apart from the coldest row to the warmest, as far as rows lie next to them.
fn nodes(season: &Season) -> Vec<Node<'_>> {
    let lit = || season.rows.iter().enumerate().filter(|(_, row)| row.condition.concentration > 0.0);
    let degree = |condition: &Condition| (condition.incidence_rad / STEP_RAD).round().min(89.0);
    let same = |a: &Condition, b: &Condition| {
        let light = Arc::ptr_eq(&a.light, &b.light) || a.light == b.light;
        light && degree(a) == degree(b) && a.fluence == b.fluence
    };
    let mut groups: Vec<Vec<(usize, &Condition)>> = Vec::new();
    for (index, row) in lit() {
        match groups.iter_mut().find(|group| same(group[0].1, &row.condition)) {
            Some(group) => group.push((index, &row.condition)),
            None => groups.push(vec![(index, &row.condition)]),
        }
    }
    let mut nodes = Vec::new();
    for group in groups {
        let temperatures = group.iter().map(|(_, condition)| condition.temperature_k);
        let (low, high) =
            temperatures.fold((f64::INFINITY, 0.0_f64), |(low, high), t| (low.min(t), high.max(t)));
        let count = ((high - low) / STEP_K).ceil().max(0.0) as usize;
        let step = if count > 0 { (high - low) / count as f64 } else { 1.0 };
        let mut own: Vec<Vec<(usize, &Condition, f64)>> = vec![Vec::new(); count + 1];
        for &(index, condition) in &group {
            let place = ((condition.temperature_k - low) / step).clamp(0.0, count as f64);
            let below = place.floor().min(count.saturating_sub(1) as f64);
            let part = place - below;
            if part < 1.0 {
                own[below as usize].push((index, condition, 1.0 - part));
            }
            if part > 0.0 {
                own[below as usize + 1].push((index, condition, part));
            }
        }
        for (at, rows) in own.into_iter().enumerate().filter(|(_, rows)| !rows.is_empty()) {
            let first = rows[0].1;
            let condition = Condition {
                temperature_k: low + step * at as f64,
                incidence_rad: degree(first) * STEP_RAD,
                ..first.clone()
            };
            nodes.push(Node { condition, rows });
        }
    }
    nodes
}
