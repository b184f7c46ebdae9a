//! Dates of make.
//!
//! ```text
//! date = year-letter month                "J8": August 1977, 1997 or 2017 (IEC 60062); month first from 1969 to 1975: "8J"
//!      | year year week week              "8323": week 23 of 1983
//!      | week week year year              "2383"
//!      | year month day day               "2313": 13 March of a year ending in 2
//!      | month month year year            "0384"
//!      | roman-month year year            "III 84"
//! ```
//! A date stands apart from other letters and figures. The marks are rows of `date-marks.toml`.

use super::lexicon::Lexicon;
use super::piece::{Date, Meaning, Pieces};
use super::scan::{Scan, Sort};
use crate::tables::TABLES;

const MOST_WEEKS: u8 = 53;

const UNDATED: Date = Date {
    year: 0,
    cycle: 0,
    month: 0,
    week: 0,
    day: 0,
};

/// Proposes the dates at a cell.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    if touches(scan, at.wrapping_sub(1)) {
        return;
    }
    let mut push = |(end, date, weight): (usize, Date, f64)| {
        let evidence = lexicon.named.date;
        pieces.push((at, end), Meaning::Date(date), evidence, weight);
    };
    two_characters(scan, at, lexicon)
        .into_iter()
        .flatten()
        .for_each(&mut push);
    roman_month(scan, at, lexicon)
        .into_iter()
        .for_each(&mut push);
    four_digits(scan, at)
        .into_iter()
        .flatten()
        .for_each(&mut push);
}

type Found = Option<(usize, Date, f64)>;

fn touches(scan: &Scan<'_>, cell: usize) -> bool {
    matches!(scan.sort(cell), Sort::Digit | Sort::Letter)
}

fn two_characters(scan: &Scan<'_>, at: usize, lexicon: &Lexicon) -> [Found; 2] {
    if touches(scan, at + 2) {
        return [None; 2];
    }
    let codes = &lexicon.codes;
    let factors = &TABLES.ranking.factors;
    let date = |year: u8, month: u8, weight: f64| {
        let (&year, &month) = codes.years.get(year).zip(codes.months.get(month))?;
        let date = Date {
            year,
            month,
            cycle: 20,
            ..UNDATED
        };
        Some((at + 2, date, weight * factors.date_two_characters))
    };
    let (first, second) = (scan.at(at), scan.at(at + 1));
    [
        date(first, second, 1.0),
        date(second, first, factors.date_other_order),
    ]
}

fn roman_month(scan: &Scan<'_>, at: usize, lexicon: &Lexicon) -> Found {
    let roman = lexicon.codes.roman_months.longest(scan, at).next()?;
    let mut year_at = at + roman.glyphs.len();
    if scan.sort(year_at) == Sort::Letter {
        return None;
    }
    while matches!(scan.sort(year_at), Sort::Blank | Sort::Sign) && year_at < scan.len() {
        year_at += 1;
    }
    let two = scan
        .whole(year_at)
        .filter(|two| two.n_whole == 2 && !touches(scan, two.end))?;
    let date = Date {
        year: full_year(two.digits)?,
        month: roman.meaning,
        ..UNDATED
    };
    Some((two.end, date, 1.0))
}

fn four_digits(scan: &Scan<'_>, at: usize) -> [Found; 4] {
    let Some(four) = scan.whole(at).filter(|four| four.n_whole == 4) else {
        return [None; 4];
    };
    let end = four.end;
    let goes_on = matches!(scan.at(end), b'.' | b',') && touches(scan, end + 1);
    if touches(scan, end) || goes_on {
        return [None; 4];
    }
    let other = TABLES.ranking.factors.date_other_order;
    let up_to = |two: u32, most: u8| {
        let two = u8::try_from(two).ok()?;
        (1..=most).contains(&two).then_some(two)
    };
    let (high, low) = (four.digits / 100, four.digits % 100);
    let year_week = |year: u32, week: u32, weight: f64| {
        let (year, week) = full_year(year).zip(up_to(week, MOST_WEEKS))?;
        Some((
            end,
            Date {
                year,
                week,
                ..UNDATED
            },
            weight,
        ))
    };
    let month_year = || {
        let (month, year) = up_to(high, 12).zip(full_year(low))?;
        let date = Date {
            year,
            month,
            ..UNDATED
        };
        (scan.at(at) == b'0').then_some((end, date, other))
    };
    let year_month_day = || {
        let (month, day) = up_to(high % 10, 12).zip(up_to(low, 31))?;
        let year = u16::try_from(high / 10).ok()?;
        let date = Date {
            year,
            cycle: 10,
            month,
            day,
            ..UNDATED
        };
        Some((end, date, other * other))
    };
    [
        year_week(high, low, 1.0),
        year_week(low, high, other),
        month_year(),
        year_month_day(),
    ]
}

/// Returns the year of two digits, 1960 to 2030.
fn full_year(two: u32) -> Option<u16> {
    let two = u16::try_from(two).ok()?;
    match two {
        0..=30 => Some(2000 + two),
        60..=99 => Some(1900 + two),
        _ => None,
    }
}

#[cfg(test)]
mod tests {
    use super::super::testing::check_dates;
    use super::*;

    #[track_caller]
    fn check(text: &str, expected: &[&str]) {
        check_dates(propose, text, expected);
    }

    #[test]
    fn year_and_month() {
        check("J8", &["August 1977, 1997 or 2017"]);
        check("SD", &["December 1984, 2004 or 2024"]);
        check("8J", &["August 1977, 1997 or 2017"]);
        check("G8", &[]);
        check("J82", &[]);
        check("III 84", &["March 1984"]);
    }

    #[test]
    fn year_and_week() {
        check("8323", &["week 23 of 1983", "23 March a year ending in 8"]);
        check("2383", &["week 23 of 1983"]);
        check(
            "1208",
            &[
                "week 8 of 2012",
                "week 12 of 2008",
                "8 February a year ending in 1",
            ],
        );
        check("0384", &["week 3 of 1984", "March 1984"]);
        check("4751", &[]);
    }
}
