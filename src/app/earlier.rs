//! Earlier entries: recalled to be corrected, or with something added.

use tui_input::Input;

use super::Entry;
use super::bench::{append, refuse, start_over};
use super::entry::{Addition, Prompt};
use super::expecting::refresh;
use super::state::{Correcting, Effect, Notice, Purpose, Shown, State, Tone, Warning};
use super::work::{Subject, Work, typed_again};
use crate::finding::ReadingCertainty;

/// How many earlier entries can be recalled.
const MOST_RECALLED: usize = 10;

/// Adds something to the part shown, else to the last one: judged again, and written in its place.
pub(super) fn add(state: &mut State, addition: Addition) -> Vec<Effect> {
    let shown = state.bench.shown.as_ref().map(|shown| shown.id);
    let target = state
        .lot
        .parts()
        .rev()
        .find(|entry| Some(entry.id) == shown)
        .or_else(|| state.lot.parts().next_back());
    let Some(target) = target.cloned() else {
        return refuse(
            state,
            "there is no part yet that this could belong to".to_owned(),
        );
    };
    let is_of_this_meter = state.earlier_meter.is_none_or(|last| last < target.id);
    let work = Work::of(&target.record, &state.setup).filter(|_| is_of_this_meter);
    let Some(mut work) = work else {
        return refuse(
            state,
            "the last part was read on another meter: judge it again first".to_owned(),
        );
    };
    warn_of_voltage(state, &addition);
    work.add(addition);
    work.circumstances.reading = ReadingCertainty::Confirmed;
    let judgement = work.judged(&state.setup, &state.checks);
    append(state, &work, judgement, Purpose::Addition, Some(target.id))
}

fn warn_of_voltage(state: &mut State, addition: &Addition) {
    const GUARDED_ABOVE_V: f64 = 60.0;
    let high = matches!(addition, Addition::Leak(_, Some(volts)) if volts.get() > GUARDED_ABOVE_V);
    if high && state.leakage_warning == Warning::Due {
        state.leakage_warning = Warning::Given;
        state.notice = Some(Notice::new(
            Tone::Said,
            "above 60 V dc: for trained people with a guarded supply; local rules first",
        ));
    }
}

/// Recalls the entry so many further back; past the last one the prompts are empty again.
pub(super) fn recall(state: &mut State, steps: isize) {
    let now = state.bench.correcting.as_ref().map(|c| c.back);
    let back = match (now, steps) {
        (None, 1) => 0,
        (Some(0), -1) => {
            start_over(state);
            state.bench.shown = last_shown(state);
            return;
        }
        (Some(back), steps) => back.saturating_add_signed(steps),
        (None, _) => return,
    };
    let found = state.lot.parts().rev().take(MOST_RECALLED).nth(back);
    let Some(entry) = found.cloned() else {
        state.notice = Some(Notice::new(
            Tone::Said,
            "there is no earlier entry to recall",
        ));
        return;
    };
    start_over(state);
    let raw = &entry.record.raw;
    let bench = &mut state.bench;
    bench.marking = Input::new(raw.marking.clone());
    bench.dial = Input::new(typed_again(raw));
    bench.prompt = Prompt::Dial;
    bench.correcting = Some(Correcting {
        back,
        id: entry.id,
        record: entry.record.clone(),
    });
    let chosen = raw.chosen_reading.map(|n| (n as usize).saturating_sub(1));
    let switch = state.setup.meter.switch_named(&raw.switch);
    refresh(state);
    if let Subject::Part(marked) = &mut state.bench.subject {
        marked.chosen = chosen;
    }
    state.bench.switch = switch;
    refresh(state);
    let number = state.lot.number(entry.id);
    state.bench.shown = Some(shown(&entry, number));
    let text = match number {
        Some(number) => {
            format!("correcting part {number}: Esc to its marking, Esc again leaves it as it is")
        }
        None => String::new(),
    };
    state.notice = Some(Notice::new(Tone::Said, text));
}

/// Back from the dial to the marking; from the marking of an earlier entry to an empty prompt.
pub(super) fn back(state: &mut State) {
    state.notice = None;
    state.bench.question = None;
    if let (Prompt::Dial, Subject::Part(marked)) = (state.bench.prompt, &state.bench.subject) {
        if state.bench.marking.value().is_empty() {
            state.bench.marking = Input::new(marked.decoding.marking.clone());
        }
        if state.bench.correcting.is_none() {
            state.bench.dial.reset();
        }
        state.bench.prompt = Prompt::Marking;
        refresh(state);
    } else {
        let was_correcting = state.bench.correcting.is_some();
        start_over(state);
        if was_correcting {
            state.bench.shown = last_shown(state);
        }
    }
}

/// Returns the finding of the last part, as the log has it.
pub(super) fn last_shown(state: &State) -> Option<Shown> {
    let entry = state.lot.parts().next_back()?;
    Some(shown(entry, state.lot.number(entry.id)))
}

fn shown(entry: &Entry, number: Option<usize>) -> Shown {
    Shown {
        id: entry.id,
        number,
        record: entry.record.clone(),
        unplaced: None,
    }
}

#[cfg(test)]
mod tests {
    use super::super::testing::Table;
    use super::*;

    #[test]
    fn an_earlier_entry_is_corrected_in_its_place() {
        let mut table = Table::new();
        table.keys("224J↵20.3↵224J↵40.3↵");
        assert_eq!(table.parts(), ["224J inside A1", "224J outside B2"]);
        table.keys("^P^P");
        let bench = &table.state.bench;
        assert_eq!(bench.dial.value(), "20.3");
        assert_eq!(bench.correcting.as_ref().map(|c| c.back), Some(1));
        assert_eq!(table.keys("⌫1↵"), ["append 224J A 20.1: inside A1 for 1"]);
        assert_eq!(table.parts(), ["224J inside A1", "224J outside B2"]);
        assert_eq!(table.state.bench.prompt, Prompt::Marking);
    }

    #[test]
    fn recalling_goes_ten_back_and_ends_in_empty_prompts() {
        let mut table = Table::new();
        for _ in 0..11 {
            table.keys("224J↵20.3↵");
        }
        table.keys(&"^P".repeat(12));
        let back = table.state.bench.correcting.as_ref().map(|c| c.back);
        assert_eq!(back, Some(9));
        assert_eq!(table.notice(), "there is no earlier entry to recall");
        table.keys(&"^N".repeat(10));
        assert!(table.state.bench.correcting.is_none());
        assert_eq!(table.state.bench.dial.value(), "");
    }

    #[test]
    fn the_marking_of_an_earlier_entry_can_be_corrected_too() {
        let mut table = Table::new();
        table.keys("104K↵20.3↵20.3↵");
        table.keys("^P⎋⌫⌫⌫⌫224J↵");
        assert_eq!(table.state.bench.dial.value(), "20.3");
        table.keys("/1");
        let asked = table.keys("⌫⌫↵");
        assert_eq!(asked, ["append 224J A 20.3: inside A1 for 1"]);
    }

    #[test]
    fn what_is_added_belongs_to_the_part_shown() {
        let mut table = Table::new();
        assert_eq!(table.line("looks cracked"), ["bell"]);
        table.keys("^C224J↵20.3↵");
        table.line("note from board 7");
        let asked = table.line("looks cracked");
        assert_eq!(asked.len(), 1, "{asked:?}");
        assert!(asked.concat().ends_with(" for 2"), "{asked:?}");
        let raw = &table.state.lot.entries.last().expect("an entry").record.raw;
        assert_eq!(raw.note.as_deref(), Some("from board 7"));
        assert_eq!(raw.looks.as_deref(), Some("cracked"));
        assert_eq!(table.parts().len(), 1);
    }

    #[test]
    fn above_60_v_the_warning_comes_once() {
        let mut table = Table::new();
        table.keys("224J↵20.3↵");
        table.line("leak 12 MΩ at 63 V");
        assert!(
            table.notice().starts_with("above 60 V dc"),
            "{}",
            table.notice()
        );
        table.line("leak 12 MΩ at 100 V");
        assert_eq!(table.notice(), "");
    }
}
