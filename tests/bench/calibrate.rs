//! What knowing a meter costs, each answer asserted before it is timed: `cargo bench --bench calibrate`. A calibration from
//! 20 observations is to take less than 10 ms, a coverage less than 50 ms.

use divan::{Bencher, black_box};
use nulltray::finding::{HouseRules, best_parking};
use nulltray::marking::decode;
use nulltray::meter::{
    AssumedLoss, Cut, Edge, Meter, Part, ReferenceReading, Repeats, Seen, calibrate, coverage, null,
};
use nulltray::quantity::{Farad, Fraction};

fn main() {
    divan::main();
}

fn example() -> Meter {
    let text = include_str!("../../data/example-meter.toml");
    Meter::read(text).expect("the example profile").0
}

/// So many parts, spread over all switches, both edges of each read to the nearest division.
fn readings(meter: &Meter, n_readings: usize) -> Vec<ReferenceReading> {
    let switches: Vec<_> = meter.switches().collect();
    (0..)
        .filter_map(|i| {
            let switch = switches[i % switches.len()];
            // Places of the dial that never repeat: multiples of the golden section.
            let place = 0.15 + 0.7 * (i as f64 * 0.618_034).fract();
            let resistor = meter.switches[i % switches.len()].resistance.get();
            let capacitance = Farad::new(place * 4.7e3 * 68e-9 / resistor);
            let loss = AssumedLoss {
                value: 0.001,
                standard_uncertainty: 0.0,
            };
            let part = Part {
                capacitance,
                low: None,
                high: None,
                loss,
                family: None,
            };
            let arc = null(meter, switch, &part)
                .arc
                .filter(|arc| arc.cut == Cut::Neither)?;
            let edge = |x: nulltray::meter::DialReading| {
                Edge::At(Repeats::once(nulltray::meter::DialReading::new(
                    x.get().round(),
                )))
            };
            Some(ReferenceReading {
                label: format!("part {i}"),
                capacitance,
                standard_uncertainty: capacitance * 0.003,
                loss: 0.001,
                switch,
                seen: Seen::Edges {
                    from: edge(arc.from),
                    to: edge(arc.to),
                },
            })
        })
        .take(n_readings)
        .collect()
}

/// The whole calibration with its report, by the count of observations.
#[divan::bench(args = [5, 10, 20, 40, 80])]
fn calibrate_from(bencher: Bencher<'_, '_>, n_readings: usize) {
    let meter = example();
    let rows = readings(&meter, n_readings);
    let run = || {
        calibrate(
            black_box(&meter),
            black_box(&rows),
            "2026-05-03T10:00:00+02:00",
        )
    };
    let found = run().expect("a calibration");
    assert_eq!(found.report.n_numbers, 2 * n_readings);
    assert!(
        found
            .report
            .switches
            .iter()
            .any(|gain| gain.after < gain.before)
    );
    bencher.bench(run);
}

/// All switches of the example, with what would better it.
#[divan::bench]
fn coverage_of_the_example(bencher: Bencher<'_, '_>) {
    let meter = example();
    let run = || coverage(black_box(&meter), Fraction::new(0.03));
    assert!(run().switches.iter().all(|s| s.useful.is_some()));
    bencher.bench(run);
}

/// The best parking place for a batch on any switch.
#[divan::bench]
fn parking_for_a_batch(bencher: Bencher<'_, '_>) {
    let meter = example();
    let decoding = decode("223J", None);
    let reading = decoding.best().expect("a reading");
    let rules = HouseRules::default();
    let run = || best_parking(black_box(&meter), black_box(reading), &rules);
    assert!(run().expect("a place").settled.get() > 0.1);
    bencher.bench(run);
}
