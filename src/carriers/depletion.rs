//! Abrupt junctions: how far the field reaches.

use crate::numerics::constants::CHARGE;
use crate::numerics::roots::newton_bracketed;

/// Permittivity of vacuum, F/m (CODATA 2018).
pub const VACUUM_PERMITTIVITY: f64 = 8.854_187_812_8e-12;

/// A layer as the field sees it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Doped {
    /// m.
    pub thickness_m: f64,
    /// Net doping of the sign of its side, 1/m3; 0 in an intrinsic layer.
    pub doping_per_m3: f64,
    /// Static permittivity over that of vacuum.
    pub permittivity: f64,
}

/// How far a junction is depleted.
#[derive(Clone, Debug, PartialEq, Default)]
pub struct Depletion {
    /// Into the layers towards the sun, from the junction, m.
    pub sunward_m: f64,
    /// The intrinsic layers between, m.
    pub between_m: f64,
    /// Into the layers away from the sun, from the junction, m.
    pub rear_m: f64,
    /// What the sunward side would take if its last layer went on, m.
    pub sunward_asked_m: f64,
    /// The same of the rear side.
    pub rear_asked_m: f64,
    /// The largest field, V/m.
    pub field_v_per_m: f64,
    /// Whether the sunward layers have less charge than the other side asks for.
    pub sunward_full: bool,
    /// The same of the layers away from the sun.
    pub rear_full: bool,
}

impl Depletion {
    /// m.
    pub fn width_m(&self) -> f64 {
        self.sunward_m + self.between_m + self.rear_m
    }

    /// Depletes `sunward` and `rear`, each from the junction outwards, with `between` undoped, under
    /// `potential_v` = built-in voltage − bias; nothing for a potential ≤ 0.
    ///
    /// Abrupt edges, full ionisation, no carriers inside (Sze and Ng, Physics of Semiconductor
    /// Devices (2007), chapter 2, without the correction of 2kT/q). With the charge `σ` on either
    /// side the field falls from `σ/ε` by `qN/ε` per depth; `σ` follows from the potential, which
    /// rises with it. A side that has not enough charge is depleted throughout; the rest of its
    /// charge is taken to sit behind its far face.
    pub fn new(sunward: &[Doped], between: &[Doped], rear: &[Doped], potential_v: f64) -> Self {
        let between_m = between.iter().map(|layer| layer.thickness_m).sum();
        let epsilon = sunward.iter().chain(between).chain(rear).map(|layer| layer.permittivity);
        let least_epsilon = VACUUM_PERMITTIVITY * epsilon.fold(f64::INFINITY, f64::min);
        if !potential_v.is_finite() || potential_v <= 0.0 || !least_epsilon.is_finite() {
            return Self { between_m, ..Self::default() };
        }
        let of_charge = |charge: f64| {
            let sides = [reach(sunward, charge), reach(between, charge), reach(rear, charge)];
            let potential: f64 = sides.iter().map(|side| side.potential_v).sum();
            let slope: f64 = sides.iter().map(|side| side.per_charge).sum();
            (potential - potential_v, slope)
        };
        // One step junction of the heaviest doping on both sides holds the most charge.
        let heaviest = sunward.iter().chain(rear).map(|layer| layer.doping_per_m3).fold(1.0, f64::max);
        let mut most = (2.0 * CHARGE * heaviest * least_epsilon * potential_v).sqrt();
        for _ in 0..200 {
            if of_charge(most).0 >= 0.0 {
                break;
            }
            most *= 2.0;
        }
        let charge = newton_bracketed(of_charge, 0.0, most, 0.0);
        let (front, back) = (reach(sunward, charge), reach(rear, charge));
        Self {
            sunward_m: front.width_m,
            between_m,
            rear_m: back.width_m,
            sunward_asked_m: front.asked_m,
            rear_asked_m: back.asked_m,
            field_v_per_m: charge / least_epsilon,
            sunward_full: front.full,
            rear_full: back.full,
        }
    }
}

/// One side at a charge.
struct Reach {
    width_m: f64,
    asked_m: f64,
    potential_v: f64,
    /// `dV/dσ`, V m2/C.
    per_charge: f64,
    full: bool,
}

fn reach(layers: &[Doped], charge: f64) -> Reach {
    let mut side = Reach { width_m: 0.0, asked_m: 0.0, potential_v: 0.0, per_charge: 0.0, full: true };
    let mut left = charge;
    for layer in layers {
        let epsilon = VACUUM_PERMITTIVITY * layer.permittivity;
        let density = CHARGE * layer.doping_per_m3;
        let ends = left < density * layer.thickness_m;
        let width = if ends { left / density } else { layer.thickness_m };
        side.potential_v += (left - 0.5 * density * width) * width / epsilon;
        side.per_charge += width / epsilon;
        side.width_m += width;
        left -= density * width;
        if ends {
            side.full = false;
            break;
        }
    }
    let last = layers.last().map_or(0.0, |layer| CHARGE * layer.doping_per_m3);
    side.asked_m = side.width_m + if side.full && last > 0.0 { left / last } else { 0.0 };
    side
}

/// Built-in voltage, V: `(kT/q) ln(N_A N_D/(n_i,p n_i,n))`, which for one material is the textbook's
/// and for two takes their mid-gaps as aligned. `ln_intrinsic` of each side in 1/m3.
pub fn built_in_v(thermal_v: f64, doping_per_m3: [f64; 2], ln_intrinsic: [f64; 2]) -> f64 {
    let ln_doping: f64 = doping_per_m3.iter().map(|doping| doping.ln()).sum();
    thermal_v * (ln_doping - ln_intrinsic[0] - ln_intrinsic[1])
}

#[cfg(test)]
mod tests {
    use super::*;

    fn close(value: f64, expected: f64) {
        assert!((value / expected - 1.0).abs() < 1e-9, "{value} instead of {expected}");
    }

    fn layer(thickness_m: f64, doping_per_m3: f64, permittivity: f64) -> Doped {
        Doped { thickness_m, doping_per_m3, permittivity }
    }

    #[test]
    fn a_step_junction_has_its_closed_form() {
        // W = √(2ε V (N_A + N_D)/(q N_A N_D)), shared inversely to the dopings; F = 2V/W
        // (Sze and Ng 2007, section 2.2).
        let (nd, na, epsilon, v) = (2e24, 1e23, 12.9, 1.4);
        let d = Depletion::new(&[layer(1e-6, nd, epsilon)], &[], &[layer(3e-6, na, epsilon)], v);
        let width = (2.0 * epsilon * VACUUM_PERMITTIVITY * v * (na + nd) / (CHARGE * na * nd)).sqrt();
        close(d.width_m(), width);
        close(d.sunward_m * nd, d.rear_m * na);
        close(d.field_v_per_m, 2.0 * v / width);
        assert!(!d.sunward_full && !d.rear_full);
        // The side the sun shines on does not matter.
        let turned = Depletion::new(&[layer(3e-6, na, epsilon)], &[], &[layer(1e-6, nd, epsilon)], v);
        close(turned.width_m(), width);
        close(turned.sunward_m, d.rear_m);
    }

    #[test]
    fn two_materials_share_the_potential() {
        // x_n = √(2 ε_n ε_p N_A V/(q N_D (ε_n N_D + ε_p N_A))) (Sze and Ng 2007, section 2.7).
        let (nd, na, en, ep, v) = (5e22, 1e23, 9.0, 13.0, 1.1);
        let d = Depletion::new(&[layer(2e-6, nd, en)], &[], &[layer(2e-6, na, ep)], v);
        let xn = (2.0 * en * ep * VACUUM_PERMITTIVITY * na * v / (CHARGE * nd * (en * nd + ep * na))).sqrt();
        close(d.sunward_m, xn);
        close(d.rear_m, xn * nd / na);
    }

    #[test]
    fn an_intrinsic_layer_takes_most_of_the_potential() {
        // σ d/ε + σ²/(2qε)(1/N_A + 1/N_D) = V.
        let (n, epsilon, v, d) = (1e25, 12.0, 1.2, 500e-9);
        let p_i_n = Depletion::new(
            &[layer(1e-6, n, epsilon)],
            &[layer(d, 0.0, epsilon)],
            &[layer(1e-6, n, epsilon)],
            v,
        );
        let e = epsilon * VACUUM_PERMITTIVITY;
        let (a, b) = (1.0 / (CHARGE * n * e), d / e);
        let sigma = (-b + (b * b + 4.0 * a * v).sqrt()) / (2.0 * a);
        close(p_i_n.sunward_m, sigma / (CHARGE * n));
        close(p_i_n.field_v_per_m, sigma / e);
        close(p_i_n.between_m, d);
    }

    #[test]
    fn a_thin_emitter_is_depleted_throughout() {
        let d = Depletion::new(&[layer(10e-9, 1e23, 12.9)], &[], &[layer(3e-6, 1e23, 12.9)], 1.3);
        assert!(d.sunward_full && !d.rear_full);
        close(d.sunward_m, 10e-9);
        close(d.sunward_asked_m, d.rear_m);
        // V = σ²/(2qNε) + (σ − qN t/2) t/ε.
        let sigma = CHARGE * 1e23 * d.rear_m;
        let e = 12.9 * VACUUM_PERMITTIVITY;
        let q_n = CHARGE * 1e23;
        let v = sigma * sigma / (2.0 * q_n * e) + (sigma - 0.5 * q_n * 10e-9) * 10e-9 / e;
        close(v, 1.3);
    }

    #[test]
    fn a_side_in_steps_is_followed_through_them() {
        let whole = Depletion::new(&[layer(1e-6, 1e24, 12.0)], &[], &[layer(3e-6, 1e23, 12.0)], 1.2);
        let steps: Vec<Doped> = (0..30).map(|_| layer(10e-9, 1e23, 12.0)).collect();
        let cut = Depletion::new(&[layer(1e-6, 1e24, 12.0)], &[], &steps, 1.2);
        close(cut.rear_m, whole.rear_m);
        let doped = layer(20e-9, 1e23, 12.0);
        let graded = Depletion::new(&[layer(1e-6, 1e24, 12.0)], &[], &[doped, layer(3e-6, 4e23, 12.0)], 1.2);
        assert!(graded.rear_m > 20e-9 && graded.rear_m < whole.rear_m);
    }

    #[test]
    fn bias_beyond_the_built_in_voltage_leaves_no_field() {
        let layers = [layer(1e-6, 1e24, 12.0)];
        for potential in [0.0, -1.0, f64::NAN, f64::NEG_INFINITY] {
            assert_eq!(Depletion::new(&layers, &[], &layers, potential), Depletion::default());
        }
        assert_eq!(Depletion::new(&[], &[], &[], 1.0), Depletion::default());
    }

    #[test]
    fn the_built_in_voltage_is_the_textbooks() {
        // 25.852 mV ln(1e17·2e18/(2.1e6)²) = 1.3487 V: gallium arsenide at 300 K.
        let ni = (2.1e12f64).ln();
        let v = built_in_v(0.025_852, [1e23, 2e24], [ni, ni]);
        assert!((v - 0.025_852 * (2e35f64 / 4.41e12).ln()).abs() < 1e-9);
        assert!((v - 1.3487).abs() < 1e-3, "{v}");
    }
}
