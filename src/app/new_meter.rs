//! A meter described by question and answer: one question after the other, each with a default, and at the end the text
//! of a profile.
//!
//! What is kept of an answer is what the profile will say, and it is checked as such: what was accepted here reads back
//! as the same meter.

mod answers;
mod defaults;
mod points;
mod profile;
mod questions;
#[cfg(test)]
mod tests;

use std::collections::BTreeMap;
use std::path::PathBuf;

use tui_input::Input;

pub use answers::Point;
pub use questions::{Accepts, QUESTIONS, Question, Topic, Unit, When};

use crate::meter::Meter;
use crate::quantity::{Refusal, Volt};

/// The questions and answers so far; they are kept until the program ends.
#[derive(Clone, Debug)]
pub struct Interview {
    /// The line being typed.
    pub input: Input,
    at: Step,
    path: Vec<Step>,
    answers: BTreeMap<(Topic, usize), String>,
    points: Vec<Point>,
    usual_place: Option<PathBuf>,
    /// What is on its way to the disk.
    pub(super) writing: Option<Draft>,
}

/// A question, and of which switch position it is asked.
#[derive(Clone, Copy, Debug)]
pub struct Step {
    /// The question.
    pub question: &'static Question,
    /// The position, counted from 0; 0 also where there is none.
    pub switch: usize,
}

/// A profile to be written.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Draft {
    /// Where.
    pub path: PathBuf,
    /// The whole text.
    pub text: String,
    /// What becomes of a file that is there already.
    pub existing: Existing,
}

/// What becomes of a file that is there already.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Existing {
    /// It stays, and nothing is written.
    Kept,
    /// It is replaced: the person said yes.
    Replaced,
}

/// Why a profile was not written.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum ProfileFailure {
    /// There is a file of that name.
    Exists,
    /// The act, and the next thing to try.
    Failed {
        /// "cannot write /…/meter.toml: disk is full".
        message: String,
        /// The next thing to try.
        hint: String,
    },
}

/// What follows from an answer.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) enum Answered {
    /// Another question.
    Next,
    /// The profile is to be written.
    Write(Draft),
}

impl Interview {
    /// Makes one without answers; `usual_place` is where the program looks for a profile.
    pub(super) fn new(usual_place: Option<PathBuf>) -> Self {
        Self {
            input: Input::default(),
            at: FIRST,
            path: Vec::new(),
            answers: BTreeMap::new(),
            points: Vec::new(),
            usual_place,
            writing: None,
        }
    }

    /// Returns the question asked now.
    pub fn question(&self) -> &'static Question {
        self.at.question
    }

    /// Returns its number, counted from 1.
    pub fn number(&self) -> usize {
        self.path.len() + 1
    }

    /// Returns the question in words.
    pub fn words(&self) -> String {
        let switch = match self.at.question.topic {
            Topic::SwitchLabel => (self.at.switch + 1).to_string(),
            _ => self.label().to_owned(),
        };
        self.at.question.words.replace("{}", &switch)
    }

    /// Returns what the prompt says: `frequency`, `resistance B`.
    pub fn prompt(&self) -> String {
        let name = self.at.question.name.replace('_', " ");
        match self.at.question.topic {
            Topic::SwitchResistance | Topic::SwitchTolerance => {
                format!("{name} {}", self.label())
            }
            Topic::SwitchLabel => format!("{name} {}", self.at.switch + 1),
            _ => name,
        }
    }

    fn label(&self) -> &str {
        let label = self.answers.get(&(Topic::SwitchLabel, self.at.switch));
        label.map_or("", String::as_str)
    }

    /// Returns which answers are accepted, in words.
    pub fn accepted(&self) -> String {
        let accepted = answers::accepted(self.at.question);
        match self.at.question.topic {
            Topic::Points => match self.points.last() {
                Some(last) if self.reaches_high(last) => {
                    "an empty line: the high end is there; back takes the last point off".to_owned()
                }
                Some(_) => format!("{accepted}; back takes the last point off"),
                None => accepted,
            },
            _ => accepted,
        }
    }

    /// Returns the answers given so far, in short, a line a table of the profile.
    pub fn short(&self) -> Vec<String> {
        profile::short(self)
    }

    /// Returns whether a point of the dial is asked for.
    pub fn is_about_points(&self) -> bool {
        self.at.question.topic == Topic::Points
    }

    /// Returns the points of the dial so far.
    pub fn points(&self) -> &[Point] {
        &self.points
    }

    /// Takes an answer, the whole line; an empty one takes the default.
    ///
    /// # Errors
    /// Refuses what the question does not accept; nothing changes then.
    pub(super) fn take(&mut self, line: &str) -> Result<Answered, Refusal> {
        let question = self.at.question;
        let is_default = line.trim().is_empty();
        match question.topic {
            Topic::Points => return self.take_point(line),
            Topic::Overwrite => {
                let answer = answers::read(question, line)?;
                self.step_back();
                if answer != "yes" {
                    return Ok(Answered::Next);
                }
                return self.draft(self.place(&self.default()), Existing::Replaced);
            }
            _ => {}
        }
        let answer = if is_default {
            answers::read(question, &self.default())?
        } else {
            answers::read(question, line)?
        };
        self.check(&answer)?;
        if question.topic == Topic::Place {
            let draft = self.draft(self.place(&answer), Existing::Kept)?;
            self.answers.insert((Topic::Place, 0), answer);
            return Ok(draft);
        }
        self.answers
            .insert((question.topic, self.at.switch), answer);
        self.go_on();
        Ok(Answered::Next)
    }

    /// The usual place need not be text that can be typed.
    fn place(&self, answer: &str) -> PathBuf {
        let usual = self.usual_place.clone();
        let usual = usual.filter(|place| place.display().to_string() == answer);
        usual.unwrap_or_else(|| PathBuf::from(answer))
    }

    fn draft(&self, path: PathBuf, existing: Existing) -> Result<Answered, Refusal> {
        let text = profile::text(self);
        match Meter::read(&text) {
            Ok(_) => Ok(Answered::Write(Draft {
                path,
                text,
                existing,
            })),
            // Never so far: every answer was checked. But nothing is written that cannot be read.
            Err(complaints) => {
                let first = complaints.first().map(ToString::to_string);
                let first = first.unwrap_or_default();
                Err(Refusal::found(0..0, "the profile", &first, "other answers"))
            }
        }
    }

    /// Checks an answer against those before.
    fn check(&self, answer: &str) -> Result<(), Refusal> {
        let question = self.at.question;
        let refuse = |accepted: String| {
            let found = answer.to_owned();
            Err(Refusal::out_of_range(
                0..answer.len(),
                question.name,
                found,
                accepted,
            ))
        };
        let value = answers::amount(question, answer).unwrap_or_default();
        match question.topic {
            Topic::SwitchLabel => {
                let mut before = (0..self.at.switch).filter_map(|switch| {
                    let label = self.answers.get(&(Topic::SwitchLabel, switch))?;
                    (label == answer).then_some(switch + 1)
                });
                match before.next() {
                    Some(other) => refuse(format!("a label that position {other} does not have")),
                    None => Ok(()),
                }
            }
            Topic::DialHigh => {
                let low = self.amount(Topic::DialLow).unwrap_or_default();
                if low < value {
                    Ok(())
                } else {
                    refuse(format!("above the smallest number, {low}"))
                }
            }
            Topic::Division | Topic::Repeatability if value > self.span() => {
                refuse(format!("at most the whole dial, {}", self.span()))
            }
            Topic::Threshold => {
                let peak = self.amount(Topic::Amplitude).unwrap_or_default();
                if value < peak {
                    Ok(())
                } else {
                    refuse(format!("below the oscillator's peak, {}", Volt::new(peak)))
                }
            }
            _ => Ok(()),
        }
    }

    /// Returns the number that was answered, in the base unit.
    fn amount(&self, topic: Topic) -> Option<f64> {
        let question = QUESTIONS.iter().find(|q| q.topic == topic)?;
        answers::amount(question, self.answer(topic)?)
    }

    fn answer(&self, topic: Topic) -> Option<&str> {
        self.answers.get(&(topic, 0)).map(String::as_str)
    }

    fn answer_to(&self, step: Step) -> Option<&str> {
        let answer = self.answers.get(&(step.question.topic, step.switch));
        answer.map(String::as_str)
    }

    fn given(&self) -> impl Iterator<Item = Step> {
        self.path.iter().copied()
    }

    fn go_on(&mut self) {
        self.path.push(self.at);
        self.at = self.next();
        if self.at.question.topic == Topic::Points {
            self.keep_points_of_this_dial();
        }
    }

    /// Asks whether a file that is there is to be written over.
    pub(super) fn ask_about_existing(&mut self) {
        let asked = QUESTIONS.iter().find(|q| q.when == When::FileExists);
        if let Some(question) = asked {
            self.path.push(self.at);
            self.at = Step {
                question,
                switch: 0,
            };
        }
    }

    fn next(&self) -> Step {
        let topic = self.at.question.topic;
        let count = self.amount(Topic::SwitchCount).unwrap_or(1.0);
        let next_switch = self.at.switch + 1;
        if topic == Topic::SwitchTolerance && (next_switch as f64) < count {
            let first = QUESTIONS.iter().find(|q| q.when == When::EachSwitch);
            return Step {
                question: first.unwrap_or(FIRST.question),
                switch: next_switch,
            };
        }
        let mut later = QUESTIONS.iter().filter(|q| topic < q.topic);
        let next = later.find(|question| match question.when {
            When::Always => true,
            When::EachSwitch => topic < Topic::SwitchTolerance,
            When::Measured => self.answer(Topic::HasPoints) == Some("yes"),
            When::NotMeasured => self.answer(Topic::HasPoints) == Some("no"),
            When::Loaded => self.answer(Topic::Drive) != Some("buffered"),
            When::FileExists => false,
        });
        let is_of_switch = next.is_some_and(|next| next.when == When::EachSwitch);
        Step {
            question: next.unwrap_or(self.at.question),
            switch: if is_of_switch { self.at.switch } else { 0 },
        }
    }

    /// Goes to the question before, whose answer is then the default; from the points one point back. Returns whether
    /// there is one.
    pub(super) fn step_back(&mut self) -> bool {
        if self.at.question.topic == Topic::Points && self.points.pop().is_some() {
            return true;
        }
        let before = self.path.pop();
        if let Some(step) = before {
            self.at = step;
        }
        before.is_some()
    }

    /// Starts from the first question; the answers become defaults.
    pub(super) fn start_over(&mut self) {
        self.at = FIRST;
        self.path.clear();
        self.input.reset();
    }
}

const FIRST: Step = Step {
    question: &QUESTIONS[0],
    switch: 0,
};
