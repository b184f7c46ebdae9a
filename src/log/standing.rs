//! Which entries stand: one pass over the rows, newest first.

use std::collections::HashMap;

use chrono::{DateTime, FixedOffset};

use super::row::{Deed, Row};

/// What the rows seen so far take back and replace.
#[derive(Debug, Default)]
pub(super) struct Standing {
    taken_back: HashMap<i64, DateTime<FixedOffset>>,
    replaced: HashMap<i64, DateTime<FixedOffset>>,
}

impl Standing {
    /// Takes the next older row in and tells when it was voided, `None` if it stands.
    ///
    /// Every row that could void it has a higher number, so it has been seen.
    pub(super) fn pass(&mut self, row: &Row) -> Option<DateTime<FixedOffset>> {
        let taken_back = self.taken_back.remove(&row.id);
        let replaced = self.replaced.remove(&row.id);
        if let (None, Some(target)) = (taken_back, row.voids()) {
            let voided = match row.deed {
                Deed::Entry { .. } => &mut self.replaced,
                Deed::Void(_) | Deed::Redo(_) => &mut self.taken_back,
            };
            voided.insert(target, row.time);
        }
        taken_back.or(replaced)
    }
}
