//! One number for what a design means.

use sha2::{Digest, Sha256};

use crate::design::{Condition, Design, Layer, OpticsModel, VoltageModel};
use crate::light::Spectrum;
use crate::materials::optics::Optics;
use crate::materials::{Bands, Material};

/// SHA-256 of the resolved design, hexadecimal: the same for the same design whatever the layout
/// or names of the file.
///
/// In it: layers, junctions, interconnects, fingers, switches, conditions with the whole light,
/// requirements, free values, tolerances. Not in it: places in the text, the stack's name and
/// note, words as written, what is accepted or charted.
pub fn design_hash(design: &Design) -> String {
    let mut hash = Canonical(Sha256::new());
    hash.text("bandloom design 1");
    hash.debug(&(design.growth, design.terminals));
    match design.optics {
        OpticsModel::OnePass { front_reflectance, .. } => {
            hash.text("one_pass");
            hash.number(front_reflectance);
        }
        OpticsModel::Interference { .. } => hash.text("interference"),
    }
    if let Some(texture) = design.texture {
        hash.debug(&("texture", texture.pyramids, texture.lambertian_rear));
    }
    hash.list(&design.layers, Canonical::layer);
    hash.list(&design.junctions, |hash, junction| {
        hash.text(&junction.name.value);
        hash.debug(&(&junction.layers, junction.separate));
        hash.voltage(&junction.voltage);
        hash.optional(junction.shunt_ohm_m2);
        hash.optional(junction.breakdown_v);
    });
    hash.list(&design.interconnects, |hash, interconnect| {
        hash.text(&interconnect.name.value);
        hash.debug(&(interconnect.kind, &interconnect.layers, interconnect.below_junctions));
        hash.optional(interconnect.resistance_ohm_m2);
        hash.optional(interconnect.peak_a_per_m2);
        hash.optional(interconnect.valley_a_per_m2);
    });
    hash.optional(design.fingers.as_ref().map(|fingers| fingers.shading));
    hash.optional(design.fingers.as_ref().map(|fingers| fingers.series_resistance_ohm_m2));
    if let Some(shape) = design.fingers.as_ref().and_then(|fingers| fingers.shape) {
        hash.numbers(&[
            shape.pitch_m,
            shape.width_m,
            shape.height_m,
            shape.length_m,
            shape.resistivity_ohm_m,
            shape.contact_ohm_m2,
        ]);
        hash.optional(shape.sheet_ohm);
    }
    hash.optional(design.area_m2);
    hash.debug(&design.switches);
    hash.list(&design.conditions, Canonical::condition);
    if let Some(season) = &design.season {
        hash.list(&season.rows, |hash, row| {
            hash.number(row.seconds);
            let it = &row.condition;
            hash.text(&it.light.name);
            hash.numbers(&[it.concentration, it.temperature_k, it.incidence_rad]);
        });
    }
    hash.list(&design.requirements, |hash, requirement| {
        hash.text(&requirement.metric.value);
        hash.debug(&requirement.comparison);
        hash.number(requirement.bound);
        hash.list(&requirement.under, |hash, name| hash.text(&name.value));
        hash.optional(requirement.at_yield);
    });
    hash.list(&design.free_values, |hash, free| {
        hash.text(&free.path);
        hash.number(free.range.0);
        hash.number(free.range.1);
        hash.optional(free.value);
    });
    hash.list(&design.tolerances, |hash, tolerance| {
        hash.text(&tolerance.path);
        hash.number(tolerance.amount);
        hash.debug(&tolerance.meaning);
    });
    hash.0.finalize().iter().map(|byte| format!("{byte:02x}")).collect()
}

/// Feeds values so that no two different designs feed the same bytes: texts and lists carry
/// their length, numbers their bits.
struct Canonical(Sha256);

impl Canonical {
    fn text(&mut self, text: &str) {
        self.0.update((text.len() as u64).to_le_bytes());
        self.0.update(text.as_bytes());
    }

    /// For plain enums, flags, ranges and laws, whose debug form is their content.
    fn debug(&mut self, value: &impl std::fmt::Debug) {
        self.text(&format!("{value:?}"));
    }

    fn number(&mut self, value: f64) {
        // −0 and 0 mean the same.
        self.0.update((value + 0.0).to_bits().to_le_bytes());
    }

    fn numbers(&mut self, values: &[f64]) {
        let bytes: Vec<u8> = values.iter().flat_map(|value| (value + 0.0).to_bits().to_le_bytes()).collect();
        self.0.update((values.len() as u64).to_le_bytes());
        self.0.update(&bytes);
    }

    fn optional(&mut self, value: Option<f64>) {
        self.0.update([u8::from(value.is_some())]);
        self.number(value.unwrap_or(0.0));
    }

    fn list<T>(&mut self, items: &[T], each: impl Fn(&mut Self, &T)) {
        self.0.update((items.len() as u64).to_le_bytes());
        for item in items {
            each(self, item);
        }
    }

    fn layer(&mut self, layer: &Layer) {
        self.text(&layer.path);
        self.debug(&(layer.duty, layer.place, layer.extent, layer.strain, layer.collecting));
        self.0.update([u8::from(layer.material.is_some())]);
        if let Some(material) = &layer.material {
            self.material(material);
        }
        self.optional(layer.thickness_m);
        self.0.update([u8::from(layer.doping.is_some())]);
        if let Some(doping) = &layer.doping {
            self.debug(&(doping.polarity, &doping.species));
            self.number(doping.density_per_m3);
        }
        let transport = &layer.transport;
        for value in [
            transport.diffusion_length_m,
            transport.lifetime_s,
            transport.mobility,
            transport.sunward_velocity,
            transport.rear_velocity,
            layer.growth_temperature_k,
            layer.rate_m_per_s,
            layer.offcut_rad,
            layer.sheet_resistance_ohm,
        ] {
            self.optional(value);
        }
    }

    fn material(&mut self, material: &Material) {
        self.text(&material.label);
        self.debug(&material.class);
        self.list(&material.composition, |hash, (element, fraction)| {
            hash.text(element);
            hash.number(*fraction);
        });
        self.optional(material.lattice.map(|lattice| lattice.a300_angstrom));
        self.optional(material.lattice.map(|lattice| lattice.slope_angstrom_per_k));
        if let Some(bands) = &material.bands {
            self.bands(bands);
        }
        for constant in [
            material.elastic.map(|elastic| elastic.c11_gpa),
            material.elastic.map(|elastic| elastic.c12_gpa),
            material.elastic.map(|elastic| elastic.c44_gpa),
            material.density_g_per_cm3,
        ] {
            self.optional(constant);
        }
        match &material.optics {
            Optics::None => self.text("none"),
            Optics::Ideal(ideal) => {
                self.text("ideal");
                self.numbers(&[ideal.gap_ev, ideal.absorbs]);
            }
            Optics::Direct(direct) => {
                self.text("direct");
                self.numbers(&[direct.gap_ev, direct.coefficient_per_m, direct.urbach_ev]);
                self.optional(direct.index);
            }
            Optics::Table(table) => {
                self.text("table");
                self.numbers(&table.wavelength_m);
                self.numbers(&table.n);
                self.numbers(&table.k);
                self.optional(table.gap_ev);
                self.debug(&table.edge_is_direct);
            }
        }
    }

    fn bands(&mut self, bands: &Bands) {
        for valley in [&bands.gamma, &bands.x, &bands.l] {
            self.0.update([u8::from(valley.is_some())]);
            let Some(valley) = valley else { continue };
            self.list(&valley.members, |hash, (weight, law)| {
                hash.number(*weight);
                hash.debug(law);
            });
            self.number(valley.offset_ev);
        }
    }

    fn voltage(&mut self, model: &VoltageModel) {
        match model {
            VoltageModel::RadiativeLimit => self.text("radiative_limit"),
            VoltageModel::Layers => self.text("layers"),
            VoltageModel::Ere(ere) => {
                self.text("ere");
                self.number(*ere);
            }
            VoltageModel::Fit(fit) => {
                self.text("fit");
                self.numbers(&[fit.j01_a_per_m2, fit.j02_a_per_m2, fit.at_k]);
                self.optional(fit.shunt_ohm_m2);
            }
        }
    }

    fn condition(&mut self, condition: &Condition) {
        self.text(&condition.name);
        self.spectrum(&condition.light);
        self.numbers(&[condition.concentration, condition.temperature_k, condition.incidence_rad]);
        self.optional(condition.fluence.map(|fluence| fluence.per_m2));
        self.debug(&condition.fluence.map(|fluence| fluence.particle));
        self.optional(condition.fluence.map(|fluence| fluence.energy_j));
        self.optional(condition.distance_au);
    }

    fn spectrum(&mut self, light: &Spectrum) {
        self.text(&light.name);
        self.numbers(&light.wavelength_m);
        self.numbers(&light.irradiance);
        self.numbers(&[light.total_w_per_m2, light.drives_from_m]);
    }
}
