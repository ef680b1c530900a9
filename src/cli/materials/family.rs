//! `bandloom materials GaInP`: what a family reaches before its composition is said.

use crate::cli::materials::{detail, table};
use crate::materials::alloy::solve::{crossing, gap_reach, lattice_reach};
use crate::materials::alloy::{BowingLaw, Family};
use crate::materials::{Material, ROOM_TEMPERATURE_K, trim};
use crate::resolve::materials::look_up;

/// The wafers a family is shown on where none is named.
const WAFERS: &[&str] = &["GaAs", "Ge", "InP"];

/// Everything known of a family at any composition, a line each.
pub(super) fn sheet(family: &Family, on: Option<&Material>, width: usize) -> String {
    let members = family.members.iter().flatten().map(|member| member.material.label.clone());
    let mut rows = vec![
        ("family".to_owned(), family.about.clone()),
        ("members".to_owned(), members.collect::<Vec<_>>().join(", ")),
    ];
    let mut row = |what: &str, value: String| rows.push((what.to_owned(), value));
    if let Some(reach) = gap_reach(family, None) {
        for (what, (gap, composition)) in [("gap", &reach.low), ("to", &reach.high)] {
            let label = family.label(composition);
            row(what, format!("{:.3} eV at 300 K, {}, `{label}`", gap.ev, gap.kind.word()));
        }
    }
    if let Some((low, high)) = lattice_reach(family, ROOM_TEMPERATURE_K) {
        row("lattice", format!("{low:.4} to {high:.4} Å at 300 K"));
    }
    if let (1, Some(at)) = (family.freedom(), crossing(family)) {
        let site = family.sites.iter().find(|site| site.len() > 1);
        if let Some(element) = site.and_then(|site| site.first()) {
            row("crossing", format!("between direct and indirect at {element} {at:.3}, 300 K"));
        }
    }
    for bowing in &family.bowings {
        let laws: Vec<String> = [("direct", "Γ"), ("x", "X"), ("l", "L")]
            .into_iter()
            .filter_map(|(name, valley)| {
                Some(format!("{valley} {}", law(bowing.laws.get(name)?, &bowing.pair[0])))
            })
            .collect();
        if !laws.is_empty() {
            let [first, second] = &bowing.pair;
            // Silicon and germanium share both sublattices.
            let with = if bowing.with.is_empty() { String::new() } else { format!(" with {}", bowing.with) };
            row("bowing", format!("{first}–{second}{with}: {}", laws.join(", ")));
        }
    }
    let named: Vec<Material> = match on {
        Some(wafer) => vec![wafer.clone()],
        None => {
            WAFERS.iter().filter_map(|name| look_up(name, None).0.value).map(|it| (*it).clone()).collect()
        }
    };
    for wafer in &named {
        row("matched", matched(family, wafer));
    }
    table::written(&family.name, &rows, &family.origins, width)
}

/// A family for programs, at 300 K.
pub(super) fn document(family: &Family) -> serde_json::Value {
    let members: Vec<&str> =
        family.members.iter().flatten().map(|member| member.material.label.as_str()).collect();
    let reach = gap_reach(family, None);
    let end = |(gap, composition): &(crate::materials::Gap, crate::materials::alloy::Composition)| serde_json::json!({ "gap_ev": gap.ev, "gap_kind": gap.kind.word(), "label": family.label(composition) });
    serde_json::json!({
        "name": family.name,
        "about": family.about,
        "members": members,
        "lowest": reach.as_ref().map(|reach| end(&reach.low)),
        "highest": reach.as_ref().map(|reach| end(&reach.high)),
        "lattice_constant_angstrom":
            lattice_reach(family, ROOM_TEMPERATURE_K).map(|(low, high)| [low, high]),
        "origins": detail::origins(&family.origins),
    })
}

/// `0.65 eV`, `-0.127 + 1.31·x eV with x of Al`
fn law(law: &BowingLaw, element: &str) -> String {
    if law.slope == 0.0 {
        return format!("{} eV", trim(law.constant));
    }
    let sign = if law.slope < 0.0 { "−" } else { "+" };
    format!("{} {sign} {}·x eV with x of {element}", trim(law.constant), trim(law.slope.abs()))
}

/// What the family gives where its lattice is that of a wafer, at 300 K.
fn matched(family: &Family, wafer: &Material) -> String {
    let lattice = wafer.lattice_constant(ROOM_TEMPERATURE_K).map(|a| (a, ROOM_TEMPERATURE_K));
    let Some(reach) = lattice.and_then(|lattice| gap_reach(family, Some(lattice))) else {
        return format!("not to {}", wafer.label);
    };
    let (low, high) = (&reach.low, &reach.high);
    let label = |at: &crate::materials::alloy::Composition| family.label(at);
    if high.0.ev - low.0.ev < 1e-6 {
        return format!("to {}: {:.3} eV, {}, `{}`", wafer.label, low.0.ev, low.0.kind.word(), label(&low.1));
    }
    format!(
        "to {}: {:.3} eV `{}` to {:.3} eV `{}`",
        wafer.label,
        low.0.ev,
        label(&low.1),
        high.0.ev,
        label(&high.1)
    )
}
