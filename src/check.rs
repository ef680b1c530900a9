//! The rules: facts about a design that would ruin it, each with a way out.
//!
//! One rule is one file `check/<rule>.rs` and one page `why/<code>.md`; it is switched on by its
//! line in [`RULES`]. Rules never see the text: they judge a [`Design`] and, where they need
//! figures, its [`Results`]. They are silent about what could not be resolved.

use crate::design::Design;
use crate::finding::{Finding, Findings, Severity};
use crate::growth::{self, LayerGrowth};
use crate::results::Results;
use crate::source::Span;
use crate::units::{self, Dimension};

mod absorption;
mod accept;
mod current_mismatch;
mod current_resistance;
mod doping_limit;
mod doping_missing;
mod families;
mod free;
mod free_on_bound;
mod free_outside;
mod free_unsettled;
mod gap_band_offset;
mod gap_bsf_low;
mod gap_equal;
mod gap_indirect_absorber;
mod gap_order;
mod gap_window_absorbs;
mod junctions;
mod lattice_accumulated;
mod lattice_bow;
mod lattice_critical_thickness;
mod lattice_mismatch;
mod lattice_needless_relaxed;
mod lattice_thermal;
mod light_range;
mod limits;
mod optics_coat;
mod optics_coherent_thick;
mod optics_no_index;
mod polarity_flipped;
mod polarity_same;
mod require_failed;
mod show;
mod structure_no_absorber;
mod structure_no_contact;
mod structure_no_wafer;
mod structure_order;
mod structure_too_many;
mod tunnel_absorbs;
mod tunnel_missing;
mod tunnel_peak;
mod tunnel_polarity;
mod unit_unlikely;

pub use accept::Settled;
pub(crate) use accept::unused_in_file;
use junctions::JunctionFacts;

/// Every rule, in the order they run.
pub static RULES: &[&Rule] = &[
    &structure_no_absorber::RULE,
    &structure_order::RULE,
    &structure_no_wafer::RULE,
    &structure_no_contact::RULE,
    &unit_unlikely::RULE,
    &structure_too_many::RULE,
    &optics_no_index::RULE,
    &optics_coherent_thick::RULE,
    &gap_order::RULE,
    &gap_equal::RULE,
    &gap_indirect_absorber::RULE,
    &gap_bsf_low::RULE,
    &gap_window_absorbs::RULE,
    &gap_band_offset::RULE,
    &lattice_mismatch::RULE,
    &lattice_critical_thickness::RULE,
    &lattice_needless_relaxed::RULE,
    &lattice_accumulated::RULE,
    &lattice_thermal::RULE,
    &lattice_bow::RULE,
    &polarity_same::RULE,
    &polarity_flipped::RULE,
    &doping_missing::RULE,
    &doping_limit::RULE,
    &tunnel_missing::RULE,
    &tunnel_polarity::RULE,
    &tunnel_peak::RULE,
    &tunnel_absorbs::RULE,
    &light_range::RULE,
    &optics_coat::RULE,
    &current_mismatch::RULE,
    &current_resistance::RULE,
    &free_unsettled::RULE,
    &free_outside::RULE,
    &free_on_bound::RULE,
    &require_failed::RULE,
];

/// One rule.
pub struct Rule {
    /// Its code, `gap.order`.
    pub code: &'static str,
    /// The gravest severity it reports.
    pub severity: Severity,
    /// What it is about, in a few words.
    pub title: &'static str,
    /// The threshold `limit CODE value` sets, if it has one.
    pub threshold: Option<Threshold>,
    /// Whether it needs evaluated figures; such a rule is not run without them.
    pub needs_results: bool,
    /// Looks, and reports what it sees.
    pub run: fn(&Context, &mut Report),
}

/// A number a rule judges by.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Threshold {
    /// SI, fractions plain.
    pub default: f64,
    /// A unit of its dimension, as written after a number: `%`, `um`, `meV`.
    pub unit: &'static str,
    /// What is compared with it.
    pub meaning: &'static str,
}

/// What a rule may look at.
pub struct Context<'a> {
    /// The design.
    pub design: &'a Design,
    /// Its figures, where it was evaluated.
    pub results: Option<&'a Results>,
    /// Facts about each of [`Design::junctions`], same order.
    pub(crate) junctions: Vec<JunctionFacts<'a>>,
    /// Lattice state of each of [`Design::layers`], same order.
    pub lattice: Vec<Option<LayerGrowth>>,
    /// Where earlier passes found errors: what stands there may be missing from the design.
    faults: Vec<Span>,
}

impl<'a> Context<'a> {
    fn new(design: &'a Design, results: Option<&'a Results>, before: &Findings) -> Self {
        let errors = before.iter().filter(|finding| finding.severity == Severity::Error);
        let faults = errors.filter_map(|finding| finding.primary.as_ref()).map(|label| label.span).collect();
        let junctions = (0..design.junctions.len()).map(|index| JunctionFacts::new(design, index)).collect();
        Self { design, results, junctions, lattice: growth::lattice_states(design), faults }
    }

    /// Whether an error was found within `place` already, so that what seems to be missing there
    /// may only have been misread.
    pub fn is_spoilt(&self, place: Span) -> bool {
        self.faults.iter().any(|fault| place.contains(*fault))
    }

    /// Whether any error was found already.
    pub fn has_faults(&self) -> bool {
        !self.faults.is_empty()
    }

    /// The threshold in force for `rule`, SI: the one set by `limit`, else its default.
    pub fn threshold(&self, rule: &Rule) -> f64 {
        let default = rule.threshold.map_or(0.0, |threshold| threshold.default);
        self.design.limit(rule.code).map_or(default, |limit| limit.value)
    }
}

/// Findings with the paths of what they are about, so that `accept … on path` finds them.
#[derive(Default)]
pub struct Report {
    found: Vec<Found>,
}

struct Found {
    finding: Finding,
    about: Vec<String>,
}

impl Report {
    /// Adds a finding about what lies at `about`: paths of layers, names of junctions,
    /// interconnects or conditions, paths of free values, metrics.
    pub fn push<S: Into<String>>(&mut self, about: impl IntoIterator<Item = S>, finding: Finding) {
        self.found.push(Found { finding, about: about.into_iter().map(Into::into).collect() });
    }
}

/// A finding the designer accepts, with the reason given.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Accepted {
    /// What was found.
    pub finding: Finding,
    /// `because "…"`.
    pub because: String,
}

/// What the rules have to say.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Checked {
    /// What stands.
    pub findings: Findings,
    /// What the designer accepts, for the sheet.
    pub accepted: Vec<Accepted>,
    /// Each of [`Design::file_accepts`], same order.
    pub of_file: Vec<Settled>,
}

/// Runs every rule on `design`; rules that need figures are left out without `results`.
///
/// `before` are the findings of other passes about the same design: they come back among the
/// others, and `accept` reaches them too unless they are errors, which left a hole in the design.
/// Where such a hole is, rules about what is missing keep silent.
pub fn check(design: &Design, results: Option<&Results>, before: Findings) -> Checked {
    let context = Context::new(design, results, &before);
    let (errors, milder): (Vec<_>, Vec<_>) =
        before.0.into_iter().partition(|finding| finding.severity == Severity::Error);
    let mut report = Report::default();
    for finding in milder {
        report.push(Vec::<String>::new(), finding);
    }
    for rule in RULES.iter().filter(|rule| results.is_some() || !rule.needs_results) {
        (rule.run)(&context, &mut report);
    }
    let mut checked = accept::sort_out(&context, report);
    checked.findings.extend(limits::check(design));
    checked.findings.extend(Findings(errors));
    checked
}

/// The rule of that code.
pub fn rule(code: &str) -> Option<&'static Rule> {
    RULES.iter().copied().find(|rule| rule.code == code)
}

/// What `limit CODE value` measures; `None` where the code has no threshold. Shares are plain
/// numbers.
pub fn limit_dimension(code: &str) -> Option<Dimension> {
    let threshold = rule(code)?.threshold?;
    units::parse(threshold.unit).ok().map(|unit| unit.dimension)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn codes_are_told_apart_and_have_pages() {
        for (index, rule) in RULES.iter().enumerate() {
            assert!(RULES[..index].iter().all(|other| other.code != rule.code), "{} twice", rule.code);
            assert!(crate::why::page(rule.code).is_some(), "{} has no page", rule.code);
        }
    }

    #[test]
    fn every_threshold_has_a_dimension() {
        for rule in RULES.iter().filter(|rule| rule.threshold.is_some()) {
            assert!(limit_dimension(rule.code).is_some(), "unit of {} cannot be read", rule.code);
        }
        assert_eq!(limit_dimension("lattice.mismatch"), Some(Dimension::NONE));
        assert_eq!(limit_dimension("gap.indirect-absorber"), Some(Dimension::LENGTH));
        assert_eq!(limit_dimension("gap.order"), None);
    }
}
