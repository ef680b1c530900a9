//! Constants, interpolation, quadrature, roots, maxima: knows no solar word.

pub mod constants;
pub mod exponential_integral;
pub mod quadrature;
pub mod roots;
