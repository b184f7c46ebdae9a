//! `nulltray decode`: what a marking may mean.

use std::collections::HashMap;
use std::io::{BufRead, BufReader, BufWriter, Read, Write};

use super::Streams;
use super::args::DecodeArgs;
use super::failure::{Failure, Finish};
use super::harmless::{line, write_json};
use super::setup::unreadable;
use super::shapes::DecodingShape;
use crate::marking::{Decoding, Reading, Used, decode};
use crate::quantity::{Farad, Prefix, Quantity, Resolution, engineering_in};
use crate::tables::Family;

/// The longest marking read from standard input, in bytes; what a line has beyond is dropped and said.
const LONGEST_MARKING: u64 = 4096;
/// How many further readings are written for people; `--json` has them all.
const FURTHER_READINGS: usize = 6;
/// Answers to markings from standard input are kept up to this size, in bytes.
const KEPT_BYTES: usize = 4 << 20;

/// Runs the command.
pub(super) fn run(args: &DecodeArgs, streams: &mut Streams<'_>) -> Result<Finish, Failure> {
    let family = args.family.as_deref().map(family_named).transpose()?;
    let markings: Vec<String> = args
        .markings
        .iter()
        .map(|marking| marking.to_string_lossy().into_owned())
        .collect();
    if markings.iter().any(|marking| marking == "-") {
        if markings.len() > 1 {
            return Err(Failure::usage(
                "- reads the markings from standard input: no others beside it",
            ));
        }
        return from_stdin(family, args.json, streams);
    }
    let mut out = BufWriter::new(&mut *streams.stdout);
    let decodings: Vec<Decoding> = markings.iter().map(|m| decode_marking(m, family)).collect();
    let shapes = || {
        markings
            .iter()
            .zip(&decodings)
            .map(|(m, d)| DecodingShape::of(m, d))
    };
    if args.json {
        match decodings.as_slice() {
            [only] => write_json(&mut out, &DecodingShape::of(first(&markings), only))?,
            _ => write_json(&mut out, &shapes().collect::<Vec<_>>())?,
        }
        writeln!(out)?;
    } else {
        for (n, (marking, decoding)) in markings.iter().zip(&decodings).enumerate() {
            if n > 0 {
                writeln!(out)?;
            }
            write_words(&mut out, marking, decoding)?;
        }
    }
    out.flush()?;
    Ok(Finish::after(
        decodings.iter().filter(|d| d.readings.is_empty()).count(),
    ))
}

/// Returns the family of this name, or a failure that lists the names.
pub(super) fn family_named(name: &str) -> Result<Family, Failure> {
    Family::named(name).ok_or_else(|| Failure::usage(unknown_family(name)))
}

/// Returns what to say of a family that does not exist.
pub(super) fn unknown_family(name: &str) -> String {
    let names: Vec<&str> = Family::all().map(Family::name).collect();
    format!("no family is called {}", among(name, &names))
}

/// Returns a word with the nearest of the names that would be accepted, and all of them:
/// "`flim`; did you mean `film`? Known: ceramic, film".
pub(super) fn among(word: &str, names: &[&str]) -> String {
    const NEAR: f64 = 0.7;
    let small = word.to_lowercase();
    let near = names
        .iter()
        .map(|name| (strsim::jaro_winkler(&small, &name.to_lowercase()), name))
        .filter(|(likeness, _)| *likeness >= NEAR)
        .max_by(|a, b| a.0.total_cmp(&b.0));
    let word = line(word);
    let names = names.join(", ");
    let names = line(&names);
    match near {
        Some((_, near)) => format!("`{word}`; did you mean `{}`? Known: {names}", line(near)),
        None => format!("`{word}`; known: {names}"),
    }
}

/// Decodes a marking whose lines are separated by ` | `.
pub(super) fn decode_marking(marking: &str, family: Option<Family>) -> Decoding {
    decode(&marking.replace(" | ", "\n"), family)
}

/// One marking a line, one answer a line, in constant memory.
fn from_stdin(
    family: Option<Family>,
    json: bool,
    streams: &mut Streams<'_>,
) -> Result<Finish, Failure> {
    let mut input = BufReader::new(&mut *streams.stdin);
    let mut out = BufWriter::new(&mut *streams.stdout);
    let mut bytes = Vec::new();
    let mut answers = Answers::default();
    let mut n_lines = 0;
    let mut n_wrong = 0;
    loop {
        bytes.clear();
        let n_read = (&mut input)
            .take(LONGEST_MARKING)
            .read_until(b'\n', &mut bytes)
            .map_err(|error| unreadable("standard input", &error))?;
        if n_read == 0 {
            break;
        }
        n_lines += 1;
        if n_lines == 1 && bytes.starts_with(b"\xef\xbb\xbf") {
            bytes.drain(..3);
        }
        if !bytes.ends_with(b"\n") && n_read as u64 == LONGEST_MARKING {
            let n_dropped = input
                .skip_until(b'\n')
                .map_err(|error| unreadable("standard input", &error))?;
            if n_dropped > 0 {
                n_wrong += 1;
                let _ = writeln!(
                    streams.stderr,
                    "line {n_lines} is longer than {LONGEST_MARKING} bytes: the rest of it is not read"
                );
            }
        }
        let marking = String::from_utf8_lossy(&bytes);
        let marking = marking.trim_end_matches(['\n', '\r']);
        let answer = answers.to(marking, family, json)?;
        n_wrong += usize::from(answer.is_without_reading);
        out.write_all(&answer.text)?;
        // Whoever waits for the answer to one line gets it before sending the next.
        if input.buffer().is_empty() {
            out.flush()?;
        }
    }
    out.flush()?;
    Ok(Finish::after(n_wrong))
}

/// Answers given so far: lists of parts name the same marking many times. Bounded by their size; when there are more, all
/// are forgotten and collected afresh.
#[derive(Default)]
struct Answers {
    given: HashMap<String, Answer>,
    n_bytes: usize,
}

struct Answer {
    text: Vec<u8>,
    is_without_reading: bool,
}

impl Answers {
    fn to(
        &mut self,
        marking: &str,
        family: Option<Family>,
        json: bool,
    ) -> std::io::Result<&Answer> {
        if !self.given.contains_key(marking) {
            let decoding = decode_marking(marking, family);
            let mut text = Vec::new();
            if json {
                write_json(&mut text, &DecodingShape::of(marking, &decoding))?;
                text.push(b'\n');
            } else {
                write_words(&mut text, marking, &decoding)?;
            }
            if self.n_bytes > KEPT_BYTES {
                *self = Self::default();
            }
            self.n_bytes += marking.len() + text.len();
            let answer = Answer {
                text,
                is_without_reading: decoding.readings.is_empty(),
            };
            self.given.insert(marking.to_owned(), answer);
        }
        Ok(&self.given[marking])
    }
}

/// Writes a decoding for people.
fn write_words(out: &mut dyn Write, marking: &str, decoding: &Decoding) -> std::io::Result<()> {
    writeln!(out, "{}", line(marking))?;
    let Some((best, others)) = decoding.readings.split_first() else {
        writeln!(out, "  no reading")?;
        write_without_value(out, decoding)?;
        return write_list(out, "unexplained", &decoding.unexplained);
    };
    write_reading(out, best)?;
    write_list(out, "unexplained", &decoding.unexplained)?;
    for other in others.iter().take(FURTHER_READINGS) {
        writeln!(
            out,
            "  or {}, {}",
            other.in_words(),
            percent(other.plausibility)
        )?;
        write_list(out, "why", &other.why)?;
    }
    let n_left_out = others.len().saturating_sub(FURTHER_READINGS) + decoding.omitted;
    if n_left_out > 0 {
        writeln!(out, "  and {n_left_out} less plausible")?;
    }
    write_without_value(out, decoding)
}

/// Writes what the marking is if nothing in it is a value: a date, a lot.
fn write_without_value(out: &mut dyn Write, decoding: &Decoding) -> std::io::Result<()> {
    let Some(nothing) = &decoding.without_value else {
        return Ok(());
    };
    writeln!(
        out,
        "  or no value at all, {}",
        percent(nothing.plausibility)
    )?;
    write_list(out, "used", &used_in_words(&nothing.used))?;
    write_list(out, "why", &nothing.why)
}

fn used_in_words(used: &[Used]) -> Vec<String> {
    used.iter()
        .map(|used| format!("`{}` {}", used.text, used.role.word()))
        .collect()
}

fn write_reading(out: &mut dyn Write, reading: &Reading) -> std::io::Result<()> {
    let value = reading.capacitance;
    let units = ["p", "n", "µ"].into_iter().filter_map(Prefix::named);
    let spellings: Vec<String> = units
        .map(|prefix| engineering_in(value.get(), Resolution::Digits(6), prefix, Farad::SYMBOL))
        .collect();
    writeln!(
        out,
        "  {}, {}",
        spellings.join(" = "),
        percent(reading.plausibility)
    )?;
    match reading.tolerance.map(|t| (t, t.limits(value))) {
        Some((tolerance, (low, Some(high)))) => {
            item(out, "limits", &format!("{low} to {high}, {tolerance}"))?;
        }
        Some((_, (low, None))) => item(out, "limits", &format!("at least {low}"))?,
        None => item(out, "limits", "no tolerance marked")?,
    }
    if let Some(voltage) = reading.voltage {
        item(out, "voltage", &voltage.to_string())?;
    }
    if let Some(family) = reading.family {
        item(out, "family", family.name())?;
    }
    let facts = [
        ("characteristic", &reading.characteristic),
        ("safety class", &reading.safety_class),
        ("date", &reading.date),
    ];
    for (name, fact) in facts {
        if let Some(fact) = fact {
            item(out, name, fact)?;
        }
    }
    if let Some(sections) = &reading.sections {
        let sections: Vec<String> = sections.iter().map(ToString::to_string).collect();
        item(out, "sections", &sections.join(" + "))?;
    }
    write_list(out, "used", &used_in_words(&reading.used))?;
    write_list(out, "why", &reading.why)
}

fn write_list(out: &mut dyn Write, name: &str, rows: &[String]) -> std::io::Result<()> {
    if rows.is_empty() {
        return Ok(());
    }
    let separator = if name == "why" { "; " } else { ", " };
    item(out, name, &rows.join(separator))
}

fn item(out: &mut dyn Write, name: &str, text: &str) -> std::io::Result<()> {
    writeln!(out, "    {name:<14} {}", line(text))
}

fn percent(plausibility: f64) -> String {
    format!("plausibility {} %", engineering_percent(plausibility))
}

fn engineering_percent(part: f64) -> String {
    let percent = part * 100.0;
    if percent > 0.0 && percent < 0.1 {
        "under 0.1".to_owned()
    } else {
        format!("{}", (percent * 10.0).round() / 10.0)
    }
}

fn first(markings: &[String]) -> &str {
    markings.first().map_or("", String::as_str)
}
