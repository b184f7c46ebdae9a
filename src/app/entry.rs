//! What is typed at a prompt, on the bench and in `line` alike.
//!
//! ```text
//! at either prompt
//!   nothing | "//" | "undo" | "redo" | "/" number | "+" number
//!   "leak" resistance ["at" voltage] | "looks" text | "heated" number ["h" | "d"] | "temperature" number ["°C"]
//!   "hold" text | "note" text | "check" label | "zero" | "new meter"
//! at the marking prompt
//!   any other text is a marking
//! at the dial prompt
//!   repeats                        one position, read once or more    21.8    21,8/21.6
//!   edge blank edge | edge - edge  both ends of the dark arc          21.4 22.2    21.4-22.2    stop 5
//!   ("n" | "*") [reading]          never dark, dimmest there
//!   "a" | "**"                     dark everywhere
//!   "d" | "+" | "l" | "-"          lamp dark or lit at the parked place
//! edge     = repeats | "stop"
//! repeats  = reading {"/" reading}
//! reading  = number with point or comma, within the dial's numbers
//! ```

use super::sighting::{Sighting, place_of, read_sighting};
use crate::meter::{Dial, DialReading};
use crate::quantity::{Ohm, Refusal, Volt, number, parse};

/// Which of the two prompts is being answered.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Prompt {
    /// What is printed on the part.
    Marking,
    /// What the dial says.
    Dial,
}

/// What was typed, understood.
#[derive(Clone, Debug, PartialEq)]
pub enum Typed {
    /// Enter alone.
    Nothing,
    /// A marking, to be decoded.
    Marking(String),
    /// What was seen on the lamp and the dial.
    Sighting(Sighting),
    /// Take back the last entry.
    Undo,
    /// Bring it back.
    Redo,
    /// Another switch, counted from 1.
    Switch(usize),
    /// Another reading of the marking, counted from 1.
    Reading(usize),
    /// Something about the last part.
    Addition(Addition),
    /// Measure the check part with this label.
    Check(String),
    /// Measure the open terminals.
    Zero,
    /// Describe a meter by questions and answers.
    NewMeter,
}

/// Something that belongs to the last part.
#[derive(Clone, Debug, PartialEq)]
pub enum Addition {
    /// Insulation resistance and the voltage it was measured at.
    Leak(Ohm, Option<Volt>),
    /// What it looks like.
    Looks(String),
    /// Hours since it was last heated.
    Heated(f64),
    /// Temperature in degrees Celsius.
    Temperature(f64),
    /// Free text.
    Note(String),
}

/// Reads a line typed at a prompt. `parked` is the place the screen names for parking the dial, if it names one.
///
/// # Errors
/// Refuses what the grammar of the module page does not take, readings that are not on the dial, and a lamp without a
/// parked place, saying what was found and what would be accepted.
pub fn read(
    text: &str,
    prompt: Prompt,
    dial: &Dial,
    parked: Option<DialReading>,
) -> Result<Typed, Refusal> {
    let body = text.trim();
    if let Some(typed) = read_anywhere(text, body)? {
        return Ok(typed);
    }
    match prompt {
        Prompt::Marking => Ok(Typed::Marking(body.to_owned())),
        Prompt::Dial => read_sighting(text, dial, parked).map(Typed::Sighting),
    }
}

/// Reads what may stand at either prompt; `None` if it is for the prompt itself.
fn read_anywhere(text: &str, body: &str) -> Result<Option<Typed>, Refusal> {
    let (word, rest) = match body.split_once(char::is_whitespace) {
        Some((word, rest)) => (word, rest.trim()),
        None => (body, ""),
    };
    let lower = word.to_lowercase();
    let typed = match (lower.as_str(), rest) {
        ("", _) => Typed::Nothing,
        ("//" | "undo", "") => Typed::Undo,
        ("redo", "") => Typed::Redo,
        ("zero", "") => Typed::Zero,
        ("new", rest) if rest.eq_ignore_ascii_case("meter") => Typed::NewMeter,
        ("check", _) => Typed::Check(needed(text, rest, "the label of a check part")?),
        ("note", _) => Typed::Addition(Addition::Note(needed(text, rest, "the note")?)),
        ("hold", _) => {
            let why = needed(text, rest, "what it waits for, as in `hold re-form`")?;
            Typed::Addition(Addition::Note(format!("hold: {why}")))
        }
        ("looks", _) => Typed::Addition(Addition::Looks(needed(
            text,
            rest,
            "what it looks like, as in `looks cracked`, or `looks ok`",
        )?)),
        ("heated", _) => Typed::Addition(Addition::Heated(hours(text, rest)?)),
        ("temperature", _) => Typed::Addition(Addition::Temperature(celsius(text, rest)?)),
        ("leak", _) => Typed::Addition(leak(text, rest)?),
        _ => return numbered(text, body),
    };
    Ok(Some(typed))
}

/// Reads `/2`, the second switch, and `+3`, the third reading.
fn numbered(text: &str, body: &str) -> Result<Option<Typed>, Refusal> {
    let digits_only =
        |digits: &str| !digits.is_empty() && digits.bytes().all(|b| b.is_ascii_digit());
    if let Some(digits) = body.strip_prefix('/') {
        let digits = digits.trim();
        if !digits_only(digits) {
            let place = place_of(text, digits);
            return Err(Refusal::found(
                place,
                "the number of a switch",
                digits,
                "a whole number from 1, as in /2; // takes back the last entry",
            ));
        }
        return Ok(digits.parse().ok().map(Typed::Switch));
    }
    match body.strip_prefix('+') {
        Some(digits) if digits_only(digits) && digits.len() <= 2 => {
            Ok(digits.parse().ok().map(Typed::Reading))
        }
        _ => Ok(None),
    }
}

fn needed(text: &str, rest: &str, accepted: &'static str) -> Result<String, Refusal> {
    if rest.is_empty() {
        let end = text.len()..text.len();
        return Err(Refusal::found(end, "the entry", "", accepted));
    }
    Ok(rest.to_owned())
}

/// Reads a number and an optional unit; returns it with the index of the unit in the list, 0 if none is given.
fn with_unit(
    text: &str,
    rest: &str,
    reading: &'static str,
    units: &'static [&'static str],
    accepted: &'static str,
) -> Result<(f64, usize), Refusal> {
    let at = place_of(text, rest);
    if rest.is_empty() {
        let end = text.len()..text.len();
        return Err(Refusal::found(end, reading, "", accepted));
    }
    let (value, used) = number(rest, at.start, reading)?;
    let tail = rest.get(used..).unwrap_or_default().trim();
    let unit = if tail.is_empty() {
        Some(0)
    } else {
        units
            .iter()
            .position(|unit| unit.eq_ignore_ascii_case(tail))
    };
    unit.map(|unit| (value, unit))
        .ok_or_else(|| Refusal::found(at.start + used..at.end, reading, tail, accepted))
}

fn hours(text: &str, rest: &str) -> Result<f64, Refusal> {
    const ACCEPTED: &str = "hours or days since it was heated, as in `heated 2 h`";
    let units = &["h", "d", "hours", "hour", "days", "day"];
    let (value, unit) = with_unit(text, rest, "the time since heating", units, ACCEPTED)?;
    if value < 0.0 {
        let place = place_of(text, rest);
        return Err(Refusal::out_of_range(
            place,
            "the time since heating",
            rest.to_owned(),
            ACCEPTED,
        ));
    }
    Ok(if matches!(unit, 1 | 4 | 5) {
        value * 24.0
    } else {
        value
    })
}

fn celsius(text: &str, rest: &str) -> Result<f64, Refusal> {
    const ACCEPTED: &str = "degrees Celsius from -90 to 200, as in `temperature 19`";
    let (value, _) = with_unit(text, rest, "the temperature", &["°C", "C", "°"], ACCEPTED)?;
    if (-90.0..=200.0).contains(&value) {
        return Ok(value);
    }
    let place = place_of(text, rest);
    Err(Refusal::out_of_range(
        place,
        "the temperature",
        rest.to_owned(),
        ACCEPTED,
    ))
}

fn leak(text: &str, rest: &str) -> Result<Addition, Refusal> {
    const ACCEPTED: &str = "a resistance and the voltage, as in `leak 12 MΩ at 63 V`";
    if rest.is_empty() {
        let end = text.len()..text.len();
        return Err(Refusal::found(end, "the leakage", "", ACCEPTED));
    }
    let (resistance, voltage) = match rest.split_once(" at ") {
        Some((resistance, voltage)) => (resistance, Some(voltage)),
        None => (rest, None),
    };
    let moved = |piece: &str, refusal: Refusal| {
        let start = place_of(text, piece).start;
        Refusal {
            at: refusal.at.start + start..refusal.at.end + start,
            ..refusal
        }
    };
    let ohms: Ohm = parse(resistance).map_err(|refusal| moved(resistance, refusal))?;
    let volts = voltage
        .map(|piece| parse::<Volt>(piece).map_err(|refusal| moved(piece, refusal)))
        .transpose()?;
    if ohms.get() < 0.0 || volts.is_some_and(|v| v.get() <= 0.0) {
        let place = place_of(text, rest);
        return Err(Refusal::out_of_range(
            place,
            "the leakage",
            rest.to_owned(),
            ACCEPTED,
        ));
    }
    Ok(Addition::Leak(ohms, volts))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::meter::{Degrees, Edge, Seen, Taper};
    use crate::quantity::Fraction;
    use proptest::prelude::*;

    fn dial() -> Dial {
        Dial {
            low: DialReading::new(0.0),
            high: DialReading::new(100.0),
            division: 1.0,
            taper: Taper::Linear {
                total: Ohm::new(4700.0),
                end: Ohm::new(20.0),
                tolerance: Fraction::new(0.1),
            },
            sweep: Degrees(270.0),
        }
    }

    fn shown(text: &str, prompt: Prompt) -> String {
        match read(text, prompt, &dial(), Some(DialReading::new(46.8))) {
            Err(refusal) => format!("refused: {refusal}"),
            Ok(Typed::Sighting(s)) => {
                let what = match s.seen {
                    Seen::Middle(r) => format!("middle {} of {}", r.mean(), r.count()),
                    Seen::Edges { from, to } => format!("edges {} {}", edge(from), edge(to)),
                    Seen::NeverDark { dimmest: None } => "never".to_owned(),
                    Seen::NeverDark { dimmest: Some(at) } => format!("never, dimmest {at}"),
                    Seen::AlwaysDark => "always".to_owned(),
                    Seen::Parked { at, lamp } => format!("parked {at} {lamp:?}"),
                };
                let edges = s.edges.map(|(from, to)| format!("{from} {to}"));
                let cells = [s.dial, edges, s.lamp.map(str::to_owned)];
                let cells: Vec<String> = cells.into_iter().flatten().collect();
                format!("{what} [{}]", cells.join(", "))
            }
            Ok(other) => format!("{other:?}"),
        }
    }

    fn edge(edge: Edge) -> String {
        match edge {
            Edge::At(repeats) => repeats.mean().to_string(),
            Edge::Stop => "stop".to_owned(),
        }
    }

    #[track_caller]
    fn at_dial(text: &str, expected: &str) {
        assert_eq!(shown(text, Prompt::Dial), expected, "at the dial: {text:?}");
    }

    #[track_caller]
    fn at_marking(text: &str, expected: &str) {
        assert_eq!(
            shown(text, Prompt::Marking),
            expected,
            "at the marking: {text:?}"
        );
    }

    #[test]
    fn readings_take_a_point_or_a_comma() {
        at_dial("21.8", "middle 21.8 of 1 [21.8]");
        at_dial(" 21,8 ", "middle 21.8 of 1 [21.8]");
        at_dial("100", "middle 100 of 1 [100]");
        at_dial("21.8/21.6/21.9", "middle 21.767 of 3 [21.8/21.6/21.9]");
        at_dial(".5", "middle 0.5 of 1 [.5]");
    }

    #[test]
    fn edges_come_in_any_order_and_may_be_cut() {
        at_dial("21.4 22.2", "edges 21.4 22.2 [21.4 22.2]");
        at_dial("22,2-21,4", "edges 22.2 21.4 [22.2 21.4]");
        at_dial("21.4 - 22.2", "edges 21.4 22.2 [21.4 22.2]");
        at_dial("21.4/21.5 22.2", "edges 21.45 22.2 [21.4/21.5 22.2]");
        at_dial("stop 5", "edges stop 5 [stop 5]");
        at_dial("95-stop", "edges 95 stop [95 stop]");
        at_dial("0 5", "edges stop 5 [0 5]");
        at_dial("0 80", "edges 0 80 [0 80]");
        at_dial("0 0", "edges 0 0 [0 0]");
        at_dial("stop stop", "always [always]");
        at_dial("0-100", "always [always]");
    }

    #[test]
    fn lamps_have_letters_and_number_pad_forms() {
        at_dial("n", "never [never]");
        at_dial("*", "never [never]");
        at_dial("n 46", "never, dimmest 46 [46, never]");
        at_dial("*46", "never, dimmest 46 [46, never]");
        at_dial("A", "always [always]");
        at_dial("**", "always [always]");
    }

    #[test]
    fn a_lamp_is_that_of_the_parked_place() {
        at_dial("d", "parked 46.8 Dark [46.8, dark]");
        at_dial("+", "parked 46.8 Dark [46.8, dark]");
        at_dial("L", "parked 46.8 Lit [46.8, lit]");
        at_dial("-", "parked 46.8 Lit [46.8, lit]");
    }

    #[test]
    fn commands_stand_at_either_prompt() {
        for check in [at_dial, at_marking] {
            check("", "Nothing");
            check("//", "Undo");
            check("undo", "Undo");
            check("redo", "Redo");
            check("/2", "Switch(2)");
            check("+3", "Reading(3)");
            check("zero", "Zero");
            check("new meter", "NewMeter");
            check("check blue 10 nF", "Check(\"blue 10 nF\")");
            check("note from board 7", "Addition(Note(\"from board 7\"))");
            check("hold re-form", "Addition(Note(\"hold: re-form\"))");
            check("looks cracked", "Addition(Looks(\"cracked\"))");
            check("heated 2 h", "Addition(Heated(2.0))");
            check("heated 1 d", "Addition(Heated(24.0))");
            check("temperature 19", "Addition(Temperature(19.0))");
            check("temperature -3,5 °C", "Addition(Temperature(-3.5))");
            check(
                "leak 12 MΩ at 63 V",
                "Addition(Leak(Ohm(12000000.0), Some(Volt(63.0))))",
            );
            check("leak 470k", "Addition(Leak(Ohm(470000.0), None))");
        }
    }

    #[test]
    fn everything_else_at_the_marking_prompt_is_a_marking() {
        at_marking("224J 2A", "Marking(\"224J 2A\")");
        at_marking("n", "Marking(\"n\")");
        at_marking("46", "Marking(\"46\")");
        at_marking("+80-20", "Marking(\"+80-20\")");
    }

    #[test]
    fn refusals_say_what_was_found_and_what_is_accepted() {
        at_dial(
            "146",
            "refused: the dial reading 146 is out of range; accepted here: 0 to 100, the numbers of this dial",
        );
        at_dial(
            "21.8 x",
            "refused: found `x` at position 6 while reading the dial entry; accepted here: a reading from 0 to 100, both edges as in 21.4-22.2, n or * never dark, a or ** always dark, d or + dark, l or - lit",
        );
        at_dial(
            "1 2 3",
            "refused: found `3` at position 5 while reading the dial entry; accepted here: one reading, or the two edges of the dark arc",
        );
        at_dial(
            "stop",
            "refused: found the end after position 4 while reading the dial entry; accepted here: the other edge, as in `stop 12`",
        );
        at_dial(
            "/x",
            "refused: found `x` at position 2 while reading the number of a switch; accepted here: a whole number from 1, as in /2; // takes back the last entry",
        );
        at_dial(
            "heated x",
            "refused: found `x` at position 8 while reading the time since heating; accepted here: a number",
        );
    }

    #[test]
    fn a_lamp_needs_a_parked_place() {
        let refusal = read("d", Prompt::Dial, &dial(), None).expect_err("nothing to park at");
        assert_eq!(
            refusal.to_string(),
            "found `d` at position 1 while reading the dial entry; accepted here: a dial reading: no place to park the dial is known for this marking"
        );
    }

    proptest! {
        #[test]
        fn any_text_is_read_or_refused(text in ".{0,40}") {
            for prompt in [Prompt::Marking, Prompt::Dial] {
                if let Err(refusal) = read(&text, prompt, &dial(), None) {
                    prop_assert!(refusal.at.end <= text.len(), "{refusal:?}");
                }
            }
        }

        #[test]
        fn entries_made_of_their_own_signs_are_read_or_refused(text in "[-0-9./,*+ stopnadl]{0,12}") {
            if let Ok(Typed::Sighting(Sighting { seen: Seen::Middle(repeats), .. })) = read(&text, Prompt::Dial, &dial(), None) {
                prop_assert!(dial().admits(repeats.mean()));
            }
        }
    }
}
