//! [`Design`] → [`Results`]: the physics rooms, called in order for each condition.

use crate::design::Design;
use crate::finding::Outcome;
use crate::results::Results;

/// Evaluates every condition of a design. `source` is the path shown in the numbers file.
pub fn evaluate(_design: &Design, _source: &str) -> Outcome<Results> {
    Outcome { value: None, findings: Default::default() }
}

/// SHA-256 of the resolved design, hexadecimal: the same for the same design whatever the layout
/// or names of the file.
pub fn design_hash(_design: &Design) -> String {
    String::new()
}
