//! Where light is absorbed.

pub mod downward;
pub mod grid;
pub mod interference;
mod media;
pub mod model;
pub mod one_pass;
pub mod wave;
