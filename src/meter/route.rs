//! The ways from one number read to a capacitance.

use super::balance::{
    DialLaw, Roots, Side, part_from_dimmest, part_from_edge, part_from_middle, parts_with_edge,
};
use super::circuit::{Circuit, Constants, Load};
use super::{Meter, Stop};

/// A way from readings to a capacitance; the readings themselves are kept apart, to be varied.
#[derive(Clone, Copy, Debug)]
pub(super) enum Route {
    /// The middle of an arc over which the dial is straight: middles in reading and in resistance agree.
    Middle,
    /// The middle of an arc with a bend of the dial inside.
    BentMiddle,
    /// The middle of what is seen of an arc that the stop cuts: its free edge lies at twice the reading less the stop.
    VisibleMiddle(Stop),
    Edge(Side),
    Dimmest,
    /// The smaller or the larger of the two parts with an edge at the reading.
    Window(Side),
}

/// The ways on one meter, for any constants.
#[derive(Clone, Copy)]
pub(super) struct Ways<'a> {
    meter: &'a Meter,
    circuit: &'a Circuit,
}

impl<'a> Ways<'a> {
    pub(super) fn of(meter: &'a Meter) -> Self {
        Self {
            meter,
            circuit: meter.model().circuit(),
        }
    }

    /// The capacitance that a reading means; `None`: less than open terminals.
    pub(super) fn value(
        &self,
        route: Route,
        constants: &Constants,
        reading: f64,
        loss: f64,
    ) -> Option<f64> {
        let dial = &self.meter.dial;
        let r = dial.resistance(reading, constants);
        match route {
            Route::Middle => part_from_middle(self.circuit, constants, loss, r),
            Route::BentMiddle => self.part_with_bent_middle(constants, reading, loss),
            Route::VisibleMiddle(stop) => {
                let free = 2.0 * reading - dial.number_at(stop).get();
                let side = dial.side_of(other(stop));
                part_from_edge(
                    self.circuit,
                    constants,
                    loss,
                    (side, dial.resistance(free, constants)),
                )
            }
            Route::Edge(side) => part_from_edge(self.circuit, constants, loss, (side, r)),
            Route::Dimmest => part_from_dimmest(self.circuit, constants, loss, r),
            Route::Window(side) => {
                match (parts_with_edge(self.circuit, constants, loss, r), side) {
                    (Roots::Two(low, _), Side::Lower) => Some(low),
                    (Roots::Two(_, high), Side::Upper) | (Roots::One(high), Side::Lower) => {
                        Some(high)
                    }
                    _ => None,
                }
            }
        }
    }

    /// The middle seen is the mean of the edge readings. Where the dial bends between the edges that is not the middle in
    /// resistance, but close to it: at most three secant steps on that mean lead to the part.
    fn part_with_bent_middle(&self, constants: &Constants, reading: f64, loss: f64) -> Option<f64> {
        let dial = &self.meter.dial;
        let start = part_from_middle(
            self.circuit,
            constants,
            loss,
            dial.resistance(reading, constants),
        )?;
        let middle_of = |c: f64| self.middle_of(constants, Load { c, d: loss });
        let Some(first) = middle_of(start) else {
            return Some(start);
        };
        let error = |c: f64| middle_of(c).map(|m| m - reading);
        // C follows R: the ratio of resistances gives a second point close to the solution.
        let ratio = dial.resistance(reading, constants) / dial.resistance(first, constants);
        let (mut c0, mut e0) = (start, first - reading);
        let mut c1 = start * ratio.clamp(0.5, 2.0);
        for _ in 0..3 {
            let Some(e1) = error(c1) else { return Some(c1) };
            let next = c1 - e1 * (c1 - c0) / (e1 - e0);
            // Equal errors, both of them nothing when the start was exact, leave no secant.
            if !next.is_finite() {
                return Some(c1);
            }
            (c0, e0, c1) = (c1, e1, next.clamp(0.5 * start, 2.0 * start));
        }
        Some(c1)
    }

    /// The capacitance for constants, reading and loss close to those at which it is known. Where it takes a search a
    /// linear step does instead: what moves the middle by as much as it is off.
    pub(super) fn near(
        self,
        route: Route,
        constants: &Constants,
        reading: f64,
        at: Load,
    ) -> impl Fn(&Constants, f64, f64) -> Option<f64> {
        const STEP: f64 = 1e-4;
        let slope = match route {
            Route::BentMiddle => {
                let moved = Load {
                    c: at.c * (1.0 + STEP),
                    ..at
                };
                self.middle_of(constants, moved)
                    .map(|m| (m - reading) / (at.c * STEP))
            }
            _ => None,
        };
        move |constants, reading, loss| match slope {
            Some(slope) => {
                let off = self.middle_of(constants, Load { c: at.c, d: loss })? - reading;
                Some(at.c - off / slope)
            }
            None => self.value(route, constants, reading, loss),
        }
    }

    /// The middle of the arc as it is read.
    fn middle_of(&self, constants: &Constants, load: Load) -> Option<f64> {
        self.edges(constants, load)
            .map(|(one, other)| 0.5 * (one + other))
    }

    /// The readings at the two edges of the arc, wherever the stops are; `None` if there is no arc between two of them.
    pub(super) fn edges(&self, constants: &Constants, load: Load) -> Option<(f64, f64)> {
        let dial = &self.meter.dial;
        let (r1, r2) = DialLaw::of(self.circuit, constants, load).free_edges(constants.vth)?;
        Some((dial.reading(r1, constants), dial.reading(r2, constants)))
    }
}

/// The stop at the other end.
pub(super) fn other(stop: Stop) -> Stop {
    match stop {
        Stop::Low => Stop::High,
        Stop::High => Stop::Low,
    }
}
