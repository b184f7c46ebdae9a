//! The only place where the state changes.

use tui_input::{Input, InputRequest};

use super::checks::Checks;
use super::entry::Prompt;
use super::new_meter::Interview;
use super::pages;
use super::state::{
    Bench, Effect, Event, Front, Last, Notice, Opening, Size, State, Tone, Warning,
};
use super::{Entry, Intent, Key, LogFailure, Lot, Page, RecordKind, Standing};
use super::{bench, describing, earlier, expecting, help, meter_rows};

/// Makes the state the program starts with; Enter alone repeats the last marking of the lot.
pub fn open(opening: Opening) -> State {
    let checks = Checks::new(opening.standing.entries.clone());
    let mut state = State {
        checks,
        setup: opening.setup,
        meter_from: opening.meter_from,
        look: opening.look,
        bench: Bench::empty(),
        front: Front::Bench,
        lot: Lot::new(opening.lot, opening.standing),
        codes: opening.codes,
        notice: None,
        size: opening.size,
        leakage_warning: Warning::Due,
        same_side: Warning::Due,
        interview: Interview::new(opening.profile_place),
        earlier_meter: None,
        done: false,
    };
    remember_last(&mut state);
    expecting::refresh(&mut state);
    state
}

fn remember_last(state: &mut State) {
    state.bench.shown = earlier::last_shown(state);
    state.bench.last = state.lot.parts().next_back().map(|entry| Last {
        marking: entry.record.raw.marking.clone(),
        chosen: entry
            .record
            .raw
            .chosen_reading
            .map(|number| (number as usize).saturating_sub(1)),
        switch: None,
    });
}

/// Takes in what happened; returns what is to be done about it.
pub fn update(state: &mut State, event: Event) -> Vec<Effect> {
    match event {
        Event::Key(key) => press(state, key),
        Event::Line(text) if matches!(state.front, Front::NewMeter) => {
            state.interview.input = Input::new(text);
            describing::submit(state)
        }
        Event::Line(text) => {
            state.front = Front::Bench;
            *state.bench.line_mut() = Input::new(text);
            edited(state);
            bench::submit(state)
        }
        Event::Resize(size) => {
            state.size = size;
            let height = list_height(state.front.page(), size);
            if let Some(list) = state.front.list_mut() {
                list.move_by(0, height);
            }
            Vec::new()
        }
        Event::Logged(answer) => bench::logged(state, answer),
        Event::TakenBack(answer) => {
            let done = "taken back; redo or Ctrl-Y brings it back";
            stands_now(state, answer, done, "there is nothing to take back")
        }
        Event::BroughtBack(answer) => stands_now(
            state,
            answer,
            "back again",
            "there is nothing to bring back",
        ),
        Event::Looked(Ok(entries)) => {
            if matches!(state.front, Front::Tray(_)) {
                state.front = Front::Tray(pages::tray(state, &entries));
            }
            Vec::new()
        }
        Event::ProfileWritten(answer) => describing::written(state, answer),
        Event::LookedAtChecks(Ok(entries)) => {
            state.checks = Checks::new(entries);
            if matches!(state.front, Front::Meter(_)) {
                state.front = Front::Meter(meter_rows::meter(state));
            }
            Vec::new()
        }
        Event::Looked(Err(failure)) | Event::LookedAtChecks(Err(failure)) => {
            state.notice = Some(Notice::new(Tone::Failed, failure.to_string()));
            vec![Effect::Bell]
        }
    }
}

/// Returns how many rows of a list fit a screen of this size: all but header, prompt, column names, details and footer, and
/// on the Meter screen the chart.
pub fn list_height(page: Page, size: Size) -> usize {
    let chart = match page {
        Page::Meter => chart_height(size),
        _ => 0,
    };
    usize::from((rows_below_names(size) - chart).max(1))
}

/// Returns how many rows the chart on the Meter screen takes, its caption included; 0 where there is no room for one.
pub fn chart_height(size: Size) -> u16 {
    const LEAST: u16 = 6;
    const MOST: u16 = 14;
    match rows_below_names(size) {
        few if few < 2 * LEAST => 0,
        rows => (rows / 2).clamp(LEAST, MOST),
    }
}

fn rows_below_names(size: Size) -> u16 {
    const OTHER_ROWS: u16 = 10;
    size.height.saturating_sub(OTHER_ROWS)
}

fn stands_now(
    state: &mut State,
    answer: Result<(Option<Box<Entry>>, Standing), LogFailure>,
    done: &str,
    nothing: &str,
) -> Vec<Effect> {
    match answer {
        Ok((Some(entry), standing)) => {
            state.lot.refresh(standing);
            let last = state.bench.last.take();
            remember_last(state);
            // The marking at hand stays the one that Enter repeats.
            if last.is_some() {
                state.bench.last = last;
            }
            expecting::refresh(state);
            let (id, marking) = (entry.id, &entry.record.raw.marking);
            let text = format!("entry {id}, {marking}: {done}");
            state.notice = Some(Notice::new(Tone::Said, text));
            match entry.record.kind {
                RecordKind::Part => Vec::new(),
                _ => vec![Effect::LookAtChecks],
            }
        }
        Ok((None, _)) => {
            state.notice = Some(Notice::new(Tone::Said, nothing));
            Vec::new()
        }
        Err(failure) => {
            state.notice = Some(Notice::new(Tone::Failed, failure.to_string()));
            vec![Effect::Bell]
        }
    }
}

fn press(state: &mut State, key: Key) -> Vec<Effect> {
    let page = state.front.page();
    if let Some(intent) = page.intent(key) {
        return act(state, intent);
    }
    let Some(request) = editing(key) else {
        return Vec::new();
    };
    let height = list_height(state.front.page(), state.size);
    let changed = if let Some(list) = state.front.list_mut() {
        let changed = list
            .find
            .handle(request)
            .is_some_and(|changed| changed.value);
        if changed {
            look_up(&mut state.front, height);
        }
        false
    } else if matches!(state.front, Front::NewMeter) {
        state.interview.input.handle(request);
        false
    } else if state.bench.pending.is_some() {
        false
    } else {
        let line = state.bench.line_mut();
        line.handle(request).is_some_and(|changed| changed.value)
    };
    if changed {
        edited(state);
    }
    Vec::new()
}

/// The line on the bench has changed: what it means so far is worked out at once.
fn edited(state: &mut State) {
    match state.bench.prompt {
        Prompt::Marking => expecting::refresh(state),
        Prompt::Dial => expecting::refresh_mark(state),
    }
}

fn editing(key: Key) -> Option<InputRequest> {
    Some(match key {
        Key::Char(character) if !character.is_control() => InputRequest::InsertChar(character),
        Key::Backspace => InputRequest::DeletePrevChar,
        Key::Delete => InputRequest::DeleteNextChar,
        Key::Left => InputRequest::GoToPrevChar,
        Key::Right => InputRequest::GoToNextChar,
        Key::WordLeft => InputRequest::GoToPrevWord,
        Key::WordRight => InputRequest::GoToNextWord,
        Key::Home => InputRequest::GoToStart,
        Key::End => InputRequest::GoToEnd,
        _ => return None,
    })
}

fn act(state: &mut State, intent: Intent) -> Vec<Effect> {
    match intent {
        Intent::Show(page) => return show(state, page),
        Intent::Back => match state.front {
            Front::Bench => earlier::back(state),
            Front::NewMeter => describing::leave(state),
            _ => state.front = Front::Bench,
        },
        Intent::Leave => state.done = true,
        Intent::ClearOrLeave => clear_or_leave(state),
        Intent::Submit if matches!(state.front, Front::NewMeter) => {
            return describing::submit(state);
        }
        Intent::Submit => return bench::submit(state),
        Intent::QuestionBefore => return describing::step_back(state),
        Intent::TakeBack => return vec![Effect::TakeBack],
        Intent::BringBack => return vec![Effect::BringBack],
        Intent::Earlier => earlier::recall(state, 1),
        Intent::Later => earlier::recall(state, -1),
        Intent::NextReading => expecting::step_reading(state, 1),
        Intent::PreviousReading => expecting::step_reading(state, -1),
        Intent::SwitchBefore => expecting::step_switch(state, -1),
        Intent::SwitchAfter => expecting::step_switch(state, 1),
        Intent::RowUp => move_rows(state, -1),
        Intent::RowDown => move_rows(state, 1),
        Intent::RowsUp => move_rows(state, -page_of(state)),
        Intent::RowsDown => move_rows(state, page_of(state)),
        Intent::Sort => {
            let height = list_height(state.front.page(), state.size);
            if let Some(list) = state.front.list_mut() {
                list.sort_next(height);
            }
        }
    }
    Vec::new()
}

/// Finds anew what is looked for; the codes answer first what it means as a marking.
fn look_up(front: &mut Front, height: usize) {
    if let Front::Codes(list) = front {
        list.answer(pages::as_marking(list.find.value()));
    }
    if let Some(list) = front.list_mut() {
        list.refresh(height);
    }
}

fn page_of(state: &State) -> isize {
    isize::try_from(list_height(state.front.page(), state.size)).unwrap_or(1)
}

fn move_rows(state: &mut State, rows: isize) {
    let height = list_height(state.front.page(), state.size);
    if let Some(list) = state.front.list_mut() {
        list.move_by(rows, height);
    }
}

fn clear_or_leave(state: &mut State) {
    let height = list_height(state.front.page(), state.size);
    let is_empty = if let Some(list) = state.front.list_mut() {
        let is_empty = list.find.value().is_empty();
        list.find.reset();
        look_up(&mut state.front, height);
        is_empty
    } else if matches!(state.front, Front::NewMeter) {
        let is_empty = state.interview.input.value().is_empty();
        state.interview.input.reset();
        is_empty
    } else {
        let is_empty = state.bench.line().value().is_empty();
        state.bench.line_mut().reset();
        is_empty
    };
    if is_empty {
        state.done = true;
    } else if matches!(state.front, Front::Bench) {
        edited(state);
    }
}

fn show(state: &mut State, page: Page) -> Vec<Effect> {
    let shown = state.front.page();
    if page == shown && page != Page::Help {
        return Vec::new();
    }
    state.front = match page {
        Page::Bench => Front::Bench,
        Page::NewMeter => Front::NewMeter,
        Page::Tray => Front::Tray(pages::tray(state, &state.lot.entries)),
        Page::Meter => Front::Meter(meter_rows::meter(state)),
        Page::Codes => Front::Codes(pages::codes(state)),
        Page::Lot => Front::Lot(pages::lot(state)),
        Page::Help => match &state.front {
            Front::Help(..) => return Vec::new(),
            _ => Front::Help(shown, help::rows_of(shown)),
        },
    };
    match page {
        Page::Tray => vec![Effect::Look],
        Page::Meter => vec![Effect::LookAtChecks],
        _ => Vec::new(),
    }
}

#[cfg(test)]
mod tests {
    use super::super::testing::Table;
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn the_last_entry_is_taken_back_and_brought_back() {
        let mut table = Table::new();
        table.keys("224J↵20.3↵");
        assert_eq!(table.keys("^Z"), ["take back"]);
        assert_eq!(table.parts(), [""; 0]);
        assert_eq!(
            table.notice(),
            "entry 1, 224J: taken back; redo or Ctrl-Y brings it back"
        );
        assert_eq!(table.keys("redo↵"), ["bring back"]);
        assert_eq!(table.parts(), ["224J inside A1"]);
        assert_eq!(table.keys("//↵//↵"), ["take back", "take back"]);
        assert_eq!(table.notice(), "there is nothing to take back");
    }

    #[test]
    fn letters_on_other_screens_go_to_their_prompt_and_esc_returns() {
        let mut table = Table::new();
        table.keys("22⑤jis");
        let list = table.state.front.list().expect("a list");
        assert_eq!(list.find.value(), "jis");
        assert!(list.order.len() < list.rows.len());
        table.keys("⎋4J↵");
        assert_eq!(table.state.bench.subject.marking(), "224J");
        assert_eq!(table.state.bench.prompt, Prompt::Dial);
    }

    #[test]
    fn every_screen_opens_from_every_other() {
        let mut table = Table::new();
        table.keys("224J↵20.3↵");
        for from in "①②③④⑤⑥".chars() {
            for to in "①②③④⑤⑥".chars() {
                let asked = table.keys(&format!("②{from}{to}"));
                assert!(asked.iter().all(|a| a.starts_with("look")), "{asked:?}");
            }
        }
    }

    #[test]
    fn ctrl_c_clears_and_then_leaves_and_ctrl_q_leaves_at_once() {
        let mut table = Table::new();
        table.keys("22^C");
        assert_eq!(table.state.bench.marking.value(), "");
        assert!(!table.state.done);
        table.keys("^C");
        assert!(table.state.done);
        let mut table = Table::new();
        table.keys("22^Q");
        assert!(table.state.done);
    }

    #[test]
    fn another_switch_and_another_reading_keep_the_prompts() {
        let mut table = Table::new();
        table.keys("224J↵↓");
        let label = |table: &Table| {
            let switch = table.state.bench.switch_in_use().expect("a switch");
            table.state.setup.meter.label(switch).to_owned()
        };
        assert_eq!(label(&table), "B");
        table.keys("↑↑↑");
        assert_eq!(label(&table), "A");
        table.keys("/3↵");
        assert_eq!(label(&table), "C");
        table.keys("/9↵");
        assert_eq!(
            table.notice(),
            "there is no switch 9; accepted here: /1 to /4"
        );
        let mut table = Table::new();
        table.keys("22,2⇥");
        let chosen = |table: &Table| table.state.bench.marked().and_then(|m| m.chosen);
        assert_eq!(chosen(&table), Some(1));
        assert_eq!(table.state.bench.marking.value(), "22,2");
        table.keys("↵+1↵");
        assert_eq!(chosen(&table), Some(0));
    }

    proptest! {
        #![proptest_config(ProptestConfig::with_cases(64))]
        #[test]
        fn any_keys_leave_a_bench_that_works(
            keys in "([↵⇥⎋⌫↑↓①②③④⑤⑥+*/. dlnaJ0-9-]|\\^[zypnc]|224J↵|20\\.3↵){0,30}",
        ) {
            let mut table = Table::new();
            table.keys(&keys);
            table.state.done = false;
            table.keys("②⎋⎋^C224J↵20.3↵");
            let shown = table.state.bench.shown.as_ref().map(|s| s.record.raw.typed.as_str());
            prop_assert_eq!(shown, Some("20.3"), "after {:?}: {}", keys, table.notice());
        }
    }

    #[test]
    fn each_keystroke_decodes() {
        let mut table = Table::new();
        let nominal = |table: &Table| {
            let marked = table.state.bench.marked()?;
            marked.reading().map(|r| r.capacitance.to_string())
        };
        table.keys("4n");
        table.keys("7");
        assert_eq!(nominal(&table).as_deref(), Some("4.7 nF"));
        table.keys("⌫⌫⌫");
        assert_eq!(nominal(&table), None);
    }
}
