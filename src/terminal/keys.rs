//! From the terminal's keys to ours.

use crossterm::event::{KeyCode, KeyEvent, KeyEventKind, KeyModifiers};

use crate::app::Key;

/// Translates a key; `None` for releases and for keys that mean nothing here.
pub(super) fn translated(event: KeyEvent) -> Option<Key> {
    if event.kind == KeyEventKind::Release {
        return None;
    }
    let has = |modifier| event.modifiers.contains(modifier);
    // Both together are how some terminals tell of the key for third characters: then the character counts.
    let (ctrl, alt) = match (has(KeyModifiers::CONTROL), has(KeyModifiers::ALT)) {
        (true, true) => (false, false),
        held => held,
    };
    Some(match event.code {
        KeyCode::Char('j' | 'm') if ctrl => Key::Enter,
        KeyCode::Char('h') if ctrl => Key::Backspace,
        KeyCode::Char(character) if ctrl => Key::Ctrl(character.to_ascii_lowercase()),
        KeyCode::Char(character) if alt => Key::Alt(character.to_ascii_lowercase()),
        KeyCode::Char(character) => Key::Char(character),
        KeyCode::F(number) => Key::Function(number),
        KeyCode::Enter => Key::Enter,
        KeyCode::Esc => Key::Esc,
        KeyCode::Tab if has(KeyModifiers::SHIFT) => Key::BackTab,
        KeyCode::Tab => Key::Tab,
        KeyCode::BackTab => Key::BackTab,
        KeyCode::Backspace => Key::Backspace,
        KeyCode::Delete => Key::Delete,
        KeyCode::Left if ctrl => Key::WordLeft,
        KeyCode::Right if ctrl => Key::WordRight,
        KeyCode::Left => Key::Left,
        KeyCode::Right => Key::Right,
        KeyCode::Home => Key::Home,
        KeyCode::End => Key::End,
        KeyCode::Up => Key::Up,
        KeyCode::Down => Key::Down,
        KeyCode::PageUp => Key::PageUp,
        KeyCode::PageDown => Key::PageDown,
        _ => return None,
    })
}

/// Returns the keys that would have typed a pasted text; a line's end is Enter, a tab a blank.
pub(super) fn typed(text: &str) -> Vec<Key> {
    let lines = text.replace("\r\n", "\n").replace('\r', "\n");
    let keys = lines.chars().filter_map(|character| match character {
        '\n' => Some(Key::Enter),
        '\t' => Some(Key::Char(' ')),
        character if character.is_control() => None,
        character => Some(Key::Char(character)),
    });
    keys.collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(code: KeyCode, modifiers: KeyModifiers, expected: Option<Key>) {
        let event = KeyEvent::new(code, modifiers);
        assert_eq!(translated(event), expected, "{code:?} {modifiers:?}");
    }

    #[test]
    fn keys_are_ours_afterwards() {
        let none = KeyModifiers::NONE;
        check(
            KeyCode::Char('Z'),
            KeyModifiers::SHIFT,
            Some(Key::Char('Z')),
        );
        check(
            KeyCode::Char('z'),
            KeyModifiers::CONTROL,
            Some(Key::Ctrl('z')),
        );
        check(KeyCode::Char('3'), KeyModifiers::ALT, Some(Key::Alt('3')));
        check(
            KeyCode::Char('@'),
            KeyModifiers::CONTROL | KeyModifiers::ALT,
            Some(Key::Char('@')),
        );
        check(KeyCode::F(3), none, Some(Key::Function(3)));
        check(KeyCode::Char('j'), KeyModifiers::CONTROL, Some(Key::Enter));
        check(KeyCode::CapsLock, none, None);
    }

    #[test]
    fn releases_are_ignored() {
        let mut event = KeyEvent::new(KeyCode::Enter, KeyModifiers::NONE);
        event.kind = KeyEventKind::Release;
        assert_eq!(translated(event), None);
        event.kind = KeyEventKind::Repeat;
        assert_eq!(translated(event), Some(Key::Enter));
    }

    #[test]
    fn pasting_is_typing() {
        let expected = [Key::Char('4'), Key::Char('n'), Key::Enter, Key::Char(' ')];
        assert_eq!(typed("4n\r\n\t\u{1b}"), expected);
    }
}
