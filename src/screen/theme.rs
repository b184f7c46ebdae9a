//! Styles by role. What a colour says, a word or a sign says too.
//!
//! Colours on true-colour terminals are those of M. Okabe and K. Ito, "Color Universal Design" (2008), which people with
//! any kind of colour vision tell apart. Text keeps the terminal's own colours, so that light and dark backgrounds are
//! both readable; coloured grounds carry black text.

use ratatui::style::{Color, Modifier, Style};

use crate::app::{Colours, Glyphs};

/// What something on the screen is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Role {
    /// Ordinary text.
    Plain,
    /// What matters most in its place.
    Strong,
    /// What may be passed over.
    Faint,
    /// Lines between the bands.
    Rule,
    /// The prompt being answered.
    Prompt,
    /// A finding: inside.
    Inside,
    /// A finding: outside.
    Outside,
    /// A finding: undecided.
    Undecided,
    /// A finding: dead.
    Dead,
    /// Something to know before going on.
    Caution,
    /// A question that waits for an answer.
    Question,
    /// The place to park the dial.
    Park,
    /// The compartment to use now.
    Compartment,
    /// The scale of the dial.
    DialScale,
    /// Where good parts fall on the dial.
    DialBand,
    /// The meter's own doubt at the ends of the band.
    DialFringe,
    /// The expected place on the dial.
    DialExpected,
    /// The reading on the dial.
    DialReading,
    /// The row chosen in a list.
    Selected,
}

impl Role {
    /// Returns the role of a finding, by its word in the log.
    pub fn of_finding(word: &str) -> Self {
        match word {
            "inside" => Self::Inside,
            "outside" => Self::Outside,
            "dead" => Self::Dead,
            _ => Self::Undecided,
        }
    }
}

/// Returns the sign of a finding, by its word in the log: each word has its own.
pub fn sign(word: &str, glyphs: Glyphs) -> &'static str {
    match (word, glyphs) {
        ("inside", Glyphs::Unicode) => "✓",
        ("inside", Glyphs::Ascii) => "+",
        ("outside", Glyphs::Unicode) => "✗",
        ("outside", Glyphs::Ascii) => "x",
        ("dead", Glyphs::Unicode) => "∅",
        ("dead", Glyphs::Ascii) => "0",
        _ => "?",
    }
}

const BLUISH_GREEN: Color = Color::Rgb(0, 158, 115);
const VERMILION: Color = Color::Rgb(213, 94, 0);
const ORANGE: Color = Color::Rgb(230, 159, 0);
const REDDISH_PURPLE: Color = Color::Rgb(204, 121, 167);
const BLUE: Color = Color::Rgb(0, 114, 178);
const SKY_BLUE: Color = Color::Rgb(86, 180, 233);
const YELLOW: Color = Color::Rgb(240, 228, 66);

/// Returns the style of a role.
pub fn style(role: Role, colours: Colours) -> Style {
    let plain = Style::new();
    let bold = plain.add_modifier(Modifier::BOLD);
    let ground = |of_many: Color, of_sixteen: Color| match colours {
        Colours::True => bold.fg(Color::Rgb(0, 0, 0)).bg(of_many),
        Colours::Sixteen => bold.fg(Color::Black).bg(of_sixteen),
        Colours::None => bold.add_modifier(Modifier::REVERSED),
    };
    let ink = |of_many: Color, of_sixteen: Color| match colours {
        Colours::True => plain.fg(of_many),
        Colours::Sixteen => plain.fg(of_sixteen),
        Colours::None => plain,
    };
    match role {
        Role::Plain | Role::DialScale => plain,
        Role::Strong | Role::Compartment | Role::DialExpected => bold,
        Role::Faint | Role::Rule => plain.add_modifier(Modifier::DIM),
        Role::Prompt => bold.add_modifier(Modifier::UNDERLINED),
        Role::Inside => ground(BLUISH_GREEN, Color::Green),
        Role::Outside => ground(VERMILION, Color::Red),
        Role::Undecided => ground(ORANGE, Color::Yellow),
        Role::Dead => ground(REDDISH_PURPLE, Color::Magenta),
        Role::Caution | Role::Question => ground(YELLOW, Color::Yellow),
        Role::Park => ground(SKY_BLUE, Color::Cyan),
        Role::DialBand => ink(BLUISH_GREEN, Color::Green),
        Role::DialFringe => ink(BLUE, Color::Blue),
        Role::DialReading => ink(VERMILION, Color::Red).add_modifier(Modifier::BOLD),
        Role::Selected => plain.add_modifier(Modifier::REVERSED),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_four_words_differ_without_colour() {
        for glyphs in [Glyphs::Unicode, Glyphs::Ascii] {
            let words = ["inside", "outside", "undecided", "dead"];
            let signs: std::collections::HashSet<_> = words.map(|word| sign(word, glyphs)).into();
            assert_eq!(signs.len(), 4);
        }
    }

    #[test]
    fn no_colour_means_none() {
        for role in [Role::Inside, Role::Caution, Role::DialReading, Role::Park] {
            let style = style(role, Colours::None);
            assert_eq!((style.fg, style.bg), (None, None), "{role:?}");
        }
    }
}
