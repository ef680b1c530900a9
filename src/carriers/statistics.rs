//! Where Boltzmann statistics end.

/// The densest majority the series below holds for, in effective densities of states.
pub const DENSEST: f64 = 8.0;

/// How much a degenerate majority holds down its minority, as a logarithm: `ln(np/n_i²) ≤ 0` at
/// `ratio` majority carriers over the effective density of states of their band.
///
/// Joyce and Dixon, Appl. Phys. Lett. 31, 354 (1977): the reduced Fermi level is
/// `ln r + 3.53553e-1 r − 4.95009e-3 r² + 1.48386e-4 r³ − 4.42563e-6 r⁴`, what stands behind the
/// logarithm being the deviation from Boltzmann's. Good to 0.003 up to [`DENSEST`], where it is
/// held.
pub fn ln_degeneracy(ratio: f64) -> f64 {
    let r = ratio.clamp(0.0, DENSEST);
    -r * (3.535_53e-1 + r * (-4.950_09e-3 + r * (1.483_86e-4 - r * 4.425_63e-6)))
}
