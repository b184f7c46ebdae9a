//! What the list screens say: one function a screen, from state to rows.

use super::figures::deviation;
use super::lists::{ListView, Row};
use super::lot::{Share, in_tolerances};
use super::{Entry, RecordKind, State, Units};
use crate::marking::{Role, decode};

/// Rows of what was sorted, the latest first.
pub(super) fn tray(state: &State, entries: &[Entry]) -> ListView {
    let parts = entries
        .iter()
        .filter(|entry| entry.record.kind == RecordKind::Part && entry.voided.is_none());
    let rows = parts.rev().map(|entry| sorted_row(state.look.units, entry));
    ListView::new(
        vec![
            "entry",
            "place",
            "marking",
            "value",
            "deviation",
            "finding",
            "lot",
        ],
        rows.collect(),
    )
}

fn sorted_row(units: Units, entry: &Entry) -> Row {
    let (raw, outcome) = (&entry.record.raw, &entry.record.outcome);
    let optional = |text: Option<String>| text.unwrap_or_else(|| "-".to_owned());
    let cells = vec![
        entry.id.to_string(),
        optional(outcome.compartment.clone()),
        raw.marking.clone(),
        optional(units.measured(outcome)),
        optional(deviation(outcome)),
        outcome.finding.clone(),
        entry.record.lot.clone(),
    ];
    let mut details = vec![format!(
        "measured {} on switch {}, typed {}",
        entry.time.format("%-d %b %Y %H:%M"),
        raw.switch,
        raw.typed
    )];
    if let Some(value) = units.measured_with_doubt(outcome) {
        details.push(format!("{value} (k = 2)"));
    }
    details.extend(raw.family.clone());
    details.extend(raw.looks.as_ref().map(|looks| format!("looks {looks}")));
    details.extend(raw.note.clone());
    details.extend((!outcome.remark.is_empty()).then(|| outcome.remark.clone()));
    #[expect(
        clippy::cast_precision_loss,
        reason = "only for sorting; ids stay far below 2^52"
    )]
    let id = entry.id.0 as f64;
    Row {
        cells,
        details,
        finding: Some(outcome.finding.clone()),
        keys: vec![
            Some(-id),
            None,
            None,
            outcome.capacitance_pf,
            outcome.deviation_percent.map(f64::abs).map(|d| -d),
            None,
            None,
        ],
        chart: None,
    }
}

/// Rows of the code tables.
pub(super) fn codes(state: &State) -> ListView {
    let rows = state.codes.iter().map(|code| Row {
        details: vec![format!("source: {}", code.source)],
        ..Row::of(vec![code.table.clone(), code.text.clone()])
    });
    ListView::new(vec!["table", "what it says"], rows.collect())
}

/// What a text means as a marking: the reasons of the most plausible of its readings, or of what it is without a value.
pub(super) fn as_marking(text: &str) -> Vec<Row> {
    if text.trim().is_empty() {
        return Vec::new();
    }
    let decoding = decode(text, None);
    let best = decoding.best();
    let nothing = decoding.without_value.as_ref();
    let nothing = nothing.filter(|n| best.is_none_or(|best| best.plausibility < n.plausibility));
    let (why, used) = match (nothing, best) {
        (Some(nothing), _) => (&nothing.why, &nothing.used),
        (None, Some(best)) => (&best.why, &best.used),
        (None, None) => return Vec::new(),
    };
    // A text that says nothing of a part is a word to be looked up, not a marking.
    if used.iter().all(|used| used.role == Role::Text) {
        return Vec::new();
    }
    why.iter()
        .map(|why| Row::of(vec!["as a marking".to_owned(), why.clone()]))
        .collect()
}

/// Rows of the lot: what it yields, its histogram, then its parts.
pub(super) fn lot(state: &State) -> ListView {
    let lot = &state.lot;
    let mut rows = Vec::new();
    let mut say = |what: &str, text: String| rows.push(Row::of(vec![what.to_owned(), text]));
    say(
        "findings",
        format!(
            "{} inside, {} outside, {} undecided, {} dead",
            lot.count("inside"),
            lot.count("outside"),
            lot.count("undecided"),
            lot.count("dead")
        ),
    );
    if let Some(share) = lot.share_inside() {
        say(
            "yield",
            format!("{} of the parts with a word", interval(share)),
        );
    }
    if let Some(share) = lot.share_with_common_error() {
        say(
            "and the meter",
            format!(
                "{} by value, the error all parts share in it",
                interval(share)
            ),
        );
    }
    if let Some(seconds) = lot.seconds_a_part() {
        say("pace", format!("{seconds:.0} s a part, pauses left out"));
    }
    for (what, count) in histogram(&lot.deviations()) {
        say(&what, format!("{count:>4} {}", "█".repeat(count.min(50))));
    }
    for (number, entry) in (1..).zip(lot.parts()) {
        let outcome = &entry.record.outcome;
        let place = in_tolerances(outcome).map_or_else(String::new, dot);
        let row = Row {
            finding: Some(outcome.finding.clone()),
            details: vec![outcome.remark.clone()],
            ..Row::of(vec![
                format!("part {number}"),
                format!(
                    "{place:<23} {}  {}",
                    entry.record.raw.marking,
                    state.look.units.measured(outcome).unwrap_or_default()
                ),
            ])
        };
        rows.push(row);
    }
    ListView::new(vec!["what", "-1 and +1: the limits"], rows)
}

/// Where a value lies between its limits: a dot on a line from -2 to +2 tolerances.
fn dot(deviation: f64) -> String {
    let place = (deviation.clamp(-2.0, 2.0) * 5.0 + 10.0).round();
    (0..=20)
        .map(|column| match f64::from(column) {
            column if (column - place).abs() < 0.5 => '●',
            column if (column - 10.0).abs() > 4.5 && (column - 10.0).abs() < 5.5 => '│',
            _ => '·',
        })
        .collect()
}

/// Counts deviations in steps of half a tolerance from -2 to +2, with all beyond at either end.
pub fn histogram(deviations: &[f64]) -> Vec<(String, usize)> {
    const EDGES: [f64; 9] = [-2.0, -1.5, -1.0, -0.5, 0.0, 0.5, 1.0, 1.5, 2.0];
    let mut counts = [0; EDGES.len() + 1];
    for deviation in deviations {
        let bin = EDGES.iter().filter(|edge| **edge <= *deviation).count();
        if let Some(count) = counts.get_mut(bin) {
            *count += 1;
        }
    }
    let mut names = vec!["below -2".to_owned()];
    names.extend(
        EDGES
            .iter()
            .zip(EDGES.iter().skip(1))
            .map(|(low, high)| format!("{low:+.1} … {high:+.1}")),
    );
    names.push("above +2".to_owned());
    names.into_iter().zip(counts).collect()
}

fn interval(share: Share) -> String {
    format!(
        "{:.0} % inside ({:.0} to {:.0} %, 95 %)",
        share.share * 100.0,
        share.low * 100.0,
        share.high * 100.0
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn deviations_fall_into_half_tolerances() {
        let shown: Vec<String> = histogram(&[-3.0, -0.2, 0.0, 0.4, 2.0])
            .into_iter()
            .filter(|(_, count)| *count > 0)
            .map(|(name, count)| format!("{name}: {count}"))
            .collect();
        assert_eq!(
            shown,
            [
                "below -2: 1",
                "-0.5 … +0.0: 1",
                "+0.0 … +0.5: 2",
                "above +2: 1"
            ]
        );
    }

    #[test]
    fn a_code_is_answered_with_what_it_means() {
        let answer = |text: &str| -> Vec<String> {
            as_marking(text)
                .iter()
                .filter_map(|row| row.cells.get(1).cloned())
                .collect()
        };
        let said = answer("X7R").join("; ");
        assert!(said.contains("-55 °C") && said.contains("±15 %"), "{said}");
        assert!(answer("2E").join("; ").contains("rated voltage"));
        assert_eq!(
            answer("tolerance"),
            [""; 0],
            "a word to be looked up is no marking"
        );
        assert_eq!(answer("  "), [""; 0]);
    }
}
