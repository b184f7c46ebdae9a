//! The lot so far: its entries that stand, and what they say together.

use std::collections::{BTreeMap, HashMap};

use super::{Entry, Outcome, RecordId, RecordKind, Standing};

/// The lot.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Lot {
    /// Its name.
    pub name: String,
    /// The entries that stand, in the order of measuring: a corrected one stands where the first one stood.
    pub entries: Vec<Entry>,
    /// How many parts lie in each compartment, of all lots.
    pub counts: BTreeMap<String, u32>,
    /// Which entries the corrected ones go back to.
    firsts: Firsts,
}

/// A share with its interval.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Share {
    /// The share itself, 0 to 1.
    pub share: f64,
    /// Lower end of the 95 % interval.
    pub low: f64,
    /// Upper end of the 95 % interval.
    pub high: f64,
}

impl Lot {
    /// Makes the lot from what stands in the log.
    pub fn new(name: String, standing: Standing) -> Self {
        let mut lot = Self {
            name,
            ..Self::default()
        };
        lot.refresh(standing);
        lot
    }

    /// Takes over what stands in the log now.
    pub(super) fn refresh(&mut self, standing: Standing) {
        self.counts = standing.counts.into_iter().collect();
        self.firsts = Firsts::of(&standing.entries);
        self.entries = in_order(standing.entries);
    }

    /// Takes in an entry that was just written.
    pub(super) fn accept(&mut self, entry: Entry) {
        let replaced = entry.record.replaces;
        self.firsts.accept(&entry);
        let place = self.entries.iter().position(|e| Some(e.id) == replaced);
        if let Some(compartment) = went_to(&entry.record.outcome) {
            *self.counts.entry(compartment.to_owned()).or_default() += 1;
        }
        let Some(index) = place else {
            self.entries.push(entry);
            return;
        };
        if let Some(standing) = self.entries.get_mut(index) {
            if let Some(before) = went_to(&standing.record.outcome) {
                let count = self.counts.entry(before.to_owned()).or_default();
                *count = count.saturating_sub(1);
            }
            *standing = entry;
        }
    }

    /// Returns the parts, first measured first.
    pub fn parts(&self) -> impl DoubleEndedIterator<Item = &Entry> {
        self.entries
            .iter()
            .filter(|entry| entry.record.kind == RecordKind::Part)
    }

    /// Returns the running number of a part, counted from 1.
    pub fn number(&self, id: RecordId) -> Option<usize> {
        self.parts()
            .position(|entry| entry.id == id)
            .map(|index| index + 1)
    }

    /// Returns the running numbers of the parts that were measured after an entry; of all, without one.
    pub(super) fn numbers_since(&self, good: Option<RecordId>) -> Vec<usize> {
        let after = |id: RecordId| good.is_none_or(|good| self.firsts.first(id) > good);
        let numbered = (1..).zip(self.parts());
        numbered
            .filter(|(_, entry)| after(entry.id))
            .map(|(number, _)| number)
            .collect()
    }

    /// Returns how many parts have this finding.
    pub fn count(&self, finding: &str) -> usize {
        self.parts()
            .filter(|entry| entry.record.outcome.finding == finding)
            .count()
    }

    /// Returns how many parts lie in a compartment.
    pub fn in_compartment(&self, place: &str) -> u32 {
        self.counts.get(place).copied().unwrap_or(0)
    }

    /// Returns the median time from one part to the next in seconds; pauses of more than ten minutes do not count, nor do
    /// parts written together.
    pub fn seconds_a_part(&self) -> Option<f64> {
        const PAUSE_S: f64 = 600.0;
        let times: Vec<_> = self.parts().map(|entry| entry.time).collect();
        let steps = times.iter().zip(times.iter().skip(1));
        let mut gaps: Vec<f64> = steps
            .map(|(one, next)| (*next - *one).as_seconds_f64())
            .filter(|gap| 0.0 < *gap && *gap <= PAUSE_S)
            .collect();
        gaps.sort_by(f64::total_cmp);
        gaps.get(gaps.len() / 2).copied()
    }

    /// Returns how many parts were measured since the last check part.
    pub fn since_check(&self) -> usize {
        self.entries
            .iter()
            .rev()
            .take_while(|entry| entry.record.kind != RecordKind::Check)
            .filter(|entry| entry.record.kind == RecordKind::Part)
            .count()
    }

    /// Returns the share of parts inside, of those with a word; `None` if there are none. Wilson's interval (E. B. Wilson,
    /// J. Am. Stat. Assoc. 22 (1927) 209).
    pub fn share_inside(&self) -> Option<Share> {
        let inside = self.count("inside");
        let decided = inside + self.count("outside") + self.count("dead");
        wilson(inside, decided)
    }

    /// Returns the share of measured values within their limits, with the error that all parts of the session share in
    /// it: the widest interval of three, the values as they are and moved by twice the common uncertainty either way.
    pub fn share_with_common_error(&self) -> Option<Share> {
        let plain = self.share_moved(0.0)?;
        let moved = [self.share_moved(-2.0)?, self.share_moved(2.0)?];
        Some(moved.into_iter().fold(plain, |widest, share| Share {
            share: widest.share,
            low: widest.low.min(share.low),
            high: widest.high.max(share.high),
        }))
    }

    fn share_moved(&self, times_common: f64) -> Option<Share> {
        let mut inside = 0;
        let mut valued = 0;
        for entry in self.parts() {
            let outcome = &entry.record.outcome;
            let (Some(value), Some(low)) = (outcome.capacitance_pf, outcome.low_pf) else {
                continue;
            };
            let moved = value + times_common * common(outcome);
            valued += 1;
            inside += usize::from(low <= moved && outcome.high_pf.is_none_or(|high| moved <= high));
        }
        wilson(inside, valued)
    }

    /// Returns the deviations of the values from nominal in units of their tolerance: -1 and +1 are the limits.
    pub fn deviations(&self) -> Vec<f64> {
        self.parts()
            .filter_map(|entry| in_tolerances(&entry.record.outcome))
            .collect()
    }
}

/// Returns the place a part went to.
pub fn went_to(outcome: &Outcome) -> Option<&str> {
    outcome
        .compartment
        .as_deref()
        .filter(|place| *place != "no place")
}

/// Returns the deviation of a value from nominal in units of the tolerance on that side.
pub fn in_tolerances(outcome: &Outcome) -> Option<f64> {
    let (value, nominal) = (outcome.capacitance_pf?, outcome.nominal_pf?);
    let limit = if value < nominal {
        nominal - outcome.low_pf?
    } else {
        outcome.high_pf? - nominal
    };
    (limit > 0.0).then(|| (value - nominal) / limit)
}

fn common(outcome: &Outcome) -> f64 {
    let all = outcome.uncertainty_pf.unwrap_or(0.0);
    let own = outcome.own_uncertainty_pf.unwrap_or(0.0);
    (all * all - own * own).max(0.0).sqrt()
}

fn wilson(hits: usize, of: usize) -> Option<Share> {
    /// The 97.5 % point of the normal distribution.
    const Z: f64 = 1.959_963_984_540_054;
    if of == 0 {
        return None;
    }
    let (n, share) = (of as f64, hits as f64 / of as f64);
    let scale = 1.0 + Z * Z / n;
    let middle = (share + Z * Z / (2.0 * n)) / scale;
    let half = Z / scale * (share * (1.0 - share) / n + Z * Z / (4.0 * n * n)).sqrt();
    Some(Share {
        share,
        low: (middle - half).max(0.0),
        high: (middle + half).min(1.0),
    })
}

/// Which entry each one goes back to, by way of corrections.
#[derive(Clone, Debug, Default, PartialEq)]
pub(super) struct Firsts(HashMap<RecordId, RecordId>);

impl Firsts {
    /// Takes note of who replaces whom; all entries are needed, voided ones too.
    pub(super) fn of(entries: &[Entry]) -> Self {
        let before = entries
            .iter()
            .filter_map(|entry| Some((entry.id, entry.record.replaces?)));
        Self(before.collect())
    }

    /// Takes note of another entry.
    pub(super) fn accept(&mut self, entry: &Entry) {
        let before = entry.record.replaces;
        self.0.extend(before.map(|before| (entry.id, before)));
    }

    /// Returns the entry that stood first in the place of this one: that is when it was measured.
    pub(super) fn first(&self, mut id: RecordId) -> RecordId {
        while let Some(earlier) = self.0.get(&id).filter(|earlier| **earlier < id) {
            id = *earlier;
        }
        id
    }
}

/// Drops what was voided and puts each entry where the first one of its corrections stood.
pub(super) fn in_order(entries: Vec<Entry>) -> Vec<Entry> {
    let firsts = Firsts::of(&entries);
    let mut standing: Vec<Entry> = entries.into_iter().filter(|e| e.voided.is_none()).collect();
    standing.sort_by_key(|entry| (firsts.first(entry.id), entry.id));
    standing
}

#[cfg(test)]
mod tests {
    use super::super::{Raw, Record};
    use super::*;
    use chrono::DateTime;

    fn entry(id: i64, replaces: Option<i64>, finding: &str, place: &str) -> Entry {
        let second = 10 * id;
        let time = DateTime::from_timestamp(second, 0).expect("a time");
        Entry {
            id: RecordId(id),
            time: time.fixed_offset(),
            voided: None,
            profile: String::new(),
            record: Record {
                lot: "amplifier 7".to_owned(),
                kind: RecordKind::Part,
                raw: Raw::default(),
                outcome: Outcome {
                    finding: finding.to_owned(),
                    compartment: Some(place.to_owned()),
                    ..Outcome::default()
                },
                replaces: replaces.map(RecordId),
            },
        }
    }

    #[test]
    fn a_corrected_entry_stands_where_the_first_one_stood() {
        let mut lot = Lot::default();
        lot.accept(entry(1, None, "inside", "A1"));
        lot.accept(entry(2, None, "inside", "A1"));
        lot.accept(entry(3, Some(1), "outside", "D6"));
        let ids: Vec<i64> = lot.parts().map(|e| e.id.0).collect();
        assert_eq!(ids, [3, 2]);
        assert_eq!((lot.in_compartment("A1"), lot.in_compartment("D6")), (1, 1));
        assert_eq!(lot.number(RecordId(3)), Some(1));

        let mut voided = entry(1, None, "inside", "A1");
        voided.voided = Some(voided.time);
        let again = vec![
            voided,
            entry(2, None, "inside", "A1"),
            entry(3, Some(1), "outside", "D6"),
        ];
        let ids: Vec<i64> = in_order(again).iter().map(|e| e.id.0).collect();
        assert_eq!(ids, [3, 2]);
    }

    #[test]
    fn shares_have_wilsons_interval() {
        let shown = |hits, of| {
            wilson(hits, of).map(|s| format!("{:.3} {:.3} {:.3}", s.share, s.low, s.high))
        };
        assert_eq!(shown(0, 0), None);
        assert_eq!(shown(81, 263).as_deref(), Some("0.308 0.255 0.366"));
        assert_eq!(shown(0, 10).as_deref(), Some("0.000 0.000 0.278"));
    }

    #[test]
    fn the_median_gap_is_the_time_a_part_takes() {
        let mut lot = Lot::default();
        for id in [1, 2, 3, 500] {
            lot.accept(entry(id, None, "inside", "no place"));
        }
        assert_eq!(lot.seconds_a_part(), Some(10.0));
        assert_eq!(lot.in_compartment("no place"), 0);
    }
}
