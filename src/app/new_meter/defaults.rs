//! What Enter alone takes: what was answered before, else what suits the answers so far.

use super::{Interview, Topic};
use crate::quantity::{Ohm, Resolution, engineering, parse};

impl Interview {
    /// Returns what Enter alone takes: the answer given before, else a sane one; empty if there is none.
    pub fn default(&self) -> String {
        let question = self.at.question;
        if question.topic == Topic::Points || question.topic == Topic::Overwrite {
            return question.default.to_owned();
        }
        if let Some(given) = self.answer_to(self.at) {
            return given.to_owned();
        }
        match (question.topic, self.at.switch) {
            (Topic::SwitchLabel, switch) => {
                let letters = "ABCDEFGH".chars();
                letters.skip(switch).take(1).collect()
            }
            // Spans of neighbouring positions then overlap on a dial of the usual kind.
            (Topic::SwitchResistance, switch) if switch > 0 => self
                .answers
                .get(&(Topic::SwitchResistance, switch - 1))
                .and_then(|before| parse::<Ohm>(before).ok())
                .map_or_else(String::new, |before| (before * 6.0).to_string()),
            (Topic::SwitchTolerance, switch) if switch > 0 => self
                .answers
                .get(&(Topic::SwitchTolerance, switch - 1))
                .cloned()
                .unwrap_or_default(),
            (Topic::DialHigh, _) => {
                let low = self.amount(Topic::DialLow).unwrap_or(0.0);
                (low + 100.0).to_string()
            }
            (Topic::Division, _) => self.part_of_dial(0.01),
            (Topic::Repeatability, _) => self.part_of_dial(0.003),
            (Topic::Threshold, _) => {
                let volts = self.amount(Topic::Amplitude).unwrap_or(1.0) / 100.0;
                engineering(volts, Resolution::Digits(2), "V")
            }
            (Topic::Place, _) => self
                .usual_place
                .as_ref()
                .map_or_else(String::new, |place| place.display().to_string()),
            _ => question.default.to_owned(),
        }
    }

    fn part_of_dial(&self, share: f64) -> String {
        // Ten digits hide what binary fractions leave over.
        let part = (self.span() * share * 1e10).round() / 1e10;
        part.max(1e-6).to_string()
    }

    pub(super) fn span(&self) -> f64 {
        let ends = self
            .amount(Topic::DialLow)
            .zip(self.amount(Topic::DialHigh));
        ends.map_or(100.0, |(low, high)| high - low)
    }
}
