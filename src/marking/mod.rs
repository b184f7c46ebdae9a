//! From the text printed on a part to what it may mean.

mod reading;

pub use reading::{Decoding, RatedVoltage, Reading, Role, Used};
