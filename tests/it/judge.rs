//! The whole line against an independent implementation (Python 3.11, numpy 2.4.6, scipy 1.17.1; see
//! tests/data/README.md): decode, measure, judge, place.

use nulltray::app::{Marked, Outcome, Setup, assess, outcome};
use nulltray::finding::Circumstances;
use nulltray::marking::decode;
use nulltray::meter::{DialReading, Edge, Lamp, Repeats, Seen};
use nulltray::tables::Family;
use nulltray::tray::Tray;

use crate::balance::meter;

fn repeats(cell: &str) -> Repeats {
    let readings: Vec<DialReading> = cell
        .split('/')
        .map(|number| DialReading::new(number.parse().expect("a reading")))
        .collect();
    Repeats::of(&readings).expect("at least one reading")
}

fn edge(cell: &str) -> Edge {
    if cell == "stop" {
        Edge::Stop
    } else {
        Edge::At(repeats(cell))
    }
}

fn seen(row: &csv::StringRecord) -> Seen {
    let (dial, from, to, lamp) = (&row[5], &row[6], &row[7], &row[8]);
    let place = || repeats(dial).mean();
    match lamp {
        "never" => Seen::NeverDark {
            dimmest: (!dial.is_empty()).then(place),
        },
        "always" => Seen::AlwaysDark,
        "dark" => Seen::Parked {
            at: place(),
            lamp: Lamp::Dark,
        },
        "lit" => Seen::Parked {
            at: place(),
            lamp: Lamp::Lit,
        },
        _ if !from.is_empty() => Seen::Edges {
            from: edge(from),
            to: edge(to),
        },
        _ => Seen::Middle(repeats(dial)),
    }
}

fn judged(row: &csv::StringRecord) -> Outcome {
    let tray = (!row[1].is_empty()).then(|| {
        Tray::read(include_str!("../data/judge-tray.toml"))
            .expect("a readable tray")
            .0
    });
    let setup = Setup {
        meter: meter(&row[0]),
        profile_text: String::new(),
        tray,
    };
    let family = Family::named(&row[3]);
    let marked = Marked {
        decoding: decode(&row[2], family),
        family,
        chosen: None,
    };
    let switch = setup
        .meter
        .switch_named(&row[4])
        .expect("a switch of the meter");
    let assessment = assess(
        &setup,
        &marked,
        switch,
        seen(row),
        &Circumstances::default(),
    );
    outcome(&setup, &marked, &assessment)
}

#[track_caller]
fn check(
    what: &str,
    found: Option<f64>,
    expected: &str,
    is_close: impl Fn(f64, f64) -> bool,
    row: &csv::StringRecord,
) {
    let expected: Option<f64> = expected.parse().ok();
    match (found, expected) {
        (Some(found), Some(expected)) => assert!(
            is_close(found, expected),
            "{what} {found}, not {expected}: {row:?}"
        ),
        (found, expected) => assert_eq!(found, expected, "{what}: {row:?}"),
    }
}

#[test]
fn every_row_agrees_with_the_independent_implementation() {
    let mut reader = csv::Reader::from_reader(include_str!("../data/judge.csv").as_bytes());
    let within = |bound: f64| move |x: f64, y: f64| (x - y).abs() <= bound;
    let relative = |bound: f64| move |x: f64, y: f64| (x / y - 1.0).abs() <= bound;
    let mut n_rows = 0;
    for row in reader.records() {
        let row = row.expect("a row");
        let found = judged(&row);
        let u: f64 = row[11].parse().unwrap_or(0.0);
        // A dimmest place is known to a tenth of its uncertainty; all else to the digits printed.
        let is_dim = &row[8] == "never";
        let close = move |x: f64, y: f64| {
            (x / y - 1.0).abs() <= 1e-6 || (is_dim && (x - y).abs() <= 0.1 * u)
        };
        check("capacitance", found.capacitance_pf, &row[10], close, &row);
        check(
            "uncertainty",
            found.uncertainty_pf,
            &row[11],
            relative(0.01),
            &row,
        );
        check("loss", found.loss, &row[12], relative(0.1), &row);
        check(
            "loss_below",
            found.loss_below,
            &row[13],
            relative(0.1),
            &row,
        );
        check(
            "probability_inside",
            found.probability_inside,
            &row[14],
            within(0.005),
            &row,
        );
        check(
            "probability_flat",
            found.probability_flat,
            &row[15],
            within(0.005),
            &row,
        );
        assert_eq!(found.finding, row[16], "{}: {row:?}", found.remark);
        n_rows += 1;
    }
    assert_eq!(n_rows, 60, "every row of the table is checked");
}
