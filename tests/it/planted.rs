//! Planted parts: predict, then measure, gives the part back, in all three drives.

use nulltray::meter::{
    AssumedLoss, Cut, Edge, Meter, Part, Repeats, Seen, Stop, Switch, measure, predict,
};
use nulltray::quantity::Farad;
use proptest::prelude::*;

use crate::balance::meter;

const METERS: [&str; 6] = [
    "meter-plain.toml",
    "meter-loaded.toml",
    "meter-inverting.toml",
    "judge-meter-1.toml",
    "judge-meter-2.toml",
    "judge-meter-3.toml",
];

fn planted(capacitance: f64, loss: f64) -> Part {
    Part {
        capacitance: Farad::new(capacitance),
        low: None,
        high: None,
        loss: AssumedLoss {
            value: loss,
            standard_uncertainty: 0.0,
        },
        family: None,
    }
}

/// A part somewhere in the span of a switch: the textbook law at a place of the dial.
fn part_at(meter: &Meter, switch: Switch, place: f64, loss: f64) -> Option<Part> {
    let (mut low, mut high) = (1e-15, 1e-2);
    for _ in 0..200 {
        let middle = f64::sqrt(low * high);
        let found = predict(meter, switch, &planted(middle, 0.0));
        let is_above = match found.beyond {
            Some(Stop::High) => true,
            Some(Stop::Low) => false,
            None => meter.dial.travel(found.balance) > place,
        };
        if is_above {
            high = middle;
        } else {
            low = middle;
        }
    }
    let part = planted(low, loss);
    predict(meter, switch, &part)
        .beyond
        .is_none()
        .then_some(part)
}

fn back(meter: &Meter, switch: Switch, seen: Seen, part: &Part) -> f64 {
    let found = measure(meter, switch, seen, part)
        .estimate()
        .expect("a value");
    found.capacitance.get() / part.capacitance.get() - 1.0
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(400))]

    #[test]
    fn a_planted_part_comes_back(
        name in prop::sample::select(&METERS[..]),
        switch in 0usize..4,
        place in 0.03f64..0.97,
        loss in prop_oneof![Just(0.0), 0.0f64..0.02],
    ) {
        let meter = meter(name);
        let Some(switch) = meter.switches().nth(switch) else { return Ok(()) };
        let Some(part) = part_at(&meter, switch, place, loss) else { return Ok(()) };
        let found = predict(&meter, switch, &part);
        let once = Repeats::once;
        let Some(arc) = found.dark else {
            let place = found.balance;
            let seen = Seen::NeverDark { dimmest: Some(place) };
            let least = measure(&meter, switch, seen, &part).loss.at_least.expect("a lower limit");
            // The lamp stays lit: what keeps it lit is at most the loss planted.
            prop_assert!(least <= part.loss.value * (1.0 + 1e-6) + 1e-12, "{least} > {}", part.loss.value);
            return Ok(());
        };
        let width = arc.to.get() - arc.from.get();
        // A vanishing arc is a double root: what can be had from its edges falls with its width.
        let conditioning = 1.0 / (width / found.balance.get()).powi(2).min(1.0);
        match arc.cut {
            Cut::Neither => {
                // Where points of the dial lie within the arc the middle is found by three secant steps.
                let bound = if name == "judge-meter-2.toml" { 1e-7 } else { 1e-9 };
                let middle = Seen::Middle(once(found.expected.expect("a middle")));
                let error = back(&meter, switch, middle, &part);
                prop_assert!(error.abs() < bound, "middle: {error:e}");
                let edges = Seen::Edges { from: Edge::At(once(arc.to)), to: Edge::At(once(arc.from)) };
                let measured = measure(&meter, switch, edges, &part);
                if let Some(proven) = measured.loss.proven {
                    let other = measured.loss.other.unwrap_or(proven);
                    let nearest = (proven - loss).abs().min((other - loss).abs());
                    prop_assert!(nearest < 1e-8 * conditioning, "loss: {proven} or {other} for {loss}");
                }
                // Without a printed loss the value is that of the foot of the chord, right to second order in the loss.
                let d = loss.max(0.02);
                let error = measured.estimate().expect("a value").capacitance / part.capacitance - 1.0;
                prop_assert!(error.abs() < 1e-9 * conditioning + d * d, "edges: {error:e}");
            }
            Cut::At(stop) => {
                let middle = Seen::Middle(once(found.expected.expect("a middle")));
                let error = back(&meter, switch, middle, &part);
                prop_assert!(error.abs() < 1e-9 * conditioning, "middle of what is seen: {error:e}");
                let free = if stop == Stop::Low { arc.to } else { arc.from };
                let cut = if stop == Stop::Low { arc.from } else { arc.to };
                let edges = Seen::Edges { from: Edge::At(once(free)), to: Edge::At(once(cut)) };
                let error = back(&meter, switch, edges, &part);
                prop_assert!(error.abs() < 1e-9 * conditioning, "free edge: {error:e}");
            }
            Cut::Both => {}
        }
    }
}

/// Builders check their dial that way (common practice, no source; it is the textbook law R1·Cx = R2·C2).
#[test]
fn values_a_decade_apart_fall_at_one_place_when_the_resistors_are_a_decade_apart() {
    let meter = meter("meter-plain.toml");
    let places: Vec<f64> = meter
        .switches()
        .zip([220e-9, 22e-9, 2.2e-9, 220e-12])
        .map(|(switch, c)| predict(&meter, switch, &planted(c, 0.0)).balance.get())
        .collect();
    assert!(
        places.iter().all(|place| (place - places[0]).abs() < 1e-9),
        "{places:?}"
    );
}

/// Vibrating terms of the closed forms must hold from the smallest to the largest legal meter.
#[test]
fn a_small_part_keeps_its_digits() {
    let meter = meter("meter-plain.toml");
    let switch = meter.switch_named("4").expect("switch 4");
    let part = planted(25e-12, 0.0);
    let found = predict(&meter, switch, &part);
    let expected = found.expected.expect("an arc");
    let error = back(&meter, switch, Seen::Middle(Repeats::once(expected)), &part);
    assert!(error.abs() < 1e-9, "{error:e}");
}
