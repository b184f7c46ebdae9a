//! What was seen, in its plainest form.

use super::{DialReading, Edge, Lamp, Meter, Repeats, Seen, Stop};

/// An observation in its plainest form: an edge at an end of travel is a stop, `stop` alone is the one nearer the other
/// edge, two stops are always dark, two edges alike are repeats of one reading.
pub(super) enum Plain {
    Middle(Repeats),
    BothEdges(Repeats, Repeats),
    CutArc { free: Repeats, stop: Stop },
    NeverDark(DialReading),
    Parked(DialReading, Lamp),
    Nothing,
}

impl Plain {
    pub(super) fn of(seen: Seen, meter: &Meter) -> Self {
        let dial = &meter.dial;
        let end_at = |r: Repeats| match r.mean() {
            place if place <= dial.low => Some(Stop::Low),
            place if dial.high <= place => Some(Stop::High),
            _ => None,
        };
        match seen {
            Seen::Middle(repeats) => Self::Middle(repeats),
            Seen::Edges {
                from: Edge::At(one),
                to: Edge::At(other),
            } => match (end_at(one), end_at(other)) {
                (None, None) if one.mean() == other.mean() => {
                    Self::Middle(Repeats::with_mean(one.mean(), one.count() + other.count()))
                }
                (None, None) => Self::BothEdges(one, other),
                (Some(stop), None) => Self::CutArc { free: other, stop },
                (None, Some(stop)) => Self::CutArc { free: one, stop },
                (Some(_), Some(_)) => Self::Nothing,
            },
            Seen::Edges {
                from: Edge::At(free),
                to: Edge::Stop,
            }
            | Seen::Edges {
                from: Edge::Stop,
                to: Edge::At(free),
            } => match end_at(free) {
                None => Self::CutArc {
                    free,
                    stop: dial.nearer_stop(free.mean()),
                },
                Some(_) => Self::Nothing,
            },
            Seen::NeverDark {
                dimmest: Some(place),
            } => Self::NeverDark(place),
            Seen::Parked { at, lamp } => Self::Parked(at, lamp),
            Seen::Edges {
                from: Edge::Stop,
                to: Edge::Stop,
            }
            | Seen::NeverDark { dimmest: None }
            | Seen::AlwaysDark => Self::Nothing,
        }
    }
}
