//! `lattice.critical-thickness`: a layer said to be strained that is too thick for that. The
//! criterion is that of `lattice.mismatch`.

use super::lattice_mismatch::judge;
use super::{Context, Report, Rule};
use crate::design::Strain;
use crate::finding::Severity;

pub(super) static RULE: Rule = Rule {
    code: "lattice.critical-thickness",
    severity: Severity::Error,
    title: "a layer said to be strained is thicker than it can be",
    threshold: None,
    needs_results: false,
    run,
};

fn run(context: &Context, report: &mut Report) {
    judge(context, report, RULE.code, |strain| strain == Strain::Pseudomorphic);
}
