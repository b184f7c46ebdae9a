//! Values of keys as typed values, each with its place.

use std::ops::{Range, RangeInclusive};

use toml::Spanned;
use toml::de::DeValue;

use super::{Bound, Document, Need, Placed, Section};
use crate::quantity::{Fraction, Quantity, harmless, parse};

impl Document<'_> {
    /// Returns a text.
    pub fn text_of(
        &mut self,
        section: &Section<'_>,
        key: &str,
        need: Need,
    ) -> Option<Placed<String>> {
        let value = self.get(section, key, need)?;
        let Some(text) = value.get_ref().as_str() else {
            let found = value.get_ref().type_str();
            self.complain(
                value.span(),
                format!("`{key}` is a {found}; accepted here: a text in quotes"),
            );
            return None;
        };
        Some(Placed {
            value: text.to_owned(),
            at: value.span(),
        })
    }

    /// Returns a quantity: a text with a unit, or a bare number in the base unit.
    pub fn quantity<Q: Quantity>(
        &mut self,
        section: &Section<'_>,
        key: &str,
        bound: Bound,
        need: Need,
    ) -> Option<Placed<Q>> {
        let value = self.get(section, key, need)?;
        self.quantity_value(value, key, bound)
    }

    /// Returns a value that stands in an array as a quantity.
    pub fn quantity_value<Q: Quantity>(
        &mut self,
        value: &Spanned<DeValue<'_>>,
        key: &str,
        bound: Bound,
    ) -> Option<Placed<Q>> {
        let at = value.span();
        let number = match value.get_ref() {
            DeValue::String(text) => match parse::<Q>(text) {
                Ok(quantity) => quantity.base(),
                Err(refusal) => {
                    self.refuse(&at, key, &refusal);
                    return None;
                }
            },
            other => self.plain_number(other, key, &at, Q::NAME)?,
        };
        self.bounded(number, key, &at, bound).map(|number| Placed {
            value: Q::from_base(number),
            at,
        })
    }

    /// Returns a plain number.
    pub fn number(
        &mut self,
        section: &Section<'_>,
        key: &str,
        bound: Bound,
        need: Need,
    ) -> Option<Placed<f64>> {
        let value = self.get(section, key, need)?;
        self.number_value(value, key, bound)
    }

    /// Returns a value that stands in an array as a plain number.
    pub fn number_value(
        &mut self,
        value: &Spanned<DeValue<'_>>,
        key: &str,
        bound: Bound,
    ) -> Option<Placed<f64>> {
        let at = value.span();
        let number = self.plain_number(value.get_ref(), key, &at, "a number")?;
        self.bounded(number, key, &at, bound)
            .map(|value| Placed { value, at })
    }

    /// Returns a whole number within the range.
    pub fn count(
        &mut self,
        section: &Section<'_>,
        key: &str,
        range: RangeInclusive<u32>,
        need: Need,
    ) -> Option<u32> {
        let value = self.get(section, key, need)?;
        let count = value.get_ref().as_integer().and_then(|n| {
            i64::from_str_radix(n.as_str(), n.radix())
                .ok()
                .and_then(|n| u32::try_from(n).ok())
        });
        if let Some(count) = count.filter(|count| range.contains(count)) {
            return Some(count);
        }
        let found = self.text.get(value.span()).unwrap_or_default();
        let message = format!(
            "`{key}` is {}; accepted here: a whole number from {} to {}",
            harmless(found),
            range.start(),
            range.end()
        );
        self.complain(value.span(), message);
        None
    }

    /// Returns a fraction written as a percentage, not negative.
    pub fn fraction(
        &mut self,
        section: &Section<'_>,
        key: &str,
        need: Need,
    ) -> Option<Placed<Fraction>> {
        let value = self.get(section, key, need)?;
        let at = value.span();
        let DeValue::String(text) = value.get_ref() else {
            let found = value.get_ref().type_str();
            self.complain(
                at,
                format!(
                    "`{key}` is a {found}; accepted here: a percentage in quotes, as in \"1 %\""
                ),
            );
            return None;
        };
        match Fraction::parse(text) {
            Ok(fraction) if fraction.get() >= 0.0 => Some(Placed {
                value: fraction,
                at,
            }),
            Ok(_) => {
                self.complain(
                    at,
                    format!("`{key}` is negative; accepted here: 0 % and above"),
                );
                None
            }
            Err(refusal) => {
                self.refuse(&at, key, &refusal);
                None
            }
        }
    }

    fn plain_number(
        &mut self,
        value: &DeValue<'_>,
        key: &str,
        at: &Range<usize>,
        accepted: &str,
    ) -> Option<f64> {
        let number = match value {
            DeValue::Integer(integer) => i64::from_str_radix(integer.as_str(), integer.radix())
                .ok()
                .map(|n| n as f64),
            DeValue::Float(float) => float.as_str().parse::<f64>().ok(),
            other => {
                let found = other.type_str();
                self.complain(
                    at.clone(),
                    format!("`{key}` is a {found}; accepted here: {accepted}"),
                );
                return None;
            }
        };
        if number.is_none_or(|n| !n.is_finite()) {
            self.complain(
                at.clone(),
                format!("`{key}` is not a finite number; accepted here: {accepted}"),
            );
        }
        number.filter(|n| n.is_finite())
    }

    fn bounded(&mut self, number: f64, key: &str, at: &Range<usize>, bound: Bound) -> Option<f64> {
        let (is_fine, accepted) = match bound {
            Bound::Positive => (number > 0.0, "a value above zero"),
            Bound::NotNegative => (number >= 0.0, "zero and above"),
            Bound::Any => (true, ""),
        };
        if !is_fine {
            self.complain(
                at.clone(),
                format!("`{key}` is {number}; accepted here: {accepted}"),
            );
        }
        is_fine.then_some(number)
    }
}
