//! Everything known of one material.

use std::collections::BTreeMap;

use serde::Serialize;

use crate::cli::materials::{Setting, mismatch, table};
use crate::materials::carriers::Carrier;
use crate::materials::{Material, Origin};

/// A material's numbers at one temperature and doping.
#[derive(Serialize)]
pub(super) struct Detail {
    name: String,
    label: String,
    composition: BTreeMap<String, f64>,
    temperature_k: f64,
    gap_ev: Option<f64>,
    gap_kind: Option<&'static str>,
    /// By valley: `gamma`, `x`, `l`.
    valleys_ev: BTreeMap<&'static str, f64>,
    lattice_constant_angstrom: Option<f64>,
    wafer: Option<String>,
    /// Relaxed, as a share.
    mismatch: Option<f64>,
    index: Vec<IndexAt>,
    affinity_ev: Option<f64>,
    static_permittivity: Option<f64>,
    conduction_density_per_cm3: Option<f64>,
    valence_density_per_cm3: Option<f64>,
    intrinsic_density_per_cm3: Option<f64>,
    doping_per_cm3: f64,
    electron: Transport,
    hole: Transport,
    radiative_coefficient_cm3_per_s: Option<f64>,
    damage: Option<DamageDetail>,
    density_g_per_cm3: Option<f64>,
    cautions: Vec<String>,
    origins: Vec<OriginDetail>,
}

#[derive(Serialize)]
struct IndexAt {
    wavelength_nm: f64,
    n: Option<f64>,
    k: Option<f64>,
    absorption_per_cm: Option<f64>,
}

/// Of one carrier; `None` where nothing is known.
#[derive(Serialize)]
struct Transport {
    mobility_cm2_per_v_s: Option<f64>,
    /// Non-radiative, as a minority carrier.
    lifetime_s: Option<f64>,
    /// With radiative and Auger recombination, as a minority carrier.
    whole_lifetime_s: Option<f64>,
    /// By `whole_lifetime_s`.
    diffusion_length_um: Option<f64>,
    /// Of the process with two of this carrier.
    auger_cm6_per_s: Option<f64>,
    /// With this as the majority carrier.
    doping_limit_per_cm3: Option<f64>,
    /// With this as the majority carrier, at the doping shown.
    gap_narrowing_ev: Option<f64>,
}

#[derive(Serialize)]
struct DamageDetail {
    particle: &'static str,
    energy_mev: f64,
    electron: Option<f64>,
    hole: Option<f64>,
}

#[derive(Serialize)]
struct OriginDetail {
    what: String,
    kind: &'static str,
    cite: String,
}

/// Origins for programs.
pub(super) fn origins(origins: &[Origin]) -> serde_json::Value {
    table::value(&origins.iter().map(origin).collect::<Vec<_>>())
}

fn origin(origin: &Origin) -> OriginDetail {
    OriginDetail { what: origin.what.clone(), kind: origin.kind.word(), cite: origin.cite.clone() }
}

impl Detail {
    pub(super) fn of(material: &Material, setting: &Setting) -> Self {
        let kelvin = setting.temperature_k;
        let gap = material.gap(kelvin);
        let bands = material.bands.as_ref();
        let valleys = bands.map(|bands| [("gamma", &bands.gamma), ("x", &bands.x), ("l", &bands.l)]);
        let valleys =
            valleys.into_iter().flatten().filter_map(|(name, valley)| Some((name, valley.as_ref()?)));
        let shift_ev = material.edge_shift_ev(kelvin);
        let index = setting.wavelengths_m.iter().map(|&metres| {
            let inside = material.optics.range(shift_ev).is_none_or(|(from, to)| {
                // A table answers outside its range with its end; that is no datum.
                (from * 0.999_999..=to * 1.000_001).contains(&metres)
            });
            let found = material.index(metres, kelvin).filter(|_| inside);
            IndexAt {
                wavelength_nm: metres * 1e9,
                n: found.map(|(n, _)| n),
                k: found.map(|(_, k)| k),
                absorption_per_cm: found.map(|(_, k)| 4.0 * std::f64::consts::PI * k / metres / 100.0),
            }
        });
        let per_cm3 = |value: Option<f64>| value.map(|value| value * 1e-6);
        Self {
            name: material.name.clone(),
            label: material.label.clone(),
            composition: material.composition.iter().cloned().collect(),
            temperature_k: kelvin,
            gap_ev: gap.map(|gap| gap.ev),
            gap_kind: gap.map(|gap| gap.kind.word()),
            valleys_ev: valleys.map(|(name, valley)| (name, valley.at(kelvin))).collect(),
            lattice_constant_angstrom: material.lattice_constant(kelvin),
            wafer: setting.wafer.as_ref().map(|wafer| wafer.label.clone()),
            mismatch: mismatch(material, setting.wafer.as_deref(), kelvin),
            index: index.collect(),
            affinity_ev: material.affinity_ev(kelvin),
            static_permittivity: material.static_permittivity(),
            conduction_density_per_cm3: per_cm3(material.conduction_density_per_m3(kelvin)),
            valence_density_per_cm3: per_cm3(material.valence_density_per_m3(kelvin)),
            intrinsic_density_per_cm3: per_cm3(material.intrinsic_density_per_m3(kelvin)),
            doping_per_cm3: setting.doping_per_m3 * 1e-6,
            electron: Transport::of(material, Carrier::Electron, setting),
            hole: Transport::of(material, Carrier::Hole, setting),
            radiative_coefficient_cm3_per_s: material
                .radiative_coefficient_m3_per_s(kelvin)
                .map(|value| value * 1e6),
            damage: material.damage().map(|damage| DamageDetail {
                particle: damage.particle.word(),
                energy_mev: damage.energy_j / 1.602_176_634e-13,
                electron: damage.constant.electron,
                hole: damage.constant.hole,
            }),
            density_g_per_cm3: material.density_g_per_cm3,
            cautions: material.cautions.clone(),
            origins: material.origins.iter().map(origin).collect(),
        }
    }

    /// A line for each thing known, then the sources.
    pub(super) fn sheet(&self, material: &Material, width: usize) -> String {
        let mut rows: Vec<(String, String)> = Vec::new();
        let mut row = |what: &str, value: String| rows.push((what.to_owned(), value));
        let at = format!("at\u{a0}{}\u{a0}K", table::short(self.temperature_k, 5));
        if let (Some(gap), Some(kind)) = (self.gap_ev, self.gap_kind) {
            row("gap", format!("{gap:.4}\u{a0}eV {at}, {kind}"));
        }
        if self.valleys_ev.len() > 1 {
            let names = [("gamma", "Γ"), ("x", "X"), ("l", "L")];
            let known = names.into_iter().filter_map(|(key, name)| {
                Some(format!("{name}\u{a0}{:.3}\u{a0}eV", self.valleys_ev.get(key)?))
            });
            row("valleys", known.collect::<Vec<_>>().join(", "));
        }
        if let Some(angstrom) = self.lattice_constant_angstrom {
            row("lattice", format!("{angstrom:.5}\u{a0}Å {at}"));
        }
        if let (Some(mismatch), Some(wafer)) = (self.mismatch, &self.wafer) {
            row("mismatch", format!("{:+.4}\u{a0}% on {wafer} {at}", mismatch * 100.0));
        }
        for index in &self.index {
            let nm = format!("{}\u{a0}nm", table::short(index.wavelength_nm, 5));
            let value = match (index.n, index.k, index.absorption_per_cm) {
                (Some(n), Some(k), Some(alpha)) => format!(
                    "n\u{a0}{n:.4}, k\u{a0}{}, α\u{a0}{}\u{a0}/cm at\u{a0}{nm}",
                    table::short(k, 4),
                    if alpha < 1e4 { table::short(alpha, 3) } else { format!("{alpha:.2e}") }
                ),
                _ => format!("no data at {nm}"),
            };
            row("index", value);
        }
        self.electrical(&mut row);
        if let Some(density) = self.density_g_per_cm3 {
            row("density", format!("{density:.3}\u{a0}g/cm3"));
        }
        if !self.cautions.is_empty() {
            row("caution", self.cautions.join(", "));
        }
        table::written(&self.label, &rows, &material.origins, width)
    }

    fn electrical(&self, row: &mut impl FnMut(&str, String)) {
        if let Some(affinity) = self.affinity_ev {
            row("affinity", format!("{affinity:.3}\u{a0}eV"));
        }
        if let Some(permittivity) = self.static_permittivity {
            row("permittivity", format!("{} static", table::short(permittivity, 3)));
        }
        let densities = [
            ("N_C", self.conduction_density_per_cm3),
            ("N_V", self.valence_density_per_cm3),
            ("n_i", self.intrinsic_density_per_cm3),
        ];
        let known: Vec<String> = densities
            .into_iter()
            .filter_map(|(name, value)| Some(format!("{name}\u{a0}{}\u{a0}/cm3", table::short(value?, 3))))
            .collect();
        if !known.is_empty() {
            row("densities", known.join(", "));
        }
        for (what, carrier) in [("electrons", &self.electron), ("holes", &self.hole)] {
            let text = carrier.text(self.doping_per_cm3);
            if !text.is_empty() {
                row(what, text);
            }
        }
        let auger = |name: &str, value: Option<f64>| {
            value.map(|value| format!("Auger\u{a0}{name}\u{a0}{}\u{a0}cm6/s", table::short(value, 2)))
        };
        let radiative = self.radiative_coefficient_cm3_per_s;
        let recombination: Vec<String> = radiative
            .map(|value| format!("B\u{a0}{}\u{a0}cm3/s", table::short(value, 3)))
            .into_iter()
            .chain(auger("nnp", self.electron.auger_cm6_per_s))
            .chain(auger("npp", self.hole.auger_cm6_per_s))
            .collect();
        if !recombination.is_empty() {
            row("recombination", recombination.join(", "));
        }
        let polar = |of: fn(&Transport) -> Option<String>| -> Option<String> {
            let both = [("n", of(&self.electron)), ("p", of(&self.hole))];
            let known: Vec<String> =
                both.into_iter().filter_map(|(name, text)| Some(format!("{name}\u{a0}{}", text?))).collect();
            (!known.is_empty()).then(|| known.join(", "))
        };
        let limit = |own: &Transport| {
            own.doping_limit_per_cm3.map(|limit| format!("to\u{a0}{}\u{a0}/cm3", table::short(limit, 2)))
        };
        if let Some(text) = polar(limit) {
            row("doping", text);
        }
        let narrowing = |own: &Transport| {
            own.gap_narrowing_ev.map(|ev| format!("{}\u{a0}meV", table::short(ev * 1e3, 3)))
        };
        if let Some(text) = polar(narrowing) {
            row("narrowing", format!("{text} at\u{a0}{}\u{a0}/cm3", table::short(self.doping_per_cm3, 3)));
        }
        if let Some(damage) = &self.damage {
            let both = [("electrons", damage.electron), ("holes", damage.hole)];
            let known: Vec<String> = both
                .into_iter()
                .filter_map(|(name, value)| {
                    Some(format!("{}\u{a0}for minority\u{a0}{name}", table::short(value?, 3)))
                })
                .collect();
            row(
                "damage",
                format!(
                    "K_L by {} of {}\u{a0}MeV: {}",
                    damage.particle,
                    table::short(damage.energy_mev, 3),
                    known.join(", ")
                ),
            );
        }
    }
}

impl Transport {
    fn of(material: &Material, carrier: Carrier, setting: &Setting) -> Self {
        let (kelvin, doping) = (setting.temperature_k, setting.doping_per_m3);
        let lifetime = material.non_radiative_lifetime_s(carrier, doping, kelvin);
        // Low injection: the majority carrier of the other kind is as dense as the doping.
        let radiative = material.radiative_coefficient_m3_per_s(kelvin).map_or(0.0, |b| b * doping);
        let auger = material.auger_m6_per_s(carrier.other()).map_or(0.0, |c| c * doping * doping);
        let whole = lifetime.map(|lifetime| 1.0 / (1.0 / lifetime + radiative + auger));
        let diffusivity = material.diffusivity_m2_per_s(carrier, doping, kelvin);
        Self {
            mobility_cm2_per_v_s: material.mobility_m2_per_vs(carrier, doping, kelvin).map(|mu| mu * 1e4),
            lifetime_s: lifetime,
            whole_lifetime_s: whole,
            diffusion_length_um: diffusivity.zip(whole).map(|(d, tau)| (d * tau).sqrt() * 1e6),
            auger_cm6_per_s: material.auger_m6_per_s(carrier).map(|value| value * 1e12),
            doping_limit_per_cm3: material.doping_limit_per_m3(carrier).map(|limit| limit * 1e-6),
            gap_narrowing_ev: material.gap_narrowing_ev(carrier, doping, kelvin),
        }
    }

    fn text(&self, doping_per_cm3: f64) -> String {
        let mut parts = Vec::new();
        if let Some(mobility) = self.mobility_cm2_per_v_s {
            let doping = table::short(doping_per_cm3, 3);
            parts.push(format!("{}\u{a0}cm2/V/s at\u{a0}{doping}\u{a0}/cm3", table::short(mobility, 3)));
        }
        if let (Some(lifetime), Some(whole)) = (self.lifetime_s, self.whole_lifetime_s) {
            parts.push(format!("as minority {} non-radiative, {} in all", seconds(lifetime), seconds(whole)));
        }
        if let Some(length) = self.diffusion_length_um {
            parts.push(format!("diffusion length {}\u{a0}µm", table::short(length, 3)));
        }
        parts.join("; ")
    }
}

/// `55 ns`, `1.8 µs`
fn seconds(value: f64) -> String {
    let units = [(1e-12, "ps"), (1e-9, "ns"), (1e-6, "µs"), (1e-3, "ms")];
    let fitting = units.into_iter().rev().find(|(unit, _)| value >= *unit).unwrap_or(units[0]);
    format!("{}\u{a0}{}", table::short(value / fitting.0, 3), fitting.1)
}
