//! Diodes, the series stack, its curve and its maximum power point.
