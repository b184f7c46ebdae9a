//! The stated uncertainty by simulation: meters and parts drawn from a profile's tolerances, read by a person who writes
//! whole divisions. Fixed seeds; bounds as wide as so many draws need.

use nulltray::meter::{Meter, ReferenceReading, Seen, Switch, calibrate_quickly, measure};

use crate::truth::{Components, Random, Reader, part, reading};

/// A part of a middle-of-the-road film: what is assumed of its loss, and what it may be.
const LOSS: f64 = 0.01;
const U_LOSS: f64 = 0.005;

/// Estimate less truth over stated standard uncertainty, of every part.
#[derive(Default)]
struct Errors(Vec<f64>);

impl Errors {
    fn push(&mut self, meter: &Meter, switch: Switch, seen: Seen, truth: f64) {
        let found = measure(meter, switch, seen, &part(truth, LOSS, U_LOSS))
            .estimate()
            .expect("a value")
            .combined();
        self.0
            .push((found.value.get() - truth) / found.standard_uncertainty.get());
    }

    #[track_caller]
    fn check(&self, root_mean_square: std::ops::Range<f64>, within_two: std::ops::Range<f64>) {
        let n = self.0.len() as f64;
        let found = (self.0.iter().map(|e| e * e).sum::<f64>() / n).sqrt();
        let share = self.0.iter().filter(|e| e.abs() <= 2.0).count() as f64 / n;
        assert!(self.0.len() >= 2000, "{n} parts");
        assert!(
            root_mean_square.contains(&found),
            "root mean square {found}"
        );
        assert!(
            within_two.contains(&share),
            "within two standard uncertainties {share}"
        );
    }
}

/// A part anywhere on a switch, by the textbook law at a place of the dial from 12 to 88 % of its resistance.
fn somewhere(components: &Components, random: &mut Random, position: usize) -> f64 {
    let total = match &components.dial {
        crate::truth::Wiper::Linear { total, .. } => *total,
        crate::truth::Wiper::Points { points, .. } => points.last().expect("points").1,
    };
    let place = 0.12 + 0.76 * random.unit();
    place * total * components.reference / components.resistors[position]
}

fn loss(random: &mut Random) -> f64 {
    LOSS + U_LOSS * 3f64.sqrt() * random.limits()
}

fn uncalibrated(components: &Components, seed: u64) {
    let mut random = Random(seed);
    let nominal = components.meter();
    let switches: Vec<Switch> = nominal.switches().collect();
    let mut errors = Errors::default();
    while errors.0.len() < 2400 {
        let actual = components.built(&mut random).meter();
        let position = random.below(4);
        let truth = somewhere(components, &mut random, position);
        let d = loss(&mut random);
        let takes_edges = random.unit() < 0.5;
        let mut reader = Reader::Person {
            random: &mut random,
            repeatability: components.repeatability,
        };
        let seen = if takes_edges {
            reader.edges(&actual, switches[position], truth, d)
        } else {
            reader.middle(&actual, switches[position], truth, d)
        };
        if let Some(seen) = seen {
            errors.push(&nominal, switches[position], seen, truth);
        }
    }
    errors.check(0.95..1.05, 0.93..1.0);
}

#[test]
fn by_tolerances_with_a_linear_dial() {
    uncalibrated(&Components::linear(), 20_260_503);
}

#[test]
fn by_tolerances_with_measured_points() {
    uncalibrated(&Components::with_points(), 19_470_211);
}

/// Seven parts known to 0.5 %, one of them read on two switches, and the open terminals.
fn references(
    components: &Components,
    actual: &Meter,
    random: &mut Random,
) -> Vec<ReferenceReading> {
    const U: f64 = 0.005;
    let switches: Vec<Switch> = actual.switches().collect();
    let nominal = |position: usize, place: f64| {
        place * 5e3 * components.reference / components.resistors[position]
    };
    let mut rows = Vec::new();
    for (label, position, place) in [
        ("a", 0, 0.8),
        ("b", 1, 0.3),
        ("c", 1, 0.8),
        ("d", 2, 0.35),
        ("e", 2, 0.9),
        ("f", 3, 0.6),
    ] {
        let stated = nominal(position, place);
        let truth = stated * (U * random.normal()).exp();
        let mut reader = Reader::Person {
            random,
            repeatability: components.repeatability,
        };
        if let Some(seen) = reader.edges(actual, switches[position], truth, 0.001) {
            rows.push(reading(label, stated, U, switches[position], seen));
        }
    }
    let mut reader = Reader::Person {
        random,
        repeatability: components.repeatability,
    };
    if let Some(seen) = reader.edges(actual, switches[3], 0.0, 0.0) {
        rows.push(reading("", 0.0, 0.0, switches[3], seen));
    }
    rows
}

fn calibrated(components: &Components, seed: u64) {
    let mut random = Random(seed);
    let nominal = components.meter();
    let switches: Vec<Switch> = nominal.switches().collect();
    let mut errors = Errors::default();
    for _ in 0..600 {
        let actual = components.built(&mut random).meter();
        let rows = references(components, &actual, &mut random);
        let meter = calibrate_quickly(&nominal, &rows).expect("a calibration");
        for (position, switch) in switches.iter().enumerate() {
            let truth = somewhere(components, &mut random, position);
            let d = loss(&mut random);
            let mut reader = Reader::Person {
                random: &mut random,
                repeatability: components.repeatability,
            };
            if let Some(seen) = reader.middle(&actual, *switch, truth, d) {
                errors.push(&meter, *switch, seen, truth);
            }
        }
    }
    errors.check(0.93..1.07, 0.93..0.975);
}

#[test]
fn after_calibration_with_a_linear_dial() {
    calibrated(&Components::linear(), 18_830_715);
}

#[test]
fn after_calibration_with_measured_points() {
    calibrated(&Components::with_points(), 17_991_230);
}
