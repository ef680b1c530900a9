//! What recombines at the faces of a layer where nothing is stated.

use crate::design::{Design, Duty, Layer, Place, Transport, VoltageModel};

/// One face of a layer.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Face {
    /// Towards the sun.
    Sunward,
    /// Away from it.
    Rear,
}

/// Recombination velocity at an interface with a window, a BSF or another layer of the junction,
/// m/s.
pub const COVERED_M_PER_S: f64 = 10.0;

/// Recombination velocity under a layer whose duty is to passivate, m/s: what amorphous silicon on
/// silicon keeps to in practice (trade).
pub const PASSIVATED_M_PER_S: f64 = 0.1;

/// Recombination velocity at a bare or metal face, m/s; also where the next semiconductor belongs
/// to no junction and so is no known barrier.
pub const BARE_M_PER_S: f64 = 1e5;

impl Design {
    /// Whether the carriers of `junction` are to be followed to its contacts: its voltage comes
    /// from layers, or one of its layers states transport data.
    pub fn follows_carriers(&self, junction: usize) -> bool {
        let stated = |(_, layer): (usize, &Layer)| {
            layer.place == Place::Junction(junction) && layer.transport != Transport::default()
        };
        self.junctions[junction].voltage == VoltageModel::Layers || self.lit_layers().any(stated)
    }

    /// Faces at which followed carriers meet a default velocity: the layer, the face, m/s. Those
    /// at the ends of emitter and base, or of what collects beyond them.
    pub fn default_velocities(&self) -> Vec<(usize, Face, f64)> {
        let mut faces = Vec::new();
        for junction in (0..self.junctions.len()).filter(|&junction| self.follows_carriers(junction)) {
            let own: Vec<(usize, &Layer)> = self
                .lit_layers()
                .filter(|(_, layer)| layer.place == Place::Junction(junction) && layer.collects())
                .collect();
            let mut add = |index: usize, face: Face, stated: Option<f64>| {
                let velocity = self.default_velocity(index, face);
                if stated.is_none() && velocity > 0.0 {
                    faces.push((index, face, velocity));
                }
            };
            let count = own.len();
            for (at, (index, layer)) in own.iter().enumerate() {
                let sided = |other: Option<&(usize, &Layer)>| {
                    other.is_none_or(|(_, other)| outer(other) || outer(layer))
                };
                if sided(at.checked_sub(1).map(|at| &own[at])) {
                    add(*index, Face::Sunward, layer.transport.sunward_velocity);
                }
                if sided(own.get(at + 1).filter(|_| at + 1 < count)) {
                    add(*index, Face::Rear, layer.transport.rear_velocity);
                }
            }
        }
        faces
    }

    /// The velocity taken at a face of the layer `index` that states none, m/s, by what lies behind
    /// it: 0 between parts of one emitter or base, [`PASSIVATED_M_PER_S`],
    /// [`COVERED_M_PER_S`] or [`BARE_M_PER_S`].
    pub fn default_velocity(&self, index: usize, face: Face) -> f64 {
        let layer = &self.layers[index];
        let neighbour = match face {
            Face::Sunward => self.lit_layers().filter(|(other, _)| *other < index).last(),
            Face::Rear => self.lit_layers().find(|(other, _)| *other > index),
        };
        match neighbour {
            Some((_, other)) if matches!(layer.place, Place::Junction(_)) && other.place == layer.place => {
                let polarity = |layer: &Layer| layer.doping.as_ref().map(|doping| doping.polarity);
                let parts =
                    layer.duty.collects() && other.duty.collects() && polarity(layer) == polarity(other);
                match other.duty {
                    _ if parts => 0.0,
                    Duty::Passivation => PASSIVATED_M_PER_S,
                    _ => COVERED_M_PER_S,
                }
            }
            _ => BARE_M_PER_S,
        }
    }
}

/// A layer that collects although its duty does not say so.
fn outer(layer: &Layer) -> bool {
    !layer.duty.collects() && layer.duty != Duty::Wafer
}
