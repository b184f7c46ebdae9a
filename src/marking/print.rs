//! How a part is printed in each system: value, tolerance and voltage in the forms that go together.

use super::marks::{Wanted, same_limits};
use crate::quantity::{Farad, Tolerance};
use crate::tables::{BandUse, ColourSystem, Parts, TABLES};

/// A marking as printed, with the rows of the ranking table that say how usual it is.
pub(super) struct Printed {
    /// The marking.
    pub(super) text: String,
    /// The notation of the value.
    pub(super) notation: &'static str,
    /// The notation of the voltage.
    pub(super) voltage_notation: Option<&'static str>,
    /// The system, where the reason of the notation does not say it.
    pub(super) system: Option<String>,
    /// A factor for rarer forms.
    pub(super) share: f64,
}

/// A capacitance as figures without trailing zeros and a power of ten in picofarad.
#[derive(Clone, Copy)]
pub(super) struct Figures {
    digits: u32,
    power: i32,
}

impl Figures {
    /// Takes a capacitance apart; `None` unless it is a positive number of at most four figures, as values on parts are.
    pub(super) fn of(capacitance: Farad) -> Option<Self> {
        let picofarads = capacitance.picofarads();
        if !(1e-3..1e16).contains(&picofarads) {
            return None;
        }
        let text = format!("{picofarads:.3e}");
        let (mantissa, power) = text.split_once('e')?;
        let mut digits: u32 = mantissa.replace('.', "").parse().ok()?;
        let mut power: i32 = power.parse::<i32>().ok()? - 3;
        while digits > 0 && digits.is_multiple_of(10) {
            digits /= 10;
            power += 1;
        }
        let rounded = f64::from(digits) * 10f64.powi(power);
        ((rounded / picofarads - 1.0).abs() < 1e-6).then_some(Self { digits, power })
    }

    fn n_digits(self) -> i32 {
        self.digits
            .checked_ilog10()
            .map_or(1, |n| i32::try_from(n + 1).unwrap_or(9))
    }

    /// Returns the figures with exactly so many digits, and the power that then belongs to them.
    fn with_digits(self, n: i32) -> Option<(u32, i32)> {
        let more = n - self.n_digits();
        let scale = 10u32.checked_pow(u32::try_from(more).ok()?)?;
        Some((self.digits.checked_mul(scale)?, self.power - more))
    }

    /// Returns the number in a unit of so many powers of ten of the picofarad, without needless zeros: "0.22".
    fn number(self, unit: i32) -> String {
        let text = self.digits.to_string();
        let shift = self.power - unit;
        if shift >= 0 {
            return text + &"0".repeat(usize::try_from(shift).unwrap_or(0));
        }
        let point = i32::try_from(text.len()).unwrap_or(0) + shift;
        if point > 0 {
            let (whole, rest) = text.split_at(usize::try_from(point).unwrap_or(0));
            return format!("{whole}.{rest}");
        }
        format!(
            "0.{}{text}",
            "0".repeat(usize::try_from(-point).unwrap_or(0))
        )
    }

    /// Returns the power of ten of the first figure.
    fn magnitude(self) -> i32 {
        self.power + self.n_digits() - 1
    }
}

const NANO: i32 = 3;
const MICRO: i32 = 6;

/// Prints a part in every system that can.
pub(super) fn all(wanted: &Wanted, figures: Figures) -> Vec<Printed> {
    let mut found = Vec::with_capacity(24);
    let tolerance = Suffix::of(wanted);
    for (value, notation) in codes(figures) {
        coded(&value, notation, &tolerance, wanted, &mut found);
    }
    for (value, notation) in numbers(figures) {
        touching(&value, notation, &tolerance, wanted, &mut found);
    }
    for (unit, word, notation) in units(figures) {
        let mut text = format!("{} {word}", figures.number(unit));
        if let Some(limits) = wanted.tolerance {
            text = format!("{text} {limits}");
        }
        if let Some(volts) = wanted.voltage {
            text = format!("{text} {}V", volts.get());
        }
        push(
            &mut found,
            text,
            notation,
            wanted.voltage.map(|_| "voltage_word"),
            1.0,
        );
    }
    if let (Some(value), None, None) = (chip(figures), wanted.tolerance, wanted.voltage) {
        push(&mut found, value, "chip_code", None, 1.0);
    }
    found.extend(
        TABLES
            .colour_systems()
            .filter_map(|system| colours(system, wanted, figures)),
    );
    found
}

fn push(
    found: &mut Vec<Printed>,
    text: String,
    notation: &'static str,
    voltage_notation: Option<&'static str>,
    share: f64,
) {
    found.push(Printed {
        text,
        notation,
        voltage_notation,
        system: None,
        share,
    });
}

/// The tolerance behind a value.
enum Suffix {
    /// No tolerance is wanted.
    Nothing,
    /// A letter.
    Letter(char),
    /// There is no letter for it.
    Words(Tolerance),
}

impl Suffix {
    fn of(wanted: &Wanted) -> Self {
        let Some(limits) = wanted.tolerance else {
            return Self::Nothing;
        };
        let nominal = wanted.capacitance;
        let is_small = nominal.picofarads() < 10.0;
        let says = |row: &&crate::tables::ToleranceLetter| {
            let meant = row.below_ten_picofarads.filter(|_| is_small).or(row.limits);
            row.letter.is_ascii_uppercase() && same_limits(meant, Some(limits), nominal)
        };
        let letters = TABLES.tolerance_letters().filter(says);
        let best = letters.max_by(|a, b| a.share.usual.total_cmp(&b.share.usual));
        best.map_or(Self::Words(limits), |row| Self::Letter(row.letter))
    }

    fn behind(&self, value: &str) -> String {
        match self {
            Self::Nothing => value.to_owned(),
            Self::Letter(letter) => format!("{value}{letter}"),
            Self::Words(limits) => format!("{value} {limits}"),
        }
    }
}

/// Codes of three and four digits.
fn codes(figures: Figures) -> Vec<(String, &'static str)> {
    let mut found = Vec::new();
    if let Some((digits, power)) = figures.with_digits(2) {
        for row in TABLES
            .multipliers()
            .filter(|row| i32::from(row.exponent) == power)
        {
            let notation = match row.on {
                Parts::Any => "code3",
                Parts::NonPolar => "code3_small",
                Parts::Polar => "code3_polar",
            };
            found.push((format!("{digits}{}", row.digit), notation));
        }
    }
    if let Some((digits, power)) = figures.with_digits(3)
        && (0..=7).contains(&power)
        && figures.n_digits() == 3
    {
        found.push((format!("{digits}{power}"), "code4"));
    }
    found
}

/// Numbers without a unit, and with a letter for the point.
fn numbers(figures: Figures) -> Vec<(String, &'static str)> {
    let mut found = Vec::new();
    let magnitude = figures.magnitude();
    let pico = figures.number(0);
    if figures.power >= 0 {
        match magnitude {
            0 | 1 => found.push((pico, "plain_pico_short")),
            2 => found.push((pico, "plain_pico_3")),
            3 => found.push((pico, "plain_pico_4")),
            4 => found.push((pico, "plain_pico_5")),
            _ => {}
        }
    } else if magnitude == 0 {
        found.push((pico, "decimal_one_pico"));
    }
    let micro = figures.number(MICRO);
    match magnitude - MICRO {
        -5..=-1 => found.push((
            micro.trim_start_matches('0').to_owned(),
            "decimal_small_micro",
        )),
        0 if figures.power < MICRO => found.push((micro, "decimal_one_micro")),
        0 | 1 if figures.power >= MICRO => found.push((micro, "plain_micro_short")),
        2 => found.push((micro, "plain_micro_3")),
        3 => found.push((micro, "plain_micro_4")),
        _ => {}
    }
    let letters = [
        ('p', 0, "letter_pico"),
        ('n', NANO, "letter_nano"),
        ('µ', MICRO, "letter_micro"),
        ('K', NANO, "kilo_point"),
        ('R', 0, "point_pico"),
        ('R', MICRO, "point_micro"),
    ];
    for (letter, unit, notation) in letters {
        let is_between = figures.power < unit && magnitude >= unit;
        let only_between = matches!(letter, 'K') || notation == "point_pico";
        let fits = (unit - 1..unit + 3).contains(&magnitude) && figures.n_digits() <= 3;
        if fits
            && (is_between || !only_between)
            && (is_between || letter != 'R' || magnitude < unit)
        {
            found.push((pointed(figures, unit, letter), notation));
        }
    }
    found
}

/// Returns the figures with a letter for the point: "4n7", "n47", "47n".
fn pointed(figures: Figures, unit: i32, letter: char) -> String {
    let number = figures.number(unit);
    match number.split_once('.') {
        Some(("0", rest)) => format!("{letter}{rest}"),
        Some((whole, rest)) => format!("{whole}{letter}{rest}"),
        None => format!("{number}{letter}"),
    }
}

/// Numbers with a unit.
fn units(figures: Figures) -> Vec<(i32, &'static str, &'static str)> {
    match figures.magnitude() {
        ..3 => vec![(0, "pF", "unit_pico")],
        3..5 => vec![
            (NANO, "nF", "unit_nano"),
            (0, "pF", "unit_pico"),
            (MICRO, "µF", "unit_micro"),
        ],
        5 => vec![(NANO, "nF", "unit_nano"), (MICRO, "µF", "unit_micro")],
        6..10 => vec![(MICRO, "µF", "unit_micro"), (MICRO, "MFD", "unit_micro")],
        _ => vec![(12, "F", "unit_farad"), (MICRO, "µF", "unit_micro")],
    }
}

/// The letter and digit of chip ceramic parts.
fn chip(figures: Figures) -> Option<String> {
    let (digits, power) = figures.with_digits(2)?;
    let row = TABLES.chip_mantissas().find(|row| row.tenths == digits)?;
    let exponent = power + 1;
    (0..=7)
        .contains(&exponent)
        .then(|| format!("{}{exponent}", row.letter))
}

/// A code with its tolerance, and the voltage in the forms that go with codes.
fn coded(
    value: &str,
    notation: &'static str,
    tolerance: &Suffix,
    wanted: &Wanted,
    found: &mut Vec<Printed>,
) {
    let Some(volts) = wanted.voltage.map(crate::quantity::Volt::get) else {
        push(found, tolerance.behind(value), notation, None, 1.0);
        return;
    };
    touching(value, notation, tolerance, wanted, found);
    let is_it = |code: &crate::tables::VoltageCode, digit: u8| {
        (code.voltage(digit).get() / volts - 1.0).abs() < 1e-6
    };
    for code in TABLES.voltage_codes() {
        if let Some(digit) = code.digits.iter().find(|&&digit| is_it(code, digit)) {
            let text = format!("{digit}{}{}", code.letter, tolerance.behind(value));
            push(found, text, notation, Some("voltage_code"), 1.0);
        }
    }
    for row in TABLES.voltage_letters() {
        let is_it = (row.volts.get() / volts - 1.0).abs() < 1e-6;
        if is_it && wanted.tolerance.is_none() && row.letter.is_ascii_uppercase() {
            let share = row.share.usual;
            push(
                found,
                format!("{}{value}", row.letter),
                notation,
                Some("voltage_letter"),
                share,
            );
            push(
                found,
                format!("{value}{}", row.letter),
                notation,
                Some("voltage_letter"),
                share,
            );
        }
    }
}

/// A value with its tolerance and the voltage right behind it, or apart where no letter stands between.
fn touching(
    value: &str,
    notation: &'static str,
    tolerance: &Suffix,
    wanted: &Wanted,
    found: &mut Vec<Printed>,
) {
    let text = tolerance.behind(value);
    // F behind p is the unit, whatever was meant.
    let is_unit = |row: &crate::tables::UnitWord| row.word.len() > 1 && text.ends_with(&row.word);
    if TABLES.unit_words().any(is_unit) {
        return;
    }
    match (wanted.voltage.map(crate::quantity::Volt::get), tolerance) {
        (None, _) => push(found, text, notation, None, 1.0),
        (Some(volts), Suffix::Letter(_)) => {
            push(
                found,
                format!("{text}{volts}"),
                notation,
                Some("voltage_bare"),
                1.0,
            );
            push(
                found,
                format!("{text}{volts}V"),
                notation,
                Some("voltage_word"),
                0.5,
            );
        }
        (Some(volts), _) => {
            push(
                found,
                format!("{text} {volts}V"),
                notation,
                Some("voltage_word"),
                1.0,
            );
            push(
                found,
                format!("{text}/{volts}"),
                notation,
                Some("voltage_bare"),
                0.3,
            );
        }
    }
}

/// The colours of a part in one order of bands; `None` where a band has no colour for it.
fn colours(system: &ColourSystem, wanted: &Wanted, figures: Figures) -> Option<Printed> {
    let family = system.family()?;
    let fits = wanted
        .family
        .is_none_or(|wanted| wanted.is_one_of(family) || family.is_one_of(wanted));
    let uses: Vec<(BandUse, &str)> = system.uses().collect();
    let has = |band: BandUse| uses.iter().any(|one| one.0 == band);
    let n_digits = uses.iter().filter(|one| one.0 == BandUse::Digit).count();
    let says_all = has(BandUse::Tolerance) == wanted.tolerance.is_some()
        && has(BandUse::Voltage) == wanted.voltage.is_some()
        && !has(BandUse::Coefficient);
    if !fits || !says_all {
        return None;
    }
    let (digits, power) = figures.with_digits(i32::try_from(n_digits).ok()?)?;
    let mut digits = digits
        .to_string()
        .chars()
        .map(|c| c.to_string())
        .collect::<Vec<_>>()
        .into_iter();
    let exponent = power - 12 - i32::from(system.exponent);
    let mut words = Vec::with_capacity(uses.len());
    for (band, column) in uses {
        let rows = || TABLES.colours().filter(|row| row.column == column);
        let named = |says: &str| rows().find(|row| row.says == says);
        let row = match band {
            BandUse::Digit => named(&digits.next()?),
            BandUse::Multiplier => named(&exponent.to_string()),
            BandUse::Tolerance => rows().find(|row| {
                let is_small = wanted.capacitance.picofarads() < 10.0;
                let says = row.small.as_ref().filter(|_| is_small).unwrap_or(&row.says);
                same_limits(
                    Tolerance::parse(says).ok(),
                    wanted.tolerance,
                    wanted.capacitance,
                )
            }),
            BandUse::Voltage => named(&wanted.voltage?.get().to_string()),
            BandUse::Coefficient | BandUse::Type | BandUse::Characteristic => rows().next(),
        };
        words.push(row?.colour.clone());
    }
    Some(Printed {
        text: words.join(" "),
        notation: "colour",
        voltage_notation: wanted.voltage.map(|_| "voltage_word"),
        system: Some(system.name.clone()),
        share: system.share,
    })
}
