//! Where light is absorbed.
