//! Engineering notation: a mantissa from 1 to 1000, an SI prefix, the unit. Rounding comes first, the prefix after it,
//! so that 999.6 nF is 1 µF and never 1000 nF.

/// An SI prefix of the contract.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Prefix {
    /// The symbol printed; empty for none.
    pub symbol: &'static str,
    /// The power of ten.
    pub exponent: i32,
}

/// The prefixes, for printing and reading alike, smallest first.
pub(super) const PREFIXES: [Prefix; 8] = [
    Prefix {
        symbol: "p",
        exponent: -12,
    },
    Prefix {
        symbol: "n",
        exponent: -9,
    },
    Prefix {
        symbol: "µ",
        exponent: -6,
    },
    Prefix {
        symbol: "m",
        exponent: -3,
    },
    Prefix {
        symbol: "",
        exponent: 0,
    },
    Prefix {
        symbol: "k",
        exponent: 3,
    },
    Prefix {
        symbol: "M",
        exponent: 6,
    },
    Prefix {
        symbol: "G",
        exponent: 9,
    },
];

/// Returns the power of ten of a prefix letter; `u` and both code points of µ mean micro.
pub(super) fn exponent_of(letter: char) -> Option<i32> {
    let printed = if matches!(letter, 'u' | 'μ') {
        'µ'
    } else {
        letter
    };
    PREFIXES
        .iter()
        .find(|p| p.symbol.chars().eq([printed]))
        .map(|p| p.exponent)
}

/// How finely a value is printed.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Resolution {
    /// Three significant digits, trailing zeros dropped: for nominal values.
    Nominal,
    /// So many significant digits, trailing zeros dropped.
    Digits(usize),
    /// To the second significant digit of this standard uncertainty, in the base unit; trailing zeros kept.
    Uncertainty(f64),
}

/// Returns the value in engineering notation with its unit: "4.7 µF", "217.4 nF".
///
/// Rounds half to even on the exact binary value. Infinite values and NaN print as words; they do not occur past the
/// boundary of the program.
pub fn engineering(value: f64, resolution: Resolution, unit: &str) -> String {
    written(value, resolution, None, unit)
}

/// Returns the value like [`engineering`], but with the prefix given: "0.22 µF", "220000 pF".
pub fn engineering_in(value: f64, resolution: Resolution, prefix: Prefix, unit: &str) -> String {
    written(value, resolution, Some(prefix), unit)
}

impl Prefix {
    /// Returns the prefix with this symbol, if it is one of the contract's.
    pub fn named(symbol: &str) -> Option<Self> {
        PREFIXES.into_iter().find(|p| p.symbol == symbol)
    }

    /// Returns the prefix that gives the value a mantissa from 1 to 1000 once it is rounded.
    pub fn fitting(value: f64, resolution: Resolution) -> Self {
        Decimal::of(value, resolution).map_or(PREFIXES[4], |(decimal, _)| decimal.prefix())
    }
}

fn written(value: f64, resolution: Resolution, prefix: Option<Prefix>, unit: &str) -> String {
    let Some((decimal, zeros)) = Decimal::of(value, resolution) else {
        let word = if value.is_nan() {
            "no number"
        } else {
            "infinite"
        };
        return format!("{word} {unit}");
    };
    let prefix = prefix.unwrap_or_else(|| decimal.prefix());
    format!(
        "{} {}{unit}",
        decimal.shifted(-prefix.exponent, zeros),
        prefix.symbol
    )
}

/// Returns a plain number with at most so many significant digits, trailing zeros dropped.
pub(super) fn plain(value: f64, digits: usize) -> String {
    Decimal::of(value, Resolution::Digits(digits)).map_or_else(
        || "no number".to_owned(),
        |(decimal, zeros)| decimal.shifted(0, zeros),
    )
}

/// Returns whether a character may reach a terminal or a file as it is: no control character, no direction mark.
pub(super) fn is_harmless(character: char) -> bool {
    !character.is_control()
        && !matches!(character, '\u{200b}'..='\u{200f}' | '\u{2028}'..='\u{202e}' | '\u{2060}'..='\u{206f}' | '\u{feff}')
}

/// Whether trailing zeros say something (a rounded measurement) or not (a nominal value).
#[derive(Clone, Copy, PartialEq)]
enum Zeros {
    Kept,
    Dropped,
}

/// A rounded decimal number: sign, digits, and the power of ten of its last digit.
struct Decimal {
    negative: bool,
    digits: String,
    last: i32,
}

impl Decimal {
    /// Rounds the value; `None` if it is not finite.
    fn of(value: f64, resolution: Resolution) -> Option<(Self, Zeros)> {
        if !value.is_finite() {
            return None;
        }
        match resolution {
            Resolution::Nominal => Some((Self::significant(value, 3), Zeros::Dropped)),
            Resolution::Digits(n) => Some((Self::significant(value, n.max(1)), Zeros::Dropped)),
            Resolution::Uncertainty(u) if u.is_finite() && u > 0.0 => {
                let last = Self::significant(u, 2).last;
                Some((Self::to_place(value, last), Zeros::Kept))
            }
            Resolution::Uncertainty(_) => Some((Self::significant(value, 6), Zeros::Dropped)),
        }
    }

    /// Rounds to so many significant digits.
    fn significant(value: f64, n_digits: usize) -> Self {
        let text = format!("{:.*e}", n_digits - 1, value.abs());
        let (mantissa, exponent) = text.split_once('e').unwrap_or((&text, "0"));
        let digits: String = mantissa.chars().filter(char::is_ascii_digit).collect();
        let exponent: i32 = exponent.parse().unwrap_or(0);
        let n_decimals = i32::try_from(digits.len()).unwrap_or(1) - 1;
        Self {
            negative: value < 0.0,
            digits,
            last: exponent - n_decimals,
        }
        .normal()
    }

    /// Rounds to the power of ten given.
    fn to_place(value: f64, last: i32) -> Self {
        const MOST_DIGITS: i32 = 16;
        let exponent = Self::significant(value, 17).exponent();
        let n_digits = exponent - last + 1;
        if n_digits >= 1 && value != 0.0 {
            let digits = usize::try_from(n_digits.min(MOST_DIGITS)).unwrap_or(1);
            let rounded = Self::significant(value, digits);
            // A carry (9.96 to one decimal is 10.0) leaves a digit to spare: round again at the place asked for.
            return if rounded.last > last && n_digits < MOST_DIGITS {
                rounded.extended(last)
            } else {
                rounded
            };
        }
        let up = n_digits >= 0 && value.abs() * 10f64.powi(-last) > 0.5;
        Self {
            negative: up && value < 0.0,
            digits: if up { "1" } else { "0" }.to_owned(),
            last,
        }
    }

    /// The power of ten of the first digit.
    fn exponent(&self) -> i32 {
        self.last + i32::try_from(self.digits.len()).unwrap_or(1) - 1
    }

    fn extended(mut self, last: i32) -> Self {
        while self.last > last {
            self.digits.push('0');
            self.last -= 1;
        }
        self
    }

    /// No minus on zero.
    fn normal(mut self) -> Self {
        if self.digits.bytes().all(|b| b == b'0') {
            self.negative = false;
            self.last = 0;
            self.digits.truncate(1);
        }
        self
    }

    fn is_zero(&self) -> bool {
        self.digits.bytes().all(|b| b == b'0')
    }

    /// The prefix that leaves one to three digits before the point.
    fn prefix(&self) -> Prefix {
        let first = self.exponent();
        let first = if self.is_zero() {
            self.last.min(0)
        } else {
            first
        };
        let exponent = first.div_euclid(3) * 3;
        let [smallest, .., largest] = PREFIXES;
        let exponent = if self.is_zero() && self.last == 0 {
            0
        } else {
            exponent
        };
        PREFIXES
            .into_iter()
            .find(|p| p.exponent == exponent)
            .unwrap_or(if exponent < 0 { smallest } else { largest })
    }

    /// Writes the number times a power of ten, without an exponent.
    fn shifted(&self, power: i32, zeros: Zeros) -> String {
        let mut digits = self.digits.clone();
        let mut last = self.last + power;
        while last > 0 {
            digits.push('0');
            last -= 1;
        }
        let n_decimals = usize::try_from(-last).unwrap_or(0);
        while digits.len() <= n_decimals {
            digits.insert(0, '0');
        }
        let (whole, decimals) = digits.split_at(digits.len() - n_decimals);
        let decimals = if zeros == Zeros::Dropped {
            decimals.trim_end_matches('0')
        } else {
            decimals
        };
        let sign = if self.negative { "-" } else { "" };
        if decimals.is_empty() {
            format!("{sign}{whole}")
        } else {
            format!("{sign}{whole}.{decimals}")
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(value: f64, expected: &str) {
        assert_eq!(
            engineering(value, Resolution::Nominal, "F"),
            expected,
            "printing {value:e}"
        );
    }

    #[track_caller]
    fn check_with(value: f64, uncertainty: f64, expected: &str) {
        assert_eq!(
            engineering(value, Resolution::Uncertainty(uncertainty), "F"),
            expected,
            "{value:e} ± {uncertainty:e}"
        );
    }

    #[test]
    fn nominal_values_have_up_to_three_digits() {
        check(4.7e-6, "4.7 µF");
        check(220e-9, "220 nF");
        check(1e-9, "1 nF");
        check(0.47e-12, "0.47 pF");
        check(0.0, "0 F");
        check(-0.0, "0 F");
        check(-33e-12, "-33 pF");
        check(12345.0, "12.3 kF");
    }

    #[test]
    fn rounding_comes_before_the_prefix() {
        check(999.6e-9, "1 µF");
        check(999.4e-9, "999 nF");
        check(999.9e-15, "1 pF");
    }

    #[test]
    fn measured_values_stop_at_the_second_digit_of_their_uncertainty() {
        check_with(217.43e-9, 2.05e-9, "217.4 nF");
        check_with(217.43e-9, 20.5e-9, "217 nF");
        check_with(217.43e-9, 205e-9, "220 nF");
        check_with(999.96e-9, 2e-9, "1.0000 µF");
        check_with(4.7e-12, 0.14e-12, "4.70 pF");
        check_with(0.0, 0.14e-12, "0.00 pF");
        check_with(1e-15, 14e-12, "0 pF");
    }

    #[test]
    fn a_prefix_can_be_asked_for() {
        let nano = Prefix::named("n").expect("nano is a prefix");
        assert_eq!(
            engineering_in(4.7e-6, Resolution::Nominal, nano, "F"),
            "4700 nF"
        );
        assert_eq!(
            engineering_in(4.7e-12, Resolution::Nominal, nano, "F"),
            "0.0047 nF"
        );
    }
}
