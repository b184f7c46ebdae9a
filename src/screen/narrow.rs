//! The bench where there is little room: one column, or one line.

use ratatui::layout::Position;

use super::sheet::Sheet;
use super::theme::{Role, sign};
use super::{bench, bench_dial, bench_finding, bench_lot, bench_part, block_letters, strip};
use crate::app::{Page, Prompt, State, went_to};

/// Draws the bench as one column, the loop first; returns where the cursor stands.
pub(super) fn draw_column(state: &State, sheet: &mut Sheet<'_>) -> Option<Position> {
    let (width, height) = (sheet.width(), sheet.height());
    bench::draw_header(state, sheet);
    let inner = width.saturating_sub(2);
    let marking = bench_part::draw_marking_prompt(state, &mut sheet.part(1, 1, inner, 1), 0);
    if let Some((role, line)) = bench_part::details(state).first() {
        sheet.text(1, 2, line, *role);
    }
    let mut x = 1;
    for (role, line) in bench_dial::lines(state).iter().take(3) {
        x = sheet.text(x, 3, line, *role) + 2;
    }
    // Messages take the rows up to the dial prompt, which stands still; more of them where there is height.
    let n_messages = if height >= 18 { 3 } else { 1 };
    let messages = bench_part::messages(state, usize::from(inner));
    for (row, (role, line)) in (0..n_messages).zip(&messages) {
        sheet.text(1, 4 + row, line, *role);
    }
    let y = 4 + n_messages;
    let dial = bench_part::draw_dial_prompt(state, &mut sheet.part(1, y, inner, 1), 0);
    draw_finding(
        state,
        &mut sheet.part(1, y + 1, inner, height.saturating_sub(y + 2)),
    );
    bench::draw_footer(Page::Bench, sheet);
    marking.or(dial)
}

fn draw_finding(state: &State, sheet: &mut Sheet<'_>) {
    let Some(shown) = &state.bench.shown else {
        return;
    };
    let height = sheet.height();
    let outcome = &shown.record.outcome;
    bench_finding::draw_headline(state, shown, sheet, 0);
    let place = outcome.compartment.as_deref().unwrap_or_default();
    let label = bench_finding::label(state, place).unwrap_or_default();
    sheet.text(0, 1, &format!("to {place}  {label}"), Role::Strong);
    let mut y = 2;
    if height >= y + 7 && went_to(outcome).is_some() {
        let width = sheet.width();
        let (_, rows) = block_letters::draw(
            &mut sheet.part(0, y + 1, width, 5),
            0,
            0,
            place,
            Role::Compartment,
        );
        y += rows + 1;
    }
    if y < height {
        sheet.text(0, y, &bench_finding::how_sure(shown), Role::Plain);
        y += 1;
    }
    if y < height {
        strip::draw(
            &mut sheet.part(0, y, u16::MAX, 1),
            0,
            outcome,
            state.look.units,
        );
        y += 1;
    }
    let n_parts = state.lot.parts().count();
    let rows = y..height;
    for (row, (back, entry)) in rows.zip(state.lot.parts().rev().enumerate()) {
        bench_lot::draw_part(
            state,
            &mut sheet.part(0, row, u16::MAX, 1),
            n_parts - back,
            entry,
        );
    }
}

/// Draws the bench as a single line: the prompt, and the one thing to know now; returns where the cursor stands.
pub(super) fn draw_line(state: &State, sheet: &mut Sheet<'_>) -> Option<Position> {
    let width = sheet.width();
    let room = (width / 2).clamp(16, 30).min(width);
    let mut asking = sheet.part(0, 0, room, 1);
    let cursor = match state.bench.prompt {
        Prompt::Marking => bench_part::draw_marking_prompt(state, &mut asking, 0),
        Prompt::Dial => bench_part::draw_dial_prompt(state, &mut asking, 0),
    };
    let (role, line) = to_know(state);
    sheet.text(room + 1, 0, &line, role);
    cursor
}

fn to_know(state: &State) -> (Role, String) {
    let bench = &state.bench;
    if let Some(message) = bench_part::messages(state, usize::MAX).into_iter().next() {
        return message;
    }
    let is_idle = bench.prompt == Prompt::Marking && bench.marking.value().is_empty();
    match (&bench.shown, is_idle) {
        (Some(shown), true) => {
            let outcome = &shown.record.outcome;
            let sign = sign(&outcome.finding, state.look.glyphs);
            let place = outcome.compartment.as_deref().unwrap_or_default();
            let line = format!(" {sign} {place} {} ", outcome.finding);
            (Role::of_finding(&outcome.finding), line)
        }
        _ if bench.prompt == Prompt::Dial => {
            let lines = bench_dial::lines(state).into_iter();
            lines
                .clone()
                .nth(1)
                .or_else(|| lines.clone().next())
                .unwrap_or((Role::Faint, String::new()))
        }
        _ => bench_part::details(state)
            .into_iter()
            .next()
            .unwrap_or((Role::Faint, String::new())),
    }
}
