//! One line for limits, value and doubt: the limits as bars, the value as a dot, its expanded uncertainty in brackets.

use super::sheet::Sheet;
use super::theme::Role;
use crate::app::{Outcome, Units, uncertain};
use crate::quantity::{Farad, Resolution};

/// Draws the line over the whole width; nothing if limits or value are missing or there is no room.
pub(super) fn draw(sheet: &mut Sheet<'_>, y: u16, outcome: &Outcome, units: Units) {
    let (Some(low), Some(value)) = (outcome.low_pf, uncertain(outcome)) else {
        return;
    };
    let shown = |pf: f64| units.write_with(Farad::from_picofarads(pf), Resolution::Digits(3));
    let left = shown(low);
    let right = outcome.high_pf.map_or_else(|| "and more".to_owned(), shown);
    let taken = left.chars().count() + right.chars().count() + 2;
    let n_columns = usize::from(sheet.width()).saturating_sub(taken);
    if n_columns < 9 {
        return;
    }
    let center = value.value.picofarads();
    let half = value.expanded().picofarads();
    let line = line(low, outcome.high_pf, center, half, n_columns);
    let x = sheet.text(0, y, &left, Role::Faint) + 1;
    let x = sheet.text(x, y, &line, Role::Strong) + 1;
    sheet.text(x, y, &right, Role::Faint);
}

fn line(low: f64, high: Option<f64>, value: f64, half: f64, n_columns: usize) -> String {
    let width = high.map_or(low, |high| high - low).max(f64::MIN_POSITIVE);
    let first = low - 0.25 * width;
    let span = 1.5 * width;
    let last = n_columns as f64 - 1.0;
    let column = |x: f64| ((x - first) / span * last).round();
    let at = |x: f64, place: f64| (column(x) - place).abs() < 0.5;
    let inside = |x: f64| (0.0..=last).contains(&column(x));
    (0..n_columns)
        .map(|index| {
            let place = index as f64;
            if at(value, place) {
                '●'
            } else if !inside(value) && value < low && index == 0 {
                '◂'
            } else if !inside(value) && value > low && place >= last {
                '▸'
            } else if at(value - half, place) {
                '['
            } else if at(value + half, place) {
                ']'
            } else if at(low, place) {
                '├'
            } else if high.is_some_and(|high| at(high, place)) {
                '┤'
            } else if column(value - half) < place && place < column(value + half) {
                '═'
            } else if column(low) < place && high.is_none_or(|high| place < column(high)) {
                '─'
            } else {
                '·'
            }
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(value: f64, half: f64, expected: &str) {
        assert_eq!(
            line(209.0, Some(231.0), value, half, 25),
            expected,
            "{value} ± {half}"
        );
    }

    #[test]
    fn limits_value_and_doubt_stand_on_one_line() {
        check(217.4, 4.1, "····├──[══●══]──────┤····");
        check(231.0, 2.0, "····├──────────────[●]···");
        check(300.0, 4.0, "····├───────────────┤···▸");
        check(100.0, 4.0, "◂···├───────────────┤····");
        assert_eq!(
            line(209.0, None, 300.0, 20.0, 25),
            "····├────[═●]────────────"
        );
    }

    #[test]
    fn odd_values_do_no_harm() {
        for (low, high, value, half) in [
            (0.0, Some(0.0), 0.0, 0.0),
            (1.0, Some(1.0), f64::MAX, f64::MAX),
            (1.0, None, -1.0, 0.0),
        ] {
            assert_eq!(line(low, high, value, half, 12).chars().count(), 12);
        }
    }
}
