//! The bench where there is room for all of it.

use ratatui::layout::Position;

use super::sheet::Sheet;
use super::theme::Role;
use super::{bench_dial, bench_finding, bench_lot, bench_part};
use crate::app::{Intent, Key, MeterFrom, Page, State};

/// Rows of the bands for a screen of this height.
struct Bands {
    typed: u16,
    finding: u16,
    lot: u16,
}

impl Bands {
    /// Shares out the rows left by the header, three rules and the footer.
    fn of(height: u16) -> Self {
        let rows = height.saturating_sub(5);
        let (finding, lot) = if height >= 36 { (10, 9) } else { (5, 6) };
        Self {
            typed: rows.saturating_sub(finding + lot),
            finding,
            lot,
        }
    }
}

/// Draws the bench; returns where the cursor stands.
pub(super) fn draw(state: &State, sheet: &mut Sheet<'_>) -> Option<Position> {
    let (width, height) = (sheet.width(), sheet.height());
    let bands = Bands::of(height);
    let (fence, lot_fence) = (width / 2 - width / 12, width / 2 - 1);
    let fence = if width < 110 { lot_fence } else { fence };
    let right = width - fence - 2;
    draw_header(state, sheet);

    let y = 1;
    sheet.rule(y, &[(2, "part"), (fence + 2, "dial")]);
    sheet.fence(fence, y + 1, bands.typed);
    let cursor = bench_part::draw(state, &mut sheet.part(1, y + 1, fence - 1, bands.typed));
    bench_dial::draw(state, &mut sheet.part(fence + 2, y + 1, right, bands.typed));

    let y = y + 1 + bands.typed;
    let caption = bench_finding::caption(state);
    sheet.rule(y, &[(2, &caption), (fence + 2, "goes to")]);
    sheet.fence(fence, y + 1, bands.finding);
    bench_finding::draw(state, &mut sheet.part(1, y + 1, fence - 1, bands.finding));
    bench_finding::draw_place(
        state,
        &mut sheet.part(fence + 2, y + 1, right, bands.finding),
    );

    let y = y + 1 + bands.finding;
    let tray = state
        .setup
        .tray
        .as_ref()
        .map_or("tray", |tray| tray.name.as_str());
    let right = width - lot_fence - 2;
    sheet.rule(y, &[(2, tray), (lot_fence + 2, "parts before")]);
    sheet.fence(lot_fence, y + 1, bands.lot);
    bench_lot::draw_tray(state, &mut sheet.part(1, y + 1, lot_fence - 1, bands.lot));
    bench_lot::draw_parts(
        state,
        &mut sheet.part(lot_fence + 2, y + 1, right, bands.lot),
    );

    draw_footer(Page::Bench, sheet);
    cursor
}

/// Draws whose meter it is, and the lot.
pub(super) fn draw_header(state: &State, sheet: &mut Sheet<'_>) {
    let meter = &state.setup.meter;
    let number = state.lot.parts().count() + 1;
    let lot = format!("lot {}   part {number} ", state.lot.name);
    let length = u16::try_from(lot.chars().count()).unwrap_or(u16::MAX);
    let room = sheet.width().saturating_sub(length + 2);
    let whose = &mut sheet.part(1, 0, room, 1);
    match state.meter_from {
        MeterFrom::Example => {
            let end = whose.chip(0, 0, "EXAMPLE METER", Role::Caution);
            whose.text(end, 0, " not yours", Role::Plain);
        }
        MeterFrom::Profile => {
            let end = whose.text(0, 0, &meter.name, Role::Strong);
            let calibrated = match &meter.calibration {
                Some(calibration) => format!("calibrated {}", day(&calibration.date)),
                None => "not calibrated".to_owned(),
            };
            whose.text(end + 3, 0, &calibrated, Role::Faint);
        }
    }
    sheet.text_before(sheet.width(), 0, &lot, Role::Plain);
}

/// Returns the day of a date with a time.
fn day(date: &str) -> &str {
    date.split_once('T').map_or(date, |(day, _)| day)
}

/// Draws the live keys in words.
pub(super) fn draw_footer(page: Page, sheet: &mut Sheet<'_>) {
    let y = sheet.height().saturating_sub(1);
    let mut x = 1;
    for binding in page.bindings() {
        let word = match (binding.intent, binding.key) {
            (Intent::Show(Page::Bench), _) if page == Page::NewMeter => continue,
            (Intent::Show(other), Key::Function(_)) if other != page => other.name(),
            (Intent::TakeBack, _) => "undo",
            (Intent::Earlier, _) => "earlier",
            (Intent::Sort, _) => "sort",
            (Intent::QuestionBefore, _) => "back",
            (Intent::Back, _) if page == Page::NewMeter => "bench",
            (Intent::Leave, _) => "leave",
            _ => continue,
        };
        let length = word.len() + binding.key.to_string().len() + 1;
        if usize::from(x) + length > usize::from(sheet.width()) {
            break;
        }
        x = sheet.text(x, y, word, Role::Faint) + 1;
        x = sheet.text(x, y, &binding.key.to_string(), Role::Strong) + 2;
    }
}
