//! Dimensions, quantities, and the table of units.
