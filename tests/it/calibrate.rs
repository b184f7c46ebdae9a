//! Calibrating: what comes out of readings of known parts, what is said of it, what is refused.

mod refused;

use nulltray::meter::{
    DialReading, Edge, Meter, NotCalibrated, NumberRead, ReferenceReading, Repeats, Seen,
    calibrate, measure,
};
use nulltray::quantity::Farad;
use proptest::prelude::*;

use crate::truth::{Components, Random, Reader, Wiper, part, reading};

const DATE: &str = "2026-05-03T10:00:00+02:00";

/// Parts a decade and less apart for each switch of the linear meter.
const REFERENCES: [(&str, f64, &[usize]); 8] = [
    ("r1", 1.0e-6, &[0]),
    ("r2", 470e-9, &[0]),
    ("r3", 100e-9, &[0, 1]),
    ("r4", 33e-9, &[1]),
    ("r5", 10e-9, &[1, 2]),
    ("r6", 3.3e-9, &[2]),
    ("r7", 680e-12, &[2, 3]),
    ("r8", 220e-12, &[3]),
];

/// A meter that is off, and exact readings of it.
fn off(components: &Components) -> Components {
    let mut off = components.clone();
    for (resistor, by) in off.resistors.iter_mut().zip([0.011, -0.013, 0.006, -0.004]) {
        *resistor *= 1.0 + by;
    }
    off.reference *= 0.985;
    match &mut off.dial {
        Wiper::Linear { total, end, .. } => {
            *total *= 1.03;
            *end *= 0.97;
        }
        Wiper::Points { points, .. } => {
            for (_, r) in points {
                *r *= 1.004;
            }
        }
    }
    off.stray += 2.5e-12;
    off.threshold *= 1.11;
    off
}

fn readings(actual: &Meter, reader: &mut Reader<'_>) -> Vec<ReferenceReading> {
    let mut found = Vec::new();
    for (label, c, switches) in REFERENCES {
        for position in switches {
            let switch = actual.switches().nth(*position).expect("a switch");
            if let Some(seen) = reader.edges(actual, switch, c, 0.001) {
                found.push(reading(label, c, 0.002, switch, seen));
            }
        }
    }
    let last = actual.switches().last().expect("a switch");
    if let Some(seen) = reader.edges(actual, last, 0.0, 0.0) {
        found.push(reading("", 0.0, 0.0, last, seen));
    }
    found
}

fn both() -> [Components; 2] {
    [Components::linear(), Components::with_points()]
}

#[test]
fn exact_readings_of_exact_parts_bring_the_meter_back() {
    for components in both() {
        let (nominal, actual) = (components.meter(), off(&components).meter());
        let rows = readings(&actual, &mut Reader::Exact);
        let found = calibrate(&nominal, &rows, DATE).expect("a calibration");
        assert!(
            found.report.reduced_chi_square < 1.0,
            "{}",
            found.report.reduced_chi_square
        );
        assert!(found.report.contradiction.is_none());
        let calibrated = nominal.calibrated(found.calibration.clone());
        for (switch, c) in actual.switches().zip([300e-9, 25e-9, 2.5e-9, 400e-12]) {
            let Some(seen) = Reader::Exact.middle(&actual, switch, c, 0.0) else {
                continue;
            };
            let value = |meter: &Meter| {
                measure(meter, switch, seen, &part(c, 0.0, 0.005))
                    .estimate()
                    .expect("a value")
            };
            let (before, after) = (value(&nominal), value(&calibrated));
            let off = (after.capacitance.get() - c).abs();
            assert!(off < after.common.get(), "{c}: {before:?} {after:?}");
            assert!(after.common.get() < 0.8 * before.common.get());
        }
        for gain in &found.report.switches {
            assert!(gain.after.get() < 0.7 * gain.before.get(), "{gain:?}");
        }
    }
}

#[test]
fn the_table_in_the_profile_reads_back_to_the_last_digit() {
    for components in both() {
        let profile = components.profile();
        let nominal = components.meter();
        let rows = readings(&off(&components).meter(), &mut Reader::Exact);
        let calibration = calibrate(&nominal, &rows, DATE)
            .expect("a calibration")
            .calibration;
        let written = calibration.written_into(&nominal, &profile);
        assert!(
            written.starts_with(&profile),
            "the profile stays byte for byte"
        );
        let (read, warnings) = Meter::read(&written).expect("readable");
        assert_eq!(warnings, []);
        assert_eq!(read.calibration, Some(calibration.clone()));
        let direct = nominal.calibrated(calibration.clone());
        for (position, switch) in read.switches().enumerate() {
            let seen = Seen::Middle(Repeats::once(DialReading::new(47.0)));
            let value = |meter: &Meter| {
                measure(meter, switch, seen, &part(0.0, 0.0, 0.005))
                    .estimate()
                    .expect("a value")
            };
            let (one, other) = (value(&read), value(&direct));
            assert!(
                (one.capacitance / other.capacitance - 1.0).abs() < 1e-12,
                "switch {position}"
            );
            assert!(
                (one.common / other.common - 1.0).abs() < 1e-9,
                "switch {position}"
            );
        }
        // Replacing keeps what stands before, and a calibrated meter is calibrated from its tolerances again.
        let again = calibrate(&read, &rows, DATE)
            .expect("a calibration")
            .calibration;
        assert_eq!(again.written_into(&read, &written), written);
    }
}

#[test]
fn a_table_is_replaced_where_it_stands_and_odd_profiles_keep_their_bytes() {
    let components = Components::linear();
    let nominal = components.meter();
    let rows = readings(&off(&components).meter(), &mut Reader::Exact);
    let calibration = calibrate(&nominal, &rows, DATE)
        .expect("a calibration")
        .calibration;
    let profile = components.profile();
    let bare = profile.trim_end();
    let written = calibration.written_into(&nominal, bare);
    assert!(written.starts_with(bare) && Meter::read(&written).expect("readable").1.is_empty());
    let followed =
        format!("{profile}[calibration]\nold = [\n  [1],\n[2],\n]\n[[check]]\nlabel = \"x\"\n");
    let written = calibration.written_into(&nominal, &followed);
    assert!(written.starts_with(&profile));
    assert!(
        written.ends_with("]\n[[check]]\nlabel = \"x\"\n"),
        "{written}"
    );
    assert!(!written.contains("\nold"));
}

#[test]
fn the_open_terminals_weigh_on_the_stray_capacitance() {
    let components = Components::linear();
    let rows = readings(&off(&components).meter(), &mut Reader::Exact);
    let weight = |rows: &[ReferenceReading]| {
        calibrate(&components.meter(), rows, DATE)
            .expect("a calibration")
            .report
            .open_terminals
    };
    let with = weight(&rows).expect("a weight").get();
    assert!(0.1 < with && with < 1.0, "{with}");
    assert_eq!(weight(&rows[..rows.len() - 1]), None);
}

#[test]
fn a_wrong_reference_is_flagged_and_the_robust_fit_says_what_it_pulled() {
    let components = Components::linear();
    let mut random = Random(7);
    let mut reader = Reader::Person {
        random: &mut random,
        repeatability: 0.3,
    };
    let mut rows = readings(&off(&components).meter(), &mut reader);
    let sound = calibrate(&components.meter(), &rows, DATE)
        .expect("a calibration")
        .report;
    assert!(
        sound.residuals.iter().all(|r| !r.is_outlier),
        "{:?}",
        sound.residuals
    );
    let wrong = rows.iter().position(|r| r.label == "r4").expect("r4");
    rows[wrong].capacitance = rows[wrong].capacitance * 1.08;
    let report = match calibrate(&components.meter(), &rows, DATE) {
        Ok(found) => found.report,
        Err(NotCalibrated::Contradictory(report)) => *report,
        Err(other) => panic!("{other}"),
    };
    let check = report.parts.iter().find(|p| p.label == "r4").expect("r4");
    assert!(check.is_outlier(), "{check:?}");
    assert!(
        (check.deviation.get() - (1.0 / 1.08 - 1.0)).abs() < 0.03,
        "{check:?}"
    );
    let contradiction = report.contradiction.as_ref().expect("said");
    let first = &report.residuals[contradiction.suspects[0]];
    assert_eq!(first.label, "r4");
    assert!(!report.robust.doubted.is_empty());
    assert!(!report.robust.changes.is_empty());
}

#[test]
fn all_on_one_switch_helps_that_switch_and_the_report_shows_it() {
    let components = Components::linear();
    let actual = off(&components).meter();
    let switch = actual.switch_named("B").expect("B");
    let rows: Vec<ReferenceReading> = [("a", 20e-9), ("b", 47e-9), ("c", 82e-9)]
        .iter()
        .map(|(label, c)| {
            reading(
                label,
                *c,
                0.002,
                switch,
                Reader::Exact
                    .edges(&actual, switch, *c, 0.001)
                    .expect("edges"),
            )
        })
        .collect();
    let report = calibrate(&components.meter(), &rows, DATE)
        .expect("a calibration")
        .report;
    let gain = |label: &str| {
        let switch = actual.switch_named(label).expect("a switch");
        let gain = report
            .switches
            .iter()
            .find(|g| g.switch == switch)
            .expect("a gain");
        gain.after.get() / gain.before.get()
    };
    assert!(
        gain("B") < 0.4 && gain("A") > gain("B"),
        "{} {}",
        gain("A"),
        gain("B")
    );
    let next = report.next_part.expect("advice");
    assert_ne!(
        next.switch, switch,
        "another switch is the one to read next"
    );
    // The promise is kept: with that part read, the uncertainties come out as foretold.
    let seen = Reader::Exact
        .middle(&actual, next.switch, next.capacitance.get(), 0.001)
        .expect("a middle");
    let mut more = rows;
    more.push(reading(
        "next",
        next.capacitance.get(),
        next.standard_uncertainty.get(),
        next.switch,
        seen,
    ));
    let then = calibrate(&components.meter(), &more, DATE)
        .expect("a calibration")
        .report;
    for (gain, foretold) in then.switches.iter().zip(&next.after) {
        assert!(
            (gain.after.get() / foretold.get() - 1.0).abs() < 0.05,
            "{gain:?} {foretold:?}"
        );
    }
}

#[test]
fn leaving_a_part_out_by_the_formula_is_leaving_it_out() {
    let components = Components::linear();
    let mut random = Random(3);
    let mut reader = Reader::Person {
        random: &mut random,
        repeatability: 0.3,
    };
    let rows = readings(&off(&components).meter(), &mut reader);
    let report = calibrate(&components.meter(), &rows, DATE)
        .expect("a calibration")
        .report;
    for label in ["r4", "r6", "r8"] {
        let (left_out, others): (Vec<_>, Vec<_>) =
            rows.iter().cloned().partition(|r| r.label == label);
        let without = calibrate(&components.meter(), &others, DATE).expect("a calibration");
        let meter = components.meter().calibrated(without.calibration);
        let row = &left_out[0];
        let stated = row.capacitance.get();
        let found = measure(&meter, row.switch, row.seen, &part(stated, row.loss, 0.0))
            .estimate()
            .expect("a value");
        let check = report
            .parts
            .iter()
            .find(|p| p.label == label)
            .expect("the part");
        let deviation = found.capacitance.get() / stated - 1.0;
        let u = check.standard_uncertainty.get();
        assert!(
            (deviation - check.deviation.get()).abs() < 0.15 * u,
            "{label}: {deviation} {check:?}"
        );
        let measured = found.combined().relative().get().hypot(0.002);
        assert!((u / measured - 1.0).abs() < 0.15, "{label}: {u} {measured}");
    }
}

#[test]
fn one_label_is_one_part() {
    let components = Components::linear();
    let actual = components.meter();
    let [a, b] = ["A", "B"].map(|label| actual.switch_named(label).expect("a switch"));
    let row = |label: &str, switch| {
        reading(
            label,
            100e-9,
            0.01,
            switch,
            Reader::Exact
                .middle(&actual, switch, 100e-9, 0.001)
                .expect("a middle"),
        )
    };
    let after = |rows: &[ReferenceReading]| {
        calibrate(&actual, rows, DATE)
            .expect("a calibration")
            .report
            .switches[0]
            .after
            .get()
    };
    let one = after(&[row("x", a), row("x", b)]);
    let two = after(&[row("x", a), row("y", b)]);
    assert!(
        one > two,
        "two independent parts are worth more: {one} {two}"
    );
    // The careful assumption where there is no label.
    assert!((after(&[row("", a), row("", b)]) - one).abs() < 1e-9);
}

#[test]
fn both_edges_are_two_numbers_and_a_cut_arc_is_one() {
    let components = Components::linear();
    let actual = off(&components).meter();
    let mut rows = readings(&actual, &mut Reader::Exact);
    // A part at the high stop, which cuts its arc.
    let second = actual.switch_named("B").expect("B");
    let cut = Reader::Exact
        .edges(&actual, second, 134e-9, 0.001)
        .expect("an edge");
    rows.push(reading("cut", 134e-9, 0.002, second, cut));
    let report = calibrate(&components.meter(), &rows, DATE)
        .expect("a calibration")
        .report;
    assert_eq!(report.n_numbers, report.residuals.len());
    let of = |row: usize| report.residuals.iter().filter(move |r| r.row == row);
    assert_eq!(of(rows.len() - 1).count(), 1);
    let last = report.residuals.last().expect("the cut arc");
    assert_eq!(last.number, NumberRead::LowEdge);
    assert!(last.leave_one_out.is_some());
    let open = report.residuals.iter().filter(|r| r.label.is_empty());
    assert!(open.clone().count() > 0 && open.into_iter().all(|r| r.leave_one_out.is_none()));
    let first: Vec<NumberRead> = of(2).map(|r| r.number).collect();
    assert_eq!(first, [NumberRead::LowEdge, NumberRead::HighEdge]);
}

#[test]
fn a_component_known_exactly_stays_as_it_is_and_any_label_will_do() {
    let mut components = Components::linear();
    components.stray_tolerance = 0.0;
    let profile = components
        .profile()
        .replace("label = \"B\"", "label = \"stray\"");
    let (nominal, _) = Meter::read(&profile).expect("readable");
    let rows = readings(&off(&Components::linear()).meter(), &mut Reader::Exact);
    let found = calibrate(&nominal, &rows, DATE).expect("a calibration");
    let stray = found
        .report
        .parameters
        .iter()
        .find(|p| p.name == "stray capacitance")
        .expect("stray");
    assert_eq!((stray.value, stray.standard_uncertainty), (17e-12, 0.0));
    assert_eq!(found.report.open_terminals, None);
    let written = found.calibration.written_into(&nominal, &profile);
    let (read, warnings) = Meter::read(&written).expect("readable");
    assert_eq!(warnings, []);
    assert_eq!(read.calibration, Some(found.calibration));
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(40))]

    /// Whatever is read of whatever part: a calibration of finite numbers, or a reason.
    #[test]
    fn any_readings_calibrate_or_are_refused(
        rows in prop::collection::vec(
            (0usize..3, -15.0f64..1.0, 0.0f64..1.2, 0usize..4, 0.0f64..=100.0, 0.0f64..=100.0, 0u8..4),
            0..7,
        ),
    ) {
        let meter = Components::linear().meter();
        let switches: Vec<_> = meter.switches().collect();
        let at = |x: f64| Repeats::once(DialReading::new(x));
        let rows: Vec<ReferenceReading> = rows
            .into_iter()
            .map(|(label, exponent, loss, switch, x, y, kind)| {
                let seen = match kind {
                    0 => Seen::Middle(at(x)),
                    1 => Seen::Edges { from: Edge::At(at(x)), to: Edge::At(at(y)) },
                    2 => Seen::Edges { from: Edge::At(at(x)), to: Edge::Stop },
                    _ => Seen::NeverDark { dimmest: Some(DialReading::new(x)) },
                };
                let c = 10f64.powf(exponent);
                ReferenceReading { loss, ..reading(["", "x", "y"][label], c, 0.01, switches[switch], seen) }
            })
            .collect();
        match calibrate(&meter, &rows, DATE) {
            Ok(found) => {
                prop_assert!(found.report.chi_square.is_finite());
                let profile = Components::linear().profile();
                let written = found.calibration.written_into(&meter, &profile);
                prop_assert!(Meter::read(&written).is_ok(), "{written}");
            }
            Err(refusal) => prop_assert!(!refusal.to_string().is_empty()),
        }
    }
}
