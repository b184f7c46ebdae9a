//! What the loss says about a part.

use super::Tested;
use crate::meter::LossSeen;
use crate::quantity::Hertz;
use crate::tables::{Family, Group, LossLimit, family_facts};

/// Above this loss series and parallel capacitance part and a reading no longer means a value.
pub(super) const TOO_LOSSY: f64 = 0.3;

/// A loss proven above so many times the family's limit makes a part dead.
const DEAD_FACTOR: f64 = 3.0;

/// What the loss of a part says.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum LossVerdict {
    /// Nothing against the part.
    Fine(Tested),
    /// Above its limit, not so far that the part is dead.
    High,
    /// Proven far above its family's limit.
    Dead { limit: f64 },
    /// So high that the reading is no value.
    TooLossy,
}

/// Judges the loss seen against the family's limit, where that is stated for the meter's frequency.
pub(super) fn judge_loss(seen: &LossSeen, family: Option<Family>, frequency: Hertz) -> LossVerdict {
    let limit = family.and_then(|family| limit_at(family, frequency));
    match (limit, seen.at_least) {
        (Some(limit), Some(at_least)) if at_least > DEAD_FACTOR * limit => {
            LossVerdict::Dead { limit }
        }
        _ if seen
            .proven
            .or(seen.at_least)
            .is_some_and(|loss| loss > TOO_LOSSY) =>
        {
            LossVerdict::TooLossy
        }
        (Some(limit), Some(at_least)) if at_least > limit => LossVerdict::High,
        (Some(limit), _) if seen.below.is_some_and(|below| below < limit) => {
            LossVerdict::Fine(Tested::Ok)
        }
        _ => LossVerdict::Fine(Tested::NotTested),
    }
}

/// The loss limit of a family at the frequency of the meter; `None` where none is stated for it. Limits stated at 1 kHz
/// serve from 400 Hz to 2.5 kHz, those of electrolytics only at 100 and 120 Hz.
pub(super) fn limit_at(family: Family, frequency: Hertz) -> Option<f64> {
    let LossLimit { limit, stated_at } = family_facts(family).loss_limit?;
    let ratio = frequency / stated_at;
    let serves = match family.group() {
        Group::Electrolytic | Group::Tantalum | Group::Polymer | Group::Edlc => {
            (95.0..=126.0).contains(&frequency.get()) && (0.8..=1.25).contains(&ratio)
        }
        _ => (0.4..=2.5).contains(&ratio),
    };
    serves.then_some(limit)
}
