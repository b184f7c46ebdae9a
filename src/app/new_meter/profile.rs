//! From the answers to the text of a profile, every key with its comment, and to the same in short.

use std::fmt::Write;

use super::answers::IDEAL;
use super::questions::{Accepts, Topic};
use super::{Interview, Step};

const HEAD: &str = "\
# A balance meter, described by question and answer. Change what you like: `nulltray check FILE` tells every mistake with
# its line. Tolerances are half widths: the true value lies between the two ends.
";

const TAIL: &str = "
# Known good parts kept beside the meter may follow, each headed [[check]]: label, capacitance, uncertainty, loss.
";

/// Writes the profile.
pub(super) fn text(interview: &Interview) -> String {
    let mut text = HEAD.to_owned();
    let mut section = "";
    for step in interview.given() {
        let question = step.question;
        let Some(value) = value(interview, step) else {
            continue;
        };
        let starts_anew = question.topic == Topic::SwitchLabel;
        if question.section != section || starts_anew {
            section = question.section;
            let head = if section == "switch" {
                "[[switch]]".to_owned()
            } else {
                format!("[{section}]")
            };
            let _ = writeln!(text, "\n{head}");
        }
        let key = question.name;
        // One comment a key will do for all positions of the switch.
        let comment = if step.switch == 0 {
            format!("# {}", question.good_for)
        } else {
            String::new()
        };
        let line = match value.split_once('\n') {
            Some((first, rest)) => format!("{:<32} {comment}\n{rest}", format!("{key} = {first}")),
            None => format!("{:<32} {comment}", format!("{key} = {value}")),
        };
        text.push_str(line.trim_end());
        text.push('\n');
    }
    text.push_str(TAIL);
    text
}

/// Returns the value as TOML; `None` for what the profile does not hold.
fn value(interview: &Interview, step: Step) -> Option<String> {
    let answer = interview.answer_to(step)?;
    Some(match step.question.topic {
        Topic::SwitchCount
        | Topic::HasPoints
        | Topic::Direction
        | Topic::Place
        | Topic::Overwrite => return None,
        Topic::GainBandwidth if answer == IDEAL => return None,
        Topic::Sweep if interview.answer(Topic::Direction) == Some("counterclockwise") => {
            format!("-{answer}")
        }
        Topic::Points => {
            let mut rows = String::from("[\n");
            for point in &interview.points {
                let _ = writeln!(rows, "  [{}, {}],", point.reading, quoted(&point.written));
            }
            rows + "]"
        }
        _ if matches!(step.question.accepts, Accepts::Number(..)) => answer.to_owned(),
        _ => quoted(answer),
    })
}

/// Writes a basic string of TOML 1.0.
fn quoted(text: &str) -> String {
    let mut quoted = String::from("\"");
    for character in text.chars() {
        match character {
            '"' | '\\' => quoted.extend(['\\', character]),
            _ if character.is_control() => {
                let _ = write!(quoted, "\\u{:04X}", u32::from(character));
            }
            _ => quoted.push(character),
        }
    }
    quoted + "\""
}

/// Returns the answers given so far, a line a table of the profile.
pub(super) fn short(interview: &Interview) -> Vec<String> {
    let mut lines: Vec<(&str, String)> = Vec::new();
    for step in interview.given() {
        let topic = step.question.topic;
        let answer = interview.answer_to(step);
        let Some(words) = answer.and_then(|answer| in_short(interview, step, answer)) else {
            continue;
        };
        let section = match topic {
            Topic::Direction => "dial",
            _ => step.question.section,
        };
        match lines.last_mut() {
            Some((last, line)) if *last == section => {
                line.push_str(match topic {
                    Topic::SwitchLabel => "; ",
                    topic if topic == Topic::SwitchResistance || is_half_width(topic) => " ",
                    _ => ", ",
                });
                line.push_str(&words);
            }
            _ if section.is_empty() => lines.push((section, words)),
            _ => lines.push((section, format!("{section}: {words}"))),
        }
    }
    lines.into_iter().map(|(_, line)| line).collect()
}

/// Returns one answer in short; `None` for what is not worth showing.
fn in_short(interview: &Interview, step: Step, answer: &str) -> Option<String> {
    let topic = step.question.topic;
    Some(match topic {
        Topic::SwitchCount | Topic::HasPoints | Topic::Place | Topic::Overwrite => return None,
        Topic::Name
        | Topic::SwitchLabel
        | Topic::SwitchResistance
        | Topic::ReferenceCapacitance
        | Topic::Direction
        | Topic::Drive
        | Topic::Stray
        | Topic::Threshold => answer.to_owned(),
        Topic::Points => {
            let ends = interview.points.first().zip(interview.points.last())?;
            let count = interview.points.len();
            format!("{count} points, {} … {}", ends.0.written, ends.1.written)
        }
        Topic::PointUncertainty => format!("known to {answer}"),
        Topic::Sweep => format!("{answer} degrees"),
        _ if is_half_width(topic) => format!("±{answer}"),
        _ => format!("{} {answer}", step.question.name.replace('_', " ")),
    })
}

/// Whether the answer says how far the one before may be off.
fn is_half_width(topic: Topic) -> bool {
    matches!(
        topic,
        Topic::SwitchTolerance
            | Topic::ReferenceTolerance
            | Topic::DialTolerance
            | Topic::StrayTolerance
            | Topic::ThresholdTolerance
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn quotes_and_backslashes_are_escaped() {
        assert_eq!(
            quoted("a \"b\" \\ c\u{7f}"),
            "\"a \\\"b\\\" \\\\ c\\u007F\""
        );
    }
}
