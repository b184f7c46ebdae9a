//! The text as the rules see it: one byte a character, look-alikes folded together, with the way back to the text.

/// How many characters are looked at; what stands behind them is listed as unexplained.
pub(super) const MOST_CELLS: usize = 96;

/// `µ` and its look-alikes.
pub(super) const MICRO: u8 = 0xB5;
/// `±`.
pub(super) const PLUS_MINUS: u8 = 0xB1;
/// The degree sign.
pub(super) const DEGREE: u8 = 0xB0;
/// The first of the Cyrillic letters; small and capital ones are folded together.
const CYRILLIC: u8 = 0xC0;
/// The last of them.
const CYRILLIC_LAST: u8 = 0xDF;
/// A character that the person could not read.
pub(super) const UNREADABLE: u8 = b'?';
/// A letter of another script.
const OTHER_LETTER: u8 = 0xFE;
/// Any other character.
const OTHER_SIGN: u8 = 0xFF;

/// A text, one byte a character.
#[derive(Clone)]
pub(super) struct Scan<'t> {
    text: &'t str,
    glyphs: [u8; MOST_CELLS],
    starts: [u16; MOST_CELLS + 1],
    n_cells: usize,
    facing: Facing,
    /// How many signs that join sections there are.
    n_joins: usize,
}

/// How the part is held.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Facing {
    Upright,
    UpsideDown,
}

/// Figures with at most one point.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Figures {
    /// The digits as one number, the point left out.
    pub(super) digits: u32,
    /// Digits before the point.
    pub(super) n_whole: usize,
    /// Digits behind the point.
    pub(super) n_decimals: usize,
    /// The cell behind the last digit.
    pub(super) end: usize,
}

/// What sort of character a cell holds.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Sort {
    /// Nothing to see.
    Blank,
    /// A digit.
    Digit,
    /// A letter of any script, µ among them.
    Letter,
    /// Anything else.
    Sign,
}

impl<'t> Scan<'t> {
    /// Folds the first [`MOST_CELLS`] characters.
    pub(super) fn new(text: &'t str) -> Self {
        let mut scan = Self {
            text,
            glyphs: [b' '; MOST_CELLS],
            starts: [0; MOST_CELLS + 1],
            n_cells: 0,
            facing: Facing::Upright,
            n_joins: 0,
        };
        let mut end = 0;
        for ((start, character), (slot, place)) in text
            .char_indices()
            .zip(scan.glyphs.iter_mut().zip(&mut scan.starts))
        {
            *slot = glyph(character);
            // A cell is one character, so that no start lies past 4 * MOST_CELLS.
            *place = u16::try_from(start).unwrap_or(u16::MAX);
            end = start + character.len_utf8();
            scan.n_cells += 1;
            scan.n_joins += usize::from(matches!(*slot, b'+' | b'x' | b'X' | b'('));
        }
        if let Some(place) = scan.starts.get_mut(scan.n_cells) {
            *place = u16::try_from(end).unwrap_or(u16::MAX);
        }
        scan
    }

    /// Takes one character for another.
    pub(super) fn put(&mut self, cell: usize, glyph: u8) {
        if let Some(slot) = self.glyphs.get_mut(cell) {
            *slot = glyph;
        }
    }

    /// Returns the text upside down: the last character first, each turned where it has a partner.
    pub(super) fn turned(&self, partner: impl Fn(u8) -> Option<u8>) -> Self {
        let mut turned = self.clone();
        for (cell, &glyph) in self.rest(0).iter().rev().enumerate() {
            turned.put(cell, partner(glyph).unwrap_or(glyph));
        }
        turned.facing = Facing::UpsideDown;
        turned
    }

    /// Returns whether there is any sign that joins sections.
    pub(super) fn may_have_sections(&self) -> bool {
        self.n_joins > 0
    }

    /// Returns whether any letter is Cyrillic.
    pub(super) fn is_cyrillic(&self) -> bool {
        self.rest(0).iter().any(|&glyph| is_cyrillic(glyph))
    }

    /// Returns how many cells there are.
    pub(super) fn len(&self) -> usize {
        self.n_cells
    }

    /// Returns how many cells are not blank.
    pub(super) fn n_visible(&self) -> usize {
        self.rest(0).iter().filter(|&&glyph| glyph != b' ').count()
    }

    /// Returns the glyph of a cell; a blank past either end.
    pub(super) fn at(&self, cell: usize) -> u8 {
        self.glyphs.get(cell).copied().unwrap_or(b' ')
    }

    /// Returns the glyphs from a cell on.
    pub(super) fn rest(&self, cell: usize) -> &[u8] {
        self.glyphs.get(cell..self.n_cells).unwrap_or_default()
    }

    /// Returns what sort of character stands in a cell.
    pub(super) fn sort(&self, cell: usize) -> Sort {
        sort(self.at(cell))
    }

    /// Returns the text of some cells.
    pub(super) fn text(&self, from: usize, to: usize) -> &'t str {
        let place = |cell: usize| self.starts.get(cell).copied().map_or(0, usize::from);
        let (from, to) = match self.facing {
            Facing::Upright => (from, to),
            Facing::UpsideDown => (
                self.n_cells.saturating_sub(to),
                self.n_cells.saturating_sub(from),
            ),
        };
        self.text.get(place(from)..place(to)).unwrap_or_default()
    }

    /// Returns the text behind the last cell.
    pub(super) fn beyond(&self) -> &'t str {
        let end = self
            .starts
            .get(self.n_cells)
            .copied()
            .map_or(0, usize::from);
        self.text.get(end..).unwrap_or_default()
    }

    /// Returns the next cell that is not blank.
    pub(super) fn after_blanks(&self, cell: usize) -> usize {
        let mut cell = cell;
        while cell < self.n_cells && self.at(cell) == b' ' {
            cell += 1;
        }
        cell
    }

    /// Returns the sort and the end of the run of characters at a cell; a point between or before digits belongs to them.
    pub(super) fn run(&self, cell: usize) -> (Sort, usize) {
        let leads = matches!(self.at(cell), b'.' | b',') && self.at(cell + 1).is_ascii_digit();
        let sort = if leads { Sort::Digit } else { self.sort(cell) };
        (sort, self.run_end(cell, sort))
    }

    fn run_end(&self, cell: usize, sort: Sort) -> usize {
        match sort {
            Sort::Digit => self.digits_end(cell),
            Sort::Letter => {
                let mut end = cell + 1;
                while end < self.n_cells && self.sort(end) == Sort::Letter {
                    end += 1;
                }
                end
            }
            Sort::Blank | Sort::Sign => cell + 1,
        }
    }

    fn digits_end(&self, cell: usize) -> usize {
        let mut end = cell + 1;
        loop {
            let here = self.at(end);
            let is_inner_point = matches!(here, b'.' | b',') && self.at(end + 1).is_ascii_digit();
            if !here.is_ascii_digit() && !is_inner_point {
                return end;
            }
            end += 1;
        }
    }

    /// Reads plain digits, at most nine.
    pub(super) fn whole(&self, cell: usize) -> Option<Figures> {
        let mut digits: u32 = 0;
        let mut end = cell;
        while self.at(end).is_ascii_digit() {
            if end - cell == 9 {
                return None;
            }
            digits = digits * 10 + u32::from(self.at(end) - b'0');
            end += 1;
        }
        (end > cell).then_some(Figures {
            digits,
            n_whole: end - cell,
            n_decimals: 0,
            end,
        })
    }

    /// Reads digits with at most one point or comma in or before them: "47", "4.7", ".047". At most nine digits.
    pub(super) fn figures(&self, cell: usize) -> Option<Figures> {
        let whole = self.whole(cell);
        let end = whole.map_or(cell, |whole| whole.end);
        if !matches!(self.at(end), b'.' | b',') {
            return whole;
        }
        let Some(decimals) = self.whole(end + 1) else {
            return whole;
        };
        let (digits, n_whole) = whole.map_or((0, 0), |whole| (whole.digits, whole.n_whole));
        if n_whole + decimals.n_whole > 9 {
            return None;
        }
        Some(Figures {
            digits: digits * power_of_ten(decimals.n_whole) + decimals.digits,
            n_whole,
            n_decimals: decimals.n_whole,
            end: decimals.end,
        })
    }
}

impl Figures {
    /// Returns the number.
    pub(super) fn number(self) -> f64 {
        f64::from(self.digits) / f64::from(power_of_ten(self.n_decimals))
    }
}

/// Returns a glyph as it is shown.
pub(super) fn shown(glyph: u8) -> char {
    match glyph {
        MICRO => 'µ',
        PLUS_MINUS => '±',
        DEGREE => '°',
        b' '..=b'~' => char::from(glyph),
        _ => '?',
    }
}

/// Returns whether a glyph is a Cyrillic letter.
pub(super) fn is_cyrillic(glyph: u8) -> bool {
    (CYRILLIC..=CYRILLIC_LAST).contains(&glyph)
}

/// Returns 10 to a power of at most 9.
pub(super) fn power_of_ten(n: usize) -> u32 {
    10u32.pow(u32::try_from(n.min(9)).unwrap_or(9))
}

/// Returns what sort of character a glyph is.
pub(super) fn sort(glyph: u8) -> Sort {
    match glyph {
        b' ' => Sort::Blank,
        b'0'..=b'9' => Sort::Digit,
        b'a'..=b'z' | b'A'..=b'Z' | MICRO | CYRILLIC..=CYRILLIC_LAST | OTHER_LETTER => Sort::Letter,
        _ => Sort::Sign,
    }
}

/// Folds one character.
pub(super) fn glyph(character: char) -> u8 {
    match character {
        '|' => b' ',
        '!'..='~' => u8::try_from(character).unwrap_or(OTHER_SIGN),
        'µ' | 'μ' => MICRO,
        '±' => PLUS_MINUS,
        '°' | 'º' => DEGREE,
        '‐' | '‑' | '‒' | '–' | '—' | '−' => b'-',
        '⎓' => b'=',
        '∼' | '～' | '〜' | '≂' => b'~',
        'А'..='Я' => cyrillic(character, 'А'),
        'а'..='я' => cyrillic(character, 'а'),
        'ё' | 'Ё' => cyrillic('е', 'а'),
        _ if character.is_whitespace() || character.is_control() => b' ',
        _ if character.is_alphabetic() => OTHER_LETTER,
        _ => OTHER_SIGN,
    }
}

fn cyrillic(character: char, first: char) -> u8 {
    let place = u32::from(character) - u32::from(first);
    u8::try_from(place).map_or(OTHER_LETTER, |place| CYRILLIC + place)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(text: &str, expected: Option<(f64, usize)>) {
        let figures = Scan::new(text).figures(0);
        assert_eq!(
            figures.map(|f| (f.number(), f.end)),
            expected,
            "in {text:?}"
        );
    }

    #[test]
    fn figures_have_at_most_one_point() {
        check("104K", Some((104.0, 3)));
        check(".047", Some((0.047, 4)));
        check("4,7µ", Some((4.7, 3)));
        check("4.", Some((4.0, 1)));
        check("1.2.3", Some((1.2, 3)));
        check("n47", None);
        check("1234567890", None);
    }

    #[test]
    fn long_texts_are_cut_at_a_character() {
        let text = "µ".repeat(MOST_CELLS + 3);
        let scan = Scan::new(&text);
        assert_eq!((scan.len(), scan.beyond()), (MOST_CELLS, "µµµ"));
    }
}
