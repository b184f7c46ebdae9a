//! The screens that are a list with a find prompt.

use ratatui::layout::Position;

use super::bench::{draw_footer, draw_header};
use super::chart;
use super::prompt::{self, Asking, Turn};
use super::sheet::Sheet;
use super::theme::{Role, sign};
use crate::app::{ListView, Page, Row, Size, State, Tone, chart_height, list_height};

/// Most columns a column of the table takes, the last one excepted.
const WIDEST: usize = 24;

/// Draws the list; returns where the cursor stands in its find prompt.
pub(super) fn draw(
    state: &State,
    page: Page,
    list: &ListView,
    sheet: &mut Sheet<'_>,
) -> Option<Position> {
    let (width, height) = (sheet.width(), sheet.height());
    draw_header(state, sheet);
    let rows = list_height(page, Size { width, height });
    let title = format!(
        "{}, {} of {}",
        page.name(),
        list.order.len(),
        list.rows.len()
    );
    sheet.rule(1, &[(2, &title)]);
    let asking = Asking {
        name: "find",
        input: &list.find,
        instead: "type any part of it",
        turn: Turn::Now,
    };
    let cursor = prompt::draw(
        &mut sheet.part(1, 2, width.saturating_sub(2), 1),
        0,
        0,
        &asking,
    );
    let widths = widths(list);
    let names: Vec<String> = list
        .columns
        .iter()
        .enumerate()
        .map(|(index, name)| match list.sorted_by {
            Some(column) if column == index => format!("{name} ▾"),
            _ => (*name).to_owned(),
        })
        .collect();
    draw_cells(sheet, 3, &names, &widths, Role::Faint);
    if list.rows.is_empty() {
        sheet.text(4, 4, "nothing here yet", Role::Faint);
    }
    for (line, index) in list.order.iter().skip(list.top).take(rows).enumerate() {
        let (Some(row), Ok(line)) = (list.rows.get(*index), u16::try_from(line)) else {
            continue;
        };
        let y = 4 + line;
        draw_cells(sheet, y, &row.cells, &widths, Role::Plain);
        if let Some(finding) = &row.finding {
            let sign = sign(finding, state.look.glyphs);
            sheet.text(1, y, sign, Role::Strong);
        }
        if list.top + usize::from(line) == list.selected {
            sheet.mark_row(y, Role::Selected);
        }
    }
    if page == Page::Meter {
        let chart_rows = chart_height(Size { width, height });
        let y = height.saturating_sub(6 + chart_rows);
        chart::draw(&mut sheet.part(0, y, width, chart_rows), list.chart());
    }
    draw_details(list, sheet, height.saturating_sub(6));
    if let Some(failed) = state.notice.as_ref().filter(|n| n.tone == Tone::Failed) {
        sheet.text(1, height.saturating_sub(2), &failed.text, Role::Caution);
    }
    draw_footer(page, sheet);
    cursor
}

fn draw_details(list: &ListView, sheet: &mut Sheet<'_>, y: u16) {
    sheet.rule(y, &[]);
    let Some(row) = list.selected_row() else {
        return;
    };
    let last = row.cells.last();
    let lines = row
        .details
        .iter()
        .chain(last.filter(|_| row.details.is_empty()));
    let width = sheet.width().saturating_sub(2);
    let mut part = sheet.part(1, y + 1, width, 4);
    let mut at = 0;
    for line in lines {
        let left = part.height().saturating_sub(at);
        at += part.paragraph(0, at, left, line, Role::Plain);
    }
}

fn widths(list: &ListView) -> Vec<usize> {
    let n_columns = list.columns.len();
    let cell =
        |row: &Row, column: usize| row.cells.get(column).map_or(0, |cell| cell.chars().count());
    (0..n_columns)
        .map(|column| {
            let name = list.columns.get(column).map_or(0, |name| name.len() + 2);
            let widest = list.rows.iter().map(|row| cell(row, column)).max();
            widest.unwrap_or(0).max(name).min(WIDEST)
        })
        .collect()
}

fn draw_cells(sheet: &mut Sheet<'_>, y: u16, cells: &[String], widths: &[usize], role: Role) {
    let mut x = 3;
    let last = widths.len().saturating_sub(1);
    for (index, (cell, width)) in cells.iter().zip(widths).enumerate() {
        let width = u16::try_from(*width).unwrap_or(u16::MAX);
        let room = if index == last { u16::MAX } else { width };
        sheet.text_within(x, y, cell, room, role);
        x = x.saturating_add(width).saturating_add(2);
    }
}
