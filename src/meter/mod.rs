//! The balance meter: profile in, predictions and estimates out.

mod arc;
mod balance;
mod circuit;
mod dial;
mod estimate;
mod model;
mod part;
mod predict;
mod profile;
mod read;
mod seen;

pub use estimate::measure;
pub use predict::{best_switch, predict};

pub use part::{
    AssumedLoss, Band, Caution, Contribution, Cut, DarkArc, Estimate, LossSeen, Measured, Part,
    Prediction, Source, Stop, Value,
};
pub use profile::{
    Calibration, CheckPart, Degrees, Dial, Difference, Meter, RangeSwitch, Reference, Switch, Taper,
};
pub use seen::{DialReading, Edge, Lamp, Repeats, Seen};
