//! The measured points of the dial, one a line.

use super::answers::{Point, read_point};
use super::{Answered, Interview, Topic};
use crate::quantity::{Ohm, Refusal};

/// As many points as a profile may have.
const MOST_POINTS: usize = 1000;

impl Interview {
    /// Takes a point, or the empty line that ends them.
    pub(super) fn take_point(&mut self, line: &str) -> Result<Answered, Refusal> {
        let question = self.at.question;
        let out = |found: &str, accepted: String| {
            Refusal::out_of_range(0..line.len(), "the point", found.to_owned(), accepted)
        };
        let (low, high) = (
            self.amount(Topic::DialLow).unwrap_or(0.0),
            self.amount(Topic::DialHigh).unwrap_or(0.0),
        );
        let last = self.points.last();
        if line.trim().is_empty() {
            if !last.is_some_and(|last| self.reaches_high(last)) {
                let accepted = format!("points from {low} to {high}, the ends of the dial");
                return Err(Refusal::found(0..0, "the points", "", accepted));
            }
            self.answers
                .insert((question.topic, 0), self.points.len().to_string());
            self.go_on();
            return Ok(Answered::Next);
        }
        let point = read_point(question, line)?;
        let found = line.trim();
        match last {
            #[expect(clippy::float_cmp, reason = "both are numbers as typed")]
            None if point.reading != low => {
                return Err(out(found, format!("first the low end, {low}")));
            }
            Some(last) if point.reading <= last.reading || high < point.reading => {
                let accepted = if self.reaches_high(last) {
                    "an empty line: the high end is there".to_owned()
                } else {
                    format!("a number above {}, to {high}", last.reading)
                };
                return Err(out(found, accepted));
            }
            Some(last) if !self.goes_on_from(last, point.resistance) => {
                let accepted = format!(
                    "resistances that all rise or all fall, after {}",
                    last.written
                );
                return Err(out(found, accepted));
            }
            _ if self.points.len() == MOST_POINTS => {
                return Err(out(found, format!("at most {MOST_POINTS} points")));
            }
            _ => self.points.push(point),
        }
        Ok(Answered::Next)
    }

    pub(super) fn reaches_high(&self, last: &Point) -> bool {
        self.points.len() > 1 && self.amount(Topic::DialHigh) == Some(last.reading)
    }

    fn goes_on_from(&self, last: &Point, next: Ohm) -> bool {
        match (self.points.first(), self.points.get(1)) {
            (Some(first), Some(second)) if first.resistance < second.resistance => {
                last.resistance < next
            }
            (Some(_), Some(_)) => next < last.resistance,
            _ => next != last.resistance,
        }
    }

    /// Points belong to the ends of the dial they were measured on.
    pub(super) fn keep_points_of_this_dial(&mut self) {
        let low = self.amount(Topic::DialLow);
        let high = self.amount(Topic::DialHigh).unwrap_or_default();
        if self.points.first().map(|first| first.reading) == low {
            self.points.retain(|point| point.reading <= high);
        } else {
            self.points.clear();
        }
    }
}
