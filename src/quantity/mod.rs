//! Quantities with their units: what goes in is text as people write it, what comes out are typed values that print in
//! engineering notation.
//!
//! ```text
//! quantity  = number [blank] [prefix] [unit]        "220 nF"  "4.7µF"  "1.25 kHz"  "820"
//!           | digits letter digits [unit]           "4k7"  "2n2"  "0R5"      (RKM code, IEC 60062)
//! number    = [sign] digits [("." | ",") digits] ["e" [sign] digits]
//! prefix    = p n u µ μ m k M G
//! ```
//!
//! Units enter in [`parse`] and leave in `Display`; between the two nothing is a bare `f64`.

mod engineering;
mod parse;
mod range;
mod refusal;
mod tolerance;
mod uncertain;

pub use engineering::{Prefix, Resolution, engineering, engineering_in};
pub use parse::{number, parse};
pub use range::Span;
pub use refusal::{Refusal, RefusalKind, harmless};
pub use tolerance::Tolerance;
pub use uncertain::Uncertain;

/// A physical quantity held in its base unit.
pub trait Quantity: Copy + PartialOrd {
    /// The symbol of the base unit, as printed: "F", "Ω".
    const SYMBOL: &'static str;
    /// What the quantity is called in messages: "capacitance".
    const NAME: &'static str;
    /// Other spellings of the unit that are read: "ohm", "R".
    const SPELLINGS: &'static [&'static str];
    /// Makes the quantity from a value in the base unit.
    fn from_base(value: f64) -> Self;
    /// Returns the value in the base unit.
    fn base(self) -> f64;
}

macro_rules! quantity {
    ($(#[$doc:meta])* $name:ident, $symbol:literal, $word:literal, [$($spelling:literal),*]) => {
        $(#[$doc])*
        #[derive(Clone, Copy, Debug, Default, PartialEq, PartialOrd)]
        pub struct $name(f64);

        impl $name {
            /// Makes the quantity from a value in the base unit.
            pub const fn new(value: f64) -> Self {
                Self(value)
            }

            /// Returns the value in the base unit.
            pub const fn get(self) -> f64 {
                self.0
            }
        }

        impl Quantity for $name {
            const SYMBOL: &'static str = $symbol;
            const NAME: &'static str = $word;
            const SPELLINGS: &'static [&'static str] = &[$symbol, $($spelling),*];
            fn from_base(value: f64) -> Self {
                Self(value)
            }
            fn base(self) -> f64 {
                self.0
            }
        }

        impl std::ops::Add for $name {
            type Output = Self;
            fn add(self, other: Self) -> Self {
                Self(self.0 + other.0)
            }
        }

        impl std::ops::Sub for $name {
            type Output = Self;
            fn sub(self, other: Self) -> Self {
                Self(self.0 - other.0)
            }
        }

        impl std::ops::Mul<f64> for $name {
            type Output = Self;
            fn mul(self, factor: f64) -> Self {
                Self(self.0 * factor)
            }
        }

        impl std::ops::Div for $name {
            type Output = f64;
            fn div(self, other: Self) -> f64 {
                self.0 / other.0
            }
        }

        impl std::fmt::Display for $name {
            fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
                f.write_str(&engineering(self.0, Resolution::Nominal, $symbol))
            }
        }
    };
}

quantity!(
    /// Capacitance in farad.
    Farad, "F", "capacitance", []
);
quantity!(
    /// Resistance in ohm.
    Ohm, "Ω", "resistance", ["Ω", "ohm", "Ohm", "R"]
);
quantity!(
    /// Frequency in hertz.
    Hertz, "Hz", "frequency", ["hz", "HZ"]
);
quantity!(
    /// Voltage in volt; whether peak, effective or direct is said where it is used.
    Volt, "V", "voltage", []
);
quantity!(
    /// Current in ampere.
    Ampere, "A", "current", []
);
quantity!(
    /// Time in second.
    Second, "s", "time", []
);

impl Farad {
    /// Returns the capacitance in picofarad, for files and scripts.
    pub fn picofarads(self) -> f64 {
        self.0 * 1e12
    }

    /// Makes a capacitance from a number of picofarads.
    pub fn from_picofarads(value: f64) -> Self {
        Self(value * 1e-12)
    }
}

/// A ratio; 0.05 prints "5 %".
#[derive(Clone, Copy, Debug, Default, PartialEq, PartialOrd)]
pub struct Fraction(f64);

impl Fraction {
    /// Makes the fraction from a plain ratio: 0.05 for five percent.
    pub const fn new(value: f64) -> Self {
        Self(value)
    }

    /// Returns the plain ratio.
    pub const fn get(self) -> f64 {
        self.0
    }

    /// Returns the ratio in percent.
    pub fn percent(self) -> f64 {
        self.0 * 100.0
    }

    /// Reads "5 %", "0.5%" or "±1 %" (the sign says nothing more here: both sides are alike).
    ///
    /// # Errors
    /// Refuses what is not a number followed by a percent sign.
    pub fn parse(text: &str) -> Result<Self, Refusal> {
        let body = text.trim_start_matches(['±', ' ']);
        let skipped = text.len() - body.len();
        let (value, rest) = number(body, skipped, "the percentage")?;
        let tail = body.get(rest..).unwrap_or_default().trim();
        if tail == "%" {
            return Ok(Self(value / 100.0));
        }
        let at = skipped + rest..text.len();
        Err(Refusal::found(
            at,
            "the percentage",
            tail,
            "a percent sign after the number, as in 5 %",
        ))
    }
}

impl std::fmt::Display for Fraction {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{} %", engineering::plain(self.0 * 100.0, 3))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check_fraction(text: &str, printed: &str) {
        let shown =
            Fraction::parse(text).map_or_else(|refusal| refusal.to_string(), |f| f.to_string());
        assert_eq!(shown, printed, "reading {text:?}");
    }

    #[test]
    fn percentages_read_and_print() {
        check_fraction("5 %", "5 %");
        check_fraction("±0.25%", "0.25 %");
        check_fraction("1,5 %", "1.5 %");
        check_fraction(
            "5",
            "found the end after position 1 while reading the percentage; accepted here: a percent sign after the number, as in 5 %",
        );
    }
}
