//! What the person sees and does, as data: state, events, and what follows from them.
//!
//! [`open`] makes the [`State`], [`update`] is the only place where it changes; what is to be done outside comes back as
//! [`Effect`]s, whose answers are [`Event`]s again. Nothing here touches a file, a clock or a terminal.

mod assess;
mod bench;
mod cautions;
mod check_rows;
mod checks;
mod comparison;
mod describing;
mod earlier;
mod entry;
mod expecting;
mod figures;
mod help;
mod keys;
mod lists;
mod lot;
mod meter_rows;
pub mod new_meter;
mod pages;
mod record;
mod rejudge;
mod rim;
pub mod search;
mod sighting;
mod state;
#[cfg(test)]
mod testing;
mod update;
mod work;

pub use crate::finding::Circumstances;
pub use assess::{Assessment, Marked, Setup, assess, compartment, outcome, predict_marked};
pub use cautions::{GENERAL, SAME_SIDE, cautions, limits_in_force};
pub use check_rows::Chart;
pub use checks::{Checked, Checks, Series, SeriesKey, day_and_time};
pub use describing::is_at_the_end;
pub use entry::{Addition, Prompt, Typed, read as read_entry};
pub use expecting::parked_place;
pub use figures::{deviation, probability, uncertain};
pub use keys::{Binding, Intent, Key, Page};
pub use lists::{ListView, Row};
pub use lot::{Lot, Share, in_tolerances, went_to};
pub use new_meter::{Draft, Existing, Interview, ProfileFailure};
pub use pages::histogram;
pub use record::{Entry, LogFailure, Outcome, Raw, Record, RecordId, RecordKind};
pub use rejudge::{Change, Left, Rejudgement, rejudge};
pub use rim::printed_numbers;
pub use sighting::{Sighting, read_sighting};
pub use state::{
    Bench, Colours, Correcting, Effect, Event, Front, Glyphs, Last, Look, MeterFrom, Notice,
    Opening, Park, Pending, Purpose, Question, Shown, Size, Standing, State, Tone, Units, Warning,
};
pub use update::{chart_height, list_height, open, update};
pub use work::{Judgement, Subject, Work, place_of};
