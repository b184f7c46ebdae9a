//! What is drawn on: text goes through here, so that nothing leaves its place, no control character reaches the terminal
//! and nothing but ASCII does where the terminal knows no more.

use ratatui::buffer::Buffer;
use ratatui::layout::{Position, Rect};

use super::theme::{Role, style};
use crate::app::{Glyphs, Look};

/// A rectangle of the screen, with how things are to look.
pub(super) struct Sheet<'a> {
    buffer: &'a mut Buffer,
    area: Rect,
    look: Look,
}

impl<'a> Sheet<'a> {
    /// Makes a sheet of the part of the area that the buffer has.
    pub(super) fn new(buffer: &'a mut Buffer, area: Rect, look: Look) -> Self {
        let area = area.intersection(buffer.area);
        Self { buffer, area, look }
    }

    /// Returns a part of the sheet; what lies outside is cut off.
    pub(super) fn part(&mut self, x: u16, y: u16, width: u16, height: u16) -> Sheet<'_> {
        let asked = Rect {
            x: self.area.x.saturating_add(x),
            y: self.area.y.saturating_add(y),
            width,
            height,
        };
        Sheet {
            area: asked.intersection(self.area),
            look: self.look,
            buffer: self.buffer,
        }
    }

    pub(super) fn width(&self) -> u16 {
        self.area.width
    }

    pub(super) fn height(&self) -> u16 {
        self.area.height
    }

    pub(super) fn look(&self) -> Look {
        self.look
    }

    /// Returns the place on the screen of a cell of the sheet; `None` if it lies outside.
    pub(super) fn place(&self, x: u16, y: u16) -> Option<Position> {
        let is_inside = x < self.area.width && y < self.area.height;
        is_inside.then(|| Position::new(self.area.x + x, self.area.y + y))
    }

    /// Writes a text; returns the column after it. What does not fit is cut off.
    pub(super) fn text(&mut self, x: u16, y: u16, text: &str, role: Role) -> u16 {
        self.text_within(x, y, text, u16::MAX, role)
    }

    /// Writes a text into so many columns at most; one that is cut ends in an ellipsis.
    pub(super) fn text_within(
        &mut self,
        x: u16,
        y: u16,
        text: &str,
        width: u16,
        role: Role,
    ) -> u16 {
        if x >= self.area.width || y >= self.area.height {
            return x;
        }
        let room = usize::from(width.min(self.area.width - x));
        let shown = written(text, self.look.glyphs);
        let length = ratatui::text::Span::raw(shown.as_str()).width();
        let style = style(role, self.look.colours);
        let (at_x, at_y) = (self.area.x + x, self.area.y + y);
        if length <= room {
            let (end, _) = self.buffer.set_stringn(at_x, at_y, shown, room, style);
            return end - self.area.x;
        }
        let mark = written("…", self.look.glyphs);
        let (end, _) = self
            .buffer
            .set_stringn(at_x, at_y, shown, room.saturating_sub(1), style);
        let left = usize::from(x) + room - usize::from(end - self.area.x);
        let (end, _) = self.buffer.set_stringn(end, at_y, mark, left, style);
        end - self.area.x
    }

    /// Writes a text so that it ends before the column given.
    pub(super) fn text_before(&mut self, end: u16, y: u16, text: &str, role: Role) {
        let length =
            u16::try_from(ratatui::text::Span::raw(written(text, self.look.glyphs)).width())
                .unwrap_or(u16::MAX);
        self.text_within(end.saturating_sub(length), y, text, end, role);
    }

    /// Writes a text over several lines, breaking at blanks; returns how many lines it took.
    pub(super) fn paragraph(&mut self, x: u16, y: u16, height: u16, text: &str, role: Role) -> u16 {
        let room = usize::from(self.area.width.saturating_sub(x));
        if room == 0 || height == 0 {
            return 0;
        }
        let lines = wrapped(text, room);
        let most = usize::from(height);
        for (row, line) in (y..).zip(lines.iter().take(most)) {
            let last = usize::from(row - y) + 1 == most && lines.len() > most;
            let line = if last {
                format!("{line} …")
            } else {
                line.clone()
            };
            self.text(x, row, &line, role);
        }
        u16::try_from(lines.len().min(most)).unwrap_or(height)
    }

    /// Writes a text on a coloured ground, with a blank either side; returns the column after it.
    pub(super) fn chip(&mut self, x: u16, y: u16, text: &str, role: Role) -> u16 {
        self.text(x, y, &format!(" {text} "), role)
    }

    /// Draws a line across, with captions standing in it.
    pub(super) fn rule(&mut self, y: u16, captions: &[(u16, &str)]) {
        let line = "─".repeat(usize::from(self.area.width));
        self.text(0, y, &line, Role::Rule);
        for (x, caption) in captions {
            if !caption.is_empty() {
                self.text(*x, y, &format!(" {caption} "), Role::Plain);
            }
        }
    }

    /// Draws a line down.
    pub(super) fn fence(&mut self, x: u16, y: u16, height: u16) {
        for row in y..y.saturating_add(height).min(self.area.height) {
            self.text(x, row, "│", Role::Rule);
        }
    }

    /// Gives a row another style, keeping its text.
    pub(super) fn mark_row(&mut self, y: u16, role: Role) {
        if y < self.area.height {
            let row = Rect {
                y: self.area.y + y,
                height: 1,
                ..self.area
            };
            self.buffer.set_style(row, style(role, self.look.colours));
        }
    }
}

/// Returns the text as the terminal may have it.
fn written(text: &str, glyphs: Glyphs) -> String {
    let mut shown = String::with_capacity(text.len());
    for character in text.chars() {
        if character.is_control() || is_direction_mark(character) {
            shown.push(if glyphs == Glyphs::Ascii { '.' } else { '·' });
        } else if glyphs == Glyphs::Ascii && !character.is_ascii() {
            shown.push_str(in_ascii(character));
        } else {
            shown.push(character);
        }
    }
    shown
}

fn is_direction_mark(character: char) -> bool {
    matches!(character, '\u{200b}'..='\u{200f}' | '\u{2028}'..='\u{202e}' | '\u{2060}'..='\u{206f}' | '\u{feff}')
}

/// What stands for a character where only ASCII may be drawn.
const IN_ASCII: [(&str, &str); 25] = [
    ("µμüú", "u"),
    ("Ω", "O"),
    ("±", "+-"),
    ("°●öó", "o"),
    ("…", ".."),
    ("·", "."),
    ("─━–—", "-"),
    ("│", "|"),
    ("┬┴┼├┤✓", "+"),
    ("▸▶", ">"),
    ("◂◀", "<"),
    ("▾", "v"),
    ("═", "="),
    ("█▇▆▅", "#"),
    ("▄▃▂▁", "_"),
    ("▀", "\""),
    ("✗×", "x"),
    ("∅", "0"),
    ("δ", "d"),
    ("αäá", "a"),
    ("éèê", "e"),
    ("í", "i"),
    ("ñ", "n"),
    ("ß", "s"),
    ("²", "2"),
];

fn in_ascii(character: char) -> &'static str {
    IN_ASCII
        .iter()
        .find(|(from, _)| from.contains(character))
        .map_or("?", |(_, to)| to)
}

/// Breaks a text at blanks into lines of at most so many columns; a longer word is cut.
pub(super) fn wrapped(text: &str, width: usize) -> Vec<String> {
    let mut lines: Vec<String> = Vec::new();
    let mut line = String::new();
    for word in text.split_whitespace() {
        let length = |text: &str| text.chars().count();
        if !line.is_empty() && length(&line) + 1 + length(word) > width {
            lines.push(std::mem::take(&mut line));
        }
        if !line.is_empty() {
            line.push(' ');
        }
        line.push_str(word);
    }
    if !line.is_empty() {
        lines.push(line);
    }
    lines
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn control_characters_never_reach_the_terminal() {
        let area = Rect::new(0, 0, 12, 1);
        let mut buffer = Buffer::empty(area);
        let mut sheet = Sheet::new(&mut buffer, area, Look::default());
        sheet.text(0, 0, "a\u{1b}[31mb\u{202e}c\n", Role::Plain);
        let row: String = buffer
            .content
            .iter()
            .map(ratatui::buffer::Cell::symbol)
            .collect();
        assert_eq!(row, "a·[31mb·c·  ");
    }

    #[test]
    fn only_ascii_is_drawn_where_only_ascii_is_known() {
        let shown = written("4.7 µF ±5 % ─│▸ é 漢", Glyphs::Ascii);
        assert!(shown.is_ascii(), "{shown}");
        assert_eq!(shown, "4.7 uF +-5 % -|> e ?");
    }

    #[test]
    fn a_text_that_is_cut_says_so() {
        let area = Rect::new(0, 0, 6, 1);
        let mut buffer = Buffer::empty(area);
        let mut sheet = Sheet::new(&mut buffer, area, Look::default());
        sheet.text(0, 0, "capacitor", Role::Plain);
        let row: String = buffer
            .content
            .iter()
            .map(ratatui::buffer::Cell::symbol)
            .collect();
        assert_eq!(row, "capac…");
    }

    #[test]
    fn lines_break_at_blanks() {
        assert_eq!(wrapped("one two three", 7), ["one two", "three"]);
        assert_eq!(wrapped("", 7), [""; 0]);
    }
}
