//! What may be opened and what is left alone.

use std::fs;
use std::os::unix::fs::PermissionsExt;
use std::path::Path;

use nulltray::log::{Log, Start, salvage};

use super::{Folder, LOT, PROFILE, append, open, part, says, stands, time};

#[test]
fn an_empty_file_is_not_taken_silently() {
    let folder = Folder::new();
    fs::write(folder.log(), "").unwrap();
    says(Log::open_read_only(&folder.log()), "is empty");
    says(salvage(&folder.log()), "is empty");
    let (_, start) = Log::open(&folder.log()).unwrap();
    assert_eq!(start, Start::Empty);
    assert_eq!(start.to_string(), "the file is empty, starting a new log");
}

#[test]
fn what_is_no_log_is_left_as_it_is() {
    let folder = Folder::new();
    let foreign = folder.0.join("foreign.db");
    rusqlite::Connection::open(&foreign)
        .unwrap()
        .execute_batch("CREATE TABLE entry (id INTEGER PRIMARY KEY)")
        .unwrap();
    let newer = folder.0.join("newer.db");
    drop(open(&newer));
    rusqlite::Connection::open(&newer)
        .unwrap()
        .execute_batch("PRAGMA user_version = 7")
        .unwrap();
    let text = folder.0.join("text.db");
    fs::write(&text, "224J, 46.7, inside\n".repeat(400)).unwrap();
    let blank = folder.0.join("blank.db");
    rusqlite::Connection::open(&blank)
        .unwrap()
        .execute_batch("VACUUM; PRAGMA user_version = 0")
        .unwrap();
    assert!(fs::metadata(&blank).unwrap().len() > 0);
    let card = folder.0.join("card.db");
    fs::write(&card, "a card of 300 letters ".repeat(14)).unwrap();
    let short = folder.0.join("short.db");
    fs::write(&short, "x").unwrap();
    for (path, words) in [
        (&foreign, "it is not a log of nulltray"),
        (
            &newer,
            "it is of version 7, and this program knows version 1",
        ),
        (&text, "it is not a log of nulltray"),
        (&short, "it is not a log of nulltray"),
        (&card, "it is not a log of nulltray"),
        (&blank, "it is not a log of nulltray"),
    ] {
        let before = (
            fs::read(path).unwrap(),
            fs::metadata(path).unwrap().modified().unwrap(),
        );
        says(Log::open(path), words);
        says(Log::open_read_only(path), words);
        let after = (
            fs::read(path).unwrap(),
            fs::metadata(path).unwrap().modified().unwrap(),
        );
        assert!(before == after, "{} was touched", path.display());
    }
    assert_eq!(
        fs::read_dir(&folder.0).unwrap().count(),
        6,
        "nothing was left beside them"
    );
    for path in [&foreign, &text, &short, &card, &blank] {
        says(salvage(path), "cannot salvage");
    }
}

#[test]
fn what_is_no_file_is_said() {
    let folder = Folder::new();
    says(Log::open(&folder.0), "it is a folder, not a file");
    says(Log::open(Path::new("/dev/null")), "it is a device");
    says(salvage(Path::new("/dev/null")), "it is a device");
    says(Log::open_read_only(&folder.log()), "there is no such file");
    says(salvage(&folder.log()), "there is no such file");
    fs::write(folder.0.join("file"), "").unwrap();
    says(
        Log::open(&folder.0.join("file/parts.db")),
        "a part of the path is a file",
    );
    std::os::unix::fs::symlink(folder.0.join("nowhere"), folder.0.join("link.db")).unwrap();
    says(
        Log::open(&folder.0.join("link.db")),
        "a link that leads nowhere",
    );
}

#[test]
fn links_to_a_log_or_its_folder_are_followed() {
    let folder = Folder::new();
    append(&mut open(&folder.0.join("real/parts.db")), LOT, &["a"]);
    std::os::unix::fs::symlink("real", folder.0.join("folder")).unwrap();
    append(&mut open(&folder.0.join("folder/parts.db")), LOT, &["b"]);
    std::os::unix::fs::symlink("real/parts.db", folder.log()).unwrap();
    let mut log = open(&folder.log());
    assert_eq!(stands(&log, LOT), "a b");
    fs::remove_file(folder.log()).unwrap();
    says(
        log.append(&part(LOT, "c", None), time(0), PROFILE),
        "moved or removed",
    );
}

#[test]
fn a_log_that_moved_while_open_is_an_error() {
    let folder = Folder::new();
    let mut log = open(&folder.log());
    append(&mut log, LOT, &["a"]);
    let moved = folder.0.join("moved.db");
    fs::rename(folder.log(), &moved).unwrap();
    says(
        log.append(&part(LOT, "b", None), time(0), PROFILE),
        "the log was moved or removed",
    );
    drop(open(&folder.log()));
    says(
        log.append(&part(LOT, "b", None), time(0), PROFILE),
        "the log was moved or removed",
    );
    says(log.void_last(LOT, time(0)), "the log was moved or removed");
    fs::rename(&moved, folder.log()).unwrap();
    append(&mut log, LOT, &["c"]);
    assert_eq!(stands(&log, LOT), "a c", "back in its place it goes on");
    fs::remove_file(folder.log()).unwrap();
    says(
        log.append(&part(LOT, "d", None), time(0), PROFILE),
        "the log was moved or removed",
    );
    assert!(!folder.log().exists(), "no new one is made silently");
}

#[test]
fn a_log_that_may_not_be_written_can_be_read() {
    let folder = Folder::new();
    append(&mut open(&folder.log()), LOT, &["a"]);
    fs::set_permissions(folder.log(), fs::Permissions::from_mode(0o444)).unwrap();
    fs::set_permissions(&folder.0, fs::Permissions::from_mode(0o555)).unwrap();
    let mut log = Log::open_read_only(&folder.log()).unwrap();
    assert_eq!(stands(&log, LOT), "a");
    says(
        log.append(&part(LOT, "b", None), time(0), PROFILE),
        "cannot be written",
    );
    says(log.void_last(LOT, time(0)), "cannot be written");
    if fs::OpenOptions::new()
        .append(true)
        .open(folder.log())
        .is_err()
    {
        says(Log::open(&folder.log()), "the file cannot be written");
        says(log.backup(&folder.0.join("copy.db")), "folder");
        fs::set_permissions(folder.log(), fs::Permissions::from_mode(0o644)).unwrap();
        says(
            open(&folder.log()).append(&part(LOT, "b", None), time(0), PROFILE),
            "folder",
        );
        says(
            Log::open(&folder.0.join("new.db")),
            "folder is missing or may not be written",
        );
    } else {
        let _ = std::io::Write::write_all(
            &mut std::io::stderr(),
            b"skipped in part: this user may write everything\n",
        );
    }
    fs::set_permissions(&folder.0, fs::Permissions::from_mode(0o755)).unwrap();
}
