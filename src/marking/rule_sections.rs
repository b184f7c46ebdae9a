//! Several capacitors in one can.
//!
//! ```text
//! sections = section { ("+" | "/" …) section }       "8+8"  "50+50 µF"  "3x0.1+2x2500p"
//! section  = [digit "x"] figures [unit]              "2x0.1"  "2x2n7"
//! ```
//! At least two capacitors in all. A section without a unit takes that of the one to its right, else µF (old cans and filters); a
//! value below 1 without a unit is in µF.

use super::lexicon::Lexicon;
use super::piece::{Amount, Pieces};
use super::scan::{Figures, Scan, Sort, power_of_ten};

const MICROFARAD: i8 = -6;
const MOST_SECTIONS: usize = 9;

/// A section as printed.
struct Section {
    n: usize,
    figures: Figures,
    unit: Option<(i8, u32)>,
    end: usize,
}

/// Proposes the sections at a cell.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    if !scan.may_have_sections()
        || matches!(scan.sort(at.wrapping_sub(1)), Sort::Digit | Sort::Letter)
    {
        return;
    }
    let Some(first) = section(scan, at, lexicon) else {
        return;
    };
    // Most numbers are no sections: nothing is allocated for them.
    let may_go_on = |end: usize| scan.at(scan.after_blanks(end)) == b'+' || scan.at(end) == b'(';
    if first.n < 2 && !may_go_on(first.end) {
        return;
    }
    let mut sections = vec![first];
    let mut end = at;
    while let Some(last) = sections.last() {
        end = last.end;
        let Some(next_at) = joined(scan, end) else {
            break;
        };
        match section(scan, next_at, lexicon) {
            Some(next) if sections.len() < MOST_SECTIONS => sections.push(next),
            _ => break,
        }
    }
    let mut unit = None;
    let mut amounts = Vec::with_capacity(MOST_SECTIONS);
    for section in sections.iter().rev() {
        let small = section.figures.n_whole == 0 || section.figures.number() < 1.0;
        let own = section.unit.or(if small { None } else { unit });
        unit = section.unit.or(unit);
        let (exponent, scale) = own.unwrap_or((MICROFARAD, super::piece::WHOLE_UNIT));
        let Some(amount) = Amount::of(section.figures, exponent) else {
            return;
        };
        amounts.extend(std::iter::repeat_n(amount.in_units(scale), section.n));
    }
    amounts.reverse();
    if (2..=MOST_SECTIONS).contains(&amounts.len()) {
        pieces.sections(
            (at, behind_class(scan, end)),
            amounts,
            lexicon.named.sections,
        );
    }
}

/// Returns where the next section starts: behind a plus sign, or behind a class in brackets.
fn joined(scan: &Scan<'_>, end: usize) -> Option<usize> {
    let class_end = behind_class(scan, end);
    let cell = scan.after_blanks(class_end);
    let behind_plus = scan.after_blanks(cell + 1);
    let plus_side = scan.figures(behind_plus).map_or(0, |figures| figures.end);
    let is_tolerance = matches!(scan.at(plus_side), b'-' | b'%' | b'/');
    if scan.at(cell) == b'+' && !is_tolerance {
        Some(behind_plus)
    } else {
        (class_end > end).then_some(cell)
    }
}

/// Returns the cell behind a class in brackets: "(X)".
fn behind_class(scan: &Scan<'_>, at: usize) -> usize {
    let class = matches!(scan.rest(at), [b'(', b'X' | b'Y', b')', ..]);
    if class { at + 3 } else { at }
}

fn section(scan: &Scan<'_>, at: usize, lexicon: &Lexicon) -> Option<Section> {
    let mut start = at;
    let mut n = 1;
    if let Some(times) = scan.whole(at)
        && times.n_whole == 1
        && matches!(scan.at(times.end), b'x' | b'X')
    {
        n = usize::try_from(times.digits).ok()?;
        start = times.end + 1;
    }
    let figures = scan.figures(start)?;
    let unit_at = scan.after_blanks(figures.end);
    let pointed = lexicon.points.longest(scan, figures.end).next();
    if let Some((entry, decimals)) = pointed.zip(scan.whole(figures.end + 1))
        && figures.n_decimals == 0
        && figures.n_whole + decimals.n_whole <= 4
    {
        let figures = Figures {
            digits: figures.digits * power_of_ten(decimals.n_whole) + decimals.digits,
            n_decimals: decimals.n_whole,
            ..figures
        };
        return Some(Section {
            n,
            figures,
            unit: Some((entry.meaning.exponent, entry.meaning.scale)),
            end: decimals.end,
        });
    }
    let word = lexicon.units.longest(scan, unit_at).next().filter(|entry| {
        let end = unit_at + entry.glyphs.len();
        !matches!(scan.sort(end), Sort::Letter | Sort::Digit)
            && (entry.glyphs.len() > 1
                || (unit_at == figures.end && !scan.at(unit_at).is_ascii_uppercase()))
    });
    Some(Section {
        n,
        figures,
        unit: word.map(|entry| (entry.meaning.exponent, entry.meaning.scale)),
        end: word.map_or(figures.end, |entry| unit_at + entry.glyphs.len()),
    })
}

#[cfg(test)]
mod tests {
    use super::super::testing::check_sections;
    use super::*;

    #[track_caller]
    fn check(text: &str, expected: &[&str]) {
        check_sections(propose, text, expected);
    }

    #[test]
    fn sections_of_a_can() {
        check("8+8", &["8 µF, 8 µF"]);
        check("50+50 µF 350V", &["50 µF, 50 µF"]);
        check("2x0.1", &["100 nF, 100 nF"]);
        check("3x0.1+2x2500p", &["100 nF, 100 nF, 100 nF, 2.5 nF, 2.5 nF"]);
        check("0,1µ(X) 2x2n7(Y)", &["100 nF, 2.7 nF, 2.7 nF"]);
        check("104", &[]);
        check("22 +80-20", &[]);
    }
}
