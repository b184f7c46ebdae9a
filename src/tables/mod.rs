//! The facts: what stands in `data/`, parsed once into typed rows, every row with its published source.

mod family;

pub use family::{Dielectric, Family, Group};
