//! What is no calibration: contradictions, sets that teach nothing, rows with mistakes.

use super::*;

#[test]
fn references_that_contradict_each_other_are_refused_by_row() {
    let components = Components::linear();
    let actual = components.meter();
    let switch = actual.switch_named("B").expect("B");
    let seen = |c| {
        Reader::Exact
            .middle(&actual, switch, c, 0.001)
            .expect("a middle")
    };
    let rows = [
        reading("one", 60e-9, 0.001, switch, seen(60e-9)),
        reading("two", 60e-9, 0.001, switch, seen(72e-9)),
    ];
    let Err(refusal) = calibrate(&actual, &rows, DATE) else {
        panic!("contradictory")
    };
    let text = refusal.to_string();
    assert!(
        text.starts_with("the readings contradict each other") && text.contains("row 2"),
        "{text}"
    );
}

#[test]
fn a_set_that_teaches_nothing_is_refused_with_what_it_says_nothing_about() {
    let components = Components::linear();
    let actual = components.meter();
    let last = actual.switch_named("D").expect("D");
    let open = Reader::Exact
        .edges(&actual, last, 0.0, 0.0)
        .expect("an edge");
    let Err(refusal) = calibrate(&actual, &[reading("", 0.0, 0.0, last, open)], DATE) else {
        panic!("teaches nothing")
    };
    let text = refusal.to_string();
    assert!(
        text.contains("switch A resistance") && text.contains("reference capacitance"),
        "{text}"
    );
    assert_eq!(
        calibrate(&actual, &[], DATE),
        Err(NotCalibrated::NothingRead)
    );
    let mut exact = components;
    exact.resistor_tolerance = 0.0;
    exact.reference_tolerance = 0.0;
    exact.stray_tolerance = 0.0;
    exact.threshold_tolerance = 0.0;
    exact.dial = Wiper::Linear {
        total: 8.2e3,
        end: 33.0,
        tolerance: 0.0,
    };
    let exact = exact.meter();
    let row = reading(
        "x",
        20e-9,
        0.001,
        exact.switch_named("B").expect("B"),
        Seen::Middle(Repeats::once(DialReading::new(30.0))),
    );
    assert_eq!(
        calibrate(&exact, &[row], DATE),
        Err(NotCalibrated::NothingToLearn)
    );
}

#[test]
fn rows_with_mistakes_are_told_each_with_its_place() {
    let components = Components::linear();
    let meter = components.meter();
    let b = meter.switch_named("B").expect("B");
    let middle = Seen::Middle(Repeats::once(DialReading::new(30.0)));
    let good = reading("x", 20e-9, 0.001, b, middle);
    let rows = vec![
        good.clone(),
        ReferenceReading {
            capacitance: Farad::new(-1e-9),
            ..good.clone()
        },
        ReferenceReading {
            standard_uncertainty: Farad::new(0.0),
            ..good.clone()
        },
        ReferenceReading {
            loss: 5.0,
            ..good.clone()
        },
        ReferenceReading {
            seen: Seen::Middle(Repeats::once(DialReading::new(130.0))),
            ..good.clone()
        },
        ReferenceReading {
            seen: Seen::AlwaysDark,
            ..good.clone()
        },
        ReferenceReading {
            capacitance: Farad::new(21e-9),
            ..good.clone()
        },
        ReferenceReading {
            capacitance: Farad::new(f64::NAN),
            ..good
        },
    ];
    let Err(refusal) = calibrate(&meter, &rows, DATE) else {
        panic!("mistakes")
    };
    assert_eq!(
        refusal.to_string(),
        "row 2: a reference part has a capacitance above 0, or 0 F for open terminals\n\
         row 3: the standard uncertainty of a reference part lies above 0 and below its capacitance\n\
         row 4: a loss (tan δ) lies from 0 to 1\n\
         row 5: 130 is not on the dial\n\
         row 6: a reading of the dial is needed: the middle of the dark arc, its edges, or the dimmest place\n\
         row 7: row 1 gives this part other data; one label is one part\n\
         row 8: a reference part has a capacitance above 0, or 0 F for open terminals"
    );
}

/// A slip of a decade, or of the switch, in one row of a good set: found, not failed over.
#[test]
fn a_gross_mistake_is_named() {
    let components = Components::linear();
    let actual = off(&components).meter();
    let good = readings(&actual, &mut Reader::Exact);
    let wrong = good.iter().position(|r| r.label == "r4").expect("r4");
    let named = |rows: &[ReferenceReading]| {
        let report = match calibrate(&components.meter(), rows, DATE) {
            Ok(found) => found.report,
            Err(NotCalibrated::Contradictory(report)) => *report,
            Err(other) => panic!("{other}"),
        };
        let contradiction = report.contradiction.expect("said");
        report.residuals[contradiction.suspects[0]].row
    };
    for factor in [10.0, 1e-3] {
        let mut rows = good.clone();
        rows[wrong].capacitance = rows[wrong].capacitance * factor;
        rows[wrong].standard_uncertainty = rows[wrong].standard_uncertainty * factor;
        assert_eq!(named(&rows), wrong, "a factor of {factor}");
    }
    for label in ["A", "D"] {
        let mut rows = good.clone();
        rows[wrong].switch = actual.switch_named(label).expect("a switch");
        assert_eq!(named(&rows), wrong, "switch {label}");
    }
}
