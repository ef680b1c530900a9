//! What films do to a wafer that cools: it bends, and films in tension may crack.

use crate::growth::balance::biaxial_modulus_gpa;
use crate::growth::poisson_ratio;
use crate::materials::Elastic;

/// Diameter a bow is given for, m: the bow grows with its square.
pub const BOW_DIAMETER_M: f64 = 0.1;

/// Curvature in 1/m of a (001) wafer under films whose force per length is `force_n_per_m`
/// (Σ stress × thickness, positive in tension), positive for films on the inside of the bend:
/// `κ = 6 Σσh/(M h_w²)`, `M = C11 + C12 − 2 C12²/C11`. Films are thin against the wafer.
/// G. G. Stoney, Proc. R. Soc. A 82, 172 (1909), with the biaxial modulus in place of Young's.
pub fn stoney_curvature_per_m(force_n_per_m: f64, wafer: Elastic, wafer_m: f64) -> f64 {
    6.0 * force_n_per_m / (biaxial_modulus_gpa(wafer) * 1e9 * wafer_m * wafer_m)
}

/// Height of the middle over the edge, m, of a wafer of `diameter_m` bent to `curvature_per_m`:
/// `κ d²/8`, for bows that are small against the diameter.
pub fn bow_m(curvature_per_m: f64, diameter_m: f64) -> f64 {
    curvature_per_m * diameter_m * diameter_m / 8.0
}

/// Energy per area, J/m2, that a crack through films of strain `strains` (in-plane, thickness in
/// m, elastic constants) sets free as it runs along them: `1.976 Σ σ² h/Ē`, `Ē = E/(1 − ν²)`, over
/// the layers in tension. For film and wafer of like moduli.
/// J. W. Hutchinson, Z. Suo, Adv. Appl. Mech. 29, 63 (1992), channelling; factor from memory.
pub fn crack_energy_j_per_m2(strains: impl Iterator<Item = (f64, f64, Elastic)>) -> f64 {
    const CHANNELLING: f64 = 1.976;
    strains
        .filter(|(strain, ..)| *strain > 0.0)
        .map(|(strain, thickness, elastic)| {
            let modulus = biaxial_modulus_gpa(elastic) * 1e9;
            // E = M (1 − ν), so Ē = M/(1 + ν) and σ²/Ē = M ε² (1 + ν).
            CHANNELLING * modulus * strain * strain * (1.0 + poisson_ratio(elastic)) * thickness
        })
        .sum()
}

/// What two new {110} faces of GaAs cost, J/m2: 2 × 0.86. Measured by W. H. Messmer and C. A.
/// Bilello, J. Appl. Phys. 52, 4623 (1981); from memory. Other III–V compounds are near it.
pub const CLEAVAGE_J_PER_M2: f64 = 1.72;

#[cfg(test)]
mod tests {
    use super::*;

    const GAAS: Elastic = Elastic { c11_gpa: 122.1, c12_gpa: 56.6, c44_gpa: 60.0 };
    const SI: Elastic = Elastic { c11_gpa: 165.8, c12_gpa: 63.9, c44_gpa: 79.6 };

    #[test]
    fn a_micrometre_of_gallium_arsenide_bends_silicon() {
        // 0.256 % of tension: σ 0.3231 GPa; Si (001) M 180.4 GPa (C11 165.8, C12 63.9 GPa,
        // handbook), 525 um: κ = 6·323.1/(180.4e9·525e-6²) = 0.0390 1/m, bow 49 um over 100 mm.
        // Worked out outside (Python 3, tests/reference/strain.py).
        let force = biaxial_modulus_gpa(GAAS) * 1e9 * 0.00256 * 1e-6;
        let curvature = stoney_curvature_per_m(force, SI, 525e-6);
        assert!((curvature - 0.038_98).abs() < 1e-4, "{curvature}");
        assert!((bow_m(curvature, 0.1) - 48.7e-6).abs() < 0.5e-6);
    }

    #[test]
    fn a_crack_pays_from_a_thickness_on() {
        // Γ Ē/(1.976 σ²) = 0.799 um for the same film, worked out outside with Ē 95.86 GPa.
        let at = |thickness| crack_energy_j_per_m2([(0.00256, thickness, GAAS)].into_iter());
        assert!((at(0.7991e-6) / CLEAVAGE_J_PER_M2 - 1.0).abs() < 2e-3);
        assert_eq!(crack_energy_j_per_m2([(-0.01, 1e-6, GAAS)].into_iter()), 0.0, "compression closes it");
    }
}
