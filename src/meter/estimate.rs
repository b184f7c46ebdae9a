//! From what was seen to the part: value, loss, and where the uncertainty comes from (JCGM 100:2008, 5.1 and 5.2).
//!
//! The *common* part of the uncertainty is the meter's: its constants, correlated once it is calibrated. The *own* part is
//! the reading's: repeatability and the rounding to a division for each number read, and the loss where it is assumed.
//! Derivatives are one-sided differences over a thousandth of each standard uncertainty, taken on closed forms that hold to
//! about 1e-12, so that they are good to some 1e-3 of themselves.

use super::arc::{Chord, chord};
use super::balance::{DialLaw, Side};
use super::circuit::{Constants, Load};
use super::model::{Model, N_CONSTANTS};
use super::plain::Plain;
use super::route::{Route, Ways, other};
use super::{
    AssumedLoss, Contribution, DialReading, Estimate, Lamp, LossSeen, Measured, Meter, Part,
    Repeats, Seen, Source, Stop, Switch, Value,
};
use crate::quantity::{Farad, Uncertain};

/// The step of a difference, in standard uncertainties.
const STEP: f64 = 1e-3;

/// The 95 % one-sided quantile of the normal distribution (ISO 3534-1; 1.6449).
const QUANTILE_95: f64 = 1.645;

/// Returns what was seen means for the part. Only the assumed loss of `part` is used, not its value or limits.
pub fn measure(meter: &Meter, switch: Switch, seen: Seen, part: &Part) -> Measured {
    let bench = Bench {
        meter,
        model: meter.model(),
        ways: Ways::of(meter),
        switch,
    };
    match Plain::of(seen, meter) {
        Plain::Middle(repeats) => bench.middle(repeats, part.loss),
        Plain::BothEdges(one, other) => bench.both_edges(one, other, part.loss),
        Plain::CutArc { free, stop } => bench.cut_arc(free, stop, part.loss),
        Plain::NeverDark(place) => bench.never_dark(place, part.loss),
        Plain::Parked(at, lamp) => bench.parked(at, lamp, part.loss),
        Plain::Nothing => bench.nothing(Value::Unknown),
    }
}

struct Bench<'a> {
    meter: &'a Meter,
    model: &'a Model,
    ways: Ways<'a>,
    switch: Switch,
}

impl Bench<'_> {
    fn constants(&self) -> &Constants {
        self.model.constants(self.switch)
    }

    fn middle(&self, repeats: Repeats, loss: AssumedLoss) -> Measured {
        let reading = repeats.mean().get();
        let route = self.route_of_middle(reading, loss.value);
        self.single(
            route,
            reading,
            self.model.reading_uncertainty(repeats.count()),
            loss,
        )
    }

    /// Whether a stop cuts the arc of the part found (then the middle seen was that of the visible piece) or the dial
    /// bends within it.
    fn route_of_middle(&self, reading: f64, loss: f64) -> Route {
        let constants = self.constants();
        let dial = &self.meter.dial;
        let Some(c) = self.ways.value(Route::Middle, constants, reading, loss) else {
            return Route::Middle;
        };
        let Some((one, other)) = self.ways.edges(constants, Load { c, d: loss }) else {
            return Route::Middle;
        };
        let is_cut_low = one.min(other) <= dial.low.get();
        let is_cut_high = dial.high.get() <= one.max(other);
        match (is_cut_low, is_cut_high) {
            (true, false) => Route::VisibleMiddle(Stop::Low),
            (false, true) => Route::VisibleMiddle(Stop::High),
            _ if dial.is_straight_between(one, other) => Route::Middle,
            _ => Route::BentMiddle,
        }
    }

    fn cut_arc(&self, free: Repeats, stop: Stop, loss: AssumedLoss) -> Measured {
        let route = Route::Edge(self.meter.dial.side_of(other(stop)));
        self.single(
            route,
            free.mean().get(),
            self.model.reading_uncertainty(free.count()),
            loss,
        )
    }

    /// A value from one number read.
    fn single(&self, route: Route, reading: f64, u_reading: f64, loss: AssumedLoss) -> Measured {
        let constants = self.constants();
        let Some(c) = self.ways.value(route, constants, reading, loss.value) else {
            return self.nothing(Value::Open);
        };
        let moved = self
            .ways
            .near(route, constants, reading, Load { c, d: loss.value });
        let of_reading = moved(constants, reading + STEP * u_reading, loss.value);
        let of_loss = moved(constants, reading, loss.value + loss.standard_uncertainty);
        let own = [
            (Source::Reading, difference(of_reading, c) / STEP),
            (Source::Loss, difference(of_loss, c)),
        ];
        let common = self.gradient(|k| moved(k, reading, loss.value), c);
        self.estimate(c, &common, &own, LossSeen::default())
    }

    fn both_edges(&self, one: Repeats, other: Repeats, loss: AssumedLoss) -> Measured {
        let constants = self.constants();
        let (r1, r2) = (one.mean().get(), other.mean().get());
        let (u1, u2) = (
            self.model.reading_uncertainty(one.count()),
            self.model.reading_uncertainty(other.count()),
        );
        let Some(found) = self.chord(constants, r1, r2) else {
            return self.nothing(Value::Open);
        };
        let moved = [
            self.chord(constants, r1 + STEP * u1, r2),
            self.chord(constants, r1, r2 + STEP * u2),
        ];
        let own = moved.map(|m| difference(m.map(|m| m.foot.c), found.foot.c) / STEP);
        let own = [(Source::Reading, own[0].hypot(own[1]))];
        let varied = self
            .model
            .varied(self.switch, STEP)
            .map(|k| k.and_then(|k| self.chord(&k, r1, r2)));
        let common = varied.map(|m| difference(m.map(|m| m.foot.c), found.foot.c) / STEP);
        let w_common = varied.map(|m| difference(m.map(|m| m.w), found.w) / STEP);
        let w_own = moved.map(|m| difference(m.map(|m| m.w), found.w) / STEP);
        let steadied = self.arc_without_loss(constants, found.foot) / (r1 - r2).abs();
        let w_own = w_own[0].hypot(w_own[1]) * steadied.max(1.0);
        let u_w = self.model.combined(self.switch, &w_common).hypot(w_own);
        let (loss_seen, c) = loss_of(&found, u_w, loss.value);
        self.estimate(c, &common, &own, loss_seen)
    }

    fn chord(&self, constants: &Constants, r1: f64, r2: f64) -> Option<Chord> {
        let dial = &self.meter.dial;
        chord(
            self.model.circuit(),
            constants,
            (
                dial.resistance(r1, constants),
                dial.resistance(r2, constants),
            ),
        )
    }

    /// The width, in dial units, of the arc of a part of this capacitance and the loss that balances best.
    fn arc_without_loss(&self, constants: &Constants, part: Load) -> f64 {
        self.ways
            .edges(constants, part)
            .map_or(0.0, |(one, other)| (one - other).abs())
    }

    /// Never dark: the place is as uncertain as the dimness is shallow, and the loss is at least what keeps the lamp lit.
    fn never_dark(&self, place: DialReading, loss: AssumedLoss) -> Measured {
        let constants = self.constants();
        let reading = place.get();
        let Some(least) = self.least_loss_lit(reading) else {
            return self.nothing(Value::Open);
        };
        let assumed = AssumedLoss {
            value: (1.5 * least).max(loss.value),
            standard_uncertainty: (0.5 * least).max(loss.standard_uncertainty),
        };
        let Some(c) = self
            .ways
            .value(Route::Dimmest, constants, reading, assumed.value)
        else {
            return self.nothing(Value::Open);
        };
        let law = DialLaw::of(
            self.model.circuit(),
            constants,
            Load {
                c,
                d: assumed.value,
            },
        );
        let span = self.meter.dial.span(constants);
        let shallow = law.shallow_span(1.1, span).map_or(0.0, |s| {
            (self.meter.dial.reading(s.from, constants) - self.meter.dial.reading(s.to, constants))
                .abs()
        });
        let u_place = (0.5 * shallow).hypot(self.model.rounding());
        let mut measured = self.single(Route::Dimmest, reading, u_place, assumed);
        measured.loss.at_least = Some(least);
        measured
    }

    /// The least loss that keeps the lamp lit when the difference is least at the reading; bracketed regula falsi
    /// (Illinois), at most 60 steps, good to 1e-9 of the loss. `None` where no capacitance fits.
    fn least_loss_lit(&self, reading: f64) -> Option<f64> {
        let constants = self.constants();
        let r = self.meter.dial.resistance(reading, constants);
        let excess = |d: f64| -> Option<f64> {
            let c = self.ways.value(Route::Dimmest, constants, reading, d)?;
            Some(
                DialLaw::of(self.model.circuit(), constants, Load { c, d }).difference(r)
                    - constants.vth,
            )
        };
        let (mut low, mut at_low) = (0.0, excess(0.0)?);
        if at_low >= 0.0 {
            return Some(0.0);
        }
        let (mut high, mut at_high) = (0.01, excess(0.01)?);
        while at_high < 0.0 {
            (low, at_low) = (high, at_high);
            high *= 2.0;
            at_high = excess(high)?;
            if high > 100.0 {
                return Some(high);
            }
        }
        for _ in 0..60 {
            let middle = low + (high - low) * at_low / (at_low - at_high);
            let at_middle = excess(middle)?;
            if (high - low) < 1e-9 * high {
                return Some(middle);
            }
            if at_middle < 0.0 {
                (low, at_low) = (middle, at_middle);
                at_high *= 0.5;
            } else {
                (high, at_high) = (middle, at_middle);
                at_low *= 0.5;
            }
        }
        Some(high)
    }

    fn parked(&self, at: DialReading, lamp: Lamp, loss: AssumedLoss) -> Measured {
        let reading = at.get();
        let u_reading = self.model.reading_uncertainty(1);
        let end = |side: Side| -> Option<Uncertain<Farad>> {
            let route = Route::Window(side);
            let estimate = self.single(route, reading, u_reading, loss).estimate()?;
            Some(estimate.combined())
        };
        match end(Side::Lower) {
            Some(low) => self.nothing(Value::Window {
                lamp,
                low,
                high: end(Side::Upper),
            }),
            None => self.nothing(Value::Unknown),
        }
    }

    /// Differences of a value over one standard uncertainty of each constant.
    fn gradient(&self, value: impl Fn(&Constants) -> Option<f64>, at: f64) -> [f64; N_CONSTANTS] {
        self.model
            .varied(self.switch, STEP)
            .map(|k| difference(k.and_then(|k| value(&k)), at) / STEP)
    }

    fn estimate(
        &self,
        c: f64,
        common: &[f64; N_CONSTANTS],
        own: &[(Source, f64)],
        loss: LossSeen,
    ) -> Measured {
        let u_common = self.model.combined(self.switch, common);
        let u_own = own
            .iter()
            .map(|(_, share)| share * share)
            .sum::<f64>()
            .sqrt();
        let mut contributions: Vec<Contribution> = if self.meter.calibration.is_some() {
            vec![contribution(Source::Calibration, u_common)]
        } else {
            super::model::SOURCES
                .iter()
                .zip(common)
                .map(|(source, share)| contribution(*source, *share))
                .collect()
        };
        contributions.extend(
            own.iter()
                .map(|(source, share)| contribution(*source, *share)),
        );
        contributions.sort_by(|x, y| y.share.get().total_cmp(&x.share.get()));
        let estimate = Estimate {
            capacitance: Farad::new(c),
            common: Farad::new(u_common),
            own: Farad::new(u_own),
        };
        Measured {
            switch: self.switch,
            value: Value::Estimate(estimate),
            loss,
            contributions,
        }
    }

    fn nothing(&self, value: Value) -> Measured {
        Measured {
            switch: self.switch,
            value,
            loss: LossSeen::default(),
            contributions: Vec::new(),
        }
    }
}

/// The loss that the arc proves, and the capacitance that goes with it.
///
/// The arc fixes only |D - D0|, D0 being the loss at the foot of the chord, and what is propagated is w = (D - D0)²,
/// which is negative when the circles miss. A loss is printed only where w excludes D = 0 by three standard
/// uncertainties; else its upper limit is.
fn loss_of(found: &Chord, u_w: f64, usual_loss: f64) -> (LossSeen, f64) {
    let d0 = found.foot.d;
    let w = found.w.max(0.0);
    if (w - d0 * d0).abs() <= 3.0 * u_w {
        let below = d0 + (w + QUANTILE_95 * u_w).sqrt();
        return (
            LossSeen {
                below: Some(below),
                ..LossSeen::default()
            },
            found.foot.c,
        );
    }
    let at_least = d0 + (w - QUANTILE_95 * u_w).max(0.0).sqrt();
    let (one, two) = found.crossings.unwrap_or((found.foot, found.foot));
    // A loss is never negative; of two candidates the family's usual loss chooses.
    let is_first = one.d >= 0.0 && (one.d - usual_loss).abs() < (two.d - usual_loss).abs();
    let (chosen, rejected) = if is_first { (one, two) } else { (two, one) };
    let other = (found.crossings.is_some() && rejected.d >= 0.0).then_some(rejected.d);
    let seen = LossSeen {
        proven: Some(chosen.d),
        other,
        at_least: Some(at_least),
        below: None,
    };
    (seen, chosen.c)
}

/// The change of a value; a value that ceases to exist counts as no change.
fn difference(moved: Option<f64>, at: f64) -> f64 {
    moved.map_or(0.0, |moved| moved - at)
}

fn contribution(source: Source, share: f64) -> Contribution {
    Contribution {
        source,
        share: Farad::new(share.abs()),
    }
}
