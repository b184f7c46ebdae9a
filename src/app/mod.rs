//! What the person sees and does, as data: state, events, and what follows from them.

mod record;

pub use record::{Entry, LogFailure, Outcome, Raw, Record, RecordId, RecordKind};
