//! Printers of older and odder parts: plain picofarads, precision codes, sections, dates and lots beside the value.

use super::{Bare, E6, E12, Printed, SI, System, part, pico, plain, pointed, system, values};

/// Some mantissas of E96 that are in no coarser series (IEC 60063:2015).
const E96: [u32; 12] = [102, 124, 158, 205, 267, 309, 357, 432, 523, 634, 787, 931];

pub(super) fn systems() -> Vec<System> {
    let precise = (1..3).flat_map(|power| {
        E96.iter().map(move |&mantissa| {
            let text = format!("{mantissa}{power}F");
            part(text, pico(mantissa, power)).within(1.0)
        })
    });
    let literal = values(&E12, 1..2)
        .enumerate()
        .map(|(n, (mantissa, power))| {
            let (letter, percent) = [("J", 5.0), ("G", 2.0)][n % 2];
            let value = pico(mantissa, power);
            let family = ["ps", "mica"][n % 2];
            part(format!("{value}{letter}"), value)
                .within(percent)
                .of(family)
        });
    let four = values(&E12, 2..3)
        .enumerate()
        .map(|(n, (mantissa, power))| {
            let volts = [63.0, 125.0, 160.0, 500.0][n % 4];
            let value = pico(mantissa, power);
            part(format!("{value}/{volts}"), value)
                .rated(volts)
                .of("ps")
        });
    let five = values(&E6, 3..4).map(|(mantissa, power)| {
        let value = pico(mantissa, power);
        part(format!("{value} 5% 400V"), value)
            .within(5.0)
            .rated(400.0)
    });
    let sections = values(&E6, 5..7).enumerate().map(|(n, (mantissa, power))| {
        let value = pico(mantissa, power);
        let number = plain(value / 1e6);
        let text = match n % 3 {
            0 => format!("{number}+{number} µF 350V"),
            1 => format!("2x{number}µF 350V"),
            _ => format!("{number}+{number} 350V"),
        };
        part(text, value).rated(350.0).of("al")
    });
    let small = values(&E12, -1..0).map(|(mantissa, power)| {
        let value = pico(mantissa, power);
        Printed {
            tolerance: Some((0.5 / value, 0.5 / value)),
            ..part(format!("{}D", plain(value)), value).of("disc1")
        }
    });
    let kilo = values(&E6, 3..5).map(|(mantissa, power)| {
        let value = pico(mantissa, power);
        part(format!("{} kpF 160V", plain(value / 1e3)), value).rated(160.0)
    });
    let soviet = values(&E12, 2..5)
        .enumerate()
        .filter_map(|(n, (mantissa, power))| {
            let (letter, percent) = [("И", 5.0), ("С", 10.0), ("В", 20.0)][n % 3];
            let text = pointed(mantissa, power, &[("п", 0), ("н", 3), ("м", 6)])?;
            Some(part(format!("{text}{letter}"), pico(mantissa, power)).within(percent))
        });
    vec![
        system("four digits of 1 %", Bare::No, precise.collect()),
        system(
            "plain pF and a tolerance, mica or ps",
            Bare::No,
            literal.collect(),
        ),
        system(
            "plain pF of four digits, volts, ps",
            Bare::No,
            four.collect(),
        ),
        system(
            "plain pF of five digits, percent, volts",
            Bare::No,
            five.collect(),
        ),
        system("sections of a can", Bare::No, sections.collect()),
        system(
            "decimal pF and a tolerance, disc",
            Bare::No,
            small.collect(),
        ),
        system("kpF and volts", Bare::No, kilo.collect()),
        system("Cyrillic value and tolerance", Bare::No, soviet.collect()),
    ]
}

/// Values alone.
pub(super) fn bare() -> Vec<System> {
    let bare_literal = values(&E12, 1..2).map(|(mantissa, power)| {
        let value = pico(mantissa, power);
        part(value.to_string(), value)
    });
    let bare_four = values(&E12, 2..3).map(|(mantissa, power)| {
        let value = pico(mantissa, power);
        part(value.to_string(), value)
    });
    let bare_can = values(&E6, 6..9).map(|(mantissa, power)| {
        let value = pico(mantissa, power);
        part(plain(value / 1e6), value)
    });
    let bare_decimal = values(&E12, -1..0).map(|(mantissa, power)| {
        let value = pico(mantissa, power);
        part(plain(value), value)
    });
    let bare_micro = values(&E12, 5..6)
        .filter(|(mantissa, _)| mantissa % 10 > 0)
        .map(|(mantissa, power)| {
            let value = pico(mantissa, power);
            part(plain(value / 1e6), value)
        });
    let bare_polar8 = E6
        .iter()
        .map(|&mantissa| part(format!("{mantissa}8"), pico(mantissa, 8)));
    vec![
        system(
            "plain pF of three digits",
            Bare::Yes,
            bare_literal.collect(),
        ),
        system("plain pF of four digits", Bare::Yes, bare_four.collect()),
        system("plain µF", Bare::Yes, bare_can.collect()),
        system("decimal pF", Bare::Yes, bare_decimal.collect()),
        system("decimal µF from 1 up", Bare::Yes, bare_micro.collect()),
        system("polar code ending in 8", Bare::Yes, bare_polar8.collect()),
    ]
}

/// Values with a date or a lot beside them.
pub(super) fn beside() -> Vec<System> {
    let dated = values(&E12, 3..5)
        .enumerate()
        .map(|(n, (mantissa, power))| {
            let date = ["J8", "8323", "SD", "9812"][n % 4];
            part(
                format!("{mantissa}{power}J 100V {date}"),
                pico(mantissa, power),
            )
            .within(5.0)
            .rated(100.0)
        });
    let lots = values(&E12, 3..5)
        .enumerate()
        .filter_map(|(n, (mantissa, power))| {
            let lot = ["3046712", "HX27Q4", "LOT 7731205", "EN132400"][n % 4];
            let text = pointed(mantissa, power, &SI)?;
            Some(
                part(format!("{lot} {text}K 250V"), pico(mantissa, power))
                    .within(10.0)
                    .rated(250.0),
            )
        });
    vec![
        system("value, volts and a date", Bare::No, dated.collect()),
        system("value, volts and a lot", Bare::No, lots.collect()),
    ]
}
