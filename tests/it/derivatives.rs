//! Every derivative behind a stated uncertainty against finite differences between whole meters: each component is moved,
//! the profile read again and the same reading measured on it.

use nulltray::meter::{Measured, Meter, Seen, Source, measure};

use crate::truth::{Components, Reader, Wiper, part};

const LOSS: f64 = 0.004;
const U_LOSS: f64 = 0.005;

/// Moves a component by so many of its standard uncertainties; `None` where the meter has no such component.
fn moved(components: &Components, source: Source, position: usize, by: f64) -> Option<Components> {
    let mut moved = components.clone();
    let rectangular = |tolerance: f64| tolerance / 3f64.sqrt() * by;
    match (source, &mut moved.dial) {
        (Source::RangeResistor, _) => {
            moved.resistors[position] *= 1.0 + rectangular(components.resistor_tolerance);
        }
        (Source::Reference, _) => {
            moved.reference *= 1.0 + rectangular(components.reference_tolerance);
        }
        (Source::Stray, _) => moved.stray += rectangular(components.stray_tolerance),
        (Source::Threshold, _) => {
            moved.threshold *= 1.0 + rectangular(components.threshold_tolerance);
        }
        (
            Source::DialTotal,
            Wiper::Linear {
                total, tolerance, ..
            },
        ) => *total *= 1.0 + rectangular(*tolerance),
        (Source::DialEnd, Wiper::Linear { end, tolerance, .. }) => {
            *end *= 1.0 + rectangular(*tolerance);
        }
        (
            Source::DialTotal,
            Wiper::Points {
                points,
                uncertainty,
            },
        ) => {
            for (_, r) in points {
                *r *= 1.0 + *uncertainty * by;
            }
        }
        _ => return None,
    }
    Some(moved)
}

fn value(measured: &Measured) -> f64 {
    measured.estimate().expect("a value").capacitance.get()
}

fn check(components: &Components, position: usize, seen: Seen) {
    const SOURCES: [Source; 6] = [
        Source::RangeResistor,
        Source::Reference,
        Source::DialTotal,
        Source::DialEnd,
        Source::Stray,
        Source::Threshold,
    ];
    const STEP: f64 = 0.02;
    let on = |components: &Components| {
        let meter = components.meter();
        let switch = meter.switches().nth(position).expect("a switch");
        measure(&meter, switch, seen, &part(0.0, LOSS, U_LOSS))
    };
    let found = on(components);
    let mut n_checked = 0;
    for source in SOURCES {
        let Some((above, below)) = moved(components, source, position, STEP)
            .zip(moved(components, source, position, -STEP))
        else {
            continue;
        };
        let expected = ((value(&on(&above)) - value(&on(&below))) / (2.0 * STEP)).abs();
        let share = found
            .contributions
            .iter()
            .find(|c| c.source == source)
            .expect("a share")
            .share
            .get();
        let bound = 5e-3 * expected + 1e-6 * value(&found);
        assert!(
            (share - expected).abs() < bound,
            "{source} on switch {position}, {seen:?}: {share:e} for {expected:e}"
        );
        n_checked += 1;
    }
    assert!(n_checked >= 5);
}

fn all_ways(components: &Components) {
    let meter: Meter = components.meter();
    for (position, switch) in meter.switches().enumerate() {
        let total = match &components.dial {
            Wiper::Linear { total, .. } => *total,
            Wiper::Points { points, .. } => points.last().expect("points").1,
        };
        let at = |place: f64| place * total * components.reference / components.resistors[position];
        for place in [0.23, 0.47, 0.62, 0.81] {
            for seen in [
                Reader::Exact.middle(&meter, switch, at(place), LOSS),
                Reader::Exact.edges(&meter, switch, at(place), LOSS),
            ] {
                check(components, position, seen.expect("an arc"));
            }
        }
        // The high stop cuts this arc.
        let cut = Reader::Exact
            .edges(&meter, switch, at(0.995), LOSS)
            .expect("a free edge");
        check(components, position, cut);
    }
}

#[test]
fn contributions_are_derivatives_with_a_linear_dial() {
    all_ways(&Components::linear());
}

#[test]
fn contributions_are_derivatives_with_measured_points() {
    all_ways(&Components::with_points());
}
