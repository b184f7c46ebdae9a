//! From a measured value to a word: whether a part is inside its limits, how sure that is, and what to do next.
//!
//! Goes in: the readings of the marking ([`crate::marking`]) and what the meter made of the dial reading
//! ([`crate::meter`]). Comes out: a [`Verdict`].

mod advice;
mod judge;
mod limits;
mod loss;
mod normal;
mod parked;
mod prior;
mod rank;
mod remark;
mod slip;
mod verdict;

pub use judge::judge;
pub use limits::{expect, limits, usual_loss};
pub use verdict::{
    Circumstances, HouseRules, Limits, LimitsFrom, Observation, PriorKind, ReadingCertainty, Slip,
    Standing, Tested, Verdict, Word,
};
