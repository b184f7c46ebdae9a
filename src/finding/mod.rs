//! From a measured value to a word: whether a part is inside its limits, how sure that is, and what to do next.
//!
//! Goes in: the readings of the marking ([`crate::marking`]) and what the meter made of the dial reading
//! ([`crate::meter`]). Comes out: a [`Verdict`].

mod advice;
mod cause;
mod control;
mod judge;
mod lamp;
mod limits;
mod loss;
mod normal;
mod parked;
mod parking;
mod prior;
mod rank;
mod remark;
mod slip;
mod verdict;

pub use cause::{Cause, Hypothesis, Next};
pub use control::{ACT, CheckReading, Control, ControlChart, ControlPoint, Moved, WARN, control};
pub use judge::judge;
pub use lamp::lamp_says;
pub use limits::{expect, limits, usual_loss};
pub use parking::{Parking, Proof, best_parking, park, parking_at};
pub use verdict::{
    Circumstances, HouseRules, Limits, LimitsFrom, Observation, PriorKind, ReadingCertainty, Slip,
    Standing, Tested, Verdict, Word,
};
