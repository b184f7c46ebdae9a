//! What the Meter screen says: what each switch can do, the check parts, and what they read.

use super::check_rows::check_rows;
use super::lists::{ListView, Row};
use super::work::known_part;
use super::{State, Units};
use crate::meter::{Coverage, Meter, Repeats, Seen, SwitchCoverage, coverage, measure};
use crate::quantity::{Farad, Fraction};

/// A value counts as useful if it can be measured to this, one standard uncertainty.
const USEFUL: f64 = 0.05;

/// Rows of what each switch of the meter can do and what would better the meter most, then the check parts, then what
/// they read, the latest first, with the charts.
pub(super) fn meter(state: &State) -> ListView {
    let meter = &state.setup.meter;
    let units = state.look.units;
    let covered = coverage(meter, Fraction::new(USEFUL));
    let mut rows: Vec<Row> = covered
        .switches
        .iter()
        .map(|switch| switch_row(meter, units, switch))
        .collect();
    rows.extend(best_change(&covered));
    let known = meter.checks.iter().map(|check| {
        Row::of(vec![
            "check part".to_owned(),
            check.label.clone(),
            units.write(check.capacitance),
            format!("±{} (k = 2)", Fraction::new(2.0 * check.uncertainty.get())),
        ])
    });
    rows.extend(known);
    let (check_rows, charts) = check_rows(&state.checks, units);
    rows.extend(check_rows);
    ListView {
        charts,
        ..ListView::new(vec!["what", "which", "reach", "least doubt, k = 2"], rows)
    }
}

fn switch_row(meter: &Meter, units: Units, switch: &SwitchCoverage) -> Row {
    let (low, high) = switch.span;
    let doubt = switch.best.map_or_else(String::new, |best| {
        format!("±{}", Fraction::new(2.0 * best.get()))
    });
    let useful = format!("to ±{} (k = 2) or better", Fraction::new(2.0 * USEFUL));
    let useful = switch.useful.map_or_else(
        || format!("nowhere {useful}"),
        |(from, to)| format!("{useful}: {} … {}", units.write(from), units.write(to)),
    );
    let source = largest_doubt(meter, switch);
    let mut details = vec![
        axis(switch.span, switch.useful),
        format!("{useful}; at its best the doubt is mostly {source}"),
    ];
    if let Some((from, to)) = switch.never_dark {
        let (from, to) = (meter.dial.show(from), meter.dial.show(to));
        details.push(format!("the lamp cannot go dark from {from} to {to}"));
    }
    Row {
        details,
        ..Row::of(vec![
            "switch".to_owned(),
            meter.label(switch.switch).to_owned(),
            format!("{} … {}", units.write(low), units.write(high)),
            doubt,
        ])
    }
}

/// The largest contributor to the doubt where the switch measures best.
fn largest_doubt(meter: &Meter, switch: &SwitchCoverage) -> String {
    let best = switch
        .values
        .iter()
        .filter_map(|value| Some((value.best()?, value.balance)))
        .min_by(|(one, _), (other, _)| one.get().total_cmp(&other.get()));
    let source = best.and_then(|(_, place)| {
        let seen = Seen::Middle(Repeats::once(place));
        let measured = measure(
            meter,
            switch.switch,
            seen,
            &known_part(Farad::new(0.0), 0.0),
        );
        measured
            .contributions
            .first()
            .map(|first| first.source.to_string())
    });
    source.unwrap_or_else(|| "the dial reading".to_owned())
}

fn best_change(covered: &Coverage) -> Option<Row> {
    let best = covered.changes.first()?;
    let narrower = format!("{:.0} % less doubt", best.narrower.percent());
    Some(Row {
        details: vec![format!(
            "what would better this meter most: {}",
            best.change
        )],
        ..Row::of(vec![
            "to better it".to_owned(),
            narrower,
            best.change.to_string(),
            String::new(),
        ])
    })
}

/// Draws the span of a switch, and in it what is useful, on a logarithmic axis from 1 pF to 1 mF, six characters a decade.
fn axis(span: (Farad, Farad), useful: Option<(Farad, Farad)>) -> String {
    const A_DECADE: f64 = 6.0;
    let place = |c: Farad| (c.picofarads().max(1.0).log10() * A_DECADE).round();
    let holds =
        |(low, high): (Farad, Farad), column: f64| place(low) <= column && column <= place(high);
    let marks: String = (0..=54)
        .map(|column| {
            let column = f64::from(column);
            if useful.is_some_and(|useful| holds(useful, column)) {
                '━'
            } else if holds(span, column) {
                '─'
            } else if (column % (3.0 * A_DECADE)).abs() < 0.5 {
                '┼'
            } else {
                '·'
            }
        })
        .collect();
    format!("1 pF {marks} 1 mF")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_switch_is_drawn_where_it_reaches_and_where_it_is_useful() {
        let farads = |low, high| (Farad::new(low), Farad::new(high));
        let line = axis(farads(1e-9, 1e-7), Some(farads(1e-8, 1e-7)));
        assert_eq!(
            line,
            "1 pF ┼·················──────━━━━━━━·····┼·················┼ 1 mF"
        );
        assert_eq!(
            axis(farads(1e-9, 1e-7), None)
                .chars()
                .filter(|c| *c == '━')
                .count(),
            0
        );
    }
}
