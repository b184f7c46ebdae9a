//! The built-in example meter is as good as it must be to sort ordinary parts.

use nulltray::meter::DialReading;
use nulltray::meter::{AssumedLoss, Meter, Part, Repeats, Seen, best_switch, measure, predict};
use nulltray::quantity::Farad;

fn example() -> Meter {
    let (meter, warnings) = Meter::read(include_str!("../../data/example-meter.toml"))
        .expect("the example profile is readable");
    assert_eq!(warnings, [], "its calibration belongs to it");
    meter
}

fn part(capacitance: f64) -> Part {
    Part {
        capacitance: Farad::new(capacitance),
        low: None,
        high: None,
        loss: AssumedLoss {
            value: 0.0,
            standard_uncertainty: 0.005,
        },
        family: None,
    }
}

#[test]
fn from_1_nf_to_1_uf_every_value_is_measured_to_3_percent() {
    let meter = example();
    for step in 0..=300 {
        let part = part(1e-9 * 10f64.powf(f64::from(step) / 100.0));
        let found = predict(&meter, best_switch(&meter, &part), &part);
        let u = found.uncertainty.expect("a value").get();
        assert!(
            found.beyond.is_none() && u <= 0.03,
            "{}: {u}",
            part.capacitance
        );
    }
}

#[test]
fn at_mid_dial_the_standard_uncertainty_is_at_most_1_percent() {
    let meter = example();
    for switch in meter.switches() {
        let seen = Seen::Middle(Repeats::once(DialReading::new(50.0)));
        let found = measure(&meter, switch, seen, &part(0.0))
            .estimate()
            .expect("a value");
        let u = found.combined().relative().get();
        assert!(u <= 0.01, "switch {}: {u}", meter.label(switch));
    }
}
