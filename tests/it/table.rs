//! A bench on which tests type keys, with a log in memory that answers at once.

use std::collections::VecDeque;

use chrono::DateTime;
use nulltray::app::{
    self, Effect, Entry, Event, Key, Look, MeterFrom, Opening, Record, RecordId, Setup, Size,
    Standing, State,
};
use nulltray::meter::Meter;
use nulltray::tables;
use nulltray::tray::Tray;
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

/// The bench.
pub(crate) struct Table {
    pub(crate) state: State,
    written: Vec<Entry>,
}

impl Table {
    /// Makes a bench with the example meter and the test tray, nothing measured yet.
    pub(crate) fn new() -> Self {
        let text = include_str!("../../data/example-meter.toml");
        let (meter, _) = Meter::read(text).expect("the example profile is readable");
        let tray = include_str!("../data/screen-tray.toml");
        let (tray, _) = Tray::read(tray).expect("the tray is readable");
        let state = app::open(Opening {
            setup: Setup {
                meter,
                profile_text: text.to_owned(),
                tray: Some(tray),
            },
            meter_from: MeterFrom::Profile,
            profile_place: Some("/home/signal/.config/nulltray/meter.toml".into()),
            look: Look::default(),
            lot: "amplifier 7".to_owned(),
            standing: Standing::default(),
            codes: tables::rows(),
            size: Size {
                width: 80,
                height: 24,
            },
        });
        Self {
            state,
            written: Vec::new(),
        }
    }

    /// Types keys: `↵` is Enter, `⇥` Tab, `①` to `⑥` the function keys, all else itself.
    pub(crate) fn keys(mut self, keys: &str) -> Self {
        for character in keys.chars() {
            let key = match character {
                '↵' => Key::Enter,
                '⇥' => Key::Tab,
                '①' => Key::Function(1),
                '②' => Key::Function(2),
                '③' => Key::Function(3),
                '④' => Key::Function(4),
                '⑤' => Key::Function(5),
                '⑥' => Key::Function(6),
                character => Key::Char(character),
            };
            self.settle(Event::Key(key));
        }
        self
    }

    /// Types a line, as `line` does.
    pub(crate) fn line(mut self, text: &str) -> Self {
        self.settle(Event::Line(text.to_owned()));
        self
    }

    fn settle(&mut self, event: Event) {
        let mut queue = VecDeque::from([event]);
        while let Some(event) = queue.pop_front() {
            for effect in app::update(&mut self.state, event) {
                match effect {
                    Effect::Append(record) => {
                        queue.push_back(Event::Logged(Ok(Box::new(self.append(*record)))));
                    }
                    Effect::Look => queue.push_back(Event::Looked(Ok(self.written.clone()))),
                    Effect::LookAtChecks => {
                        queue.push_back(Event::LookedAtChecks(Ok(self.written.clone())));
                    }
                    _ => {}
                }
            }
        }
    }

    fn append(&mut self, record: Record) -> Entry {
        let number = i64::try_from(self.written.len()).expect("few entries") + 1;
        let time = DateTime::from_timestamp(1_777_795_200 + 9 * number, 0).expect("a time");
        let entry = Entry {
            id: RecordId(number),
            time: time.fixed_offset(),
            voided: None,
            profile: self.state.setup.profile_hash(),
            record,
        };
        self.written.push(entry.clone());
        entry
    }
}

/// Draws the state at this size.
pub(crate) fn drawn(state: &State, width: u16, height: u16) -> Buffer {
    let area = Rect::new(0, 0, width, height);
    let mut buffer = Buffer::empty(area);
    nulltray::screen::draw(state, area, &mut buffer);
    buffer
}

/// Returns the text of a buffer, a line a row, blanks at the ends left out.
pub(crate) fn text_of(buffer: &Buffer) -> String {
    let width = usize::from(buffer.area.width.max(1));
    let mut text = String::new();
    for row in buffer.content.chunks(width) {
        let line: String = row.iter().map(ratatui::buffer::Cell::symbol).collect();
        text.push_str(line.trim_end());
        text.push('\n');
    }
    text
}
