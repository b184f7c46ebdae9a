//! From a part to the place of its null.

use super::balance::{Balance, DialLaw, Side};
use super::circuit::{Constants, Load};
use super::{
    Band, Caution, Cut, DarkArc, DialReading, Meter, Part, Prediction, Repeats, Seen, Stop, Switch,
    measure,
};
use crate::quantity::{Farad, Fraction, Volt};
use crate::tables::peak_without_bias;

/// Returns what to expect of the part on this switch.
pub fn predict(meter: &Meter, switch: Switch, part: &Part) -> Prediction {
    let view = View::of(meter, switch);
    let sight = view.sight(part.capacitance, part);
    let band = view.band(part);
    let uncertainty = uncertainty(meter, switch, &sight, part);
    let mut cautions = Vec::new();
    cautions.extend(do_not_connect(meter, part, sight.part_voltage));
    if let Some(stop) = sight.beyond.filter(|_| sight.arc.is_none()) {
        let best = best_switch(meter, part);
        let better = (best != switch
            && View::of(meter, best)
                .sight(part.capacitance, part)
                .beyond
                .is_none())
        .then(|| meter.label(best).to_owned());
        cautions.push(Caution::OutOfSpan { stop, better });
    } else if sight.arc.is_none() {
        cautions.push(Caution::NeverDark {
            residual: sight.residual,
        });
    } else if let Some(DarkArc {
        cut: Cut::At(stop), ..
    }) = sight.arc
    {
        cautions.push(Caution::ArcCut { stop });
    }
    Prediction {
        switch,
        balance: sight.balance,
        beyond: sight.beyond,
        residual: sight.residual,
        dark: sight.arc,
        expected: sight.arc.map(middle),
        band,
        part_voltage: sight.part_voltage,
        uncertainty,
        cautions,
    }
}

/// Returns the switch that measures the part with the least relative uncertainty; if it is out of every span, the one
/// whose span comes nearest.
pub fn best_switch(meter: &Meter, part: &Part) -> Switch {
    let cost = |switch: Switch| -> (u8, f64) {
        let view = View::of(meter, switch);
        let sight = view.sight(part.capacitance, part);
        match (sight.beyond, uncertainty(meter, switch, &sight, part)) {
            (None, Some(u)) => (0, u.get()),
            (None, None) => (1, sight.residual.get()),
            (Some(stop), _) => (2, view.distance_beyond(stop, part.capacitance)),
        }
    };
    meter
        .switches()
        .map(|switch| (cost(switch), switch))
        .min_by(|(x, _), (y, _)| x.0.cmp(&y.0).then(x.1.total_cmp(&y.1)))
        .map_or(Switch(0), |(_, switch)| switch)
}

/// One switch of the meter, ready to look at parts.
struct View<'a> {
    meter: &'a Meter,
    constants: &'a Constants,
}

/// Where a part nulls on one switch, without limits and uncertainties.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Null {
    /// Where the difference is least within the travel.
    pub balance: DialReading,
    /// The stop beyond which the free optimum lies, if it does.
    pub beyond: Option<Stop>,
    /// The least difference, peak.
    pub residual: Volt,
    /// The dark arc; `None` if the lamp never goes dark.
    pub arc: Option<DarkArc>,
    /// The voltage the part sees at balance, peak.
    pub part_voltage: Volt,
}

/// Returns where the part nulls on this switch: a few hundred floating-point operations.
pub fn null(meter: &Meter, switch: Switch, part: &Part) -> Null {
    View::of(meter, switch).sight(part.capacitance, part)
}

impl<'a> View<'a> {
    fn of(meter: &'a Meter, switch: Switch) -> Self {
        Self {
            meter,
            constants: meter.model().constants(switch),
        }
    }

    fn sight(&self, capacitance: Farad, part: &Part) -> Null {
        let circuit = self.meter.model().circuit();
        let dial = &self.meter.dial;
        let load = Load {
            c: capacitance.get(),
            d: part.loss.value,
        };
        let unknown = circuit.unknown_leg(self.constants, load);
        let law = DialLaw::from_legs(unknown, circuit.dial_leg(self.constants));
        let span = dial.span(self.constants);
        let Balance {
            r,
            residual,
            beyond,
        } = law.best_balance(span);
        let arc = law.dark_span(self.constants.vth, span).map(|dark| {
            let cut = match (dark.cut_low, dark.cut_high) {
                (false, false) => Cut::Neither,
                (true, false) => Cut::At(dial.stop_at(Side::Lower)),
                (false, true) => Cut::At(dial.stop_at(Side::Upper)),
                (true, true) => Cut::Both,
            };
            let (one, other) = (self.reading(dark.from), self.reading(dark.to));
            DarkArc {
                from: min(one, other),
                to: max(one, other),
                cut,
            }
        });
        Null {
            balance: self.reading(r),
            beyond: beyond.map(|side| dial.stop_at(side)),
            residual: Volt::new(residual),
            arc,
            part_voltage: Volt::new(unknown.part.norm()),
        }
    }

    /// The reading at a resistance inside the span, kept on the dial against rounding.
    fn reading(&self, resistance: f64) -> DialReading {
        let dial = &self.meter.dial;
        let reading = dial.reading(resistance, self.constants);
        DialReading::new(reading.clamp(dial.low.get(), dial.high.get()))
    }

    /// Where the middle falls for parts at the two limits, clipped to the travel.
    fn band(&self, part: &Part) -> Option<Band> {
        let low = part.low?;
        let dial = &self.meter.dial;
        let place = |limit: Farad| -> (DialReading, Option<Stop>) {
            let sight = self.sight(limit, part);
            let place = sight.arc.map_or(sight.balance, middle);
            match sight.beyond {
                Some(stop) => (dial.number_at(stop), Some(stop)),
                None => (place, None),
            }
        };
        // More capacitance balances at more resistance.
        let open_end = dial.stop_at(Side::Upper);
        let (at_low, cut_low) = place(low);
        let (at_high, cut_high) = part
            .high
            .map_or((dial.number_at(open_end), Some(open_end)), place);
        let cut = match (cut_low, cut_high) {
            (None, None) => Cut::Neither,
            (Some(stop), None) | (None, Some(stop)) => Cut::At(stop),
            (Some(_), Some(_)) => Cut::Both,
        };
        Some(Band {
            from: min(at_low, at_high),
            to: max(at_low, at_high),
            cut,
        })
    }

    /// How far beyond a stop the part nulls, as the logarithm of a ratio; the textbook law R1·Cx = R2·C2.
    fn distance_beyond(&self, stop: Stop, capacitance: Farad) -> f64 {
        let dial = &self.meter.dial;
        let r_stop = dial.resistance(dial.number_at(stop).get(), self.constants);
        (self.constants.r1 * capacitance.get() / (r_stop * self.constants.c2))
            .ln()
            .abs()
    }
}

/// The relative standard uncertainty of a single reading where the part is expected.
pub(super) fn uncertainty(
    meter: &Meter,
    switch: Switch,
    sight: &Null,
    part: &Part,
) -> Option<Fraction> {
    let seen = match (sight.arc, sight.beyond) {
        (Some(arc), _) if arc.cut != Cut::Both => Seen::Middle(Repeats::once(middle(arc))),
        (Some(_), _) | (None, Some(_)) => return None,
        (None, None) => Seen::NeverDark {
            dimmest: Some(sight.balance),
        },
    };
    measure(meter, switch, seen, part)
        .estimate()
        .map(|estimate| estimate.combined().relative())
}

/// Before a polarised part is connected: more alternating voltage than it should see without bias, and the switch that
/// keeps to it with the least uncertainty.
fn do_not_connect(meter: &Meter, part: &Part, peak: Volt) -> Option<Caution> {
    let limit = peak_without_bias(part.family?)?;
    if peak <= limit {
        return None;
    }
    let better = meter
        .switches()
        .filter_map(|switch| {
            let sight = View::of(meter, switch).sight(part.capacitance, part);
            let u = uncertainty(meter, switch, &sight, part)?;
            (sight.part_voltage <= limit).then_some((u, switch))
        })
        .min_by(|x, y| x.0.get().total_cmp(&y.0.get()))
        .map(|(_, switch)| meter.label(switch).to_owned());
    Some(Caution::DoNotConnect {
        peak,
        limit,
        better,
    })
}

fn middle(arc: DarkArc) -> DialReading {
    DialReading::new(0.5 * (arc.from.get() + arc.to.get()))
}

fn min(one: DialReading, other: DialReading) -> DialReading {
    if one <= other { one } else { other }
}

fn max(one: DialReading, other: DialReading) -> DialReading {
    if one <= other { other } else { one }
}
