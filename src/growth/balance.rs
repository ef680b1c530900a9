//! Strain balance: two layers of opposite strain that together pull on nothing.

use crate::materials::Elastic;

/// One layer of a pair: relaxed lattice constant in any unit, elastic constants.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Balanced {
    /// Relaxed lattice constant.
    pub lattice: f64,
    /// Its elastic constants.
    pub elastic: Elastic,
}

/// `A = C11 + C12 − 2 C12²/C11`, GPa: stress per in-plane strain of a (001) layer.
pub fn biaxial_modulus_gpa(elastic: Elastic) -> f64 {
    let Elastic { c11_gpa: c11, c12_gpa: c12, .. } = elastic;
    c11 + c12 - 2.0 * c12 * c12 / c11
}

/// The thickness of `partner` that leaves no average in-plane stress beside `thickness` of `layer`
/// on the lattice `ground`, in the unit of `thickness`:
/// `t1 A1 ε1 a2 + t2 A2 ε2 a1 = 0`, `ε = ground/a − 1`.
///
/// `None` where both are strained to the same side, or the partner fits and cannot balance.
/// N. J. Ekins-Daukes, K. Kawaguchi, J. Zhang, Cryst. Growth Des. 2, 287 (2002).
pub fn zero_stress_thickness(layer: Balanced, thickness: f64, partner: Balanced, ground: f64) -> Option<f64> {
    let pull = |it: Balanced| biaxial_modulus_gpa(it.elastic) * (ground / it.lattice - 1.0);
    let (own, other) = (pull(layer) * partner.lattice, pull(partner) * layer.lattice);
    (own * other < 0.0).then(|| -thickness * own / other)
}

/// The lattice constant on which the pair pulls on nothing, in the unit of the lattice constants:
/// `(A1 t1 a1 a2² + A2 t2 a2 a1²)/(A1 t1 a2² + A2 t2 a1²)`. Source as for
/// [`zero_stress_thickness`].
pub fn zero_stress_lattice(layers: [(Balanced, f64); 2]) -> f64 {
    let [(one, t1), (two, t2)] = layers;
    let (a1, a2) = (one.lattice, two.lattice);
    let w1 = biaxial_modulus_gpa(one.elastic) * t1 * a2 * a2;
    let w2 = biaxial_modulus_gpa(two.elastic) * t2 * a1 * a1;
    (w1 * a1 + w2 * a2) / (w1 + w2)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Vurgaftman, Meyer, Ram-Mohan (2001): GaAs, InAs, GaP; linear in composition.
    fn mix(x: f64, one: (f64, f64, f64), two: (f64, f64, f64)) -> Balanced {
        let of = |a: f64, b: f64| x * a + (1.0 - x) * b;
        let (lattice, c11, c12) = (of(one.0, two.0), of(one.1, two.1), of(one.2, two.2));
        Balanced { lattice, elastic: Elastic { c11_gpa: c11, c12_gpa: c12, c44_gpa: 50.0 } }
    }
    const GAAS: (f64, f64, f64) = (5.653_25, 122.1, 56.6);
    const INAS: (f64, f64, f64) = (6.0583, 83.29, 45.26);
    const GAP: (f64, f64, f64) = (5.4505, 140.5, 62.03);

    #[test]
    fn wells_and_barriers_of_a_strain_balanced_cell() {
        // 8 nm In0.17Ga0.83As and GaAs0.94P0.06 on GaAs: 40.866 nm, worked out outside (Python 3,
        // tests/reference/strain.py) from the published constants.
        let well = mix(0.17, INAS, GAAS);
        let barrier = mix(0.06, GAP, GAAS);
        let thick = zero_stress_thickness(well, 8.0, barrier, GAAS.0).expect("opposite strains");
        assert!((thick - 40.866).abs() < 1e-3, "{thick}");
        let lattice = zero_stress_lattice([(well, 8.0), (barrier, thick)]);
        assert!((lattice - GAAS.0).abs() < 1e-9, "{lattice}");
        // Weighting by thickness alone is off by the moduli only.
        let plain = 8.0 * (well.lattice - GAAS.0) / (GAAS.0 - barrier.lattice);
        assert!((thick / plain - 1.0).abs() < 0.15, "{thick} against {plain}");
    }

    #[test]
    fn energy_is_least_where_the_stress_vanishes() {
        // Σ t A (a/a_i − 1)², the strain energy per area, by central differences.
        let (one, two) = (mix(0.2, INAS, GAAS), mix(0.1, GAP, GAAS));
        let pair = [(one, 8.0), (two, 20.0)];
        let energy = |a: f64| -> f64 {
            pair.iter()
                .map(|(it, t)| t * biaxial_modulus_gpa(it.elastic) * (a / it.lattice - 1.0).powi(2))
                .sum()
        };
        let a = zero_stress_lattice(pair);
        let slope = |a: f64| (energy(a + 1e-4) - energy(a - 1e-4)) / 2e-4;
        assert!(slope(a).abs() < 1e-6 * slope(a + 0.01).abs() + 1e-9, "{}", slope(a));
    }

    #[test]
    fn nothing_balances_strain_of_the_same_side() {
        let (one, two) = (mix(0.2, INAS, GAAS), mix(0.1, INAS, GAAS));
        assert_eq!(zero_stress_thickness(one, 8.0, two, GAAS.0), None);
        assert_eq!(zero_stress_thickness(one, 8.0, mix(0.0, INAS, GAAS), GAAS.0), None);
    }
}
