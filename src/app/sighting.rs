//! What is typed at the dial prompt; the grammar stands with the other entries.

use std::ops::Range;

use crate::meter::{Dial, DialReading, Edge, Lamp, Repeats, Seen};
use crate::quantity::{Refusal, number};

/// What was seen, with the figures as they were typed.
#[derive(Clone, Debug, PartialEq)]
pub struct Sighting {
    /// What was seen.
    pub seen: Seen,
    /// One reading or repeats, or the parked or dimmest place.
    pub dial: Option<String>,
    /// The two edges.
    pub edges: Option<(String, String)>,
    /// `never`, `always`, `dark` or `lit`.
    pub lamp: Option<&'static str>,
    /// The line as it was typed.
    pub typed: String,
}

/// Reads what was seen.
///
/// # Errors
/// As [`super::read_entry`], for the forms of the dial prompt only.
pub fn read_sighting(
    text: &str,
    dial: &Dial,
    parked: Option<DialReading>,
) -> Result<Sighting, Refusal> {
    let body = text.trim();
    let sighting = |seen, dial, edges, lamp| Sighting {
        seen,
        dial,
        edges,
        lamp,
        typed: body.to_owned(),
    };
    let lower = body.to_lowercase();
    match lower.as_str() {
        "**" | "a" => return Ok(sighting(Seen::AlwaysDark, None, None, Some("always"))),
        "+" | "d" | "-" | "l" => {
            let lamp = if matches!(lower.as_str(), "+" | "d") {
                Lamp::Dark
            } else {
                Lamp::Lit
            };
            let Some(at) = parked else {
                return Err(Refusal::found(
                    place_of(text, body),
                    READING,
                    body,
                    "a dial reading: no place to park the dial is known for this marking",
                ));
            };
            let word = match lamp {
                Lamp::Dark => "dark",
                Lamp::Lit => "lit",
            };
            let place = Some(dial.show(at));
            return Ok(sighting(Seen::Parked { at, lamp }, place, None, Some(word)));
        }
        _ => {}
    }
    if let Some(rest) = body.strip_prefix(['n', 'N', '*']) {
        let (dimmest, place) = if rest.trim().is_empty() {
            (None, None)
        } else {
            let (reading, figure) = one_reading(text, rest.trim(), dial)?;
            (Some(reading), Some(figure))
        };
        return Ok(sighting(
            Seen::NeverDark { dimmest },
            place,
            None,
            Some("never"),
        ));
    }
    let pieces = edges_of(body);
    match pieces.as_slice() {
        [one] => {
            let Piece { edge, figures } = read_piece(text, one, dial)?;
            match edge {
                Edge::At(repeats) => Ok(sighting(Seen::Middle(repeats), Some(figures), None, None)),
                Edge::Stop => Err(Refusal::found(
                    end_of(text, one),
                    READING,
                    "",
                    "the other edge, as in `stop 12`",
                )),
            }
        }
        [one, other] => {
            let (one, other) = (read_piece(text, one, dial)?, read_piece(text, other, dial)?);
            let (from, to) = with_stops(one.edge, other.edge, dial);
            if (from, to) == (Edge::Stop, Edge::Stop) {
                return Ok(sighting(Seen::AlwaysDark, None, None, Some("always")));
            }
            let figures = Some((one.figures, other.figures));
            Ok(sighting(Seen::Edges { from, to }, None, figures, None))
        }
        [_, _, third, ..] => Err(Refusal::found(
            place_of(text, third),
            READING,
            third,
            "one reading, or the two edges of the dark arc",
        )),
        [] => Err(Refusal::found(
            place_of(text, body),
            READING,
            body,
            accepted_at_dial(dial),
        )),
    }
}

const READING: &str = "the dial entry";

fn accepted_at_dial(dial: &Dial) -> String {
    format!(
        "a reading from {} to {}, both edges as in 21.4-22.2, n or * never dark, a or ** always dark, d or + dark, l or - lit",
        dial.low, dial.high
    )
}

/// Returns where a piece of a text stands in it.
pub(super) fn place_of(text: &str, piece: &str) -> Range<usize> {
    let start = (piece.as_ptr() as usize).wrapping_sub(text.as_ptr() as usize);
    if start <= text.len() {
        start..start + piece.len()
    } else {
        0..text.len()
    }
}

fn end_of(text: &str, piece: &str) -> Range<usize> {
    let end = place_of(text, piece).end;
    end..end
}

/// Splits at blanks and at hyphens; a hyphen at the end leaves an empty piece, which is then refused as unfinished.
fn edges_of(body: &str) -> Vec<&str> {
    if let Some((one, other)) = body.split_once('-') {
        let mut pieces = vec![one.trim()];
        match other.trim() {
            "" => pieces.push(other),
            other => pieces.extend(other.split_whitespace()),
        }
        return pieces;
    }
    body.split_whitespace().collect()
}

struct Piece {
    edge: Edge,
    figures: String,
}

fn read_piece(text: &str, piece: &str, dial: &Dial) -> Result<Piece, Refusal> {
    if piece.eq_ignore_ascii_case("stop") {
        return Ok(Piece {
            edge: Edge::Stop,
            figures: "stop".to_owned(),
        });
    }
    let mut readings = Vec::new();
    let mut figures = Vec::new();
    for one in piece.split('/') {
        let (reading, figure) = one_reading(text, one.trim(), dial)?;
        readings.push(reading);
        figures.push(figure);
    }
    match Repeats::of(&readings) {
        Some(repeats) => Ok(Piece {
            edge: Edge::At(repeats),
            figures: figures.join("/"),
        }),
        None => Err(Refusal::found(
            place_of(text, piece),
            READING,
            piece,
            accepted_at_dial(dial),
        )),
    }
}

/// Reads one number of the dial; returns it with its figures, which have a point.
fn one_reading(text: &str, piece: &str, dial: &Dial) -> Result<(DialReading, String), Refusal> {
    let place = place_of(text, piece);
    let refuse =
        |found: &str, at: Range<usize>| Refusal::found(at, READING, found, accepted_at_dial(dial));
    let (value, used) = match number(piece, place.start, READING) {
        Ok(read) if piece.starts_with(|c: char| c.is_ascii_digit() || c == '.' || c == ',') => read,
        _ => return Err(refuse(piece, place)),
    };
    let tail = piece.get(used..).unwrap_or_default();
    if !tail.is_empty() {
        return Err(refuse(tail, place.start + used..place.end));
    }
    let reading = DialReading::new(value);
    if dial.admits(reading) {
        return Ok((reading, piece.replace(',', ".")));
    }
    let accepted = format!("{} to {}, the numbers of this dial", dial.low, dial.high);
    Err(Refusal::out_of_range(
        place,
        "the dial reading",
        piece.to_owned(),
        accepted,
    ))
}

/// An edge at an end of travel is a cut arc, if that end is the one nearer the other edge; else the arc truly ends there.
fn with_stops(one: Edge, other: Edge, dial: &Dial) -> (Edge, Edge) {
    if one == other {
        return (one, other);
    }
    let at_end = |edge: Edge| match edge {
        Edge::At(repeats) => repeats.mean() <= dial.low || dial.high <= repeats.mean(),
        Edge::Stop => true,
    };
    if at_end(one) && at_end(other) {
        return (Edge::Stop, Edge::Stop);
    }
    let cut = |edge: Edge, against: Edge| match (edge, against) {
        (Edge::At(end), Edge::At(free)) if at_end(edge) => {
            let middle = f64::midpoint(dial.low.get(), dial.high.get());
            let same_half = (end.mean().get() < middle) == (free.mean().get() < middle);
            if same_half { Edge::Stop } else { edge }
        }
        _ => edge,
    };
    (cut(one, other), cut(other, one))
}
