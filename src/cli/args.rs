//! The command line as people type it.

use std::ffi::OsString;
use std::path::PathBuf;

use clap::{Args, Parser, Subcommand, ValueEnum};
use clap_complete::Shell;

/// Sorts salvaged capacitors with a home-built balance meter: reads the marking, says where the lamp goes dark, judges
/// the reading, names the compartment. Without a command it opens the bench.
#[derive(Debug, Parser)]
#[command(name = "nulltray", version, disable_help_subcommand = true)]
pub(super) struct CommandLine {
    #[command(flatten)]
    pub(super) places: Places,
    #[command(flatten)]
    pub(super) bench: BenchOptions,
    #[command(subcommand)]
    pub(super) command: Option<Command>,
}

/// Where things are kept.
#[derive(Args, Clone, Debug, Default)]
pub(super) struct Places {
    /// Profile of the meter
    #[arg(long, global = true, value_name = "FILE")]
    pub(super) meter: Option<PathBuf>,
    /// Tray and house rules
    #[arg(long, global = true, value_name = "FILE")]
    pub(super) tray: Option<PathBuf>,
    /// Log of the parts
    #[arg(long, global = true, value_name = "FILE")]
    pub(super) log: Option<PathBuf>,
    /// Name of the lot; without it today's date
    #[arg(long, global = true, value_name = "NAME")]
    pub(super) lot: Option<String>,
}

/// What only the bench and `line` take.
#[derive(Args, Clone, Debug, Default, PartialEq, Eq)]
#[command(next_help_heading = "Bench")]
pub(super) struct BenchOptions {
    /// Unit of all capacitances on the screen [default: auto]
    #[arg(
        long,
        value_enum,
        hide_possible_values = true,
        value_name = "pf|nf|uf|auto"
    )]
    pub(super) units: Option<Units>,
    /// Draw with plain characters only
    #[arg(long)]
    pub(super) ascii: bool,
    /// Ring the bell with every finding
    #[arg(long)]
    pub(super) bell: bool,
    /// Open on a built-in lot; nothing is kept
    #[arg(long)]
    pub(super) demo: bool,
}

/// The unit of capacitances on the screen.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub(super) enum Units {
    /// Picofarad
    Pf,
    /// Nanofarad
    Nf,
    /// Microfarad
    Uf,
    /// Whatever suits the value
    #[default]
    Auto,
}

#[derive(Debug, Subcommand)]
pub(super) enum Command {
    /// Say what a marking may mean
    Decode(DecodeArgs),
    /// Say where the lamp will go dark for a part
    Predict(PredictArgs),
    /// Say how a part is likely to be marked
    Marks(MarksArgs),
    /// Judge a file of readings
    Judge(JudgeArgs),
    /// Calibrate the meter from parts of known value
    Calibrate(CalibrateArgs),
    /// Say where each switch of the meter can be trusted
    Coverage(CoverageArgs),
    /// Look for mistakes in profiles, trays and logs
    Check(CheckArgs),
    /// The bench as plain lines, for screen readers and scripts
    Line,
    /// Show, export, correct or copy the log
    Log(LogArgs),
    /// Print completions for a shell
    Completions {
        /// The shell
        shell: Shell,
    },
}

#[derive(Args, Debug)]
pub(super) struct DecodeArgs {
    /// Family or member, if it is known: film, pp, mlcc1 …
    #[arg(long, value_name = "FAMILY")]
    pub(super) family: Option<String>,
    /// Write JSON
    #[arg(long)]
    pub(super) json: bool,
    /// Marking of one part, its lines separated by " | "; - reads one marking a line
    #[arg(required = true, value_name = "MARKING")]
    pub(super) markings: Vec<OsString>,
}

#[derive(Args, Debug)]
pub(super) struct PredictArgs {
    /// Label of the switch; without it the one that measures best
    #[arg(long, value_name = "LABEL")]
    pub(super) switch: Option<String>,
    /// Loss (tan δ) to assume instead of the family's usual one
    #[arg(long, value_name = "LOSS")]
    pub(super) loss: Option<String>,
    /// Family or member, if it is known
    #[arg(long, value_name = "FAMILY")]
    pub(super) family: Option<String>,
    /// A capacitance in place of a marking: "4.7 nF", 4n7
    #[arg(long, value_name = "QUANTITY", conflicts_with = "marking")]
    pub(super) capacitance: Option<String>,
    /// Write JSON
    #[arg(long)]
    pub(super) json: bool,
    /// Marking of the part
    #[arg(required_unless_present = "capacitance", value_name = "MARKING")]
    pub(super) marking: Option<OsString>,
}

#[derive(Args, Debug)]
pub(super) struct MarksArgs {
    /// Tolerance that is to be marked: "5 %", "-20/+80 %", "±0.25 pF"
    #[arg(long, value_name = "TOLERANCE", allow_hyphen_values = true)]
    pub(super) tolerance: Option<String>,
    /// Family or member, if it is known
    #[arg(long, value_name = "FAMILY")]
    pub(super) family: Option<String>,
    /// Rated direct voltage that is to be marked: "100 V"
    #[arg(long, value_name = "VOLTAGE")]
    pub(super) voltage: Option<String>,
    /// Write JSON
    #[arg(long)]
    pub(super) json: bool,
    /// Capacitance of the part: "220 nF", 4n7
    #[arg(value_name = "QUANTITY")]
    pub(super) capacitance: String,
}

#[derive(Args, Debug)]
pub(super) struct JudgeArgs {
    /// Write JSON instead of CSV
    #[arg(long)]
    pub(super) json: bool,
    /// Readings with a header line: `marking`, `switch` and `dial`, or `dark_from` and `dark_to`, or `lamp`; - reads standard input
    #[arg(value_name = "FILE.csv")]
    pub(super) file: PathBuf,
}

#[derive(Args, Debug)]
pub(super) struct CalibrateArgs {
    /// Where the calibrated profile goes; without it only the report is written
    #[arg(long, value_name = "FILE.toml")]
    pub(super) out: Option<PathBuf>,
    /// Write JSON
    #[arg(long)]
    pub(super) json: bool,
    /// Readings of known parts: `capacitance`, `uncertainty` (standard), `loss`, `switch`, `dial` or `dark_from` and `dark_to`, `label`
    #[arg(value_name = "REFS.csv")]
    pub(super) references: PathBuf,
}

#[derive(Args, Debug)]
pub(super) struct CoverageArgs {
    /// How good a value must be to count as useful: "3 %" [default: 5 %]
    #[arg(long, value_name = "LIMIT")]
    pub(super) limit: Option<String>,
    /// Write JSON
    #[arg(long)]
    pub(super) json: bool,
}

#[derive(Args, Debug)]
pub(super) struct CheckArgs {
    /// Profiles, trays or logs
    #[arg(required = true, value_name = "FILE")]
    pub(super) files: Vec<PathBuf>,
}

#[derive(Args, Debug)]
pub(super) struct LogArgs {
    #[command(subcommand)]
    pub(super) command: LogCommand,
}

#[derive(Debug, Subcommand)]
pub(super) enum LogCommand {
    /// Show the entries
    Show,
    /// Show the entries that resemble a text
    Find {
        /// Part of a marking, a lot, a note …
        #[arg(required = true, value_name = "TEXT")]
        text: Vec<String>,
    },
    /// Write all entries for other programs
    Export {
        /// csv (if not given) or json
        #[arg(
            long,
            value_enum,
            default_value_t,
            hide_possible_values = true,
            hide_default_value = true,
            value_name = "csv|json"
        )]
        format: ExportFormat,
    },
    /// Take back the last entry of the lot
    Undo,
    /// Bring back the entry taken back last
    Redo,
    /// Judge the entries again with the meter and tray in force, and show what would change
    Rejudge(RejudgeArgs),
    /// Copy a log, even one in use, to a new file
    Backup {
        /// The copy; must not exist yet
        #[arg(value_name = "FILE")]
        file: PathBuf,
    },
}

#[derive(Args, Debug)]
pub(super) struct RejudgeArgs {
    /// Write the new findings: each as a new entry in place of the first one, which stays in the log
    #[arg(long)]
    pub(super) write: bool,
    /// Write JSON
    #[arg(long)]
    pub(super) json: bool,
}

/// How the log is exported.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub(super) enum ExportFormat {
    /// Comma-separated, with a header
    #[default]
    Csv,
    /// An array of objects
    Json,
}
