//! `decode` and `predict`.

use expect_test::expect;

use super::{check, run};

#[test]
fn decode_for_people() {
    check(
        &["decode", "224J 2A"],
        "",
        expect![[r#"
            224J 2A
              220000 pF = 220 nF = 0.22 µF, plausibility 99.7 %
                limits         209 nF to 231 nF, ±5 %
                voltage        100 V dc
                used           `224` value, `J` tolerance, `2A` voltage
                why            224: two figures and a power of ten, in pF (EIA-198); J: tolerance letter for ±5 %; 2A: a digit and a letter: rated voltage (JIS C 5101-1); looks like pet or pen or pps or pp (93 of 100 such markings)
            exit 0
        "#]],
    );
    check(
        &["decode", "224J | 100V", "X7R"],
        "",
        expect![[r#"
            224J | 100V
              220000 pF = 220 nF = 0.22 µF, plausibility 99 %
                limits         209 nF to 231 nF, ±5 %
                voltage        100 V dc
                used           `224` value, `J` tolerance, `100V` voltage
                why            224: two figures and a power of ten, in pF (EIA-198); J: tolerance letter for ±5 %; 100V: the voltage is printed with its unit; looks like pet or pen or pps or pp (76 of 100 such markings)
              or 220 nF, no tolerance marked, 6.3 V dc, plausibility 0.8 %
                why            224: two figures and a power of ten, in pF (EIA-198); J: voltage letter of chip parts for 6.3 V; 100V: the voltage is printed with its unit; looks like ta or wetta (94 of 100 such markings); 100V: a second rated voltage, which contradicts what was taken

            X7R
              no reading
              or no value at all, plausibility 100 %
                used           `X7R` characteristic
                why            X7R: characteristic from -55 °C, to +125 °C, ±15 % (EIA-198 class II)
                unexplained    X7R
            exit 1
        "#]],
    );
}

#[test]
fn decode_for_scripts() {
    check(
        &["decode", "--json", "224J 2A"],
        "",
        expect![[r#"
            {"marking":"224J 2A","readings":[{"capacitance_pF":220000.0,"low_pF":209000.0,"high_pF":231000.0,"tolerance":"±5 %","rated_voltage_V":100.0,"voltage_kind":"dc","rated_voltage_ac_V":null,"family":null,"dielectric":null,"temperature_characteristic":null,"safety_class":null,"date":null,"sections_pF":null,"plausibility":0.997386812456,"used":[{"text":"224","as":"value"},{"text":"J","as":"tolerance"},{"text":"2A","as":"voltage"}],"unexplained":[],"why":["224: two figures and a power of ten, in pF (EIA-198)","J: tolerance letter for ±5 %","2A: a digit and a letter: rated voltage (JIS C 5101-1)","looks like pet or pen or pps or pp (93 of 100 such markings)"]}],"unexplained":[],"omitted":0}
            exit 0
        "#]],
    );
    check(
        &["decode", "--json", "GMV", "4n7 GMV"],
        "",
        expect![[r#"
            [{"marking":"GMV","readings":[],"unexplained":["GMV"],"omitted":0},{"marking":"4n7 GMV","readings":[{"capacitance_pF":4700.0,"low_pF":4700.0,"high_pF":null,"tolerance":"GMV","rated_voltage_V":null,"voltage_kind":null,"rated_voltage_ac_V":null,"family":null,"dielectric":null,"temperature_characteristic":null,"safety_class":null,"date":null,"sections_pF":null,"plausibility":0.999987679326,"used":[{"text":"4n7","as":"value"},{"text":"GMV","as":"tolerance"}],"unexplained":[],"why":["4n7: n with figures: nF (IEC 60062)","GMV: the tolerance is written out","looks like disc2 or disc3 or mlcc2 (95 of 100 such markings)"]}],"unexplained":[],"omitted":0}]
            exit 1
        "#]],
    );
    check(
        &["decode", "--json", "--family", "pp", "-"],
        "104K\r\n\n473",
        expect![[r#"
            {"marking":"104K","readings":[{"capacitance_pF":100000.0,"low_pF":90000.0,"high_pF":110000.0,"tolerance":"±10 %","rated_voltage_V":null,"voltage_kind":null,"rated_voltage_ac_V":null,"family":"film","dielectric":"pp","temperature_characteristic":null,"safety_class":null,"date":null,"sections_pF":null,"plausibility":0.999334739691,"used":[{"text":"104","as":"value"},{"text":"K","as":"tolerance"}],"unexplained":[],"why":["104: two figures and a power of ten, in pF (EIA-198)","K: tolerance letter for ±10 %"]}],"unexplained":[],"omitted":0}
            {"marking":"","readings":[],"unexplained":[],"omitted":0}
            {"marking":"473","readings":[{"capacitance_pF":47000.0,"low_pF":null,"high_pF":null,"tolerance":null,"rated_voltage_V":null,"voltage_kind":null,"rated_voltage_ac_V":null,"family":"film","dielectric":"pp","temperature_characteristic":null,"safety_class":null,"date":null,"sections_pF":null,"plausibility":0.997655391063,"used":[{"text":"473","as":"value"}],"unexplained":[],"why":["473: two figures and a power of ten, in pF (EIA-198)"]}],"unexplained":[],"omitted":0}
            exit 1
        "#]],
    );
}

#[test]
fn decode_takes_any_bytes() {
    let mut input = b"224J \xff\x1b[31m\n".to_vec();
    input.extend([b'9'; 5000]);
    input.extend(b"\n104K\n");
    let output = run(&["decode", "-"], &input);
    assert!(!output.contains('\u{1b}'), "{output}");
    assert!(output.contains('\u{fffd}'), "{output}");
    assert!(
        output.contains("! line 2 is longer than 4096 bytes: the rest of it is not read\n"),
        "{output}"
    );
    assert!(output.ends_with("exit 1\n"));
}

#[test]
fn predict() {
    check(
        &["predict", "--meter", "meter.toml", "473K", "--family", "pp"],
        "",
        expect![[r#"
            473K
              47 nF ±10 %, plausibility 100 %
                switch mid, dial 6.25
                dark from 6.09 to 6.41
                good parts from 5.69 to 6.81
                loss 0.0003 assumed, 1.16 V peak on the part
                one reading there is good to ±2.12 % (k = 2)
            exit 0
        "#]],
    );
    check(
        &["predict", "--meter", "meter.toml", "--json", "473K"],
        "",
        expect![[r#"
            {"marking":"473K","readings":[{"capacitance_pF":47000.0,"loss":0.0,"plausibility":0.999519231284,"switch":"mid","balance":6.24385737936,"beyond":null,"residual_V":0.000319540406246,"goes_dark":true,"dark_from":6.0893896595,"dark_to":6.40580348193,"expected":6.24759657072,"band_from":5.68539975907,"band_to":6.80998186279,"band_cut":false,"part_voltage_V":1.16282563825,"uncertainty_percent":1.06026816465,"warnings":[]}]}
            exit 0
        "#]],
    );
    check(
        &[
            "predict",
            "--meter",
            "meter.toml",
            "--json",
            "--switch",
            "low",
            "--loss",
            "2 %",
            "--capacitance",
            "2n2",
        ],
        "",
        expect![[r#"
            {"marking":null,"readings":[{"capacitance_pF":2200.0,"loss":0.02,"plausibility":null,"switch":"low","balance":0.0,"beyond":"low","residual_V":0.0760471917035,"goes_dark":false,"dark_from":null,"dark_to":null,"expected":null,"band_from":null,"band_to":null,"band_cut":null,"part_voltage_V":2.89955536487,"uncertainty_percent":null,"warnings":["nulls beyond the low stop; take switch high"]}]}
            exit 0
        "#]],
    );
    check(
        &[
            "predict",
            "--meter",
            "meter.toml",
            "--switch",
            "hihg",
            "473K",
        ],
        "",
        expect![[r#"
            ! Hut meter has no switch `hihg`; did you mean `high`? Known: low, mid, high
            exit 2
        "#]],
    );
    check(
        &["predict", "--meter", "meter.toml", "--loss", "-1", "473K"],
        "",
        expect![[r#"
            ! error: unexpected argument '-1' found
            ! 
            !   tip: to pass '-1' as a value, use '-- -1'
            ! 
            ! Usage: nulltray predict [OPTIONS] [MARKING]
            ! 
            ! For more information, try '--help'.
            exit 2
        "#]],
    );
    check(
        &["predict", "--meter", "meter.toml", "--capacitance", "0 F"],
        "",
        expect![[r#"
            ! --capacitance 0 F: a capacitance above zero is needed
            exit 2
        "#]],
    );
    check(
        &["predict", "--meter", "absent.toml", "473K"],
        "",
        expect![[r#"
            ! cannot read absent.toml: there is no such file
            exit 3
        "#]],
    );
    check(
        &["predict", "--meter", ".", "473K"],
        "",
        expect![[r#"
        ! cannot read .: it is a folder
        exit 3
    "#]],
    );
}

#[test]
fn marks_for_people_and_scripts() {
    expect![[r#"
        marking                       of a hundred  reads back    system
        472J630                       29            first, 98 %   two figures and a power of ten, in pF (EIA-198)
        2J472J                        16            first, 99 %   two figures and a power of ten, in pF (EIA-198)
        472J630V                      13            first, 100 %  two figures and a power of ten, in pF (EIA-198)
        4n7J630                       8             first, 99 %   n with figures: nF (IEC 60062)
        .0047J630                     7             first, 99 %   below 1 with a point and no unit: µF
        4700J630                      6             first, 73 %   a plain number of pF, as on older film, mica and ceramic parts
        0.0047 µF ±5 % 630V           4             first, 100 %  the unit µF is printed
        4700 pF ±5 % 630V             3             first, 99 %   the unit pF is printed
        4n7J630V                      3             first, 100 %  n with figures: nF (IEC 60062)
        .0047J630V                    3             first, 100 %  below 1 with a point and no unit: µF
        4700J630V                     2             first, 70 %   a plain number of pF, as on older film, mica and ceramic parts
        4.7 nF ±5 % 630V              2             first, 100 %  the unit nF is printed
        4K7J630                       2             first, 98 %   K between figures: thousands of pF, nF
        yellow violet red green blue  1             first, 100 %  five bands on polyester, away from the leads first
        4K7J630V                      1             first, 98 %   K between figures: thousands of pF, nF
        exit 0
    "#]].assert_eq(&run(
        &["marks", "4n7", "--tolerance", "5 %", "--voltage", "630 V"],
        b"",
    ));
    expect![[r#"
        {"capacitance_pF":1000.0,"tolerance":"±1 %","family":"mica","rated_voltage_V":null,"marks":[{"marking":"1000F","system":"a plain number of pF, as on older film, mica and ceramic parts","share":0.386597938144,"reads_back":0.681509035499,"rank":1},{"marking":"102F","system":"two figures and a power of ten, in pF (EIA-198)","share":0.322164948454,"reads_back":0.624933793072,"rank":1},{"marking":"1000 pF ±1 %","system":"the unit pF is printed","share":0.193298969072,"reads_back":0.991847917689,"rank":1},{"marking":"1 nF ±1 %","system":"the unit nF is printed","share":0.0386597938144,"reads_back":0.999543562277,"rank":1},{"marking":"black brown black black brown red","system":"moulded mica, six dots, upper row first","share":0.0386597938144,"reads_back":1.0,"rank":1},{"marking":"0.001 µF ±1 %","system":"the unit µF is printed","share":0.0128865979381,"reads_back":0.999982494974,"rank":1},{"marking":".001F","system":"below 1 with a point and no unit: µF","share":0.00773195876289,"reads_back":0.998786228237,"rank":1}]}
        exit 0
    "#]].assert_eq(&run(
        &[
            "marks",
            "--json",
            "1 nF",
            "--family",
            "mica",
            "--tolerance",
            "1 %",
        ],
        b"",
    ));
    expect![[r#"
        ! 0 F is no capacitance of a part
        exit 2
    "#]]
    .assert_eq(&run(&["marks", "0 F"], b""));
    expect![[r#"
        ! QUANTITY 4x7: found `x7` at position 2 while reading capacitance; accepted here: a prefix p n u µ m k M G, the unit F
        exit 2
    "#]].assert_eq(&run(&["marks", "4x7"], b""));
}
