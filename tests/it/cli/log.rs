//! `log`.

use std::fs;
use std::path::Path;

use chrono::DateTime;
use expect_test::expect;
use nulltray::app::{Outcome, Raw, Record, RecordKind};
use nulltray::log::Log;

use super::Folder;

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

fn today() -> String {
    chrono::Utc::now().format("%Y-%m-%d").to_string()
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

/// Lines typed at `line`: parts of every finding, and a check part.
const TYPED: &str = "224J\n20.3\n\n20.9\n472J\n93.0\n104K\n55.1\ncheck blue 10 nF\n34\n224J\n10\n";

/// The example meter without its calibration, in a file, with something replaced.
fn meter(folder: &Folder, name: &str, from: &str, to: &str) -> String {
    let text = include_str!("../../../data/example-meter.toml").replace(from, to);
    let text = text.split("[calibration]").next().unwrap_or_default();
    fs::write(folder.0.join(name), text).expect("a profile");
    folder.file(name)
}

#[test]
fn entries_are_judged_again_with_another_meter() {
    let folder = Folder::new("rejudge");
    let log = folder.file("parts.db");
    let tray = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data/screen-tray.toml");
    let tray = tray.to_str().expect("UTF-8").to_owned();
    let first = meter(&folder, "first.toml", "", "");
    let say = |meter: &str, arguments: &[&str]| {
        let places = ["--log", &log, "--meter", meter, "--tray", &tray];
        let said = folder.run(&[&places, arguments].concat(), TYPED.as_bytes());
        said.lines()
            .filter(|line| !line.starts_with("! "))
            .fold(String::new(), |text, line| text + line + "\n")
    };
    expect![[r#"
        saved 1 inside B3
        saved 2 inside B3
        saved 3 outside D6
        saved 4 inside B3
        saved 5 inside -
        saved 6 outside D6
        exit 0
    "#]]
    .assert_eq(&say(&first, &["--lot", "hut 4", "line"]));
    expect![[r#"
        nothing would change, of 6 entries
        exit 0
    "#]]
    .assert_eq(&say(&first, &["log", "rejudge"]));
    let second = meter(&folder, "second.toml", "300 Ω", "330 Ω");
    expect![[r#"
        id  lot    marking  finding              value (k = 2)                            place
        1   hut 4  224J     inside -> undecided  219.8 nF ± 10.8 nF -> 199.8 nF ± 9.8 nF  B3 -> D5
        2   hut 4  224J     inside -> undecided  226.2 nF ± 10.9 nF -> 205.6 nF ± 9.9 nF  B3 -> D5
        6   hut 4  224J     outside              109.9 nF ± 9.3 nF -> 99.9 nF ± 8.5 nF    D6
        3 of 6 entries would change: 2 by finding, 3 by value, 2 by place
        nothing is written; with --write each becomes a new entry, and the first one stays in the log
        exit 0
    "#]].assert_eq(&say(&second, &["log", "rejudge"]));
    expect![[r#"
        {"entries":6,"unchanged":3,"written":false,"changes":[{"id":1,"new_id":null,"lot":"hut 4","marking":"224J","finding_before":"inside","finding_after":"undecided","capacitance_before_pF":219785.826117,"capacitance_after_pF":199804.023743,"compartment_before":"B3","compartment_after":"D5"},{"id":2,"new_id":null,"lot":"hut 4","marking":"224J","finding_before":"inside","finding_after":"undecided","capacitance_before_pF":226200.24565,"capacitance_after_pF":205635.314227,"compartment_before":"B3","compartment_after":"D5"},{"id":6,"new_id":null,"lot":"hut 4","marking":"224J","finding_before":"outside","finding_after":"outside","capacitance_before_pF":109879.722377,"capacitance_after_pF":99889.3839791,"compartment_before":"D6","compartment_after":"D6"}],"left":[]}
        exit 0
    "#]].assert_eq(&say(&second, &["log", "rejudge", "--json"]));
    let renamed = meter(&folder, "renamed.toml", "label = \"C\"", "label = \"fine\"");
    expect![[r#"
        3 472J is left as it is: this meter has no switch C
        5 check part blue 10 nF is left as it is: this meter has no switch C
        nothing would change, of 6 entries
        exit 1
    "#]]
    .assert_eq(&say(&renamed, &["log", "rejudge", "--lot", "hut 4"]));
    expect![[r#"
        {"entries":6,"unchanged":4,"written":false,"changes":[],"left":[{"id":3,"lot":"hut 4","marking":"472J","reason":"this meter has no switch C"},{"id":5,"lot":"hut 4","marking":"blue 10 nF","reason":"this meter has no switch C"}]}
        exit 1
    "#]]
    .assert_eq(&say(&renamed, &["log", "rejudge", "--json"]));
    let before = say(&first, &["log", "export"]);
    expect![[r#"
        id  lot    marking  finding              value (k = 2)                            place
        1   hut 4  224J     inside -> undecided  219.8 nF ± 10.8 nF -> 199.8 nF ± 9.8 nF  B3 -> D5
        2   hut 4  224J     inside -> undecided  226.2 nF ± 10.9 nF -> 205.6 nF ± 9.9 nF  B3 -> D5
        6   hut 4  224J     outside              109.9 nF ± 9.3 nF -> 99.9 nF ± 8.5 nF    D6
        3 of 6 entries would change: 2 by finding, 3 by value, 2 by place
        written: 7 to 9, in place of the first ones, which stay in the log
        2 parts lie in other places than they should: move them
        exit 0
    "#]]
    .assert_eq(&say(&second, &["log", "rejudge", "--write"]));
    expect![[r#"
        nothing would change, of 6 entries
        exit 0
    "#]]
    .assert_eq(&say(&second, &["log", "rejudge", "--write"]));
    let after = say(&second, &["log", "export"]);
    let kept = |text: &str| -> Vec<String> {
        let columns = text.lines().map(|line| line.split(',').enumerate());
        // Of the first entries only the time at which they were replaced may differ.
        columns
            .take(7)
            .map(|cells| {
                let cells: Vec<&str> = cells.filter(|(n, _)| *n != 3).map(|c| c.1).collect();
                cells.join(",")
            })
            .collect()
    };
    assert_eq!(kept(&before), kept(&after), "nothing is erased");
    expect![[r#"
        DIR/parts.db: log, undamaged
        exit 0
    "#]]
    .assert_eq(&folder.run(&["check", &log], b""));
    expect![[r#"
        taken back: 9 224J, outside
        exit 0
    "#]]
    .assert_eq(&say(&second, &["log", "undo", "--lot", "hut 4"]));
    expect![[r#"
        exit 1
    "#]]
    .assert_eq(&say(&first, &["log", "rejudge", "--lot", "hut 5"]));
}

#[test]
fn judging_again_makes_no_log() {
    let folder = Folder::new("rejudge-none");
    let log = folder.file("absent.db");
    expect![[r#"
        ! cannot open DIR/absent.db: there is no such file
        !   check the path
        exit 3
    "#]]
    .assert_eq(&folder.run(&["--log", &log, "log", "rejudge", "--write"], b""));
    assert!(!folder.0.join("absent.db").exists());
}

#[test]
fn lines_say_whether_the_meter_has_moved_over_all_lots() {
    let folder = Folder::new("moved");
    let (log, meter) = (
        folder.file("parts.db"),
        meter(&folder, "meter.toml", "", ""),
    );
    let say = |lot: &str, typed: &str| {
        let places = ["--log", &log, "--meter", &meter, "--lot", lot, "line"];
        let said = folder.run(&places, typed.as_bytes());
        let told = ["saved", "agrees", "moved", "in doubt"];
        let lines = said.lines();
        let told = lines.filter(|line| told.iter().any(|word| line.contains(word)));
        // The time of the good check is that of the test.
        let told = told.map(|line| {
            let parts = line.split_once("parts since ");
            let parts =
                parts.and_then(|(head, rest)| Some((head, rest.split_once(" in doubt (")?)));
            match parts {
                Some((head, (_, rest))) => format!("{head}parts since TIME in doubt ({rest}"),
                None => line.to_owned(),
            }
        });
        told.collect::<Vec<_>>().join("\n")
    };
    expect![[r#"
        saved 1 inside -
        saved 2 outside -
        ! the meter has moved: all parts so far in doubt: no earlier check agreed; +14.1 standard uncertainties from 10.02 nF; look at battery, leads and lamp, then calibrate
        ! in doubt in this lot: part 1"#]].assert_eq(&say("hut 4", "224J\n20.3\ncheck blue 10 nF\n45\n"));
    expect![[r#"
        saved 3 inside -
        saved 4 inside -
        ! the meter agrees: -0.2 standard uncertainties from 10.02 nF"#]]
    .assert_eq(&say("hut 5", "224J\n20.3\ncheck blue 10 nF\n34\n"));
    expect![[r#"
        saved 5 inside -
        saved 6 inside -
        saved 7 outside -
        ! the meter has moved: parts since TIME in doubt (entries after 4); +14.1 standard uncertainties from 10.02 nF; look at battery, leads and lamp, then calibrate
        ! in doubt in this lot: parts 1 to 2"#]].assert_eq(&say("hut 6", "224J\n20.3\n\n20.2\ncheck blue 10 nF\n45\n"));
}
