//! Published tables, row by row, against what the decoder makes of them.

use nulltray::marking::decode;
use nulltray::tables::{Family, Series, TABLES};

#[track_caller]
fn characteristic(marking: &str) -> Option<String> {
    decode(marking, None)
        .best()
        .and_then(|best| best.characteristic.clone())
}

#[track_caller]
fn reason(marking: &str) -> String {
    let decoding = decode(marking, None);
    let best = decoding.best().expect("a reading");
    best.why.join("; ")
}

/// EIA-198 (RS-198), classes II and III: lowest and highest temperature, greatest change.
#[test]
fn class_ii_of_eia_198() {
    let lowest = [('X', "-55"), ('Y', "-30"), ('Z', "+10")];
    let highest = [
        ("2", "+45"),
        ("4", "+65"),
        ("5", "+85"),
        ("6", "+105"),
        ("7", "+125"),
        ("8", "+150"),
        ("9", "+200"),
    ];
    let change = [
        ('A', "±1 %"),
        ('B', "±1.5 %"),
        ('C', "±2.2 %"),
        ('D', "±3.3 %"),
        ('E', "±4.7 %"),
        ('F', "±7.5 %"),
        ('P', "±10 %"),
        ('R', "±15 %"),
        ('S', "±22 %"),
        ('L', "+15/-40 %"),
        ('T', "+22/-33 %"),
        ('U', "+22/-56 %"),
        ('V', "+22/-82 %"),
    ];
    for (low, from) in lowest {
        for (high, to) in highest {
            for (letter, most) in change {
                let code = format!("{low}{high}{letter}");
                let marking = format!("103K {code}");
                assert_eq!(characteristic(&marking), Some(code));
                let why = reason(&marking);
                for part in [from, to, most] {
                    assert!(why.contains(part), "{marking}: {part} in {why}");
                }
            }
        }
    }
}

/// EIA-198 (RS-198), class I: the industry names and the codes of the same coefficient.
#[test]
fn class_i_of_eia_198() {
    for (code, figure, multiplier, tolerance) in [
        ("M7G", "1.0", "+100", "30"),
        ("C0G", "0.0", "-1", "30"),
        ("C0H", "0.0", "-1", "60"),
        ("S1G", "3.3", "-10", "30"),
        ("U1G", "7.5", "-10", "30"),
        ("P2H", "1.5", "-100", "60"),
        ("R2G", "2.2", "-100", "30"),
        ("S2H", "3.3", "-100", "60"),
        ("T2H", "4.7", "-100", "60"),
        ("U2J", "7.5", "-100", "120"),
        ("P3K", "1.5", "-1000", "250"),
        ("R3L", "2.2", "-1000", "500"),
    ] {
        let marking = format!("101J {code}");
        assert_eq!(characteristic(&marking).as_deref(), Some(code));
        let why = reason(&marking);
        for part in [
            format!("{figure} ppm/K"),
            format!("times {multiplier}"),
            format!("±{tolerance} ppm/K"),
        ] {
            assert!(why.contains(&part), "{marking}: {part} in {why}");
        }
    }
}

/// IEC 60384-8: letter pairs, coefficient and its tolerance (figures from memory).
#[test]
fn class_1_of_iec_60384_8() {
    let coefficients = [
        ('A', 100),
        ('C', 0),
        ('H', -33),
        ('L', -75),
        ('P', -150),
        ('R', -220),
        ('S', -330),
        ('T', -470),
        ('U', -750),
    ];
    for (letter, ppm) in coefficients {
        for (tolerance, half) in [('G', 30), ('H', 60), ('J', 120)] {
            let code = format!("{letter}{tolerance}");
            let marking = format!("{code} 101J");
            assert_eq!(characteristic(&marking), Some(code), "{marking}");
            let why = reason(&marking);
            assert!(
                why.contains(&format!("{ppm} ppm/K")) && why.contains(&format!("±{half} ppm/K")),
                "{why}"
            );
        }
    }
}

/// IEC 60062 (BS EN 60062:1994, clause 5.1): twenty letters for the years from 1970 on, without G I O Q Y Z; digits, O, N, D for
/// the months.
#[test]
fn years_and_months_of_iec_60062() {
    let letters = "ABCDEFHJKLMNPRSTUVWX".chars();
    for (year, letter) in (1970..1990).zip(letters) {
        let without = decode(&format!("{letter}8"), None).without_value;
        let why = without
            .map(|without| without.why.join("; "))
            .unwrap_or_default();
        let expected = format!("August {year}, {} or {}", year + 20, year + 40);
        assert!(why.contains(&expected), "{letter}8: {why}");
    }
    let is_short = |mark: &str| mark.len() == 1 && !"IVX".contains(mark);
    let rows = TABLES.date_marks().filter(|row| is_short(&row.mark));
    let months: Vec<u8> = rows.filter_map(|row| row.month).collect();
    assert_eq!(months, [1, 2, 3, 4, 5, 6, 7, 8, 9, 12, 11, 10]);
    for letter in ['G', 'I', 'O', 'Q', 'Y', 'Z'] {
        assert!(
            TABLES
                .date_marks()
                .all(|row| row.year.is_none() || row.mark != letter.to_string())
        );
    }
}

/// IEC 60062:2016/AMD1:2019, Annex B: the capital letters without I and O are E24 in order.
#[test]
fn chip_mantissas_are_e24_in_order() {
    let capitals = TABLES
        .chip_mantissas()
        .filter(|row| row.letter.is_ascii_uppercase());
    let tenths: Vec<u32> = capitals.map(|row| row.tenths).collect();
    let series = TABLES
        .value_series()
        .find(|row| row.series == Series::E24)
        .expect("E24");
    let e24: Vec<u32> = series
        .mantissas
        .iter()
        .map(|&mantissa| u32::from(mantissa) / 10)
        .collect();
    assert_eq!(tenths, e24);
    for (code, expected) in [
        ("S3", "4.7 nF"),
        ("A2", "100 pF"),
        ("E1", "15 pF"),
        ("N5", "330 nF"),
    ] {
        let decoding = decode(code, Family::named("mlcc2"));
        assert_eq!(
            decoding
                .best()
                .map(|best| best.capacitance.to_string())
                .as_deref(),
            Some(expected)
        );
    }
}

/// IEC 60062: the ten colours of the digits, and their powers of ten.
#[test]
fn colours_of_iec_60062() {
    let colours = [
        "black", "brown", "red", "orange", "yellow", "green", "blue", "violet", "grey", "white",
    ];
    for (digit, colour) in colours.iter().enumerate() {
        let says = |column: &str| {
            let row = TABLES
                .colours()
                .find(|row| row.column == column && row.colour == *colour);
            row.map(|row| row.says.clone())
        };
        assert_eq!(says("digit"), Some(digit.to_string()));
        if digit < 8 {
            assert_eq!(says("multiplier"), Some(digit.to_string()));
        }
    }
}

#[test]
fn rows_of_one_table_name_rows_of_others() {
    let ranking = &TABLES.ranking;
    let kinds = TABLES.characteristics().flat_map(|row| &row.kinds);
    let kinds = kinds.chain(
        TABLES
            .characteristic_marks()
            .flat_map(|row| row.kinds.iter().flatten()),
    );
    let kinds = kinds.chain(
        TABLES
            .military_styles()
            .flat_map(|row| row.kinds.iter().flatten()),
    );
    for kind in kinds {
        assert!(ranking.kind_named(kind).is_some(), "no kind `{kind}`");
    }
    for system in TABLES.colour_systems() {
        for (_, column) in system.uses() {
            assert!(
                TABLES.colours().any(|row| row.column == column),
                "{}: no column `{column}`",
                system.name
            );
        }
    }
    for row in TABLES.colours() {
        assert!(
            TABLES.colour_words().any(|word| word.colour == row.colour),
            "no word for {}",
            row.colour
        );
    }
    for style in TABLES.military_styles() {
        assert!(style.at_least <= style.fields.len(), "{}", style.style);
    }
}
