//! The questions about a new meter: what is asked and what for, the prompt, the answers so far.

use ratatui::layout::Position;

use super::bench::{draw_footer, draw_header};
use super::prompt::{self, Asking, Turn};
use super::sheet::Sheet;
use super::theme::Role;
use crate::app::{Page, State, Tone, is_at_the_end};

/// The prompt stands here, whatever is said above it.
const PROMPT_ROW: u16 = 7;
/// What was answered is listed from here on.
const ANSWERS_ROW: u16 = 11;

/// Draws the question; returns where the cursor stands.
pub(super) fn draw(state: &State, sheet: &mut Sheet<'_>) -> Option<Position> {
    let (width, height) = (sheet.width(), sheet.height());
    if width < 40 || height < 12 {
        return draw_small(state, sheet);
    }
    let interview = &state.interview;
    let inner = width - 2;
    draw_header(state, sheet);
    let title = format!("new meter: question {}", interview.number());
    sheet.rule(1, &[(2, &title)]);
    let mut said = sheet.part(1, 2, inner, PROMPT_ROW - 2);
    let mut y = said.paragraph(0, 0, 2, &interview.words(), Role::Strong);
    y += said.paragraph(0, y, 2, interview.question().good_for, Role::Plain);
    let accepted = format!("accepted: {}", interview.accepted());
    let left = said.height().saturating_sub(y);
    said.paragraph(0, y, left, &accepted, Role::Faint);
    let cursor = draw_prompt(state, &mut sheet.part(1, PROMPT_ROW, inner, 1));
    let room = (ANSWERS_ROW - PROMPT_ROW - 1).min(height - PROMPT_ROW - 2);
    if let Some((role, text)) = notice(state) {
        let mut said = sheet.part(1, PROMPT_ROW + 1, inner, room);
        said.paragraph(0, 0, room, &text, role);
    }
    if ANSWERS_ROW + 3 < height {
        let title = if is_at_the_end(state) {
            "what will be written"
        } else {
            "so far"
        };
        sheet.rule(ANSWERS_ROW, &[(2, title)]);
        let rows = height - ANSWERS_ROW - 2;
        draw_answers(state, &mut sheet.part(1, ANSWERS_ROW + 1, inner, rows));
    }
    draw_footer(Page::NewMeter, sheet);
    cursor
}

/// The latest answers are those that are seen where there is no room for all.
fn draw_answers(state: &State, sheet: &mut Sheet<'_>) {
    let mut lines = state.interview.short();
    let points = state.interview.points();
    if state.interview.is_about_points() {
        lines.extend(
            points
                .iter()
                .map(|point| format!("{:>7}  {}", point.reading, point.written)),
        );
    }
    let width = usize::from(sheet.width());
    let lines: Vec<String> = lines
        .iter()
        .flat_map(|line| super::sheet::wrapped(line, width))
        .collect();
    let hidden = lines.len().saturating_sub(usize::from(sheet.height()));
    for (row, line) in (0..sheet.height()).zip(lines.iter().skip(hidden)) {
        sheet.text(0, row, line, Role::Plain);
    }
}

fn draw_prompt(state: &State, sheet: &mut Sheet<'_>) -> Option<Position> {
    let asking = Asking {
        name: &state.interview.prompt(),
        input: &state.interview.input,
        instead: &state.interview.default(),
        turn: Turn::Now,
    };
    prompt::draw(sheet, 0, 0, &asking)
}

fn notice(state: &State) -> Option<(Role, String)> {
    let notice = state.notice.as_ref()?;
    Some(match notice.tone {
        Tone::Said => (Role::Faint, notice.text.clone()),
        Tone::Asked => (Role::Question, format!("! {}", notice.text)),
        Tone::Refused => (Role::Strong, format!("! {}", notice.text)),
        Tone::Failed => (Role::Caution, format!("! {}", notice.text)),
    })
}

/// Where there is little room: the prompt, then what was refused, else the question.
fn draw_small(state: &State, sheet: &mut Sheet<'_>) -> Option<Position> {
    let (width, height) = (sheet.width(), sheet.height());
    let cursor = draw_prompt(state, &mut sheet.part(0, 0, width, 1));
    let said = notice(state).filter(|(role, _)| *role != Role::Faint);
    let (role, text) = said.unwrap_or_else(|| (Role::Plain, state.interview.words()));
    sheet.paragraph(0, 1, height.saturating_sub(1), &text, role);
    cursor
}
