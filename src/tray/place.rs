//! From a judged part to its compartment.

use super::{Compartment, Judged, Placement, Takes, Test, Tray, VoltageKind};
use crate::finding::Tested;
use crate::marking::RatedVoltage;
use crate::quantity::Volt;

/// Returns the first compartment that takes the part.
pub fn place(tray: &Tray, part: &Judged<'_>) -> Placement {
    let mut nearest: Option<(usize, &Compartment, Vec<&'static str>)> = None;
    for (index, compartment) in tray.compartments.iter().enumerate() {
        let missing = unmet(&compartment.takes, part);
        if missing.is_empty() {
            return Placement::At(index);
        }
        if nearest
            .as_ref()
            .is_none_or(|(_, _, fewest)| missing.len() < fewest.len())
        {
            nearest = Some((index, compartment, missing));
        }
    }
    let why = match nearest {
        Some((_, compartment, missing)) => {
            format!(
                "nearest is {} {}, but for its {}",
                compartment.at,
                compartment.label,
                missing.join(" and ")
            )
        }
        None => "the tray has no compartments".to_owned(),
    };
    Placement::Unplaced { why }
}

/// Returns the keys of `takes` that the part does not meet.
fn unmet(takes: &Takes, part: &Judged<'_>) -> Vec<&'static str> {
    let reading = part.reading;
    let verdict = part.verdict;
    let value = part.measured.estimate().map(|e| e.capacitance);
    let nominal = reading.map(|r| r.capacitance);
    let voltage = reading.and_then(|r| r.voltage);
    let class = reading.and_then(|r| r.safety_class.as_deref());
    let tolerance = reading
        .zip(verdict.limits)
        .map(|(r, limits)| limits.made_to.larger_side(r.capacitance));
    let characteristic = reading.and_then(|r| r.characteristic.as_deref());
    let class_fits = match (&takes.safety_class, class) {
        (Some(wanted), Some(found)) => includes_class(found, wanted),
        (None, None) => true,
        _ => false,
    };
    let loss_limit = part.measured.loss.below.or(part.measured.loss.proven);
    let tests = [
        (Test::Loss, verdict.loss),
        (Test::Leakage, verdict.leakage),
        (Test::Looks, verdict.looks),
    ];
    let was_tested = |wanted: &Test| {
        tests
            .iter()
            .any(|(test, state)| test == wanted && *state == Tested::Ok)
    };
    let checks = [
        (
            "finding",
            takes.finding.is_none_or(|wanted| wanted == verdict.word),
        ),
        (
            "value",
            takes
                .value
                .is_none_or(|span| value.is_some_and(|c| span.contains(c))),
        ),
        (
            "nominal",
            takes
                .nominal
                .is_none_or(|span| nominal.is_some_and(|c| span.contains(c))),
        ),
        (
            "family",
            takes.family.as_ref().is_none_or(|wanted| {
                part.family
                    .is_some_and(|found| wanted.iter().any(|w| found.is_one_of(*w)))
            }),
        ),
        (
            "tolerance",
            takes
                .tolerance
                .is_none_or(|most| tolerance.is_some_and(|t| t.get() <= most.get() * (1.0 + 1e-9))),
        ),
        (
            "voltage",
            takes.voltage.is_none_or(|least| {
                voltage.is_some_and(|v| rated(v, takes.voltage_kind) >= Some(least))
            }),
        ),
        (
            "voltage_kind",
            takes
                .voltage_kind
                .is_none_or(|kind| voltage.is_some_and(|v| rated(v, Some(kind)).is_some())),
        ),
        (
            "loss",
            takes
                .loss
                .is_none_or(|most| loss_limit.is_some_and(|loss| loss <= most)),
        ),
        ("safety_class", class_fits),
        (
            "characteristic",
            takes.characteristic.as_deref().is_none_or(|wanted| {
                characteristic.is_some_and(|c| c.eq_ignore_ascii_case(wanted))
            }),
        ),
        ("tested", takes.tested.iter().all(was_tested)),
    ];
    checks
        .into_iter()
        .filter(|(_, is_met)| !is_met)
        .map(|(key, _)| key)
        .collect()
}

/// A part of two classes ("X1/Y2") belongs to either.
fn includes_class(found: &str, wanted: &str) -> bool {
    found.eq_ignore_ascii_case(wanted)
        || found
            .split('/')
            .any(|class| class.trim().eq_ignore_ascii_case(wanted))
}

/// The rated voltage of a kind; of either, direct first, if none is asked for.
fn rated(voltage: RatedVoltage, kind: Option<VoltageKind>) -> Option<Volt> {
    match kind {
        Some(VoltageKind::Dc) => voltage.dc,
        Some(VoltageKind::Ac) => voltage.ac.or(voltage.y),
        None => voltage.dc.or(voltage.ac).or(voltage.y),
    }
}
