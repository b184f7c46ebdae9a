//! What the terminal can show, by what the environment says.

use std::env;

use crate::app::{Colours, Glyphs, Look, Units};

/// Returns how to draw on this terminal. `asked` is what the person asked for: ASCII only, or whatever the locale allows.
pub fn look_of_terminal(asked: Glyphs, units: Units) -> Look {
    let of = |name: &str| env::var(name).unwrap_or_default();
    let locale = [of("LC_ALL"), of("LC_CTYPE"), of("LANG")];
    Look {
        glyphs: match asked {
            Glyphs::Ascii => Glyphs::Ascii,
            Glyphs::Unicode => glyphs(&locale, &of("TERM")),
        },
        colours: colours(&of("NO_COLOR"), &of("COLORTERM"), &of("TERM")),
        units,
    }
}

/// The first locale that is set counts; the console of a bare Linux machine has no braille.
fn glyphs(locale: &[String], terminal: &str) -> Glyphs {
    let set = locale.iter().find(|name| !name.is_empty());
    let name = set.map_or("", String::as_str).to_ascii_lowercase();
    let is_utf8 = name.contains("utf-8") || name.contains("utf8");
    if is_utf8 && !matches!(terminal, "linux" | "dumb" | "vt100" | "vt220") {
        Glyphs::Unicode
    } else {
        Glyphs::Ascii
    }
}

fn colours(no_color: &str, color_term: &str, terminal: &str) -> Colours {
    match (no_color, color_term) {
        (no_color, _) if !no_color.is_empty() => Colours::None,
        _ if matches!(terminal, "dumb" | "vt100" | "vt220") => Colours::None,
        (_, "truecolor" | "24bit") => Colours::True,
        _ => Colours::Sixteen,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check_glyphs(locale: [&str; 3], terminal: &str, expected: Glyphs) {
        let found = glyphs(&locale.map(str::to_owned), terminal);
        assert_eq!(found, expected, "{locale:?} {terminal}");
    }

    #[test]
    fn the_locale_decides_on_characters() {
        check_glyphs(["", "", "de_CH.UTF-8"], "xterm", Glyphs::Unicode);
        check_glyphs(["C.utf8", "", ""], "xterm", Glyphs::Unicode);
        check_glyphs(["C", "", "de_CH.UTF-8"], "xterm", Glyphs::Ascii);
        check_glyphs(["", "", ""], "xterm", Glyphs::Ascii);
        check_glyphs(["", "", "C.UTF-8"], "linux", Glyphs::Ascii);
    }

    #[test]
    fn no_color_comes_first() {
        assert_eq!(colours("1", "truecolor", "xterm"), Colours::None);
        assert_eq!(colours("", "truecolor", "xterm"), Colours::True);
        assert_eq!(colours("", "", "xterm-256color"), Colours::Sixteen);
        assert_eq!(colours("", "", "dumb"), Colours::None);
    }
}
