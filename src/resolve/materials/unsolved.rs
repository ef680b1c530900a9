//! What to say where a family cannot give what was asked of it, with what it can give.

use crate::finding::Finding;
use crate::materials::ROOM_TEMPERATURE_K;
use crate::materials::alloy::solve::{GapReach, Unsolved, Wanted, gap_reach, lattice_reach, solve};
use crate::materials::alloy::{Composition, Family};
use crate::resolve::materials::phrases::{Phrase, Reference};
use crate::source::Span;
use crate::syntax::Qualifier;
use crate::units::number;

/// A phrase about a family, and where its parts stand.
pub(super) struct Asked<'a> {
    pub(super) request: &'a Phrase<'a>,
    pub(super) family: &'a Family,
    pub(super) matched: Option<(Span, Reference)>,
    /// Å at K.
    pub(super) lattice: Option<(f64, f64)>,
    pub(super) gap: Option<Span>,
    pub(super) ordered: Option<Span>,
    pub(super) fractions: Vec<Span>,
    /// Fractions nobody stated, and the family took.
    pub(super) taken: Vec<(String, f64)>,
}

impl<'a> Asked<'a> {
    pub(super) fn new(request: &'a Phrase<'a>, family: &'a Family) -> Self {
        Self {
            request,
            family,
            matched: None,
            lattice: None,
            gap: None,
            ordered: None,
            fractions: Vec::new(),
            taken: Vec::new(),
        }
    }

    fn span(&self) -> Span {
        self.request.phrase.span
    }

    fn name(&self) -> &str {
        &self.request.phrase.name.value
    }

    /// Points at the layer a phrase is matched to.
    fn beside(&self, finding: Finding) -> Finding {
        match (&self.matched, self.lattice) {
            (Some((_, beneath)), Some((angstrom, _))) => {
                finding.beside(beneath.span, format!("`{}`, {angstrom:.4} Å", beneath.material.label))
            }
            _ => finding,
        }
    }
}

/// The phrase in short: its name and the qualifiers without their values.
pub(super) fn written(request: &Phrase<'_>) -> String {
    let matched = request.phrase.qualifiers.iter().any(|it| matches!(it, Qualifier::Matched { .. }));
    let name = &request.phrase.name.value;
    if matched { format!("{name} matched") } else { name.clone() }
}

fn round(value: f64, digits: i32) -> f64 {
    let scale = 10f64.powi(digits);
    (value * scale).round() / scale
}

/// An energy for people, to the meV.
pub(super) fn ev(value: f64) -> String {
    format!("{} eV", number(round(value, 3)))
}

fn span_text(reach: &GapReach) -> String {
    let (low, high) = (reach.low.0.ev, reach.high.0.ev);
    if high - low < 5e-4 {
        return ev(low);
    }
    format!("{} to {}", number(round(low, 2)), ev(round(high, 2)))
}

/// A gap asked for beside what already fixes the composition is fine where it is the gap the
/// composition has, to the digits it was printed with.
pub(super) fn leniently(
    family: &Family,
    asked: &Asked<'_>,
    wanted: &[Wanted],
    error: &Unsolved,
) -> Option<Composition> {
    if *error != Unsolved::Over || asked.gap.is_none() {
        return None;
    }
    let rest: Vec<Wanted> = wanted.iter().filter(|wish| !matches!(wish, Wanted::Gap(_))).cloned().collect();
    let gap = wanted.iter().find_map(|wish| match wish {
        Wanted::Gap(ev) => Some(*ev),
        _ => None,
    })?;
    let composition = solve(family, &rest).ok()?;
    let own = family.bands(&composition).gap(ROOM_TEMPERATURE_K)?.ev;
    ((own - gap).abs() < 5e-4).then_some(composition)
}

/// The finding for a phrase that no composition meets.
pub(super) fn finding(asked: &Asked<'_>, wanted: &[Wanted], error: &Unsolved) -> Finding {
    let gap = wanted.iter().find_map(|wish| match wish {
        Wanted::Gap(ev) => Some(*ev),
        _ => None,
    });
    match (error, gap) {
        (Unsolved::Gap(reach), Some(gap)) => out_of_reach(asked, gap, reach),
        (Unsolved::Over, Some(gap)) if asked.matched.is_some() => matched_has_one_gap(asked, gap),
        (Unsolved::Lattice(low, high), _) => unmatchable(asked, (*low, *high)),
        (Unsolved::Open(count), _) => open(asked, *count, gap),
        (Unsolved::Over, _) => over(asked),
        _ => incomplete(asked),
    }
}

fn out_of_reach(asked: &Asked<'_>, gap: f64, reach: &GapReach) -> Finding {
    let (name, family) = (asked.name(), asked.family);
    let place = asked.gap.unwrap_or(asked.span());
    let nearest = if gap < reach.low.0.ev { &reach.low } else { &reach.high };
    let label = family.label(&nearest.1);
    let kind = nearest.0.kind.word();
    let Some((_, beneath)) = &asked.matched else {
        let finding = Finding::error(
            "gap.unreachable",
            format!("`{name}` cannot have a gap of {}: the family spans {}", ev(gap), span_text(reach)),
        )
        .at(place, format!("the nearest is {} at `{label}`, {kind}", ev(nearest.0.ev)));
        let finding = finding.help(format!("write `{name} of gap {}`", ev(nearest.0.ev)));
        return matched_hint(asked, finding);
    };
    let whole = gap_reach(family, None)
        .map_or_else(String::new, |whole| format!("; unmatched, the family spans {}", span_text(&whole)));
    let finding = Finding::error(
        "gap.unreachable",
        format!(
            "`{name}` matched to `{}` cannot have a gap of {}: matched compositions span {}{whole}",
            beneath.material.label,
            ev(gap),
            span_text(reach)
        ),
    )
    .at(place, format!("the nearest is {} at `{label}`, {kind}", ev(nearest.0.ev)));
    asked.beside(finding).help(format!("write `{name} matched of gap {}`", ev(nearest.0.ev)))
}

/// Without `matched`, the composition that matches what lies beneath is still worth a word.
fn matched_hint(asked: &Asked<'_>, finding: Finding) -> Finding {
    let Some(beneath) = asked.request.beneath else { return finding };
    let temperature_k = asked.request.temperature_k;
    let Some(angstrom) = beneath.material.lattice_constant(temperature_k) else { return finding };
    match gap_reach(asked.family, Some((angstrom, temperature_k))) {
        Some(reach) => finding.help(format!(
            "`{} matched` to `{}` has {}",
            asked.name(),
            beneath.material.label,
            span_text(&reach)
        )),
        None => finding,
    }
}

/// A ternary matched to a lattice has one composition, and so one gap.
fn matched_has_one_gap(asked: &Asked<'_>, gap: f64) -> Finding {
    let (name, family) = (asked.name(), asked.family);
    let place = asked.gap.unwrap_or(asked.span());
    let own = asked.lattice.and_then(|lattice| gap_reach(family, Some(lattice)));
    let whole = gap_reach(family, None);
    let (Some(own), Some(whole)) = (own, whole) else { return unmatched(asked) };
    let has = ev(own.low.0.ev);
    let beneath = asked.matched.as_ref().map_or("", |(_, beneath)| beneath.material.label.as_str());
    let finding = Finding::error(
        "gap.unreachable",
        format!(
            "`{name}` matched to `{beneath}` cannot have a gap of {}: it has {has}, and the family spans {}",
            ev(gap),
            span_text(&whole)
        ),
    )
    .at(place, format!("`{}` has {has}", family.label(&own.low.1)));
    let finding = asked.beside(finding).help(format!("write `{name} matched`, which has {has}"));
    let by_ordering = family.ordering.as_ref().is_some_and(|it| (it.span_ev.0..=it.span_ev.1).contains(&gap));
    if by_ordering {
        finding.help(format!("write `{name} matched ordered to {}`", ev(gap)))
    } else if (whole.low.0.ev..=whole.high.0.ev).contains(&gap) {
        finding.help(format!("write `{name} of gap {}`, which is not matched", ev(gap)))
    } else {
        finding
    }
}

fn unmatched(asked: &Asked<'_>) -> Finding {
    let reach = lattice_reach(asked.family, asked.request.temperature_k).unwrap_or((0.0, 0.0));
    unmatchable(asked, reach)
}

fn unmatchable(asked: &Asked<'_>, (low, high): (f64, f64)) -> Finding {
    let name = asked.name();
    let place = asked.matched.as_ref().map_or(asked.span(), |(span, _)| *span);
    let (angstrom, _) = asked.lattice.unwrap_or_default();
    let beneath = asked.matched.as_ref().map_or("the layer beneath", |(_, it)| it.material.label.as_str());
    let nearest = if angstrom < low { low } else { high };
    let off = (nearest / angstrom - 1.0) * 100.0;
    let finding = Finding::error(
        "lattice.unmatchable",
        format!(
            "`{name}` cannot match `{beneath}`: it reaches {low:.4} to {high:.4} Å, and {angstrom:.4} Å are due"
        ),
    )
    .at(place, format!("the nearest is {nearest:.4} Å, {off:+.2} % off"));
    let finding = asked.beside(finding);
    match edge_member(asked.family, nearest, asked.request.temperature_k) {
        Some(member) => finding
            .help(format!("write `{member}`, the nearest, or choose a family that spans {angstrom:.4} Å")),
        None => finding.help(format!("choose a family that spans {angstrom:.4} Å")),
    }
}

/// The end member of that lattice constant.
fn edge_member(family: &Family, angstrom: f64, temperature_k: f64) -> Option<String> {
    family
        .members
        .iter()
        .flatten()
        .map(|member| &member.material)
        .find(|material| {
            material.lattice_constant(temperature_k).is_some_and(|own| (own - angstrom).abs() < 1e-4)
        })
        .map(|material| material.name.clone())
}

fn open(asked: &Asked<'_>, count: usize, gap: Option<f64>) -> Finding {
    let (name, family) = (asked.name(), asked.family);
    let shown = if asked.matched.is_some() { format!("{name} matched") } else { name.to_owned() };
    let noun = match count {
        1 => "one fraction",
        2 => "two fractions",
        _ => "three fractions",
    };
    let finding = Finding::error("material.open", format!("`{shown}` leaves {noun} of its composition open"))
        .at(asked.span(), format!("{} more to say", if count == 1 { "one thing" } else { "some things" }));
    if !family.frame().is_empty() {
        let whole = family.label(&middle(family));
        let reach = gap_reach(family, None).map_or((0.0, 9.0), |reach| (reach.low.0.ev, reach.high.0.ev));
        // Gaps people build tandems with, well inside the family.
        let gap = [1.68, 1.15].into_iter().find(|gap| (reach.0 + 0.05..reach.1 - 0.05).contains(gap));
        let gap = gap.unwrap_or(round((reach.0 + reach.1) / 2.0, 2));
        return finding.help(format!("write `{name} of gap {}`, or a formula such as `{whole}`", ev(gap)));
    }
    let mixed = family.sites.iter().find(|site| site.len() > 1);
    let element = mixed.and_then(|site| site.first()).map_or("Al", String::as_str);
    if family.freedom() == 1 {
        let middle = family.ordering.as_ref().map_or(0.3, |ordering| round(ordering.fraction, 2));
        return finding.help(format!(
            "write `{name} matched`, `{name} of gap 1.8 eV` or `{name} with {element} {middle}`"
        ));
    }
    if let Some(gap) = gap {
        return finding.help(format!("write `{name} matched of gap {}`", ev(gap)));
    }
    let gap = reachable_gap(asked).map_or_else(|| "2.1 eV".to_owned(), |gap| ev(round(gap, 2)));
    finding.help(format!("write `{name} matched of gap {gap}` or `{name} matched with {element} 0.2`"))
}

/// A composition to show how a formula is written: one fifth of the second element on each
/// sublattice.
fn middle(family: &Family) -> Composition {
    let mut composition = family.corner();
    for site in composition.iter_mut().filter(|site| site.len() > 1) {
        site[0] = 0.8;
        site[1] = 0.2;
    }
    composition
}

/// A gap in the middle of what the phrase can still reach.
fn reachable_gap(asked: &Asked<'_>) -> Option<f64> {
    let reach = gap_reach(asked.family, asked.lattice)?;
    Some((reach.low.0.ev + reach.high.0.ev) / 2.0)
}

fn over(asked: &Asked<'_>) -> Finding {
    let (name, freedom) = (asked.name(), asked.family.freedom());
    let place = asked.fractions.last().copied().or(asked.gap).unwrap_or(asked.span());
    let noun = if freedom == 1 { "one thing" } else { "two things" };
    Finding::error(
        "material.open",
        format!("`{name}` has a composition after {noun}, and more is said of it"),
    )
    .at(place, "one too many")
    .help("keep what the composition should follow from, and leave the rest out")
}

fn incomplete(asked: &Asked<'_>) -> Finding {
    let name = asked.name();
    if asked.fractions.is_empty() {
        return Finding::error(
            "material.incomplete",
            format!("the end members of `{name}` lack a lattice or a gap"),
        )
        .at(asked.span(), "the composition cannot be worked out")
        .help("state the fractions instead, such as `with In 0.49`");
    }
    Finding::error("formula.composition", format!("the fractions of `{name}` cannot hold together"))
        .at(asked.fractions[0], "fractions of one sublattice sum to 1")
        .help("state fewer of them, or smaller ones")
}

/// A gap by ordering that the family does not show at this composition.
pub(super) fn ordering(asked: &Asked<'_>, composition: &Composition, gap: f64) -> Option<Finding> {
    let place = asked.ordered.unwrap_or(asked.span());
    let name = asked.name();
    let Some((low, high)) = asked.family.ordered_span_ev(composition) else {
        return Some(
            Finding::error("gap.unreachable", format!("`{name}` shows no ordering that would move its gap"))
                .at(place, "no ordering is known of this family")
                .help(format!("write `{} of gap {}`", written(asked.request), ev(gap))),
        );
    };
    // 5 meV: the span is given with two decimals.
    if (low - 5e-3..=high + 5e-3).contains(&gap) {
        return None;
    }
    Some(
        Finding::error(
            "gap.unreachable",
            format!(
                "ordering takes the gap of `{}` from {} down to {}, not to {}",
                asked.family.label(composition),
                ev(round(high, 2)),
                ev(round(low, 2)),
                ev(gap)
            ),
        )
        .at(place, "beyond what ordering does")
        .help(format!("write `ordered to {}`", ev(round(if gap < low { low } else { high }, 2)))),
    )
}
