//! What follows from what is typed so far: readings, switch, expected place, capacitances around the rim.

use super::bench::refuse;
use super::entry::{self, Prompt, Typed};
use super::rim::rim;
use super::sighting::read_sighting;
use super::state::{Effect, Park, State};
use super::work::{Subject, known_part, place_of};
use super::{Marked, predict_marked};
use crate::finding;
use crate::marking::{Decoding, decode};
use crate::meter::{DialReading, Switch, best_switch, predict};
use crate::quantity::Farad;

/// Works out anew what follows from what is typed: readings, switch, expected place, capacitances around the rim.
pub(super) fn refresh(state: &mut State) {
    let typed = state.bench.marking.value().trim().to_owned();
    if matches!(state.bench.subject, Subject::Part(_)) {
        refresh_marked(state, &typed);
    }
    let setup = &state.setup;
    let bench = &mut state.bench;
    bench.prediction = match &bench.subject {
        Subject::Part(marked) => predict_marked(setup, marked, bench.switch),
        Subject::Check(check) => {
            let part = known_part(check.capacitance, check.loss);
            let switch = bench
                .switch
                .unwrap_or_else(|| best_switch(&setup.meter, &part));
            Some(predict(&setup.meter, switch, &part))
        }
        Subject::Zero => {
            let part = known_part(Farad::new(1e-15), 0.0);
            let switch = bench
                .switch
                .unwrap_or_else(|| best_switch(&setup.meter, &part));
            Some(predict(&setup.meter, switch, &part))
        }
    };
    bench.rim = match bench.switch_in_use() {
        Some(switch) => rim(setup, bench.marked(), switch),
        None => Vec::new(),
    };
    refresh_mark(state);
    state.bench.park = park(state);
}

fn refresh_marked(state: &mut State, typed: &str) {
    let read = entry::read(typed, Prompt::Marking, &state.setup.meter.dial, None);
    let bench = &mut state.bench;
    // While nothing is typed, or an entry that is no marking, it is about the last marking.
    let (text, chosen, switch) = match (read, &bench.last) {
        (Ok(Typed::Marking(_)), _) => (typed, None, None),
        (_, Some(last)) => (last.marking.as_str(), last.chosen, last.switch),
        (_, None) => ("", None, None),
    };
    let known = match &bench.subject {
        Subject::Part(marked) => marked.decoding.marking.as_str(),
        _ => "",
    };
    if known == text && !text.is_empty() {
        return;
    }
    bench.switch = switch;
    bench.subject = Subject::Part(Marked {
        decoding: if text.is_empty() {
            Decoding::default()
        } else {
            decode(text, None)
        },
        family: None,
        chosen,
    });
}

/// Marks on the dial what is typed so far.
pub(super) fn refresh_mark(state: &mut State) {
    let parked = parked_place(state);
    let bench = &mut state.bench;
    let line = bench.dial.value();
    let sighting = read_sighting(line, &state.setup.meter.dial, parked);
    bench.mark = sighting.ok().and_then(|sighting| place_of(sighting.seen));
}

/// For a part with the same marking as the last one: the best place to park the dial on the switch in use, and what share
/// of good parts the lamp settles there; where it settles none, the expected place.
fn park(state: &State) -> Option<Park> {
    let bench = &state.bench;
    let marked = bench.marked()?;
    let same = bench.last.as_ref()?.marking == marked.decoding.marking;
    if !same || bench.correcting.is_some() {
        return None;
    }
    let switch = bench.switch_in_use()?;
    let best = finding::park(
        &state.setup.meter,
        switch,
        marked.reading()?,
        &state.setup.rules(),
    );
    match best.filter(|parking| parking.settled.get() > 0.0) {
        Some(parking) => Some(Park {
            at: parking.window.at,
            settles: Some(parking.settled),
        }),
        None => Some(Park {
            at: bench.prediction.as_ref()?.expected?,
            settles: None,
        }),
    }
}

/// Returns where the dial is taken to be parked when only a lamp is entered: where the screen says, else where the part is
/// expected.
pub fn parked_place(state: &State) -> Option<DialReading> {
    let bench = &state.bench;
    let expected = bench.prediction.as_ref().and_then(|p| p.expected);
    bench.park.map(|park| park.at).or(expected)
}

/// Takes another switch; the reading asked about is then another one.
pub(super) fn choose_switch(state: &mut State, switch: Switch) {
    state.bench.switch = Some(switch);
    state.bench.question = None;
    state.notice = None;
    refresh(state);
}

/// Takes the switch that is so many positions further on the panel.
pub(super) fn step_switch(state: &mut State, steps: isize) {
    let switches: Vec<Switch> = state.setup.meter.switches().collect();
    let Some(now) = state.bench.switch_in_use().map(Switch::position) else {
        return;
    };
    let next = now
        .saturating_add_signed(steps)
        .min(switches.len().saturating_sub(1));
    if let Some(switch) = switches.get(next) {
        choose_switch(state, *switch);
    }
}

/// Takes the reading of the marking that is so many further; after the last comes the first.
pub(super) fn step_reading(state: &mut State, steps: isize) {
    if let Subject::Part(marked) = &mut state.bench.subject {
        let count = isize::try_from(marked.decoding.readings.len()).unwrap_or(0);
        if count > 0 {
            let now = isize::try_from(marked.chosen.unwrap_or(0)).unwrap_or(0);
            marked.chosen = usize::try_from((now + steps).rem_euclid(count)).ok();
            state.bench.switch = None;
            refresh(state);
        }
    }
}

/// Takes the reading of the marking with this number, counted from 1.
pub(super) fn choose_reading(state: &mut State, number: usize) -> Vec<Effect> {
    state.bench.line_mut().reset();
    let count = match &mut state.bench.subject {
        Subject::Part(marked) => {
            let count = marked.decoding.readings.len();
            if (1..=count).contains(&number) {
                marked.chosen = Some(number - 1);
            }
            count
        }
        _ => 0,
    };
    if !(1..=count).contains(&number) {
        return refuse(
            state,
            format!(
                "the marking has {count} readings, not {number}; accepted here: +1 to +{count}"
            ),
        );
    }
    if state.bench.prompt == Prompt::Marking {
        if let (Some(last), Subject::Part(marked)) = (&mut state.bench.last, &state.bench.subject) {
            last.chosen = marked.chosen;
        }
        state.bench.prompt = Prompt::Dial;
    }
    state.bench.switch = None;
    refresh(state);
    Vec::new()
}
