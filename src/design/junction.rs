//! Subcells, what joins them, and the grid in front.

use std::ops::Range;

use crate::source::{Span, Spanned};

/// One subcell.
#[derive(Clone, Debug)]
pub struct Junction {
    /// `top`
    pub name: Spanned<String>,
    /// Its layers, as a range of [`Design::layers`](crate::design::Design::layers).
    pub layers: Range<usize>,
    /// How it turns light into voltage.
    pub voltage: VoltageModel,
    /// Where that was said; `None` where it is a default.
    pub voltage_span: Option<Span>,
    /// Shunt in ohm m2, if stated.
    pub shunt_ohm_m2: Option<f64>,
    /// Reverse breakdown voltage, V > 0, if stated.
    pub breakdown_v: Option<f64>,
    /// `separate` terminals.
    pub separate: bool,
    /// The whole statement.
    pub span: Span,
}

/// How a junction turns light into voltage.
#[derive(Clone, Debug, PartialEq)]
pub enum VoltageModel {
    /// Only radiative recombination.
    RadiativeLimit,
    /// Radiative limit and an external radiative efficiency, 0 < ere ≤ 1.
    Ere(f64),
    /// Two diodes, measured.
    Fit(DiodeFit),
    /// From layers, doping, lifetimes and velocities.
    Layers,
}

/// A measured two-diode fit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DiodeFit {
    /// A/m2, slope kT/q.
    pub j01_a_per_m2: f64,
    /// A/m2, slope 2kT/q.
    pub j02_a_per_m2: f64,
    /// ohm m2, if stated.
    pub shunt_ohm_m2: Option<f64>,
    /// The temperature it holds at, K.
    pub at_k: f64,
}

/// What joins two junctions.
#[derive(Clone, Debug)]
pub struct Interconnect {
    /// `as lower`, or `tunnel1`.
    pub name: Spanned<String>,
    /// Tunnel junction or recombination contact.
    pub kind: InterconnectKind,
    /// Its layers, as a range of [`Design::layers`](crate::design::Design::layers); empty where none are written.
    pub layers: Range<usize>,
    /// How many junctions stand sunward of it.
    pub below_junctions: usize,
    /// Resistance, ohm m2, if stated.
    pub resistance_ohm_m2: Option<f64>,
    /// Peak current, A/m2, if stated.
    pub peak_a_per_m2: Option<f64>,
    /// Least current beyond the peak, A/m2, if stated.
    pub valley_a_per_m2: Option<f64>,
    /// The whole statement.
    pub span: Span,
}

/// What joins two junctions.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum InterconnectKind {
    /// Esaki diode.
    Tunnel,
    /// Recombination contact.
    Recombination,
}

/// The front grid.
#[derive(Clone, Debug, PartialEq)]
pub struct Fingers {
    /// Share of the area that is covered, 0..1.
    pub shading: f64,
    /// Series resistance, ohm m2; 0 where its shape tells it.
    pub series_resistance_ohm_m2: f64,
    /// Its shape, where the resistance follows from that.
    pub shape: Option<FingerShape>,
    /// The whole statement.
    pub span: Span,
}

/// The shape of parallel fingers and what they are made of.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FingerShape {
    /// From finger to finger, m.
    pub pitch_m: f64,
    /// m.
    pub width_m: f64,
    /// m.
    pub height_m: f64,
    /// From the bus bar to the tip, m.
    pub length_m: f64,
    /// Of the metal, ohm m.
    pub resistivity_ohm_m: f64,
    /// Between metal and semiconductor, ohm m2.
    pub contact_ohm_m2: f64,
    /// Of the front layers, ohm per square, if stated.
    pub sheet_ohm: Option<f64>,
}
