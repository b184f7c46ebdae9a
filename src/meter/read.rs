//! From the text of a profile to a meter, every mistake reported with its place.

use std::ops::Range;

use toml::de::DeValue;

use super::model::{Fit, Model, N_CONSTANTS};
use super::{
    Calibration, CheckPart, Degrees, Dial, DialReading, Difference, Meter, RangeSwitch, Reference,
    Taper,
};
use crate::quantity::{Farad, Fraction, Hertz, Ohm, Volt};
use crate::tables::document::{Bound, Complaint, Document, Need, Placed, Section, tree};

const MOST_SWITCHES: usize = 8;
const MOST_CHECK_PARTS: usize = 100;
const MOST_POINTS: usize = 1000;
/// Rotation of an ordinary single-turn potentiometer in degrees (common practice, no source).
const USUAL_SWEEP: f64 = 270.0;

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
    let mut n_before = 0;
    for line in text.split_inclusive('\n') {
        if line.trim_end().starts_with("[calibration]") {
            break;
        }
        n_before += line.len();
    }
    format!(
        "{:08x}",
        crc32fast::hash(text.get(..n_before).unwrap_or(text).as_bytes())
    )
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
fn read_tolerance(document: &mut Document<'_>, section: &Section<'_>) -> Fraction {
    let Some(tolerance) = document.fraction(section, "tolerance", Need::Optional) else {
        return Fraction::new(0.0);
    };
    below_one(document, &tolerance, "tolerance")
}

fn below_one(document: &mut Document<'_>, fraction: &Placed<Fraction>, key: &str) -> Fraction {
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

fn read_dial(document: &mut Document<'_>, section: &Section<'_>) -> Option<Dial> {
    document.check_keys(
        section,
        &[
            "low",
            "high",
            "division",
            "resistance",
            "end_resistance",
            "tolerance",
            "points",
            "point_uncertainty",
            "sweep",
        ],
    );
    let low = document.number(section, "low", Bound::NotNegative, Need::Required);
    let high = document.number(section, "high", Bound::Positive, Need::Required);
    let division = document.number(section, "division", Bound::Positive, Need::Required);
    let sweep = document.number(section, "sweep", Bound::Any, Need::Optional);
    if let Some(sweep) = &sweep
        && (sweep.value == 0.0 || sweep.value.abs() > 360.0)
    {
        let message = format!(
            "`sweep` is {}; accepted here: -360 to 360 degrees, not 0",
            sweep.value
        );
        document.complain(sweep.at.clone(), message);
    }
    let sweep = sweep.map_or(USUAL_SWEEP, |s| s.value);
    if let (Some(low), Some(high)) = (&low, &high) {
        if low.value >= high.value {
            let message = format!(
                "`high` is {}; accepted here: above `low`, which is {}",
                high.value, low.value
            );
            document.complain(high.at.clone(), message);
        } else if let Some(division) = division
            .as_ref()
            .filter(|d| d.value > high.value - low.value)
        {
            let message = format!("`division` is {}, more than the whole dial", division.value);
            document.complain(division.at.clone(), message);
        }
    }
    let ends = low
        .as_ref()
        .zip(high.as_ref())
        .map(|(low, high)| (low.value, high.value));
    let taper = read_taper(document, section, ends);
    Some(Dial {
        low: DialReading::new(low?.value),
        high: DialReading::new(high?.value),
        division: division?.value,
        taper: taper?,
        sweep: Degrees(sweep),
    })
}

fn read_taper(
    document: &mut Document<'_>,
    section: &Section<'_>,
    ends: Option<(f64, f64)>,
) -> Option<Taper> {
    const LINEAR: [&str; 3] = ["resistance", "end_resistance", "tolerance"];
    let points_at = section.place_of("points");
    let linear_at = LINEAR
        .iter()
        .find_map(|key| section.place_of(key).map(|at| (*key, at)));
    match (points_at, linear_at) {
        (Some(points_at), Some((key, at))) => {
            let (one, other) = (document.line_of(&points_at), document.line_of(&at));
            let message = format!(
                "`points` (line {one}) and `{key}` (line {other}) are both given; accepted here: either measured points or a linear taper"
            );
            document.complain(points_at, message);
            None
        }
        (Some(_), None) => {
            let points = read_points(document, section, ends);
            let uncertainty = document.fraction(section, "point_uncertainty", Need::Optional);
            let uncertainty = uncertainty.map_or(Fraction::new(0.0), |u| {
                below_one(document, &u, "point_uncertainty")
            });
            Some(Taper::Points {
                points: points?,
                uncertainty,
            })
        }
        (None, _) => {
            if let Some(at) = section.place_of("point_uncertainty") {
                document.complain(
                    at,
                    "`point_uncertainty` belongs to `points`, which are not given".into(),
                );
            }
            let total =
                document.quantity::<Ohm>(section, "resistance", Bound::Positive, Need::Required);
            let end = document.quantity::<Ohm>(
                section,
                "end_resistance",
                Bound::NotNegative,
                Need::Required,
            );
            let tolerance = read_tolerance(document, section);
            Some(Taper::Linear {
                total: total?.value,
                end: end?.value,
                tolerance,
            })
        }
    }
}

fn read_points(
    document: &mut Document<'_>,
    section: &Section<'_>,
    ends: Option<(f64, f64)>,
) -> Option<Vec<(DialReading, Ohm)>> {
    let items = document.items(section, "points", MOST_POINTS, Need::Required)?;
    let mut points: Vec<(f64, f64, Range<usize>)> = Vec::new();
    for item in &items.value {
        let DeValue::Array(pair) = item.get_ref() else {
            document.complain(
                item.span(),
                "a point is a pair; accepted here: [reading, \"resistance\"]".into(),
            );
            return None;
        };
        let (Some(reading), Some(resistance), 2) = (pair.first(), pair.get(1), pair.len()) else {
            document.complain(
                item.span(),
                "a point is a pair; accepted here: [reading, \"resistance\"]".into(),
            );
            return None;
        };
        let reading = document.number_value(reading, "points", Bound::Any);
        let resistance = document.quantity_value::<Ohm>(resistance, "points", Bound::NotNegative);
        points.push((reading?.value, resistance?.value.get(), item.span()));
    }
    let (Some(first), Some(last)) = (points.first(), points.last()) else {
        document.complain(
            items.at,
            "`points` is empty; accepted here: at least the two ends of the dial".into(),
        );
        return None;
    };
    let is_rising = last.1 > first.1;
    let mut are_fine = points.len() > 1;
    if !are_fine {
        document.complain(
            items.at.clone(),
            "`points` has one point; accepted here: at least the two ends of the dial".into(),
        );
    }
    for (before, after) in points.iter().zip(points.iter().skip(1)) {
        let message = if after.0 <= before.0 {
            format!(
                "reading {} stands after {}; accepted here: points by rising reading",
                after.0, before.0
            )
        } else if !(if is_rising {
            before.1 < after.1
        } else {
            after.1 < before.1
        }) {
            let trend = if is_rising { "rise" } else { "fall" };
            format!(
                "at {} the resistance is {} after {}; accepted here: resistances that {trend} all the way",
                after.0,
                Ohm::new(after.1),
                Ohm::new(before.1)
            )
        } else {
            continue;
        };
        document.complain(after.2.clone(), message);
        are_fine = false;
    }
    if let Some((low, high)) = ends.filter(|(low, high)| first.0 > *low || last.0 < *high) {
        let message = format!(
            "`points` go from {} to {}; accepted here: points that cover the dial, {low} to {high}",
            first.0, last.0
        );
        document.complain(items.at, message);
        are_fine = false;
    }
    are_fine.then(|| {
        points
            .into_iter()
            .map(|(x, r, _)| (DialReading::new(x), Ohm::new(r)))
            .collect()
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

fn read_calibration(
    document: &mut Document<'_>,
    section: &Section<'_>,
    meter: &Meter,
) -> Option<(Calibration, Placed<String>)> {
    document.check_keys(
        section,
        &[
            "date",
            "profile_hash",
            "observations",
            "reduced_chi_square",
            "names",
            "estimate",
            "covariance",
        ],
    );
    let date = document
        .get(section, "date", Need::Required)
        .map(|value| match value.get_ref() {
            DeValue::Datetime(date) => date.to_string(),
            other => other.as_str().unwrap_or_default().to_owned(),
        });
    let hash = document.text_of(section, "profile_hash", Need::Required);
    let observations = document.count(section, "observations", 0..=u32::MAX, Need::Required);
    let reduced = document.number(
        section,
        "reduced_chi_square",
        Bound::NotNegative,
        Need::Required,
    );
    let fit = read_fit(document, section, meter);
    let calibration = Calibration {
        date: date?,
        observations: observations?,
        reduced_chi_square: reduced?.value,
        fit: fit?,
    };
    Some((calibration, hash?))
}

fn read_fit(document: &mut Document<'_>, section: &Section<'_>, meter: &Meter) -> Option<Fit> {
    let mut expected: Vec<String> = meter.switches.iter().map(|s| s.label.clone()).collect();
    expected.extend(["reference", "dial_total"].map(str::to_owned));
    if matches!(meter.dial.taper, Taper::Linear { .. }) {
        expected.push("dial_end".to_owned());
    }
    expected.extend(["stray", "threshold"].map(str::to_owned));
    let n = expected.len();
    let names = document.items(section, "names", n + 1, Need::Required)?;
    let found: Vec<&str> = names
        .value
        .iter()
        .filter_map(|name| name.get_ref().as_str())
        .collect();
    if found != expected {
        let message = format!(
            "`names` do not fit this meter; accepted here: {}",
            expected.join(", ")
        );
        document.complain(names.at, message);
        return None;
    }
    let estimate = read_row(document, section, "estimate", n);
    let rows = document.items(section, "covariance", n + 1, Need::Required)?;
    let mut covariance = Vec::new();
    for row in &rows.value {
        let items: Vec<_> = row
            .get_ref()
            .as_array()
            .map(|a| a.iter().collect())
            .unwrap_or_default();
        covariance.push(numbers(document, &items, "covariance")?);
    }
    if covariance.len() != n || covariance.iter().any(|row| row.len() != n) {
        document.complain(
            rows.at,
            format!("`covariance` is not {n} rows of {n} numbers"),
        );
        return None;
    }
    if !is_covariance(&covariance) {
        document.complain(
            rows.at,
            "`covariance` is not symmetric with positive variances and correlations from -1 to 1"
                .into(),
        );
        return None;
    }
    let at = |name: &str| expected.iter().position(|e| e == name);
    let places = (0..meter.switches.len())
        .map(|position| {
            let places: [Option<usize>; N_CONSTANTS] = [
                Some(position),
                at("reference"),
                at("dial_total"),
                at("dial_end"),
                at("stray"),
                at("threshold"),
            ];
            places
        })
        .collect();
    Some(Fit {
        estimate: estimate?,
        covariance,
        places,
    })
}

fn read_row(
    document: &mut Document<'_>,
    section: &Section<'_>,
    key: &str,
    n: usize,
) -> Option<Vec<f64>> {
    let items = document.items(section, key, n + 1, Need::Required)?;
    let row = numbers(document, &items.value, key)?;
    if row.len() != n {
        document.complain(
            items.at,
            format!(
                "`{key}` has {} numbers; accepted here: {n}, one for each name",
                row.len()
            ),
        );
        return None;
    }
    Some(row)
}

fn numbers(
    document: &mut Document<'_>,
    items: &[&toml::Spanned<DeValue<'_>>],
    key: &str,
) -> Option<Vec<f64>> {
    items
        .iter()
        .map(|item| {
            document
                .number_value(item, key, Bound::Any)
                .map(|n| n.value)
        })
        .collect()
}

/// Variances positive, correlations symmetric and at most 1 to a part in a million.
fn is_covariance(rows: &[Vec<f64>]) -> bool {
    let deviations: Vec<f64> = rows
        .iter()
        .enumerate()
        .map(|(i, row)| row[i].sqrt())
        .collect();
    deviations.iter().all(|d| *d > 0.0)
        && rows.iter().enumerate().all(|(i, row)| {
            row.iter().enumerate().all(|(j, v)| {
                let scale = deviations[i] * deviations[j];
                (v - rows[j][i]).abs() <= 1e-6 * scale && v.abs() <= (1.0 + 1e-6) * scale
            })
        })
}
