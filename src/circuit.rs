//! Diodes, the series stack, its curve and its maximum power point.
//!
//! Currents are A/m2, positive when the cell delivers; voltages V; resistances ohm m2.

mod best;
pub mod curve;
pub mod diode;
pub mod radiative;
pub mod series;
pub mod tunnel;
