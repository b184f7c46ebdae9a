//! From what is typed to an answer as the profile writes it: units as people write them, a point for a comma.

use std::ffi::OsStr;
use std::path::Path;

use super::questions::{Accepts, Question, Unit};
use crate::quantity::{
    Farad, Fraction, Hertz, Ohm, Prefix, Quantity, Refusal, Resolution, Volt, engineering,
    engineering_in, number, parse,
};

/// What is written has so many digits; the meter is made from what is written.
const DIGITS: Resolution = Resolution::Digits(12);
/// What the follower is called that does not limit anything.
pub(super) const IDEAL: &str = "ideal";

/// A point of the dial: its number and what was measured there.
#[derive(Clone, Debug, PartialEq)]
pub struct Point {
    /// The number.
    pub reading: f64,
    /// The resistance.
    pub resistance: Ohm,
    /// The resistance as the profile writes it.
    pub written: String,
}

/// Reads an answer; returns it as the profile writes it.
///
/// # Errors
/// Refuses what the question does not accept. What depends on other answers is not looked at here.
pub(super) fn read(question: &'static Question, text: &str) -> Result<String, Refusal> {
    let reading = question.name;
    let body = text.trim();
    let refused = || Refusal::found(0..text.len(), reading, body, accepted(question));
    let one_of = |words: &[&str]| {
        let lower = body.to_lowercase();
        let mut like = words.iter().filter(|word| word.starts_with(&lower));
        match (like.next(), like.next()) {
            (Some(word), None) if !lower.is_empty() => Ok((*word).to_owned()),
            _ => Err(refused()),
        }
    };
    match question.accepts {
        Accepts::Words(most) => {
            let count = body.chars().count();
            let is_fine = 1 <= count && count <= most && !body.contains(char::is_control);
            is_fine.then(|| body.to_owned()).ok_or_else(refused)
        }
        Accepts::Count(most) => {
            let count = body.parse().ok().filter(|n| (1..=most).contains(n));
            count.map(|n: usize| n.to_string()).ok_or_else(refused)
        }
        Accepts::QuantityOrIdeal(..) if body.eq_ignore_ascii_case(IDEAL) => Ok(IDEAL.to_owned()),
        Accepts::Quantity(unit, low, high) | Accepts::QuantityOrIdeal(unit, low, high) => {
            let (value, written) = quantity(unit, body)?;
            let bound = |text| quantity(unit, text).map_or(value, |(bound, _)| bound);
            within(question, value, bound(low), bound(high), body).map(|()| written)
        }
        Accepts::Percent => {
            // A number pad has no percent sign, and the question names the unit.
            let fraction = if body.ends_with(|c: char| c.is_ascii_digit()) {
                Fraction::parse(&format!("{body} %"))
            } else {
                Fraction::parse(body)
            }?;
            let no_prefix = Prefix::fitting(1.0, DIGITS);
            let written = engineering_in(fraction.percent(), DIGITS, no_prefix, "%");
            let value = Fraction::parse(&written).map_or(fraction, |f| f);
            let is_fine = 0.0 <= value.get() && value.get() < 1.0;
            is_fine.then_some(written).ok_or_else(|| {
                Refusal::out_of_range(0..text.len(), reading, body.to_owned(), accepted(question))
            })
        }
        Accepts::Number(low, high) => {
            let value = plain_number(question, body)?;
            within(question, value, low, high, body).map(|()| value.to_string())
        }
        Accepts::OneOf(words) => one_of(words),
        Accepts::YesOrNo => one_of(&["yes", "no"]),
        Accepts::Yes => Ok(if body.eq_ignore_ascii_case("yes") {
            "yes".to_owned()
        } else {
            "no".to_owned()
        }),
        // A number typed by habit is no place for a profile.
        Accepts::Path if Path::new(body).extension() != Some(OsStr::new("toml")) => Err(refused()),
        Accepts::Points if body.is_empty() => Err(refused()),
        Accepts::Path | Accepts::Points => Ok(body.to_owned()),
    }
}

/// Reads a point of the dial, as in `50 2.37 kΩ`.
///
/// # Errors
/// Refuses what is not a number and, after a blank, a resistance.
pub(super) fn read_point(question: &'static Question, text: &str) -> Result<Point, Refusal> {
    let body = text.trim();
    let Some((one, other)) = body.split_once(char::is_whitespace) else {
        let end = text.len()..text.len();
        return Err(Refusal::found(end, question.name, "", accepted(question)));
    };
    let reading = plain_number(question, one.trim_end_matches([':', '=']))?;
    let other = other.trim_start_matches([':', '=', ' ']);
    let (ohms, written) = quantity(Unit::Ohm, other).map_err(|refusal| {
        let start = text.len() - other.len();
        Refusal {
            at: refusal.at.start + start..refusal.at.end + start,
            ..refusal
        }
    })?;
    if ohms < 0.0 {
        let place = 0..text.len();
        let found = other.to_owned();
        return Err(Refusal::out_of_range(
            place,
            "resistance",
            found,
            "0 Ω and above",
        ));
    }
    Ok(Point {
        reading,
        resistance: Ohm::new(ohms),
        written,
    })
}

/// Returns which answers a question accepts, in words.
pub(super) fn accepted(question: &Question) -> String {
    match question.accepts {
        Accepts::Words(most) => format!("1 to {most} characters"),
        Accepts::Count(most) => format!("a whole number from 1 to {most}"),
        Accepts::Quantity(_, low, high) => format!("{low} to {high}"),
        Accepts::QuantityOrIdeal(_, low, high) => format!("{low} to {high}, or {IDEAL}"),
        Accepts::Percent => "0 % to below 100 %".to_owned(),
        Accepts::Number(low, high) => format!("{low} to {high}"),
        Accepts::OneOf(words) => words.join(", "),
        Accepts::YesOrNo => "yes, no".to_owned(),
        Accepts::Points => {
            "a dial number, a blank and the resistance there, as in 50 2.37 kΩ".to_owned()
        }
        Accepts::Path => "the path of a file that ends in .toml".to_owned(),
        Accepts::Yes => "yes; anything else asks for another place".to_owned(),
    }
}

/// Returns the number in an answer that was accepted, in the base unit; `None` if it is no number.
pub(super) fn amount(question: &Question, answer: &str) -> Option<f64> {
    match question.accepts {
        Accepts::Quantity(unit, ..) | Accepts::QuantityOrIdeal(unit, ..) => {
            quantity(unit, answer).ok().map(|(value, _)| value)
        }
        Accepts::Number(..) | Accepts::Count(_) => answer.parse().ok(),
        _ => None,
    }
}

/// Reads a quantity; returns what its written form says, and that.
fn quantity(unit: Unit, text: &str) -> Result<(f64, String), Refusal> {
    fn of<Q: Quantity>(text: &str) -> Result<(f64, String), Refusal> {
        let typed: Q = parse(text)?;
        let written = engineering(typed.base(), DIGITS, Q::SYMBOL);
        let value = parse::<Q>(&written)?.base();
        Ok((value, written))
    }
    match unit {
        Unit::Farad => of::<Farad>(text),
        Unit::Hertz => of::<Hertz>(text),
        Unit::Ohm => of::<Ohm>(text),
        Unit::Volt => of::<Volt>(text),
    }
}

/// Reads a plain number, the whole text.
fn plain_number(question: &'static Question, text: &str) -> Result<f64, Refusal> {
    let (value, used) = number(text, 0, question.name)?;
    let tail = text.get(used..).unwrap_or_default().trim();
    if tail.is_empty() {
        // No minus on zero.
        return Ok(value + 0.0);
    }
    let place = used..text.len();
    let accepted = format!("a plain number, {}", accepted(question));
    Err(Refusal::found(place, question.name, tail, accepted))
}

fn within(
    question: &'static Question,
    value: f64,
    low: f64,
    high: f64,
    typed: &str,
) -> Result<(), Refusal> {
    if low <= value && value <= high {
        return Ok(());
    }
    Err(Refusal::out_of_range(
        0..typed.len(),
        question.name,
        typed.to_owned(),
        accepted(question),
    ))
}

#[cfg(test)]
mod tests {
    use super::super::questions::{QUESTIONS, Topic};
    use super::*;

    fn question(topic: Topic) -> &'static Question {
        let found = QUESTIONS.iter().find(|q| q.topic == topic);
        found.expect("every topic has a question")
    }

    #[track_caller]
    fn check(topic: Topic, typed: &str, expected: &str) {
        let shown = read(question(topic), typed).unwrap_or_else(|refusal| refusal.to_string());
        assert_eq!(shown, expected, "{topic:?}: {typed:?}");
    }

    #[test]
    fn answers_are_written_as_people_write_them() {
        check(Topic::Frequency, "1,25k", "1.25 kHz");
        check(Topic::Frequency, "1250", "1.25 kHz");
        check(Topic::SwitchResistance, "4k7", "4.7 kΩ");
        check(Topic::ReferenceCapacitance, "0.068 uF", "68 nF");
        check(Topic::ReferenceTolerance, "2", "2 %");
        check(Topic::ReferenceTolerance, "±0,25%", "0.25 %");
        check(Topic::ReferenceLoss, "0,0004", "0.0004");
        check(Topic::DialLow, "-0", "0");
        check(Topic::HasPoints, "Y", "yes");
        check(Topic::Direction, "counter", "counterclockwise");
        check(Topic::GainBandwidth, "Ideal", "ideal");
        check(Topic::Overwrite, "y", "no");
        check(Topic::Name, " shelf meter ", "shelf meter");
    }

    #[test]
    fn refusals_say_what_is_accepted() {
        check(
            Topic::Frequency,
            "1",
            "frequency 1 is out of range; accepted here: 10 Hz to 1 MHz",
        );
        check(
            Topic::Frequency,
            "1 kV",
            "found `V` at position 4 while reading the unit; accepted here: a prefix p n u µ m k M G, the unit Hz hz HZ",
        );
        check(
            Topic::ReferenceTolerance,
            "100 %",
            "tolerance 100 % is out of range; accepted here: 0 % to below 100 %",
        );
        check(
            Topic::SwitchCount,
            "9",
            "found `9` at position 1 while reading switches; accepted here: a whole number from 1 to 8",
        );
        check(
            Topic::Sweep,
            "270 V",
            "found `V` at position 4 while reading sweep; accepted here: a plain number, 1 to 360",
        );
        check(
            Topic::Drive,
            "",
            "found the end after position 0 while reading drive; accepted here: buffered, divider, inverting",
        );
    }

    #[test]
    fn every_default_is_accepted() {
        for question in QUESTIONS.iter().filter(|q| !q.default.is_empty()) {
            let answer = read(question, question.default);
            assert_eq!(answer.as_deref(), Ok(question.default), "{question:?}");
        }
    }

    #[test]
    fn points_are_a_number_and_a_resistance() {
        let shown = |text| {
            read_point(question(Topic::Points), text).map_or_else(
                |refusal| refusal.to_string(),
                |point| format!("{} {}", point.reading, point.written),
            )
        };
        assert_eq!(shown("50 2,37 kΩ"), "50 2.37 kΩ");
        assert_eq!(shown(" 7,5: 470"), "7.5 470 Ω");
        assert_eq!(
            shown("50"),
            "found the end after position 2 while reading points; accepted here: a dial number, a blank and the resistance there, as in 50 2.37 kΩ"
        );
        assert_eq!(
            shown("50 2 kV"),
            "found `V` at position 7 while reading the unit; accepted here: a prefix p n u µ m k M G, the unit Ω Ω ohm Ohm R"
        );
    }
}
