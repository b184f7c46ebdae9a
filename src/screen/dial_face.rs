//! A picture of the person's own dial: its sweep and numbers, good parts as a thick arc, the meter's doubt as a fringe at
//! both ends of it, a stroke across at the expected place, a pointer at the reading.

use super::dots::{ACROSS, DOWN, Dots};
use super::sheet::Sheet;
use super::theme::Role;
use crate::app::{Units, printed_numbers};
use crate::meter::{Dial, DialReading};
use crate::quantity::{Farad, Resolution};

/// What is to be seen on the dial.
#[derive(Clone, Copy, Debug)]
pub(super) struct Face<'a> {
    pub(super) dial: &'a Dial,
    /// Where good parts fall, in printed numbers.
    pub(super) band: Option<(DialReading, DialReading)>,
    /// Half width of the fringe, in printed numbers.
    pub(super) doubt: f64,
    pub(super) expected: Option<DialReading>,
    pub(super) reading: Option<DialReading>,
    /// Capacitances at printed numbers; shown where there is room.
    pub(super) rim: &'a [(DialReading, Farad)],
    pub(super) units: Units,
}

/// Columns between the arc and a printed number beside it.
const GAP_COLUMNS: u16 = 2;
/// Columns a capacitance takes beyond the number.
const RIM_COLUMNS: u16 = 8;
/// From this width on there is room for capacitances.
const WIDTH_WITH_RIM: u16 = 46;

/// Where the dial lies on the sheet; lengths in dots, angles clockwise from the top in radians.
#[derive(Clone, Copy, Debug)]
struct Geometry {
    x: f64,
    y: f64,
    radius: f64,
    first: f64,
    sweep: f64,
}

impl Geometry {
    /// Fits the arc into a sheet of so many cells, margins for the numbers left free; `None` if nothing can be seen there.
    fn fitted(sweep_degrees: f64, columns: u16, rows: u16, side: u16, above: u16) -> Option<Self> {
        let sweep = sweep_degrees.clamp(-350.0, 350.0).to_radians();
        let first = -sweep / 2.0;
        let (mut right, mut up, mut down) = (0.0_f64, 0.0_f64, -1.0_f64);
        for step in 0..=90 {
            let angle = first + sweep * f64::from(step) / 90.0;
            right = right.max(angle.sin().abs());
            up = up.max(angle.cos());
            down = down.max(-angle.cos());
        }
        // The pointer starts at the middle, which is to be seen too.
        let down = down.max(0.15);
        let width = f64::from(columns.checked_sub(2 * side)?) * ACROSS;
        let below = u16::from(down > 0.9);
        let height = f64::from(rows.checked_sub(above + below)?) * DOWN;
        let radius = ((width - 1.0) / (2.0 * right.max(0.1))).min((height - 1.0) / (up + down));
        (radius >= 5.0).then(|| Self {
            x: f64::from(columns) * ACROSS / 2.0,
            y: f64::from(above) * DOWN + radius * up + 0.5,
            radius,
            first,
            sweep,
        })
    }

    fn angle(&self, travel: f64) -> f64 {
        self.first + self.sweep * travel.clamp(0.0, 1.0)
    }

    fn point(&self, travel: f64, radius: f64) -> (f64, f64) {
        let angle = self.angle(travel);
        (self.x + radius * angle.sin(), self.y - radius * angle.cos())
    }
}

/// Draws the dial as large as the sheet allows; nothing where it would be too small to read.
pub(super) fn draw(sheet: &mut Sheet<'_>, face: &Face<'_>) {
    let (columns, rows) = (sheet.width(), sheet.height());
    let with_rim = columns >= WIDTH_WITH_RIM && !face.rim.is_empty();
    let numbers = printed_numbers(face.dial);
    // The first and the last number stand below the widest place of the arc.
    let beside = numbers.iter().skip(1).rev().skip(1);
    let longest = beside.map(|number| length(&number.to_string())).max();
    let side = GAP_COLUMNS + longest.unwrap_or(1);
    let (side, above) = if with_rim {
        (side + RIM_COLUMNS, 2)
    } else {
        (side, 1)
    };
    let Some(geometry) = Geometry::fitted(face.dial.sweep.0, columns, rows, side, above) else {
        return;
    };
    let mut dots = Dots::new(columns, rows);
    arc(&mut dots, &geometry, (0.0, 1.0), 0.0, Role::DialScale);
    for number in &numbers {
        spoke(
            &mut dots,
            &geometry,
            face.dial.travel(*number),
            (-2.0, 0.0),
            Role::DialScale,
        );
    }
    draw_band(&mut dots, &geometry, face);
    if let Some(expected) = face.expected {
        let travel = face.dial.travel(expected);
        spoke(
            &mut dots,
            &geometry,
            travel,
            (-6.0, 2.0),
            Role::DialExpected,
        );
    }
    if let Some(reading) = face.reading {
        let travel = face.dial.travel(reading);
        let inner = (-geometry.radius, -6.0);
        spoke(&mut dots, &geometry, travel, inner, Role::DialReading);
    }
    dots.show(sheet);
    if let Some(reading) = face.reading {
        let (x, y) = geometry.point(face.dial.travel(reading), geometry.radius - 6.0);
        if let (Some(x), Some(y)) = (cell(x, ACROSS), cell(y, DOWN)) {
            sheet.text(x, y, "●", Role::DialReading);
        }
    }
    draw_numbers(sheet, &geometry, face, &numbers, with_rim);
}

fn draw_band(dots: &mut Dots, geometry: &Geometry, face: &Face<'_>) {
    let Some((from, to)) = face.band else { return };
    let travel = |number: f64| face.dial.travel(DialReading::new(number));
    let ends = (travel(from.get()), travel(to.get()));
    if face.doubt > 0.0 {
        for (one, other) in [
            (from.get() - face.doubt, from.get() + face.doubt),
            (to.get() - face.doubt, to.get() + face.doubt),
        ] {
            let fringe = (travel(one).clamp(0.0, 1.0), travel(other).clamp(0.0, 1.0));
            arc(dots, geometry, fringe, -1.0, Role::DialFringe);
            arc(dots, geometry, fringe, -2.0, Role::DialFringe);
        }
    }
    for inward in [0.0, -1.0, -2.0, -3.0] {
        arc(dots, geometry, ends, inward, Role::DialBand);
    }
}

/// Draws part of the arc, so many dots outside the scale.
fn arc(dots: &mut Dots, geometry: &Geometry, ends: (f64, f64), outside: f64, role: Role) {
    const DOTS_A_STEP: f64 = 0.6;
    let radius = geometry.radius + outside;
    let length = (ends.1 - ends.0).abs() * geometry.sweep.abs() * radius;
    let n_steps = (length / DOTS_A_STEP).ceil().clamp(1.0, 4000.0);
    let mut step = 0.0;
    while step <= n_steps {
        let travel = ends.0 + (ends.1 - ends.0) * step / n_steps;
        let (x, y) = geometry.point(travel, radius);
        dots.set(x, y, role);
        step += 1.0;
    }
}

/// Draws a stroke along the radius, between two distances from the scale in dots, positive outside.
fn spoke(dots: &mut Dots, geometry: &Geometry, travel: f64, ends: (f64, f64), role: Role) {
    let mut outside = ends.0.max(-geometry.radius);
    while outside <= ends.1 {
        let (x, y) = geometry.point(travel, geometry.radius + outside);
        dots.set(x, y, role);
        outside += 0.5;
    }
}

fn cell(dot: f64, dots_a_cell: f64) -> Option<u16> {
    let cell = (dot / dots_a_cell).floor();
    #[expect(
        clippy::cast_possible_truncation,
        clippy::cast_sign_loss,
        reason = "checked to be a column or a row"
    )]
    (0.0 <= cell && cell < f64::from(u16::MAX)).then_some(cell as u16)
}

/// Writes the printed numbers, and capacitances beyond them; what would run into another is left out.
fn draw_numbers(
    sheet: &mut Sheet<'_>,
    geometry: &Geometry,
    face: &Face<'_>,
    numbers: &[DialReading],
    with_rim: bool,
) {
    let mut taken: Vec<(u16, u16, u16)> = Vec::new();
    let n_numbers = numbers.len();
    // The ends first: they must be there whatever else is left out.
    let ends_first = numbers
        .iter()
        .enumerate()
        .filter(|(index, _)| *index == 0 || index + 1 == n_numbers)
        .chain(
            numbers
                .iter()
                .enumerate()
                .filter(|(index, _)| 0 < *index && index + 1 < n_numbers),
        );
    for (_, number) in ends_first {
        let travel = face.dial.travel(*number);
        let angle = geometry.angle(travel);
        let (x, y) = geometry.point(travel, geometry.radius + 3.0);
        let (Some(column), Some(row)) = (cell(x, ACROSS), cell(y, DOWN)) else {
            continue;
        };
        let row = row.min(sheet.height().saturating_sub(1));
        let text = number.to_string();
        let beside = Side::of(angle);
        let start = beside.start(column, &text);
        if !is_free(&taken, row, start, &text) {
            continue;
        }
        taken.push((row, start, length(&text)));
        sheet.text(start, row, &text, Role::Plain);
        let value = face.rim.iter().find(|(place, _)| place == number);
        if let (true, Some((_, capacitance))) = (with_rim, value) {
            let value = face.units.write_with(*capacitance, Resolution::Digits(3));
            let (row, start) = match beside {
                Side::Left => (row, start.saturating_sub(length(&value) + 1)),
                Side::Right => (row, start + length(&text) + 1),
                Side::Above => (
                    row.saturating_sub(1),
                    column.saturating_sub(length(&value) / 2),
                ),
            };
            if is_free(&taken, row, start, &value) {
                taken.push((row, start, length(&value)));
                sheet.text(start, row, &value, Role::Faint);
            }
        }
    }
}

fn length(text: &str) -> u16 {
    u16::try_from(text.chars().count()).unwrap_or(u16::MAX)
}

fn is_free(taken: &[(u16, u16, u16)], row: u16, start: u16, text: &str) -> bool {
    let end = start + length(text);
    taken
        .iter()
        .filter(|(other, _, _)| *other == row)
        .all(|(_, from, width)| end < *from || from + width < start)
}

/// On which side of the arc a number stands.
#[derive(Clone, Copy, PartialEq)]
enum Side {
    Left,
    Right,
    Above,
}

impl Side {
    fn of(angle: f64) -> Self {
        match angle.sin() {
            across if across > 0.25 => Self::Right,
            across if across < -0.25 => Self::Left,
            _ => Self::Above,
        }
    }

    fn start(self, column: u16, text: &str) -> u16 {
        match self {
            Self::Right => column,
            Self::Left => (column + 1).saturating_sub(length(text)),
            Self::Above => column.saturating_sub(length(text) / 2),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::app::{Glyphs, Look};
    use crate::meter::{Degrees, Taper};
    use crate::quantity::{Fraction, Ohm};
    use ratatui::buffer::Buffer;
    use ratatui::layout::Rect;

    fn dial(sweep: f64) -> Dial {
        Dial {
            low: DialReading::new(0.0),
            high: DialReading::new(100.0),
            division: 1.0,
            taper: Taper::Linear {
                total: Ohm::new(4700.0),
                end: Ohm::new(20.0),
                tolerance: Fraction::new(0.1),
            },
            sweep: Degrees(sweep),
        }
    }

    fn drawn(sweep: f64, width: u16, height: u16, glyphs: Glyphs) -> Vec<String> {
        let area = Rect::new(0, 0, width, height);
        let mut buffer = Buffer::empty(area);
        let look = Look {
            glyphs,
            ..Look::default()
        };
        let dial = dial(sweep);
        let rim = [(DialReading::new(50.0), Farad::new(235e-9))];
        let face = Face {
            dial: &dial,
            band: Some((DialReading::new(44.4), DialReading::new(49.1))),
            doubt: 0.9,
            expected: Some(DialReading::new(46.8)),
            reading: Some(DialReading::new(46.2)),
            rim: &rim,
            units: Units::Auto,
        };
        draw(&mut Sheet::new(&mut buffer, area, look), &face);
        buffer
            .content
            .chunks(usize::from(width.max(1)))
            .map(|row| row.iter().map(ratatui::buffer::Cell::symbol).collect())
            .collect()
    }

    #[test]
    fn the_numbers_run_clockwise_and_the_other_way_for_a_negative_sweep() {
        let ends = |sweep| {
            let rows = drawn(sweep, 28, 9, Glyphs::Ascii);
            let bottom = rows.iter().find(|row| row.contains("100"));
            let bottom = bottom
                .expect("the highest number is there")
                .replace("100", "1");
            bottom.find('0') < bottom.find('1')
        };
        assert!(ends(270.0));
        assert!(!ends(-270.0));
    }

    #[test]
    fn the_middle_is_at_the_top_and_the_ends_face_each_other() {
        let geometry = Geometry::fitted(270.0, 40, 12, 4, 1).expect("room for a dial");
        let (x, y) = geometry.point(0.5, geometry.radius);
        assert!((x - geometry.x).abs() < 1e-9 && y < geometry.y);
        let (low, high) = (
            geometry.point(0.0, geometry.radius),
            geometry.point(1.0, geometry.radius),
        );
        assert!((low.1 - high.1).abs() < 1e-9 && low.0 < high.0);
        assert!(low.1 > geometry.y, "the gap is at the bottom");
    }

    #[test]
    fn it_fits_its_sheet_at_any_size_and_sweep() {
        for sweep in [270.0, -270.0, 180.0, 90.0, 10.0, 0.0, 340.0, 3600.0] {
            for (width, height) in [(0, 0), (1, 1), (12, 4), (28, 8), (60, 16), (200, 60)] {
                let rows = drawn(sweep, width, height, Glyphs::Unicode);
                assert!(rows.len() <= usize::from(height.max(1)));
            }
        }
    }

    #[test]
    fn in_ascii_band_and_pointer_have_signs_of_their_own() {
        let all = drawn(270.0, 60, 16, Glyphs::Ascii).join("\n");
        assert!(all.is_ascii(), "{all}");
        for sign in ['#', '=', '|', '*', 'o', '.'] {
            assert!(all.contains(sign), "no {sign} in\n{all}");
        }
        assert!(all.contains("235 nF"), "no capacitance in\n{all}");
    }
}
