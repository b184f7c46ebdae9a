//! A tolerance as printed on a part, and the limits it gives.

use super::engineering::plain;
use super::{Farad, Fraction, Quantity, Refusal, number, parse};

/// How far a part may lie from its nominal value.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Tolerance {
    /// A part of the nominal value to either side; `minus` is given without its sign.
    Relative {
        /// Below the nominal value, 0 to 1.
        minus: Fraction,
        /// Above the nominal value.
        plus: Fraction,
    },
    /// The same capacitance to either side (small values: ±0.25 pF).
    Absolute(Farad),
    /// Guaranteed minimum value: no upper limit.
    Minimum,
}

impl Tolerance {
    /// Makes a tolerance with like sides, in percent.
    pub fn percent(value: f64) -> Self {
        Self::Relative {
            minus: Fraction::new(value / 100.0),
            plus: Fraction::new(value / 100.0),
        }
    }

    /// Makes a tolerance with unlike sides, in percent, both given without sign.
    pub fn asymmetric(minus: f64, plus: f64) -> Self {
        Self::Relative {
            minus: Fraction::new(minus / 100.0),
            plus: Fraction::new(plus / 100.0),
        }
    }

    /// Returns the lowest and the highest capacitance allowed; `None` above for a guaranteed minimum.
    pub fn limits(self, nominal: Farad) -> (Farad, Option<Farad>) {
        match self {
            Self::Relative { minus, plus } => (
                nominal * (1.0 - minus.get()),
                Some(nominal * (1.0 + plus.get())),
            ),
            Self::Absolute(half_width) => {
                let low = Farad::new((nominal - half_width).get().max(0.0));
                (low, Some(nominal + half_width))
            }
            Self::Minimum => (nominal, None),
        }
    }

    /// Returns the larger side as a part of the nominal value; infinite for a guaranteed minimum.
    pub fn larger_side(self, nominal: Farad) -> Fraction {
        match self {
            Self::Relative { minus, plus } => Fraction::new(minus.get().max(plus.get())),
            Self::Absolute(half_width) => Fraction::new(half_width / nominal),
            Self::Minimum => Fraction::new(f64::INFINITY),
        }
    }

    /// Reads "5 %", "±5 %", "-20/+80 %", "+80-20 %", "±0.25 pF", "GMV" or "MIN".
    ///
    /// # Errors
    /// Refuses anything else, and negative half widths.
    pub fn parse(text: &str) -> Result<Self, Refusal> {
        const READING: &str = "the tolerance";
        const ACCEPTED: &str = "a tolerance such as 5 %, ±5 %, -20/+80 %, ±0.25 pF or GMV";
        let body = text.trim();
        if body.eq_ignore_ascii_case("GMV") || body.eq_ignore_ascii_case("MIN") {
            return Ok(Self::Minimum);
        }
        let lead = text.len() - text.trim_start().len();
        let symmetric = body
            .strip_prefix('±')
            .or_else(|| body.strip_prefix("+-"))
            .or_else(|| body.strip_prefix("+/-"));
        if let Some(rest) = symmetric {
            return Self::symmetric(
                rest.trim_start(),
                lead + body.len() - rest.trim_start().len(),
            );
        }
        if !body.starts_with(['-', '+']) {
            return Self::symmetric(body, lead);
        }
        let (first, used) = number(body, lead, READING)?;
        let rest = body.get(used..).unwrap_or_default();
        let rest = rest.trim_start_matches([' ', '/', '%']);
        let at = lead + body.len() - rest.len();
        let (second, used) = number(rest, at, READING)?;
        let tail = rest.get(used..).unwrap_or_default().trim();
        let (low, high) = (first.min(second), first.max(second));
        if (tail == "%" || tail.is_empty()) && low <= 0.0 && high >= 0.0 && low >= -100.0 {
            return Ok(Self::asymmetric(-low, high));
        }
        Err(Refusal::found(
            lead..lead + body.len(),
            READING,
            body,
            ACCEPTED,
        ))
    }

    fn symmetric(text: &str, offset: usize) -> Result<Self, Refusal> {
        const READING: &str = "the tolerance";
        let whole = offset..offset + text.len();
        let (value, used) = number(text, offset, READING)?;
        if value < 0.0 {
            return Err(Refusal::out_of_range(
                whole,
                READING,
                text.to_owned(),
                "a half width that is not negative",
            ));
        }
        if text.get(used..).unwrap_or_default().trim() == "%" {
            return Ok(Self::percent(value));
        }
        if text.ends_with(Farad::SYMBOL) {
            return parse::<Farad>(text).map(Self::Absolute);
        }
        let found = text.get(used..).unwrap_or_default().trim();
        let at = if found.is_empty() {
            whole.end..whole.end
        } else {
            whole
        };
        Err(Refusal::found(
            at,
            READING,
            found,
            "a percent sign or a unit such as pF",
        ))
    }
}

impl std::fmt::Display for Tolerance {
    /// Writes "±5 %", "-20/+80 %", "±0.25 pF" or "GMV".
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            Self::Relative { minus, plus } if minus == plus => write!(f, "±{minus}"),
            Self::Relative { minus, plus } => {
                write!(
                    f,
                    "-{}/+{} %",
                    plain(minus.percent(), 3),
                    plain(plus.percent(), 3)
                )
            }
            Self::Absolute(half_width) => write!(f, "±{half_width}"),
            Self::Minimum => f.write_str("GMV"),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(text: &str, expected: &str) {
        let shown =
            Tolerance::parse(text).map_or_else(|refusal| refusal.to_string(), |t| t.to_string());
        assert_eq!(shown, expected, "reading {text:?}");
    }

    #[test]
    fn tolerances_of_the_contract() {
        check("5 %", "±5 %");
        check("±5 %", "±5 %");
        check("-20/+80 %", "-20/+80 %");
        check("+80-20%", "-20/+80 %");
        check("±0.25 pF", "±0.25 pF");
        check("gmv", "GMV");
        check("-0/+100 %", "-0/+100 %");
    }

    #[test]
    fn refusals() {
        check(
            "5",
            "found the end after position 1 while reading the tolerance; accepted here: a percent sign or a unit such as pF",
        );
        check(
            "five",
            "found `f` at position 1 while reading the tolerance; accepted here: a number",
        );
    }

    #[test]
    fn limits_follow() {
        let (low, high) = Tolerance::asymmetric(20.0, 80.0).limits(Farad::new(100e-9));
        assert_eq!(
            (low.to_string(), high.map(|h| h.to_string())),
            ("80 nF".to_owned(), Some("180 nF".to_owned()))
        );
        assert_eq!(
            Tolerance::Minimum.limits(Farad::new(1e-9)),
            (Farad::new(1e-9), None)
        );
    }
}
