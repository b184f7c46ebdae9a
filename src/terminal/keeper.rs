//! What performs effects: appends, takes back, brings back, reads; for the bench and `line` alike.

use std::collections::VecDeque;

use chrono::{DateTime, FixedOffset, Local, SubsecRound};

use super::profile_file;
use crate::app::{self, Effect, Entry, Event, LogFailure, Record, RecordId, Standing, State};
use crate::log::{Log, Which};

/// The keeper of the log.
#[derive(Debug)]
pub struct Keeper {
    log: Log,
    lot: String,
}

/// What came of an event.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Settled {
    /// The entry that is on disk now, if one was written.
    pub saved: Option<RecordId>,
    /// How often to ring.
    pub n_bells: u32,
}

impl Settled {
    pub(super) fn add(&mut self, later: Self) {
        self.saved = later.saved.or(self.saved);
        self.n_bells += later.n_bells;
    }
}

impl Keeper {
    /// Makes the keeper of a lot.
    pub fn new(log: Log, lot: String) -> Self {
        Self { log, lot }
    }

    /// Takes in an event with all that follows from it, and returns when there is nothing left to do.
    pub fn settle(&mut self, state: &mut State, event: Event) -> Settled {
        let mut settled = Settled::default();
        let mut queue = VecDeque::from([event]);
        while let Some(event) = queue.pop_front() {
            if let Event::Logged(Ok(entry)) = &event {
                settled.saved = Some(entry.id);
            }
            for effect in app::update(state, event) {
                match self.perform(effect, &state.setup.profile_text) {
                    Some(answer) => queue.push_back(answer),
                    None => settled.n_bells += 1,
                }
            }
        }
        settled
    }

    /// Does what is asked for; returns the answer, `None` if all there is to do is to ring. `profile_text` is the whole
    /// text of the profile in force.
    fn perform(&mut self, effect: Effect, profile_text: &str) -> Option<Event> {
        let now = Local::now().fixed_offset().trunc_subsecs(3);
        Some(match effect {
            Effect::Append(record) => {
                Event::Logged(self.append(*record, now, profile_text).map(Box::new))
            }
            Effect::TakeBack => Event::TakenBack(
                self.log
                    .void_last(&self.lot, now)
                    .and_then(|entry| Ok((entry.map(Box::new), self.standing()?))),
            ),
            Effect::BringBack => Event::BroughtBack(
                self.log
                    .redo(&self.lot, now)
                    .and_then(|entry| Ok((entry.map(Box::new), self.standing()?))),
            ),
            Effect::Look => Event::Looked(self.log.entries(None, Which::Live)),
            Effect::WriteProfile(draft) => Event::ProfileWritten(profile_file::write(&draft)),
            Effect::LookAtChecks => Event::LookedAtChecks(self.log.checks()),
            Effect::Bell => return None,
        })
    }

    fn append(
        &mut self,
        record: Record,
        time: DateTime<FixedOffset>,
        profile_text: &str,
    ) -> Result<Entry, LogFailure> {
        let id = self.log.append(&record, time, profile_text)?;
        let hash = crc32fast::hash(profile_text.as_bytes());
        Ok(Entry {
            id,
            time,
            voided: None,
            profile: format!("{hash:08x}"),
            record,
        })
    }

    /// Returns what stands in the log: the entries of the lot, and the counts of all lots.
    ///
    /// # Errors
    /// If the log cannot be read.
    pub fn standing(&self) -> Result<Standing, LogFailure> {
        let entries = self.log.entries(Some(&self.lot), Which::All)?;
        let counts = self.log.counts()?;
        let counts = counts
            .by_compartment()
            .into_iter()
            .filter_map(|(place, count)| {
                Some((place?.to_owned(), u32::try_from(count).unwrap_or(u32::MAX)))
            })
            .collect();
        Ok(Standing { entries, counts })
    }
}
