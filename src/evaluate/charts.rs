//! A figure against temperature, concentration, angle or thickness.

use rayon::prelude::*;

use crate::design::{AxisKind, Chart, ChartAxis, Condition, Design};
use crate::evaluate::condition::{Detail, condition_result};
use crate::evaluate::lit::Lit;
use crate::evaluate::metrics;
use crate::results::{ChartAxisResult, ChartResult};
use crate::units::value_in;

/// Every chart of `design`, each under every condition it holds for.
pub(super) fn charts(design: &Design) -> Vec<ChartResult> {
    let mut results = Vec::new();
    for chart in design.charts.iter().filter(|chart| !chart.axes.is_empty()) {
        for condition in &design.conditions {
            let holds = chart.under.is_empty() || chart.under.iter().any(|name| name.value == condition.name);
            if holds {
                results.push(drawn(design, chart, condition));
            }
        }
    }
    results
}

fn drawn(design: &Design, chart: &Chart, condition: &Condition) -> ChartResult {
    let values: Vec<Vec<f64>> = chart.axes.iter().map(ChartAxis::values).collect();
    let points: Vec<Vec<f64>> = match values.as_slice() {
        [one] => one.iter().map(|x| vec![*x]).collect(),
        [outer, inner] => outer.iter().flat_map(|x| inner.iter().map(|y| vec![*x, *y])).collect(),
        _ => Vec::new(),
    };
    // Points that differ in the concentration alone share their light.
    let strong = |point: &[f64]| -> Vec<u64> {
        let kept = chart.axes.iter().zip(point).filter(|(axis, _)| axis.kind != AxisKind::Concentration);
        kept.map(|(_, value)| value.to_bits()).collect()
    };
    let mut lights: Vec<(Vec<u64>, Vec<usize>)> = Vec::new();
    for (index, point) in points.iter().enumerate() {
        let key = strong(point);
        match lights.iter_mut().find(|(known, _)| *known == key) {
            Some((_, own)) => own.push(index),
            None => lights.push((key, vec![index])),
        }
    }
    let found: Vec<Vec<(usize, Option<f64>)>> = lights
        .par_iter()
        .map(|(_, own)| {
            let at = |index: usize| changed(design, condition, &chart.axes, &points[index]);
            let Some(lit) = own.first().and_then(|&first| {
                let (design, condition) = at(first);
                Lit::new(&design, &condition)
            }) else {
                return Vec::new();
            };
            own.iter()
                .map(|&index| {
                    let (design, condition) = at(index);
                    let result = condition_result(&design, &condition, &lit, Detail::Figures);
                    let value = metrics::under(&design, &chart.metric.value, &result);
                    (index, value.filter(|value| value.is_finite()))
                })
                .collect()
        })
        .collect();
    let mut figures = vec![None; points.len()];
    for (index, value) in found.into_iter().flatten() {
        figures[index] = value;
    }
    ChartResult {
        text: chart.text.clone(),
        metric: chart.metric.value.clone(),
        unit: metrics::unit(design, &chart.metric.value).unwrap_or("1").to_owned(),
        condition: condition.name.clone(),
        axes: chart
            .axes
            .iter()
            .zip(values)
            .map(|(axis, values)| ChartAxisResult {
                path: axis.path.value.clone(),
                unit: axis.unit().to_owned(),
                values: values.iter().map(|value| value_in(*value, axis.unit())).collect(),
            })
            .collect(),
        values: figures,
    }
}

fn changed(design: &Design, condition: &Condition, axes: &[ChartAxis], point: &[f64]) -> (Design, Condition) {
    let (mut design, mut condition) = (design.clone(), condition.clone());
    for (axis, &value) in axes.iter().zip(point) {
        match axis.kind {
            AxisKind::Temperature => condition.temperature_k = value,
            AxisKind::Concentration => condition.concentration = value,
            AxisKind::Incidence => condition.incidence_rad = value,
            AxisKind::Thickness(layer) => design.layers[layer].thickness_m = Some(value),
        }
    }
    (design, condition)
}
