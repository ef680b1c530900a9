//! What recombines inside the field.

use std::f64::consts::PI;

use crate::numerics::constants::{BOLTZMANN, CHARGE};

/// Recombination centres in a depleted layer.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Depleted {
    /// K.
    pub temperature_k: f64,
    /// Intrinsic density where it recombines most, 1/m3.
    pub intrinsic_per_m3: f64,
    /// Lifetimes of electrons and of holes by recombination centres at mid-gap, s.
    pub lifetimes_s: [f64; 2],
    /// At the junction, V/m.
    pub field_v_per_m: f64,
    /// Of the depleted layers, m.
    pub width_m: f64,
}

impl Depleted {
    /// `J02 = π kT n_i/(2 F √(τ_n τ_p))`, A/m2, of `J02 (e^{qV/2kT} − 1)`.
    ///
    /// Sah, Noyce and Shockley, Proc. IRE 45, 1228 (1957): where electrons and holes are equally
    /// many, over the width `π kT/(2qF)` in which they stay so, though never more than all that is
    /// depleted.
    pub fn dark_a_per_m2(&self) -> f64 {
        let lifetime = (self.lifetimes_s[0] * self.lifetimes_s[1]).sqrt();
        let effective = PI * BOLTZMANN * self.temperature_k / (2.0 * CHARGE * self.field_v_per_m);
        CHARGE * self.intrinsic_per_m3 * effective.min(self.width_m) / lifetime
    }
}

/// `J02` of an undoped absorber in which electrons and holes are equally many throughout, A/m2:
/// `q n_i [d/(τ_n + τ_p) + (S₁ + S₂)/2]`, of `J02 (e^{qV/2kT} − 1)`.
///
/// Recombination by centres at mid-gap with `n = p = n_i e^{qV/2kT}` (Shockley and Read, Phys.
/// Rev. 87, 835 (1952)), in the bulk and at both faces, where a velocity holds for either carrier.
pub fn undoped_a_per_m2(
    intrinsic_per_m3: f64,
    thickness_m: f64,
    lifetimes_s: [f64; 2],
    face_velocities_m_per_s: [f64; 2],
) -> f64 {
    let bulk = thickness_m / (lifetimes_s[0] + lifetimes_s[1]);
    let faces = 0.5 * (face_velocities_m_per_s[0] + face_velocities_m_per_s[1]);
    CHARGE * intrinsic_per_m3 * (bulk + faces)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_effective_width_is_that_of_the_field() {
        // π/2 · 25.852 mV/(2e5 V/cm) = 2.0304 nm; q 2.1e6 /cm3 · 2.0304 nm/10 ns = 6.832e-12 A/cm2.
        let depleted = Depleted {
            temperature_k: 300.0,
            intrinsic_per_m3: 2.1e12,
            lifetimes_s: [20e-9, 5e-9],
            field_v_per_m: 2e7,
            width_m: 150e-9,
        };
        let dark = depleted.dark_a_per_m2();
        assert!((dark * 1e-4 / 6.832e-12 - 1.0).abs() < 1e-3, "{dark}");
        // A field too weak to part them cannot make the layer wider than it is.
        let weak = Depleted { field_v_per_m: 0.0, ..depleted };
        assert!((weak.dark_a_per_m2() / (CHARGE * 2.1e12 * 150e-9 / 10e-9) - 1.0).abs() < 1e-12);
    }

    #[test]
    fn an_undoped_absorber_recombines_in_bulk_and_faces() {
        // q 1e11 (500 nm/2 µs + 0.5·(10 + 0) m/s) = q 1e11 · 5.25 m/s.
        let dark = undoped_a_per_m2(1e11, 500e-9, [1e-6, 1e-6], [10.0, 0.0]);
        assert!((dark / (CHARGE * 1e11 * 5.25) - 1.0).abs() < 1e-12);
    }
}
