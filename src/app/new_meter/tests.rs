//! Whole runs through the questions; single answers are tested beside their reader.

use super::*;
use crate::meter::{Difference, Taper};
use proptest::prelude::*;

fn answered(lines: &[&str]) -> Interview {
    let mut interview = Interview::new(Some(PathBuf::from("meter.toml")));
    for line in lines {
        let taken = interview.take(line);
        assert_eq!(taken, Ok(Answered::Next), "{line:?} at {:?}", interview.at);
    }
    interview
}

fn refused(interview: &mut Interview, line: &str) -> String {
    let refusal = interview.take(line).expect_err("it is refused");
    refusal.to_string()
}

/// Answers all questions from here on with their defaults; returns the text.
fn finished(mut interview: Interview) -> String {
    let end = (0..60).find_map(|_| match interview.take("") {
        Ok(Answered::Write(draft)) => Some(draft.text),
        _ => None,
    });
    end.expect("the questions come to an end")
}

#[test]
fn a_profile_with_measured_points() {
    let interview = answered(&[
        "Shelf \"meter\"",
        "",
        "5",
        "2",
        "",
        "330",
        "0,5",
        "W",
        "2k2",
        "",
        "",
        "",
        "",
        "0",
        "10",
        "0.1",
        "yes",
        "0 22",
        "5: 2k4",
        "10 4,7 k",
        "",
        "",
        "",
        "counter",
        "ideal",
        "inv",
        "",
        "",
        "",
        "",
        "",
        "",
    ]);
    let text = finished(interview);
    expect_test::expect_file!["../../../tests/data/new-meter.toml"].assert_eq(&text);
    let (meter, warnings) = Meter::read(&text).expect("readable");
    assert!(warnings.is_empty());
    assert_eq!(
        meter.difference,
        Difference::Inverting(crate::quantity::Ohm::new(150e3))
    );
}

#[test]
fn answers_are_checked_against_those_before() {
    let mut interview = answered(&["", "", "", "2", "A", "", ""]);
    assert_eq!(
        refused(&mut interview, "A"),
        "label A is out of range; accepted here: a label that position 1 does not have"
    );
    for line in ["B", "", "", "", "", "", "10"] {
        interview.take(line).expect("accepted");
    }
    assert_eq!(
        refused(&mut interview, "10"),
        "high 10 is out of range; accepted here: above the smallest number, 10"
    );
    interview.take("20").expect("accepted");
    assert_eq!(interview.default(), "0.1");
    assert_eq!(
        refused(&mut interview, "11"),
        "division 11 is out of range; accepted here: at most the whole dial, 10"
    );
    for line in ["", "no", "", "", "", "", "", "", "", "", ""] {
        interview.take(line).expect("accepted");
    }
    assert_eq!(interview.default(), "42 mV");
    assert_eq!(
        refused(&mut interview, "4.2"),
        "threshold 4.2 V is out of range; accepted here: below the oscillator's peak, 4.2 V"
    );
}

#[test]
fn points_rise_from_end_to_end() {
    let lines = ["", "", "", "1", "", "", "", "", "", "", "", "", "", "yes"];
    let mut interview = answered(&lines);
    let mut check = |line: &str, expected: &str| {
        assert_eq!(refused(&mut interview, line), expected, "{line:?}");
    };
    check(
        "",
        "found the end after position 0 while reading the points; accepted here: points from 0 to 100, the ends of the dial",
    );
    check(
        "5 22",
        "the point 5 22 is out of range; accepted here: first the low end, 0",
    );
    let mut interview = answered(&[&lines[..], &["0 4.7k", "50 2k4"]].concat());
    let mut check = |line: &str, expected: &str| {
        assert_eq!(refused(&mut interview, line), expected, "{line:?}");
    };
    check(
        "50 1k",
        "the point 50 1k is out of range; accepted here: a number above 50, to 100",
    );
    check(
        "101 1k",
        "the point 101 1k is out of range; accepted here: a number above 50, to 100",
    );
    check(
        "60 2.5k",
        "the point 60 2.5k is out of range; accepted here: resistances that all rise or all fall, after 2.4 kΩ",
    );
    interview.take("100 22").expect("accepted");
    assert_eq!(
        refused(&mut interview, "101 20"),
        "the point 101 20 is out of range; accepted here: an empty line: the high end is there"
    );
    interview.step_back();
    assert_eq!(interview.points().len(), 2, "one point back");
    interview.take("100 20").expect("accepted");
    interview.take("").expect("the end");
    let (meter, _) = Meter::read(&finished(interview)).expect("readable");
    assert!(matches!(meter.dial.taper, Taper::Points { points, .. } if points.len() == 3));
}

#[test]
fn points_go_when_the_dial_is_another_one() {
    let lines = [
        "", "", "", "1", "", "", "", "", "", "", "", "", "", "yes", "0 22", "50 1k", "100 2k", "",
    ];
    let back_to_high = |high: &str| {
        let mut interview = answered(&lines);
        while interview.question().topic != Topic::HasPoints {
            if interview.question().topic == Topic::Points {
                break;
            }
            interview.step_back();
        }
        let points = interview.points.clone();
        while interview.question().topic != Topic::DialHigh {
            interview.step_back();
        }
        interview.points = points;
        for line in [high, "", "yes"] {
            interview.take(line).expect("accepted");
        }
        interview.points().len()
    };
    assert_eq!(back_to_high("100"), 3);
    assert_eq!(back_to_high("60"), 2);
}

#[test]
fn what_is_answered_is_shown_in_short() {
    let mut interview = answered(&["hut meter", "", "", "2"]);
    for _ in 0..24 {
        interview.take("").expect("accepted");
    }
    assert_eq!(
        interview.short(),
        [
            "hut meter",
            "oscillator: frequency 1 kHz, amplitude 4.2 V",
            "switch: A 300 Ω ±1 %; B 1.8 kΩ ±1 %",
            "reference: 68 nF ±2 %, loss 0.0005",
            "dial: low 0, high 100, division 1, resistance 4.7 kΩ, end resistance 20 Ω ±10 %, 270 degrees, clockwise",
            "buffer: gain bandwidth 1 MHz",
            "difference: buffered",
            "terminals: 14 pF ±4 pF",
            "lamp: 42 mV ±20 %",
        ]
    );
}

/// What somebody may type: sound answers in many spellings.
fn typed(
    digits: std::ops::Range<u32>,
    units: &'static [&'static str],
) -> impl Strategy<Value = String> {
    let number = (
        digits,
        prop::sample::select(&["", ".5", ",25", ".123456789"][..]),
    );
    (number, prop::sample::select(units))
        .prop_map(|((whole, part), unit)| format!("{whole}{part}{unit}"))
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(200))]
    #[test]
    fn the_text_reads_back_to_what_was_answered(
        name in "[ -~äµ]{1,30}",
        frequency in typed(100..2000, &["", " Hz", "Hz"]),
        amplitude in typed(1..9, &["", " V"]),
        switches in prop::collection::vec((typed(1..900, &["", "k", " kΩ", "R", " ohm"]), typed(0..99, &["", "%", " %"])), 1..=8),
        reference in (typed(1..900, &["n", " nF", " nF"]), typed(0..20, &["%"])),
        loss in typed(0..1, &[""]),
        high in typed(1..500, &[""]),
        points in prop::option::of(prop::collection::vec(typed(1..500, &["", " Ω"]), 1..20)),
        drive in prop::sample::select(&["buffered", "divider", "inverting", ""][..]),
        sweep in (typed(1..359, &[""]), prop::sample::select(&["", "counterclockwise"][..])),
        bandwidth in prop::option::of(typed(1..90, &["M", " MHz"])),
        stray in (typed(0..900, &["p", " pF"]), typed(0..30, &["p"])),
        threshold in (typed(1..900, &["m", " mV"]), typed(0..50, &["", " %"])),
    ) {
        let trimmed = name.trim().to_owned();
        prop_assume!(!trimmed.is_empty());
        let mut lines = vec![trimmed.clone(), frequency, amplitude, switches.len().to_string()];
        for (resistance, tolerance) in &switches {
            lines.extend([String::new(), resistance.clone(), tolerance.clone()]);
        }
        lines.extend([reference.0, reference.1, loss, String::new(), high.clone(), String::new()]);
        let span: f64 = high.replace(',', ".").parse().expect("a number");
        if let Some(steps) = &points {
            lines.push("yes".to_owned());
            lines.push("0 0".to_owned());
            let count = steps.len() as f64;
            for (index, step) in (1..).zip(steps) {
                let reading = if index == steps.len() { high.clone() } else { (span * index as f64 / count).to_string() };
                let base: f64 = step.trim_end_matches([' ', 'Ω']).replace(',', ".").parse().expect("a number");
                lines.push(format!("{reading} {}", base + 1000.0 * index as f64));
            }
            lines.extend([String::new(), String::new()]);
        } else {
            lines.extend(["no", "", "", ""].map(str::to_owned));
        }
        lines.extend([sweep.0, sweep.1.to_owned(), bandwidth.unwrap_or_else(|| "ideal".to_owned()), drive.to_owned()]);
        if matches!(drive, "divider" | "inverting") {
            lines.push(String::new());
        }
        lines.extend([stray.0, stray.1, threshold.0, threshold.1]);
        let mut interview = Interview::new(Some(PathBuf::from("meter.toml")));
        for line in &lines {
            let taken = interview.take(line);
            prop_assert_eq!(taken, Ok(Answered::Next), "{:?} at {:?}", line, interview.at);
        }
        let answers = interview.clone();
        let text = finished(interview);
        let read = Meter::read(&text);
        let Ok((meter, _)) = read else {
            return Err(TestCaseError::fail(format!("{read:?}\n{text}")));
        };
        let amount = |topic| answers.amount(topic);
        prop_assert_eq!(&meter.name, &trimmed);
        prop_assert_eq!(Some(meter.frequency.get()), amount(Topic::Frequency));
        prop_assert_eq!(Some(meter.amplitude.get()), amount(Topic::Amplitude));
        prop_assert_eq!(meter.switches.len(), switches.len());
        for (switch, (typed, percent)) in meter.switches.iter().zip(&switches) {
            let typed: crate::quantity::Ohm = parse_or_fail(typed);
            prop_assert!((switch.resistance / typed - 1.0).abs() < 1e-11);
            let percent: f64 = percent.trim_end_matches(['%', ' ']).replace(',', ".").parse().expect("a number");
            prop_assert!((switch.tolerance.percent() - percent).abs() < 1e-9);
        }
        prop_assert_eq!(Some(meter.reference.capacitance.get()), amount(Topic::ReferenceCapacitance));
        prop_assert_eq!(Some(meter.reference.loss), amount(Topic::ReferenceLoss));
        prop_assert_eq!(Some(meter.dial.high.get()), Some(span));
        let sign = if sweep.1.is_empty() { 1.0 } else { -1.0 };
        prop_assert_eq!(Some(sign * meter.dial.sweep.0), amount(Topic::Sweep));
        match (&meter.dial.taper, &points) {
            (Taper::Points { points: read, .. }, Some(_)) => {
                let written: Vec<_> = answers.points.iter().map(|p| (p.reading, p.resistance)).collect();
                let read: Vec<_> = read.iter().map(|(x, r)| (x.get(), *r)).collect();
                prop_assert_eq!(read, written);
            }
            (Taper::Linear { total, .. }, None) => {
                prop_assert_eq!(Some(total.get()), amount(Topic::DialTotal));
            }
            other => return Err(TestCaseError::fail(format!("{other:?}"))),
        }
        prop_assert_eq!(meter.gain_bandwidth.map(crate::quantity::Hertz::get), amount(Topic::GainBandwidth));
        prop_assert_eq!(Some(meter.stray.get()), amount(Topic::Stray));
        prop_assert_eq!(Some(meter.stray_tolerance.get()), amount(Topic::StrayTolerance));
        prop_assert_eq!(Some(meter.threshold.get()), amount(Topic::Threshold));
    }

    #[test]
    fn any_lines_leave_questions_that_can_be_answered(lines in prop::collection::vec("(|back|yes|no|[0-9]{1,3}( [0-9]{1,3})?[kMn%]?|.{0,12})", 0..80)) {
        let mut interview = Interview::new(Some(PathBuf::from("meter.toml")));
        for line in &lines {
            if line == "back" {
                interview.step_back();
            } else if let Ok(Answered::Write(draft)) = interview.take(line) {
                prop_assert!(Meter::read(&draft.text).is_ok());
            }
            let is_open = interview.words().contains("{}");
            prop_assert!(!is_open);
            interview.short();
        }
    }
}

fn parse_or_fail<Q: crate::quantity::Quantity>(text: &str) -> Q {
    crate::quantity::parse(text).expect("a quantity")
}
