//! What the person sees and does, as data: state, events, and what follows from them.

mod assess;
mod record;

pub use assess::{Assessment, Marked, Setup, assess, compartment, outcome, predict_marked};
pub use record::{Entry, LogFailure, Outcome, Raw, Record, RecordId, RecordKind};
