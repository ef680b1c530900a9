//! What biaxial strain does to the gaps of a (001) layer.
//!
//! Signs: strains are positive in tension; `a_c`, `a_v` and `b` as I. Vurgaftman, J. R. Meyer and
//! L. R. Ram-Mohan, J. Appl. Phys. 89, 5815 (2001) print them, all negative, so that the direct gap
//! moves by `(a_c + a_v)(2 ε∥ + ε⊥)` under the hydrostatic part and compression widens it.

use crate::materials::Material;

/// In-plane and out-of-plane strain of a (001) layer, plain fractions.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Biaxial {
    /// ε∥, negative where the layer is compressed.
    pub in_plane: f64,
    /// ε⊥, of the other sign.
    pub perpendicular: f64,
}

/// How far strain moves the gaps, eV, and why.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Shift {
    /// Of the direct gap.
    pub direct_ev: f64,
    /// Of the X and L gaps.
    pub indirect_ev: f64,
    /// Heavy-hole and light-hole edge against the mean that moves with the hydrostatic part.
    pub holes_ev: (f64, f64),
}

impl Shift {
    /// Whether the light holes come to lie on top, as under tension.
    pub fn is_light_on_top(&self) -> bool {
        self.holes_ev.1 > self.holes_ev.0
    }
}

/// The shifts of `material` under `strain`; `None` where it lacks deformation potentials or its
/// split-off energy.
///
/// Hydrostatic part and valence band after C. G. Van de Walle, Phys. Rev. B 39, 1871 (1989): with
/// `δ = 2 b (ε⊥ − ε∥)` heavy holes rise by `−δ/2` and light holes by
/// `−Δ/2 + δ/4 + ½ √(Δ² + Δ δ + 9/4 δ²)`, Δ the split-off energy; the gap ends at the higher of
/// them. The table holds no potentials for X and L: the pressure coefficient of the X gaps of
/// these compounds is a tenth of the direct one's and of the other sign, so only the splitting of
/// the valence band is counted there.
pub fn shift(material: &Material, strain: Biaxial) -> Option<Shift> {
    let constant = |name: &str| material.constants.get(name);
    let conduction = constant("deformation.conduction")?;
    let valence = constant("deformation.valence")?;
    let shear = constant("deformation.shear")?;
    let split_off = constant("split_off")?.max(0.0);
    let hydrostatic = (conduction + valence) * (2.0 * strain.in_plane + strain.perpendicular);
    let delta = 2.0 * shear * (strain.perpendicular - strain.in_plane);
    let heavy = -delta / 2.0;
    let root = (split_off * split_off + split_off * delta + 2.25 * delta * delta).max(0.0).sqrt();
    let light = -split_off / 2.0 + delta / 4.0 + root / 2.0;
    let top = heavy.max(light);
    let found = Shift { direct_ev: hydrostatic - top, indirect_ev: -top, holes_ev: (heavy, light) };
    found.direct_ev.is_finite().then_some(found)
}

impl Material {
    /// This material with its gaps moved; the edge of its optical table follows the direct gap.
    pub fn with_gaps_moved(&self, shift: &Shift) -> Self {
        let mut moved = self.clone();
        if let Some(bands) = &mut moved.bands {
            for (valley, ev) in [
                (&mut bands.gamma, shift.direct_ev),
                (&mut bands.x, shift.indirect_ev),
                (&mut bands.l, shift.indirect_ev),
            ] {
                if let Some(valley) = valley {
                    valley.offset_ev += ev;
                }
            }
        }
        moved
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::materials::{Bands, GapLaw, MaterialClass, Valley};

    /// In0.2Ga0.8As: constants of Vurgaftman et al. (2001), linear but for the split-off energy
    /// and the gap (bowing 0.15 and 0.477 eV).
    fn in20_ga80_as() -> Material {
        let mut material = Material::bare("InGaAs", MaterialClass::Semiconductor);
        let mix = |gaas: f64, inas: f64| 0.8 * gaas + 0.2 * inas;
        for (name, value) in [
            ("deformation.conduction", mix(-7.17, -5.08)),
            ("deformation.valence", mix(-1.16, -1.0)),
            ("deformation.shear", mix(-2.0, -1.8)),
            ("split_off", mix(0.341, 0.39) - 0.16 * 0.15),
        ] {
            material.constants.0.insert(name, value);
        }
        let gap = mix(1.4225, 0.3540) - 0.16 * 0.477;
        material.bands = Some(Bands { gamma: Some(Valley::of(GapLaw::constant(gap))), ..Bands::default() });
        material
    }

    #[test]
    fn compressed_indium_gallium_arsenide() {
        // By numpy 2.4.6 from the published constants (tests/reference/strained_gaps.py): strains
        // −0.014131 and +0.013426, hydrostatic +116.9 meV, heavy holes +54.0 meV on top, and so
        // 1.1954 eV after 1.1324 eV. Common in the trade: about 1.2 eV on GaAs.
        let strain = Biaxial { in_plane: -0.014_131, perpendicular: 0.013_426 };
        let material = in20_ga80_as();
        let found = shift(&material, strain).expect("known");
        assert!((found.holes_ev.0 - 0.0540).abs() < 2e-4, "{found:?}");
        assert!(!found.is_light_on_top());
        assert!((found.direct_ev - 0.0629).abs() < 3e-4, "{found:?}");
        let gap = material.with_gaps_moved(&found).gap(300.0).expect("a gap").ev;
        assert!((gap - 1.1954).abs() < 5e-4, "{gap}");
    }

    #[test]
    fn tension_narrows_and_puts_light_holes_on_top() {
        let material = in20_ga80_as();
        let found = shift(&material, Biaxial { in_plane: 0.005, perpendicular: -0.0047 }).expect("known");
        assert!(found.is_light_on_top() && found.direct_ev < 0.0, "{found:?}");
    }

    #[test]
    fn small_strain_is_a_small_shift_and_none_is_none() {
        let material = in20_ga80_as();
        let at = |strain: f64| {
            let strain = Biaxial { in_plane: strain, perpendicular: -0.95 * strain };
            shift(&material, strain).expect("known").direct_ev
        };
        assert_eq!(at(0.0), 0.0);
        // Both hole bands move by |δ|/2 to first order: no step, some 13 eV a unit of strain.
        assert!(at(1e-8).abs() < 2e-7 && at(-1e-8).abs() < 2e-7);
        let bare = Material::bare("Ge", MaterialClass::Semiconductor);
        assert_eq!(shift(&bare, Biaxial { in_plane: 0.01, perpendicular: -0.01 }), None);
    }
}
