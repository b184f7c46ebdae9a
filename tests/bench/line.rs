//! What the stations of the line cost, each answer asserted before it is timed: `cargo bench --bench line`.

use divan::{Bencher, black_box};
use nulltray::finding::{Circumstances, HouseRules, Observation, expect, judge};
use nulltray::marking::decode;
use nulltray::meter::{DialReading, Meter, Part, Repeats, Seen, Switch, measure, null, predict};

fn main() {
    divan::main();
}

struct Case {
    meter: Meter,
    switch: Switch,
    part: Part,
}

/// `224J` on switch A of the example meter.
fn case() -> Case {
    let (meter, _) =
        Meter::read(include_str!("../../data/example-meter.toml")).expect("the example profile");
    let switch = meter.switch_named("A").expect("switch A");
    let decoding = decode("224J", None);
    let reading = decoding.best().expect("a reading");
    let part = expect(reading, &HouseRules::default());
    assert_eq!(part.capacitance.to_string(), "220 nF");
    Case {
        meter,
        switch,
        part,
    }
}

/// Balance and both dark edges on one switch.
#[divan::bench]
fn null_on_one_switch(bencher: Bencher<'_, '_>) {
    let Case {
        meter,
        switch,
        part,
    } = case();
    let found = null(&meter, switch, &part);
    assert!(found.beyond.is_none() && found.arc.is_some());
    bencher.bench(|| null(black_box(&meter), black_box(switch), black_box(&part)));
}

/// The whole prediction: balance, dark arc, band of the limits, uncertainty, cautions.
#[divan::bench]
fn predict_whole(bencher: Bencher<'_, '_>) {
    let Case {
        meter,
        switch,
        part,
    } = case();
    let found = predict(&meter, switch, &part);
    assert!(found.band.is_some() && found.uncertainty.is_some() && found.dark.is_some());
    bencher.bench(|| predict(black_box(&meter), black_box(switch), black_box(&part)));
}

/// From a reading to a value with its uncertainty.
#[divan::bench]
fn measure_one_reading(bencher: Bencher<'_, '_>) {
    let Case {
        meter,
        switch,
        part,
    } = case();
    let place = predict(&meter, switch, &part).expected.expect("an arc");
    let seen = Seen::Middle(Repeats::once(place));
    let value = || measure(black_box(&meter), switch, black_box(seen), &part);
    let found = value().estimate().expect("a value");
    assert!((found.capacitance / part.capacitance - 1.0).abs() < 1e-9);
    bencher.bench(value);
}

/// From a reading to a finding, the marking being decoded already.
#[divan::bench]
fn measure_and_judge(bencher: Bencher<'_, '_>) {
    let Case {
        meter,
        switch,
        part,
    } = case();
    let decoding = decode("224J", None);
    let rules = HouseRules::default();
    let place = predict(&meter, switch, &part).expected.expect("an arc");
    let seen = Seen::Middle(Repeats::once(DialReading::new(place.get())));
    let finding = || {
        let measured = measure(black_box(&meter), switch, black_box(seen), &part);
        let observation = Observation {
            meter: &meter,
            switch,
            seen,
            measured: &measured,
        };
        judge(
            &decoding,
            None,
            &observation,
            &Circumstances::default(),
            &rules,
        )
    };
    assert_eq!(finding().word.word(), "inside");
    bencher.bench(finding);
}
