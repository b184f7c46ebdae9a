//! The limits in force: what is marked, what is usual, what the house asks for.

use super::{HouseRules, Limits, LimitsFrom};
use crate::marking::Reading;
use crate::meter::{AssumedLoss, Part};
use crate::quantity::{Farad, Tolerance};
use crate::tables::{Family, family_facts};

/// What is assumed where nothing is marked and the family is not known (common practice, no source).
const ASSUMED_PERCENT: f64 = 20.0;

/// The least standard uncertainty of a loss that is taken for granted.
const LEAST_LOSS_UNCERTAINTY: f64 = 0.005;

/// Returns the part that the meter is to expect for a reading of the marking.
pub fn expect(reading: &Reading, rules: &HouseRules) -> Part {
    let limits = limits(reading, rules);
    Part {
        capacitance: reading.capacitance,
        low: Some(limits.low),
        high: limits.high,
        loss: usual_loss(reading.family),
        family: reading.family,
    }
}

/// Returns the loss taken for granted in a family: its usual one; none if it is unknown or only a group is named.
pub fn usual_loss(family: Option<Family>) -> AssumedLoss {
    let value = family
        .and_then(|family| family_facts(family).usual_loss)
        .unwrap_or(0.0);
    AssumedLoss {
        value,
        standard_uncertainty: value.max(LEAST_LOSS_UNCERTAINTY),
    }
}

/// Returns the limits in force for a reading of the marking: the marked limits, narrowed by the house rule.
pub fn limits(reading: &Reading, rules: &HouseRules) -> Limits {
    let nominal = reading.capacitance;
    let (made_to, from) = made_to(reading);
    let (low, high) = made_to.limits(nominal);
    let house = house_rule(reading.family, rules);
    let marked = Limits {
        low,
        high,
        from,
        made_to,
    };
    let Some(rule) = house else { return marked };
    let (house_low, house_high) = rule.limits(nominal);
    if reading.tolerance.is_none() {
        return Limits {
            low: house_low,
            high: house_high,
            from: LimitsFrom::House,
            made_to,
        };
    }
    let narrowed = Limits {
        low: larger(low, house_low),
        high: smaller(high, house_high),
        from,
        made_to,
    };
    let is_moved = narrowed.low != low || narrowed.high != high;
    Limits {
        from: if is_moved { LimitsFrom::House } else { from },
        ..narrowed
    }
}

/// The tolerance a part was made to: marked, else usual for the family, else assumed.
fn made_to(reading: &Reading) -> (Tolerance, LimitsFrom) {
    match (reading.tolerance, reading.family) {
        (Some(tolerance), _) => (tolerance, LimitsFrom::Marked),
        (None, Some(family)) => (family_facts(family).usual_tolerance, LimitsFrom::Family),
        (None, None) => (Tolerance::percent(ASSUMED_PERCENT), LimitsFrom::Assumed),
    }
}

/// The house rule that speaks for a family: its own, its group's, else the one for families not named.
fn house_rule(family: Option<Family>, rules: &HouseRules) -> Option<Tolerance> {
    let named = |wanted: Family| {
        rules
            .tolerances
            .iter()
            .find(|(f, _)| *f == wanted)
            .map(|(_, t)| *t)
    };
    let own =
        family.and_then(|family| named(family).or_else(|| named(Family::Group(family.group()))));
    own.or(rules.any_tolerance)
}

fn larger(one: Farad, other: Farad) -> Farad {
    if one >= other { one } else { other }
}

fn smaller(one: Option<Farad>, other: Option<Farad>) -> Option<Farad> {
    match (one, other) {
        (Some(one), Some(other)) => Some(if one <= other { one } else { other }),
        (one, other) => one.or(other),
    }
}
