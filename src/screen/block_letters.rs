//! The compartment in letters that can be read from a step away: five rows high, or ten where there is room.

use super::sheet::Sheet;
use super::theme::Role;

/// Rows of a letter.
const ROWS: usize = 5;

/// Five rows of five columns each, a bit a square, the leftmost the highest.
type Shape = [u8; ROWS];

#[rustfmt::skip]
const LETTERS: [(char, Shape); 37] = [
    ('A', [0b01110, 0b10001, 0b11111, 0b10001, 0b10001]),
    ('B', [0b11110, 0b10001, 0b11110, 0b10001, 0b11110]),
    ('C', [0b01111, 0b10000, 0b10000, 0b10000, 0b01111]),
    ('D', [0b11110, 0b10001, 0b10001, 0b10001, 0b11110]),
    ('E', [0b11111, 0b10000, 0b11110, 0b10000, 0b11111]),
    ('F', [0b11111, 0b10000, 0b11110, 0b10000, 0b10000]),
    ('G', [0b01111, 0b10000, 0b10011, 0b10001, 0b01111]),
    ('H', [0b10001, 0b10001, 0b11111, 0b10001, 0b10001]),
    ('I', [0b11111, 0b00100, 0b00100, 0b00100, 0b11111]),
    ('J', [0b00111, 0b00001, 0b00001, 0b10001, 0b01110]),
    ('K', [0b10001, 0b10010, 0b11100, 0b10010, 0b10001]),
    ('L', [0b10000, 0b10000, 0b10000, 0b10000, 0b11111]),
    ('M', [0b10001, 0b11011, 0b10101, 0b10001, 0b10001]),
    ('N', [0b10001, 0b11001, 0b10101, 0b10011, 0b10001]),
    ('O', [0b01110, 0b10001, 0b10001, 0b10001, 0b01110]),
    ('P', [0b11110, 0b10001, 0b11110, 0b10000, 0b10000]),
    ('Q', [0b01110, 0b10001, 0b10101, 0b10010, 0b01101]),
    ('R', [0b11110, 0b10001, 0b11110, 0b10010, 0b10001]),
    ('S', [0b01111, 0b10000, 0b01110, 0b00001, 0b11110]),
    ('T', [0b11111, 0b00100, 0b00100, 0b00100, 0b00100]),
    ('U', [0b10001, 0b10001, 0b10001, 0b10001, 0b01110]),
    ('V', [0b10001, 0b10001, 0b10001, 0b01010, 0b00100]),
    ('W', [0b10001, 0b10001, 0b10101, 0b11011, 0b10001]),
    ('X', [0b10001, 0b01010, 0b00100, 0b01010, 0b10001]),
    ('Y', [0b10001, 0b01010, 0b00100, 0b00100, 0b00100]),
    ('Z', [0b11111, 0b00010, 0b00100, 0b01000, 0b11111]),
    ('0', [0b01110, 0b10011, 0b10101, 0b11001, 0b01110]),
    ('1', [0b00100, 0b01100, 0b00100, 0b00100, 0b01110]),
    ('2', [0b11110, 0b00001, 0b01110, 0b10000, 0b11111]),
    ('3', [0b11110, 0b00001, 0b01110, 0b00001, 0b11110]),
    ('4', [0b10010, 0b10010, 0b11111, 0b00010, 0b00010]),
    ('5', [0b11111, 0b10000, 0b11110, 0b00001, 0b11110]),
    ('6', [0b01110, 0b10000, 0b11110, 0b10001, 0b01110]),
    ('7', [0b11111, 0b00001, 0b00010, 0b00100, 0b00100]),
    ('8', [0b01110, 0b10001, 0b01110, 0b10001, 0b01110]),
    ('9', [0b01110, 0b10001, 0b01111, 0b00001, 0b01110]),
    ('-', [0b00000, 0b00000, 0b11111, 0b00000, 0b00000]),
];

/// How large a letter is drawn.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
struct Scale {
    columns: u16,
    rows: u16,
}

/// The scales, the largest first; cells are about twice as high as wide.
const SCALES: [Scale; 3] = [
    Scale {
        columns: 3,
        rows: 2,
    },
    Scale {
        columns: 2,
        rows: 1,
    },
    Scale {
        columns: 1,
        rows: 1,
    },
];

/// Draws a short text as large as fits; returns its size, (0, 0) if it does not fit at all.
pub(super) fn draw(sheet: &mut Sheet<'_>, x: u16, y: u16, text: &str, role: Role) -> (u16, u16) {
    let count = u16::try_from(text.chars().count()).unwrap_or(u16::MAX);
    let size = |scale: Scale| {
        let width = count
            .saturating_mul(6 * scale.columns)
            .saturating_sub(scale.columns);
        (width, 5 * scale.rows)
    };
    let room = (
        sheet.width().saturating_sub(x),
        sheet.height().saturating_sub(y),
    );
    let fitting = SCALES.into_iter().find(|scale| {
        let (width, height) = size(*scale);
        width <= room.0 && height <= room.1
    });
    let Some(scale) = fitting.filter(|_| count > 0) else {
        return (0, 0);
    };
    for (position, letter) in (0..).zip(text.chars()) {
        let left = x + position * 6 * scale.columns;
        for (row, bits) in (0..).zip(shape(letter)) {
            let line: String = (0..5)
                .map(|column| {
                    let is_set = bits & (0b10000 >> column) != 0;
                    if is_set { "█" } else { " " }.repeat(usize::from(scale.columns))
                })
                .collect();
            for below in 0..scale.rows {
                sheet.text(left, y + row * scale.rows + below, &line, role);
            }
        }
    }
    size(scale)
}

fn shape(letter: char) -> Shape {
    let upper = letter.to_ascii_uppercase();
    LETTERS
        .iter()
        .find(|(known, _)| *known == upper)
        .map_or([0b11111; ROWS], |(_, shape)| *shape)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::app::Look;
    use ratatui::buffer::Buffer;
    use ratatui::layout::Rect;

    fn drawn(text: &str, width: u16, height: u16) -> (Vec<String>, (u16, u16)) {
        let area = Rect::new(0, 0, width, height);
        let mut buffer = Buffer::empty(area);
        let mut sheet = Sheet::new(&mut buffer, area, Look::default());
        let size = draw(&mut sheet, 0, 0, text, Role::Compartment);
        let rows = buffer.content.chunks(usize::from(width)).map(|row| {
            row.iter()
                .map(ratatui::buffer::Cell::symbol)
                .collect::<String>()
        });
        (rows.map(|row| row.trim_end().to_owned()).collect(), size)
    }

    #[test]
    fn letters_are_five_rows_high() {
        let (rows, size) = drawn("B3", 24, 5);
        assert_eq!(size, (22, 5));
        assert_eq!(
            rows,
            [
                "████████    ████████",
                "██      ██          ██",
                "████████      ██████",
                "██      ██          ██",
                "████████    ████████",
            ]
        );
    }

    #[test]
    fn they_grow_and_shrink_with_the_room() {
        assert_eq!(drawn("B3", 60, 10).1, (33, 10));
        assert_eq!(drawn("AA12", 24, 5).1, (23, 5));
        assert_eq!(drawn("AA12", 20, 5).1, (0, 0));
        assert_eq!(drawn("B3", 60, 4).1, (0, 0));
    }

    #[test]
    fn every_letter_and_digit_has_a_shape_of_its_own() {
        let mut shapes = std::collections::HashSet::new();
        for letter in ('A'..='Z').chain('0'..='9') {
            assert!(shapes.insert(shape(letter)), "{letter} looks like another");
        }
    }
}
