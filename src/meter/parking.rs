//! A dial that stays parked while a batch of equal parts goes by: where it can be parked and what the lamp tells apart.

use super::{DialReading, Lamp, Meter, Part, Seen, Switch, Value, measure, predict};
use crate::quantity::{Farad, Uncertain};

/// At most so many places are worth comparing; a dial with finer divisions is searched in wider steps.
const N_PLACES: f64 = 120.0;

/// What a lamp tells apart with the dial parked: it is dark between the two.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ParkedWindow {
    /// Where the dial is parked.
    pub at: DialReading,
    /// The smallest capacitance that leaves the lamp dark.
    pub low: Uncertain<Farad>,
    /// The largest; `None` if there is none.
    pub high: Option<Uncertain<Farad>>,
}

/// Returns what a lamp tells apart with the dial parked at a place; `None` if it is dark for no part. Only the assumed loss
/// of `part` is used.
pub fn parked_window(
    meter: &Meter,
    switch: Switch,
    at: DialReading,
    part: &Part,
) -> Option<ParkedWindow> {
    let seen = Seen::Parked {
        at,
        lamp: Lamp::Dark,
    };
    match measure(meter, switch, seen, part).value {
        Value::Window { low, high, .. } => Some(ParkedWindow { at, low, high }),
        _ => None,
    }
}

/// Returns the places, half divisions, between the nulls of parts at the two limits and somewhat beyond; none where the
/// limits do not null on this switch.
pub fn parking_places(meter: &Meter, switch: Switch, part: &Part) -> Vec<DialReading> {
    let Some(band) = predict(meter, switch, part).band else {
        return Vec::new();
    };
    // Both limits null beyond the same stop.
    if band.from == band.to {
        return Vec::new();
    }
    let dial = &meter.dial;
    let width = (band.to.get() - band.from.get()).max(dial.division);
    let from = (band.from.get() - 0.25 * width).max(dial.low.get());
    let to = (band.to.get() + 0.25 * width).min(dial.high.get());
    let half = 0.5 * dial.division;
    let step = half * ((to - from) / half / N_PLACES).ceil().max(1.0);
    let mut places = Vec::new();
    let mut place = (from / step).ceil() * step;
    while place <= to {
        // A stop is no place to park: the lamp says the same beyond it.
        if dial.low.get() < place && place < dial.high.get() {
            places.push(DialReading::new(place));
        }
        place += step;
    }
    places
}
