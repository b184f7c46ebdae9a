//! What to do next about an undecided part: the cheapest step whose uncertainty would decide.

use std::fmt;

use super::prior::{Interval, Prior};
use super::{HouseRules, Observation};
use crate::meter::{Cut, Edge, Estimate, Meter, Part, Repeats, Seen, Switch, measure, predict};
use crate::quantity::Fraction;

/// How well a reference part for calibrating is usually known (common practice, no source).
const REFERENCE_PART: f64 = 0.005;

/// How many readings are worth averaging.
const N_REPEATS: u32 = 4;

/// A step that would help.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Step {
    BothEdges,
    Repeats(u32),
    OtherSwitch(String),
    Calibrate,
}

/// What to do next.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Advice {
    /// This step would decide, at about this relative standard uncertainty.
    Take { step: Step, uncertainty: Fraction },
    /// No step would.
    CannotTell,
}

impl fmt::Display for Advice {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Self::Take { step, uncertainty } = self else {
            return f.write_str("this meter cannot tell");
        };
        match step {
            Step::BothEdges => f.write_str("next: read both edges")?,
            Step::Repeats(n) => write!(f, "next: {n} readings of the same place")?,
            Step::OtherSwitch(label) => write!(f, "next: read it on switch {label}")?,
            Step::Calibrate => f.write_str("next: calibrate the meter")?,
        }
        let percent = 2.0 * uncertainty.percent();
        write!(f, ", ±{percent:.1} % (k = 2) would decide")
    }
}

/// Returns the cheapest step that would decide, the value staying what it is.
pub(super) fn advise(
    observation: &Observation<'_>,
    estimate: Estimate,
    part: &Part,
    prior: Prior,
    (limits, rules): (Interval, &HouseRules),
) -> Advice {
    let Observation { meter, switch, .. } = *observation;
    let c = estimate.capacitance.get();
    let decides = |u: f64| {
        let evidence = prior.evidence(c, u, limits);
        let p = evidence.inside / evidence.total;
        p >= rules.confidence || p <= 1.0 - rules.confidence
    };
    let found = Part {
        capacitance: estimate.capacitance,
        ..*part
    };
    let steps = [
        (Step::BothEdges, edges_at(meter, switch, &found)),
        (
            Step::Repeats(N_REPEATS),
            middle_at(meter, switch, &found, N_REPEATS),
        ),
    ];
    let others = meter
        .switches()
        .filter(|other| *other != switch)
        .map(|other| {
            (
                Step::OtherSwitch(meter.label(other).to_owned()),
                middle_at(meter, other, &found, 1),
            )
        });
    let calibrated = meter.calibration.is_none().then(|| {
        (
            Step::Calibrate,
            Some(estimate.own.get().hypot(REFERENCE_PART * c)),
        )
    });
    steps
        .into_iter()
        .chain(others)
        .chain(calibrated)
        .filter_map(|(step, u)| Some((step, u?)))
        .find(|(_, u)| decides(*u))
        .map_or(Advice::CannotTell, |(step, u)| Advice::Take {
            step,
            uncertainty: Fraction::new(u / c),
        })
}

/// The uncertainty of reading both edges of a part.
fn edges_at(meter: &Meter, switch: Switch, part: &Part) -> Option<f64> {
    let arc = predict(meter, switch, part)
        .dark
        .filter(|arc| arc.cut == Cut::Neither)?;
    let edge = |r| Edge::At(Repeats::once(r));
    uncertainty(
        meter,
        switch,
        Seen::Edges {
            from: edge(arc.from),
            to: edge(arc.to),
        },
        part,
    )
}

/// The uncertainty of so many readings of a part.
fn middle_at(meter: &Meter, switch: Switch, part: &Part, n_readings: u32) -> Option<f64> {
    let prediction = predict(meter, switch, part);
    let place = prediction
        .expected
        .filter(|_| prediction.beyond.is_none())?;
    uncertainty(
        meter,
        switch,
        Seen::Middle(Repeats::with_mean(place, n_readings)),
        part,
    )
}

fn uncertainty(meter: &Meter, switch: Switch, seen: Seen, part: &Part) -> Option<f64> {
    measure(meter, switch, seen, part)
        .estimate()
        .map(|e| e.combined().standard_uncertainty.get())
}
