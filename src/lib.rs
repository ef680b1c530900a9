//! Bandloom: a declarative language for multi-junction solar cell stacks, and its compiler.
//!
//! A stack file travels through the rooms below in this order:
//!
//! ```text
//! World ─text→ Source ─parse→ syntax::File ─resolve→ Design ─evaluate→ Results ─report→ sheets
//!                                            │                 │
//!                                            └────── check ────┴→ Findings
//! ```
//!
//! Every pass returns an [`finding::Outcome`]: as much of its value as could be made, and all it
//! has to say. See `DEVELOPERS.md` for the rooms and the direction of dependence between them.

pub mod carriers;
pub mod check;
pub mod circuit;
pub mod cli;
pub mod compile;
pub mod design;
pub mod evaluate;
pub mod finding;
pub mod growth;
pub mod light;
pub mod materials;
pub mod numerics;
pub mod optics;
pub mod parse;
pub mod report;
pub mod resolve;
pub mod results;
pub mod source;
pub mod syntax;
pub mod units;
pub mod watch;
pub mod why;
pub mod world;
