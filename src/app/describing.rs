//! `new meter`: questions in front, answers in, and at the end another meter in force.

use std::path::PathBuf;

use super::bench::{refuse, start_over};
use super::new_meter::{Answered, ProfileFailure, Topic};
use super::state::{Effect, Front, MeterFrom, Notice, State, Tone};
use crate::meter::Meter;

/// Brings the questions to the front: the first one, or the one where they were left.
pub(super) fn begin(state: &mut State) -> Vec<Effect> {
    state.bench.line_mut().reset();
    state.front = Front::NewMeter;
    let goes_on = state.interview.number() > 1;
    let text = if goes_on {
        "this is where you left; back goes to the question before"
    } else {
        "Enter alone takes what is offered; back goes to the question before, leave to the bench"
    };
    state.notice = Some(Notice::new(Tone::Said, text));
    Vec::new()
}

/// Takes the line in the prompt: an answer, `back` or `leave`.
pub(super) fn submit(state: &mut State) -> Vec<Effect> {
    if state.interview.writing.is_some() {
        return Vec::new();
    }
    let line = state.interview.input.value().to_owned();
    match line.trim().to_lowercase().as_str() {
        "back" => return step_back(state),
        "leave" => {
            leave(state);
            return Vec::new();
        }
        _ => {}
    }
    state.notice = None;
    match state.interview.take(&line) {
        Ok(Answered::Next) => {
            state.interview.input.reset();
            Vec::new()
        }
        Ok(Answered::Write(draft)) => {
            state.interview.writing = Some(draft.clone());
            vec![Effect::WriteProfile(Box::new(draft))]
        }
        Err(refusal) => refuse(state, refusal.to_string()),
    }
}

/// Goes to the question before.
pub(super) fn step_back(state: &mut State) -> Vec<Effect> {
    state.notice = None;
    state.interview.input.reset();
    if state.interview.step_back() {
        return Vec::new();
    }
    let why = "this is the first question; leave goes to the bench";
    refuse(state, why.to_owned())
}

/// Goes to the bench; what was answered is kept.
pub(super) fn leave(state: &mut State) {
    state.interview.input.reset();
    state.front = Front::Bench;
    state.notice = Some(Notice::new(
        Tone::Said,
        "the meter in force is the one before; your answers are kept until the program ends: new meter goes on",
    ));
}

/// Takes the answer of the edge: the profile is on disk and its meter in force; or it is not, and nothing is lost.
pub(super) fn written(state: &mut State, answer: Result<PathBuf, ProfileFailure>) -> Vec<Effect> {
    let Some(draft) = state.interview.writing.take() else {
        return Vec::new();
    };
    match answer {
        Ok(path) => {
            state.interview.start_over();
            put_in_force(state, draft.text, &path);
            Vec::new()
        }
        Err(ProfileFailure::Exists) => {
            state.interview.input.reset();
            state.interview.ask_about_existing();
            let text = format!("{} is there already", draft.path.display());
            state.notice = Some(Notice::new(Tone::Asked, text));
            vec![Effect::Bell]
        }
        Err(ProfileFailure::Failed { message, hint }) => {
            state.interview.input.reset();
            let text = format!(
                "not written: {message}; {hint}; nothing is lost: Enter tries again, or name another place"
            );
            state.notice = Some(Notice::new(Tone::Failed, text));
            vec![Effect::Bell]
        }
    }
}

fn put_in_force(state: &mut State, text: String, path: &std::path::Path) {
    // The text was read before it was written.
    let Ok((meter, _)) = Meter::read(&text) else {
        return;
    };
    let said = format!(
        "{} is the meter in force now, written to {}; it is not calibrated yet",
        meter.name,
        path.display()
    );
    state.setup.meter = meter;
    state.setup.profile_text = text;
    state.meter_from = MeterFrom::Profile;
    state.earlier_meter = state.lot.entries.iter().map(|entry| entry.id).max();
    // Positions of the switch are those of the meter before.
    if let Some(last) = &mut state.bench.last {
        last.switch = None;
    }
    state.front = Front::Bench;
    start_over(state);
    state.notice = Some(Notice::new(Tone::Said, said));
}

/// Returns whether what is to be written is asked now: the answers are then shown as a whole.
pub fn is_at_the_end(state: &State) -> bool {
    matches!(
        state.interview.question().topic,
        Topic::Place | Topic::Overwrite
    )
}

#[cfg(test)]
mod tests {
    use super::super::Prompt;
    use super::super::testing::Table;
    use super::*;

    /// As many Enters as lead from the first question to the place, with the defaults.
    const ALL_DEFAULTS: usize = 35;

    fn at_the_place(table: &mut Table) {
        table.keys("new meter↵");
        table.keys(&"↵".repeat(ALL_DEFAULTS));
        assert_eq!(table.state.interview.question().topic, Topic::Place);
    }

    #[test]
    fn a_meter_of_defaults_is_written_and_in_force() {
        let mut table = Table::new();
        table.keys("224J↵20.3↵↓↵");
        at_the_place(&mut table);
        assert_eq!(table.keys("↵"), ["write /home/signal/meter.toml"]);
        assert_eq!(
            table.notice(),
            "Home-built meter is the meter in force now, written to /home/signal/meter.toml; it is not calibrated yet"
        );
        assert!(matches!(table.state.front, Front::Bench));
        let setup = &table.state.setup;
        assert_eq!(setup.meter.name, "Home-built meter");
        assert_eq!(table.profiles.values().next(), Some(&setup.profile_text));
        assert_eq!(
            table.keys("224J↵20.3↵"),
            ["append 224J A 20.3: undecided no place"],
            "the bench goes on with the new meter"
        );
        assert_eq!(table.keys("note dusty↵").len(), 1);
    }

    #[test]
    fn parts_of_the_meter_before_are_not_judged_anew_in_passing() {
        let mut table = Table::new();
        table.keys("224J↵20.3↵");
        at_the_place(&mut table);
        table.keys("↵");
        assert_eq!(table.keys("note dusty↵"), ["bell"]);
        assert_eq!(
            table.notice(),
            "the last part was read on another meter: judge it again first"
        );
        assert_eq!(table.parts(), ["224J inside A1"]);
    }

    #[test]
    fn wrong_answers_stay_with_the_reason() {
        let mut table = Table::new();
        table.keys("new meter↵↵");
        assert_eq!(table.keys("1 kV↵"), ["bell"]);
        assert_eq!(table.state.interview.input.value(), "1 kV");
        assert!(table.notice().contains("while reading the unit"));
        assert_eq!(table.keys("⌫⌫⌫⌫1,25k↵"), [""; 0]);
        assert_eq!(table.state.interview.question().topic, Topic::Amplitude);
        assert_eq!(table.notice(), "");
    }

    #[test]
    fn back_goes_to_the_question_before_and_offers_its_answer() {
        let mut table = Table::new();
        table.keys("new meter↵hut meter↵2 kHz↵back↵");
        assert_eq!(table.state.interview.default(), "2 kHz");
        table.keys("↑");
        assert_eq!(table.state.interview.default(), "hut meter");
        assert_eq!(table.keys("back↵"), ["bell"]);
        assert_eq!(
            table.notice(),
            "this is the first question; leave goes to the bench"
        );
    }

    #[test]
    fn leaving_keeps_the_answers_and_the_part_in_hand() {
        let mut table = Table::new();
        table.keys("224J↵new meter↵hut meter↵2 kHz↵⎋");
        assert_eq!(table.state.bench.prompt, Prompt::Dial);
        table.keys("20.3↵");
        assert_eq!(table.parts(), ["224J inside A1"]);
        table.keys("new meter↵");
        assert_eq!(table.state.interview.question().topic, Topic::Amplitude);
        table.keys("leave↵③⎋new meter↵①");
        assert_eq!(table.state.front.page(), super::super::Page::Help);
        table.keys("⎋new meter↵back↵");
        assert_eq!(table.state.interview.default(), "2 kHz");
    }

    #[test]
    fn nothing_is_written_over_without_a_yes() {
        let mut table = Table::new();
        table
            .profiles
            .insert("/home/signal/meter.toml".into(), "old".to_owned());
        at_the_place(&mut table);
        assert_eq!(table.keys("↵"), ["write /home/signal/meter.toml", "bell"]);
        assert_eq!(table.notice(), "/home/signal/meter.toml is there already");
        for no in ["↵", "no↵", "y↵", "back↵"] {
            assert_eq!(table.keys(no), [""; 0], "{no}");
            assert_eq!(table.state.interview.question().topic, Topic::Place);
            assert_eq!(table.keys("↵"), ["write /home/signal/meter.toml", "bell"]);
        }
        let old = table.profiles.values().next().cloned();
        assert_eq!(old.as_deref(), Some("old"));
        assert_eq!(table.keys("yes↵"), ["write /home/signal/meter.toml"]);
        assert_ne!(table.profiles.values().next(), old.as_ref());
    }

    #[test]
    fn a_profile_that_cannot_be_written_is_not_lost() {
        let mut table = Table::new();
        let full = ProfileFailure::Failed {
            message: "cannot write /home/signal/meter.toml: disk is full".to_owned(),
            hint: "make room".to_owned(),
        };
        at_the_place(&mut table);
        table.profile_failure = Some(full);
        assert_eq!(table.keys("↵"), ["write /home/signal/meter.toml", "bell"]);
        assert!(table.notice().starts_with("not written: cannot write"));
        assert_eq!(table.state.setup.meter.name, "Example meter");
        assert_eq!(table.keys("/tmp/m.toml↵"), ["write /tmp/m.toml"]);
        assert_eq!(table.state.setup.meter.name, "Home-built meter");
    }

    #[test]
    fn clearing_the_prompt_comes_before_leaving_the_program() {
        let mut table = Table::new();
        table.keys("new meter↵hut^C");
        assert_eq!(table.state.interview.input.value(), "");
        assert!(!table.state.done);
        table.keys("^C");
        assert!(table.state.done);
    }

    #[test]
    fn the_next_time_the_answers_are_the_defaults() {
        let mut table = Table::new();
        table.keys("new meter↵hut meter↵");
        table.keys(&"↵".repeat(ALL_DEFAULTS));
        table.keys("new meter↵");
        assert_eq!(table.state.interview.number(), 1);
        assert_eq!(table.state.interview.default(), "hut meter");
    }
}
