//! Where a meter can be trusted.

use nulltray::meter::{Change, Meter, coverage};
use nulltray::quantity::Fraction;

use crate::balance::meter;
use crate::truth::{Components, Wiper};

fn example() -> Meter {
    Meter::read(include_str!("../../data/example-meter.toml"))
        .expect("the example")
        .0
}

#[test]
fn the_useful_spans_of_the_example_join_from_1_nf_to_1_uf() {
    let found = coverage(&example(), Fraction::new(0.03));
    let mut spans: Vec<(f64, f64)> = found
        .switches
        .iter()
        .map(|s| s.useful.expect("a useful span"))
        .map(|(from, to)| (from.get(), to.get()))
        .collect();
    spans.sort_by(|x, y| x.0.total_cmp(&y.0));
    assert!(spans[0].0 <= 1e-9, "{spans:?}");
    for (one, other) in spans.iter().zip(&spans[1..]) {
        assert!(other.0 <= one.1, "a gap from {} to {}", one.1, other.0);
    }
    assert!(spans.last().expect("a span").1 >= 1e-6, "{spans:?}");
}

#[test]
fn the_span_is_that_of_the_textbook_law() {
    let meter = meter("meter-plain.toml");
    let found = coverage(&meter, Fraction::new(0.05));
    let second = &found.switches[1];
    assert!((second.span.0.get() / (20.0 * 100e-9 / 10e3) - 1.0).abs() < 1e-12);
    assert!((second.span.1.get() / (10_020.0 * 100e-9 / 10e3) - 1.0).abs() < 1e-12);
    assert!(
        second
            .values
            .windows(2)
            .all(|v| v[0].capacitance < v[1].capacitance)
    );
}

/// The residual of a divider load is about V0·(R2/2Rd)/(1+x²): with 2Rd = 200 kΩ it is 13 mV at x = 1 and holds a lamp of
/// 8 mV lit there; the reference's own loss, 1.5 mV, does not.
#[test]
fn a_load_holds_the_lamp_lit_on_part_of_the_dial() {
    let mut components = Components::linear();
    components.drive = "drive = \"divider\"\nresistance = \"100 kΩ\"".to_owned();
    components.threshold = 0.008;
    let found = coverage(&components.meter(), Fraction::new(0.05));
    let second = &found.switches[1];
    let (from, to) = second.never_dark.expect("a lit part");
    let at_one = 100.0 * (1417.0 - 33.0) / 8200.0;
    assert!(from.get() < at_one && at_one < to.get(), "{from} {to}");
    let lit = || {
        second
            .values
            .iter()
            .filter(|v| from < v.balance && v.balance < to)
    };
    assert!(lit().count() > 5 && lit().all(|v| v.both_edges.is_none()));
    components.drive = "drive = \"buffered\"".to_owned();
    let plain = coverage(&components.meter(), Fraction::new(0.05));
    assert!(plain.switches.iter().all(|s| s.never_dark.is_none()));
}

#[test]
fn the_worst_component_is_the_one_to_change() {
    let changes =
        |components: &Components| coverage(&components.meter(), Fraction::new(0.05)).changes;
    let mut components = Components::linear();
    components.reference_tolerance = 0.2;
    let first = changes(&components)[0];
    assert_eq!(first.change, Change::Reference);
    assert!(
        0.3 < first.narrower.get() && first.narrower.get() < 0.5,
        "{first:?}"
    );
    let mut components = Components::linear();
    components.dial = Wiper::Linear {
        total: 8.2e3,
        end: 33.0,
        tolerance: 0.2,
    };
    assert_eq!(changes(&components)[0].change, Change::Dial);
    let mut components = Components::with_points();
    components.resistor_tolerance = 0.001;
    components.reference_tolerance = 0.001;
    components.repeatability = 2.0;
    assert_eq!(changes(&components)[0].change, Change::Scale);
    // A meter that is calibrated has no tolerances left to better.
    let calibrated = coverage(&example(), Fraction::new(0.03)).changes;
    assert!(
        calibrated
            .iter()
            .all(|c| matches!(c.change, Change::Calibration | Change::Scale | Change::Lamp))
    );
}

#[test]
fn no_switch_is_useful_to_a_limit_that_it_never_meets() {
    let found = coverage(&example(), Fraction::new(1e-5));
    assert!(
        found
            .switches
            .iter()
            .all(|s| s.useful.is_none() && s.best.is_some())
    );
}
