//! `nulltray line`: the bench as numbered prompts and lines that are only ever added, for screen readers, scripts and
//! terminals that can do no more. The same state, the same entries, the same log.
//!
//! Prompts and talk go to the error stream. Once an entry is on disk, and not before, one line goes to the output:
//! `saved ID FINDING COMPARTMENT`, `-` standing for no compartment.

use std::io::{self, BufRead, Write};

use crate::app::{
    Event, Front, MeterFrom, Prompt, Shown, State, Subject, Units, cautions, deviation,
    is_at_the_end, limits_in_force, parked_place, probability, went_to,
};
use crate::marking::Reading;
use crate::meter::Switch;
use crate::terminal::Keeper;

/// Reads entries until the input ends or the person leaves.
///
/// # Errors
/// If the input cannot be read or the output cannot be written; what was confirmed is on disk all the same.
pub(super) fn run_line(
    mut state: State,
    mut keeper: Keeper,
    input: &mut dyn BufRead,
    output: &mut dyn Write,
    talk: &mut dyn Write,
) -> io::Result<()> {
    greet(&state, talk)?;
    let mut line = Vec::new();
    let mut question = None;
    loop {
        write!(talk, "{} ", prompt(&state))?;
        talk.flush()?;
        line.clear();
        if input.read_until(b'\n', &mut line)? == 0 {
            return writeln!(talk);
        }
        let text = String::from_utf8_lossy(&line);
        let before = at_hand(&state);
        let settled = keeper.settle(&mut state, Event::Line(text.trim().to_owned()));
        if let Some(id) = settled.saved {
            confirm(&state, id, output)?;
        }
        say_what_came(&state, before.as_ref(), settled.saved.is_some(), talk)?;
        if is_asking(&state) {
            let asked = asked(&state);
            if question.as_ref() != Some(&asked) {
                say_question(&state, &asked, talk)?;
            }
            question = Some(asked);
        } else {
            question = None;
        }
    }
}

fn confirm(state: &State, id: crate::app::RecordId, output: &mut dyn Write) -> io::Result<()> {
    if let Some(shown) = &state.bench.shown {
        let outcome = &shown.record.outcome;
        let place = went_to(outcome).unwrap_or("-");
        writeln!(output, "saved {id} {} {place}", outcome.finding)?;
        output.flush()?;
    }
    Ok(())
}

fn greet(state: &State, talk: &mut dyn Write) -> io::Result<()> {
    let meter = &state.setup.meter;
    let whose = match state.meter_from {
        MeterFrom::Example => "example meter, not yours",
        MeterFrom::Profile => meter.name.as_str(),
    };
    let calibrated = match &meter.calibration {
        Some(calibration) => {
            let date = calibration.date.split('T').next().unwrap_or_default();
            format!("calibrated {date}")
        }
        None => "not calibrated".to_owned(),
    };
    let n_parts = state.lot.parts().count();
    writeln!(
        talk,
        "{}, {calibrated}; lot {}, {n_parts} parts; the input's end leaves",
        plain(whose),
        plain(&state.lot.name)
    )
}

/// Returns the prompt: `marking 12>`, `dial B 46.8>`; of a new meter `resistance B 8>`.
fn prompt(state: &State) -> String {
    if is_asking(state) {
        let interview = &state.interview;
        return format!("{} {}>", interview.prompt(), interview.number());
    }
    let bench = &state.bench;
    if bench.prompt == Prompt::Marking {
        return format!("marking {}>", state.lot.parts().count() + 1);
    }
    let meter = &state.setup.meter;
    let switch = bench
        .switch_in_use()
        .map_or("", |switch| meter.label(switch));
    // The place at which `d` and `l` take the dial to be parked.
    match parked_place(state) {
        Some(place) => format!("dial {switch} {}>", meter.dial.show(place)),
        None => format!("dial {switch}>"),
    }
}

/// Says what came of an entry, the important word first.
fn say_what_came(
    state: &State,
    before: Option<&AtHand>,
    was_saved: bool,
    talk: &mut dyn Write,
) -> io::Result<()> {
    if was_saved && let Some(shown) = &state.bench.shown {
        writeln!(talk, "{}", plain(&finding(state, shown)))?;
        if !shown.record.outcome.remark.is_empty() {
            writeln!(talk, "{}", plain(&shown.record.outcome.remark))?;
        }
    }
    if let Some(notice) = &state.notice {
        writeln!(talk, "{}", plain(&notice.text))?;
    }
    let now = at_hand(state);
    if now.is_some() && now.as_ref() != before {
        for caution in cautions(state) {
            writeln!(talk, "caution: {}", plain(&caution))?;
        }
        writeln!(talk, "{}", plain(&expected(state)))?;
    }
    Ok(())
}

/// Whether a new meter is asked about.
fn is_asking(state: &State) -> bool {
    matches!(state.front, Front::NewMeter)
}

/// A question with what is accepted and offered; said once, and again only when it changes.
type Asked = (String, String, String);

fn asked(state: &State) -> Asked {
    let interview = &state.interview;
    (interview.words(), interview.accepted(), interview.default())
}

fn say_question(state: &State, asked: &Asked, talk: &mut dyn Write) -> io::Result<()> {
    if is_at_the_end(state) {
        for line in state.interview.short() {
            writeln!(talk, "{}", plain(&line))?;
        }
    }
    let (words, accepted, offered) = asked;
    let offered = if offered.is_empty() {
        String::new()
    } else {
        format!("; Enter alone: {offered}")
    };
    writeln!(talk, "{}", plain(words))?;
    writeln!(talk, "{}", plain(state.interview.question().good_for))?;
    writeln!(talk, "{}", plain(&format!("accepted: {accepted}{offered}")))
}

/// What is between the terminals, on which switch.
type AtHand = (String, Option<Switch>, Option<usize>);

/// Returns what the dial prompt is about; `None` at the marking prompt.
fn at_hand(state: &State) -> Option<AtHand> {
    let bench = &state.bench;
    let chosen = bench.marked().and_then(|marked| marked.chosen);
    let marking = bench.subject.marking().to_owned();
    (bench.prompt == Prompt::Dial).then(|| (marking, bench.switch_in_use(), chosen))
}

fn finding(state: &State, shown: &Shown) -> String {
    let outcome = &shown.record.outcome;
    let mut words = vec![outcome.finding.clone()];
    if let Some(place) = outcome.compartment.as_deref() {
        words.push(format!("to {place}"));
    }
    if let Some(value) = state.look.units.measured_with_doubt(outcome) {
        words.push(format!("{value} (k = 2)"));
    }
    words.extend(deviation(outcome));
    if let Some(share) = outcome.probability_inside {
        words.push(format!("inside: {}", probability(share)));
    }
    words.join(", ")
}

fn expected(state: &State) -> String {
    let bench = &state.bench;
    let meter = &state.setup.meter;
    let mut words = Vec::new();
    match &bench.subject {
        Subject::Part(marked) => {
            words.extend(marked.reading().map(Reading::in_words));
            let others = marked.decoding.readings.len().saturating_sub(1);
            match others {
                0 => {}
                1 => words.push("one other reading: +2 takes it".to_owned()),
                _ => words.push(format!("{others} other readings: +2 takes the second")),
            }
        }
        Subject::Check(check) => words.push(format!(
            "check part {}, {}",
            check.label,
            state.look.units.write(check.capacitance)
        )),
        Subject::Zero => words.push("open terminals: connect nothing".to_owned()),
    }
    if let Some(limits) = limits_in_force(state) {
        let units: Units = state.look.units;
        words.push(format!(
            "{} ({})",
            units.limits(limits.low, limits.high),
            limits.from.word()
        ));
    }
    if let Some(expected) = &bench.prediction {
        words.push(format!("switch {}", meter.label(expected.switch)));
        let show = |place| meter.dial.show(place);
        if let Some(band) = expected.band {
            words.push(format!("good {} to {}", show(band.from), show(band.to)));
        }
        if let Some(park) = bench.park {
            words.push(match park.settles {
                Some(share) => format!(
                    "park at {}: a dark lamp settles {:.0} %",
                    show(park.at),
                    share.percent()
                ),
                None => format!("park at {}: a dark lamp settles nothing", show(park.at)),
            });
        }
    }
    words.join("; ")
}

/// Returns the text without control characters: it may come from a file.
fn plain(text: &str) -> String {
    text.chars()
        .map(|c| if c.is_control() { '·' } else { c })
        .collect()
}
