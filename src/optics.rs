//! Where light is absorbed.

pub mod grid;
pub mod one_pass;
pub mod wave;
