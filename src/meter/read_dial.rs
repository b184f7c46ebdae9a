//! The dial as a profile describes it.

use std::ops::Range;

use toml::de::DeValue;

use super::read::{below_one, read_tolerance};
use super::{Degrees, Dial, DialReading, Taper};
use crate::quantity::{Fraction, Ohm};
use crate::tables::document::{Bound, Document, Need, Section};

const MOST_POINTS: usize = 1000;
/// Rotation of an ordinary single-turn potentiometer in degrees (common practice, no source).
const USUAL_SWEEP: f64 = 270.0;

/// Reads the dial.
pub(super) fn read_dial(document: &mut Document<'_>, section: &Section<'_>) -> Option<Dial> {
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
