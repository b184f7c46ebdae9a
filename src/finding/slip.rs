//! Mistakes of the hand that would explain a reading outside the limits: the wrong switch, digits exchanged, the point
//! misplaced.

use super::prior::Interval;
use super::{Observation, Slip};
use crate::meter::{DialReading, Part, Repeats, Seen, measure};

/// Returns the first slip whose value would lie inside the limits.
pub(super) fn find(observation: &Observation<'_>, part: &Part, limits: Interval) -> Option<Slip> {
    let Observation {
        meter,
        switch,
        seen,
        ..
    } = *observation;
    let is_inside = |switch, seen| {
        measure(meter, switch, seen, part)
            .estimate()
            .is_some_and(|e| limits.contains(e.capacitance.get()))
    };
    let digits = || match seen {
        Seen::Middle(repeats) if repeats.count() == 1 => mistyped(repeats.mean())
            .filter(|meant| meter.dial.admits(*meant))
            .find(|meant| is_inside(switch, Seen::Middle(Repeats::once(*meant))))
            .map(|meant| Slip::Digits { meant }),
        _ => None,
    };
    let other = meter
        .switches()
        .find(|other| *other != switch && is_inside(*other, seen));
    other
        .map(|switch| Slip::OtherSwitch {
            switch,
            label: meter.label(switch).to_owned(),
        })
        .or_else(digits)
}

/// The numbers that could have been meant: two neighbouring digits exchanged, ten times, a tenth.
fn mistyped(reading: DialReading) -> impl Iterator<Item = DialReading> {
    let typed = reading.get();
    let text = format!("{typed}");
    let places: Vec<usize> = text
        .char_indices()
        .filter(|(_, c)| c.is_ascii_digit())
        .map(|(i, _)| i)
        .collect();
    let exchanged: Vec<f64> = places
        .iter()
        .zip(places.iter().skip(1))
        .filter_map(|(one, other)| {
            let mut bytes = text.clone().into_bytes();
            bytes.swap(*one, *other);
            let exchanged = String::from_utf8(bytes).ok()?;
            if exchanged == text {
                None
            } else {
                exchanged.parse().ok()
            }
        })
        .collect();
    exchanged
        .into_iter()
        .chain([typed * 10.0, typed / 10.0])
        .map(DialReading::new)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn neighbouring_digits_and_the_point() {
        let meant: Vec<f64> = mistyped(DialReading::new(46.2))
            .map(DialReading::get)
            .collect();
        assert_eq!(meant, [64.2, 42.6, 462.0, 4.62]);
        let meant: Vec<f64> = mistyped(DialReading::new(44.0))
            .map(DialReading::get)
            .collect();
        assert_eq!(meant, [440.0, 4.4]);
    }
}
