//! Free values as findings print them.

use super::show::significant;
use crate::design::FreeValue;
use crate::units::{self, Dimension};

/// `300 nm .. 1200 nm`
pub(super) fn range(free: &FreeValue) -> String {
    format!("{} .. {}", show(free, free.range.0), show(free, free.range.1))
}

/// A value in the trade's unit, told from what the path ends in.
pub(super) fn show(free: &FreeValue, si: f64) -> String {
    match free.path.rsplit('.').next() {
        Some("thickness") => units::trade(si, Dimension::LENGTH),
        Some("gap") => units::trade(si, Dimension::ENERGY),
        _ => significant(si, 4),
    }
}
