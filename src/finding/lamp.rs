//! What a lamp that misbehaves means: never dark, dark everywhere, dark only at a stop.
//!
//! Each cause is tried on the model of this meter: what would the lamp do on this switch with nothing connected, with a
//! short, with the part that the marking promises? Causes that would look otherwise are left out; the rest are ranked, the
//! marking deciding between those that look alike.

use super::{Cause, Hypothesis, Next, Observation};
use crate::meter::{
    Cut, DialReading, Edge, Null, Part, Seen, Stop, Switch, Value, best_switch, null,
};
use crate::quantity::Farad;

/// A capacitance that no meter tells from a short: Va is nothing.
const SHORT: f64 = 1.0;

/// Returns what may be behind a lamp that misbehaved, the most likely first; nothing where it behaved. `part` is what the
/// marking promises, if it promises anything.
pub fn lamp_says(observation: &Observation<'_>, part: Option<&Part>) -> Vec<Hypothesis> {
    let scene = Scene {
        observation,
        part,
        open: looks(observation, 0.0),
        short: looks(observation, SHORT),
    };
    match observation.seen {
        Seen::AlwaysDark
        | Seen::Edges {
            from: Edge::Stop,
            to: Edge::Stop,
        } => scene.always_dark(),
        Seen::NeverDark { dimmest: None } => scene.never_dark_somewhere(),
        Seen::NeverDark {
            dimmest: Some(place),
        } => match scene.stop_near(place) {
            Some(stop) if Some(stop) == scene.short.beyond => scene.dim_at_much(),
            Some(_) => scene.dim_at_little(),
            None => scene.dim_inside(),
        },
        Seen::Edges { .. } | Seen::Middle(_) => scene.dark_at_a_stop(),
        Seen::Parked { .. } => Vec::new(),
    }
}

/// Returns hypotheses as one sentence: the most likely cause, the next in line, and what to do.
pub(super) fn in_words(hypotheses: &[Hypothesis]) -> Option<String> {
    let first = hypotheses.first()?;
    Some(match hypotheses.get(1) {
        Some(second) => format!("{}, or {}; next: {}", first.cause, second.cause, first.next),
        None => format!("{}: {}", first.cause, first.next),
    })
}

/// A part without loss on the switch observed.
fn looks(observation: &Observation<'_>, capacitance: f64) -> Null {
    let part = Part::without_loss(Farad::new(capacitance));
    null(observation.meter, observation.switch, &part)
}

struct Scene<'a> {
    observation: &'a Observation<'a>,
    part: Option<&'a Part>,
    /// What the lamp would do with open terminals …
    open: Null,
    /// … and with a short.
    short: Null,
}

fn hypothesis(cause: Cause, next: Next) -> Hypothesis {
    Hypothesis { cause, next }
}

impl Scene<'_> {
    fn always_dark(&self) -> Vec<Hypothesis> {
        let is_dull = [self.open, self.short]
            .iter()
            .any(|null| null.arc.is_some_and(|arc| arc.cut == Cut::Both));
        let meter = hypothesis(Cause::Meter, Next::OpenTerminals);
        if is_dull {
            vec![hypothesis(Cause::DullLamp, self.another_switch()), meter]
        } else {
            vec![meter]
        }
    }

    /// Never dark, and nobody looked where it was dimmest.
    fn never_dark_somewhere(&self) -> Vec<Hypothesis> {
        let mut found = Vec::new();
        let lossy = hypothesis(Cause::TooLossy { at_least: None }, Next::FindDimmest);
        match self
            .promised()
            .map(|null| (null.beyond, null.arc, null.residual))
        {
            Some((Some(stop), None, _)) => found.push(self.out_of_span(stop)),
            Some((None, None, residual)) => {
                found.push(hypothesis(
                    Cause::LoadResidual { residual },
                    Next::FindDimmest,
                ));
            }
            _ => {}
        }
        found.push(lossy);
        if self.open.arc.is_none() {
            found.push(hypothesis(Cause::Open, Next::FindDimmest));
        }
        if self.short.arc.is_none() {
            found.push(hypothesis(Cause::Short, Next::FindDimmest));
        }
        found
    }

    /// Never dark, dimmest where the largest parts null.
    fn dim_at_much(&self) -> Vec<Hypothesis> {
        let next = self
            .smaller_resistor()
            .map_or(Next::Ohmmeter, Next::TakeSwitch);
        let above = hypothesis(Cause::AboveSpan, self.towards_the_part(&next));
        let short = hypothesis(Cause::Short, Next::Ohmmeter);
        let is_promised = self
            .promised()
            .is_none_or(|null| null.beyond == self.short.beyond);
        if is_promised {
            vec![above, short]
        } else {
            vec![short, above]
        }
    }

    /// Never dark, dimmest where the smallest parts null: what open terminals do on this switch decides.
    fn dim_at_little(&self) -> Vec<Hypothesis> {
        let next = self
            .larger_resistor()
            .map_or(Next::Ohmmeter, Next::TakeSwitch);
        let below = hypothesis(Cause::BelowSpan, self.towards_the_part(&next));
        if self.open.arc.is_some() {
            // Nothing at all would be dark at this stop, so that something lossy is there.
            let lossy = Cause::TooLossy {
                at_least: self.observation.measured.loss.at_least,
            };
            return vec![hypothesis(lossy, Next::Leakage), below];
        }
        let open = hypothesis(Cause::Open, next);
        let is_promised = self
            .promised()
            .is_some_and(|null| null.beyond.is_some() && null.beyond != self.short.beyond);
        if is_promised {
            vec![below, open]
        } else {
            vec![open, below]
        }
    }

    fn dim_inside(&self) -> Vec<Hypothesis> {
        let at_least = self.observation.measured.loss.at_least;
        let distortion = hypothesis(Cause::Distortion, Next::GoodPart);
        if at_least.is_some_and(|loss| loss > 0.0) {
            return vec![
                hypothesis(Cause::TooLossy { at_least }, Next::Leakage),
                distortion,
            ];
        }
        // Even a part without loss would leave the lamp lit here.
        let residual = self
            .observation
            .measured
            .estimate()
            .map_or(self.observation.meter.threshold, |estimate| {
                looks(self.observation, estimate.capacitance.get()).residual
            });
        let next = self.another_switch();
        vec![
            hypothesis(Cause::LoadResidual { residual }, next),
            distortion,
        ]
    }

    /// Dark from the stop where the smallest parts null: as open terminals are?
    fn dark_at_a_stop(&self) -> Vec<Hypothesis> {
        let estimate = match self.observation.measured.value {
            Value::Estimate(estimate) => estimate,
            Value::Open => return vec![hypothesis(Cause::Open, self.another_switch())],
            // Two edges at the stops are no edges.
            Value::Unknown => return self.always_dark(),
            Value::Window { .. } => return Vec::new(),
        };
        let c = estimate.combined();
        if self.open.arc.is_none() || 2.0 * c.standard_uncertainty.get() < c.value.get() {
            return Vec::new();
        }
        let next = self
            .larger_resistor()
            .map_or(Next::Ohmmeter, Next::TakeSwitch);
        vec![
            hypothesis(Cause::Open, next.clone()),
            hypothesis(Cause::BelowSpan, self.towards_the_part(&next)),
        ]
    }

    /// What the part that the marking promises would do on this switch.
    fn promised(&self) -> Option<Null> {
        let Observation { meter, switch, .. } = *self.observation;
        self.part.map(|part| null(meter, switch, part))
    }

    fn out_of_span(&self, stop: Stop) -> Hypothesis {
        if Some(stop) == self.short.beyond {
            let next = self
                .smaller_resistor()
                .map_or(Next::Ohmmeter, Next::TakeSwitch);
            hypothesis(Cause::AboveSpan, self.towards_the_part(&next))
        } else {
            let next = self
                .larger_resistor()
                .map_or(Next::Ohmmeter, Next::TakeSwitch);
            hypothesis(Cause::BelowSpan, self.towards_the_part(&next))
        }
    }

    /// The switch that suits the part that the marking promises, if it is another one; else what is given.
    fn towards_the_part(&self, otherwise: &Next) -> Next {
        let Observation { meter, switch, .. } = *self.observation;
        self.part
            .map(|part| best_switch(meter, part))
            .filter(|best| *best != switch)
            .map_or_else(
                || otherwise.clone(),
                |best| Next::TakeSwitch(meter.label(best).to_owned()),
            )
    }

    fn another_switch(&self) -> Next {
        self.towards_the_part(&Next::OpenTerminals)
    }

    /// The stop that a place cannot be told from.
    fn stop_near(&self, place: DialReading) -> Option<Stop> {
        let dial = &self.observation.meter.dial;
        let reach = dial
            .division
            .max(2.0 * self.observation.meter.repeatability);
        let stop = dial.nearer_stop(place);
        ((place.get() - dial.number_at(stop).get()).abs() <= reach).then_some(stop)
    }

    fn smaller_resistor(&self) -> Option<String> {
        self.neighbour(|other, own| other < own, f64::total_cmp)
    }

    fn larger_resistor(&self) -> Option<String> {
        self.neighbour(|other, own| own < other, |x, y| y.total_cmp(x))
    }

    /// The label of the switch whose resistor comes next in a direction.
    fn neighbour(
        &self,
        lies_there: impl Fn(f64, f64) -> bool,
        nearness: impl Fn(&f64, &f64) -> std::cmp::Ordering,
    ) -> Option<String> {
        let meter = self.observation.meter;
        let resistor = |switch: Switch| meter.switches[switch.position()].resistance.get();
        let own = resistor(self.observation.switch);
        meter
            .switches()
            .filter(|switch| lies_there(resistor(*switch), own))
            .max_by(|x, y| nearness(&resistor(*x), &resistor(*y)))
            .map(|switch| meter.label(switch).to_owned())
    }
}
