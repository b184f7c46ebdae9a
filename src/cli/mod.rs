//! The commands: arguments and streams in, exit code out.
//!
//! ```text
//! args      the command line            setup    profile, tray and log: which, where, read and checked
//! bench     what the bench and `line` start with
//! decode, predict, marks, judge, calibrate, coverage, check, log, rejudge    one file a command
//! columns, row, references              a CSV of readings: its header, its rows
//! sheet, shapes, number, harmless       what is written: CSV and JSON tables, JSON objects, numbers, text of others
//! failure                               why a command could not do its work, and the exit code
//! ```
//!
//! Exit codes: 0 done, 1 something in the input was wrong, 2 the command line was wrong, 3 a file or the terminal failed,
//! 4 a defect in the program.

mod aligned;
mod args;
mod bench;
mod calibrate;
mod check;
mod columns;
mod coverage;
mod decode;
mod failure;
mod harmless;
mod judge;
mod line;
mod log;
mod marks;
mod number;
mod output;
mod predict;
mod references;
mod rejudge;
mod row;
mod setup;
mod shapes;
mod shapes_meter;
mod sheet;

use std::ffi::OsString;
use std::io::{self, Read, Write};
use std::panic::{self, UnwindSafe};
use std::process::ExitCode;

use clap::{CommandFactory, Parser};

use args::{BenchOptions, Command, CommandLine};
use failure::{Failure, FailureKind, Finish};
use output::Output;

/// The three streams of a command.
struct Streams<'a> {
    stdin: &'a mut dyn Read,
    stdout: &'a mut dyn Write,
    stderr: &'a mut dyn Write,
}

/// Runs the command line, the program's name first, and returns the exit code. Writes to the given streams only, except
/// for the bench, which takes over the terminal.
pub fn run(
    arguments: impl IntoIterator<Item = OsString>,
    stdin: &mut dyn Read,
    stdout: &mut dyn Write,
    stderr: &mut dyn Write,
) -> ExitCode {
    let mut output = Output::to(stdout);
    let mut streams = Streams {
        stdin,
        stdout: &mut output,
        stderr,
    };
    let ended = match CommandLine::try_parse_from(arguments) {
        Ok(line) => obey(line, &mut streams).map(Finish::code),
        Err(error) => explain(&error, &mut streams),
    };
    let flushed = streams.stdout.flush().map_err(Failure::from);
    let code = match ended.and_then(|code| flushed.map(|()| code)) {
        Ok(code) => code,
        Err(_) if output.reader_is_gone() => Finish::Done.code(),
        Err(failure) => {
            failure.report(stderr);
            failure.code()
        }
    };
    ExitCode::from(code)
}

/// Runs the program; a panic ends it with exit code 4 and a plain message in place of a backtrace.
pub fn guard(program: impl FnOnce() -> ExitCode + UnwindSafe) -> ExitCode {
    panic::set_hook(Box::new(|info| {
        let what = info
            .payload()
            .downcast_ref::<String>()
            .map(String::as_str)
            .or_else(|| info.payload().downcast_ref::<&str>().copied())
            .unwrap_or("no message");
        let place = info.location().map(ToString::to_string).unwrap_or_default();
        Failure::defect(format!("a defect in the program: {what} ({place})"))
            .hint("what is saved stays saved; please report this with the line above and what was typed")
            .report(&mut io::stderr());
    }));
    panic::catch_unwind(program).unwrap_or(ExitCode::from(FailureKind::Defect.code()))
}

fn obey(line: CommandLine, streams: &mut Streams<'_>) -> Result<Finish, Failure> {
    let places = &line.places;
    if !matches!(line.command, None | Some(Command::Line)) && line.bench != BenchOptions::default()
    {
        return Err(
            Failure::usage("--units, --ascii, --bell and --demo belong to the bench")
                .hint("leave them out, or leave the command out"),
        );
    }
    match line.command {
        None => bench::open(places, &line.bench, streams),
        Some(Command::Line) => bench::lines(places, &line.bench, streams),
        Some(Command::Decode(args)) => decode::run(&args, streams),
        Some(Command::Predict(args)) => predict::run(&args, places, streams),
        Some(Command::Marks(args)) => marks::run(&args, streams),
        Some(Command::Judge(args)) => judge::run(&args, places, streams),
        Some(Command::Calibrate(args)) => calibrate::run(&args, places, streams),
        Some(Command::Coverage(args)) => coverage::run(&args, places, streams),
        Some(Command::Check(args)) => check::run(&args, streams),
        Some(Command::Log(args)) => log::run(&args, places, streams),
        Some(Command::Completions { shell }) => {
            let mut command = CommandLine::command();
            let mut script = Vec::new();
            clap_complete::generate(shell, &mut command, "nulltray", &mut script);
            streams.stdout.write_all(&script)?;
            Ok(Finish::Done)
        }
    }
}

/// Writes help and version to the output, mistakes of the command line to the error stream.
fn explain(error: &clap::Error, streams: &mut Streams<'_>) -> Result<u8, Failure> {
    let text = error.render().to_string();
    if error.use_stderr() {
        let _ = streams.stderr.write_all(text.as_bytes());
        return Ok(FailureKind::Usage.code());
    }
    streams.stdout.write_all(text.as_bytes())?;
    Ok(Finish::Done.code())
}
