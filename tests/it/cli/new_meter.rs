//! `new meter` at the prompts of `nulltray line`.

use std::fs;

use super::{Folder, check_shown};
use expect_test::expect;

/// Every answer of a meter with a measured dial, two of them wrong at first.
const ANSWERS: &str = "\
hut meter
1 kV
1,25k
3.9 V
2
lo
330
0,5 %
hi
2k2

100n
1
0,0004


100
1
yes
0 22
50 2,37k
100 4,71k

0.3
270
clockwise
1 MHz
buffered
12p
3p
40 mV
20

";

/// Runs `line` on what is typed, with a log of its own.
fn line(folder: &Folder, typed: &str) -> String {
    let log = folder.file("parts.db");
    folder.run(&["--log", &log, "--lot", "a", "line"], typed.as_bytes())
}

#[test]
fn a_whole_meter_is_entered_and_in_force() {
    let folder = Folder::new("new-meter");
    let place = folder.file("meters/hut.toml");
    let typed = format!("new meter\n{ANSWERS}");
    let typed = typed.trim_end().to_owned() + &format!("\n\n{place}\n104K\n55\n");
    let output = line(&folder, &typed);
    assert!(output.contains("hut meter is the meter in force now, written to DIR/meters/hut.toml; it is not calibrated yet"), "{output}");
    assert!(output.contains("saved 1 "), "{output}");
    let checked = folder.run(&["check", &place], b"");
    check_shown(
        &checked,
        expect![[r#"
        DIR/meters/hut.toml: profile hut meter, 2 switches, not calibrated, no mistakes
        exit 0
    "#]],
    );
    let text = fs::read_to_string(&place).expect("it is written");
    let stored = folder.run(
        &[
            "--log",
            &folder.file("parts.db"),
            "log",
            "export",
            "--format",
            "csv",
        ],
        b"",
    );
    let hash = format!("{:08x}", crc32fast::hash(text.as_bytes()));
    assert!(
        stored.contains(&hash),
        "the log names the new profile: {stored}"
    );
}

#[test]
fn questions_reasons_and_prompts() {
    let folder = Folder::new("new-meter-talk");
    let output = line(
        &folder,
        "new meter\nhut meter\n1 kV\n1,25k\nback\n\nleave\nnew meter\n",
    );
    check_shown(
        &output,
        expect![[r#"
        ! example meter, not yours, calibrated 2026-10-04; lot a, 0 parts; the input's end leaves
        ! marking 1> Enter alone takes what is offered; back goes to the question before, leave to the bench
        ! What is the meter called?
        ! tells this meter from others on the screen and in reports
        ! accepted: 1 to 60 characters; Enter alone: Home-built meter
        ! name 1> At which frequency does the oscillator run?
        ! bears on the dark arc's width and on what the follower does to a balance
        ! accepted: 10 Hz to 1 MHz; Enter alone: 1 kHz
        ! frequency 2> found `V` at position 4 while reading the unit; accepted here: a prefix p n u µ m k M G, the unit Hz hz HZ
        ! frequency 2> What is the oscillator's peak voltage?
        ! peak; says what voltage a part will see
        ! accepted: 10 mV to 100 V; Enter alone: 4.2 V
        ! amplitude 3> At which frequency does the oscillator run?
        ! bears on the dark arc's width and on what the follower does to a balance
        ! accepted: 10 Hz to 1 MHz; Enter alone: 1.25 kHz
        ! frequency 2> What is the oscillator's peak voltage?
        ! peak; says what voltage a part will see
        ! accepted: 10 mV to 100 V; Enter alone: 4.2 V
        ! amplitude 3> the meter in force is the one before; your answers are kept until the program ends: new meter goes on
        ! marking 1> this is where you left; back goes to the question before
        ! What is the oscillator's peak voltage?
        ! peak; says what voltage a part will see
        ! accepted: 10 mV to 100 V; Enter alone: 4.2 V
        ! amplitude 3> 
        exit 0
    "#]],
    );
}

#[test]
fn a_file_that_is_there_is_written_over_only_after_a_yes() {
    let folder = Folder::new("new-meter-over");
    let place = folder.file("m.toml");
    fs::write(&place, "old").expect("ours");
    let enters = "\n".repeat(35);
    let typed = format!("new meter\n{enters}{place}\nno\n");
    let output = line(&folder, &typed);
    assert!(output.contains("DIR/m.toml is there already"), "{output}");
    assert_eq!(fs::read_to_string(&place).expect("there"), "old");
    let typed = format!("new meter\n{enters}{place}/x.toml\n{place}\nyes\n");
    let output = line(&folder, &typed);
    assert!(
        output.contains("not written: cannot write DIR/m.toml/x.toml: Not a directory; "),
        "{output}"
    );
    assert!(
        output.contains("Home-built meter is the meter in force now"),
        "{output}"
    );
    let written = fs::read_to_string(&place).expect("there");
    assert!(written.contains("[oscillator]"), "{written}");
}
