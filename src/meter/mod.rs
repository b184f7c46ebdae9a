//! The balance meter: a profile goes in, and with it predictions (where does a part null?) and estimates (what does a
//! reading mean?) come out.
//!
//! [`predict`] and [`measure`] are the two calls; `circuit.rs` and `balance.rs` derive what they rest on.

mod arc;
mod balance;
mod calibrate;
mod circuit;
mod coverage;
mod dial;
mod estimate;
mod factored;
pub mod fit;
mod forecast;
mod improve;
mod model;
mod parking;
mod part;
mod plain;
mod predict;
mod profile;
mod read;
mod read_calibration;
mod read_dial;
mod route;
mod seen;

pub use calibrate::{
    Calibrated, CalibrationReport, Contradiction, NextPart, NotCalibrated, Parameter, PartCheck,
    ReferenceReading, Residual, Robust, RobustChange, RowFault, RowFaultKind, SwitchGain,
    calibrate, calibrate_quickly, check_reading,
};
pub use coverage::{Coverage, Covered, SwitchCoverage, coverage};
pub use estimate::measure;
pub use forecast::NumberRead;
pub use improve::{Change, Improvement};
pub use parking::{ParkedWindow, parked_window, parking_places};
pub use predict::{Null, best_switch, null, predict};

pub use part::{
    AssumedLoss, Band, Caution, Contribution, Cut, DarkArc, Estimate, LossSeen, Measured, Part,
    Prediction, Source, Stop, Value,
};
pub use profile::{
    Calibration, CheckPart, Degrees, Dial, Difference, Meter, RangeSwitch, Reference, Switch, Taper,
};
pub use seen::{DialReading, Edge, Lamp, Repeats, Seen};
