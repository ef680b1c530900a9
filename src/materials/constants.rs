//! Numbers of a semiconductor beyond lattice, gaps and index, under fixed names.

use std::collections::BTreeMap;

/// Values by name; the names and their units are [`NAMES`].
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Constants(pub BTreeMap<&'static str, f64>);

impl Constants {
    /// The value of that name in the unit of [`NAMES`], if it was stated.
    pub fn get(&self, name: &str) -> Option<f64> {
        self.0.get(name).copied()
    }

    /// Adds the density-of-states masses of the X and L valleys that follow from a longitudinal
    /// and a transverse one: `(c² m_l m_t²)^(1/3)` with `c` whole ellipsoids, three at the faces of
    /// the zone at X, four at L. Alloys need the same names from all their end members.
    pub fn complete(&mut self) {
        for (count, valley) in [
            (3.0_f64, ["mass.x_density", "mass.x_longitudinal", "mass.x_transverse"]),
            (4.0, ["mass.l_density", "mass.l_longitudinal", "mass.l_transverse"]),
        ] {
            let [density, long, across] = valley;
            if let (None, Some(long), Some(across)) = (self.get(density), self.get(long), self.get(across)) {
                self.0.insert(density, (count * count * long * across * across).cbrt());
            }
        }
    }
}

/// The unit a constant is kept in.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ConstantUnit {
    /// eV.
    Energy,
    /// A plain number: masses in electron masses, permittivities over vacuum.
    Plain,
}

/// Name, the group and word it is stated under in a `material` block, and its unit.
pub const NAMES: &[(&str, &str, &str, ConstantUnit)] = &[
    ("split_off", "gap", "split_off", ConstantUnit::Energy),
    ("valence_offset", "gap", "valence_offset", ConstantUnit::Energy),
    ("affinity", "affinity", "value", ConstantUnit::Energy),
    ("mass.electron", "effective_mass", "electron", ConstantUnit::Plain),
    ("mass.electron_density", "effective_mass", "electron_density", ConstantUnit::Plain),
    ("mass.x_longitudinal", "effective_mass", "x_longitudinal", ConstantUnit::Plain),
    ("mass.x_transverse", "effective_mass", "x_transverse", ConstantUnit::Plain),
    ("mass.x_density", "effective_mass", "x_density", ConstantUnit::Plain),
    ("mass.l_longitudinal", "effective_mass", "l_longitudinal", ConstantUnit::Plain),
    ("mass.l_transverse", "effective_mass", "l_transverse", ConstantUnit::Plain),
    ("mass.l_density", "effective_mass", "l_density", ConstantUnit::Plain),
    ("mass.heavy_hole", "effective_mass", "heavy_hole", ConstantUnit::Plain),
    ("mass.light_hole", "effective_mass", "light_hole", ConstantUnit::Plain),
    ("mass.hole_density", "effective_mass", "hole_density", ConstantUnit::Plain),
    ("mass.split_off_hole", "effective_mass", "split_off_hole", ConstantUnit::Plain),
    ("mass.luttinger1", "effective_mass", "luttinger1", ConstantUnit::Plain),
    ("mass.luttinger2", "effective_mass", "luttinger2", ConstantUnit::Plain),
    ("mass.luttinger3", "effective_mass", "luttinger3", ConstantUnit::Plain),
    ("mass.kane_energy", "effective_mass", "kane_energy", ConstantUnit::Energy),
    ("deformation.conduction", "deformation", "conduction", ConstantUnit::Energy),
    ("deformation.valence", "deformation", "valence", ConstantUnit::Energy),
    ("deformation.shear", "deformation", "shear", ConstantUnit::Energy),
    ("dispersion.a", "dispersion", "a", ConstantUnit::Plain),
    ("dispersion.b", "dispersion", "b", ConstantUnit::Plain),
    ("permittivity.static", "permittivity", "static", ConstantUnit::Plain),
    ("permittivity.optical", "permittivity", "optical", ConstantUnit::Plain),
];
