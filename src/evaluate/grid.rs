//! The front grid: what it shades, and what the current meets on its way to the bus bar.

use crate::design::{Condition, Design, Duty, FingerShape, Layer, Place, Polarity};
use crate::materials::carriers::Carrier;
use crate::numerics::constants::CHARGE;
use crate::results::GridResult;

/// ohm m2 to ohm cm2.
const OHM_CM2: f64 = 1e4;

/// Series resistance of the front, ohm m2, and its parts; 0 without a grid.
///
/// For uniform current into parallel fingers of pitch `p`, width `w`, height `h` and length `l`, as
/// resistances that lose the same power: through the front layers `ρ_s p²/12`, under the metal
/// `(p/2) √(ρ_s ρ_c) coth((w/2) √(ρ_s/ρ_c))`, along the finger `ρ_m p l²/(3 w h)`. Serreze, Conf. Rec.
/// 13th IEEE Photovoltaic Specialists Conf., 609 (1978); Berger, Solid-State Electron. 15, 145 (1972)
/// for the contact; Green, Solar Cells (1982), chapter 8. The bus bar itself is left out.
pub(super) fn grid(design: &Design, condition: &Condition) -> (f64, Option<GridResult>) {
    let Some(fingers) = &design.fingers else { return (0.0, None) };
    let shading = fingers.shading;
    let Some(shape) = &fingers.shape else {
        let ohm_m2 = fingers.series_resistance_ohm_m2;
        let series_resistance_ohm_cm2 = OHM_CM2 * ohm_m2;
        return (ohm_m2, Some(GridResult { shading, series_resistance_ohm_cm2, ..GridResult::default() }));
    };
    // Nothing known of the layers: reported, and the metal alone is left.
    let sheet = sheet_ohm(design, shape, condition.temperature_k).unwrap_or(0.0);
    let [lateral, contact, metal] = parts(shape, sheet);
    let ohm_m2 = lateral + contact + metal;
    let result = GridResult {
        shading,
        series_resistance_ohm_cm2: OHM_CM2 * ohm_m2,
        lateral_ohm_cm2: Some(OHM_CM2 * lateral),
        contact_ohm_cm2: Some(OHM_CM2 * contact),
        metal_ohm_cm2: Some(OHM_CM2 * metal),
        sheet_ohm_per_square: Some(sheet),
    };
    (ohm_m2, Some(result))
}

/// Lateral, contact and metal part, ohm m2.
fn parts(shape: &FingerShape, sheet_ohm: f64) -> [f64; 3] {
    let FingerShape { pitch_m, width_m, height_m, length_m, resistivity_ohm_m, contact_ohm_m2, .. } = *shape;
    let lateral = sheet_ohm * pitch_m.powi(2) / 12.0;
    let contact = if contact_ohm_m2 <= 0.0 {
        0.0
    } else if sheet_ohm <= 0.0 {
        contact_ohm_m2 * pitch_m / width_m
    } else {
        let reach = 0.5 * width_m * (sheet_ohm / contact_ohm_m2).sqrt();
        0.5 * pitch_m * (sheet_ohm * contact_ohm_m2).sqrt() / reach.tanh()
    };
    let metal = resistivity_ohm_m * pitch_m * length_m.powi(2) / (3.0 * width_m * height_m);
    [lateral, contact, metal]
}

/// Sheet resistance of the front, ohm per square: as stated for the grid, else of the layers from
/// the top down to the first junction's emitter that conduct the emitter's carriers, side by side;
/// each as stated on it or `1/(q N μ t)`. `None` where no layer tells.
pub(super) fn sheet_ohm(design: &Design, shape: &FingerShape, temperature_k: f64) -> Option<f64> {
    if shape.sheet_ohm.is_some() {
        return shape.sheet_ohm;
    }
    let first = design.junctions.first()?;
    let own = design.lit_layers().filter(|(index, _)| first.layers.contains(index));
    let emitter = own.filter_map(|(_, layer)| layer.doping.as_ref()).map(|doping| doping.polarity).next();
    let mut conducts = 0.0;
    for (index, layer) in design.lit_layers() {
        let inside = first.layers.contains(&index);
        if !inside && layer.place != Place::Front {
            break;
        }
        let polarity = layer.doping.as_ref().map(|doping| doping.polarity);
        if inside && polarity.is_some() && polarity != emitter {
            break;
        }
        let contact = !inside && layer.duty == Duty::Contact;
        if contact || (polarity.is_some() && polarity == emitter) || layer.sheet_resistance_ohm.is_some() {
            conducts += conductance(layer, temperature_k).unwrap_or(0.0);
        }
    }
    (conducts > 0.0).then(|| 1.0 / conducts)
}

/// Square of a layer, 1/ohm.
fn conductance(layer: &Layer, temperature_k: f64) -> Option<f64> {
    if let Some(ohm) = layer.sheet_resistance_ohm {
        return Some(1.0 / ohm);
    }
    let doping = layer.doping.as_ref()?;
    let carrier = match doping.polarity {
        Polarity::N => Carrier::Electron,
        Polarity::P => Carrier::Hole,
    };
    let mobility =
        layer.material.as_ref()?.mobility_m2_per_vs(carrier, doping.density_per_m3, temperature_k)?;
    Some(CHARGE * doping.density_per_m3 * mobility * layer.thickness_m?)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn parts_have_their_closed_forms() {
        // By hand: 500 ohm/sq, pitch 0.2 mm: 500·4e-8/12 = 1.667e-6 ohm m2; metal 2e-8·2e-4·(5e-3)²/
        // (3·1e-5·5e-6) = 6.667e-7 ohm m2.
        let shape = FingerShape {
            pitch_m: 2e-4,
            width_m: 1e-5,
            height_m: 5e-6,
            length_m: 5e-3,
            resistivity_ohm_m: 2e-8,
            contact_ohm_m2: 1e-9,
            sheet_ohm: Some(500.0),
        };
        let [lateral, contact, metal] = parts(&shape, 500.0);
        assert!((lateral / 1.666_667e-6 - 1.0).abs() < 1e-6);
        assert!((metal / 6.666_667e-7 - 1.0).abs() < 1e-6);
        // Wide against the transfer length √(1e-9/500) = 1.41 um: only the edges carry, so that the
        // contact is (p/2) √(ρ_s ρ_c) = 7.07e-8 ohm m2 over tanh(3.54).
        assert!((contact / (1e-4 * (5e-7_f64).sqrt()) - 1.0).abs() < 2e-3);
        // Narrow against it: the whole width carries, ρ_c p/w.
        let narrow = FingerShape { contact_ohm_m2: 1e-5, ..shape };
        assert!((parts(&narrow, 500.0)[1] / (1e-5 * 20.0) - 1.0).abs() < 1e-3);
    }
}
