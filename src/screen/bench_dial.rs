//! Where to turn: the numbers, and the picture of the dial.

use super::dial_face::{self, Face};
use super::sheet::Sheet;
use super::theme::Role;
use crate::app::{Prompt, State, limits_in_force};
use crate::meter::{Cut, DialReading, Prediction};
use crate::quantity::{Fraction, Resolution, engineering};

/// Columns of the numbers beside the picture.
const TEXT_COLUMNS: u16 = 18;

/// Draws the dial's side of the upper band.
pub(super) fn draw(state: &State, sheet: &mut Sheet<'_>) {
    let bench = &state.bench;
    for (row, (role, line)) in (0..).zip(lines(state)) {
        let width = if role == Role::Park {
            sheet.width()
        } else {
            TEXT_COLUMNS
        };
        sheet.text_within(0, row, &line, width, role);
    }
    let expected = bench.prediction.as_ref();
    let band = expected.and_then(|expected| expected.band);
    let face = Face {
        dial: &state.setup.meter.dial,
        band: band.map(|band| (band.from, band.to)),
        doubt: doubt(state).unwrap_or(0.0),
        expected: expected.and_then(|expected| expected.expected),
        reading: reading(state),
        rim: &bench.rim,
        units: state.look.units,
    };
    let (width, height) = (sheet.width(), sheet.height());
    let left = TEXT_COLUMNS.min(width);
    dial_face::draw(&mut sheet.part(left, 0, width - left, height), &face);
}

/// The reading to mark: what is being typed, else that of the finding shown while nothing new has begun.
fn reading(state: &State) -> Option<DialReading> {
    let bench = &state.bench;
    if bench.prompt == Prompt::Dial || !bench.marking.value().is_empty() {
        return bench.mark;
    }
    let raw = &bench.shown.as_ref()?.record.raw;
    let switch = bench.switch_in_use()?;
    let same = state.setup.meter.label(switch) == raw.switch;
    let number = |text: &Option<String>| text.as_ref()?.parse::<f64>().ok();
    let place = number(&raw.dial).or_else(|| {
        let (from, to) = (number(&raw.dark_from)?, number(&raw.dark_to)?);
        Some(f64::midpoint(from, to))
    });
    place.filter(|_| same).map(DialReading::new)
}

/// Half width of the meter's doubt in dial numbers, k = 2: the relative uncertainty times the dial numbers that a relative
/// change of the capacitance takes, as the band has it.
fn doubt(state: &State) -> Option<f64> {
    let expected = state.bench.prediction.as_ref()?;
    let (band, uncertainty) = (expected.band?, expected.uncertainty?);
    let limits = limits_in_force(state)?;
    let relative = (limits.high? / limits.low).ln();
    let doubt = 2.0 * uncertainty.get() * (band.to.get() - band.from.get()) / relative;
    (band.cut == Cut::Neither && doubt.is_finite()).then_some(doubt)
}

/// Where to turn, in words, most important first.
pub(super) fn lines(state: &State) -> Vec<(Role, String)> {
    let bench = &state.bench;
    let Some(expected) = &bench.prediction else {
        return vec![(Role::Faint, "type a marking".to_owned())];
    };
    let mut lines = vec![
        (
            Role::Strong,
            format!("switch {}", state.setup.meter.label(expected.switch)),
        ),
        expect(state, expected),
    ];
    let dial = &state.setup.meter.dial;
    let span = |from, to| format!("{} … {}", dial.show(from), dial.show(to));
    let band = expected.band.filter(|band| band.from < band.to);
    if let Some(band) = band {
        lines.push((Role::Plain, format!("good {}", span(band.from, band.to))));
    }
    if let Some(dark) = expected.dark {
        lines.push((Role::Plain, format!("dark {}", span(dark.from, dark.to))));
    }
    let volts = engineering(expected.part_voltage.get(), Resolution::Digits(2), "V");
    lines.push((Role::Plain, format!("{volts} on the part")));
    if let Some(uncertainty) = expected.uncertainty {
        let expanded = Fraction::new(2.0 * uncertainty.get());
        let percent = format!("{:.1}", expanded.percent());
        lines.push((Role::Faint, format!("±{percent} % (k = 2)")));
    }
    if let Some(park) = bench.park {
        lines.push(match park.settles {
            Some(share) => (
                Role::Plain,
                format!("dark settles {:.0} %", share.percent()),
            ),
            None => (Role::Plain, "dark settles none".to_owned()),
        });
    }
    lines
}

fn expect(state: &State, expected: &Prediction) -> (Role, String) {
    let dial = &state.setup.meter.dial;
    match (state.bench.park, expected.expected, expected.beyond) {
        (Some(park), _, _) => (Role::Park, format!(" PARK AT {} ", dial.show(park.at))),
        (None, Some(place), _) => (Role::Strong, format!("expect {}", dial.show(place))),
        (None, None, Some(stop)) => (Role::Strong, format!("past the {stop} stop")),
        (None, None, None) => (
            Role::Strong,
            format!("dimmest {}", dial.show(expected.balance)),
        ),
    }
}
