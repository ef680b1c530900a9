//! Roots, interpolation, quadrature: knows no solar word.
