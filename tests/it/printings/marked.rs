//! Printers of parts that say what they are: polar, ceramic, military, suppression, coloured.

use super::{Bare, E6, E12, Printed, SI, System, part, pico, plain, pointed, system, values};

const LETTERS: [(char, u32); 12] = [
    ('A', 10),
    ('C', 12),
    ('E', 15),
    ('G', 18),
    ('J', 22),
    ('L', 27),
    ('N', 33),
    ('Q', 39),
    ('S', 47),
    ('U', 56),
    ('W', 68),
    ('Y', 82),
];

const COLOURS: [&str; 10] = [
    "black", "brown", "red", "orange", "yellow", "green", "blue", "violet", "grey", "white",
];

pub(super) fn polar() -> Vec<System> {
    let cans = values(&E6, 5..9).enumerate().map(|(n, (mantissa, power))| {
        let volts = [6.3, 16.0, 25.0, 35.0, 50.0, 63.0][n % 6];
        let value = pico(mantissa, power);
        part(format!("{}µF {volts}V", plain(value / 1e6)), value).rated(volts)
    });
    let literal = values(&E6, 6..9).enumerate().map(|(n, (mantissa, power))| {
        let volts = [10.0, 16.0, 25.0, 35.0, 50.0][n % 5];
        let value = pico(mantissa, power);
        part(format!("{} {volts}V", plain(value / 1e6)), value)
            .rated(volts)
            .of("al")
    });
    let letters = [
        ("G", 4.0),
        ("J", 6.3),
        ("A", 10.0),
        ("C", 16.0),
        ("D", 20.0),
        ("E", 25.0),
        ("V", 35.0),
    ];
    let brick = values(&E6, 4..8).enumerate().map(|(n, (mantissa, power))| {
        let (letter, volts) = letters[n % letters.len()];
        let text = match n % 2 {
            0 => format!("{letter}{mantissa}{power}"),
            _ => format!("{mantissa}{power}{letter}"),
        };
        part(text, pico(mantissa, power)).rated(volts).of("ta")
    });
    let code = values(&E6, 5..8).enumerate().map(|(n, (mantissa, power))| {
        let volts = [4.0, 6.3, 10.0, 16.0, 25.0][n % 5];
        part(format!("{mantissa}{power} {volts}"), pico(mantissa, power))
            .rated(volts)
            .of("ta")
    });
    vec![
        system("can with µF and V", Bare::No, cans.collect()),
        system("can with a plain number and V", Bare::No, literal.collect()),
        system("tantalum brick, voltage letter", Bare::No, brick.collect()),
        system("tantalum brick, volts on a line", Bare::No, code.collect()),
    ]
}

pub(super) fn ceramics() -> Vec<System> {
    let classes = ["X7R", "Y5V", "Z5U", "Y5P", "X5R", "2R1", "2E4"];
    let class2 = values(&E6, 1..4).enumerate().map(|(n, (mantissa, power))| {
        let (letter, minus, plus) = [("K", 0.1, 0.1), ("M", 0.2, 0.2), ("Z", 0.2, 0.8)][n % 3];
        let text = format!("{mantissa}{power}{letter} {}", classes[n % classes.len()]);
        Printed {
            tolerance: Some((minus, plus)),
            ..part(text, pico(mantissa, power))
        }
    });
    let class1 = ["NP0", "C0G", "N150", "N750", "U2J", "P2H"];
    let class1 = values(&E12, 1..2)
        .enumerate()
        .map(|(n, (mantissa, power))| {
            let text = format!("{} {mantissa}{power}J", class1[n % class1.len()]);
            part(text, pico(mantissa, power)).within(5.0)
        });
    let jis = values(&E6, 1..4).enumerate().map(|(n, (mantissa, power))| {
        let (lead, letter, minus, plus) = [
            ("B", "K", 0.1, 0.1),
            ("F", "Z", 0.2, 0.8),
            ("SL", "J", 0.05, 0.05),
        ][n % 3];
        Printed {
            tolerance: Some((minus, plus)),
            ..part(
                format!("{lead} {mantissa}{power}{letter}"),
                pico(mantissa, power),
            )
        }
    });
    let high = values(&E6, 1..3).enumerate().map(|(n, (mantissa, power))| {
        let (text, volts) = [("1KV", 1e3), ("2KV", 2e3), ("3kV", 3e3)][n % 3];
        part(format!("{mantissa}{power}K{text}"), pico(mantissa, power))
            .within(10.0)
            .rated(volts)
    });
    let chip = (0..5).flat_map(|power| {
        LETTERS.iter().map(move |&(letter, tenths)| {
            part(format!("{letter}{power}"), pico(tenths, power) / 10.0).of(if power < 3 {
                "mlcc1"
            } else {
                "mlcc2"
            })
        })
    });
    let british = values(&E12, 0..2)
        .enumerate()
        .map(|(n, (mantissa, power))| {
            let (letters, percent) = [("JN", 5.0), ("KC", 10.0), ("GG", 2.0)][n % 3];
            let value = pico(mantissa, power);
            part(format!("{value}{letters}"), value).within(percent)
        });
    vec![
        system("ceramic, class II or 2 code", Bare::No, class2.collect()),
        system("ceramic, class I code first", Bare::No, class1.collect()),
        system("ceramic, letters before the value", Bare::No, jis.collect()),
        system("ceramic, kilovolt", Bare::No, high.collect()),
        system("chip ceramic, letter and digit", Bare::Yes, chip.collect()),
        system("old British letters", Bare::No, british.collect()),
    ]
}

pub(super) fn others() -> Vec<System> {
    let military = values(&E12, 1..5)
        .enumerate()
        .map(|(n, (mantissa, power))| {
            let text = match n % 3 {
                0 => format!("CK06BX{mantissa}{power}K"),
                1 => format!("CKR05BX{mantissa}{power}KS"),
                _ => format!("CCR05CG{mantissa}{power}JM"),
            };
            let value = pico(mantissa, power);
            let part = part(text, value).within(if n % 3 == 2 { 5.0 } else { 10.0 });
            // CK05: 200, 100 and 50 V up to 1, 10 and 100 nF; CK06 the same a decade higher (from memory).
            let decade = |first: f64| match value {
                v if v <= first * 1.000_001 => Some(200.0),
                v if v <= first * 10.000_001 => Some(100.0),
                v if v <= first * 100.000_001 => Some(50.0),
                _ => None,
            };
            Printed {
                volts: match n % 3 {
                    0 => decade(1e4),
                    1 => decade(1e3),
                    _ => None,
                },
                ..part
            }
        });
    let suppression = values(&E6, 3..5).enumerate().map(|(n, (mantissa, power))| {
        let value = pico(mantissa, power);
        let (class, volts) = [("X2", 275.0), ("X1", 440.0), ("Y2", 250.0)][n % 3];
        let text = format!("{}µF K {class} {volts}V~", plain(value / 1e6));
        part(text, value).within(10.0).rated(volts)
    });
    let colour = |n: u32| {
        usize::try_from(n)
            .ok()
            .and_then(|n| COLOURS.get(n))
            .copied()
            .unwrap_or("?")
    };
    let bands = values(&E12, 3..5)
        .enumerate()
        .map(|(n, (mantissa, power))| {
            let (tolerance, percent) = [("white", 10.0), ("black", 20.0), ("green", 5.0)][n % 3];
            let (voltage, volts) = [("red", 250.0), ("yellow", 400.0), ("blue", 630.0)][n % 3];
            let multiplier = colour(power.unsigned_abs());
            let text = format!(
                "{} {} {multiplier} {tolerance} {voltage}",
                colour(mantissa / 10),
                colour(mantissa % 10)
            );
            part(text, pico(mantissa, power))
                .within(percent)
                .rated(volts)
        });
    let bead = values(&E6, 4..7).enumerate().map(|(n, (mantissa, power))| {
        let spot = ["grey", "white", "black"][usize::try_from(power - 4).unwrap_or(0)];
        let (voltage, volts) = [
            ("green", 16.0),
            ("grey", 25.0),
            ("black", 10.0),
            ("pink", 35.0),
        ][n % 4];
        let text = format!(
            "{} {} spot {spot} {voltage}",
            colour(mantissa / 10),
            colour(mantissa % 10)
        );
        part(text, pico(mantissa, power)).rated(volts).of("ta")
    });
    let mica = values(&E12, 1..3)
        .enumerate()
        .map(|(n, (mantissa, power))| {
            let (tolerance, percent) = [("red", 2.0), ("green", 5.0), ("silver", 10.0)][n % 3];
            let multiplier = colour(power.unsigned_abs());
            let text = format!(
                "black {} {} red {tolerance} {multiplier}",
                colour(mantissa / 10),
                colour(mantissa % 10)
            );
            part(text, pico(mantissa, power)).within(percent).of("mica")
        });
    let film = values(&E12, 2..5)
        .enumerate()
        .filter_map(|(n, (mantissa, power))| {
            let word = ["MKT", "MKP", "CBB22", "CL21", "K73-17"][n % 5];
            let text = pointed(mantissa, power, &SI)?;
            Some(part(format!("{word} {text} 250V"), pico(mantissa, power)).rated(250.0))
        });
    vec![
        system("military part number", Bare::No, military.collect()),
        system("interference suppression", Bare::No, suppression.collect()),
        system("polyester, five bands", Bare::No, bands.collect()),
        system("tantalum bead, colours", Bare::No, bead.collect()),
        system("moulded mica, six dots", Bare::No, mica.collect()),
        system("family word, value, volts", Bare::No, film.collect()),
    ]
}
