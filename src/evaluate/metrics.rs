//! The figures a `require` may name: dotted paths, their dimension, their value.

use crate::design::Comparison;
use crate::design::{Condition, Design, Requirement, ZERO_CELSIUS_K};
use crate::evaluate::lit::junction_gap;
use crate::finding::suggest::near;
use crate::finding::{Finding, Findings};
use crate::results::{ConditionResult, JunctionResult, LayerResult, Results, SeasonResult};
use crate::source::Spanned;
use crate::units::Dimension;

type OfCondition = fn(&ConditionResult) -> Option<f64>;
type OfJunction = fn(&JunctionResult) -> f64;
type OfSeason = fn(&SeasonResult) -> f64;
type OfLayer = fn(&LayerResult) -> Option<f64>;

/// What a figure is measured in: dimension, unit shown, and SI over that unit.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Measure(Dimension, &'static str, f64);

const PLAIN: Measure = Measure(Dimension::NONE, "1", 1.0);
const VOLT: Measure = Measure(Dimension::VOLTAGE, "V", 1.0);
const CURRENT: Measure = Measure(Dimension::CURRENT_DENSITY, "mA/cm2", 0.1);
const IRRADIANCE: Measure = Measure(Dimension::IRRADIANCE, "W/m2", 1.0);
const GAP: Measure = Measure(Dimension::ENERGY, "eV", 1.0 / crate::units::ELEMENTARY_CHARGE);
const THICKNESS: Measure = Measure(Dimension::LENGTH, "nm", 1e9);
const LATTICE: Measure = Measure(Dimension::LENGTH, "Å", 1e10);
const PER_KELVIN: Measure = Measure(Dimension::PER_TEMPERATURE, "%/K", 100.0);
const VOLT_PER_KELVIN: Measure = Measure(Dimension::VOLTAGE_PER_TEMPERATURE, "mV/K", 1e3);
const ENERGY: Measure = Measure(Dimension::ENERGY_PER_AREA, "kWh/m2", 1.0 / 3.6e6);
const DENSITY: Measure = Measure(Dimension::PER_VOLUME, "/cm3", 1e-6);

const OF_CONDITION: &[(&str, Measure, OfCondition)] = &[
    ("efficiency", PLAIN, |c| Some(c.efficiency)),
    ("power", IRRADIANCE, |c| Some(c.power_w_per_m2)),
    ("voc", VOLT, |c| c.voc_v),
    ("jsc", CURRENT, |c| c.jsc_ma_per_cm2),
    ("fill_factor", PLAIN, |c| c.fill_factor),
    ("vmp", VOLT, |c| c.vmp_v),
    ("jmp", CURRENT, |c| c.jmp_ma_per_cm2),
    ("current_mismatch", PLAIN, |c| c.current_mismatch),
    ("reflected_current", CURRENT, |c| Some(c.reflected_ma_per_cm2)),
    ("voc_temperature_coefficient", VOLT_PER_KELVIN, |c| c.temperature_coefficients.as_ref()?.voc_mv_per_k),
    ("jsc_temperature_coefficient", PER_KELVIN, |c| {
        Some(100.0 * c.temperature_coefficients.as_ref()?.jsc_relative_per_k?)
    }),
    ("efficiency_temperature_coefficient", PER_KELVIN, |c| {
        Some(100.0 * c.temperature_coefficients.as_ref()?.efficiency_relative_per_k)
    }),
    ("remaining_factor", PLAIN, |c| c.remaining_factor),
];

const OF_SEASON: &[(&str, Measure, OfSeason)] =
    &[("energy", ENERGY, |s| s.energy_kwh_per_m2), ("harvest_ratio", PLAIN, |s| s.harvest_ratio)];

const OF_JUNCTION: &[(&str, Measure, OfJunction)] = &[
    ("photocurrent", CURRENT, |j| j.photocurrent_ma_per_cm2),
    ("jsc", CURRENT, |j| j.jsc_ma_per_cm2),
    ("voc", VOLT, |j| j.voc_v),
    ("fill_factor", PLAIN, |j| j.fill_factor),
    ("power", IRRADIANCE, |j| j.power_w_per_m2),
    ("voltage_at_mpp", VOLT, |j| j.voltage_at_mpp_v),
    ("coupled", CURRENT, |j| j.coupled_ma_per_cm2),
];

const OF_LAYER: &[(&str, Measure, OfLayer)] = &[
    ("thickness", THICKNESS, |l| l.thickness_nm),
    ("gap", GAP, |l| l.gap_ev),
    ("lattice_constant", LATTICE, |l| l.lattice_constant_angstrom),
    ("mismatch", PLAIN, |l| l.mismatch),
    ("strain", PLAIN, |l| l.strain),
    ("doping", DENSITY, |l| l.doping_per_cm3),
];

/// Of the whole stack, whatever the condition.
const OF_STACK: &[(&str, Measure)] = &[("grown_thickness", THICKNESS)];

/// Named in the language, not evaluated yet.
const PENDING: &[(&str, Measure)] = &[
    ("areal_mass", Measure(Dimension::AREAL_MASS, "mg/cm2", 100.0)),
    ("specific_power", Measure(Dimension::SPECIFIC_POWER, "W/kg", 1.0)),
];

#[derive(Clone, Copy)]
enum Metric {
    Condition(OfCondition),
    Junction(usize, OfJunction),
    JunctionGap(usize),
    Layer(usize, OfLayer),
    GrownThickness,
    Season(OfSeason),
    Pending,
}

/// The dimension a metric is compared in, by its last word: `voc`, `top.jsc`,
/// `top.base.thickness`. Whether the design has such a junction or layer is not asked. `None`
/// where no metric has that word.
pub fn dimension(path: &str) -> Option<Dimension> {
    let find = |word: &str| {
        let of_parts = OF_JUNCTION.iter().map(|m| (m.0, m.1)).chain(OF_LAYER.iter().map(|m| (m.0, m.1)));
        let of_season = OF_SEASON.iter().map(|m| (m.0, m.1));
        let of_stack = OF_CONDITION.iter().map(|m| (m.0, m.1)).chain(OF_STACK.iter().chain(PENDING).copied());
        let of_stack = of_stack.chain(of_season);
        let mut all: Box<dyn Iterator<Item = (&str, Measure)>> =
            if path.contains('.') { Box::new(of_parts) } else { Box::new(of_stack) };
        all.find(|(name, _)| *name == word).map(|(_, measure)| measure.0)
    };
    find(path.rsplit('.').next()?)
}

/// Every metric of `design`, in a fixed order.
pub fn names(design: &Design) -> Vec<String> {
    let mut names: Vec<String> = OF_CONDITION.iter().map(|m| m.0.to_owned()).collect();
    names.extend(OF_STACK.iter().chain(PENDING).map(|m| m.0.to_owned()));
    names.extend(OF_SEASON.iter().filter(|_| design.season.is_some()).map(|m| m.0.to_owned()));
    for junction in &design.junctions {
        names.push(format!("{}.gap", junction.name.value));
        names.extend(OF_JUNCTION.iter().map(|m| format!("{}.{}", junction.name.value, m.0)));
    }
    for layer in &design.layers {
        names.extend(OF_LAYER.iter().map(|m| format!("{}.{}", layer.path, m.0)));
    }
    names
}

fn lookup(design: &Design, path: &str) -> Option<(Metric, Measure)> {
    let Some((owner, word)) = path.rsplit_once('.') else {
        let of_condition = OF_CONDITION.iter().find(|m| m.0 == path);
        return of_condition
            .map(|m| (Metric::Condition(m.2), m.1))
            .or_else(|| OF_STACK.iter().find(|m| m.0 == path).map(|m| (Metric::GrownThickness, m.1)))
            .or_else(|| OF_SEASON.iter().find(|m| m.0 == path).map(|m| (Metric::Season(m.2), m.1)))
            .or_else(|| PENDING.iter().find(|m| m.0 == path).map(|m| (Metric::Pending, m.1)));
    };
    if let Some((index, _)) = design.junction(owner) {
        if word == "gap" {
            return Some((Metric::JunctionGap(index), GAP));
        }
        return OF_JUNCTION.iter().find(|m| m.0 == word).map(|m| (Metric::Junction(index, m.2), m.1));
    }
    let index = design.layers.iter().position(|layer| layer.path == owner)?;
    OF_LAYER.iter().find(|m| m.0 == word).map(|m| (Metric::Layer(index, m.2), m.1))
}

/// The figure `path` of one condition, in the unit [`unit`] tells; `None` where it has none there,
/// or belongs to the whole stack.
pub(super) fn under(design: &Design, path: &str, result: &ConditionResult) -> Option<f64> {
    match lookup(design, path)?.0 {
        Metric::Condition(of) => of(result),
        Metric::Junction(index, of) => result.junctions.get(index).map(of),
        Metric::JunctionGap(index) => result.junctions.get(index).map(|junction| junction.gap_ev),
        _ => None,
    }
}

/// The unit a metric is shown in.
pub(super) fn unit(design: &Design, path: &str) -> Option<&'static str> {
    lookup(design, path).map(|(_, measure)| measure.1)
}

/// Metrics nobody knows, with the near name, and those that are not evaluated yet.
pub(super) fn check(design: &Design) -> Findings {
    let mut findings = Findings::new();
    for requirement in &design.requirements {
        let metric = &requirement.metric;
        match lookup(design, &metric.value) {
            Some((Metric::Pending, _)) => findings.push(
                Finding::warning("feature.pending", format!("`{}` is not evaluated yet", metric.value))
                    .at(metric.span, "not judged in this version")
                    .help("require `efficiency` or `power` instead"),
            ),
            Some(_) => {}
            None => findings.push(unknown(design, metric)),
        }
    }
    for chart in design.charts.iter().filter(|chart| !chart.axes.is_empty()) {
        match lookup(design, &chart.metric.value) {
            None => findings.push(unknown(design, &chart.metric)),
            // A temperature coefficient at every point would be three points each.
            Some((Metric::Condition(_), _)) if chart.metric.value.ends_with("_coefficient") => {
                findings.push(not_charted(&chart.metric));
            }
            Some((Metric::Condition(_) | Metric::Junction(..) | Metric::JunctionGap(_), _)) => {}
            Some(_) => findings.push(not_charted(&chart.metric)),
        }
    }
    findings
}

fn not_charted(metric: &Spanned<String>) -> Finding {
    Finding::error(
        "require.unknown-metric",
        format!("`{}` does not change along the axes of a chart", metric.value),
    )
    .at(metric.span, "not a figure of one condition")
    .help("chart `efficiency`, `voc` or another figure of a condition")
}

fn unknown(design: &Design, metric: &Spanned<String>) -> Finding {
    let names = names(design);
    let finding = Finding::error("require.unknown-metric", format!("no metric is called `{}`", metric.value));
    match near(&metric.value, names.iter().map(String::as_str)) {
        Some(near) => finding
            .at(metric.span, format!("did you mean `{near}`?"))
            .help(format!("write `{near}`"))
            .fix(metric.span, near, false),
        None => {
            finding.at(metric.span, "an unknown metric").help(format!("write one of {}", examples(design)))
        }
    }
}

fn examples(design: &Design) -> String {
    let mut examples = vec!["`efficiency`".to_owned(), "`voc`".to_owned(), "`current_mismatch`".to_owned()];
    examples.extend(design.junctions.first().map(|junction| format!("`{}.jsc`", junction.name.value)));
    examples.join(", ")
}

/// One requirement judged: value and bound in `unit`.
#[derive(Clone, Debug)]
pub(super) struct Judged {
    /// Index in [`Design::requirements`].
    pub(super) requirement: usize,
    /// Index in [`Results::conditions`]; `None` where the metric has none.
    pub(super) condition: Option<usize>,
    pub(super) value: f64,
    pub(super) bound: f64,
    pub(super) unit: &'static str,
}

impl Judged {
    /// By how much it holds; negative where it fails.
    pub(super) fn margin(&self, comparison: Comparison) -> f64 {
        match comparison {
            Comparison::AtLeast | Comparison::Above => self.value - self.bound,
            Comparison::AtMost | Comparison::Below => self.bound - self.value,
        }
    }

    /// Whether it holds.
    pub(super) fn met(&self, comparison: Comparison) -> bool {
        let margin = self.margin(comparison);
        match comparison {
            Comparison::AtLeast | Comparison::AtMost => margin >= 0.0,
            Comparison::Above | Comparison::Below => margin > 0.0,
        }
    }
}

/// Judges every requirement that can be. Metrics without a value under a condition are found.
pub(super) fn judge(design: &Design, results: &Results) -> (Vec<Judged>, Findings) {
    let mut findings = Findings::new();
    let mut judged = Vec::new();
    for (index, requirement) in design.requirements.iter().enumerate() {
        let Some((metric, measure)) = lookup(design, &requirement.metric.value) else { continue };
        let mut add = |condition: Option<usize>, value: Option<f64>| match value {
            Some(value) => judged.push(Judged {
                requirement: index,
                condition,
                value,
                bound: requirement.bound * measure.2,
                unit: measure.1,
            }),
            None => findings.push(without_value(design, requirement)),
        };
        match metric {
            Metric::Pending => {}
            Metric::JunctionGap(junction) => {
                add(None, junction_gap(design, junction, ZERO_CELSIUS_K + 25.0));
            }
            Metric::Layer(layer, of) => add(None, results.layers.get(layer).and_then(of)),
            Metric::GrownThickness => add(None, Some(grown_thickness_nm(design))),
            Metric::Season(of) => add(None, results.season.as_ref().map(of)),
            Metric::Condition(_) | Metric::Junction(..) => {
                for (at, result) in results.conditions.iter().enumerate() {
                    let Some(condition) = design.conditions.get(at) else { continue };
                    if !applies(requirement, condition) {
                        continue;
                    }
                    // Without particles nothing has to remain, if there are some elsewhere.
                    let spared = requirement.metric.value == "remaining_factor"
                        && condition.fluence.is_none()
                        && results.conditions.iter().any(|other| other.remaining_factor.is_some());
                    if spared {
                        continue;
                    }
                    match metric {
                        Metric::Condition(of) => add(Some(at), of(result)),
                        Metric::Junction(junction, of) => {
                            add(Some(at), result.junctions.get(junction).map(of))
                        }
                        _ => {}
                    }
                }
            }
        }
    }
    let mut once = Findings::new();
    for finding in findings.0 {
        if !once.0.contains(&finding) {
            once.push(finding);
        }
    }
    (judged, once)
}

fn applies(requirement: &Requirement, condition: &Condition) -> bool {
    requirement.under.is_empty() || requirement.under.iter().any(|name| name.value == condition.name)
}

fn without_value(design: &Design, requirement: &Requirement) -> Finding {
    let metric = &requirement.metric;
    let finding =
        Finding::error("require.unknown-metric", format!("`{}` has no value in this stack", metric.value));
    let whole = !metric.value.contains('.');
    let of_season = OF_SEASON.iter().any(|of| of.0 == metric.value);
    match design.junctions.first() {
        _ if metric.value == "remaining_factor" => finding
            .at(metric.span, "no condition states a fluence")
            .help("write `fluence 1e15 /cm2 of electrons 1 MeV` in a `condition`"),
        Some(junction)
            if whole && design.junctions.len() > 1 && !of_season && metric.value != "current_mismatch" =>
        {
            finding
                .at(metric.span, "each junction has its own terminals")
                .help(format!("write `{}.{}`", junction.name.value, metric.value))
        }
        _ if of_season => finding
            .at(metric.span, "no weighted conditions are given")
            .help("give them, such as `season \"mast-site.csv\" { … }`, or require `power`"),
        Some(_) if metric.value == "current_mismatch" => finding
            .at(metric.span, "needs two junctions under light")
            .help("remove this `require`, or add a second junction"),
        _ => finding
            .at(metric.span, "nothing to compare")
            .help("require `efficiency`, or state the missing value in the layer"),
    }
}

/// Everything that is grown on the wafer, removed layers too, nm.
fn grown_thickness_nm(design: &Design) -> f64 {
    let wafer = crate::growth::wafer(design);
    let grown = crate::growth::order(design).into_iter().filter(|&index| Some(index) != wafer);
    grown.filter_map(|index| design.layers[index].thickness_m).sum::<f64>() * 1e9
}
