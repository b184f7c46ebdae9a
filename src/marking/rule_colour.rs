//! Colours of bands and dots, typed as words or as the two capitals of IEC 60757.
//!
//! ```text
//! colours = colour { [","] colour }       three to eight of them, the marking starts with them
//! colour  = word | "-"                    "brown"  "BN"; a dash or `none` is a dot that is not there
//! tip     = colour ("tip" | "dot" …)      "violet tip": the coefficient of a ceramic part
//! ```
//! Words such as `wide`, `spot` or `dot` may stand between. A wide band may be two equal ones side by side, so both are
//! tried. A `?` behind the first colour is a colour that could not be read: all are tried. Every order of bands with so many of them (`colour-systems.toml`) is proposed, read from either end.

use super::Role;
use super::compile_colours::{LONGEST, Says, System, key};
use super::lexicon::Lexicon;
use super::piece::{Amount, Form, Inner, Meaning, Pieces, Voltage};
use super::scan::{Scan, Sort, UNREADABLE};
use crate::tables::{BandUse, TABLES, VoltageKind};

const MOST_BANDS: usize = 8;
const LEAST_BANDS: usize = 3;
/// A colour that could not be read.
const UNKNOWN: u8 = u8::MAX;
type Cells = (usize, usize);

/// Colours as typed.
#[derive(Clone, Default)]
struct Bands {
    list: Vec<(Cells, u8)>,
    wide: Option<usize>,
    others: Vec<Cells>,
}

/// Proposes what the colours at the start of a marking may mean.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    let Some((first, end)) = colour(scan, at, lexicon) else {
        return;
    };
    tip(scan, (at, end), first, lexicon, pieces);
    if at != scan.after_blanks(0) {
        return;
    }
    let typed = bands(scan, at, lexicon);
    let reversed = TABLES.ranking.factors.colours_reversed;
    let mut doubled = None;
    if let Some(wide) = typed.wide
        && let Some(&band) = typed.list.get(wide)
    {
        let mut two = typed.clone();
        two.list.insert(wide, band);
        doubled = Some(two);
    }
    let ways = [Some(typed), doubled].into_iter().flatten();
    for (typed, share) in ways.flat_map(|typed| completed(typed, lexicon)) {
        if !(LEAST_BANDS..=MOST_BANDS).contains(&typed.list.len()) {
            continue;
        }
        for system in &lexicon.colours.systems {
            if system.uses.len() != typed.list.len() {
                continue;
            }
            let forward: Vec<(Cells, u8)> = typed.list.clone();
            let backward: Vec<(Cells, u8)> = typed.list.iter().rev().copied().collect();
            read(&forward, &typed.others, system, share, lexicon, pieces);
            if forward
                .iter()
                .map(|band| band.1)
                .ne(backward.iter().map(|band| band.1))
            {
                let share = share * reversed;
                read(&backward, &typed.others, system, share, lexicon, pieces);
            }
        }
    }
}

/// Returns whether a marking starts with a colour, so that a `?` in it stands for a colour.
pub(super) fn starts(scan: &Scan<'_>, lexicon: &Lexicon) -> bool {
    colour(scan, scan.after_blanks(0), lexicon).is_some()
}

/// Returns the bands with an unreadable one tried as every colour; of several only the first is.
fn completed(typed: Bands, lexicon: &Lexicon) -> Vec<(Bands, f64)> {
    let Some(place) = typed.list.iter().position(|band| band.1 == UNKNOWN) else {
        return vec![(typed, 1.0)];
    };
    let count = lexicon.colours.count;
    let with = |colour: u8| {
        let mut typed = typed.clone();
        if let Some(band) = typed.list.get_mut(place) {
            band.1 = colour;
        }
        (typed, 1.0 / f64::from(count))
    };
    (0..count).map(with).collect()
}

/// Proposes the coefficient that a coloured tip or dot stands for: "violet tip".
fn tip(scan: &Scan<'_>, (at, end): Cells, first: u8, lexicon: &Lexicon, pieces: &mut Pieces) {
    let colours = &lexicon.colours;
    let word_at = scan.after_blanks(end);
    let Some((_, end)) = colour(scan, word_at, lexicon).filter(|word| word.0 == colours.between)
    else {
        return;
    };
    if let Some(says) = colours.says.get(&(colours.tip, first)) {
        pieces.push(
            (at, end),
            Meaning::Word(says.word),
            says.evidence,
            says.share,
        );
    }
}

/// Returns the colour of a word and the cell behind it.
fn colour(scan: &Scan<'_>, at: usize, lexicon: &Lexicon) -> Option<(u8, usize)> {
    let (sort, end) = scan.run(at);
    if sort != Sort::Letter || end - at > LONGEST {
        return None;
    }
    let word = scan.rest(at).get(..end - at)?;
    let exact = key(word);
    let words = &lexicon.colours.words;
    let found = words
        .get(&exact)
        .or_else(|| words.get(&exact.map(|glyph| glyph.to_ascii_lowercase())));
    found.map(|&colour| (colour, end))
}

fn bands(scan: &Scan<'_>, at: usize, lexicon: &Lexicon) -> Bands {
    let mut typed = Bands::default();
    let mut cell = at;
    let mut wide_next = false;
    while cell < scan.len() && typed.list.len() < MOST_BANDS {
        let (sort, end) = scan.run(cell);
        let between = |cell: usize| !matches!(scan.sort(cell), Sort::Digit | Sort::Letter);
        let colours = &lexicon.colours;
        if let Some((colour, end)) = colour(scan, cell, lexicon) {
            if colour == colours.wide || colour == colours.between {
                wide_next |= colour == colours.wide;
                typed.others.push((cell, end));
                cell = scan.after_blanks(end);
                continue;
            }
            if wide_next {
                typed.wide = Some(typed.list.len());
            }
            wide_next = false;
            typed.list.push(((cell, end), colour));
        } else if scan.at(cell) == b'-' && between(cell.wrapping_sub(1)) && between(end) {
            typed.list.push(((cell, end), colours.none));
        } else if scan.at(cell) == UNREADABLE && between(cell.wrapping_sub(1)) && between(end) {
            typed.list.push(((cell, end), UNKNOWN));
        } else if sort == Sort::Sign
            && matches!(scan.at(cell), b',' | b'/' | b'-' | b'+' | b';' | b':')
        {
            typed.others.push((cell, end));
        } else {
            break;
        }
        cell = scan.after_blanks(end);
    }
    typed
}

/// Reads the bands in one order and proposes what they say.
fn read(
    bands: &[(Cells, u8)],
    others: &[Cells],
    system: &System,
    weight: f64,
    lexicon: &Lexicon,
    pieces: &mut Pieces,
) {
    let mut weight = weight * system.share;
    let mut digits: Option<u32> = None;
    let mut power = 0;
    let mut found: Vec<(Cells, BandUse, &Says)> = Vec::with_capacity(MOST_BANDS);
    for (&(cells, colour), &(band, column)) in bands.iter().zip(&system.uses) {
        let Some(says) = lexicon.colours.says.get(&(column, colour)) else {
            return;
        };
        weight *= says.share;
        let whole = says.number.map(f64::round);
        match (band, whole) {
            (BandUse::Digit, Some(digit)) => {
                if digits.is_none() && digit < 1.0 {
                    return;
                }
                let digit = (0..10).find(|&one| f64::from(one) >= digit).unwrap_or(9);
                digits = Some(digits.unwrap_or(0) * 10 + digit);
            }
            (BandUse::Multiplier, Some(exponent)) => {
                power = (-3..10)
                    .find(|&one| f64::from(one) >= exponent)
                    .unwrap_or(0);
            }
            (BandUse::Digit | BandUse::Multiplier, None) => return,
            _ => {}
        }
        found.push((cells, band, says));
    }
    let Some(amount) = digits.and_then(|digits| Amount::new(digits, system.exponent + power))
    else {
        return;
    };
    let is_small = amount.is_below_ten_picofarads();
    let mut parts: Vec<Inner> = Vec::with_capacity(MOST_BANDS * 2);
    let mut value_said = false;
    for (cells, band, says) in found {
        let meaning = match band {
            BandUse::Digit if !value_said => {
                value_said = true;
                Meaning::Value(amount)
            }
            BandUse::Digit | BandUse::Multiplier => Meaning::Part(Role::Value),
            BandUse::Tolerance => match says.small.filter(|_| is_small).or(says.limits) {
                Some(limits) => Meaning::Limits(limits),
                None => return,
            },
            BandUse::Voltage => match says.number {
                Some(volts) => Meaning::Voltage(Voltage {
                    volts,
                    kind: VoltageKind::Dc,
                    form: Form::Said,
                }),
                None => return,
            },
            BandUse::Coefficient if says.limits.is_none() && system.uses.len() != 6 => {
                Meaning::Word(says.word)
            }
            BandUse::Coefficient | BandUse::Characteristic => Meaning::Part(Role::Characteristic),
            BandUse::Type => Meaning::Part(Role::Family),
        };
        parts.push((cells, meaning, says.evidence));
    }
    let separators = others
        .iter()
        .map(|&cells| (cells, Meaning::Separator, lexicon.neutral));
    parts.extend(separators);
    parts.sort_by_key(|part| part.0);
    // Two halves of a wide band have the same cells: the second says nothing new.
    parts.dedup_by(|two, one| two.0 == one.0 && matches!(two.1, Meaning::Part(_)));
    if let Some(&(cells, ..)) = parts.first() {
        parts.insert(
            0,
            (
                (cells.0, cells.0),
                Meaning::Word(system.word),
                lexicon.neutral,
            ),
        );
    }
    pieces.group(system.evidence, weight, &parts);
}

#[cfg(test)]
mod tests {
    use super::super::decode;

    #[track_caller]
    fn check(text: &str, expected: &str) {
        let decoding = decode(text, None);
        let best = decoding.best().map(super::super::Reading::in_words);
        assert_eq!(best.as_deref(), Some(expected), "decoding {text:?}");
    }

    #[test]
    fn polyester_with_five_bands() {
        check("brown black yellow white red", "100 nF ±10 %, 250 V dc");
        check("BN BK YE WH RD", "100 nF ±10 %, 250 V dc");
    }

    #[test]
    fn tantalum_beads() {
        check(
            "yellow violet, spot white, grey",
            "4.7 µF, no tolerance marked, 25 V dc",
        );
        check(
            "brown black, spot black, green",
            "10 µF, no tolerance marked, 16 V dc",
        );
    }

    #[test]
    fn mica_with_six_dots() {
        check("white, brown, red / -, red, red", "1.2 nF ±2 %");
    }

    #[test]
    fn a_band_that_cannot_be_read() {
        let decoding = decode("brown black ? white red", None);
        let values: Vec<String> = decoding
            .readings
            .iter()
            .map(|one| one.capacitance.to_string())
            .collect();
        for value in ["10 nF", "100 nF", "1 µF"] {
            assert!(
                values.iter().any(|found| found == value),
                "{value} in {values:?}"
            );
        }
    }

    #[test]
    fn a_wide_band_may_be_two() {
        check("wide red yellow white red", "220 nF ±10 %, 250 V dc");
    }
}
