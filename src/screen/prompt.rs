//! A prompt: its name, what is typed, and where the cursor stands.

use ratatui::layout::Position;
use tui_input::Input;

use super::sheet::Sheet;
use super::theme::Role;

/// A prompt to be drawn.
pub(super) struct Asking<'a> {
    /// What is asked for.
    pub(super) name: &'a str,
    /// What is typed.
    pub(super) input: &'a Input,
    /// What Enter alone takes, shown faintly while nothing is typed.
    pub(super) instead: &'a str,
    /// Whether this prompt is being answered.
    pub(super) turn: Turn,
}

/// Whether a prompt is being answered.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Turn {
    Now,
    Later,
}

/// Draws the prompt on one row; returns where the cursor stands if it is being answered.
pub(super) fn draw(sheet: &mut Sheet<'_>, x: u16, y: u16, asking: &Asking<'_>) -> Option<Position> {
    let role = match asking.turn {
        Turn::Now => Role::Prompt,
        Turn::Later => Role::Faint,
    };
    let end = sheet.text(x, y, asking.name, role);
    let arrow = match asking.turn {
        Turn::Now => " ▸ ",
        Turn::Later => "   ",
    };
    let start = sheet.text(end, y, arrow, Role::Strong);
    let room = usize::from(sheet.width().saturating_sub(start)).saturating_sub(1);
    let text = asking.input.value();
    if text.is_empty() {
        sheet.text(start, y, asking.instead, Role::Faint);
    } else {
        let hidden = asking.input.visual_scroll(room);
        let shown: String = skip_columns(text, hidden);
        let role = match asking.turn {
            Turn::Now => Role::Strong,
            Turn::Later => Role::Plain,
        };
        sheet.text(start, y, &shown, role);
    }
    if asking.turn == Turn::Later {
        return None;
    }
    let hidden = asking.input.visual_scroll(room);
    let column = asking.input.visual_cursor().saturating_sub(hidden);
    sheet.place(
        start.saturating_add(u16::try_from(column).unwrap_or(u16::MAX)),
        y,
    )
}

/// Leaves out so many columns at the start of a text.
fn skip_columns(text: &str, columns: usize) -> String {
    let mut left = columns;
    let shown = text.chars().skip_while(|character| {
        let width = ratatui::text::Span::raw(character.to_string()).width();
        let skip = left > 0;
        left = left.saturating_sub(width.max(usize::from(skip)));
        skip
    });
    shown.collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn columns_are_skipped_not_characters() {
        assert_eq!(skip_columns("abc", 0), "abc");
        assert_eq!(skip_columns("abc", 2), "c");
        assert_eq!(skip_columns("漢字c", 2), "字c");
        assert_eq!(skip_columns("abc", 9), "");
    }
}
