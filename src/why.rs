//! The pages behind the codes: what a finding reports, why it matters, an example, its cure.
//!
//! Each page stands in `src/why/<code>.md` under fixed headings; the tests run its *Example*,
//! which must give exactly that code, and its *Instead*, which must give none.

/// Every code with its page, in alphabetical order.
pub const PAGES: &[(&str, &str)] = &[
    ("accept.no-reason", include_str!("why/accept.no-reason.md")),
    ("accept.unused", include_str!("why/accept.unused.md")),
    ("current.mismatch", include_str!("why/current.mismatch.md")),
    ("current.resistance", include_str!("why/current.resistance.md")),
    ("data.table", include_str!("why/data.table.md")),
    ("depletion.full", include_str!("why/depletion.full.md")),
    ("doping.degenerate", include_str!("why/doping.degenerate.md")),
    ("doping.limit", include_str!("why/doping.limit.md")),
    ("doping.missing", include_str!("why/doping.missing.md")),
    ("feature.pending", include_str!("why/feature.pending.md")),
    ("fit.below-radiative", include_str!("why/fit.below-radiative.md")),
    ("fluence.no-constant", include_str!("why/fluence.no-constant.md")),
    ("formula.composition", include_str!("why/formula.composition.md")),
    ("formula.sum", include_str!("why/formula.sum.md")),
    ("formula.unknown-element", include_str!("why/formula.unknown-element.md")),
    ("free.on-bound", include_str!("why/free.on-bound.md")),
    ("free.outside", include_str!("why/free.outside.md")),
    ("free.unsettled", include_str!("why/free.unsettled.md")),
    ("gap.band-offset", include_str!("why/gap.band-offset.md")),
    ("gap.bsf-low", include_str!("why/gap.bsf-low.md")),
    ("gap.equal", include_str!("why/gap.equal.md")),
    ("gap.indirect-absorber", include_str!("why/gap.indirect-absorber.md")),
    ("gap.order", include_str!("why/gap.order.md")),
    ("gap.unreachable", include_str!("why/gap.unreachable.md")),
    ("gap.window-absorbs", include_str!("why/gap.window-absorbs.md")),
    ("junction.dark", include_str!("why/junction.dark.md")),
    ("lattice.accumulated", include_str!("why/lattice.accumulated.md")),
    ("lattice.bow", include_str!("why/lattice.bow.md")),
    ("lattice.critical-thickness", include_str!("why/lattice.critical-thickness.md")),
    ("lattice.mismatch", include_str!("why/lattice.mismatch.md")),
    ("lattice.needless-relaxed", include_str!("why/lattice.needless-relaxed.md")),
    ("lattice.thermal", include_str!("why/lattice.thermal.md")),
    ("lattice.unmatchable", include_str!("why/lattice.unmatchable.md")),
    ("light.range", include_str!("why/light.range.md")),
    ("material.implausible", include_str!("why/material.implausible.md")),
    ("material.incomplete", include_str!("why/material.incomplete.md")),
    ("material.no-citation", include_str!("why/material.no-citation.md")),
    ("material.open", include_str!("why/material.open.md")),
    ("material.statement", include_str!("why/material.statement.md")),
    ("material.table", include_str!("why/material.table.md")),
    ("name.cycle", include_str!("why/name.cycle.md")),
    ("name.duplicate", include_str!("why/name.duplicate.md")),
    ("name.look-alike", include_str!("why/name.look-alike.md")),
    ("name.reserved", include_str!("why/name.reserved.md")),
    ("name.shadows", include_str!("why/name.shadows.md")),
    ("name.unknown", include_str!("why/name.unknown.md")),
    ("number.decimal-comma", include_str!("why/number.decimal-comma.md")),
    ("optics.coat", include_str!("why/optics.coat.md")),
    ("optics.coherent-thick", include_str!("why/optics.coherent-thick.md")),
    ("optics.data-range", include_str!("why/optics.data-range.md")),
    ("optics.no-index", include_str!("why/optics.no-index.md")),
    ("polarity.flipped", include_str!("why/polarity.flipped.md")),
    ("polarity.same", include_str!("why/polarity.same.md")),
    ("require.failed", include_str!("why/require.failed.md")),
    ("require.unknown-metric", include_str!("why/require.unknown-metric.md")),
    ("spectrum.table", include_str!("why/spectrum.table.md")),
    ("structure.empty", include_str!("why/structure.empty.md")),
    ("structure.nesting", include_str!("why/structure.nesting.md")),
    ("structure.no-absorber", include_str!("why/structure.no-absorber.md")),
    ("structure.no-contact", include_str!("why/structure.no-contact.md")),
    ("structure.no-wafer", include_str!("why/structure.no-wafer.md")),
    ("structure.order", include_str!("why/structure.order.md")),
    ("structure.too-many", include_str!("why/structure.too-many.md")),
    ("syntax.limit", include_str!("why/syntax.limit.md")),
    ("syntax.number", include_str!("why/syntax.number.md")),
    ("syntax.stray-close", include_str!("why/syntax.stray-close.md")),
    ("syntax.unclosed", include_str!("why/syntax.unclosed.md")),
    ("syntax.unexpected", include_str!("why/syntax.unexpected.md")),
    ("syntax.unterminated", include_str!("why/syntax.unterminated.md")),
    ("transport.missing", include_str!("why/transport.missing.md")),
    ("tunnel.absorbs", include_str!("why/tunnel.absorbs.md")),
    ("tunnel.missing", include_str!("why/tunnel.missing.md")),
    ("tunnel.peak", include_str!("why/tunnel.peak.md")),
    ("tunnel.polarity", include_str!("why/tunnel.polarity.md")),
    ("unit.dimension", include_str!("why/unit.dimension.md")),
    ("unit.missing", include_str!("why/unit.missing.md")),
    ("unit.unknown", include_str!("why/unit.unknown.md")),
    ("unit.unlikely", include_str!("why/unit.unlikely.md")),
    ("use.cycle", include_str!("why/use.cycle.md")),
    ("use.missing", include_str!("why/use.missing.md")),
    ("use.outside", include_str!("why/use.outside.md")),
    ("value.conflict", include_str!("why/value.conflict.md")),
    ("value.missing", include_str!("why/value.missing.md")),
    ("value.range", include_str!("why/value.range.md")),
];

/// The page of `code`.
pub fn page(code: &str) -> Option<&'static str> {
    PAGES.iter().find(|(name, _)| *name == code).map(|(_, text)| *text)
}

/// The first sentence of a page's *What it reports*.
pub fn summary(page: &str) -> String {
    let body = page.split_once("## What it reports").map_or("", |(_, rest)| rest).trim_start();
    let paragraph = body.split("\n\n").next().unwrap_or_default().replace('\n', " ");
    let end = paragraph.find(". ").unwrap_or(paragraph.len());
    paragraph[..end].trim_end_matches('.').to_owned()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn pages_stand_in_alphabetical_order() {
        assert!(PAGES.is_sorted_by(|a, b| a.0 < b.0));
    }

    #[test]
    fn a_summary_is_one_sentence() {
        let page = "# a.b\n\n## What it reports\n\nA gap that\nis 1.4 eV. And more.\n\n## Why";
        assert_eq!(summary(page), "A gap that is 1.4 eV");
    }
}
