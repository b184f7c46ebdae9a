//! A picture in dots, two columns and four rows of them to a character cell; in ASCII one sign a cell.

use super::sheet::Sheet;
use super::theme::Role;
use crate::app::Glyphs;

/// The picture.
pub(super) struct Dots {
    columns: u16,
    rows: u16,
    cells: Vec<(u8, Option<Role>)>,
}

/// Dots across a cell.
pub(super) const ACROSS: f64 = 2.0;
/// Dots down a cell.
pub(super) const DOWN: f64 = 4.0;

impl Dots {
    /// Makes an empty picture of so many character cells.
    pub(super) fn new(columns: u16, rows: u16) -> Self {
        let count = usize::from(columns) * usize::from(rows);
        Self {
            columns,
            rows,
            cells: vec![(0, None); count],
        }
    }

    /// Sets the dot at this place, counted in dots from the upper left; a later role of a cell counts. Outside: nothing.
    pub(super) fn set(&mut self, x: f64, y: f64, role: Role) {
        let (x, y) = (x.floor(), y.floor());
        let inside = 0.0 <= x
            && x < f64::from(self.columns) * ACROSS
            && 0.0 <= y
            && y < f64::from(self.rows) * DOWN;
        if !inside {
            return;
        }
        #[expect(
            clippy::cast_possible_truncation,
            clippy::cast_sign_loss,
            reason = "checked to lie inside the picture"
        )]
        let (x, y) = (x as usize, y as usize);
        let index = (y / 4) * usize::from(self.columns) + x / 2;
        // Dots of a braille cell: 1 2 3 7 down the left side, 4 5 6 8 down the right.
        let bit = match (x % 2, y % 4) {
            (0, 3) => 6,
            (0, row) => row,
            (_, 3) => 7,
            (_, row) => row + 3,
        };
        if let Some((bits, known)) = self.cells.get_mut(index) {
            *bits |= 1 << bit;
            *known = Some(role);
        }
    }

    /// Draws the picture onto a sheet.
    pub(super) fn show(&self, sheet: &mut Sheet<'_>) {
        let glyphs = sheet.look().glyphs;
        let width = usize::from(self.columns.max(1));
        for (y, row) in (0..).zip(self.cells.chunks(width)) {
            for (x, (bits, role)) in (0..).zip(row) {
                let Some(role) = role else { continue };
                let shown = match glyphs {
                    Glyphs::Unicode => char::from_u32(0x2800 + u32::from(*bits)).unwrap_or(' '),
                    Glyphs::Ascii => sign(*role),
                };
                sheet.text(x, y, shown.encode_utf8(&mut [0; 4]), *role);
            }
        }
    }
}

fn sign(role: Role) -> char {
    match role {
        Role::DialBand => '#',
        Role::DialFringe => '=',
        Role::DialExpected => '|',
        Role::DialReading => '*',
        Role::Caution => 'X',
        Role::Rule => '-',
        _ => '.',
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::app::Look;
    use ratatui::buffer::Buffer;
    use ratatui::layout::Rect;

    #[test]
    fn each_dot_has_its_place() {
        let area = Rect::new(0, 0, 2, 1);
        let mut dots = Dots::new(2, 1);
        for row in 0..4 {
            dots.set(0.0, f64::from(row), Role::DialScale);
        }
        dots.set(3.0, 0.0, Role::DialBand);
        dots.set(-1.0, 0.0, Role::DialBand);
        dots.set(4.0, f64::NAN, Role::DialBand);
        let shown = |glyphs| {
            let mut buffer = Buffer::empty(area);
            let look = Look {
                glyphs,
                ..Look::default()
            };
            dots.show(&mut Sheet::new(&mut buffer, area, look));
            buffer
                .content
                .iter()
                .map(ratatui::buffer::Cell::symbol)
                .collect::<String>()
        };
        assert_eq!(shown(Glyphs::Unicode), "⡇⠈");
        assert_eq!(shown(Glyphs::Ascii), ".#");
    }
}
