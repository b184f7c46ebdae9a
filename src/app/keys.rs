//! Keys, and what they do: one table a screen, read by `update`, by the footer and by Help, so that help cannot lie.

use std::fmt;

/// A key as the program knows it, whatever the terminal sends.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Key {
    /// A character.
    Char(char),
    /// A character with Ctrl held; lower case.
    Ctrl(char),
    /// A character with Alt held; lower case.
    Alt(char),
    /// A function key, counted from 1.
    Function(u8),
    /// Enter, on the number pad too.
    Enter,
    /// Esc.
    Esc,
    /// Tab.
    Tab,
    /// Tab with Shift held.
    BackTab,
    /// Backspace.
    Backspace,
    /// Delete.
    Delete,
    /// Left.
    Left,
    /// Right.
    Right,
    /// Left by a word.
    WordLeft,
    /// Right by a word.
    WordRight,
    /// Home.
    Home,
    /// End.
    End,
    /// Up.
    Up,
    /// Down.
    Down,
    /// A page up.
    PageUp,
    /// A page down.
    PageDown,
}

impl fmt::Display for Key {
    /// Writes what stands on the key: "Ctrl-Z", "F3", "Tab".
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let name = match self {
            Self::Char(' ') => "Space",
            Self::Char(character) => return write!(f, "{character}"),
            Self::Ctrl(character) => return write!(f, "Ctrl-{}", character.to_ascii_uppercase()),
            Self::Alt(character) => return write!(f, "Alt-{}", character.to_ascii_uppercase()),
            Self::Function(number) => return write!(f, "F{number}"),
            Self::Enter => "Enter",
            Self::Esc => "Esc",
            Self::Tab => "Tab",
            Self::BackTab => "Shift-Tab",
            Self::Backspace => "Backspace",
            Self::Delete => "Delete",
            Self::Left => "Left",
            Self::Right => "Right",
            Self::WordLeft => "Ctrl-Left",
            Self::WordRight => "Ctrl-Right",
            Self::Home => "Home",
            Self::End => "End",
            Self::Up => "Up",
            Self::Down => "Down",
            Self::PageUp => "Page Up",
            Self::PageDown => "Page Down",
        };
        f.write_str(name)
    }
}

/// A screen.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Page {
    /// The keys of the screen before, and the cautions.
    Help,
    /// The loop itself.
    Bench,
    /// What has been sorted.
    Tray,
    /// What the meter can do.
    Meter,
    /// The code tables.
    Codes,
    /// The lot so far.
    Lot,
    /// The questions about a new meter; typed, not on a key.
    NewMeter,
}

impl Page {
    /// The screens that have keys, in the order of these: F1 … F6 and Alt-1 … Alt-6.
    pub const ALL: [Self; 6] = [
        Self::Help,
        Self::Bench,
        Self::Tray,
        Self::Meter,
        Self::Codes,
        Self::Lot,
    ];

    /// Returns the name, as the footer writes it.
    pub fn name(self) -> &'static str {
        match self {
            Self::Help => "help",
            Self::Bench => "bench",
            Self::Tray => "tray",
            Self::Meter => "meter",
            Self::Codes => "codes",
            Self::Lot => "lot",
            Self::NewMeter => "new meter",
        }
    }

    /// Returns the bindings of this screen, its own first, then those of every screen.
    pub fn bindings(self) -> impl Iterator<Item = &'static Binding> {
        let own = match self {
            Self::Bench => BENCH,
            Self::Help => HELP,
            Self::NewMeter => QUESTIONS,
            Self::Tray | Self::Meter | Self::Codes | Self::Lot => LIST,
        };
        own.iter().chain(EVERYWHERE)
    }

    /// Returns what a key does on this screen; `None` if it goes to the prompt.
    pub fn intent(self, key: Key) -> Option<Intent> {
        let bound = self.bindings().find(|binding| binding.key == key);
        bound.map(|binding| binding.intent)
    }
}

/// What a key is for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Intent {
    /// Go to a screen.
    Show(Page),
    /// Back: to the bench; on the bench, to the marking prompt.
    Back,
    /// Leave the program.
    Leave,
    /// Clear the prompt; with an empty one leave the program.
    ClearOrLeave,
    /// Take what stands in the prompt.
    Submit,
    /// Take back the last entry.
    TakeBack,
    /// Bring it back.
    BringBack,
    /// An earlier entry.
    Earlier,
    /// A later entry.
    Later,
    /// The next reading of the marking.
    NextReading,
    /// The reading before.
    PreviousReading,
    /// The switch before on the panel.
    SwitchBefore,
    /// The next switch on the panel.
    SwitchAfter,
    /// One row up.
    RowUp,
    /// One row down.
    RowDown,
    /// A page of rows up.
    RowsUp,
    /// A page of rows down.
    RowsDown,
    /// Another order of the rows.
    Sort,
    /// The question before.
    QuestionBefore,
}

/// One key of a screen.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Binding {
    /// The key.
    pub key: Key,
    /// What it does.
    pub intent: Intent,
    /// The same in words, for Help.
    pub words: &'static str,
}

const fn bind(key: Key, intent: Intent, words: &'static str) -> Binding {
    Binding { key, intent, words }
}

/// Keys of the bench.
const BENCH: &[Binding] = &[
    bind(
        Key::Enter,
        Intent::Submit,
        "take the line; alone at the marking prompt: the last marking again",
    ),
    bind(
        Key::Tab,
        Intent::NextReading,
        "next reading of the marking (number pad: +2, +3)",
    ),
    bind(
        Key::BackTab,
        Intent::PreviousReading,
        "reading before of the marking",
    ),
    bind(
        Key::Down,
        Intent::SwitchAfter,
        "next switch (number pad: /1, /2)",
    ),
    bind(Key::Up, Intent::SwitchBefore, "switch before"),
    bind(
        Key::Ctrl('z'),
        Intent::TakeBack,
        "take back the last entry (number pad: //)",
    ),
    bind(Key::Ctrl('y'), Intent::BringBack, "bring it back"),
    bind(
        Key::Ctrl('p'),
        Intent::Earlier,
        "an earlier entry, to correct it",
    ),
    bind(Key::Ctrl('n'), Intent::Later, "a later entry"),
    bind(
        Key::Esc,
        Intent::Back,
        "from the dial back to the marking; stop correcting",
    ),
];

/// Keys of the screens that are a list with a find prompt.
const LIST: &[Binding] = &[
    bind(Key::Up, Intent::RowUp, "one row up"),
    bind(Key::Down, Intent::RowDown, "one row down"),
    bind(Key::PageUp, Intent::RowsUp, "a page up"),
    bind(Key::PageDown, Intent::RowsDown, "a page down"),
    bind(Key::Tab, Intent::Sort, "sort by the next column"),
    bind(Key::Esc, Intent::Back, "back to the bench"),
];

/// Keys of Help.
const HELP: &[Binding] = &[
    bind(Key::Up, Intent::RowUp, "one row up"),
    bind(Key::Down, Intent::RowDown, "one row down"),
    bind(Key::PageUp, Intent::RowsUp, "a page up"),
    bind(Key::PageDown, Intent::RowsDown, "a page down"),
    bind(Key::Esc, Intent::Back, "back to the bench"),
];

/// Keys of the questions about a new meter.
const QUESTIONS: &[Binding] = &[
    bind(
        Key::Enter,
        Intent::Submit,
        "take the answer; alone: the one that is offered",
    ),
    bind(
        Key::Up,
        Intent::QuestionBefore,
        "the question before (typed: back)",
    ),
    bind(
        Key::Esc,
        Intent::Back,
        "to the bench; the answers are kept (typed: leave)",
    ),
];

/// Keys of every screen.
const EVERYWHERE: &[Binding] = &[
    bind(
        Key::Function(1),
        Intent::Show(Page::Help),
        "keys of this screen, and the cautions",
    ),
    bind(Key::Function(2), Intent::Show(Page::Bench), "the bench"),
    bind(
        Key::Function(3),
        Intent::Show(Page::Tray),
        "the tray and all that was sorted",
    ),
    bind(
        Key::Function(4),
        Intent::Show(Page::Meter),
        "what the meter can do",
    ),
    bind(Key::Function(5), Intent::Show(Page::Codes), "code tables"),
    bind(Key::Function(6), Intent::Show(Page::Lot), "this lot so far"),
    bind(Key::Alt('1'), Intent::Show(Page::Help), "the same as F1"),
    bind(Key::Alt('2'), Intent::Show(Page::Bench), "the same as F2"),
    bind(Key::Alt('3'), Intent::Show(Page::Tray), "the same as F3"),
    bind(Key::Alt('4'), Intent::Show(Page::Meter), "the same as F4"),
    bind(Key::Alt('5'), Intent::Show(Page::Codes), "the same as F5"),
    bind(Key::Alt('6'), Intent::Show(Page::Lot), "the same as F6"),
    bind(Key::Ctrl('q'), Intent::Leave, "leave; everything is saved"),
    bind(
        Key::Ctrl('c'),
        Intent::ClearOrLeave,
        "clear the prompt; with an empty one, leave",
    ),
];

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn no_screen_binds_a_key_twice() {
        for page in Page::ALL.into_iter().chain([Page::NewMeter]) {
            let mut seen = std::collections::HashSet::new();
            for binding in page.bindings() {
                assert!(
                    seen.insert(binding.key),
                    "{} is bound twice on {}",
                    binding.key,
                    page.name()
                );
                assert!(!binding.words.is_empty());
            }
        }
    }

    #[test]
    fn letters_always_go_to_the_prompt() {
        for page in Page::ALL.into_iter().chain([Page::NewMeter]) {
            for letter in (' '..='~').map(Key::Char) {
                assert_eq!(page.intent(letter), None, "{letter} on {}", page.name());
            }
        }
    }

    #[test]
    fn screens_are_on_their_function_keys_and_alt_numbers() {
        for (number, page) in (1..).zip(Page::ALL) {
            let digit = char::from(b'0' + number);
            for from in Page::ALL {
                assert_eq!(from.intent(Key::Function(number)), Some(Intent::Show(page)));
                assert_eq!(from.intent(Key::Alt(digit)), Some(Intent::Show(page)));
            }
        }
    }
}
