//! Printers of figures, letters and unit words.

use super::{Bare, E6, E12, Printed, SI, System, part, pico, plain, pointed, system, values};

/// Letters of the voltage code, with the voltage of the digit 1 (JIS C 5101-1 practice).
const CODES: [(&str, f64); 9] = [
    ("1A", 10.0),
    ("1C", 16.0),
    ("1E", 25.0),
    ("1H", 50.0),
    ("1J", 63.0),
    ("2A", 100.0),
    ("2D", 200.0),
    ("2E", 250.0),
    ("2G", 400.0),
];

pub(super) fn numeric() -> Vec<System> {
    let code = |mantissa: u32, power: i32| format!("{mantissa}{power}");
    let letters = [("J", 5.0), ("K", 10.0), ("M", 20.0)];
    let mut with = Vec::new();
    let mut film = Vec::new();
    let mut coded = Vec::new();
    let mut bare = Vec::new();
    for (n, (mantissa, power)) in values(&E12, 1..6).enumerate() {
        let (letter, percent) = letters[n % 3];
        let value = pico(mantissa, power);
        with.push(part(format!("{}{letter}", code(mantissa, power)), value).within(percent));
        bare.push(part(code(mantissa, power), value));
        if (2..5).contains(&power) {
            let (letter, percent) = letters[n % 2];
            let volts = [63.0, 100.0, 250.0, 400.0, 630.0][n % 5];
            let text = format!("{}{letter}{volts}", code(mantissa, power));
            film.push(part(text, value).within(percent).rated(volts));
        }
        let (voltage, volts) = CODES[n % CODES.len()];
        let text = format!("{voltage}{}{letter}", code(mantissa, power));
        coded.push(part(text, value).within(percent).rated(volts));
    }
    let small: Vec<Printed> = values(&E12, -1..0)
        .enumerate()
        .map(|(n, (mantissa, power))| {
            let (letter, half) = [("C", 0.25), ("D", 0.5)][n % 2];
            let value = pico(mantissa, power);
            let part = part(
                format!("{}R{}{letter}", mantissa / 10, mantissa % 10),
                value,
            );
            let share = half / value;
            Printed {
                tolerance: Some((share, share)),
                ..part
            }
        })
        .collect();
    let two_digits =
        values(&E12, 0..1).map(|(mantissa, _)| part(mantissa.to_string(), f64::from(mantissa)));
    let small_zero = values(&E12, 0..1)
        .map(|(mantissa, _)| part(format!("{mantissa}0J NP0"), f64::from(mantissa)).within(5.0));
    vec![
        system("three digits and a tolerance", Bare::No, with),
        system("three digits, tolerance, volts", Bare::No, film),
        system("voltage code, three digits, tolerance", Bare::No, coded),
        system("three digits", Bare::Yes, bare),
        system("below 10 pF with R and a tolerance", Bare::No, small),
        system("plain pF of two digits", Bare::Yes, two_digits.collect()),
        system(
            "three digits ending in 0 with NP0",
            Bare::No,
            small_zero.collect(),
        ),
    ]
}

pub(super) fn point_letters() -> Vec<System> {
    let mut with = Vec::new();
    let mut bare = Vec::new();
    let mut volts_too = Vec::new();
    for (n, (mantissa, power)) in values(&E12, -1..6).enumerate() {
        let Some(text) = pointed(mantissa, power, &SI) else {
            continue;
        };
        let value = pico(mantissa, power);
        bare.push(part(text.clone(), value));
        if power >= 0 {
            let (letter, percent) = [("J", 5.0), ("K", 10.0), ("M", 20.0)][n % 3];
            with.push(part(format!("{text}{letter}"), value).within(percent));
            let volts = [63.0, 100.0, 250.0, 400.0][n % 4];
            if power >= 2 {
                let text = format!("{text}{letter}{volts}");
                volts_too.push(part(text, value).within(percent).rated(volts));
            }
        }
    }
    let cyrillic = values(&E12, 0..6).filter_map(|(mantissa, power)| {
        let text = pointed(mantissa, power, &[("п", 0), ("н", 3), ("м", 6)])?;
        Some(part(text, pico(mantissa, power)))
    });
    let kilo = values(&E12, 2..3)
        .filter(|(mantissa, _)| mantissa % 10 > 0)
        .map(|(mantissa, power)| {
            part(
                format!("{}K{}", mantissa / 10, mantissa % 10),
                pico(mantissa, power),
            )
        });
    vec![
        system("letter for the point and a tolerance", Bare::No, with),
        system("letter for the point", Bare::No, bare),
        system(
            "letter for the point, tolerance, volts",
            Bare::No,
            volts_too,
        ),
        system(
            "Cyrillic letter for the point",
            Bare::No,
            cyrillic.collect(),
        ),
        system("K for the point", Bare::No, kilo.collect()),
    ]
}

pub(super) fn words() -> Vec<System> {
    let mut modern = Vec::new();
    let mut old = Vec::new();
    for (n, (mantissa, power)) in values(&E6, 0..8).enumerate() {
        let value = pico(mantissa, power);
        let (number, unit) = match power {
            ..2 => (value, "pF"),
            2..5 => (value / 1e3, "nF"),
            _ => (value / 1e6, "µF"),
        };
        let volts = [25.0, 63.0, 100.0][n % 3];
        modern.push(part(format!("{} {unit} {volts}V", plain(number)), value).rated(volts));
        let (number, unit) = if power < 2 {
            (value, ["MMF", "mmfd", "µµF"][n % 3])
        } else {
            (value / 1e6, ["MFD", "mfd", "uF"][n % 3])
        };
        let text = format!("{} {unit}", plain(number));
        old.push(part(text.trim_start_matches('0').to_owned(), value));
    }
    let decimals = values(&E6, 2..5).enumerate().map(|(n, (mantissa, power))| {
        let value = pico(mantissa, power);
        let number = plain(value / 1e6);
        let volts = [100.0, 250.0, 400.0, 630.0][n % 4];
        let (letter, percent) = [("J", 5.0), ("K", 10.0)][n % 2];
        let text = match n % 3 {
            0 => format!("{number}/{volts}"),
            1 => format!("{} {letter} {volts}", number.trim_start_matches('0')),
            _ => format!("{}{letter}{volts}", number.trim_start_matches('0')),
        };
        let part = part(text, value).rated(volts);
        if n % 3 == 0 {
            part
        } else {
            part.within(percent)
        }
    });
    let bare = values(&E6, 2..5).map(|(mantissa, power)| {
        let value = pico(mantissa, power);
        part(plain(value / 1e6).trim_start_matches('0').to_owned(), value)
    });
    vec![
        system("number, unit, volts", Bare::No, modern),
        system("number and an old unit", Bare::No, old),
        system("decimal µF, volts", Bare::No, decimals.collect()),
        system("decimal µF", Bare::Yes, bare.collect()),
    ]
}
