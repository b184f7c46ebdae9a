//! What the screens show, what happens, and what is to be done about it.

use std::path::PathBuf;

use tui_input::Input;

use super::Key;
use super::checks::Checks;
use super::entry::Prompt;
use super::lists::ListView;
use super::lot::Lot;
use super::new_meter::{Draft, Interview, ProfileFailure};
use super::sighting::Sighting;
use super::work::Subject;
use super::{Entry, LogFailure, Marked, Page, Record, RecordId, Setup};
use crate::meter::{DialReading, Prediction, Switch};
use crate::quantity::{Farad, Fraction};
use crate::tables::TableRow;

/// Everything the program shows; only [`super::update`] changes it.
#[derive(Clone, Debug)]
pub struct State {
    /// The meter and the tray in force.
    pub setup: Setup,
    /// Whose meter it is.
    pub meter_from: MeterFrom,
    /// How it is to look.
    pub look: Look,
    /// The bench.
    pub bench: Bench,
    /// The screen in front.
    pub front: Front,
    /// The lot.
    pub lot: Lot,
    /// The readings of check parts and open terminals, as far as they are known: those of the lot at first, of all lots
    /// once they were asked for.
    pub checks: Checks,
    /// The rows of the code tables.
    pub codes: Vec<TableRow>,
    /// What is to be said now.
    pub notice: Option<Notice>,
    /// The size of the screen.
    pub size: Size,
    /// Whether the warning about high-voltage leakage tests was given: it is given once.
    pub leakage_warning: Warning,
    /// Whether it was said that readings are reached from the same side: it is said once.
    pub same_side: Warning,
    /// The questions about a new meter, and the answers so far.
    pub interview: Interview,
    /// Entries up to this one were read on a meter that is no longer in force.
    pub earlier_meter: Option<RecordId>,
    /// Whether the program is to end.
    pub done: bool,
}

/// Whose meter is in force.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum MeterFrom {
    /// The person's own profile.
    #[default]
    Profile,
    /// The built-in example.
    Example,
}

/// Whether something that is said once was said.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Warning {
    /// Not yet.
    #[default]
    Due,
    /// It was.
    Given,
}

/// How the screen is to look.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Look {
    /// The characters.
    pub glyphs: Glyphs,
    /// The colours.
    pub colours: Colours,
    /// The unit of capacitances.
    pub units: Units,
}

/// Which characters may be drawn.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Glyphs {
    /// Lines, blocks and braille.
    #[default]
    Unicode,
    /// Letters, digits and signs of ASCII only.
    Ascii,
}

/// Which colours may be used.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Colours {
    /// Any.
    True,
    /// The terminal's own sixteen.
    #[default]
    Sixteen,
    /// None: bold, dim and reversed only.
    None,
}

/// In which unit capacitances are shown.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Units {
    /// The one that fits.
    #[default]
    Auto,
    /// Picofarad.
    Pf,
    /// Nanofarad.
    Nf,
    /// Microfarad.
    Uf,
}

/// A size in character cells.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Size {
    /// Columns.
    pub width: u16,
    /// Rows.
    pub height: u16,
}

/// The screen in front, with what only it needs.
#[derive(Clone, Debug)]
pub enum Front {
    /// The bench.
    Bench,
    /// What has been sorted.
    Tray(ListView),
    /// What the meter can do.
    Meter(ListView),
    /// The code tables.
    Codes(ListView),
    /// The lot so far.
    Lot(ListView),
    /// Help for the screen named.
    Help(Page, ListView),
    /// The questions about a new meter.
    NewMeter,
}

impl Front {
    /// Returns which screen it is.
    pub fn page(&self) -> Page {
        match self {
            Self::Bench => Page::Bench,
            Self::Tray(_) => Page::Tray,
            Self::Meter(_) => Page::Meter,
            Self::Codes(_) => Page::Codes,
            Self::Lot(_) => Page::Lot,
            Self::Help(..) => Page::Help,
            Self::NewMeter => Page::NewMeter,
        }
    }

    /// Returns its list, if it has one.
    pub fn list(&self) -> Option<&ListView> {
        match self {
            Self::Bench | Self::NewMeter => None,
            Self::Tray(list)
            | Self::Meter(list)
            | Self::Codes(list)
            | Self::Lot(list)
            | Self::Help(_, list) => Some(list),
        }
    }

    /// Returns its list for changing, if it has one.
    pub(super) fn list_mut(&mut self) -> Option<&mut ListView> {
        match self {
            Self::Bench | Self::NewMeter => None,
            Self::Tray(list)
            | Self::Meter(list)
            | Self::Codes(list)
            | Self::Lot(list)
            | Self::Help(_, list) => Some(list),
        }
    }
}

/// The bench: two prompts that stand still, and what is known so far.
#[derive(Clone, Debug)]
pub struct Bench {
    /// The prompt being answered.
    pub prompt: Prompt,
    /// The marking prompt.
    pub marking: Input,
    /// The dial prompt.
    pub dial: Input,
    /// What is between the terminals; for a part, what its marking may mean as far as it is typed (or the last marking,
    /// while nothing is typed).
    pub subject: Subject,
    /// What Enter alone repeats.
    pub last: Option<Last>,
    /// The switch the person chose; `None`: the best one.
    pub switch: Option<Switch>,
    /// What the meter expects.
    pub prediction: Option<Prediction>,
    /// Where to park the dial for a batch of equal parts.
    pub park: Option<Park>,
    /// Capacitances at the printed numbers of the dial, on the switch in use.
    pub rim: Vec<(DialReading, Farad)>,
    /// The place on the dial that is typed so far.
    pub mark: Option<DialReading>,
    /// A sighting that was asked about.
    pub question: Option<Question>,
    /// The earlier entry being corrected.
    pub correcting: Option<Correcting>,
    /// What is on its way to the log.
    pub pending: Option<Pending>,
    /// The finding shown.
    pub shown: Option<Shown>,
}

/// The last marking, as it was read.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Last {
    /// The marking.
    pub marking: String,
    /// The reading chosen by the person.
    pub chosen: Option<usize>,
    /// The switch chosen by the person.
    pub switch: Option<Switch>,
}

/// Where to park the dial for a batch of equal parts.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Park {
    /// The place.
    pub at: DialReading,
    /// What share of good parts a dark lamp settles there; `None` if a dark lamp settles nothing.
    pub settles: Option<Fraction>,
}

/// A sighting that was asked about.
#[derive(Clone, Debug, PartialEq)]
pub struct Question {
    /// The switch of the reading.
    pub switch: Switch,
    /// The reading.
    pub sighting: Sighting,
}

/// The earlier entry being corrected.
#[derive(Clone, Debug, PartialEq)]
pub struct Correcting {
    /// How many parts back, 0 being the last.
    pub back: usize,
    /// The entry as it stands.
    pub id: RecordId,
    /// Its record.
    pub record: Record,
}

/// What is on its way to the log.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Pending {
    /// What it is.
    pub purpose: Purpose,
    /// Why no compartment takes the part.
    pub unplaced: Option<String>,
}

/// Why something is written to the log.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Purpose {
    /// A new entry.
    New,
    /// An earlier entry, corrected.
    Correction,
    /// An earlier entry with something added.
    Addition,
}

/// A finding on the screen: it is in the log.
#[derive(Clone, Debug, PartialEq)]
pub struct Shown {
    /// The number of the entry in the log.
    pub id: RecordId,
    /// The running number of the part in the lot; `None` for check parts and open terminals.
    pub number: Option<usize>,
    /// What stands in the log.
    pub record: Record,
    /// Why no compartment takes the part.
    pub unplaced: Option<String>,
}

/// Something to say.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Notice {
    /// How loud.
    pub tone: Tone,
    /// What.
    pub text: String,
}

/// How loud a notice is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Tone {
    /// For information.
    Said,
    /// A question that waits for an answer.
    Asked,
    /// What was typed was not understood; it is still in the prompt.
    Refused,
    /// Something could not be saved; it is still in the prompt.
    Failed,
}

/// Something that happened.
#[derive(Clone, Debug)]
pub enum Event {
    /// A key was pressed.
    Key(Key),
    /// A whole line was typed at the prompt (for `line`).
    Line(String),
    /// The screen has another size.
    Resize(Size),
    /// An entry is on disk, or is not.
    Logged(Result<Box<Entry>, LogFailure>),
    /// The last entry was taken back (`None`: there was none), and this is what stands now.
    TakenBack(Result<(Option<Box<Entry>>, Standing), LogFailure>),
    /// The entry taken back last stands again (`None`: there was none), and this is what stands now.
    BroughtBack(Result<(Option<Box<Entry>>, Standing), LogFailure>),
    /// All entries of the log that stand, as asked for.
    Looked(Result<Vec<Entry>, LogFailure>),
    /// The profile is on disk at this place, or is not.
    ProfileWritten(Result<PathBuf, ProfileFailure>),
    /// All readings of check parts and open terminals, voided ones too, as asked for.
    LookedAtChecks(Result<Vec<Entry>, LogFailure>),
}

/// What stands in the log.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Standing {
    /// The entries of the lot, voided ones too, in the order of writing.
    pub entries: Vec<Entry>,
    /// How many parts lie in each compartment, of all lots.
    pub counts: Vec<(String, u32)>,
}

/// Something to be done outside.
#[derive(Clone, Debug, PartialEq)]
pub enum Effect {
    /// Write an entry; answered by [`Event::Logged`].
    Append(Box<Record>),
    /// Take back the last entry of the lot; answered by [`Event::TakenBack`].
    TakeBack,
    /// Bring back the entry taken back last; answered by [`Event::BroughtBack`].
    BringBack,
    /// Read all entries that stand; answered by [`Event::Looked`].
    Look,
    /// Write a profile; answered by [`Event::ProfileWritten`].
    WriteProfile(Box<Draft>),
    /// Read the readings of check parts and open terminals of all lots; answered by [`Event::LookedAtChecks`].
    LookAtChecks,
    /// Ring, if that was asked for.
    Bell,
}

/// What the program starts with.
#[derive(Clone, Debug)]
pub struct Opening {
    /// The meter and the tray.
    pub setup: Setup,
    /// Whose meter it is.
    pub meter_from: MeterFrom,
    /// Where the person's own profile is looked for, if that is known.
    pub profile_place: Option<PathBuf>,
    /// How it is to look.
    pub look: Look,
    /// The name of the lot.
    pub lot: String,
    /// What stands in the log.
    pub standing: Standing,
    /// The rows of the code tables.
    pub codes: Vec<TableRow>,
    /// The size of the screen.
    pub size: Size,
}

impl Bench {
    /// Makes an empty bench.
    pub(super) fn empty() -> Self {
        Self {
            prompt: Prompt::Marking,
            marking: Input::default(),
            dial: Input::default(),
            subject: Subject::Part(Marked::default()),
            last: None,
            switch: None,
            prediction: None,
            park: None,
            rim: Vec::new(),
            mark: None,
            question: None,
            correcting: None,
            pending: None,
            shown: None,
        }
    }

    /// Returns the line being typed.
    pub fn line(&self) -> &Input {
        match self.prompt {
            Prompt::Marking => &self.marking,
            Prompt::Dial => &self.dial,
        }
    }

    pub(super) fn line_mut(&mut self) -> &mut Input {
        match self.prompt {
            Prompt::Marking => &mut self.marking,
            Prompt::Dial => &mut self.dial,
        }
    }

    /// Returns what the marking may mean; `None` for check parts and open terminals.
    pub fn marked(&self) -> Option<&Marked> {
        match &self.subject {
            Subject::Part(marked) => Some(marked),
            _ => None,
        }
    }

    /// Returns the switch to use.
    pub fn switch_in_use(&self) -> Option<Switch> {
        self.prediction
            .as_ref()
            .map(|expected| expected.switch)
            .or(self.switch)
    }
}

impl Notice {
    pub(super) fn new(tone: Tone, text: impl Into<String>) -> Self {
        Self {
            tone,
            text: text.into(),
        }
    }
}
