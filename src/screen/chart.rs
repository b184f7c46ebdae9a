//! The control chart: readings over their order, the limits as lines, the average as a track of single dots.

use super::dots::{ACROSS, DOWN, Dots};
use super::sheet::Sheet;
use super::theme::Role;
use crate::app::Chart;
use crate::finding::{ACT, ControlPoint, WARN};

/// What lies farther out is drawn at the edge, in standard uncertainties.
const EDGE: f64 = 4.2;
/// Columns for the names of the lines.
const NAMES: u16 = 6;

/// Draws the chart with its caption over the whole sheet.
pub(super) fn draw(sheet: &mut Sheet<'_>, chart: Option<&Chart>) {
    let (width, height) = (sheet.width(), sheet.height());
    if height < 2 || width <= NAMES + 4 {
        return;
    }
    let caption = chart.map_or("check parts over time", |chart| chart.caption.as_str());
    sheet.rule(0, &[(2, caption)]);
    let Some(chart) = chart else {
        let text = "nothing here yet: `check LABEL` or `zero` on the bench";
        sheet.text(3, 1, text, Role::Faint);
        return;
    };
    let (columns, rows) = (width - NAMES - 1, height - 1);
    for line in [ACT, 0.0, -ACT] {
        let cell = row_of(line, rows) / DOWN;
        let at = (1..).take(usize::from(rows)).find(|y| f64::from(*y) > cell);
        if let Some(y) = at {
            let name = if line == 0.0 {
                "0".to_owned()
            } else {
                format!("{line:+.0} u")
            };
            sheet.text_before(NAMES - 1, y, &name, Role::Faint);
        }
    }
    let mut dots = Dots::new(columns, rows);
    draw_limits(&mut dots, columns, rows);
    draw_points(&mut dots, &chart.points, columns, rows);
    dots.show(&mut sheet.part(NAMES, 1, columns, rows));
}

/// The row of dots of a deviation, counted from above.
fn row_of(deviation: f64, rows: u16) -> f64 {
    let last = f64::from(rows) * DOWN - 1.0;
    let share = (EDGE - deviation.clamp(-EDGE, EDGE)) / (2.0 * EDGE);
    (share * last).round()
}

/// Limits to act on as full lines, those that warn as every third dot, the target as every sixth.
fn draw_limits(dots: &mut Dots, columns: u16, rows: u16) {
    let lines = [(ACT, 1), (-ACT, 1), (WARN, 3), (-WARN, 3), (0.0, 6)];
    for (line, every) in lines {
        let n_dots = columns * 2;
        for x in (0..n_dots).step_by(every) {
            dots.set(f64::from(x), row_of(line, rows), Role::Rule);
        }
    }
}

fn draw_points(dots: &mut Dots, points: &[ControlPoint], columns: u16, rows: u16) {
    const WIDEST_STEP: f64 = 8.0;
    let n_dots = f64::from(columns) * ACROSS;
    let shown = points.len().min(usize::from(columns));
    let points = points.get(points.len() - shown..).unwrap_or_default();
    let step = ((n_dots - 2.0) / shown.max(1) as f64).min(WIDEST_STEP);
    let column = |index: usize| (index as f64 * step).floor() + 1.0;
    for (index, point) in points.iter().enumerate() {
        dots.set(column(index), row_of(point.trend, rows), Role::DialFringe);
    }
    for (index, point) in points.iter().enumerate() {
        let role = if point.control.is_out() {
            Role::Caution
        } else {
            Role::DialReading
        };
        let (x, y) = (column(index), row_of(point.score, rows));
        for (right, down) in [(-1.0, 0.0), (0.0, 0.0), (0.0, -1.0), (-1.0, -1.0)] {
            dots.set(x + right, (y + down).max(0.0), role);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::app::{Glyphs, Look};
    use crate::finding::{CheckReading, control};
    use ratatui::buffer::Buffer;
    use ratatui::layout::Rect;

    fn drawn(deviations: &[f64], glyphs: Glyphs) -> String {
        let readings: Vec<CheckReading> = (0..)
            .zip(deviations)
            .map(|(day, deviation)| CheckReading {
                deviation: *deviation,
                own: 1.0,
                shared: 0.0,
                day,
            })
            .collect();
        let chart = Chart {
            caption: "blue 10 nF on C".to_owned(),
            points: control(&readings).points,
        };
        let area = Rect::new(0, 0, 40, 8);
        let mut buffer = Buffer::empty(area);
        let look = Look {
            glyphs,
            ..Look::default()
        };
        draw(&mut Sheet::new(&mut buffer, area, look), Some(&chart));
        let cells: Vec<&str> = buffer
            .content
            .iter()
            .map(ratatui::buffer::Cell::symbol)
            .collect();
        let rows = cells.chunks(40).map(<[&str]>::concat);
        let lines: Vec<String> = rows.map(|row| row.trim_end().to_owned()).collect();
        lines.join("\n")
    }

    #[test]
    fn readings_and_limits() {
        let deviations = [0.3, -0.8, 1.1, 0.2, -0.4, 2.3, 0.1, 3.6];
        expect_test::expect![[r"
            ── blue 10 nF on C ─────────────────────
                                              ⢶
             +3 u ⡉⢉⠉⡉⢉⠉⡉⢉⠉⡉⢉⠉⡉⢉⠉⡉⢉⠉⡉⢉⠿⡉⢉⠉⡉⢉⠉⡉⢉⠉⡉⢉⠉
                          ⠶           ⠐   ⠐
                0 ⠟  ⠄⣀ ⠄ ⠈⠄  ⠟  ⠄⣴ ⠄  ⠄  ⠟  ⠄  ⠄
                      ⠉
             -3 u ⣁⣈⣀⣁⣈⣀⣁⣈⣀⣁⣈⣀⣁⣈⣀⣁⣈⣀⣁⣈⣀⣁⣈⣀⣁⣈⣀⣁⣈⣀⣁⣈⣀
        "]]
        .assert_eq(&drawn(&deviations, Glyphs::Unicode));
        expect_test::expect![[r"
            -- blue 10 nF on C ---------------------
                                              X
             +3 u --------------------*------------
                          *           =   =
                0 *  -* - =-  *  -* -  -  *  -  -
                      *
             -3 u ---------------------------------
        "]]
        .assert_eq(&drawn(&deviations, Glyphs::Ascii));
    }

    #[test]
    fn more_readings_than_columns_leave_the_latest() {
        let many = vec![0.5; 500];
        let text = drawn(&many, Glyphs::Ascii);
        assert!(
            text.contains("0 ********************************"),
            "{text}"
        );
        drawn(&[f64::MAX, -f64::MAX, 0.0], Glyphs::Ascii);
        drawn(&[], Glyphs::Ascii);
    }
}
