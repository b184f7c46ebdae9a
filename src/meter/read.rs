//! From the text of a profile to a meter, every mistake reported with its place.

use super::model::Model;
use super::read_calibration::read_calibration;
use super::read_dial::read_dial;
use super::{CheckPart, Difference, Meter, RangeSwitch, Reference};
use crate::quantity::{Farad, Fraction, Hertz, Ohm, Volt};
use crate::tables::document::{Bound, Complaint, Document, Need, Placed, Section, tree};

const MOST_SWITCHES: usize = 8;
const MOST_CHECK_PARTS: usize = 100;

const ROOT: [&str; 13] = [
    "name",
    "note",
    "oscillator",
    "switch",
    "reference",
    "dial",
    "buffer",
    "difference",
    "terminals",
    "lamp",
    "reading",
    "check",
    "calibration",
];

impl Meter {
    /// Reads a profile; a profile with mistakes gives all of them.
    ///
    /// # Errors
    /// Every mistake found, each with its place. A calibration that no longer matches is a warning among `Ok`'s.
    pub fn read(text: &str) -> Result<(Self, Vec<Complaint>), Vec<Complaint>> {
        let (table, mut document) = tree(text);
        let root = Document::root(&table);
        document.check_keys(&root, &ROOT);
        let description = describe(&mut document, &root);
        let Some(mut meter) = description else {
            return Err(document.into_complaints());
        };
        let stored = document.section(&root, "calibration", Need::Optional);
        let calibration = stored
            .as_ref()
            .and_then(|section| read_calibration(&mut document, section, &meter));
        if !document.is_clean() {
            return Err(document.into_complaints());
        }
        let Some((calibration, hash)) = calibration else {
            return Ok((meter, Vec::new()));
        };
        let now = profile_hash(text);
        if hash.value != now {
            let message = format!(
                "the profile was changed after it was calibrated (`profile_hash` is {}, the text above gives {now}): the calibration is ignored; calibrate again",
                crate::quantity::harmless(&hash.value)
            );
            document.complain(hash.at, message);
            return Ok((meter, document.into_complaints()));
        }
        meter.model = Model::of(&meter, Some(&calibration.fit));
        meter.calibration = Some(calibration);
        Ok((meter, Vec::new()))
    }
}

/// Returns the CRC-32, eight lower-case hexadecimal digits, of the bytes before the line `[calibration]` (of the whole
/// text, if there is no such line).
pub(super) fn profile_hash(text: &str) -> String {
    let before = text.get(..calibration_starts(text)).unwrap_or(text);
    format!("{:08x}", crc32fast::hash(before.as_bytes()))
}

/// Returns how many bytes stand before the line `[calibration]`; all of them, if there is no such line.
pub(super) fn calibration_starts(text: &str) -> usize {
    text.split_inclusive('\n')
        .take_while(|line| !line.trim_end().starts_with("[calibration]"))
        .map(str::len)
        .sum()
}

/// Reads everything but the calibration. The parts are read one after the other before any is missed, so that one
/// run tells every mistake.
fn describe(document: &mut Document<'_>, root: &Section<'_>) -> Option<Meter> {
    let name = document.text_of(root, "name", Need::Required);
    let note = document
        .text_of(root, "note", Need::Optional)
        .map(|n| n.value);
    let oscillator = read_oscillator(document, root);
    let switches = read_switches(document, root);
    let reference = read_reference(document, root);
    let dial = document
        .section(root, "dial", Need::Required)
        .and_then(|section| read_dial(document, &section));
    let gain_bandwidth = document
        .section(root, "buffer", Need::Optional)
        .and_then(|section| {
            document.check_keys(&section, &["gain_bandwidth"]);
            document
                .quantity::<Hertz>(&section, "gain_bandwidth", Bound::Positive, Need::Required)
                .map(|g| g.value)
        });
    let difference = read_difference(document, root);
    let (stray, stray_tolerance) = read_terminals(document, root);
    let lamp = read_lamp(document, root);
    let repeatability = document
        .section(root, "reading", Need::Required)
        .and_then(|section| {
            document.check_keys(&section, &["repeatability"]);
            document
                .number(
                    &section,
                    "repeatability",
                    Bound::NotNegative,
                    Need::Required,
                )
                .map(|r| r.value)
        });
    let checks = read_check_parts(document, root);
    let (frequency, amplitude) = oscillator?;
    let (threshold, threshold_tolerance) = lamp?;
    if threshold.value >= amplitude {
        let message = format!(
            "`threshold` is {}, which the oscillator's {amplitude} never exceeds",
            threshold.value
        );
        document.complain(threshold.at, message);
    }
    let mut meter = Meter {
        name: name?.value,
        note,
        frequency,
        amplitude,
        switches: switches?,
        reference: reference?,
        dial: dial?,
        gain_bandwidth,
        difference: difference?,
        stray,
        stray_tolerance,
        threshold: threshold.value,
        threshold_tolerance,
        repeatability: repeatability?,
        checks,
        calibration: None,
        model: Model::empty(),
    };
    meter.model = Model::of(&meter, None);
    Some(meter)
}

fn read_oscillator(document: &mut Document<'_>, root: &Section<'_>) -> Option<(Hertz, Volt)> {
    let section = document.section(root, "oscillator", Need::Required)?;
    document.check_keys(&section, &["frequency", "amplitude"]);
    let frequency =
        document.quantity::<Hertz>(&section, "frequency", Bound::Positive, Need::Required);
    let amplitude =
        document.quantity::<Volt>(&section, "amplitude", Bound::Positive, Need::Required);
    Some((frequency?.value, amplitude?.value))
}

fn read_switches(document: &mut Document<'_>, root: &Section<'_>) -> Option<Vec<RangeSwitch>> {
    let sections = document.sections(root, "switch", MOST_SWITCHES, Need::Required);
    let mut switches: Vec<RangeSwitch> = Vec::new();
    let mut are_complete = !sections.is_empty();
    for section in &sections {
        document.check_keys(section, &["label", "resistance", "tolerance"]);
        let label = document.text_of(section, "label", Need::Required);
        let resistance =
            document.quantity::<Ohm>(section, "resistance", Bound::Positive, Need::Required);
        let tolerance = read_tolerance(document, section);
        if let Some(label) = &label {
            if label.value.trim().is_empty() {
                document.complain(
                    label.at.clone(),
                    "`label` is empty; accepted here: what is printed beside the switch".into(),
                );
            }
            if switches.iter().any(|s| s.label == label.value) {
                document.complain(
                    label.at.clone(),
                    format!("two switches have the label `{}`", label.value),
                );
            }
        }
        match (label, resistance) {
            (Some(label), Some(resistance)) => {
                switches.push(RangeSwitch {
                    label: label.value,
                    resistance: resistance.value,
                    tolerance,
                });
            }
            _ => are_complete = false,
        }
    }
    are_complete.then_some(switches)
}

/// An optional tolerance, below 100 %.
pub(super) fn read_tolerance(document: &mut Document<'_>, section: &Section<'_>) -> Fraction {
    let Some(tolerance) = document.fraction(section, "tolerance", Need::Optional) else {
        return Fraction::new(0.0);
    };
    below_one(document, &tolerance, "tolerance")
}

pub(super) fn below_one(
    document: &mut Document<'_>,
    fraction: &Placed<Fraction>,
    key: &str,
) -> Fraction {
    if fraction.value.get() >= 1.0 {
        document.complain(
            fraction.at.clone(),
            format!("`{key}` is {}; accepted here: below 100 %", fraction.value),
        );
    }
    fraction.value
}

fn read_loss(document: &mut Document<'_>, section: &Section<'_>) -> f64 {
    let Some(loss) = document.number(section, "loss", Bound::NotNegative, Need::Optional) else {
        return 0.0;
    };
    if loss.value >= 1.0 {
        document.complain(
            loss.at,
            format!(
                "`loss` is {}; accepted here: tan δ of a capacitor, 0 to 1",
                loss.value
            ),
        );
    }
    loss.value
}

fn read_reference(document: &mut Document<'_>, root: &Section<'_>) -> Option<Reference> {
    let section = document.section(root, "reference", Need::Required)?;
    document.check_keys(&section, &["capacitance", "tolerance", "loss"]);
    let capacitance =
        document.quantity::<Farad>(&section, "capacitance", Bound::Positive, Need::Required);
    let tolerance = read_tolerance(document, &section);
    let loss = read_loss(document, &section);
    Some(Reference {
        capacitance: capacitance?.value,
        tolerance,
        loss,
    })
}

fn read_difference(document: &mut Document<'_>, root: &Section<'_>) -> Option<Difference> {
    let Some(section) = document.section(root, "difference", Need::Optional) else {
        return Some(Difference::Buffered);
    };
    document.check_keys(&section, &["drive", "resistance"]);
    let drive = document.text_of(&section, "drive", Need::Required)?;
    let need = if drive.value == "buffered" {
        Need::Optional
    } else {
        Need::Required
    };
    let resistance = document.quantity::<Ohm>(&section, "resistance", Bound::Positive, need);
    match drive.value.as_str() {
        "buffered" => Some(Difference::Buffered),
        "divider" => Some(Difference::Divider(resistance?.value)),
        "inverting" => Some(Difference::Inverting(resistance?.value)),
        found => {
            let message = format!(
                "`drive` is `{}`; accepted here: buffered, divider, inverting",
                crate::quantity::harmless(found)
            );
            document.complain(drive.at, message);
            None
        }
    }
}

fn read_terminals(document: &mut Document<'_>, root: &Section<'_>) -> (Farad, Farad) {
    let nothing = (Farad::new(0.0), Farad::new(0.0));
    let Some(section) = document.section(root, "terminals", Need::Optional) else {
        return nothing;
    };
    document.check_keys(&section, &["stray", "stray_tolerance"]);
    let mut read = |key| {
        let found = document.quantity::<Farad>(&section, key, Bound::NotNegative, Need::Optional);
        found.map_or(Farad::new(0.0), |found| found.value)
    };
    (read("stray"), read("stray_tolerance"))
}

fn read_lamp(document: &mut Document<'_>, root: &Section<'_>) -> Option<(Placed<Volt>, Fraction)> {
    let section = document.section(root, "lamp", Need::Required)?;
    document.check_keys(&section, &["threshold", "threshold_tolerance"]);
    let threshold =
        document.quantity::<Volt>(&section, "threshold", Bound::Positive, Need::Required);
    let tolerance = document.fraction(&section, "threshold_tolerance", Need::Optional);
    let tolerance = tolerance.map_or(Fraction::new(0.0), |t| {
        below_one(document, &t, "threshold_tolerance")
    });
    Some((threshold?, tolerance))
}

fn read_check_parts(document: &mut Document<'_>, root: &Section<'_>) -> Vec<CheckPart> {
    let mut parts: Vec<CheckPart> = Vec::new();
    for section in document.sections(root, "check", MOST_CHECK_PARTS, Need::Optional) {
        document.check_keys(&section, &["label", "capacitance", "uncertainty", "loss"]);
        let label = document.text_of(&section, "label", Need::Required);
        let capacitance =
            document.quantity::<Farad>(&section, "capacitance", Bound::Positive, Need::Required);
        let uncertainty = document.fraction(&section, "uncertainty", Need::Required);
        let loss = read_loss(document, &section);
        if let Some(label) = label
            .as_ref()
            .filter(|l| parts.iter().any(|p| p.label == l.value))
        {
            document.complain(
                label.at.clone(),
                format!("two check parts have the label `{}`", label.value),
            );
        }
        if let (Some(label), Some(capacitance), Some(uncertainty)) =
            (label, capacitance, uncertainty)
        {
            let uncertainty = below_one(document, &uncertainty, "uncertainty");
            parts.push(CheckPart {
                label: label.value,
                capacitance: capacitance.value,
                uncertainty,
                loss,
            });
        }
    }
    parts
}
