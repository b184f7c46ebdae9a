//! From a key to a painted frame at 120 by 40, beside a frame of the same size that is filled with text and nothing else.

use divan::Bencher;
use nulltray::app::{
    Event, Key, Look, MeterFrom, Opening, Setup, Size, Standing, State, open, update,
};
use nulltray::meter::Meter;
use nulltray::screen;
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;
use ratatui::style::Style;

const AREA: Rect = Rect::new(0, 0, 120, 40);

fn main() {
    divan::main();
}

fn bench_at_a_marking() -> State {
    let text = include_str!("../../data/example-meter.toml");
    let (meter, _) = Meter::read(text).expect("the example profile is readable");
    let mut state = open(Opening {
        setup: Setup {
            meter,
            profile_text: text.to_owned(),
            tray: None,
        },
        meter_from: MeterFrom::Example,
        profile_place: None,
        look: Look::default(),
        lot: "amplifier 7".to_owned(),
        standing: Standing::default(),
        codes: Vec::new(),
        size: Size {
            width: 120,
            height: 40,
        },
    });
    for key in "224".chars().map(Key::Char) {
        update(&mut state, Event::Key(key));
    }
    state
}

fn text_of(buffer: &Buffer) -> String {
    buffer
        .content
        .iter()
        .map(ratatui::buffer::Cell::symbol)
        .collect()
}

/// A key that changes everything on the screen: the marking is decoded, the meter predicts, the dial is drawn.
#[divan::bench]
fn key_to_painted_frame(bencher: Bencher<'_, '_>) {
    let mut state = bench_at_a_marking();
    let mut buffer = Buffer::empty(AREA);
    update(&mut state, Event::Key(Key::Char('J')));
    screen::draw(&state, AREA, &mut buffer);
    let shown = text_of(&buffer);
    assert!(shown.contains("220 nF ±5 %"), "{shown}");
    assert!(shown.contains("expect 20.1"), "{shown}");
    let mut is_letter_next = false;
    bencher.bench_local(|| {
        let key = if is_letter_next {
            Key::Char('J')
        } else {
            Key::Backspace
        };
        is_letter_next = !is_letter_next;
        update(&mut state, Event::Key(key));
        buffer.reset();
        screen::draw(&state, AREA, &mut buffer)
    });
}

/// The painting alone.
#[divan::bench]
fn frame_alone(bencher: Bencher<'_, '_>) {
    let state = bench_at_a_marking();
    let mut buffer = Buffer::empty(AREA);
    bencher.bench_local(|| {
        buffer.reset();
        screen::draw(&state, AREA, &mut buffer)
    });
}

/// The same cells filled with text, a row at a time: the floor.
#[divan::bench]
fn frame_filled_with_text(bencher: Bencher<'_, '_>) {
    let line = "signal ".repeat(20);
    let mut buffer = Buffer::empty(AREA);
    bencher.bench_local(|| {
        buffer.reset();
        for y in 0..AREA.height {
            buffer.set_stringn(0, y, &line, usize::from(AREA.width), Style::new());
        }
    });
}
