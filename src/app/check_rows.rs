//! What the Meter screen says of check parts and open terminals: a row a reading, and a chart a series.

use super::checks::{Checked, Checks, Series, SeriesKey, day_and_time, word_of};
use super::figures::deviation;
use super::{Row, Units};
use crate::finding::{Control, ControlPoint};

/// A control chart, ready to be drawn.
#[derive(Clone, Debug, PartialEq)]
pub struct Chart {
    /// Of what, from when to when, and what it comes to.
    pub caption: String,
    /// The readings, oldest first.
    pub points: Vec<ControlPoint>,
}

/// Returns the rows, the latest reading first, and the charts they speak of, that of the latest reading first.
pub(super) fn check_rows(checks: &Checks, units: Units) -> (Vec<Row>, Vec<Chart>) {
    let mut keys: Vec<SeriesKey> = Vec::new();
    let mut charts: Vec<Series<'_>> = Vec::new();
    let mut rows = Vec::new();
    for checked in checks.readings().iter().rev() {
        let key = SeriesKey::of(&checked.entry);
        let known = keys.iter().position(|k| *k == key);
        let index = known.unwrap_or_else(|| {
            charts.push(checks.series(&key));
            keys.push(key.clone());
            charts.len() - 1
        });
        let series = charts.get(index);
        rows.push(row(checked, &key, series, index, units));
    }
    let charts = keys.iter().zip(charts).map(|(key, series)| Chart {
        caption: caption(key, &series),
        points: series.chart.points,
    });
    (rows, charts.collect())
}

fn row(
    checked: &Checked,
    key: &SeriesKey,
    series: Option<&Series<'_>>,
    chart: usize,
    units: Units,
) -> Row {
    let outcome = &checked.entry.record.outcome;
    let point = series.and_then(|series| {
        let place = series
            .readings
            .iter()
            .position(|reading| reading.entry.id == checked.entry.id)?;
        series.chart.points.get(place)
    });
    let stands = point.map_or_else(|| "no value".to_owned(), stands);
    let mut details = Vec::new();
    if !outcome.remark.is_empty() {
        details.push(outcome.remark.clone());
    }
    if let Some(off) = deviation(outcome) {
        details.push(format!(
            "{off} from what is known, measured {}",
            day_and_time(checked.taken)
        ));
    }
    Row {
        cells: vec![
            day_and_time(checked.taken),
            key.in_words(),
            units.measured_with_doubt(outcome).unwrap_or_default(),
            stands,
        ],
        details,
        finding: Some(point.map_or_else(
            || outcome.finding.clone(),
            |point| word_of(point.control).word().to_owned(),
        )),
        keys: Vec::new(),
        chart: Some(chart),
    }
}

/// Says where a reading stands: "+0.4 u, inside"; u is one standard uncertainty, or deviation of the baseline.
fn stands(point: &ControlPoint) -> String {
    let score = point.score;
    match point.control {
        Control::Inside => format!("{score:+.1} u, inside"),
        Control::Warning => format!("{score:+.1} u, warning"),
        Control::Jumped => format!("{score:+.1} u, out"),
        Control::Drifted => format!("{score:+.1} u, out: drift {:+.1}", point.trend),
    }
}

fn caption(key: &SeriesKey, series: &Series<'_>) -> String {
    let what = key.in_words();
    let (Some(first), Some(last)) = (series.readings.first(), series.readings.last()) else {
        return format!("{what}: no reading with a value");
    };
    let count = match series.readings.len() {
        1 => "1 reading".to_owned(),
        n => format!("{n} readings"),
    };
    let (from, to) = (day_and_time(first.taken), day_and_time(last.taken));
    let when = if from == to {
        from
    } else {
        format!("{from} to {to}")
    };
    let verdict = match (series.chart.moved, series.chart.points.last()) {
        (Some(moved), _) => {
            let good = moved.last_good.and_then(|index| series.readings.get(index));
            match good {
                Some(good) => format!("moved since {}", day_and_time(good.taken)),
                None => "moved".to_owned(),
            }
        }
        (None, Some(point)) if point.control == Control::Warning => "near the limit".to_owned(),
        _ => "agrees".to_owned(),
    };
    format!("{what}: {verdict}; {count}, {when}")
}

#[cfg(test)]
mod tests {
    use super::super::testing::Table;

    fn rows_of(table: &mut Table) -> Vec<String> {
        table.keys("④");
        let list = table.state.front.list().expect("a list");
        list.rows
            .iter()
            .filter(|row| row.chart.is_some())
            .map(|row| row.cells.join(" | "))
            .collect()
    }

    #[test]
    fn a_reading_a_row_and_a_series_a_chart() {
        let mut table = Table::new();
        for reading in ["34", "33", "45"] {
            table.line("check blue 10 nF");
            table.line(reading);
        }
        table.line("check grey 330 nF");
        table.line("n");
        let rows = rows_of(&mut table);
        expect_test::expect![[r"
            28 May 20:27 | grey 330 nF on A |  | no value
            28 May 20:27 | blue 10 nF on C | 13.25 ± 0.27 nF | +22.3 u, out
            28 May 20:26 | blue 10 nF on C | 9.73 ± 0.26 nF | -2.1 u, warning
            28 May 20:26 | blue 10 nF on C | 10.03 ± 0.26 nF | +0.0 u, inside"]]
        .assert_eq(&rows.join("\n"));
        let list = table.state.front.list().expect("a list");
        let captions: Vec<&str> = list.charts.iter().map(|c| c.caption.as_str()).collect();
        expect_test::expect![[r"
            grey 330 nF on A: no reading with a value
            blue 10 nF on C: moved since 28 May 20:26; 3 readings, 28 May 20:26 to 28 May 20:27"]]
        .assert_eq(&captions.join("\n"));
    }
}
