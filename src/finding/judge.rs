//! From a measured value to a word.

use super::advice::advise;
use super::loss::{LossVerdict, judge_loss};
use super::prior::Interval;
use super::rank::{Ranked, Weighed};
use super::{
    Circumstances, HouseRules, Observation, PriorKind, ReadingCertainty, Slip, Tested, Verdict,
    Word, expect, remark, slip,
};
use crate::marking::{Decoding, Reading};
use crate::meter::{DialReading, Estimate, Lamp, Part, Seen, Stop, Value, predict};
use crate::tables::{Dielectric, Family};

/// A class 2 or 3 ceramic is not judged sooner after it was heated (IEC 60384-9: conditioning, then 24 h of rest; from
/// memory).
const HOURS_AFTER_HEAT: f64 = 24.0;

/// Returns the finding. `chosen` is the reading of the marking that the person picked; without it the best one after
/// the measurement is judged.
pub fn judge(
    decoding: &Decoding,
    chosen: Option<usize>,
    observation: &Observation<'_>,
    circumstances: &Circumstances,
    rules: &HouseRules,
) -> Verdict {
    let case = Case {
        decoding,
        observation,
        circumstances,
        rules,
    };
    let ranked = Ranked::of(
        &decoding.readings,
        chosen,
        observation.measured.value,
        rules,
    );
    let Some(index) = ranked.chosen else {
        return case.without_reading(ranked);
    };
    let reading = &decoding.readings[index];
    case.decide(ranked, index, reading)
}

/// All that a finding rests on.
struct Case<'a> {
    decoding: &'a Decoding,
    observation: &'a Observation<'a>,
    circumstances: &'a Circumstances,
    rules: &'a HouseRules,
}

/// A word with what goes with it.
struct Said {
    word: Word,
    why: Option<String>,
    slip: Option<Slip>,
    doubt: Doubt,
}

/// What keeps a word from being said.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Doubt {
    /// Nothing does.
    None,
    /// The value is not known well enough: a better measurement would help.
    InTheValue,
    /// Something that no better measurement of this kind would settle.
    Elsewhere,
}

impl Said {
    /// The word that the value itself gives.
    fn plainly(word: Word) -> Self {
        let doubt = if word == Word::Undecided {
            Doubt::InTheValue
        } else {
            Doubt::None
        };
        Self {
            word,
            why: None,
            slip: None,
            doubt,
        }
    }

    /// No value and so no word; why, unless the lamp has a remark of its own.
    fn without_value(why: Option<String>) -> Self {
        Self {
            word: Word::Undecided,
            why,
            slip: None,
            doubt: Doubt::Elsewhere,
        }
    }

    /// No word, and why.
    fn withheld(why: String) -> Self {
        Self {
            word: Word::Undecided,
            why: Some(why),
            slip: None,
            doubt: Doubt::Elsewhere,
        }
    }
}

impl Case<'_> {
    fn decide(&self, ranked: Ranked, index: usize, reading: &Reading) -> Verdict {
        let measured = self.observation.measured;
        let weighed = &ranked.weighed[index];
        let part = expect(reading, self.rules);
        let loss = judge_loss(
            &measured.loss,
            reading.family,
            self.observation.meter.frequency,
        );
        let estimate = measured
            .estimate()
            .filter(|_| loss != LossVerdict::TooLossy);
        let is_weighed = estimate.is_some() || matches!(measured.value, Value::Window { .. });
        let probability = is_weighed.then(|| weighed.probability());
        let said = self.say(&ranked, index, &part, loss);
        let word = said.word;
        let mut remarks: Vec<String> = said.why.into_iter().collect();
        if word != Word::Dead {
            remarks.extend(remark::lamp(self.observation, &part));
        }
        remarks.extend(remark::about_limits(
            reading,
            &weighed.limits,
            estimate,
            word,
        ));
        if let Value::Window { lamp, low, high } = measured.value {
            remarks.push(remark::window(lamp, low, high));
        }
        if probability == Some(0.0) {
            remarks.push("far from every reading of this marking".to_owned());
        }
        if said.doubt == Doubt::InTheValue {
            remarks.extend(self.next_step(estimate, &part, weighed));
        }
        if word != Word::Dead || measured.loss.proven.is_some() {
            remarks.extend(remark::about_loss(measured, loss));
        }
        if said.doubt == Doubt::InTheValue {
            remarks.extend(remark::largest_doubt(measured));
        }
        remarks.extend(remark::about_circumstances(self.circumstances, reading));
        Verdict {
            word,
            chosen: Some(index),
            limits: Some(weighed.limits),
            deviation: estimate.map(|e| remark::deviation(e, reading)),
            probability_inside: probability,
            probability_flat: weighed.probability_flat.filter(|_| is_weighed),
            reading_probability: Some(ranked.posterior(index)),
            ranking: ranked.ranking,
            slip: said.slip,
            value: match word {
                Word::Inside => Tested::Ok,
                Word::Outside | Word::Dead => Tested::Bad,
                Word::Undecided => Tested::NotTested,
            },
            loss: match loss {
                LossVerdict::Fine(tested) => tested,
                LossVerdict::High | LossVerdict::Dead { .. } | LossVerdict::TooLossy => Tested::Bad,
            },
            leakage: Tested::NotTested,
            looks: remark::looks(self.circumstances),
            remarks,
        }
    }

    /// The word, and why where it is not the measured value alone that says it.
    fn say(&self, ranked: &Ranked, index: usize, part: &Part, loss: LossVerdict) -> Said {
        if let Some(why) = self.death(part, loss) {
            return Said {
                why: Some(why),
                ..Said::plainly(Word::Dead)
            };
        }
        let is_value = matches!(
            self.observation.measured.value,
            Value::Estimate(_) | Value::Window { .. }
        );
        let weighed = &ranked.weighed[index];
        match self
            .deciding_probability(weighed)
            .filter(|_| is_value && loss != LossVerdict::TooLossy)
        {
            Some(probability) => {
                let word = word_of(probability, self.rules);
                self.withheld(word, ranked, index, part)
                    .unwrap_or_else(|| Said::plainly(word))
            }
            None => Said::without_value(remark::no_value(
                self.observation,
                loss == LossVerdict::TooLossy,
            )),
        }
    }

    fn deciding_probability(&self, weighed: &Weighed) -> Option<f64> {
        match self.rules.prior {
            PriorKind::Salvage => Some(weighed.probability()),
            PriorKind::Flat => weighed.probability_flat,
        }
    }

    /// Why the part is dead: open, or far too lossy. What is open has no loss, so that comes first.
    fn death(&self, part: &Part, loss: LossVerdict) -> Option<String> {
        let Observation {
            meter,
            switch,
            seen,
            measured,
        } = *self.observation;
        if measured.value == Value::Open {
            return Some("open: less than the open terminals show".to_owned());
        }
        let is_dim_at_least_resistance = match seen {
            Seen::NeverDark { dimmest } => dimmest == Some(low_resistance_stop(self.observation)),
            _ => false,
        };
        let low = Part {
            capacitance: part.low?,
            ..*part
        };
        if is_dim_at_least_resistance && predict(meter, switch, &low).beyond.is_none() {
            let why = "open: dimmest at the stop of least resistance, where no part inside its limits would null";
            return Some(why.to_owned());
        }
        match loss {
            LossVerdict::Dead { limit } => Some(remark::dead_by_loss(measured, limit)),
            _ => None,
        }
    }

    /// What withholds a word: another reading of the marking, a slip, recent heat.
    fn withheld(&self, word: Word, ranked: &Ranked, index: usize, part: &Part) -> Option<Said> {
        if word == Word::Undecided {
            return None;
        }
        if let Some(why) = self.another_reading(word, ranked, index) {
            return Some(Said::withheld(why));
        }
        if word != Word::Outside {
            return None;
        }
        if let Some(hours) = self.hours_to_wait(part.family) {
            return Some(Said::withheld(format!(
                "hold it {hours:.0} h more: a class 2 or 3 ceramic reads high after heat; then measure again"
            )));
        }
        if self.circumstances.reading == ReadingCertainty::Confirmed {
            return None;
        }
        let slip = slip::find(
            self.observation,
            part,
            Interval::of(&ranked.weighed[index].limits),
        )?;
        Some(Said {
            slip: Some(slip.clone()),
            ..Said::withheld(slip.to_string())
        })
    }

    /// Another reading, probable enough, that would lead to another word; "none of these" only when it is the most
    /// probable of all (else no part far outside could ever be called so).
    fn another_reading(&self, word: Word, ranked: &Ranked, index: usize) -> Option<String> {
        let first = ranked.ranking.first()?;
        if first.reading.is_none() && word == Word::Inside {
            return Some("none of the readings of this marking fits".to_owned());
        }
        let rival = ranked.ranking.iter().find_map(|standing| {
            let other = standing.reading.filter(|other| *other != index)?;
            let weighed = ranked.weighed.get(other)?;
            let is_probable = standing.posterior >= 1.0 - self.rules.confidence;
            (is_probable && word_of(weighed.probability(), self.rules) != word).then_some(other)
        })?;
        let words = |reading: usize| self.decoding.readings[reading].in_words();
        Some(format!(
            "the marking may mean {} or {}",
            words(index),
            words(rival)
        ))
    }

    fn hours_to_wait(&self, family: Option<Family>) -> Option<f64> {
        let heated = self
            .circumstances
            .heated_hours
            .filter(|hours| *hours < HOURS_AFTER_HEAT)?;
        let member = family.and_then(Family::member)?;
        matches!(
            member,
            Dielectric::Disc2 | Dielectric::Disc3 | Dielectric::Mlcc2
        )
        .then_some((HOURS_AFTER_HEAT - heated).max(1.0))
    }

    fn next_step(
        &self,
        estimate: Option<Estimate>,
        part: &Part,
        weighed: &Weighed,
    ) -> Option<String> {
        let Some(estimate) = estimate else {
            return matches!(
                self.observation.measured.value,
                Value::Window {
                    lamp: Lamp::Lit,
                    ..
                }
            )
            .then(|| "next: turn the dial and read the middle of the dark arc".to_owned());
        };
        let asked = (Interval::of(&weighed.limits), self.rules);
        Some(advise(self.observation, estimate, part, weighed.prior, asked).to_string())
    }

    fn without_reading(&self, ranked: Ranked) -> Verdict {
        Verdict {
            word: Word::Undecided,
            chosen: None,
            limits: None,
            deviation: None,
            probability_inside: None,
            probability_flat: None,
            reading_probability: None,
            ranking: ranked.ranking,
            slip: None,
            value: Tested::NotTested,
            loss: Tested::NotTested,
            leakage: Tested::NotTested,
            looks: remark::looks(self.circumstances),
            remarks: vec!["nothing in the marking is a value: measured only".to_owned()],
        }
    }
}

pub(super) fn word_of(probability: f64, rules: &HouseRules) -> Word {
    if probability >= rules.confidence {
        Word::Inside
    } else if probability <= 1.0 - rules.confidence {
        Word::Outside
    } else {
        Word::Undecided
    }
}

fn low_resistance_stop(observation: &Observation<'_>) -> DialReading {
    let dial = &observation.meter.dial;
    dial.number_at(if dial.is_falling() {
        Stop::High
    } else {
        Stop::Low
    })
}
