//! The materials of a stack with their edges where the temperature puts them, each once.

use crate::materials::SharedMaterial;

/// A material at one temperature.
#[derive(Clone, Debug)]
pub(super) struct Medium {
    pub(super) material: SharedMaterial,
    /// How far its optical data move up, eV.
    pub(super) edge_shift_ev: f64,
}

/// Every material once.
#[derive(Clone, Debug, Default)]
pub(super) struct Media(Vec<Medium>);

impl Media {
    /// The index of `material`, which is added where it is new.
    pub(super) fn find_or_add(&mut self, material: &SharedMaterial, temperature_k: f64) -> usize {
        let known = self.0.iter().position(|medium| {
            std::sync::Arc::ptr_eq(&medium.material, material) || medium.material == *material
        });
        known.unwrap_or_else(|| {
            self.0.push(Medium {
                material: material.clone(),
                edge_shift_ev: material.edge_shift_ev(temperature_k),
            });
            self.0.len() - 1
        })
    }

    pub(super) fn at(&self, index: usize) -> &Medium {
        &self.0[index]
    }

    pub(super) fn len(&self) -> usize {
        self.0.len()
    }

    pub(super) fn iter(&self) -> impl Iterator<Item = &Medium> {
        self.0.iter()
    }

    /// Wavelengths at which a slope may change, m; unsorted.
    pub(super) fn knots_m(&self) -> Vec<f64> {
        let knots = |medium: &Medium| medium.material.optics.wavelengths(medium.edge_shift_ev);
        self.0.iter().flat_map(knots).collect()
    }
}
