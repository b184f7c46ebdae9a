//! The commands as other programs see them: files in; exact output, error stream and exit code out.

#![expect(
    clippy::needless_raw_string_hashes,
    reason = "the expectations are written by UPDATE_EXPECT=1"
)]

use std::fs;
use std::io::Write;
use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};

use chrono::DateTime;
use expect_test::{Expect, expect};
use nulltray::app::{Outcome, Raw, Record, RecordKind};
use nulltray::log::Log;

/// Runs the program in tests/data with no settings of the person who tests.
fn run(arguments: &[&str], input: &[u8]) -> String {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data");
    let mut child = Command::new(env!("CARGO_BIN_EXE_nulltray"))
        .args(arguments)
        .current_dir(folder)
        .env_clear()
        .env("HOME", "/nonexistent")
        .env("TZ", "UTC")
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the program starts");
    let mut stdin = child.stdin.take().expect("a pipe");
    let input = input.to_vec();
    let feeder = std::thread::spawn(move || {
        // The program may end before it has read everything.
        let _ = stdin.write_all(&input);
    });
    let output = child.wait_with_output().expect("the program ends");
    feeder.join().expect("the input was handed over");
    let code = output.status.code().expect("an exit code");
    format!(
        "{}{}exit {code}\n",
        String::from_utf8_lossy(&output.stdout),
        marked(&String::from_utf8_lossy(&output.stderr))
    )
}

/// Marks the lines of the error stream.
fn marked(text: &str) -> String {
    text.lines().flat_map(|line| ["! ", line, "\n"]).collect()
}

#[track_caller]
#[expect(
    clippy::needless_pass_by_value,
    reason = "reads as a literal at the call"
)]
fn check(arguments: &[&str], input: &str, expected: Expect) {
    expected.assert_eq(&run(arguments, input.as_bytes()));
}

/// A folder for one test, removed at its end.
struct Folder(PathBuf);

impl Folder {
    fn new(name: &str) -> Self {
        let path = std::env::temp_dir().join(format!("nulltray-cli-{}-{name}", std::process::id()));
        fs::create_dir_all(&path).expect("a temporary folder");
        Self(path)
    }

    fn file(&self, name: &str) -> String {
        self.0.join(name).to_str().expect("UTF-8").to_owned()
    }

    /// Runs the program and shows the folder's own name as `DIR`.
    fn run(&self, arguments: &[&str], input: &[u8]) -> String {
        run(arguments, input).replace(self.0.to_str().expect("UTF-8"), "DIR")
    }
}

impl Drop for Folder {
    fn drop(&mut self) {
        let _ = fs::remove_dir_all(&self.0);
    }
}

#[test]
fn the_command_line() {
    check(
        &["--version"],
        "",
        expect![[r#"
        nulltray 0.1.0
        exit 0
    "#]],
    );
    check(
        &["jduge"],
        "",
        expect![[r#"
        ! error: unrecognized subcommand 'jduge'
        ! 
        !   tip: a similar subcommand exists: 'judge'
        ! 
        ! Usage: nulltray [OPTIONS] [COMMAND]
        ! 
        ! For more information, try '--help'.
        exit 2
    "#]],
    );
    check(
        &["--ascii", "decode", "224J"],
        "",
        expect![[r#"
        ! --units, --ascii, --bell and --demo belong to the bench
        !   leave them out, or leave the command out
        exit 2
    "#]],
    );
    check(
        &["decode", "224J", "-"],
        "",
        expect![[r#"
        ! - reads the markings from standard input: no others beside it
        exit 2
    "#]],
    );
    check(
        &["decode", "--family", "flim", "224J"],
        "",
        expect![[r#"
            ! no family is called `flim`; did you mean `film`? Known: ceramic, film, paper, mica, glass, electrolytic, tantalum, polymer, edlc, feedthrough, disc1, disc2, disc3, mlcc1, mlcc2, pet, pen, pps, pp, ps, pc, al, ta, wetta
            exit 2
        "#]],
    );
    let script = run(&["completions", "bash"], b"");
    assert!(script.starts_with("_nulltray()") && script.ends_with("exit 0\n"));
}

#[test]
fn decode_for_people() {
    check(
        &["decode", "224J 2A"],
        "",
        expect![[r#"
            224J 2A
              220000 pF = 220 nF = 0.22 µF, plausibility 99.9 %
                limits         209 nF to 231 nF, ±5 %
                voltage        100 V dc
                used           `224` value, `J` tolerance, `2A` voltage
                why            224: two figures and a power of ten, in pF (EIA-198); J: tolerance letter for ±5 %; 2A: a digit and a letter: rated voltage (JIS C 5101-1)
            exit 0
        "#]],
    );
    check(
        &["decode", "224J | 100V", "X7R"],
        "",
        expect![[r#"
            224J | 100V
              220000 pF = 220 nF = 0.22 µF, plausibility 99.5 %
                limits         209 nF to 231 nF, ±5 %
                voltage        100 V dc
                used           `224` value, `J` tolerance, `100V` voltage
                why            224: two figures and a power of ten, in pF (EIA-198); J: tolerance letter for ±5 %; 100V: the voltage is printed with its unit
              or 220 nF, no tolerance marked, 6.3 V dc, plausibility 0.3 %
                why            224: two figures and a power of ten, in pF (EIA-198); J: voltage letter of chip parts for 6.3 V; 100V: the voltage is printed with its unit; 100V: a second rated voltage, which contradicts what was taken

            X7R
              no reading
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
            {"marking":"224J 2A","readings":[{"capacitance_pF":220000.0,"low_pF":209000.0,"high_pF":231000.0,"tolerance":"±5 %","rated_voltage_V":100.0,"voltage_kind":"dc","rated_voltage_ac_V":null,"family":null,"dielectric":null,"temperature_characteristic":null,"safety_class":null,"date":null,"sections_pF":null,"plausibility":0.9993661504,"used":[{"text":"224","as":"value"},{"text":"J","as":"tolerance"},{"text":"2A","as":"voltage"}],"unexplained":[],"why":["224: two figures and a power of ten, in pF (EIA-198)","J: tolerance letter for ±5 %","2A: a digit and a letter: rated voltage (JIS C 5101-1)"]}],"unexplained":[],"omitted":0}
            exit 0
        "#]],
    );
    check(
        &["decode", "--json", "GMV", "4n7 GMV"],
        "",
        expect![[r#"
            [{"marking":"GMV","readings":[],"unexplained":["GMV"],"omitted":0},{"marking":"4n7 GMV","readings":[{"capacitance_pF":4700.0,"low_pF":4700.0,"high_pF":null,"tolerance":"GMV","rated_voltage_V":null,"voltage_kind":null,"rated_voltage_ac_V":null,"family":null,"dielectric":null,"temperature_characteristic":null,"safety_class":null,"date":null,"sections_pF":null,"plausibility":0.999955931762,"used":[{"text":"4n7","as":"value"},{"text":"GMV","as":"tolerance"}],"unexplained":[],"why":["4n7: n with figures: nF (IEC 60062)","GMV: the tolerance is written out"]}],"unexplained":[],"omitted":0}]
            exit 1
        "#]],
    );
    check(
        &["decode", "--json", "--family", "pp", "-"],
        "104K\r\n\n473",
        expect![[r#"
            {"marking":"104K","readings":[{"capacitance_pF":100000.0,"low_pF":90000.0,"high_pF":110000.0,"tolerance":"±10 %","rated_voltage_V":null,"voltage_kind":null,"rated_voltage_ac_V":null,"family":"film","dielectric":"pp","temperature_characteristic":null,"safety_class":null,"date":null,"sections_pF":null,"plausibility":0.999208923123,"used":[{"text":"104","as":"value"},{"text":"K","as":"tolerance"}],"unexplained":[],"why":["104: two figures and a power of ten, in pF (EIA-198)","K: tolerance letter for ±10 %"]}],"unexplained":[],"omitted":0}
            {"marking":"","readings":[],"unexplained":[],"omitted":0}
            {"marking":"473","readings":[{"capacitance_pF":47000.0,"low_pF":null,"high_pF":null,"tolerance":null,"rated_voltage_V":null,"voltage_kind":null,"rated_voltage_ac_V":null,"family":"film","dielectric":"pp","temperature_characteristic":null,"safety_class":null,"date":null,"sections_pF":null,"plausibility":0.997446418425,"used":[{"text":"473","as":"value"}],"unexplained":[],"why":["473: two figures and a power of ten, in pF (EIA-198)"]}],"unexplained":[],"omitted":0}
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
              47 nF ±10 %, plausibility 99.9 %
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
            {"marking":"473K","readings":[{"capacitance_pF":47000.0,"loss":0.0,"plausibility":0.999517868725,"switch":"mid","balance":6.24385737936,"beyond":null,"residual_V":0.000319540406246,"goes_dark":true,"dark_from":6.0893896595,"dark_to":6.40580348193,"expected":6.24759657072,"band_from":5.68539975907,"band_to":6.80998186279,"band_cut":false,"part_voltage_V":1.16282563825,"uncertainty_percent":1.06026816465,"warnings":[]}]}
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

const ROWS: &str = "\
shelf,switch,marking,dial,dark_from,dark_to,lamp,family,temperature,finding,note
7,mid,473K,6.3,,,,pet,19,old,one reading
7,mid,473K,6.2/6.3/6.2,,,,pet,,old,repeats
8,mid,473K,,6.05,6.35/6.4,,pet,,old,both edges
8,mid,473K,1,6.35,6.05,,pet,,old,edges win over the dial
8,high,4n7,,9.4,stop,,,,old,a cut arc
8,mid,473K,,0,10,,pet,,old,from stop to stop
8,mid,473K,6.25,,,dark,pet,,old,parked
8,mid,473K,6.25,,,lit,pet,,old,parked
8,mid,473K,,,,never,pet,,old,never dark
8,mid,473K,6.3,,,never,pet,,old,dimmest there
8,mid,473K,,,,always,pet,,old,always dark
8,low,473K,6.3,,,,pet,,old,the wrong switch
9,mid,-20+80%,\"4,2\",,,,,,old,=1+1
";

#[test]
fn judge_writes_what_it_read_and_what_it_found() {
    check(
        &["judge", "--meter", "meter.toml", "-"],
        ROWS,
        expect![[r#"
            shelf,switch,marking,dial,dark_from,dark_to,lamp,family,temperature,note,nominal_pF,low_pF,high_pF,limits_from,capacitance_pF,uncertainty_pF,loss,loss_below,deviation_percent,probability_inside,probability_flat,reading_probability,finding,compartment,remark
            7,mid,473K,6.3,,,,pet,19,one reading,47000,42300,51700,marked,47438.6261606,500.711983082,,,0.933247150223,1,1,0.999997059182,inside,,
            7,mid,473K,6.2/6.3/6.2,,,,pet,,repeats,47000,42300,51700,marked,46881.3793109,453.62739297,,,-0.252384444797,1,1,0.999997115489,inside,,
            8,mid,473K,,6.05,6.35/6.4,,pet,,both edges,47000,42300,51700,marked,46704.2605727,423.810135451,,0.0235517471152,-0.629232824092,1,1,0.999997104408,inside,,
            8,mid,473K,1,6.35,6.05,,pet,,edges win over the dial,47000,42300,51700,marked,46604.4534306,431.509798331,,0.0249941613201,-0.841588445576,1,1,0.999997085994,inside,,
            8,high,4n7,,9.4,stop,,,,a cut arc,4700,3760,5640,assumed,4240.67337579,46.3431163837,,,-9.77290689808,1,1,0.999972834406,inside,,no tolerance marked: ±20 % assumed
            8,mid,473K,,0,10,,pet,,from stop to stop,47000,42300,51700,marked,,,,,,,,0.999494267006,undecided,,"lamp, oscillator or wiring: check that the lamp lights with open terminals"
            8,mid,473K,6.25,,,dark,pet,,parked,47000,42300,51700,marked,,,,,,0.999999999998,0.999999999985,0.999996960596,inside,,between 44.8 nF and 49.5 nF
            8,mid,473K,6.25,,,lit,pet,,parked,47000,42300,51700,marked,,,,,,0.695523522277,,0.999232221413,undecided,,not between 46.8 nF and 47.3 nF; next: turn the dial and read the middle of the dark arc
            8,mid,473K,,,,never,pet,,never dark,47000,42300,51700,marked,,,,,,,,0.999494267006,undecided,,"never dark: find the dimmest place, then try the next switch"
            8,mid,473K,6.3,,,never,pet,,dimmest there,47000,42300,51700,marked,47484.7263237,1034.15502942,,,1.03133260372,0.999996497381,0.999976829734,0.999996860692,inside,,"loss at least 0.029, above its limit"
            8,mid,473K,,,,always,pet,,always dark,47000,42300,51700,marked,,,,,,,,0.999494267006,undecided,,"lamp, oscillator or wiring: check that the lamp lights with open terminals"
            8,low,473K,6.3,,,,pet,,the wrong switch,47000,42300,51700,marked,771014.926868,8136.52127314,,,1540.45729121,0,0,0,undecided,,switch mid?; far from every reading of this marking
            9,mid,'-20+80%,"4,2",,,,,,'=1+1,,,,,30573.8976139,388.896419754,,,,,,,undecided,,nothing in the marking is a value: measured only
            exit 0
        "#]],
    );
    check(
        &[
            "judge",
            "--meter",
            "meter.toml",
            "--tray",
            "tray.toml",
            "--json",
            "-",
        ],
        ROWS,
        expect![[r#"
            [
            {"shelf":"7","switch":"mid","marking":"473K","dial":6.3,"dark_from":null,"dark_to":null,"lamp":null,"family":"pet","temperature":19,"note":"one reading","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":47438.6261606,"uncertainty_pF":500.711983082,"loss":null,"loss_below":null,"deviation_percent":0.933247150223,"probability_inside":0.99995882329,"probability_flat":0.999932530442,"reading_probability":0.999997059182,"finding":"inside","compartment":"A1","remark":"limits by house rule, marked tolerance ±10 %"},
            {"shelf":"7","switch":"mid","marking":"473K","dial":"6.2/6.3/6.2","dark_from":null,"dark_to":null,"lamp":null,"family":"pet","temperature":null,"note":"repeats","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":46881.3793109,"uncertainty_pF":453.62739297,"loss":null,"loss_below":null,"deviation_percent":-0.252384444797,"probability_inside":0.999999719525,"probability_flat":0.999999538646,"reading_probability":0.999997115489,"finding":"inside","compartment":"A1","remark":"limits by house rule, marked tolerance ±10 %"},
            {"shelf":"8","switch":"mid","marking":"473K","dial":null,"dark_from":6.05,"dark_to":"6.35/6.4","lamp":null,"family":"pet","temperature":null,"note":"both edges","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":46704.2605727,"uncertainty_pF":423.810135451,"loss":null,"loss_below":0.0235517471152,"deviation_percent":-0.629232824092,"probability_inside":0.999999616927,"probability_flat":0.999999373467,"reading_probability":0.999997104408,"finding":"inside","compartment":"A1","remark":"limits by house rule, marked tolerance ±10 %"},
            {"shelf":"8","switch":"mid","marking":"473K","dial":1,"dark_from":6.35,"dark_to":6.05,"lamp":null,"family":"pet","temperature":null,"note":"edges win over the dial","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":46604.4534306,"uncertainty_pF":431.509798331,"loss":null,"loss_below":0.0249941613201,"deviation_percent":-0.841588445576,"probability_inside":0.9999981845,"probability_flat":0.999997041452,"reading_probability":0.999997085994,"finding":"inside","compartment":"A1","remark":"limits by house rule, marked tolerance ±10 %"},
            {"shelf":"8","switch":"high","marking":"4n7","dial":null,"dark_from":9.4,"dark_to":"stop","lamp":null,"family":null,"temperature":null,"note":"a cut arc","nominal_pF":4700,"low_pF":3760,"high_pF":5640,"limits_from":"house","capacitance_pF":4240.67337579,"uncertainty_pF":46.3431163837,"loss":null,"loss_below":null,"deviation_percent":-9.77290689808,"probability_inside":1,"probability_flat":1,"reading_probability":0.999972834406,"finding":"inside","compartment":"A2","remark":"limits by house rule, usual tolerance ±20 %"},
            {"shelf":"8","switch":"mid","marking":"473K","dial":null,"dark_from":0,"dark_to":10,"lamp":null,"family":"pet","temperature":null,"note":"from stop to stop","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":null,"uncertainty_pF":null,"loss":null,"loss_below":null,"deviation_percent":null,"probability_inside":null,"probability_flat":null,"reading_probability":0.999494267006,"finding":"undecided","compartment":"no place","remark":"lamp, oscillator or wiring: check that the lamp lights with open terminals; limits by house rule, marked tolerance ±10 %; nearest is A1 film, inside, but for its finding"},
            {"shelf":"8","switch":"mid","marking":"473K","dial":6.25,"dark_from":null,"dark_to":null,"lamp":"dark","family":"pet","temperature":null,"note":"parked","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":null,"uncertainty_pF":null,"loss":null,"loss_below":null,"deviation_percent":null,"probability_inside":0.997557577563,"probability_flat":0.996011324226,"reading_probability":0.999996960596,"finding":"inside","compartment":"A1","remark":"limits by house rule, marked tolerance ±10 %; between 44.8 nF and 49.5 nF"},
            {"shelf":"8","switch":"mid","marking":"473K","dial":6.25,"dark_from":null,"dark_to":null,"lamp":"lit","family":"pet","temperature":null,"note":"parked","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":null,"uncertainty_pF":null,"loss":null,"loss_below":null,"deviation_percent":null,"probability_inside":0.338285986711,"probability_flat":null,"reading_probability":0.999232221413,"finding":"undecided","compartment":"no place","remark":"limits by house rule, marked tolerance ±10 %; not between 46.8 nF and 47.3 nF; next: turn the dial and read the middle of the dark arc; nearest is A1 film, inside, but for its finding"},
            {"shelf":"8","switch":"mid","marking":"473K","dial":null,"dark_from":null,"dark_to":null,"lamp":"never","family":"pet","temperature":null,"note":"never dark","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":null,"uncertainty_pF":null,"loss":null,"loss_below":null,"deviation_percent":null,"probability_inside":null,"probability_flat":null,"reading_probability":0.999494267006,"finding":"undecided","compartment":"no place","remark":"never dark: find the dimmest place, then try the next switch; limits by house rule, marked tolerance ±10 %; nearest is A1 film, inside, but for its finding"},
            {"shelf":"8","switch":"mid","marking":"473K","dial":6.3,"dark_from":null,"dark_to":null,"lamp":"never","family":"pet","temperature":null,"note":"dimmest there","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":47484.7263237,"uncertainty_pF":1034.15502942,"loss":null,"loss_below":null,"deviation_percent":1.03133260372,"probability_inside":0.977698085971,"probability_flat":0.961296759756,"reading_probability":0.999996860692,"finding":"inside","compartment":"A1","remark":"limits by house rule, marked tolerance ±10 %; loss at least 0.029, above its limit"},
            {"shelf":"8","switch":"mid","marking":"473K","dial":null,"dark_from":null,"dark_to":null,"lamp":"always","family":"pet","temperature":null,"note":"always dark","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":null,"uncertainty_pF":null,"loss":null,"loss_below":null,"deviation_percent":null,"probability_inside":null,"probability_flat":null,"reading_probability":0.999494267006,"finding":"undecided","compartment":"no place","remark":"lamp, oscillator or wiring: check that the lamp lights with open terminals; limits by house rule, marked tolerance ±10 %; nearest is A1 film, inside, but for its finding"},
            {"shelf":"8","switch":"low","marking":"473K","dial":6.3,"dark_from":null,"dark_to":null,"lamp":null,"family":"pet","temperature":null,"note":"the wrong switch","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":771014.926868,"uncertainty_pF":8136.52127314,"loss":null,"loss_below":null,"deviation_percent":1540.45729121,"probability_inside":0,"probability_flat":0,"reading_probability":0,"finding":"undecided","compartment":"no place","remark":"switch mid?; limits by house rule, marked tolerance ±10 %; far from every reading of this marking; nearest is A1 film, inside, but for its finding"},
            {"shelf":"9","switch":"mid","marking":"-20+80%","dial":4.2,"dark_from":null,"dark_to":null,"lamp":null,"family":null,"temperature":null,"note":"=1+1","nominal_pF":null,"low_pF":null,"high_pF":null,"limits_from":null,"capacitance_pF":30573.8976139,"uncertainty_pF":388.896419754,"loss":null,"loss_below":null,"deviation_percent":null,"probability_inside":null,"probability_flat":null,"reading_probability":null,"finding":"undecided","compartment":"no place","remark":"nothing in the marking is a value: measured only; nearest is A2 inside, but for its finding"}
            ]
            exit 0
        "#]],
    );
}

#[test]
fn judge_can_read_what_it_wrote() {
    let once = run(&["judge", "--meter", "meter.toml", "-"], ROWS.as_bytes());
    let (table, rest) = once.rsplit_once("exit").expect("an exit line");
    assert_eq!(rest, " 0\n");
    assert_eq!(
        run(&["judge", "--meter", "meter.toml", "-"], table.as_bytes()),
        once
    );
}

#[test]
fn judge_keeps_the_place_of_rows_it_cannot_read() {
    let rows = "\u{feff}marking,switch,dial,dark_from,dark_to,lamp,family
104K,mid,4.1,,,,
,mid,4.1,,,,
104K,,4.1,,,,
104K,mdi,4.1,,,,
104K,mid,,,,,
104K,mid,12,,,,
104K,mid,4.1/x,,,,
104K,mid,,4.1,,,
104K,mid,4.1,,,drak,
104K,mid,,,,lit,
104K,mid,,1,2,never,
104K,mid,4.1,,,,disk
104K,mid,4.1,,,,,,too many
";
    check(
        &["judge", "--meter", "meter.toml", "-"],
        rows,
        expect![[r#"
            marking,switch,dial,dark_from,dark_to,lamp,family,nominal_pF,low_pF,high_pF,limits_from,capacitance_pF,uncertainty_pF,loss,loss_below,deviation_percent,probability_inside,probability_flat,reading_probability,finding,compartment,remark
            104K,mid,4.1,,,,,100000,90000,110000,marked,29824.4968032,385.538487671,,,-70.1755031968,0,0,0.998514399915,outside,,"below the lower limit, 90 nF; far from every reading of this marking"
            ,mid,4.1,,,,,,,,,,,,,,,,,unread,,no marking
            104K,,4.1,,,,,,,,,,,,,,,,,unread,,no switch
            104K,mdi,4.1,,,,,,,,,,,,,,,,,unread,,"Hut meter has no switch `mdi`; known: low, mid, high"
            104K,mid,,,,,,,,,,,,,,,,,,unread,,"no reading: none of dial, dark_from and dark_to, lamp"
            104K,mid,12,,,,,,,,,,,,,,,,,unread,,dial is `12`: the dial goes from 0 to 10
            104K,mid,4.1/x,,,,,,,,,,,,,,,,,unread,,dial is `x`: found `x` at position 1 while reading the number; accepted here: a number
            104K,mid,,4.1,,,,,,,,,,,,,,,,unread,,"dark_from without dark_to: give the other dark edge, or `stop` where a stop cuts the arc"
            104K,mid,4.1,,,drak,,,,,,,,,,,,,,unread,,"lamp is `drak`; accepted: never, always, dark, lit"
            104K,mid,,,,lit,,,,,,,,,,,,,,unread,,"the lamp was lit, but dial does not say where the dial was parked"
            104K,mid,,1,2,never,,,,,,,,,,,,,,unread,,"the lamp was never dark, yet dark edges are given"
            104K,mid,4.1,,,,disk,,,,,,,,,,,,,unread,,"no family is called `disk`; did you mean `disc3`? Known: ceramic, film, paper, mica, glass, electrolytic, tantalum, polymer, edlc, feedthrough, disc1, disc2, disc3, mlcc1, mlcc2, pet, pen, pps, pp, ps, pc, al, ta, wetta"
            104K,mid,4.1,,,,,,,,,,,,,,,,,unread,,9 cells where the header names 7: a comma in a cell needs quotes around the cell
            ! standard input: 12 rows could not be read, the first at line 3; `remark` says why
            exit 1
        "#]],
    );
}

#[test]
fn judge_refuses_tables_without_the_columns_it_needs() {
    check(
        &["judge", "--meter", "meter.toml", "-"],
        "",
        expect![[r#"
            ! standard input is empty: a header is needed
            exit 1
        "#]],
    );
    check(
        &["judge", "--meter", "meter.toml", "-"],
        "marking;switch;dial\n104K;mid;4.1\n",
        expect![[r#"
            ! standard input: the header lacks `marking`, `switch`, a reading (`dial`, `dark_from` and `dark_to`, or `lamp`); it reads: marking;switch;dial
            !   the cells seem to be separated by `;`: save the file with commas
            exit 1
        "#]],
    );
    check(
        &["judge", "--meter", "meter.toml", "absent.csv"],
        "",
        expect![[r#"
            ! cannot read absent.csv: there is no such file
            exit 3
        "#]],
    );
    check(
        &["judge", "--meter", "meter.toml", "--json", "-"],
        "marking,switch,dial\n",
        expect![[r#"
            []
            exit 0
        "#]],
    );
}

#[test]
fn judge_takes_any_bytes() {
    let rows = b"marking,switch,dial,note\n104K\x00\x1b,mid,4.1,\xff\x1b[2J\n";
    let output = run(&["judge", "--meter", "meter.toml", "-"], rows);
    assert!(!output.contains(['\u{1b}', '\0']), "{output}");
    assert!(output.contains("\u{fffd}\\u{1b}[2J"), "{output}");
}

#[test]
fn judge_ends_where_a_row_has_no_end() {
    let mut rows = b"marking,switch,dial,note\n473K,mid,6.3,fine\n473K,mid,6.3,\"open\n".to_vec();
    rows.extend(b"473K,mid,6.3,swallowed\n".repeat(100_000));
    expect![[r#"
        [
        {"marking":"473K","switch":"mid","dial":6.3,"note":"fine","nominal_pF":47000,"low_pF":42300,"high_pF":51700,"limits_from":"marked","capacitance_pF":47438.0180666,"uncertainty_pF":500.698935936,"loss":null,"loss_below":null,"deviation_percent":0.931953333288,"probability_inside":1,"probability_flat":1,"reading_probability":0.999997196621,"finding":"inside","compartment":null,"remark":null}
        ]
        ! standard input: the row at line 3 has no end within 1024 kB
        !   look for a quotation mark left open in that row
        exit 1
    "#]].assert_eq(&run(
        &["judge", "--json", "--meter", "meter.toml", "-"],
        &rows,
    ));
}

#[test]
fn check_reports_every_mistake() {
    check(
        &["check", "meter.toml", "tray.toml"],
        "",
        expect![[r#"
            meter.toml: profile Hut meter, 3 switches, not calibrated, no mistakes
            tray.toml: tray Signal hut drawer, 3 compartments, no mistakes
            exit 0
        "#]],
    );
    check(
        &[
            "check",
            "meter-with-mistakes.toml",
            "tray-with-mistakes.toml",
            "meter.toml",
        ],
        "",
        expect![[r#"
            meter-with-mistakes.toml:4:13: `amplitude`: found `volts` at position 5 while reading voltage; accepted here: a prefix p n u µ m k M G, the unit V
            meter-with-mistakes.toml:8:1: unknown key `tolerence` in [[switch]]; did you mean `tolerance`? Known here: label, resistance, tolerance
            meter-with-mistakes.toml:11:1: `end_resistance` is missing in [dial]
            meter-with-mistakes.toml:13:8: `high` is 0; accepted here: a value above zero
            meter-with-mistakes.toml:17:13: `threshold` is -0.03; accepted here: a value above zero
            tray-with-mistakes.toml:5:6: the tray has no A3; accepted here: A1 to A2
            tray-with-mistakes.toml:7:21: `finding` is `insdie`; did you mean `inside`? Accepted here: inside, outside, undecided, dead
            tray-with-mistakes.toml:7:39: `value`: the range 10 nF .. 1 nF is out of range; accepted here: a low end below the high end
            tray-with-mistakes.toml:13:14: `confidence` is 2; accepted here: 0.5 up to, not including, 1
            meter.toml: profile Hut meter, 3 switches, not calibrated, no mistakes
            exit 1
        "#]],
    );
    check(
        &["check", "absent.toml", "meter.toml"],
        "",
        expect![[r#"
            meter.toml: profile Hut meter, 3 switches, not calibrated, no mistakes
            ! cannot read absent.toml: there is no such file
            exit 3
        "#]],
    );
    let folder = Folder::new("check");
    let rest = folder.file("rest.toml");
    let text = "name = \"Cigar box\"\nrows = 1\ncolumns = 1\n[[compartment]]\nat = \"A1\"\nlabel = \"all\"\ntakes = {}\n";
    fs::write(&rest, text).expect("a file");
    expect![[r#"
        DIR/rest.toml:7:9: warning: compartment A1 has no `finding`: it takes parts that are outside too
        DIR/rest.toml: tray Cigar box, 1 compartment, no mistakes
        exit 0
    "#]].assert_eq(&folder.run(&["check", &rest], b""));
    let latin = folder.file("latin.toml");
    fs::write(&latin, b"name = \"a\"\nnote = \"820 \xea\"\n").expect("a file");
    expect![[r#"
        DIR/latin.toml:2:13: not UTF-8 text; save the file as UTF-8
        exit 1
    "#]]
    .assert_eq(&folder.run(&["check", &latin], b""));
}

#[test]
fn the_demonstration_lot_shows_every_finding() {
    let output = run(
        &[
            "judge",
            "--meter",
            "../../data/example-meter.toml",
            "--tray",
            "../../data/example-tray.toml",
            "../../data/demo-lot.csv",
        ],
        b"",
    );
    assert!(output.ends_with("exit 0\n"), "{output}");
    assert!(
        output.lines().count() > 60,
        "a header, the rows, the exit code"
    );
    for finding in [
        ",inside,",
        ",outside,",
        ",undecided,",
        ",dead,",
        ",no place,",
        "switch B?",
    ] {
        assert!(output.contains(finding), "{finding} in {output}");
    }
}

/// A log of one lot with two parts, written at a fixed time.
fn log_in(folder: &Folder) -> String {
    let path = folder.file("parts.db");
    let (mut log, _) = Log::open(Path::new(&path)).expect("a new log");
    for (n, marking) in ["224J", "=473K"].into_iter().enumerate() {
        let time = format!("2026-05-03T10:0{n}:00+02:00");
        let record = Record {
            lot: "hut 4".to_owned(),
            kind: RecordKind::Part,
            raw: Raw {
                marking: marking.to_owned(),
                switch: "mid".to_owned(),
                dial: Some("4.1".to_owned()),
                note: Some("from the north relay".to_owned()),
                typed: "4.1".to_owned(),
                ..Raw::default()
            },
            outcome: Outcome {
                nominal_pf: Some(220_000.0),
                capacitance_pf: Some(217_430.0),
                uncertainty_pf: Some(2050.0),
                deviation_percent: Some(-1.168_181_818_181_818),
                finding: "inside".to_owned(),
                compartment: Some("A1".to_owned()),
                ..Outcome::default()
            },
            replaces: None,
        };
        let time = DateTime::parse_from_rfc3339(&time).expect("a time");
        log.append(&record, time, "name = \"a\"\n")
            .expect("an entry");
    }
    path
}

#[test]
fn the_log_for_people() {
    let folder = Folder::new("show");
    let log = log_in(&folder);
    let say = |arguments: &[&str]| folder.run(&[&["--log", &log, "log"], arguments].concat(), b"");
    expect![[r#"
        id  time              lot    marking  switch  reading  value (k = 2)      finding  place
        1   2026-05-03 10:00  hut 4  224J     mid     4.1      217.4 nF ± 4.1 nF  inside   A1
        2   2026-05-03 10:01  hut 4  =473K    mid     4.1      217.4 nF ± 4.1 nF  inside   A1
        exit 0
    "#]]
    .assert_eq(&say(&["show"]));
    expect![[r#"
        id  time              lot    marking  switch  reading  value (k = 2)      finding  place
        2   2026-05-03 10:01  hut 4  =473K    mid     4.1      217.4 nF ± 4.1 nF  inside   A1
        exit 0
    "#]]
    .assert_eq(&say(&["find", "473", "north"]));
    expect![[r#"
        ! no entry resembles zzz
        exit 1
    "#]]
    .assert_eq(&say(&["find", "zzz"]));
    expect![[r#"
        ! nothing of lot TODAY can be taken back
        !   another lot is named with --lot NAME; `nulltray log show` has their names
        exit 1
    "#]]
    .assert_eq(&say(&["undo"]).replace(&today(), "TODAY"));
    expect![[r#"
        taken back: 2 =473K, inside
        exit 0
    "#]]
    .assert_eq(&say(&["undo", "--lot", "hut 4"]));
    expect![[r#"
        brought back: 2 =473K, inside
        exit 0
    "#]]
    .assert_eq(&say(&["redo", "--lot", "hut 4"]));
    expect![[r#"
        DIR/parts.db copied to DIR/copy.db
        exit 0
    "#]]
    .assert_eq(&say(&["backup", &folder.file("copy.db")]));
    expect![[r#"
        ! cannot back up to DIR/copy.db: a file of that name is there already
        !   give another name
        exit 3
    "#]]
    .assert_eq(&say(&["backup", &folder.file("copy.db")]));
    expect![[r#"
        DIR/parts.db: log, undamaged
        DIR/copy.db: log, undamaged
        exit 0
    "#]]
    .assert_eq(&folder.run(&["check", &log, &folder.file("copy.db")], b""));
    expect![[r#"
        ! cannot open DIR/absent.db: there is no such file
        !   check the path
        exit 3
    "#]]
    .assert_eq(&folder.run(&["--log", &folder.file("absent.db"), "log", "undo"], b""));
    assert!(!folder.0.join("absent.db").exists(), "undo makes no log");
}

fn today() -> String {
    chrono::Utc::now().format("%Y-%m-%d").to_string()
}

#[test]
fn the_log_for_scripts() {
    let folder = Folder::new("export");
    let log = log_in(&folder);
    let say = |arguments: &[&str]| folder.run(&[&["--log", &log, "log"], arguments].concat(), b"");
    expect![[r#"
        id,time,lot,voided,profile,marking,family,switch,dial,dark_from,dark_to,lamp,temperature,heated_hours,leakage,leakage_voltage,looks,note,nominal_pF,low_pF,high_pF,limits_from,capacitance_pF,uncertainty_pF,loss,loss_below,deviation_percent,probability_inside,probability_flat,reading_probability,finding,compartment,remark
        1,2026-05-03T10:00:00+02:00,hut 4,,d0f6c0c7,224J,,mid,4.1,,,,,,,,,from the north relay,220000,,,,217430,2050,,,-1.16818181818,,,,inside,A1,
        2,2026-05-03T10:01:00+02:00,hut 4,,d0f6c0c7,'=473K,,mid,4.1,,,,,,,,,from the north relay,220000,,,,217430,2050,,,-1.16818181818,,,,inside,A1,
        exit 0
    "#]].assert_eq(&say(&["export"]));
    expect![[r#"
        [
        {"id":1,"time":"2026-05-03T10:00:00+02:00","lot":"hut 4","voided":null,"profile":"d0f6c0c7","marking":"224J","family":null,"switch":"mid","dial":4.1,"dark_from":null,"dark_to":null,"lamp":null,"temperature":null,"heated_hours":null,"leakage":null,"leakage_voltage":null,"looks":null,"note":"from the north relay","nominal_pF":220000,"low_pF":null,"high_pF":null,"limits_from":null,"capacitance_pF":217430,"uncertainty_pF":2050,"loss":null,"loss_below":null,"deviation_percent":-1.16818181818,"probability_inside":null,"probability_flat":null,"reading_probability":null,"finding":"inside","compartment":"A1","remark":null},
        {"id":2,"time":"2026-05-03T10:01:00+02:00","lot":"hut 4","voided":null,"profile":"d0f6c0c7","marking":"=473K","family":null,"switch":"mid","dial":4.1,"dark_from":null,"dark_to":null,"lamp":null,"temperature":null,"heated_hours":null,"leakage":null,"leakage_voltage":null,"looks":null,"note":"from the north relay","nominal_pF":220000,"low_pF":null,"high_pF":null,"limits_from":null,"capacitance_pF":217430,"uncertainty_pF":2050,"loss":null,"loss_below":null,"deviation_percent":-1.16818181818,"probability_inside":null,"probability_flat":null,"reading_probability":null,"finding":"inside","compartment":"A1","remark":null}
        ]
        exit 0
    "#]].assert_eq(&say(&["export", "--format", "json", "--lot", "hut 4"]));
    expect![[r#"
        id,time,lot,voided,profile,marking,family,switch,dial,dark_from,dark_to,lamp,temperature,heated_hours,leakage,leakage_voltage,looks,note,nominal_pF,low_pF,high_pF,limits_from,capacitance_pF,uncertainty_pF,loss,loss_below,deviation_percent,probability_inside,probability_flat,reading_probability,finding,compartment,remark
        exit 0
    "#]].assert_eq(&say(&["export", "--lot", "hut 5"]));
}

#[test]
fn a_damaged_log_is_exported_as_far_as_it_can_be_read() {
    let folder = Folder::new("salvage");
    let log = log_in(&folder);
    let mut bytes = fs::read(&log).expect("the log");
    let at = bytes
        .windows(5)
        .position(|window| window == b"=473K")
        .expect("the marking is stored as it is");
    if let Some(byte) = bytes.get_mut(at) {
        *byte = b'-';
    }
    fs::write(&log, bytes).expect("the log again");
    expect![[r#"
        id,time,lot,voided,profile,marking,family,switch,dial,dark_from,dark_to,lamp,temperature,heated_hours,leakage,leakage_voltage,looks,note,nominal_pF,low_pF,high_pF,limits_from,capacitance_pF,uncertainty_pF,loss,loss_below,deviation_percent,probability_inside,probability_flat,reading_probability,finding,compartment,remark
        1,2026-05-03T10:00:00+02:00,hut 4,,d0f6c0c7,224J,,mid,4.1,,,,,,,,,from the north relay,220000,,,,217430,2050,,,-1.16818181818,,,,inside,A1,
        ! cannot read DIR/parts.db: it is damaged: entry 2 is not as it was written (check sum)
        ! entry 2: entry 2 is not as it was written (check sum)
        ! entry 2 is missing
        !   1 entry could still be read and exported; a backup may hold the others
        exit 3
    "#]].assert_eq(&folder.run(&["--log", &log, "log", "export"], b""));
    expect![[r#"
        DIR/parts.db: entry 2: entry 2 is not as it was written (check sum)
        DIR/parts.db: its counts do not agree with its entries
        exit 1
    "#]]
    .assert_eq(&folder.run(&["check", &log], b""));
}
