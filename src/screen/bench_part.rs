//! What is typed: the two prompts, and what the marking may mean.

use ratatui::layout::Position;

use super::prompt::{self, Asking, Turn};
use super::sheet::{Sheet, wrapped};
use super::theme::Role;
use crate::app::{Bench, Prompt, State, Subject, Tone, Units, cautions, limits_in_force};
use crate::marking::Reading;
use crate::quantity::Fraction;

/// Draws the part's side of the upper band; returns where the cursor stands.
pub(super) fn draw(state: &State, sheet: &mut Sheet<'_>) -> Option<Position> {
    let height = sheet.height();
    let dial_row = height.saturating_sub(1);
    let marking = draw_marking_prompt(state, sheet, 0);
    let dial = draw_dial_prompt(state, sheet, dial_row);
    let room = dial_row.saturating_sub(1);
    let said = messages(state, usize::from(sheet.width()));
    let n_said = u16::try_from(said.len())
        .unwrap_or(u16::MAX)
        .min(room.saturating_sub(1));
    for (row, (role, line)) in (0..n_said).zip(said) {
        sheet.text(0, dial_row - n_said + row, &line, role);
    }
    let details = details(state);
    for (row, (role, line)) in (1..dial_row.saturating_sub(n_said)).zip(details) {
        sheet.text(0, row, &line, role);
    }
    marking.or(dial)
}

/// Draws the marking prompt.
pub(super) fn draw_marking_prompt(
    state: &State,
    sheet: &mut Sheet<'_>,
    y: u16,
) -> Option<Position> {
    let bench = &state.bench;
    let instead = match (&bench.subject, &bench.last) {
        (Subject::Part(_), Some(last)) => last.marking.clone(),
        (Subject::Part(_), None) => String::new(),
        (Subject::Check(check), _) => format!("check {}", check.label),
        (Subject::Zero, _) => "zero".to_owned(),
    };
    let asking = Asking {
        name: "marking",
        input: &bench.marking,
        instead: &instead,
        turn: turn(bench, Prompt::Marking),
    };
    prompt::draw(sheet, 0, y, &asking)
}

/// Draws the dial prompt.
pub(super) fn draw_dial_prompt(state: &State, sheet: &mut Sheet<'_>, y: u16) -> Option<Position> {
    let bench = &state.bench;
    let switch = bench.switch_in_use();
    let name = match switch {
        Some(switch) => format!("dial {:<2}", state.setup.meter.label(switch)),
        None => "dial   ".to_owned(),
    };
    let asking = Asking {
        name: &name,
        input: &bench.dial,
        instead: "",
        turn: turn(bench, Prompt::Dial),
    };
    prompt::draw(sheet, 0, y, &asking)
}

fn turn(bench: &Bench, prompt: Prompt) -> Turn {
    if bench.prompt == prompt {
        Turn::Now
    } else {
        Turn::Later
    }
}

/// What is to be said now, broken into lines: what was just asked or refused first, then the cautions.
pub(super) fn messages(state: &State, width: usize) -> Vec<(Role, String)> {
    let mut lines = Vec::new();
    let mut say = |role: Role, text: &str| {
        let text = if role == Role::Plain {
            text.to_owned()
        } else {
            format!("! {text}")
        };
        lines.extend(wrapped(&text, width).into_iter().map(|line| (role, line)));
    };
    if let Some(notice) = &state.notice {
        let role = match notice.tone {
            Tone::Said => Role::Plain,
            Tone::Asked => Role::Question,
            Tone::Refused => Role::Strong,
            Tone::Failed => Role::Caution,
        };
        say(role, &notice.text);
    }
    for caution in cautions(state) {
        say(Role::Caution, &caution);
    }
    lines
}

/// What the marking means and what else it may mean, most important first.
pub(super) fn details(state: &State) -> Vec<(Role, String)> {
    let units = state.look.units;
    match &state.bench.subject {
        Subject::Check(check) => {
            let doubt = Fraction::new(2.0 * check.uncertainty.get());
            let known = format!("{} ±{doubt} (k = 2)", units.write(check.capacitance));
            vec![
                (Role::Strong, format!("check part {}", check.label)),
                (Role::Plain, known),
            ]
        }
        Subject::Zero => vec![
            (Role::Strong, "open terminals: connect nothing".to_owned()),
            (
                Role::Plain,
                format!("{} of stray expected", units.write(state.setup.meter.stray)),
            ),
        ],
        Subject::Part(marked) => {
            let chosen = marked.chosen.unwrap_or(0);
            let readings = &marked.decoding.readings;
            let mut lines = Vec::new();
            if let Some(reading) = readings.get(chosen) {
                lines.extend(of_reading(state, reading));
            } else if !marked.decoding.marking.is_empty() {
                let what = format!("no reading of {} yet", marked.decoding.marking);
                lines.push((Role::Faint, what));
            }
            let others = readings
                .iter()
                .enumerate()
                .filter(|(index, _)| *index != chosen);
            lines.extend(others.map(|(index, other)| also(units, index, other)));
            if marked.decoding.omitted > 0 {
                let more = format!("and {} more readings", marked.decoding.omitted);
                lines.push((Role::Faint, more));
            }
            lines
        }
    }
}

fn of_reading(state: &State, reading: &Reading) -> Vec<(Role, String)> {
    let units = state.look.units;
    let mut lines = vec![(Role::Strong, headline(units, reading))];
    if let Some(limits) = limits_in_force(state) {
        let text = format!(
            "{}  {}",
            units.limits(limits.low, limits.high),
            limits.from.word()
        );
        lines.push((Role::Plain, text));
    }
    let three = [Units::Pf, Units::Nf, Units::Uf].map(|units| units.write(reading.capacitance));
    lines.push((Role::Plain, three.join(" = ")));
    let used: Vec<String> = reading
        .used
        .iter()
        .map(|used| format!("{} {}", used.text, used.role.word()))
        .collect();
    if !used.is_empty() {
        lines.push((Role::Faint, used.join(" · ")));
    }
    if !reading.unexplained.is_empty() {
        let left = format!("not explained: {}", reading.unexplained.join(" "));
        lines.push((Role::Faint, left));
    }
    lines
}

/// The reading in a few words, in the unit asked for.
pub(super) fn headline(units: Units, reading: &Reading) -> String {
    let mut words = vec![match reading.tolerance {
        Some(tolerance) => format!("{} {tolerance}", units.write(reading.capacitance)),
        None => format!("{}, no tolerance", units.write(reading.capacitance)),
    }];
    words.extend(reading.voltage.map(|voltage| voltage.to_string()));
    words.extend(
        reading
            .safety_class
            .clone()
            .map(|class| format!("class {class}")),
    );
    words.extend(reading.characteristic.clone());
    words.extend(reading.family.map(|family| family.to_string()));
    words.extend(reading.date.clone());
    words.join("  ")
}

fn also(units: Units, index: usize, reading: &Reading) -> (Role, String) {
    let tolerance = reading
        .tolerance
        .map_or_else(String::new, |t| format!(" {t}"));
    let why = reading
        .why
        .first()
        .map_or_else(String::new, |why| format!(" ({why})"));
    let line = format!(
        "+{} {}{tolerance}{why}",
        index + 1,
        units.write(reading.capacitance)
    );
    (Role::Faint, line)
}
