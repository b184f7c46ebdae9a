//! From state to cells. Nothing is kept between two frames and nothing is worked out here but where things stand.
//!
//! The bench has three bands, each read from left to right: what is typed and where to turn; the finding and where the part
//! goes; the tray on the table and the parts before. From 120 by 40 cells on everything is shown; below 80 by 24 it is one
//! column, below 40 by 12 one line.

mod bench;
mod bench_dial;
mod bench_finding;
mod bench_lot;
mod bench_part;
mod block_letters;
mod chart;
mod dial_face;
mod dots;
mod list;
mod narrow;
mod new_meter;
mod prompt;
mod sheet;
mod strip;
mod theme;

pub use theme::{Role, sign, style};

use ratatui::buffer::Buffer;
use ratatui::layout::{Position, Rect};

use crate::app::{Front, State};
use sheet::Sheet;

/// Draws the screen in front; returns where the cursor stands, `None` if there is no prompt to be seen. Any area will do,
/// an empty one too.
pub fn draw(state: &State, area: Rect, buffer: &mut Buffer) -> Option<Position> {
    let mut sheet = Sheet::new(buffer, area, state.look);
    let (width, height) = (sheet.width(), sheet.height());
    if width == 0 || height == 0 {
        return None;
    }
    if matches!(state.front, Front::NewMeter) {
        return new_meter::draw(state, &mut sheet);
    }
    let is_small = width < 40 || height < 12;
    match (&state.front, state.front.list()) {
        (Front::Bench, _) | (_, None) if is_small => narrow::draw_line(state, &mut sheet),
        (Front::Bench, _) | (_, None) if width < 80 || height < 24 => {
            narrow::draw_column(state, &mut sheet)
        }
        (Front::Bench, _) | (_, None) => bench::draw(state, &mut sheet),
        (front, Some(list)) => list::draw(state, front.page(), list, &mut sheet),
    }
}
