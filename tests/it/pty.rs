//! The program on a terminal: keys in, screen out, and the terminal as it was afterwards. Nothing sleeps: each step waits
//! for what it expects to see.

use std::io::{Read, Write};
use std::num::NonZero;
use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};
use std::sync::{Arc, Condvar, Mutex};
use std::thread;
use std::time::{Duration, Instant};

use portable_pty::{Child, CommandBuilder, MasterPty, PtySize, native_pty_system};

/// How long a step may take before the test fails.
const PATIENCE: Duration = Duration::from_secs(5);

/// What the terminal shows, and a bell for each change of it.
type Watched = Arc<(Mutex<vt100::Parser>, Condvar)>;

/// A program on a terminal of its own.
struct Session {
    master: Box<dyn MasterPty + Send>,
    writer: Box<dyn Write + Send>,
    child: Box<dyn Child + Send + Sync>,
    screen: Watched,
}

fn cells(count: u16) -> NonZero<u16> {
    NonZero::new(count).expect("a screen has cells")
}

fn size(columns: u16, rows: u16) -> PtySize {
    PtySize {
        rows,
        cols: columns,
        pixel_width: 0,
        pixel_height: 0,
    }
}

/// A folder of its own for a test, empty.
fn folder(name: &str) -> PathBuf {
    let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join(format!("pty-{name}"));
    let _ = std::fs::remove_dir_all(&folder);
    std::fs::create_dir_all(&folder).expect("a folder for the test");
    folder
}

fn arguments(folder: &Path) -> Vec<String> {
    let tray = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data/screen-tray.toml");
    let text = |path: &Path| path.display().to_string();
    vec![
        "--log".to_owned(),
        text(&folder.join("parts.db")),
        "--tray".to_owned(),
        text(&tray),
        "--lot".to_owned(),
        "amplifier 7".to_owned(),
    ]
}

impl Session {
    fn start(folder: &Path, environment: &[(&str, &str)]) -> Self {
        let pair = native_pty_system()
            .openpty(size(80, 24))
            .expect("a pseudo-terminal");
        let mut command = CommandBuilder::new(env!("CARGO_BIN_EXE_nulltray"));
        command.env_clear();
        command.env("TERM", "xterm-256color");
        command.env("LANG", "C.UTF-8");
        command.env("HOME", folder);
        for (name, value) in environment {
            command.env(name, value);
        }
        command.args(arguments(folder));
        let child = pair
            .slave
            .spawn_command(command)
            .expect("the program starts");
        drop(pair.slave);
        let parser = vt100::Parser::new(cells(24), cells(80), 0);
        let screen: Watched = Arc::new((Mutex::new(parser), Condvar::new()));
        let mut reader = pair.master.try_clone_reader().expect("the other end");
        let shown = Arc::clone(&screen);
        thread::spawn(move || {
            let mut bytes = [0; 4096];
            while let Ok(count) = reader.read(&mut bytes) {
                let read = bytes.get(..count).unwrap_or_default();
                if read.is_empty() {
                    break;
                }
                shown.0.lock().expect("no reader panics").process(read);
                shown.1.notify_all();
            }
        });
        Self {
            writer: pair.master.take_writer().expect("the keyboard"),
            master: pair.master,
            child,
            screen,
        }
    }

    fn keys(&mut self, keys: &str) {
        self.writer
            .write_all(keys.as_bytes())
            .expect("keys are taken");
        self.writer.flush().expect("keys are taken");
    }

    /// Waits until the screen is as wanted.
    #[track_caller]
    fn until(&self, what: &str, is_so: impl Fn(&vt100::Screen) -> bool) {
        let start = Instant::now();
        let mut parser = self.screen.0.lock().expect("no reader panics");
        while !is_so(parser.screen()) {
            let left = PATIENCE.saturating_sub(start.elapsed());
            assert!(
                !left.is_zero(),
                "waited for {what}, saw:\n{}",
                parser.screen().contents()
            );
            let waited = self.screen.1.wait_timeout(parser, left);
            parser = waited.expect("no reader panics").0;
        }
    }

    /// Waits until the screen shows a text.
    #[track_caller]
    fn shows(&self, text: &str) {
        self.until(text, |screen| screen.contents().contains(text));
    }

    /// Waits for the end of the program and of what it writes, and sees that the terminal is as it was.
    #[track_caller]
    fn ends_restored(mut self) {
        self.until("the ordinary screen and the cursor", |screen| {
            !screen.alternate_screen()
                && !screen.hide_cursor()
                && !screen.bracketed_paste()
                && !screen.contents().contains("marking")
        });
        let status = self.child.wait().expect("the program ends");
        assert_eq!(status.exit_code(), 0);
        if let Some(modes) = self.master.get_termios() {
            let local = format!("{:?}", modes.local_flags);
            assert!(
                local.contains("ICANON") && local.contains("ECHO"),
                "{local}"
            );
        }
    }

    /// Waits until the program is stopped: one that is told to go on before would then stop for good.
    #[track_caller]
    fn stands_still(&self) {
        let id = self.child.process_id().expect("it runs");
        let start = Instant::now();
        loop {
            let status = std::fs::read_to_string(format!("/proc/{id}/stat"));
            let status = status.expect("the state of the program");
            let after_name = status.rsplit(')').next().unwrap_or_default();
            if after_name.trim_start().starts_with('T') {
                return;
            }
            assert!(start.elapsed() < PATIENCE, "it does not stop: {status}");
            thread::yield_now();
        }
    }

    fn signal(&self, name: &str) {
        let id = self.child.process_id().expect("it runs").to_string();
        let sent = Command::new("kill").args([name, &id]).status();
        assert!(sent.expect("kill runs").success());
    }
}

const ENTER: &str = "\r";
const CTRL_Q: &str = "\x11";
const CTRL_Y: &str = "\x19";
const CTRL_Z: &str = "\x1a";

#[test]
fn the_whole_loop_and_the_parts_are_there_the_next_time() {
    let folder = folder("loop");
    let mut session = Session::start(&folder, &[]);
    session.shows("type a marking");
    session.keys("224J");
    session.shows("220 nF ±5 %");
    session.keys(ENTER);
    session.shows("dial A  ▸");
    session.keys("20.3");
    session.keys(ENTER);
    session.shows("1 part ");
    session.shows("✓ INSIDE");
    session.keys("\r20.2\r");
    session.shows("2 parts");
    session.keys(CTRL_Z);
    session.shows("taken back");
    session.shows("1 part ");
    session.keys(CTRL_Y);
    session.shows("back again");
    session.shows("2 parts");
    session.keys(CTRL_Q);
    session.ends_restored();

    let mut again = Session::start(&folder, &[]);
    again.shows("2 parts");
    again.keys("\r20.1\r");
    again.shows("3 parts");
    again.keys("\x03");
    again.ends_restored();
}

#[test]
fn the_number_pad_is_enough() {
    let mut session = Session::start(&folder("pad"), &[]);
    session.keys("104\r55.1-55.9\r");
    session.shows("1 part ");
    session.keys("\r*46\r");
    session.shows("2 parts");
    session.keys("\r/1\r");
    session.shows("dial A  ▸");
    session.keys("/2\r+\r");
    session.shows("3 parts");
    session.keys("//\r");
    session.shows("taken back");
    session.shows("2 parts");
    session.keys(CTRL_Q);
    session.ends_restored();
}

#[test]
fn pasting_is_typing() {
    let mut session = Session::start(&folder("paste"), &[]);
    session.shows("type a marking");
    session.keys("\x1b[200~224J\n20.3\n\n20.2\n\x1b[201~");
    session.shows("2 parts");
    session.keys(CTRL_Q);
    session.ends_restored();
}

#[test]
fn it_follows_the_size_of_the_terminal() {
    let mut session = Session::start(&folder("size"), &[]);
    session.keys("224J\r20.3\r");
    session.shows("1 part ");
    for (columns, rows) in [(120, 40), (40, 12), (30, 3), (80, 24)] {
        {
            let mut parser = session.screen.0.lock().expect("no reader panics");
            parser.screen_mut().set_size(cells(rows), cells(columns));
        }
        session
            .master
            .resize(size(columns, rows))
            .expect("another size");
        let last = if rows < 12 { "marking" } else { "undo Ctrl-Z" };
        session.until(last, |screen| {
            let rows: Vec<String> = screen.rows(0, columns).collect();
            rows.iter()
                .rev()
                .find(|row| !row.trim().is_empty())
                .is_some_and(|row| row.contains(last))
        });
    }
    session.keys(CTRL_Q);
    session.ends_restored();
}

#[test]
fn a_signal_ends_it_and_restores_the_terminal() {
    for signal in ["-TERM", "-HUP", "-INT"] {
        let mut session = Session::start(&folder("signal"), &[]);
        session.keys("224J");
        session.shows("220 nF ±5 %");
        session.signal(signal);
        session.ends_restored();
    }
}

#[test]
fn it_draws_itself_whole_after_it_was_stopped() {
    let mut session = Session::start(&folder("stopped"), &[]);
    session.shows("type a marking");
    {
        let mut parser = session.screen.0.lock().expect("no reader panics");
        parser.process(b"\x1b[2J\x1b[Hsomething else");
    }
    session.signal("-CONT");
    session.shows("type a marking");
    session.shows("undo Ctrl-Z");
    session.until("nothing else", |screen| {
        !screen.contents().contains("something else")
    });
    session.keys(CTRL_Q);
    session.ends_restored();
}

#[test]
fn while_it_is_stopped_the_terminal_is_as_it_was() {
    let mut session = Session::start(&folder("tstp"), &[]);
    session.keys("224J");
    session.shows("220 nF ±5 %");
    session.signal("-TSTP");
    session.until("the ordinary screen and the cursor", |screen| {
        !screen.alternate_screen() && !screen.hide_cursor()
    });
    session.stands_still();
    session.signal("-CONT");
    session.until("the bench again", |screen| {
        screen.alternate_screen() && screen.contents().contains("220 nF ±5 %")
    });
    session.keys(ENTER);
    session.shows("dial A  ▸");
    session.keys(CTRL_Q);
    session.ends_restored();
}

#[test]
fn no_color_means_none() {
    let environment = [("NO_COLOR", "1"), ("COLORTERM", "truecolor")];
    let mut session = Session::start(&folder("no-color"), &environment);
    session.keys("224J\r20.3\r");
    session.shows("✓ INSIDE");
    session.until("no colour", |screen| {
        let (rows, columns) = (24, 80);
        (0..rows).all(|row| {
            (0..columns).all(|column| {
                screen.cell(row, column).is_none_or(|cell| {
                    cell.fgcolor() == vt100::Color::Default
                        && cell.bgcolor() == vt100::Color::Default
                })
            })
        })
    });
    session.keys(CTRL_Q);
    session.ends_restored();
}

#[test]
fn without_utf_8_it_draws_ascii() {
    let mut session = Session::start(&folder("ascii"), &[("LC_ALL", "C")]);
    session.keys("224J\r20.3\r");
    session.shows("+ INSIDE");
    session.until("ASCII", |screen| screen.contents().is_ascii());
    session.keys(CTRL_Q);
    session.ends_restored();
}

#[test]
fn line_confirms_what_is_on_disk_and_nothing_else() {
    let folder = folder("line");
    let mut child = Command::new(env!("CARGO_BIN_EXE_nulltray"))
        .args(arguments(&folder))
        .arg("line")
        .env_clear()
        .env("HOME", &folder)
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the program starts");
    let mut keyboard = child.stdin.take().expect("a pipe");
    keyboard
        .write_all(b"224J\n20.3\n\n2.03\n20.2\nlooks cracked\nundo\n224J\n10")
        .expect("lines are taken");
    drop(keyboard);
    let ended = child.wait_with_output().expect("the program ends");
    assert!(ended.status.success());
    let saved = String::from_utf8_lossy(&ended.stdout).into_owned();
    assert_eq!(
        saved,
        "saved 1 inside B3\nsaved 2 inside B3\nsaved 3 inside B3\nsaved 5 outside D6\n"
    );
    let talk = String::from_utf8_lossy(&ended.stderr);
    for said in [
        "marking 1>",
        "dial A 20.1>",
        "marking 3>",
        "again to keep it",
    ] {
        assert!(talk.contains(said), "no {said} in\n{talk}");
    }
}
