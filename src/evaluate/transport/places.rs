//! Where in a junction p meets n, and what lies on either side.

use crate::design::{Design, Duty, Layer, Place, Polarity};
use crate::evaluate::transport::Lack;
use crate::materials::MaterialClass;

/// One side of the field.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Side {
    pub(super) polarity: Polarity,
    /// Doped layers from the field outwards; none where the absorber meets a contact.
    pub(super) layers: Vec<usize>,
    /// Windows and BSF beyond them that are said to be collecting, outwards.
    pub(super) further: Vec<usize>,
}

/// A junction's layers by their part in it.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Core {
    pub(super) sunward: Side,
    /// Undoped, sunward first.
    pub(super) between: Vec<usize>,
    pub(super) rear: Side,
}

/// Finds the one place in `junction` where the doping of its emitter, base, absorber and wafer
/// changes sign, undoped intrinsic layers and absorbers between; or where an absorber of one sign
/// (or none) meets the contact of the other.
pub(super) fn core(design: &Design, junction: usize) -> Result<Core, Lack> {
    let own: Vec<(usize, &Layer)> =
        design.lit_layers().filter(|(_, layer)| layer.place == Place::Junction(junction)).collect();
    let is_core = |layer: &Layer| layer.duty.collects() || layer.duty == Duty::Wafer;
    let inner: Vec<(usize, &Layer)> = own.iter().copied().filter(|(_, layer)| is_core(layer)).collect();
    for (index, layer) in &inner {
        let class = layer.material.as_ref().map(|material| material.class);
        if class != Some(MaterialClass::Semiconductor) {
            return Err(Lack::Model(*index));
        }
        if layer.doping.is_none() && !matches!(layer.duty, Duty::Intrinsic | Duty::Absorber) {
            return Err(Lack::Doping(*index));
        }
    }
    let sign = |layer: &Layer| layer.doping.as_ref().map(|doping| doping.polarity);
    let contact = |duty: Duty| own.iter().position(|(_, layer)| layer.duty == duty);
    let contacts = [(Polarity::N, contact(Duty::ElectronContact)), (Polarity::P, contact(Duty::HoleContact))];
    let first_core = own.iter().position(|(_, layer)| is_core(layer)).ok_or(Lack::Junction)?;

    let top = inner.iter().find_map(|(_, layer)| sign(layer));
    let bottom = inner.iter().rev().find_map(|(_, layer)| sign(layer));
    let above = |polarity: Polarity| {
        contacts.iter().any(|(sign, at)| *sign == polarity && at.is_some_and(|at| at < first_core))
    };
    let below = |polarity: Polarity| {
        contacts.iter().any(|(sign, at)| *sign == polarity && at.is_some_and(|at| at > first_core))
    };
    let signs = match (top, bottom) {
        (Some(top), Some(bottom)) if top != bottom => (top, bottom),
        (Some(only), Some(_)) if above(opposite(only)) => (opposite(only), only),
        (Some(only), Some(_)) if below(opposite(only)) => (only, opposite(only)),
        (None, None) if above(Polarity::N) && below(Polarity::P) => (Polarity::N, Polarity::P),
        (None, None) if above(Polarity::P) && below(Polarity::N) => (Polarity::P, Polarity::N),
        _ => return Err(Lack::Junction),
    };
    let mut sunward = Vec::new();
    let mut between = Vec::new();
    let mut rear = Vec::new();
    for (index, layer) in &inner {
        match sign(layer) {
            Some(sign) if sign == signs.0 && between.is_empty() && rear.is_empty() => sunward.push(*index),
            None if rear.is_empty() => between.push(*index),
            Some(sign) if sign == signs.1 => rear.push(*index),
            Some(_) => return Err(Lack::Junction),
            None => return Err(Lack::Doping(*index)),
        }
    }
    let further = |outward: &mut dyn Iterator<Item = &(usize, &Layer)>| -> Vec<usize> {
        outward.take_while(|(_, layer)| layer.collecting).map(|(index, _)| *index).collect()
    };
    let last_core = own.iter().rposition(|(_, layer)| is_core(layer)).unwrap_or(first_core);
    let up = further(&mut own[..first_core].iter().rev());
    let down = further(&mut own[last_core + 1..].iter());
    sunward.reverse();
    for (layers, outer) in [(&sunward, &up), (&rear, &down)] {
        if let (false, Some(&layer)) =
            (layers.is_empty(), outer.iter().find(|&&at| design.layers[at].doping.is_none()))
        {
            return Err(Lack::Doping(layer));
        }
    }
    let side = |polarity, layers: Vec<usize>, further: Vec<usize>| {
        let further = if layers.is_empty() { Vec::new() } else { further };
        Side { polarity, layers, further }
    };
    Ok(Core { sunward: side(signs.0, sunward, up), between, rear: side(signs.1, rear, down) })
}

fn opposite(polarity: Polarity) -> Polarity {
    match polarity {
        Polarity::N => Polarity::P,
        Polarity::P => Polarity::N,
    }
}
