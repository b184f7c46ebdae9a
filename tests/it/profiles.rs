//! Profiles and trays with mistakes: every one is reported, with its place and what would be accepted.

use nulltray::meter::Meter;
use nulltray::tray::Tray;

const GOOD: &str = include_str!("../data/judge-meter-1.toml");

#[track_caller]
fn check(text: &str, expected: &[&str]) {
    let found: Vec<String> = match Meter::read(text) {
        Ok((_, warnings)) => warnings.iter().map(ToString::to_string).collect(),
        Err(complaints) => complaints.iter().map(ToString::to_string).collect(),
    };
    assert_eq!(found, expected);
}

#[test]
fn a_good_profile_has_no_complaints() {
    check(GOOD, &[]);
    check(include_str!("../data/judge-meter-2.toml"), &[]);
    check(include_str!("../data/judge-meter-3.toml"), &[]);
}

#[test]
fn every_mistake_is_told_in_one_run() {
    let text = GOOD
        .replace("capacitance = \"82 nF\"", "capacitance = \"82 nV\"")
        .replace("loss = 0.0008", "loss = 5")
        .replace("frequency = \"1.37 kHz\"", "frequency = 0")
        .replace("repeatability = 0.15", "repeatabilty = 0.15")
        .replace("label = \"B\"", "label = \"A\"");
    check(
        &text,
        &[
            "4:13: `frequency` is 0; accepted here: a value above zero",
            "11:9: two switches have the label `A`",
            "23:15: `capacitance`: found `V` at position 5 while reading the unit; accepted here: a prefix p n u µ m k M G, the unit F",
            "25:8: `loss` is 5; accepted here: tan δ of a capacitor, 0 to 1",
            "44:1: `repeatability` is missing in [reading]",
            "45:1: unknown key `repeatabilty` in [reading]; did you mean `repeatability`? Known here: repeatability",
        ],
    );
}

#[test]
fn numbers_that_are_none_are_refused() {
    for (bad, message) in [
        (
            "inf",
            "29:12: `division` is not a finite number; accepted here: a number",
        ),
        (
            "nan",
            "29:12: `division` is not a finite number; accepted here: a number",
        ),
        (
            "-1",
            "29:12: `division` is -1; accepted here: a value above zero",
        ),
        (
            "\"one\"",
            "29:12: `division` is a string; accepted here: a number",
        ),
        ("400", "29:12: `division` is 400, more than the whole dial"),
    ] {
        check(
            &GOOD.replace("division = 0.5", &format!("division = {bad}")),
            &[message],
        );
    }
}

#[test]
fn points_and_a_linear_taper_exclude_each_other() {
    let text = GOOD.replace(
        "end_resistance",
        "points = [[0, 33], [50, 8233]]\nend_resistance",
    );
    check(
        &text,
        &[
            "31:10: `points` (line 31) and `resistance` (line 30) are both given; accepted here: either measured points or a linear taper",
        ],
    );
}

#[test]
fn points_must_rise_or_fall_and_cover_the_dial() {
    let points = |list: &str| {
        GOOD.replace(
            "resistance = \"8.2 kΩ\"\nend_resistance = \"33 Ω\"\ntolerance = \"3 %\"",
            list,
        )
    };
    check(&points("points = [[0, 33], [25, 4000], [50, 8000]]"), &[]);
    check(&points("points = [[0, 8000], [50, 33]]"), &[]);
    check(
        &points("points = [[0, 33], [25, 4000], [40, 3000]]"),
        &[
            "30:10: `points` go from 0 to 40; accepted here: points that cover the dial, 0 to 50",
            "30:32: at 40 the resistance is 3 kΩ after 4 kΩ; accepted here: resistances that rise all the way",
        ],
    );
    check(
        &points("points = [[0, 33], [0, 50], [50]]"),
        &["30:29: a point is a pair; accepted here: [reading, \"resistance\"]"],
    );
}

#[test]
fn a_calibration_of_another_profile_is_ignored_with_a_warning() {
    let text = include_str!("../data/judge-meter-3.toml")
        .replace("stray = \"21 pF\"", "stray = \"22 pF\"");
    let (meter, warnings) = Meter::read(&text).expect("a readable profile");
    assert!(meter.calibration.is_none());
    let warning = warnings.first().expect("a warning").to_string();
    assert!(warning.contains("calibrate again"), "{warning}");
}

#[test]
fn syntax_errors_do_not_hide_other_mistakes() {
    let text = GOOD.replace("amplitude = \"3.7 V\"", "amplitude = 3.7 V\nphase = 1");
    let Err(complaints) = Meter::read(&text) else {
        panic!("a mistake")
    };
    assert!(complaints.iter().any(|c| c.line == 5), "{complaints:?}");
    assert!(
        complaints
            .iter()
            .any(|c| c.message.contains("unknown key `phase`")),
        "{complaints:?}"
    );
}

#[test]
fn hostile_sizes_are_refused_quickly() {
    let many = format!(
        "name = \"x\"\n{}",
        "[[switch]]\nlabel = \"A\"\nresistance = 1\n".repeat(100_000)
    );
    let Err(complaints) = Meter::read(&many) else {
        panic!("a mistake")
    };
    assert!(
        complaints
            .iter()
            .any(|c| c.message.contains("accepted here: at most 8")),
        "{complaints:?}"
    );
    let nested = format!("name = {}", "[".repeat(100_000));
    assert!(Meter::read(&nested).is_err());
}

#[test]
fn trays_report_their_mistakes() {
    let text = "name = \"t\"\nrows = 2\ncolumns = 3\n[[compartment]]\nat = \"C1\"\ntakes = { finding = \"insde\" }\n\
                [[compartment]]\nat = \"A1\"\ntakes = { value = \"10 nF .. 1 nF\", family = [\"flim\"] }\n\
                [rules]\nconfidence = 1.5\ntolerance = { film = \"5\" }\n";
    let Err(complaints) = Tray::read(text) else {
        panic!("mistakes")
    };
    let found: Vec<String> = complaints.iter().map(ToString::to_string).collect();
    assert_eq!(
        found,
        [
            "5:6: the tray has no C1; accepted here: A1 to B3",
            "6:21: `finding` is `insde`; did you mean `inside`? Accepted here: inside, outside, undecided, dead",
            "9:19: `value`: the range 10 nF .. 1 nF is out of range; accepted here: a low end below the high end",
            "9:46: `family` is `flim`; did you mean `film`? Accepted here: ceramic, film, paper, mica, glass, electrolytic, tantalum, polymer, edlc, feedthrough, disc1, disc2, disc3, mlcc1, mlcc2, pet, pen, pps, pp, ps, pc, al, ta, wetta",
            "11:14: `confidence` is 1.5; accepted here: 0.5 up to, not including, 1",
            "12:22: `film`: found the end after position 1 while reading the tolerance; accepted here: a percent sign or a unit such as pF",
        ]
    );
}
