//! What becomes of carriers between their birth and the contacts: depletion, collection, dark
//! currents. Plain SI numbers in, plain SI numbers out; which layer is what is decided elsewhere.
//!
//! One dimension, low injection, abrupt junctions, Boltzmann statistics. The minority carriers of
//! a quasi-neutral region obey `φ'' = φ/L²`, once for the light and for the dark: the solution that
//! is 1 at the junction and meets the surface velocity at the far face is the collection
//! probability of a carrier born there (reciprocity: Donolato, Appl. Phys. Lett. 46, 270 (1985)),
//! and its slope at the junction is the dark current.

pub mod collection;
pub mod dark;
pub mod depletion;
pub mod drift;
pub mod equilibrium;
pub mod recycling;
pub mod region;
pub mod statistics;
