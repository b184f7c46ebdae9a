//! The calibration that `calibrate` stored in a profile.

use toml::de::DeValue;

use super::model::{Fit, places, stored_names};
use super::{Calibration, Meter};
use crate::tables::document::{Bound, Document, Need, Placed, Section};

/// Reads the calibration with the hash of the profile that it belongs to.
pub(super) fn read_calibration(
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
    let expected = stored_names(meter);
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
            "`covariance` is not symmetric with variances that are not negative and correlations from -1 to 1"
                .into(),
        );
        return None;
    }
    Some(Fit {
        estimate: estimate?,
        covariance,
        places: places(meter),
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

/// Variances not negative (0: known exactly), correlations symmetric and at most 1 to a part in a million.
fn is_covariance(rows: &[Vec<f64>]) -> bool {
    let deviations: Vec<f64> = rows
        .iter()
        .enumerate()
        .map(|(i, row)| row[i].sqrt())
        .collect();
    deviations.iter().all(|d| *d >= 0.0)
        && rows.iter().enumerate().all(|(i, row)| {
            row.iter().enumerate().all(|(j, v)| {
                let scale = deviations[i] * deviations[j];
                (v - rows[j][i]).abs() <= 1e-6 * scale && v.abs() <= (1.0 + 1e-6) * scale
            })
        })
}
