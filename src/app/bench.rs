//! The loop at the bench: marking, dial, finding; and what may be said between.

use super::cautions::SAME_SIDE;
use super::describing;
use super::earlier::add;
use super::entry::{self, Prompt, Typed};
use super::expecting::{choose_reading, choose_switch, parked_place, refresh};
use super::sighting::Sighting;
use super::state::{Effect, Last, Notice, Pending, Purpose, Question, Shown, State, Tone, Warning};
use super::work::{Judgement, Subject, Work};
use super::{Entry, LogFailure, Marked, Record, RecordId, RecordKind};
use crate::finding::{ReadingCertainty, Word};
use crate::meter::{Lamp, Seen};

/// Takes the line in the prompt.
pub(super) fn submit(state: &mut State) -> Vec<Effect> {
    if state.bench.pending.is_some() {
        return Vec::new();
    }
    state.notice = None;
    let text = state.bench.line().value().to_owned();
    let parked = parked_place(state);
    let typed = match entry::read(&text, state.bench.prompt, &state.setup.meter.dial, parked) {
        Ok(typed) => typed,
        Err(refusal) => return refuse(state, refusal.to_string()),
    };
    match typed {
        Typed::Nothing => repeat(state),
        Typed::Marking(_) => take_marking(state),
        Typed::Sighting(sighting) => take_sighting(state, sighting),
        Typed::Undo => command(state, Effect::TakeBack),
        Typed::Redo => command(state, Effect::BringBack),
        Typed::Switch(number) => take_switch(state, number),
        Typed::Reading(number) => choose_reading(state, number),
        Typed::Addition(addition) => add(state, addition),
        Typed::Check(label) => begin_check(state, &label),
        Typed::Zero => begin(state, Subject::Zero),
        Typed::NewMeter => describing::begin(state),
    }
}

/// Says why something was not taken; the text stays in the prompt.
pub(super) fn refuse(state: &mut State, why: String) -> Vec<Effect> {
    state.notice = Some(Notice::new(Tone::Refused, why));
    vec![Effect::Bell]
}

fn take_switch(state: &mut State, number: usize) -> Vec<Effect> {
    let found = state.setup.meter.switches().nth(number.wrapping_sub(1));
    let Some(switch) = found else {
        let count = state.setup.meter.switches.len();
        let why = format!("there is no switch {number}; accepted here: /1 to /{count}");
        return refuse(state, why);
    };
    state.bench.line_mut().reset();
    choose_switch(state, switch);
    Vec::new()
}

fn command(state: &mut State, effect: Effect) -> Vec<Effect> {
    state.bench.line_mut().reset();
    vec![effect]
}

fn repeat(state: &mut State) -> Vec<Effect> {
    if state.bench.prompt == Prompt::Dial {
        return Vec::new();
    }
    if state.bench.last.is_none() {
        return refuse(
            state,
            "nothing to repeat yet: type what is printed on the part".to_owned(),
        );
    }
    to_dial(state);
    Vec::new()
}

fn take_marking(state: &mut State) -> Vec<Effect> {
    refresh(state);
    let Some(marked) = state.bench.marked() else {
        return Vec::new();
    };
    if marked.decoding.readings.is_empty() {
        let found = marked.decoding.unexplained.join(" ");
        let found = if found.is_empty() {
            marked.decoding.marking.clone()
        } else {
            found
        };
        return refuse(
            state,
            format!(
                "no reading of `{found}`; accepted here: a marking such as 224J, 4n7, 104K 2A; ? stands for a character that cannot be read"
            ),
        );
    }
    to_dial(state);
    Vec::new()
}

fn to_dial(state: &mut State) {
    state.bench.prompt = Prompt::Dial;
    state.bench.question = None;
    refresh(state);
}

/// Judges a sighting; asks about a slip, else sends the record to the log.
fn take_sighting(state: &mut State, sighting: Sighting) -> Vec<Effect> {
    let Some(switch) = state.bench.switch_in_use() else {
        return refuse(
            state,
            "no marking yet: type what is printed on the part".to_owned(),
        );
    };
    let earlier = state.bench.correcting.as_ref();
    let before = earlier.and_then(|correcting| Work::of(&correcting.record, &state.setup));
    let (mut circumstances, note) =
        before.map_or_else(Default::default, |work| (work.circumstances, work.note));
    let asked = state.bench.question.take();
    if asked.is_some_and(|q| q.switch == switch && q.sighting.seen == sighting.seen) {
        circumstances.reading = ReadingCertainty::Confirmed;
    }
    let work = Work {
        subject: state.bench.subject.clone(),
        switch,
        sighting,
        circumstances,
        note,
    };
    let judgement = work.judged(&state.setup, &state.checks);
    if let Some(text) = question(&work, &judgement) {
        state.notice = Some(Notice::new(Tone::Asked, text));
        state.bench.question = Some(Question {
            switch,
            sighting: work.sighting,
        });
        state.bench.dial.reset();
        refresh(state);
        return vec![Effect::Bell];
    }
    let purpose = match &state.bench.correcting {
        Some(_) => Purpose::Correction,
        None => Purpose::New,
    };
    let replaces = state.bench.correcting.as_ref().map(|c| c.id);
    append(state, &work, judgement, purpose, replaces)
}

/// Returns what is to be asked before the sighting is written: about a slip, and after a lit lamp that settles nothing for
/// the dial. The same again confirms.
fn question(work: &Work, judgement: &Judgement) -> Option<String> {
    let verdict = &judgement.assessment.as_ref()?.verdict;
    let is_open = matches!(verdict.word, Word::Outside | Word::Undecided);
    if !is_open || work.circumstances.reading == ReadingCertainty::Confirmed {
        return None;
    }
    let typed = &work.sighting.typed;
    if let Some(slip) = &verdict.slip {
        return Some(format!(
            "{slip} outside as it stands; type {typed} again to keep it"
        ));
    }
    let is_lit = matches!(
        work.sighting.seen,
        Seen::Parked {
            lamp: Lamp::Lit,
            ..
        }
    );
    (is_lit && verdict.word == Word::Undecided).then(|| {
        format!("lit settles nothing: turn and read the dial, or type {typed} again to keep it")
    })
}

/// Sends a record on its way to the log.
pub(super) fn append(
    state: &mut State,
    work: &Work,
    judgement: Judgement,
    purpose: Purpose,
    replaces: Option<RecordId>,
) -> Vec<Effect> {
    let record = Record {
        lot: state.lot.name.clone(),
        kind: work.subject.kind(),
        raw: work.raw(&state.setup),
        outcome: judgement.outcome,
        replaces,
    };
    state.bench.pending = Some(Pending {
        purpose,
        unplaced: judgement.unplaced,
    });
    vec![Effect::Append(Box::new(record))]
}

/// Takes the answer of the log: saved, and only now shown; or not, and still in the prompt.
pub(super) fn logged(state: &mut State, answer: Result<Box<Entry>, LogFailure>) -> Vec<Effect> {
    let Some(pending) = state.bench.pending.take() else {
        return Vec::new();
    };
    let entry = match answer {
        Ok(entry) => *entry,
        Err(failure) => {
            let text = format!("not saved: {failure}; the entry is still in the prompt");
            state.notice = Some(Notice::new(Tone::Failed, text));
            return vec![Effect::Bell];
        }
    };
    state.lot.accept(entry.clone());
    state.checks.accept(entry.clone());
    let number = state.lot.number(entry.id);
    let is_part = entry.record.kind == RecordKind::Part;
    if pending.purpose == Purpose::New && is_part {
        state.bench.last = Some(Last {
            marking: entry.record.raw.marking.clone(),
            chosen: state.bench.marked().and_then(|marked| marked.chosen),
            switch: state.bench.switch,
        });
    }
    state.bench.shown = Some(Shown {
        id: entry.id,
        number,
        record: entry.record,
        unplaced: pending.unplaced,
    });
    match pending.purpose {
        Purpose::New | Purpose::Correction => start_over(state),
        Purpose::Addition => {
            state.bench.line_mut().reset();
            refresh(state);
        }
    }
    advise_same_side(state);
    say_what_is_in_doubt(state);
    remind_of_check(state);
    Vec::new()
}

/// Names the parts of the lot that a check which has just failed puts in doubt.
fn say_what_is_in_doubt(state: &mut State) {
    let Some(shown) = &state.bench.shown else {
        return;
    };
    let Some(since) = state.checks.doubt_since(shown.id) else {
        return;
    };
    let numbers = state.lot.numbers_since(since);
    let text = match (numbers.first(), numbers.last()) {
        (Some(first), Some(last)) if first < last => {
            format!("in doubt in this lot: parts {first} to {last}")
        }
        (Some(only), _) => format!("in doubt in this lot: part {only}"),
        (None, _) => return,
    };
    state.notice = Some(Notice::new(Tone::Said, text));
}

/// Empties both prompts; the last marking stands greyed.
pub(super) fn start_over(state: &mut State) {
    let bench = &mut state.bench;
    bench.marking.reset();
    bench.dial.reset();
    bench.prompt = Prompt::Marking;
    bench.question = None;
    bench.correcting = None;
    bench.switch = None;
    bench.subject = Subject::Part(Marked::default());
    refresh(state);
}

/// Says once how to turn to a reading, when both edges or repeats are used for the first time.
fn advise_same_side(state: &mut State) {
    let raw = state.bench.shown.as_ref().map(|shown| &shown.record.raw);
    let is_repeated = raw.is_some_and(|raw| {
        let figures = [&raw.dial, &raw.dark_from, &raw.dark_to];
        raw.dark_from.is_some() || figures.into_iter().flatten().any(|text| text.contains('/'))
    });
    let scatters = state.setup.meter.repeatability > 0.0;
    if is_repeated && scatters && state.same_side == Warning::Due && state.notice.is_none() {
        state.same_side = Warning::Given;
        state.notice = Some(Notice::new(Tone::Said, SAME_SIDE));
    }
}

fn remind_of_check(state: &mut State) {
    let every = state.setup.rules().check_every.unwrap_or(0) as usize;
    let since = state.lot.since_check();
    let first = state.setup.meter.checks.first();
    if let (Some(check), true) = (first, every > 0 && since >= every && state.notice.is_none()) {
        let label = &check.label;
        let text = format!("{since} parts since the check part: check {label}");
        state.notice = Some(Notice::new(Tone::Said, text));
    }
}

fn begin_check(state: &mut State, label: &str) -> Vec<Effect> {
    let checks = &state.setup.meter.checks;
    let known = checks
        .iter()
        .find(|check| check.label.eq_ignore_ascii_case(label.trim()));
    if let Some(check) = known {
        let check = check.clone();
        return begin(state, Subject::Check(check));
    }
    let labels: Vec<&str> = checks.iter().map(|check| check.label.as_str()).collect();
    let known = if labels.is_empty() {
        "this meter's profile has no check parts".to_owned()
    } else {
        format!("accepted here: {}", labels.join(", "))
    };
    refuse(state, format!("no check part is called `{label}`; {known}"))
}

/// Asks for the earlier readings at once, so that they are there when the new one is.
fn begin(state: &mut State, subject: Subject) -> Vec<Effect> {
    start_over(state);
    state.bench.subject = subject;
    to_dial(state);
    vec![Effect::LookAtChecks]
}

#[cfg(test)]
mod tests {
    use super::super::testing::Table;
    use super::super::{LogFailure, Tone};
    use super::*;

    #[test]
    fn marking_reading_finding_and_it_is_written() {
        let mut table = Table::new();
        assert_eq!(table.keys("224J↵"), [""; 0]);
        assert_eq!(table.state.bench.prompt, Prompt::Dial);
        assert_eq!(table.keys("20.3↵"), ["append 224J A 20.3: inside A1"]);
        let bench = &table.state.bench;
        assert_eq!(bench.prompt, Prompt::Marking);
        assert_eq!((bench.marking.value(), bench.dial.value()), ("", ""));
        let shown = bench.shown.as_ref().expect("a finding");
        assert_eq!(shown.number, Some(1));
        assert_eq!(table.state.lot.in_compartment("A1"), 1);
    }

    #[test]
    fn enter_alone_repeats_the_last_marking_and_one_key_settles_a_parked_one() {
        let mut table = Table::new();
        assert_eq!(table.keys("↵"), ["bell"]);
        table.keys("224J↵20.3↵");
        assert_eq!(table.keys("↵20,2↵"), ["append 224J A 20,2: inside A1"]);
        table.keys("↵");
        let park = table.state.bench.park.expect("a batch of equal parts");
        assert!(
            park.settles.is_some_and(|share| share.get() > 0.5),
            "{park:?}"
        );
        let asked = table.keys("+↵");
        assert_eq!(asked.len(), 1, "{asked:?}");
        assert!(
            asked.concat().starts_with("append 224J A +: inside"),
            "{asked:?}"
        );
    }

    #[test]
    fn what_is_not_saved_stays_in_the_prompt() {
        let mut table = Table::new();
        table.failure = Some(LogFailure {
            message: "cannot append to parts.db: disk is full".to_owned(),
            hint: "make room".to_owned(),
        });
        assert_eq!(
            table.keys("224J↵20.3↵"),
            ["append 224J A 20.3: inside A1", "bell"]
        );
        let bench = &table.state.bench;
        assert_eq!((bench.dial.value(), bench.prompt), ("20.3", Prompt::Dial));
        assert!(bench.shown.is_none(), "not saved, not shown");
        assert_eq!(
            table.notice(),
            "not saved: cannot append to parts.db: disk is full; make room; the entry is still in the prompt"
        );
        assert_eq!(table.keys("↵"), ["append 224J A 20.3: inside A1"]);
        assert_eq!(table.parts(), ["224J inside A1"]);
    }

    #[test]
    fn what_is_not_understood_stays_with_the_reason() {
        let mut table = Table::new();
        assert_eq!(table.keys("224J↵146↵"), ["bell"]);
        assert_eq!(table.state.bench.dial.value(), "146");
        assert!(
            table.notice().contains("out of range"),
            "{}",
            table.notice()
        );
        assert_eq!(table.keys("⌫⌫⌫20.3↵"), ["append 224J A 20.3: inside A1"]);
    }

    #[test]
    fn a_slip_is_asked_about_and_the_same_reading_confirms_it() {
        let mut table = Table::new();
        assert_eq!(table.keys("224J↵40.3↵"), ["append 224J A 40.3: outside B2"]);
        assert_eq!(table.keys("↵2.03↵"), ["bell"]);
        let notice = table.state.notice.clone().expect("a question");
        assert_eq!(notice.tone, Tone::Asked);
        assert_eq!(table.state.bench.dial.value(), "");
        assert_eq!(table.keys("2.03↵"), ["append 224J A 2.03: outside B2"]);
        assert_eq!(table.keys("↵2.03↵"), ["bell"]);
        assert_eq!(
            table.keys("20.3↵"),
            ["append 224J A 20.3: inside A1"],
            "another reading replaces the one asked about"
        );
    }

    #[test]
    fn a_lit_lamp_that_settles_nothing_asks_for_the_dial() {
        let mut table = Table::new();
        table.keys("224J↵20.3↵");
        assert_eq!(table.keys("↵-↵"), ["bell"]);
        assert!(table.notice().starts_with("lit settles nothing"));
        assert_eq!(table.keys("20.2↵"), ["append 224J A 20.2: inside A1"]);
        table.keys("↵l↵");
        assert_eq!(
            table.keys("l↵"),
            ["append 224J A l: undecided no place"],
            "the same again is kept"
        );
    }

    #[test]
    fn check_parts_and_open_terminals_are_compared_with_what_is_known() {
        let mut table = Table::new();
        assert_eq!(table.line("check red 1 nF"), ["bell"]);
        assert!(table.notice().contains("blue 10 nF"), "{}", table.notice());
        table.line("check blue 10 nF");
        let expected = table.state.bench.prediction.as_ref().expect("a place");
        let place = table
            .state
            .setup
            .meter
            .dial
            .show(expected.expected.expect("dark"));
        let asked = table.line(&place);
        assert!(asked.concat().ends_with("inside -"), "{asked:?}");
        assert_eq!(table.state.lot.since_check(), 0);
        table.line("zero");
        let asked = table.line("n");
        assert_eq!(asked, ["append open terminals D n: undecided -"]);
    }

    #[test]
    fn the_check_part_is_spoken_of_when_it_is_due() {
        let mut table = Table::new();
        for _ in 0..2 {
            table.keys("224J↵20.3↵");
            assert_eq!(table.notice(), "");
        }
        table.keys("224J↵20.3↵");
        assert_eq!(
            table.notice(),
            "3 parts since the check part: check blue 10 nF"
        );
    }

    #[test]
    fn an_unreadable_marking_stays_with_the_reason() {
        let mut table = Table::new();
        assert_eq!(table.keys("~~~↵"), ["bell"]);
        assert_eq!(table.state.bench.marking.value(), "~~~");
        assert!(
            table.notice().starts_with("no reading of `"),
            "{}",
            table.notice()
        );
    }

    #[test]
    fn the_same_side_is_spoken_of_once() {
        let mut table = Table::new();
        table.keys("224J↵20.3↵");
        assert_eq!(table.notice(), "");
        table.keys("↵20.0/20.3/20.2↵");
        assert_eq!(table.notice(), SAME_SIDE);
        table.keys("↵19.6-20.8↵");
        assert_eq!(
            table.notice(),
            "3 parts since the check part: check blue 10 nF"
        );
        let mut table = Table::new();
        table.state.setup.meter.repeatability = 0.0;
        table.keys("224J↵19.6 20.8↵");
        assert_eq!(table.notice(), "");
        table.state.setup.meter.repeatability = 0.3;
        table.keys("↵19.6 20.8↵");
        assert_eq!(table.notice(), SAME_SIDE);
    }
}
