//! The numbers printed on a dial, and the capacitances that null there.

use super::{Marked, Setup};
use crate::finding::expect;
use crate::meter::{Dial, DialReading, Part, Repeats, Seen, Switch, measure};
use crate::quantity::Farad;

/// Returns the round numbers that stand on the dial, from low to high: at most twelve, a step of 1, 2 or 5 apart.
pub fn printed_numbers(dial: &Dial) -> Vec<DialReading> {
    const MOST: f64 = 11.0;
    let (low, high) = (dial.low.get(), dial.high.get());
    let span = high - low;
    if !(span.is_finite() && span > 0.0) {
        return Vec::new();
    }
    let decade = 10f64.powf((span / MOST).log10().floor());
    let step = [1.0, 2.0, 5.0, 10.0]
        .into_iter()
        .map(|factor| factor * decade)
        .find(|step| span / step <= MOST)
        .unwrap_or(span);
    let first = (low / step - 1e-9).ceil();
    (0..=12)
        .map(|n| (first + f64::from(n)) * step)
        .take_while(|number| *number <= high + 1e-9 * span)
        .map(DialReading::new)
        .collect()
}

/// Returns the capacitance that a reading at each printed number would mean for such a part.
pub(super) fn rim(
    setup: &Setup,
    marked: Option<&Marked>,
    switch: Switch,
) -> Vec<(DialReading, Farad)> {
    let reading = marked.and_then(|m| m.reading());
    let part: Part = match reading {
        Some(reading) => expect(reading, &setup.rules()),
        None => super::work::known_part(Farad::new(1e-9), 0.0),
    };
    printed_numbers(&setup.meter.dial)
        .into_iter()
        .filter_map(|number| {
            let seen = Seen::Middle(Repeats::once(number));
            let estimate = measure(&setup.meter, switch, seen, &part).estimate()?;
            Some((number, estimate.capacitance))
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::meter::{Degrees, Taper};
    use crate::quantity::{Fraction, Ohm};

    #[track_caller]
    fn check(low: f64, high: f64, expected: &str) {
        let dial = Dial {
            low: DialReading::new(low),
            high: DialReading::new(high),
            division: 1.0,
            taper: Taper::Linear {
                total: Ohm::new(1000.0),
                end: Ohm::new(0.0),
                tolerance: Fraction::new(0.0),
            },
            sweep: Degrees(270.0),
        };
        let numbers: Vec<String> = printed_numbers(&dial)
            .iter()
            .map(ToString::to_string)
            .collect();
        assert_eq!(numbers.join(" "), expected, "{low} to {high}");
    }

    #[test]
    fn numbers_are_round_and_few() {
        check(0.0, 100.0, "0 10 20 30 40 50 60 70 80 90 100");
        check(0.0, 10.0, "0 1 2 3 4 5 6 7 8 9 10");
        check(1.0, 12.0, "1 2 3 4 5 6 7 8 9 10 11 12");
        check(0.5, 3.0, "0.5 1 1.5 2 2.5 3");
        check(0.0, 1000.0, "0 100 200 300 400 500 600 700 800 900 1000");
    }
}
