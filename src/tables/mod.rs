//! The facts: what stands in `data/`, parsed once into typed rows, every row with its published source.

pub mod document;
mod family;
mod without_bias;

pub use family::{Dielectric, Family, Group};
pub use without_bias::peak_without_bias;
