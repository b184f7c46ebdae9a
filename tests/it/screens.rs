//! What the program draws, against the text screenshots; `UPDATE_EXPECT=1` rewrites them.

use expect_test::expect_file;
use nulltray::app::{Colours, Event, Glyphs, Look, MeterFrom, Size, State, Units, update};
use nulltray::screen::{Role, style};

use crate::table::{Table, drawn, text_of};

/// Compares a screen at both sizes it was designed for.
#[track_caller]
fn check_screen(name: &str, state: &State) {
    for (width, height) in [(80, 24), (120, 40)] {
        check_size(name, state, width, height);
    }
}

#[track_caller]
fn check_size(name: &str, state: &State, width: u16, height: u16) {
    let mut state = state.clone();
    update(&mut state, Event::Resize(Size { width, height }));
    let text = text_of(&drawn(&state, width, height));
    let path = format!("../../screenshots-text/{name}-{width}x{height}.txt");
    expect_file![path].assert_eq(&text);
}

/// A lot of some parts, all findings among them.
fn a_lot() -> Table {
    Table::new()
        .keys("224J 2A↵20.3↵↵20.0↵↵20.6↵")
        .keys("104K↵55.1↵104K↵54.2↵↵58.0↵")
        .keys("472J↵93.0↵↵94.2↵")
        .keys("224J 2A↵10↵")
        .keys("473K↵26.0↵↵25.2↵")
        .keys("224J 2A↵20.2↵")
}

#[test]
fn bench_before_anything_is_typed() {
    let mut table = Table::new();
    table.state.meter_from = MeterFrom::Example;
    check_screen("bench-new", &table.state);
}

#[test]
fn bench_with_a_finding() {
    check_screen("bench", &a_lot().state);
}

#[test]
fn bench_while_a_marking_is_typed() {
    check_screen("bench-marking", &a_lot().keys("22,2").state);
}

#[test]
fn bench_while_a_reading_is_typed() {
    check_screen("bench-reading", &a_lot().keys("104K 250V↵55").state);
}

#[test]
fn bench_with_a_batch_of_equal_parts() {
    check_screen("bench-park", &a_lot().keys("↵").state);
}

#[test]
fn bench_asking_about_a_slip() {
    check_screen("bench-slip", &a_lot().keys("↵2.03↵").state);
}

#[test]
fn bench_refusing_an_entry() {
    check_screen("bench-refused", &a_lot().keys("↵146↵").state);
}

#[test]
fn bench_warning_of_a_polarised_part() {
    check_screen(
        "bench-polarised",
        &a_lot().keys("1 µF 35 V tantalum↵").state,
    );
}

#[test]
fn tray() {
    check_screen("tray", &a_lot().keys("③").state);
}

#[test]
fn meter() {
    let table = a_lot().line("check blue 10 nF").line("34").keys("④");
    check_screen("meter", &table.state);
}

/// A check part read again and again, the meter drifting at the end, one reading wild.
fn a_meter_that_drifts() -> Table {
    let readings = [
        "34", "33.6", "34.2", "34.4", "33.9", "34.1", "36.3", "34", "33.5", "34.6", "34.8", "34.9",
        "35.1", "35.2", "35.1",
    ];
    readings.into_iter().fold(a_lot(), |table, reading| {
        table.line("check blue 10 nF").line(reading)
    })
}

#[test]
fn meter_that_drifts() {
    let mut table = a_meter_that_drifts().keys("④");
    check_screen("meter-drift", &table.state);
    table.state.look.glyphs = Glyphs::Ascii;
    check_size("meter-drift-ascii", &table.state, 80, 24);
    let text = text_of(&drawn(&table.state, 80, 24));
    assert!(text.is_ascii(), "{text}");
}

#[test]
fn bench_when_the_meter_has_moved() {
    check_screen("bench-moved", &a_meter_that_drifts().state);
}

#[test]
fn codes() {
    check_screen("codes", &a_lot().keys("⑤tolerance j").state);
}

#[test]
fn lot() {
    check_screen("lot", &a_lot().keys("⑥").state);
}

#[test]
fn help() {
    check_screen("help", &a_lot().keys("①").state);
}

#[test]
fn new_meter() {
    let table = a_lot().keys("new meter↵hut meter↵2 kHz↵↵2↵↵330↵0,5↵");
    check_screen("new-meter", &table.state);
}

#[test]
fn new_meter_refusing_an_answer() {
    check_screen("new-meter-refused", &a_lot().keys("new meter↵↵1 kV↵").state);
}

#[test]
fn new_meter_measured() {
    let table = a_lot().keys("new meter↵↵↵↵1↵↵↵↵↵↵↵↵↵↵yes↵0 22↵50 2,37k↵");
    check_screen("new-meter-points", &table.state);
}

#[test]
fn new_meter_before_it_is_written() {
    let keys = format!("new meter↵{}", "↵".repeat(35));
    check_screen("new-meter-end", &a_lot().keys(&keys).state);
}

#[test]
fn bench_in_ascii() {
    let mut table = a_lot().keys("↵");
    table.state.look.glyphs = Glyphs::Ascii;
    check_screen("bench-ascii", &table.state);
    let text = text_of(&drawn(&table.state, 80, 24));
    assert!(text.is_ascii(), "{text}");
}

#[test]
fn bench_with_little_room() {
    let table = a_lot().keys("↵20");
    check_size("bench", &table.state, 60, 20);
    check_size("bench", &table.state, 40, 12);
    check_size("bench", &table.state, 39, 3);
}

#[test]
fn units_are_those_asked_for() {
    let mut table = a_lot();
    table.state.look.units = Units::Pf;
    let text = text_of(&drawn(&table.state, 80, 24));
    assert!(text.contains("220000 pF"), "{text}");
}

#[test]
fn every_size_draws() {
    let pages = [
        "",
        "22",
        "↵",
        "↵2.03↵",
        "③",
        "④",
        "⑤",
        "⑥",
        "①",
        "new meter↵",
        "new meter↵↵1 kV↵",
    ];
    for keys in pages {
        let state = a_lot().keys(keys).state;
        for width in (0..=130).step_by(if keys.is_empty() { 1 } else { 7 }) {
            for height in [0, 1, 2, 3, 6, 11, 12, 13, 17, 18, 23, 24, 30, 36, 40, 50] {
                let size = Size { width, height };
                let mut state = state.clone();
                update(&mut state, Event::Resize(size));
                drawn(&state, width, height);
            }
        }
    }
}

#[test]
fn the_prompts_stand_still() {
    let cursor = |keys: &str| {
        let state = a_lot().keys(keys).state;
        let area = ratatui::layout::Rect::new(0, 0, 80, 24);
        let mut buffer = ratatui::buffer::Buffer::empty(area);
        nulltray::screen::draw(&state, area, &mut buffer).expect("a prompt")
    };
    assert_eq!(cursor("2").y, cursor("224J 2A 63 V").y);
    assert_eq!(cursor("↵").y, cursor("↵146↵").y);
    assert_eq!(cursor("104K↵5").y, cursor("1 µF 35 V tantalum↵5").y);
    assert_eq!(cursor("22").x, cursor("2").x + 1);
}

#[test]
fn findings_have_their_style_and_their_sign() {
    for colours in [Colours::True, Colours::Sixteen, Colours::None] {
        for (keys, word, role) in [
            ("224J 2A↵20.2↵", "✓ INSIDE", Role::Inside),
            ("224J 2A↵10↵", "✗ OUTSIDE", Role::Outside),
        ] {
            let mut table = Table::new().keys(keys);
            table.state.look = Look {
                colours,
                ..Look::default()
            };
            let buffer = drawn(&table.state, 80, 24);
            let text = text_of(&buffer);
            assert!(text.contains(word), "{text}");
            let letter = word.chars().nth(2).expect("a letter").to_string();
            let expected = style(role, colours);
            let cell = buffer.content.iter().find(|cell| {
                cell.symbol() == letter
                    && cell.style().bg == expected.bg.or(Some(ratatui::style::Color::Reset))
                    && cell.modifier.contains(expected.add_modifier)
            });
            assert!(cell.is_some(), "{word} in {colours:?}");
        }
    }
}

#[test]
fn control_characters_from_a_file_are_not_drawn() {
    let mut table = a_lot();
    table.state.setup.meter.name = "meter\u{1b}[2J".to_owned();
    table.state.lot.name = "lot\u{7}".to_owned();
    let buffer = drawn(&table.state, 80, 24);
    let has_control = |cell: &ratatui::buffer::Cell| cell.symbol().chars().any(char::is_control);
    assert!(!buffer.content.iter().any(has_control));
}
