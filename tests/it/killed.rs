//! `nulltray line` killed at any moment: what it confirmed is in the log, once.

use std::collections::BTreeSet;
use std::fs;
use std::io::{BufRead, BufReader, Write};
use std::path::{Path, PathBuf};
use std::process::{Child, Command, Stdio};

use nulltray::log::{Log, Which};

struct Folder(PathBuf);

impl Folder {
    fn new(name: &str) -> Self {
        let path =
            Path::new(env!("CARGO_TARGET_TMPDIR")).join(format!("{name}-{}", std::process::id()));
        let _ = fs::remove_dir_all(&path);
        fs::create_dir_all(&path).expect("a folder for the test");
        Self(path)
    }
}

impl Drop for Folder {
    fn drop(&mut self) {
        let _ = fs::remove_dir_all(&self.0);
    }
}

fn line(log: &Path) -> Child {
    Command::new(env!("CARGO_BIN_EXE_nulltray"))
        .args(["line", "--lot", "repeater 3", "--log"])
        .arg(log)
        .env("XDG_CONFIG_HOME", log.with_file_name("nothing"))
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::null())
        .spawn()
        .expect("the program starts")
}

#[test]
fn a_killed_line_loses_nothing_it_confirmed() {
    const N_ROUNDS: usize = 20;
    let folder = Folder::new("killed");
    let path = folder.0.join("parts.db");
    let mut confirmed = BTreeSet::new();
    for round in 0..N_ROUNDS {
        let mut child = line(&path);
        let mut stdin = child.stdin.take().expect("piped");
        let typing = std::thread::spawn(move || {
            // Once the program is gone there is nobody to type for.
            let _ = stdin.write_all(b"224J\n20.1\n");
            while stdin.write_all(b"\n20.2\n").is_ok() {}
        });
        let stdout = BufReader::new(child.stdout.take().expect("piped"));
        // The moment differs from round to round: after so many confirmations, in the middle of the next one.
        let mut lines = stdout.lines();
        for _ in 0..=round % 7 {
            let said = lines.next().expect("a confirmation").expect("text");
            let id = said
                .strip_prefix("saved ")
                .and_then(|rest| rest.split(' ').next());
            confirmed.insert(id.and_then(|id| id.parse::<i64>().ok()).expect("an id"));
        }
        child.kill().expect("killed");
        child.wait().expect("gone");
        // What it had said before it was killed counts too.
        for said in lines.map_while(Result::ok) {
            let words: Vec<&str> = said.split(' ').collect();
            if let ["saved", id, _, _] = words[..] {
                confirmed.insert(id.parse::<i64>().expect("an id"));
            }
        }
        typing.join().expect("typed to the end");
    }
    let (log, _) = Log::open(&path).expect("the log opens");
    assert_eq!(log.verify().expect("readable"), []);
    let in_log: Vec<i64> = log
        .entries(None, Which::All)
        .expect("readable")
        .iter()
        .map(|e| e.id.0)
        .collect();
    let once: BTreeSet<i64> = in_log.iter().copied().collect();
    assert_eq!(once.len(), in_log.len(), "no entry twice");
    assert!(
        confirmed.is_subset(&once),
        "missing: {:?}",
        confirmed.difference(&once)
    );
    assert!(
        in_log.len() <= confirmed.len() + N_ROUNDS,
        "at most one a kill was not confirmed"
    );
}

#[test]
fn a_log_that_was_moved_is_said_and_nothing_is_called_saved() {
    let folder = Folder::new("moved");
    let path = folder.0.join("parts.db");
    let mut child = line(&path);
    let mut stdin = child.stdin.take().expect("piped");
    let mut lines = BufReader::new(child.stdout.take().expect("piped")).lines();
    stdin.write_all(b"224J\n20.1\n").expect("typed");
    let first = lines.next().expect("a confirmation").expect("text");
    assert_eq!(first, "saved 1 inside -");
    fs::rename(&path, folder.0.join("elsewhere.db")).expect("moved");
    stdin.write_all(b"\n20.2\n").expect("typed");
    drop(stdin);
    assert!(lines.next().is_none(), "nothing more is called saved");
    assert!(child.wait().expect("ended").code().is_some());
    let (log, _) = Log::open(&folder.0.join("elsewhere.db")).expect("the log opens");
    assert_eq!(log.entries(None, Which::All).expect("readable").len(), 1);
}
