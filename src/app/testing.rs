//! For tests: a bench with the example meter, keys as one string, and a log in memory that answers at once.
//!
//! In a string of keys `↵` is Enter, `⇥` Tab, `⎋` Esc, `⌫` Backspace, `↑` and `↓` themselves, `^Z` Ctrl-Z, `①` … `⑥` the
//! function keys; every other character is typed.

use std::collections::{BTreeMap, VecDeque};
use std::path::PathBuf;

use chrono::DateTime;

use super::{
    Draft, Effect, Entry, Event, Existing, Key, LogFailure, Look, MeterFrom, Opening,
    ProfileFailure, Record, RecordId, Setup, Size, Standing, State, open, update,
};
use crate::meter::Meter;
use crate::tables;
use crate::tray::Tray;

const TRAY: &str = r#"
name = "drawer in the signal hut"
rows = 2
columns = 3
[[compartment]]
at = "A1"
label = "film 100 nF to 1 µF"
takes = { finding = "inside", nominal = "100 nF .. 1 µF" }
[[compartment]]
at = "B2"
label = "outside"
takes = { finding = "outside" }
[rules]
check_every = 3
"#;

/// A bench whose effects are performed in memory.
pub(super) struct Table {
    pub(super) state: State,
    entries: Vec<Entry>,
    /// What the log says next instead of taking an entry.
    pub(super) failure: Option<LogFailure>,
    /// The profiles that were written.
    pub(super) profiles: BTreeMap<PathBuf, String>,
    /// What is said next instead of writing a profile.
    pub(super) profile_failure: Option<ProfileFailure>,
}

/// Returns the example meter with a small tray.
pub(super) fn setup() -> Setup {
    let text = include_str!("../../data/example-meter.toml");
    let (meter, _) = Meter::read(text).expect("the example profile is readable");
    let (tray, _) = Tray::read(TRAY).expect("the tray is readable");
    Setup {
        meter,
        profile_text: text.to_owned(),
        tray: Some(tray),
    }
}

impl Table {
    pub(super) fn new() -> Self {
        Self {
            state: open(Opening {
                setup: setup(),
                meter_from: MeterFrom::Profile,
                profile_place: Some("/home/signal/meter.toml".into()),
                look: Look::default(),
                lot: "amplifier 7".to_owned(),
                standing: Standing::default(),
                codes: tables::rows(),
                size: Size {
                    width: 80,
                    height: 24,
                },
            }),
            entries: Vec::new(),
            failure: None,
            profiles: BTreeMap::new(),
            profile_failure: None,
        }
    }

    /// Types keys; returns what was asked for outside, in words.
    pub(super) fn keys(&mut self, keys: &str) -> Vec<String> {
        let mut asked = Vec::new();
        for key in keys_of(keys) {
            asked.extend(self.settle(Event::Key(key)));
        }
        asked
    }

    /// Types a line, as `line` does.
    pub(super) fn line(&mut self, text: &str) -> Vec<String> {
        self.settle(Event::Line(text.to_owned()))
    }

    fn settle(&mut self, event: Event) -> Vec<String> {
        let mut asked = Vec::new();
        let mut queue = VecDeque::from([event]);
        while let Some(event) = queue.pop_front() {
            for effect in update(&mut self.state, event) {
                asked.push(in_words(&effect));
                queue.extend(self.perform(effect));
            }
        }
        asked
    }

    fn perform(&mut self, effect: Effect) -> Option<Event> {
        match effect {
            Effect::Append(record) => Some(Event::Logged(self.append(*record).map(Box::new))),
            Effect::TakeBack => {
                let last = self.entries.iter().rposition(|e| e.voided.is_none());
                let taken = last.and_then(|index| self.entries.get_mut(index));
                let entry = taken.map(|entry| {
                    entry.voided = Some(entry.time);
                    Box::new(entry.clone())
                });
                if let Some(replaced) = entry.as_ref().and_then(|e| e.record.replaces) {
                    let replaced = self.entries.iter_mut().find(|e| e.id == replaced);
                    replaced.expect("it is there").voided = None;
                }
                Some(Event::TakenBack(Ok((entry, self.standing()))))
            }
            Effect::BringBack => {
                let last = self.entries.iter_mut().rev().find(|e| e.voided.is_some());
                let entry = last.map(|entry| {
                    entry.voided = None;
                    Box::new(entry.clone())
                });
                Some(Event::BroughtBack(Ok((entry, self.standing()))))
            }
            Effect::Look => Some(Event::Looked(Ok(self.entries.clone()))),
            Effect::WriteProfile(draft) => Some(Event::ProfileWritten(self.write(*draft))),
            Effect::LookAtChecks => Some(Event::LookedAtChecks(Ok(self.entries.clone()))),
            Effect::Bell => None,
        }
    }

    fn write(&mut self, draft: Draft) -> Result<PathBuf, ProfileFailure> {
        if let Some(failure) = self.profile_failure.take() {
            return Err(failure);
        }
        if draft.existing == Existing::Kept && self.profiles.contains_key(&draft.path) {
            return Err(ProfileFailure::Exists);
        }
        self.profiles.insert(draft.path.clone(), draft.text);
        Ok(draft.path)
    }

    fn append(&mut self, record: Record) -> Result<Entry, LogFailure> {
        if let Some(failure) = self.failure.take() {
            return Err(failure);
        }
        let number = i64::try_from(self.entries.len()).expect("few entries") + 1;
        let time = DateTime::from_timestamp(1_780_000_000 + 9 * number, 0).expect("a time");
        for entry in &mut self.entries {
            if Some(entry.id) == record.replaces {
                entry.voided = Some(time.fixed_offset());
            }
        }
        let entry = Entry {
            id: RecordId(number),
            time: time.fixed_offset(),
            voided: None,
            profile: self.state.setup.profile_hash(),
            record,
        };
        self.entries.push(entry.clone());
        Ok(entry)
    }

    fn standing(&self) -> Standing {
        let live = self.entries.iter().filter(|e| e.voided.is_none());
        let places = live.filter_map(|e| e.record.outcome.compartment.clone());
        Standing {
            entries: self.entries.clone(),
            counts: places.map(|place| (place, 1)).collect(),
        }
    }

    /// Returns what is said now.
    pub(super) fn notice(&self) -> &str {
        self.state.notice.as_ref().map_or("", |notice| &notice.text)
    }

    /// Returns the parts of the lot: marking, finding, compartment.
    pub(super) fn parts(&self) -> Vec<String> {
        let parts = self.state.lot.parts().map(|entry| {
            let outcome = &entry.record.outcome;
            let place = outcome.compartment.as_deref().unwrap_or("-");
            format!("{} {} {place}", entry.record.raw.marking, outcome.finding)
        });
        parts.collect()
    }
}

fn in_words(effect: &Effect) -> String {
    match effect {
        Effect::Append(record) => {
            let place = record.outcome.compartment.as_deref().unwrap_or("-");
            let replaces = record
                .replaces
                .map_or(String::new(), |id| format!(" for {id}"));
            format!(
                "append {} {} {}: {} {place}{replaces}",
                record.raw.marking, record.raw.switch, record.raw.typed, record.outcome.finding
            )
        }
        Effect::TakeBack => "take back".to_owned(),
        Effect::BringBack => "bring back".to_owned(),
        Effect::Look => "look".to_owned(),
        Effect::WriteProfile(draft) => format!("write {}", draft.path.display()),
        Effect::LookAtChecks => "look at checks".to_owned(),
        Effect::Bell => "bell".to_owned(),
    }
}

fn keys_of(text: &str) -> Vec<Key> {
    let mut keys = Vec::new();
    let mut characters = text.chars();
    while let Some(character) = characters.next() {
        keys.push(match character {
            '↵' => Key::Enter,
            '⇥' => Key::Tab,
            '⎋' => Key::Esc,
            '⌫' => Key::Backspace,
            '↑' => Key::Up,
            '↓' => Key::Down,
            '①'..='⑥' => {
                let number = u32::from(character) - u32::from('①') + 1;
                Key::Function(u8::try_from(number).expect("one of six"))
            }
            '^' => Key::Ctrl(characters.next().unwrap_or('^').to_ascii_lowercase()),
            character => Key::Char(character),
        });
    }
    keys
}
