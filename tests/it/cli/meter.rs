//! `calibrate` and `coverage`.

use std::fs;
use std::path::Path;

use expect_test::expect;

use super::{Folder, run};

fn example_meter() -> String {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("data/example-meter.toml");
    path.to_str().expect("UTF-8").to_owned()
}

#[test]
fn calibrate_reports_and_writes_a_profile_that_reads_back() {
    let folder = Folder::new("calibrate");
    let out = folder.file("calibrated.toml");
    let said = folder.run(
        &[
            "calibrate",
            "--meter",
            &example_meter(),
            "references.csv",
            "--out",
            &out,
        ],
        b"",
    );
    expect![[r#"
        Example meter: 8 numbers read, 4 parts, reduced chi-square 0.48

        constants, with one standard uncertainty
                                     calibrated  ±          by tolerance  ±
        switch A resistance          299.5 Ω     1.6 Ω      300.0 Ω       1.7 Ω
        switch B resistance          1.7965 kΩ   0.0092 kΩ  1.800 kΩ      0.010 kΩ
        switch C resistance          11.014 kΩ   0.059 kΩ   11.000 kΩ     0.064 kΩ
        switch D resistance          67.98 kΩ    0.38 kΩ    68.00 kΩ      0.39 kΩ
        reference capacitance        68.69 nF    0.46 nF    68.00 nF      0.79 nF
        factor of the dial's points  1.0019      0.0047     1.0000        0.0050
        stray capacitance            13.9 pF     2.3 pF     14.0 pF       2.3 pF
        lamp threshold               45.5 mV     4.9 mV     45.0 mV       5.2 mV

        read less predicted; what it would read too much had it been left out
        part            switch  number     divisions  in u  left out
        silver mica     D       middle     -0.06      -0.2  -0.34 %
        blue            C       middle     +0.19      +0.6  +0.95 %
        blue            B       low edge   +0.35      +0.9  +6.40 %
        blue            B       high edge  +0.25      +0.6  +4.62 %
        hundred         B       middle     -0.24      -1.0  -1.26 %
        grey            A       low edge   -0.31      -0.9  -1.45 %
        grey            A       high edge  +0.03      +0.1  +0.14 %
        open terminals  D       middle     -0.18      -0.4

        common standard uncertainty at mid-span
        switch  before  after
        A       1.39 %  0.69 %
        B       1.39 %  0.64 %
        C       1.39 %  0.73 %
        D       1.40 %  0.78 %
        the open terminals give 0 % of what is known of the stray
        next, read a part of 3.3 nF known to 0.5 % on switch D: 0.65 %, 0.60 %, 0.68 %, 0.56 % then
        ! written to DIR/calibrated.toml
        exit 0
    "#]]
    .assert_eq(&said);
    let before = fs::read_to_string(example_meter()).expect("the example");
    let after = fs::read_to_string(&out).expect("written");
    let head = before.split("[calibration]").next().expect("the profile");
    assert!(after.starts_with(head), "the profile is kept byte for byte");
    assert!(folder.run(&["check", &out], b"").contains("no mistakes"));
    let again = [
        "calibrate",
        "--meter",
        &example_meter(),
        "references.csv",
        "--out",
        &out,
    ];
    expect![[r#""#]].assert_eq(
        folder
            .run(&again, b"no\n")
            .split('\n')
            .next_back()
            .unwrap_or_default(),
    );
    assert!(
        folder.run(&again, b"no\n").contains("is kept"),
        "not without agreement"
    );
    assert_eq!(fs::read_to_string(&out).expect("still there"), after);
    assert!(folder.run(&again, b"yes\n").ends_with("exit 0\n"));
}

#[test]
fn references_with_mistakes_are_told_line_by_line() {
    let folder = Folder::new("references");
    let file = folder.file("refs.csv");
    let rows = "capacitance,uncertainty,loss,switch,dial,label\n10 nF,0.5 %,0,C,34,a\n-1 nF,0.5 %,0,C,34,b\n\
                10 nF,0,0,C,34,c\n10 nF,0.5 %,5,C,34,d\n10 nF,0.5 %,0,E,34,e\n10 nF,0.5 %,0,C,134,f\n";
    fs::write(&file, rows).expect("a file");
    let said = folder.run(&["calibrate", "--meter", &example_meter(), &file], b"");
    expect![[r#"
        ! DIR/refs.csv:3: a reference part has a capacitance above 0, or 0 F for open terminals
        ! DIR/refs.csv:4: the standard uncertainty of a reference part lies above 0 and below its capacitance
        ! DIR/refs.csv:5: a loss (tan δ) lies from 0 to 1
        ! DIR/refs.csv:6: Example meter has no switch `E`; known: A, B, C, D
        ! DIR/refs.csv:7: dial is `134`: the dial goes from 0 to 100
        exit 1
    "#]]
    .assert_eq(&said);
    fs::write(&file, "capacitance,switch,dail\n10 nF,C,34\n").expect("a file");
    let said = folder.run(&["calibrate", "--meter", &example_meter(), &file], b"");
    expect![[r#"
        ! DIR/refs.csv:1: no column uncertainty; known here: capacitance, uncertainty, loss, switch, dial, dark_from, dark_to, label
        exit 1
    "#]].assert_eq(&said);
    fs::write(&file, "capacitance,uncertainty,switch,dial\n0 F,,D,0\n").expect("a file");
    let said = folder.run(&["calibrate", "--meter", &example_meter(), &file], b"");
    expect![[r#"
        ! DIR/refs.csv: not calibrated: no switch would measure better by a tenth; these readings say nothing about switch A resistance, switch B resistance, switch C resistance, switch D resistance, reference capacitance, factor of the dial's points, stray capacitance, lamp threshold
        !   read known parts on the switches concerned
        exit 1
    "#]].assert_eq(&said);
}

#[test]
fn calibrate_for_scripts() {
    let said = run(
        &[
            "calibrate",
            "--json",
            "--meter",
            &example_meter(),
            "references.csv",
        ],
        b"",
    );
    let json: serde_json::Value =
        serde_json::from_str(said.lines().next().expect("a line")).expect("JSON");
    let keys: Vec<&str> = json
        .as_object()
        .expect("an object")
        .keys()
        .map(String::as_str)
        .collect();
    assert_eq!(
        keys,
        [
            "observations",
            "reduced_chi_square",
            "parameters",
            "residuals",
            "switches",
            "next_part",
            "robust_changes"
        ]
    );
    assert_eq!(json["observations"], 6);
    assert_eq!(json["residuals"].as_array().expect("a list").len(), 8);
    for switch in json["switches"].as_array().expect("a list") {
        let (before, after) = (&switch["before_percent"], &switch["after_percent"]);
        assert!(after.as_f64() < before.as_f64(), "{switch}");
    }
}

#[test]
fn coverage_for_people_and_scripts() {
    let meter = example_meter();
    expect![[r#"
        Example meter: one standard uncertainty, of one reading or of both edges, whichever is less
        switch  span                to 3 % or better    best    lamp never dark
        A       5.5 nF to 1.08 µF   106 nF to 1.08 µF   0.55 %  -
        B       915 pF to 180 nF    17.7 nF to 180 nF   0.52 %  -
        C       149 pF to 29.3 nF   2.88 nF to 29.3 nF  0.55 %  -
        D       24.3 pF to 4.77 nF  474 pF to 4.77 nF   0.55 %  -

        along each span
        switch  value    nulls at  one reading  both edges  on the part
        A       5.5 nF   0.1       161.03 %     -           4.2 V
        A       13.3 nF  0.8       33.31 %      23.56 %     4.2 V
        A       32 nF    2.5       13.82 %      9.78 %      4.2 V
        A       77.1 nF  6.8       5.75 %       4.08 %      4.2 V
        A       186 nF   16.9      2.46 %       1.77 %      4.0 V
        A       448 nF   41.1      1.10 %       0.84 %      3.2 V
        A       1.08 µF  100.0     1.01 %       -           1.9 V
        B       915 pF   0.1       161.02 %     -           4.2 V
        B       2.21 nF  0.8       33.31 %      23.55 %     4.2 V
        B       5.32 nF  2.6       13.82 %      9.78 %      4.2 V
        B       12.8 nF  6.8       5.75 %       4.07 %      4.2 V
        B       30.9 nF  16.9      2.45 %       1.76 %      4.0 V
        B       74.6 nF  41.1      1.09 %       0.83 %      3.2 V
        B       180 nF   100.0     0.99 %       -           1.9 V
        C       149 pF   0.1       161.03 %     -           4.2 V
        C       359 pF   0.8       33.32 %      23.56 %     4.2 V
        C       866 pF   2.6       13.82 %      9.78 %      4.2 V
        C       2.09 nF  6.8       5.75 %       4.08 %      4.2 V
        C       5.04 nF  17.0      2.46 %       1.77 %      4.0 V
        C       12.1 nF  41.2      1.10 %       0.85 %      3.2 V
        C       29.3 nF  100.0     1.01 %       -           1.9 V
        D       24.3 pF  0.3       161.28 %     -           4.2 V
        D       58.5 pF  1.1       33.53 %      23.87 %     4.2 V
        D       141 pF   2.8       13.91 %      9.91 %      4.2 V
        D       340 pF   7.1       5.78 %       4.13 %      4.2 V
        D       820 pF   17.2      2.47 %       1.79 %      4.0 V
        D       1.98 nF  41.4      1.10 %       0.85 %      3.2 V
        D       4.77 nF  100.0     1.01 %       -           1.9 V
        what would better it most: a larger dial, set and read twice as finely, 42 % less uncertainty
        exit 0
    "#]].assert_eq(&run(
        &["coverage", "--meter", &meter, "--limit", "3 %"],
        b"",
    ));
    expect![[r#"
        {"switches":[{"label":"A","span_from_pF":5499.12142254,"span_to_pF":1080577.35953,"useful_from_pF":106265.490048,"useful_to_pF":1080577.35953,"best_percent":0.549670662646,"never_dark_from":null,"never_dark_to":null},{"label":"B","span_from_pF":915.421490508,"span_to_pF":179880.322885,"useful_from_pF":17658.6519661,"useful_to_pF":179880.322885,"best_percent":0.520751722684,"never_dark_from":null,"never_dark_to":null},{"label":"C","span_from_pF":148.991359678,"span_to_pF":29276.8021767,"useful_from_pF":2880.71650764,"useful_to_pF":29276.8021767,"best_percent":0.553682669828,"never_dark_from":null,"never_dark_to":null},{"label":"D","span_from_pF":24.2588279876,"span_to_pF":4766.85969957,"useful_from_pF":474.109589703,"useful_to_pF":4766.85969957,"best_percent":0.553179471406,"never_dark_from":null,"never_dark_to":null}]}
        exit 0
    "#]].assert_eq(&run(
        &["coverage", "--meter", &meter, "--limit", "3 %", "--json"],
        b"",
    ));
    expect![[r#"
        ! --limit three: found `t` at position 1 while reading the percentage; accepted here: a number
        exit 2
    "#]].assert_eq(&run(
        &["coverage", "--meter", &meter, "--limit", "three"],
        b"",
    ));
}
