//! `chart efficiency against concentration over 1 .. 1000 times, 30 points under noon`

use crate::design::{AxisKind, Chart, ChartAxis, Design};
use crate::finding::{Finding, Severity};
use crate::resolve::properties::pending;
use crate::resolve::quantities::{Expected, Role};
use crate::resolve::{Resolver, attributes, names};
use crate::source::Spanned;
use crate::syntax;
use crate::units::Dimension;

/// Points of a chart at most, over all its axes.
const MOST_POINTS: usize = 10_000;

/// Points of an axis where none are stated: of a curve, and of each axis of a map.
const POINTS: [usize; 2] = [41, 15];

/// An axis with its place in the design.
enum Axis {
    Known(AxisKind, Dimension, Role),
    /// A value that charts do not change yet.
    Pending,
}

pub(super) fn chart(
    resolver: &mut Resolver<'_, '_>,
    design: &mut Design,
    it: &syntax::Chart,
    mut under: Vec<Spanned<String>>,
) {
    let mut axes = Vec::new();
    let mut whole = true;
    for axis in &it.axes {
        let found = known_axis(resolver, design, &axis.path, &mut under);
        let ranged = axis.over.up_to.is_some();
        if !ranged {
            resolver.scope.report(
                Finding::error("value.range", format!("the chart has no range of `{}`", axis.path.value))
                    .at(axis.over.span, "one value")
                    .help("write a range, such as `over 0.2 .. 1.5 um`"),
            );
        }
        let points = axis.points.as_ref().map(|points| {
            resolver.scope.quantity(points, Expected::new("points", Dimension::NONE, Role::Count))
        });
        let expected = match &found {
            Some(Axis::Known(_, dimension, role)) => Some((*dimension, *role)),
            _ => resolver.scope.dimension(&axis.over).map(|(dimension, _)| (dimension, Role::Any)),
        };
        let slot = expected.filter(|_| ranged).map(|(dimension, role)| {
            let name = format!("axis `{}`", axis.path.value);
            resolver.scope.slot(&axis.over, Expected::new(&name, dimension, role))
        });
        match (found, slot.and_then(|slot| slot.value.zip(slot.up_to)), points) {
            (Some(Axis::Known(kind, ..)), Some((from, to)), points) if points != Some(None) => {
                if from == to {
                    whole = false;
                    resolver.scope.report(
                        Finding::error("value.range", format!("the range of `{}` is empty", axis.path.value))
                            .at(axis.over.span, "both ends are the same")
                            .help("write two different ends, such as `over 0 .. 80 degC`"),
                    );
                }
                let points = match points.flatten() {
                    Some(points) => (points as usize).max(2),
                    None => {
                        let points = POINTS[it.axes.len().min(2) - 1];
                        let path = &axis.path.value;
                        let sentence = format!("{points} points of `{path}` in a chart, as none are stated");
                        if !design.assumptions.contains(&sentence) {
                            design.assumptions.push(sentence);
                        }
                        points
                    }
                };
                axes.push(ChartAxis { path: axis.path.clone(), kind, from, to, points });
            }
            (Some(Axis::Pending), ..) => {
                whole = false;
                pending(
                    &mut resolver.scope,
                    Severity::Advice,
                    &format!("a chart against `{}` is", axis.path.value),
                    axis.path.span,
                    "chart against `temperature`, `concentration`, `incidence` or a thickness",
                );
            }
            _ => whole = false,
        }
    }
    if let [a, b] = axes.as_slice()
        && a.kind == b.kind
    {
        whole = false;
        resolver.scope.report(
            Finding::error("value.conflict", format!("both axes of the chart are `{}`", b.path.value))
                .at(b.path.span, "stated here too")
                .beside(a.path.span, "stated here")
                .help("leave one of the axes out"),
        );
    }
    let count: usize = axes.iter().map(|axis| axis.points).product();
    if count > MOST_POINTS {
        whole = false;
        resolver.scope.report(
            Finding::error("value.range", format!("the chart asks for {count} points"))
                .at(it.span, format!("more than {MOST_POINTS}"))
                .help("write fewer, such as `20 points` for each axis"),
        );
    }
    if axes.len() > 2 {
        whole = false;
        resolver.scope.report(
            Finding::error("value.range", format!("the chart has {} axes", axes.len()))
                .at(it.span, "more than two")
                .help("write a chart for each pair of them"),
        );
    }
    if !whole {
        axes.clear();
    }
    let text = resolver.text(it.span);
    design.charts.push(Chart { metric: it.metric.clone(), axes, under, text, span: it.span });
}

/// What a path names: a quantity of the condition, `noon.temperature`, or a slot of a layer. `None`
/// where there is none, which is reported.
fn known_axis(
    resolver: &mut Resolver<'_, '_>,
    design: &Design,
    path: &Spanned<String>,
    under: &mut Vec<Spanned<String>>,
) -> Option<Axis> {
    let (owner, word) = match path.value.rsplit_once('.') {
        Some((owner, word)) => (Some(owner), word),
        None => (None, path.value.as_str()),
    };
    let of_condition = match word {
        "temperature" => Some((AxisKind::Temperature, Dimension::TEMPERATURE, Role::CellTemperature)),
        "concentration" => Some((AxisKind::Concentration, Dimension::NONE, Role::Concentration)),
        "incidence" => Some((AxisKind::Incidence, Dimension::ANGLE, Role::Incidence)),
        _ => None,
    };
    let named = owner.is_none_or(|owner| design.condition(owner).is_some());
    if let Some((kind, dimension, role)) = of_condition.filter(|_| named) {
        if let Some(owner) = owner {
            *under = vec![Spanned::new(owner.to_owned(), path.span)];
        }
        return Some(Axis::Known(kind, dimension, role));
    }
    let layer = owner.and_then(|owner| design.layers.iter().position(|layer| layer.path == owner));
    match (layer, word) {
        (Some(index), "thickness") => {
            let layer = &design.layers[index];
            let role = attributes::thickness_role(layer.duty, layer.place);
            Some(Axis::Known(AxisKind::Thickness(index), Dimension::LENGTH, role))
        }
        (Some(_), _) => Some(Axis::Pending),
        (None, _) if design.free_values.iter().any(|free| free.path == path.value) => Some(Axis::Pending),
        (None, _) => {
            let thicknesses: Vec<String> =
                design.layers.iter().map(|layer| format!("{}.thickness", layer.path)).collect();
            let known = ["temperature", "concentration", "incidence"]
                .into_iter()
                .chain(thicknesses.iter().map(String::as_str));
            let otherwise = "write `temperature`, `concentration`, `incidence` or `top.base.thickness`";
            resolver.scope.report(names::unknown("quantity to chart against", path, known, otherwise));
            None
        }
    }
}
