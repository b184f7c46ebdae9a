//! A range of a quantity, open at either end.

use super::{Quantity, Refusal, parse};

/// From `low`, which belongs to it, up to `high`, which does not; `None` is no limit on that side.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Span<Q> {
    /// The smallest value that belongs to the range.
    pub low: Option<Q>,
    /// The smallest value above the range.
    pub high: Option<Q>,
}

impl<Q: Quantity> Span<Q> {
    /// Returns whether the value lies in the range.
    pub fn contains(&self, value: Q) -> bool {
        self.low.is_none_or(|low| low <= value) && self.high.is_none_or(|high| value < high)
    }

    /// Reads "1 nF .. 10 nF", ".. 1 nF" or "1 µF ..".
    ///
    /// # Errors
    /// Refuses a text without `..`, ends that are no quantity, and a range that holds nothing.
    pub fn parse(text: &str) -> Result<Self, Refusal> {
        const READING: &str = "the range";
        let whole = 0..text.len();
        let Some((low, high)) = text.split_once("..") else {
            return Err(Refusal::found(
                whole,
                READING,
                text.trim(),
                "two ends with .. between, as in 1 nF .. 10 nF",
            ));
        };
        let high_at = low.len() + 2;
        let end = |part: &str, offset: usize| -> Result<Option<Q>, Refusal> {
            if part.trim().is_empty() {
                return Ok(None);
            }
            parse(part).map(Some).map_err(|r| Refusal {
                at: r.at.start + offset..r.at.end + offset,
                ..r
            })
        };
        let span = Self {
            low: end(low, 0)?,
            high: end(high, high_at)?,
        };
        match (span.low, span.high) {
            (None, None) => Err(Refusal::found(
                whole,
                READING,
                text.trim(),
                "at least one end, as in .. 1 nF",
            )),
            (Some(low), Some(high)) if low >= high => Err(Refusal::out_of_range(
                whole,
                READING,
                text.trim().to_owned(),
                "a low end below the high end",
            )),
            _ => Ok(span),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::super::Farad;
    use super::*;

    #[test]
    fn the_low_end_belongs_to_the_range_and_the_high_end_does_not() {
        let span = Span::<Farad>::parse("1 nF .. 10 nF").expect("a range");
        assert!(span.contains(Farad::new(1e-9)));
        assert!(!span.contains(Farad::new(10e-9)));
        let open = Span::<Farad>::parse("1 µF ..").expect("a range");
        assert!(open.contains(Farad::new(1.0)));
        assert_eq!(Span::<Farad>::parse(".. 1 nF").expect("a range").low, None);
    }

    #[test]
    fn refusals() {
        for (text, expected) in [
            (
                "1 nF",
                "found `1 nF` at position 1 while reading the range; accepted here: two ends with .. between, as in 1 nF .. 10 nF",
            ),
            (
                "..",
                "found `..` at position 1 while reading the range; accepted here: at least one end, as in .. 1 nF",
            ),
            (
                "2 nF .. 1 nF",
                "the range 2 nF .. 1 nF is out of range; accepted here: a low end below the high end",
            ),
            (
                "1 nF .. x",
                "found `x` at position 9 while reading capacitance; accepted here: a number",
            ),
        ] {
            assert_eq!(
                Span::<Farad>::parse(text).map_err(|r| r.to_string()),
                Err(expected.to_owned())
            );
        }
    }
}
