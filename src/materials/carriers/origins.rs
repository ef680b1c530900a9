//! Origins of what is worked out rather than stated.

use crate::materials::{Material, Origin, OriginKind};

/// One origin for each quantity of carriers that follows from something else: densities of
/// states, affinity, radiative coefficient (where `has_edge`: the optics show a gap).
pub fn derived(material: &Material, has_edge: bool) -> Vec<Origin> {
    let model = |what: &str, cite: &str| Origin {
        what: what.to_owned(),
        kind: OriginKind::Model,
        cite: cite.to_owned(),
    };
    let room = crate::materials::ROOM_TEMPERATURE_K;
    let mut origins = Vec::new();
    let has_states =
        material.conduction_density_per_m3(room).is_some() && material.valence_density_per_m3(room).is_some();
    if has_states {
        origins.push(model("densities of states", "parabolic bands of the masses; holes by the stated mass or by the Luttinger parameters averaged over directions"));
    }
    if has_states && has_edge && material.carriers.radiative_m3_per_s.is_none() {
        origins.push(model("radiative", "W. van Roosbroeck, W. Shockley, Phys. Rev. 94, 1558 (1954), from the absorption and the index used here"));
    }
    if material.constants.get("affinity").is_none() && material.constants.get("valence_offset").is_some() {
        origins.push(model("affinity", "valence-band offset and gap, with gallium arsenide at 4.07 eV (S. M. Sze, K. K. Ng, Physics of Semiconductor Devices, 3rd ed., Wiley (2007))"));
    }
    origins
}
