//! The sentences beside a word: why, and how sure. Each is computed; none is said of what was not looked at.

use super::loss::LossVerdict;
use super::{Circumstances, Limits, LimitsFrom, Observation, Tested, Word, lamp, lamp_says};
use crate::marking::Reading;
use crate::meter::{Estimate, Lamp, Measured, Part, Seen, Source};
use crate::quantity::{Farad, Fraction, Resolution, Uncertain, engineering, harmless};

/// Measured value from nominal.
pub(super) fn deviation(estimate: Estimate, reading: &Reading) -> Fraction {
    Fraction::new(estimate.capacitance / reading.capacitance - 1.0)
}

/// Why there is no value; a lamp that misbehaved has a remark of its own.
pub(super) fn no_value(observation: &Observation<'_>, is_too_lossy: bool) -> Option<String> {
    if is_too_lossy {
        let frequency = observation.meter.frequency;
        return Some(format!("too lossy at {frequency}: the reading is no value"));
    }
    match observation.seen {
        Seen::NeverDark { .. } | Seen::AlwaysDark | Seen::Edges { .. } => None,
        _ => Some("the reading gives no value".to_owned()),
    }
}

/// What a lamp that misbehaved means, and what to do about it.
pub(super) fn lamp(observation: &Observation<'_>, part: &Part) -> Option<String> {
    let what = match observation.seen {
        Seen::NeverDark { .. } => "never dark: ",
        Seen::AlwaysDark => "dark everywhere: ",
        _ => "",
    };
    let meaning = lamp::in_words(&lamp_says(observation, Some(part)))?;
    Some(format!("{what}{meaning}"))
}

/// The limit exceeded, and the rule that spoke.
pub(super) fn about_limits(
    reading: &Reading,
    limits: &Limits,
    estimate: Option<Estimate>,
    word: Word,
) -> Vec<String> {
    let mut remarks = Vec::new();
    if let Some(estimate) = estimate.filter(|_| word == Word::Outside) {
        let c = estimate.capacitance;
        if c < limits.low {
            remarks.push(format!("below the lower limit, {}", limit(limits.low)));
        } else if let Some(high) = limits.high.filter(|high| c > *high) {
            remarks.push(format!("above the upper limit, {}", limit(high)));
        }
    }
    match limits.from {
        LimitsFrom::Marked => {}
        LimitsFrom::House => {
            let kind = if reading.tolerance.is_some() {
                "marked"
            } else {
                "usual"
            };
            remarks.push(format!(
                "limits by house rule, {kind} tolerance {}",
                limits.made_to
            ));
        }
        LimitsFrom::Family => remarks.push(format!(
            "no tolerance marked: {} is usual for the family",
            limits.made_to
        )),
        LimitsFrom::Assumed => {
            remarks.push(format!("no tolerance marked: {} assumed", limits.made_to));
        }
    }
    remarks
}

fn limit(value: Farad) -> String {
    engineering(value.get(), Resolution::Digits(4), "F")
}

/// What a parked lamp proves, at two standard uncertainties. A lit lamp whose two edges are less than that apart proves
/// nothing.
pub(super) fn window(lamp: Lamp, low: Uncertain<Farad>, high: Option<Uncertain<Farad>>) -> String {
    let sign = if lamp == Lamp::Dark { -1.0 } else { 1.0 };
    let from = low.value + low.expanded() * sign;
    match (lamp, high.map(|high| high.value - high.expanded() * sign)) {
        (Lamp::Dark, Some(to)) if from <= Farad::new(0.0) => format!("below {to}"),
        (Lamp::Dark, Some(to)) => format!("between {from} and {to}"),
        (Lamp::Dark, None) => format!("above {from}"),
        (Lamp::Lit, Some(to)) if to <= from => "a lit lamp proves nothing here".to_owned(),
        (Lamp::Lit, Some(to)) => format!("not between {from} and {to}"),
        (Lamp::Lit, None) => format!("not above {from}"),
    }
}

/// What the arc says of the loss.
pub(super) fn about_loss(measured: &Measured, verdict: LossVerdict) -> Option<String> {
    let seen = measured.loss;
    match (seen.proven, seen.at_least) {
        (Some(loss), _) => {
            let form = if loss > 0.1 { ", series form" } else { "" };
            let other = seen
                .other
                .map_or(String::new(), |other| format!(", or {other:.2}"));
            Some(format!("loss {loss:.2}{other}{form}"))
        }
        (None, Some(at_least)) if verdict == LossVerdict::High => {
            Some(format!("loss at least {at_least:.3}, above its limit"))
        }
        (None, Some(at_least)) => Some(format!("loss at least {at_least:.3}")),
        _ => None,
    }
}

/// Why a part is dead by its loss.
pub(super) fn dead_by_loss(measured: &Measured, limit: f64) -> String {
    let at_least = measured.loss.at_least.unwrap_or_default();
    format!("loss at least {at_least:.3}, more than 3 times the family's limit of {limit}")
}

/// The largest contributor to the doubt, and what would lessen it.
pub(super) fn largest_doubt(measured: &Measured) -> Option<String> {
    let source = measured.contributions.first()?.source;
    let hint = match source {
        Source::Reading => "",
        Source::Calibration => " (better reference parts)",
        Source::Loss => " (read both edges)",
        _ => " (calibrate)",
    };
    Some(format!("doubt: mostly {source}{hint}"))
}

/// What else was entered.
pub(super) fn about_circumstances(circumstances: &Circumstances, reading: &Reading) -> Vec<String> {
    let mut remarks = Vec::new();
    if let Some(looks) = &circumstances.looks
        && looks_of(looks) == Tested::Bad
    {
        remarks.push(format!("looks {}", harmless(looks)));
    }
    if circumstances.leakage.is_some() {
        remarks.push("leakage recorded, not judged".to_owned());
    }
    if reading.safety_class.is_some() {
        remarks.push("suppression part: never back on the line, whatever it reads".to_owned());
    }
    remarks
}

/// The looks as a state.
pub(super) fn looks(circumstances: &Circumstances) -> Tested {
    circumstances
        .looks
        .as_deref()
        .map_or(Tested::NotTested, looks_of)
}

fn looks_of(looks: &str) -> Tested {
    if matches!(
        looks.trim().to_lowercase().as_str(),
        "ok" | "good" | "fine" | "sound"
    ) {
        Tested::Ok
    } else {
        Tested::Bad
    }
}
