//! The commands as other programs see them: files in; exact output, error stream and exit code out.

#![expect(
    clippy::needless_raw_string_hashes,
    reason = "the expectations are written by UPDATE_EXPECT=1"
)]

mod decode;
mod judge;
mod log;
mod meter;
mod new_meter;

use std::fs;
use std::io::Write;
use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};

use expect_test::{Expect, expect};

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

/// Compares what was shown.
#[track_caller]
#[expect(
    clippy::needless_pass_by_value,
    reason = "reads as a literal at the call"
)]
fn check_shown(shown: &str, expected: Expect) {
    expected.assert_eq(shown);
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
