//! The tray as it stands on the table, and the parts that came before.

use super::bench_finding::label;
use super::sheet::Sheet;
use super::theme::{Role, sign};
use crate::app::{Entry, State, histogram, went_to};
use crate::tray::{Place, Tray};

/// Columns of the row letters.
const MARGIN: u16 = 3;

/// Draws the tray: rows and columns, counts, the compartment to use now marked; labels where there is room.
pub(super) fn draw_tray(state: &State, sheet: &mut Sheet<'_>) {
    let Some(tray) = &state.setup.tray else {
        sheet.text(0, 0, "no tray file", Role::Faint);
        return;
    };
    let now = state
        .bench
        .shown
        .as_ref()
        .and_then(|shown| went_to(&shown.record.outcome));
    let room = sheet.width().saturating_sub(MARGIN);
    let rows_left = sheet.height().saturating_sub(1);
    let with_labels = tray.rows * 2 <= rows_left && room / tray.columns.max(1) >= 8;
    let (cell, rows_each) = if with_labels {
        ((room / tray.columns.max(1)).min(14), 2)
    } else {
        (4, 1)
    };
    let current = now.and_then(|now| place_named(tray, now));
    let first_column = first_in_view(tray.columns, room / cell, current.map(|p| p.column));
    let first_row = first_in_view(tray.rows, rows_left / rows_each, current.map(|p| p.row));
    for (x, column) in (0..room / cell).zip(first_column..tray.columns) {
        let text = (column + 1).to_string();
        sheet.text_before(MARGIN + x * cell + 3, 0, &text, Role::Faint);
    }
    for (y, row) in (0..rows_left / rows_each).zip(first_row..tray.rows) {
        let top = 1 + y * rows_each;
        let name = Place { row, column: 0 }.to_string();
        sheet.text(0, top, name.trim_end_matches('1'), Role::Faint);
        for (x, column) in (0..room / cell).zip(first_column..tray.columns) {
            let place = Place { row, column }.to_string();
            let at = (MARGIN + x * cell, top);
            draw_compartment(state, sheet, at, &place, now == Some(place.as_str()));
            if let (true, Some(label)) = (with_labels, label(state, &place)) {
                sheet.text_within(at.0, top + 1, label, cell - 1, Role::Faint);
            }
        }
    }
}

fn draw_compartment(
    state: &State,
    sheet: &mut Sheet<'_>,
    (x, y): (u16, u16),
    place: &str,
    is_current: bool,
) {
    let count = state.lot.in_compartment(place);
    let known = label(state, place).is_some();
    let text = match (count, known) {
        (0, true) => "·".to_owned(),
        (0, false) => String::new(),
        (count, _) => count.to_string(),
    };
    if is_current {
        sheet.text(x, y, &format!("▸{text:>2}"), Role::Selected);
    } else {
        sheet.text_before(x + 3, y, &text, Role::Plain);
    }
}

fn place_named(tray: &Tray, name: &str) -> Option<Place> {
    tray.compartments
        .iter()
        .map(|compartment| compartment.at)
        .find(|place| place.to_string() == name)
}

/// Returns the first of `count` to show so that `wanted` is among the `room` shown.
fn first_in_view(count: u16, room: u16, wanted: Option<u16>) -> u16 {
    let most = count.saturating_sub(room);
    wanted
        .map_or(0, |wanted| (wanted + 1).saturating_sub(room))
        .min(most)
}

/// Draws the last parts, the latest first, then the pace and, where there is room, the histogram of the lot.
pub(super) fn draw_parts(state: &State, sheet: &mut Sheet<'_>) {
    let (width, height) = (sheet.width(), sheet.height());
    let rows = height.saturating_sub(1);
    let n_parts = state.lot.parts().count();
    let with_histogram = width >= 58 && height >= 7;
    let table = if with_histogram { width - 21 } else { width };
    for (row, (back, entry)) in (0..rows).zip(state.lot.parts().rev().enumerate()) {
        let part = &mut sheet.part(0, row, table, 1);
        draw_part(state, part, n_parts - back, entry);
    }
    sheet.text_within(0, rows, &pace(state), width, Role::Faint);
    if with_histogram {
        draw_histogram(state, &mut sheet.part(table + 1, 0, 20, height));
    }
}

/// Draws one part on a row.
pub(super) fn draw_part(state: &State, sheet: &mut Sheet<'_>, number: usize, entry: &Entry) {
    let (raw, outcome) = (&entry.record.raw, &entry.record.outcome);
    sheet.text_before(3, 0, &number.to_string(), Role::Faint);
    sheet.text_within(4, 0, &raw.marking, 9, Role::Plain);
    let seen = match (&raw.dial, &raw.dark_from, &raw.lamp) {
        (Some(dial), _, _) => dial.clone(),
        (None, Some(from), _) => from.clone(),
        (None, None, Some(lamp)) if lamp == "always" => "dark".to_owned(),
        (None, None, _) => "lit".to_owned(),
    };
    sheet.text_within(14, 0, &format!("{} {seen}", raw.switch), 7, Role::Plain);
    let value = state.look.units.measured(outcome);
    let value = value.unwrap_or_else(|| "no value".to_owned());
    sheet.text_within(22, 0, &value, 9, Role::Plain);
    let sign = sign(&outcome.finding, state.look.glyphs);
    sheet.text(
        32,
        0,
        &format!(" {sign} "),
        Role::of_finding(&outcome.finding),
    );
    let place = went_to(outcome).unwrap_or("-");
    sheet.text_within(36, 0, place, 5, Role::Strong);
}

/// Returns pace and counts.
pub(super) fn pace(state: &State) -> String {
    let lot = &state.lot;
    let n_parts = lot.parts().count();
    let mut words = Vec::new();
    words.extend(
        lot.seconds_a_part()
            .map(|seconds| format!("{seconds:.0} s a part")),
    );
    words.push(match n_parts {
        1 => "1 part".to_owned(),
        n_parts => format!("{n_parts} parts"),
    });
    words.push(format!("{} inside", lot.count("inside")));
    words.join("   ")
}

/// Draws how the deviations lie, in half tolerances from -2 to +2.
fn draw_histogram(state: &State, sheet: &mut Sheet<'_>) {
    const EIGHTHS: [&str; 9] = [" ", "▁", "▂", "▃", "▄", "▅", "▆", "▇", "█"];
    let bins = histogram(&state.lot.deviations());
    let most = bins
        .iter()
        .map(|(_, count)| *count)
        .max()
        .unwrap_or(0)
        .max(1);
    let rows = sheet.height().saturating_sub(2);
    for (bin, (_, count)) in (0..).zip(&bins) {
        let eighths = (count * usize::from(rows) * 8).div_ceil(most);
        for row in 0..rows {
            let below = usize::from(rows - 1 - row) * 8;
            let filled = eighths.saturating_sub(below).min(8);
            let block = EIGHTHS.get(filled).copied().unwrap_or(" ");
            sheet.text(bin * 2, row, block, Role::Plain);
        }
    }
    sheet.text(0, rows, "─────┴───────┴──────", Role::Rule);
    sheet.text(0, rows + 1, "   low    0   high", Role::Faint);
}
