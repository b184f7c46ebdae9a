//! Markings: the corpus of `tests/cases/markings.toml`, the standards row by row, and any text at all.

use nulltray::marking::{Decoding, decode};
use nulltray::quantity::Tolerance;
use nulltray::tables::{Family, Series, Standing, TABLES};
use proptest::prelude::*;
use serde::Deserialize;

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct Corpus {
    pub(super) case: Vec<Case>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct Case {
    name: String,
    pub(super) marking: String,
    pub(super) family: Option<String>,
    pub(super) readings: Vec<String>,
    #[serde(default)]
    also: Vec<String>,
    at_most: Option<f64>,
    #[serde(default)]
    unexplained: Option<Vec<String>>,
    why: String,
    source: String,
}

/// Returns the corpus.
pub(super) fn corpus() -> Corpus {
    toml::from_str(include_str!("../cases/markings.toml")).expect("the corpus is TOML")
}

#[test]
fn the_corpus_reads_as_expected() {
    let corpus = corpus();
    let wrong: Vec<String> = corpus.case.iter().filter_map(mistake).collect();
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

/// Returns what is wrong with a case.
fn mistake(case: &Case) -> Option<String> {
    let family = case
        .family
        .as_deref()
        .map(|name| Family::named(name).expect("a family"));
    let decoding = decode(&case.marking, family);
    let words: Vec<String> = decoding
        .readings
        .iter()
        .map(nulltray::marking::Reading::in_words)
        .collect();
    let shown = |what: &str| {
        let found: Vec<String> = decoding
            .readings
            .iter()
            .map(|reading| format!("{:.3} {}", reading.plausibility, reading.in_words()))
            .collect();
        let (name, why, source) = (&case.name, &case.why, &case.source);
        Some(format!(
            "{name} ({why}; {source}): {what}; found {found:#?}, unexplained {:?}",
            decoding.unexplained
        ))
    };
    if case.why.is_empty() || case.source.is_empty() {
        return shown("no why or no source");
    }
    let nothing_expected = case.readings.is_empty() && case.at_most.is_none();
    if nothing_expected && !words.is_empty() || !words.starts_with(&case.readings) {
        return shown("other readings first");
    }
    if let Some(missing) = case.also.iter().find(|also| !words.contains(also)) {
        return shown(&format!("not among the readings: {missing}"));
    }
    let best = decoding.best().map_or(0.0, |best| best.plausibility);
    if case.at_most.is_some_and(|most| best > most + 1e-12) {
        return shown("too sure of itself");
    }
    let unexplained = case.unexplained.clone().unwrap_or_default();
    if !case.readings.is_empty() && decoding.unexplained != unexplained {
        return shown("other tokens unexplained");
    }
    None
}

#[track_caller]
fn check_best(marking: &str, family: &str, expected: &str) {
    let decoding = decode(marking, Family::named(family));
    let best = decoding.best().map(nulltray::marking::Reading::in_words);
    assert_eq!(best.as_deref(), Some(expected), "decoding {marking:?}");
}

/// IEC 60062, letter code for tolerance (BS EN 60062:1994, clauses 4.1 to 4.3): the rows on which published lists agree.
#[test]
fn tolerance_letters_of_iec_60062() {
    let percent = [
        ('B', "±0.1 %"),
        ('C', "±0.25 %"),
        ('D', "±0.5 %"),
        ('F', "±1 %"),
        ('G', "±2 %"),
        ('J', "±5 %"),
        ('K', "±10 %"),
        ('M', "±20 %"),
        ('N', "±30 %"),
        ('Q', "-10/+30 %"),
        ('S', "-20/+50 %"),
        ('T', "-10/+50 %"),
        ('Z', "-20/+80 %"),
    ];
    for (letter, limits) in percent {
        let rows: Vec<_> = TABLES
            .tolerance_letters()
            .filter(|row| row.letter == letter)
            .collect();
        let [row] = rows.as_slice() else {
            panic!("{letter} has one meaning")
        };
        assert_eq!(
            row.limits.map(|limits| limits.to_string()).as_deref(),
            Some(limits)
        );
        assert_eq!(row.standing, Standing::Agreed);
        let decoding = decode(&format!("102{letter}"), None);
        let has = decoding
            .readings
            .iter()
            .any(|reading| reading.tolerance == row.limits);
        assert!(has, "102{letter} has a reading with {limits}");
    }
    let absolute = [
        ('B', "±0.1 pF"),
        ('C', "±0.25 pF"),
        ('D', "±0.5 pF"),
        ('F', "±1 pF"),
        ('G', "±2 pF"),
    ];
    for (letter, limits) in absolute {
        check_best(
            &format!("8p2{letter}"),
            "disc1",
            &format!("8.2 pF {limits}"),
        );
    }
}

/// ISO 3, series R10: the letters A to K without I are its numbers in order; the digit is the power of ten (JIS C 5101-1).
#[test]
fn voltage_codes_are_the_r10_series() {
    let letters = ['A', 'B', 'C', 'D', 'E', 'F', 'G', 'H', 'J', 'K'];
    for (n, letter) in (0..10).zip(letters) {
        let row = TABLES
            .voltage_codes()
            .find(|row| row.letter == letter)
            .expect("a row");
        let exact = 10f64.powf(f64::from(n) / 10.0);
        // R10 rounds to two or three figures, 3.16 to 3.15 and 6.31 to 6.3.
        assert!(
            (row.mantissa.get() / exact - 1.0).abs() < 0.013,
            "{letter} {}",
            row.mantissa
        );
        for &digit in &row.digits {
            let volts = row.voltage(digit).get();
            let rounded = row.mantissa.get() * 10f64.powi(i32::from(digit));
            assert!((volts / rounded - 1.0).abs() < 1e-12, "{digit}{letter}");
        }
    }
    check_best("2A104J", "pet", "100 nF ±5 %, 100 V dc");
    check_best("1J104J", "pet", "100 nF ±5 %, 63 V dc");
    check_best("2G104J", "pet", "100 nF ±5 %, 400 V dc");
    check_best("3A102K", "disc2", "1 nF ±10 %, 1 kV dc");
}

/// IEC 60063:2015: E48, E96 and E192 are 10^(k/n) rounded to three figures, with 9.20 instead of 9.19 in E192; E3 to E24 are
/// rounded to two figures with eight historic exceptions.
#[test]
fn preferred_values_of_iec_60063() {
    let mantissas = |series: Series| -> Vec<u16> {
        let row = TABLES.value_series().find(|row| row.series == series);
        row.expect("a series").mantissas.clone()
    };
    let rounded = |n: u16, factor: f64| -> Vec<f64> {
        let value = |k| (10f64.powf(f64::from(k) / f64::from(n)) * factor).round();
        (0..n).map(value).collect()
    };
    for (series, n) in [(Series::E48, 48), (Series::E96, 96), (Series::E192, 192)] {
        for (found, computed) in mantissas(series).into_iter().zip(rounded(n, 100.0)) {
            let expected = if n == 192 && computed.to_bits() == 919f64.to_bits() {
                920.0
            } else {
                computed
            };
            assert!(
                (f64::from(found) - expected).abs() < 0.5,
                "{series:?} {found}"
            );
        }
        assert_eq!(mantissas(series).len(), usize::from(n));
    }
    let exceptions = [
        (26, 270),
        (29, 300),
        (32, 330),
        (35, 360),
        (38, 390),
        (42, 430),
        (46, 470),
        (83, 820),
    ];
    for (series, n) in [
        (Series::E3, 3),
        (Series::E6, 6),
        (Series::E12, 12),
        (Series::E24, 24),
    ] {
        assert_eq!(mantissas(series).len(), usize::from(n));
        for (found, computed) in mantissas(series).into_iter().zip(rounded(n, 10.0)) {
            let historic = exceptions
                .iter()
                .find(|(plain, _)| (f64::from(*plain) - computed).abs() < 0.5);
            let expected = historic.map_or(computed * 10.0, |&(_, value)| f64::from(value));
            assert!(
                (f64::from(found) - expected).abs() < 0.5,
                "{series:?} {found}"
            );
        }
    }
}

#[test]
fn a_second_tolerance_is_named() {
    let decoding = decode("104J K", None);
    let best = decoding.best().expect("a reading");
    assert!(
        best.why
            .iter()
            .any(|why| why.starts_with("K: a second tolerance")),
        "{:?}",
        best.why
    );
    let decoding = decode("100n X7R Y5V", None);
    let best = decoding.best().expect("a reading");
    assert!(
        best.why
            .iter()
            .any(|why| why.starts_with("Y5V: another family or characteristic")),
        "{:?}",
        best.why
    );
    let decoding = decode("104J 50V 63V", None);
    let best = decoding.best().expect("a reading");
    assert!(
        best.why
            .iter()
            .any(|why| why.contains("a second rated voltage")),
        "{:?}",
        best.why
    );
}

#[test]
fn the_family_is_that_given_or_found() {
    let family = |marking: &str, given: &str| {
        let decoding = decode(marking, Family::named(given));
        decoding
            .best()
            .and_then(|best| best.family)
            .map(Family::name)
    };
    assert_eq!(family("104K", ""), None);
    assert_eq!(family("104K", "film"), Some("film"));
    assert_eq!(family("MKT 104K", ""), Some("pet"));
    assert_eq!(family("MKT 104K", "film"), Some("pet"));
    assert_eq!(family("104K X7R", ""), Some("ceramic"));
    assert_eq!(family("104K X7R", "mlcc2"), Some("mlcc2"));
}

/// Markings that mean values a thousandfold apart on different parts: none of them is claimed without knowing the part.
#[test]
fn traps_are_not_claimed() {
    for marking in [
        "100", "470", "1000", "2200", "22K", "47K", "100K", "10M", "22M", "4.7", "8.2", "108",
        "228", "158", "R47", "R22", "5R6", "1R0", "4R7", "2200/63", "1M0", "1m0", "3300mF", "10",
        "47", "10 16", "2.2 400V", "22 35", "3.3K", "10K",
    ] {
        let decoding = decode(marking, None);
        let best = decoding.best().map_or(0.0, |best| best.plausibility);
        assert!(best <= 0.5 + 1e-9, "{marking}: {best}");
        assert!(
            decoding.readings.len() > 1,
            "{marking} has a single reading"
        );
    }
}

#[test]
fn odd_characters_are_accounted_for() {
    for plane in 0..17u32 {
        for low in [0x0, 0x41, 0x2000, 0x8000, 0xd000, 0xf000, 0xffff] {
            if let Some(odd) = char::from_u32(plane * 0x1_0000 + low) {
                assert_accounted(&decode(&format!("104{odd}K 50V{odd}"), None));
            }
        }
    }
    for odd in [
        '\u{200f}', '\u{202e}', '\u{2066}', '\0', '\u{1b}', '\u{feff}', '٣', '∆',
    ] {
        let decoding = decode(&format!("{odd}104K{odd}"), None);
        assert_accounted(&decoding);
        assert!(decoding.best().is_some(), "{odd:?}");
    }
}

#[test]
fn what_says_no_value_is_named() {
    for (marking, why) in [
        ("8323", "week 23 of 1983"),
        ("J8", "August 1977"),
        ("2C1", "class 2"),
        ("FME", "-55 °C"),
    ] {
        let decoding = decode(marking, None);
        let without = decoding.without_value.expect("it is said what was seen");
        assert!(
            without.plausibility > 0.5,
            "{marking} {}",
            without.plausibility
        );
        assert!(
            without.why.iter().any(|found| found.contains(why)),
            "{marking}: {:?}",
            without.why
        );
    }
}

#[test]
fn long_texts_are_listed_not_dropped() {
    let marking = format!("104K {}", "x".repeat(10_000));
    let decoding = decode(&marking, None);
    assert_accounted(&decoding);
    assert_eq!(
        decoding
            .best()
            .map(|best| best.capacitance.to_string())
            .as_deref(),
        Some("100 nF")
    );
}

fn visible(text: &str) -> Vec<char> {
    let is_blank = |c: &char| c.is_whitespace() || c.is_control() || *c == '|';
    let mut characters: Vec<char> = text.chars().filter(|c| !is_blank(c)).collect();
    characters.sort_unstable();
    characters
}

/// Checks what holds for any decoding.
#[track_caller]
fn assert_accounted(decoding: &Decoding) {
    let sum: f64 = decoding
        .readings
        .iter()
        .map(|reading| reading.plausibility)
        .sum();
    assert!(
        (0.0..=1.0 + 1e-9).contains(&sum),
        "plausibilities sum to {sum}"
    );
    assert!(decoding.readings.len() <= 50);
    assert!(
        decoding
            .readings
            .is_sorted_by(|a, b| a.plausibility >= b.plausibility)
    );
    let marking = visible(&decoding.marking);
    for reading in &decoding.readings {
        let farads = reading.capacitance.get();
        assert!(farads.is_finite() && farads > 0.0);
        let used = reading.used.iter().map(|used| used.text.as_str());
        let all: String = used
            .chain(reading.unexplained.iter().map(String::as_str))
            .collect();
        assert_eq!(
            visible(&all),
            marking,
            "{:?} in {:?}",
            reading,
            decoding.marking
        );
        assert!(!matches!(reading.tolerance, Some(Tolerance::Absolute(half)) if half.get() <= 0.0));
    }
    if decoding.readings.is_empty() {
        assert_eq!(visible(&decoding.unexplained.concat()), marking);
    }
}

proptest! {
    #[test]
    fn any_text_decodes(text in any::<String>(), family in proptest::option::of(0usize..24)) {
        let family = family.and_then(|n| Family::all().nth(n));
        assert_accounted(&decode(&text, family));
    }

    #[test]
    fn texts_of_the_trade_decode(text in "([0-9.,]{1,5}|[pnuµmRKMJZFVXY]|[0-9]{3}[JKM]|[-+/~%±° |()]|[12][AEHJ]|X2|NP0|MKT|kV){0,14}") {
        assert_accounted(&decode(&text, None));
    }

    #[test]
    fn three_digit_codes_have_their_value(mantissa in 10u32..100, power in 1i32..6) {
        let decoding = decode(&format!("{mantissa}{power}J"), None);
        let expected = f64::from(mantissa) * 10f64.powi(power) / 1e12;
        let close = |farads: f64| (farads / expected - 1.0).abs() < 1e-12;
        prop_assert!(decoding.readings.iter().any(|reading| close(reading.capacitance.get())));
    }
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(48))]

    #[test]
    fn worn_texts_decode(text in "([0-9.?]{1,4}|[nuRKMJZ?]|[12?][AEHJ?]| |red|brown|black){0,8}") {
        assert_accounted(&decode(&text, None));
    }
}

proptest! {
    // Making the texts is what takes time here.
    #![proptest_config(ProptestConfig::with_cases(24))]

    #[test]
    fn long_texts_decode(text in "[ -~µ±°\n]{5000,10000}") {
        assert_accounted(&decode(&text, None));
    }
}
