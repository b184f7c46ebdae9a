//! Which meter, tray and log are in force: the option, else the person's own place, else what is built in.
//!
//! ```text
//! meter   --meter FILE   $XDG_CONFIG_HOME/nulltray/meter.toml   the built-in example meter
//! tray    --tray FILE    $XDG_CONFIG_HOME/nulltray/tray.toml    none (the bench's --demo: the built-in one)
//! log     --log FILE     $XDG_DATA_HOME/nulltray/parts.db
//! lot     --lot NAME     today's date
//! ```

use std::fs::File;
use std::io::{self, Read, Write};
use std::path::{Path, PathBuf};

use etcetera::BaseStrategy;
use etcetera::base_strategy::Xdg;

use super::args::Places;
use super::failure::{Failure, plain};
use crate::app::Setup;
use crate::meter::Meter;
use crate::tables::document::Complaint;
use crate::tray::Tray;

/// The meter of those who have not described their own yet.
pub(super) const EXAMPLE_METER: &str = include_str!("../../data/example-meter.toml");
/// The tray that shows what a tray can do.
pub(super) const EXAMPLE_TRAY: &str = include_str!("../../data/example-tray.toml");
/// The lot that shows what the bench can do, in judge's input columns.
pub(super) const DEMO_LOT: &str = include_str!("../../data/demo-lot.csv");

/// What that lot is called: a part of an old signal-telephone line.
pub(super) const DEMO_LOT_NAME: &str = "repeater 3";

/// The largest profile or tray that is read, in bytes.
const LARGEST_FILE: u64 = 16 << 20;

/// Where the meter in force comes from.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) enum MeterFrom {
    /// From this file.
    File(PathBuf),
    /// Nobody has described a meter yet.
    BuiltIn,
}

/// Loads meter and tray for a command; warnings, and that the meter is only an example, go to `stderr`.
pub(super) fn for_command(places: &Places, stderr: &mut dyn Write) -> Result<Setup, Failure> {
    let (meter, profile_text, from) = meter(places, stderr)?;
    if from == MeterFrom::BuiltIn {
        // A note that cannot be written is no reason to stop.
        let _ = writeln!(
            stderr,
            "no meter is described yet: taking the built-in example meter; yours is given with --meter FILE"
        );
    }
    let tray = tray(places, stderr)?;
    Ok(Setup {
        meter,
        profile_text,
        tray,
    })
}

/// Loads meter and tray for the bench's demonstration: built in, where no option names a file.
pub(super) fn for_demo(
    places: &Places,
    stderr: &mut dyn Write,
) -> Result<(Setup, MeterFrom), Failure> {
    let (meter, profile_text, from) = match &places.meter {
        Some(_) => meter(places, stderr)?,
        None => example_meter()?,
    };
    let tray = match &places.tray {
        Some(_) => tray(places, stderr)?,
        None => Some(checked(
            Path::new("example-tray.toml"),
            Tray::read(EXAMPLE_TRAY),
            stderr,
        )?),
    };
    let setup = Setup {
        meter,
        profile_text,
        tray,
    };
    Ok((setup, from))
}

/// Returns the meter in force with the whole text of its profile.
pub(super) fn meter(
    places: &Places,
    stderr: &mut dyn Write,
) -> Result<(Meter, String, MeterFrom), Failure> {
    let Some(path) = places.meter.clone().or_else(|| own_file("meter.toml")) else {
        return example_meter();
    };
    let text = text_of(&path)?;
    let meter = checked(&path, Meter::read(&text), stderr)?;
    Ok((meter, text, MeterFrom::File(path)))
}

/// Returns the tray in force, if there is one.
pub(super) fn tray(places: &Places, stderr: &mut dyn Write) -> Result<Option<Tray>, Failure> {
    let Some(path) = places.tray.clone().or_else(|| own_file("tray.toml")) else {
        return Ok(None);
    };
    let text = text_of(&path)?;
    checked(&path, Tray::read(&text), stderr).map(Some)
}

/// Returns where the log is.
pub(super) fn log_path(places: &Places) -> Result<PathBuf, Failure> {
    if let Some(path) = &places.log {
        return Ok(path.clone());
    }
    let folders = Xdg::new().map_err(|_| {
        Failure::usage("no place for the log: the home folder is not known")
            .hint("name one with --log FILE")
    })?;
    Ok(folders.data_dir().join("nulltray").join("parts.db"))
}

/// Returns the name of the lot in force.
pub(super) fn lot(places: &Places) -> String {
    places
        .lot
        .clone()
        .unwrap_or_else(|| chrono::Local::now().format("%Y-%m-%d").to_string())
}

/// Reads a file that people write: a regular file, UTF-8, not too long.
pub(super) fn text_of(path: &Path) -> Result<String, Failure> {
    let file = regular_file(path)?;
    let mut bytes = Vec::new();
    let n_bytes = file
        .take(LARGEST_FILE + 1)
        .read_to_end(&mut bytes)
        .map_err(|error| Failure::file("read", path, &error))?;
    if n_bytes as u64 > LARGEST_FILE {
        return Err(Failure::input(format!(
            "{} is larger than 16 MB: no profile or tray",
            path.display()
        )));
    }
    String::from_utf8(bytes).map_err(|error| {
        let good = error.as_bytes().get(..error.utf8_error().valid_up_to());
        let good = String::from_utf8_lossy(good.unwrap_or_default());
        let last_line = good.rsplit('\n').next().unwrap_or_default();
        let complaint = Complaint {
            line: good.matches('\n').count() + 1,
            column: last_line.chars().count() + 1,
            message: "not UTF-8 text; save the file as UTF-8".to_owned(),
        };
        Failure::mistakes(path, &[complaint])
    })
}

/// Opens a regular file for reading; a folder or device is refused before it can block or never end.
pub(super) fn regular_file(path: &Path) -> Result<File, Failure> {
    let act = |error: &io::Error| Failure::file("read", path, error);
    let about = std::fs::metadata(path).map_err(|error| act(&error))?;
    if !about.is_file() {
        let what = if about.is_dir() {
            "it is a folder"
        } else {
            "it is not a regular file"
        };
        return Err(Failure::io(format!(
            "cannot read {}: {what}",
            path.display()
        )));
    }
    File::open(path).map_err(|error| act(&error))
}

/// Opens a table for reading, whatever can be read in one go: a file, a pipe; `-` is standard input, not opened here.
pub(super) fn table(path: &Path) -> Result<File, Failure> {
    let about = std::fs::metadata(path).map_err(|error| Failure::file("read", path, &error))?;
    if about.is_dir() {
        return Err(Failure::io(format!(
            "cannot read {}: it is a folder",
            path.display()
        )));
    }
    File::open(path).map_err(|error| Failure::file("read", path, &error))
}

/// Returns the line in which a warning is given.
pub(super) fn warning(path: &Path, complaint: &Complaint) -> String {
    format!(
        "{}:{}:{}: warning: {}",
        path.display(),
        complaint.line,
        complaint.column,
        complaint.message
    )
}

fn checked<T>(
    path: &Path,
    read: Result<(T, Vec<Complaint>), Vec<Complaint>>,
    stderr: &mut dyn Write,
) -> Result<T, Failure> {
    let (value, warnings) = read.map_err(|complaints| Failure::mistakes(path, &complaints))?;
    for complaint in &warnings {
        let _ = writeln!(stderr, "{}", warning(path, complaint));
    }
    Ok(value)
}

fn example_meter() -> Result<(Meter, String, MeterFrom), Failure> {
    let (meter, _) = Meter::read(EXAMPLE_METER).map_err(|complaints| {
        Failure::defect(Failure::mistakes(Path::new("example-meter.toml"), &complaints).message)
    })?;
    Ok((meter, EXAMPLE_METER.to_owned(), MeterFrom::BuiltIn))
}

/// Returns the file of this name in the person's own folder, if there is anything of that name (even if it cannot be read:
/// that is said, and not passed over).
fn own_file(name: &str) -> Option<PathBuf> {
    let path = own_place(name)?;
    match std::fs::symlink_metadata(&path) {
        Err(error) if is_absence(&error) => None,
        _ => Some(path),
    }
}

/// Returns where the file of this name is in the person's own folder, there or not; `None` if there is no home folder.
pub(super) fn own_place(name: &str) -> Option<PathBuf> {
    let folders = Xdg::new().ok()?;
    Some(folders.config_dir().join("nulltray").join(name))
}

fn is_absence(error: &io::Error) -> bool {
    matches!(
        error.kind(),
        io::ErrorKind::NotFound | io::ErrorKind::NotADirectory
    )
}

/// Returns the failure of reading a stream that has a name but no path.
pub(super) fn unreadable(name: &str, error: &io::Error) -> Failure {
    Failure::io(format!("cannot read {name}: {}", plain(error)))
}
