//! One row of a file of readings: from cells to what was seen.
//!
//! ```text
//! dark_from, dark_to   both dark edges, each a reading, repeats or `stop`; they win over `dial`
//! lamp = always        dark everywhere
//! lamp = never         never dark; `dial`, if given: dimmest there
//! lamp = dark | lit    the dial parked at `dial`
//! dial                 the middle of the dark arc: a reading or repeats
//! reading              a number on the dial, with point or comma; repeats with `/` between
//! ```

use std::borrow::Cow;

use csv::ByteRecord;

use super::columns::{Column, Columns};
use super::decode::unknown_family;
use super::harmless::{line, unarmed};
use super::predict::switch_named;
use crate::finding::{Circumstances, ReadingCertainty};
use crate::meter::{DialReading, Edge, Lamp, Meter, Repeats, Seen, Switch};
use crate::quantity::{Ohm, Quantity, Volt, number, parse};
use crate::tables::Family;

/// What a row says.
#[derive(Debug)]
pub(super) struct Row<'r> {
    /// The marking as it stands in the file.
    pub(super) marking: Cow<'r, str>,
    /// The family given by the person.
    pub(super) family: Option<Family>,
    /// The switch.
    pub(super) switch: Switch,
    /// What was seen.
    pub(super) seen: Seen,
    /// What else is known.
    pub(super) circumstances: Circumstances,
}

/// The words for a lamp, as far as there are any.
enum LampCell {
    Nothing,
    Never,
    Always,
    Parked(Lamp),
}

/// An edge as it stands in its cell.
#[derive(Clone, Copy)]
enum EdgeCell {
    Nothing,
    Stop,
    At(Repeats),
}

/// Reads a row, or says why it cannot be read.
pub(super) fn read<'r>(
    columns: &Columns,
    record: &'r ByteRecord,
    meter: &Meter,
) -> Result<Row<'r>, String> {
    if record.len() > columns.n_cells {
        return Err(format!(
            "{} cells where the header names {}: a comma in a cell needs quotes around the cell",
            record.len(),
            columns.n_cells
        ));
    }
    let cell = |column| text(columns.cell(record, column));
    let marking = cell(Column::Marking);
    if marking.is_empty() {
        return Err("no marking".to_owned());
    }
    let family = cell(Column::Family);
    let family = match family.as_ref() {
        "" => None,
        name => Some(Family::named(name).ok_or_else(|| unknown_family(name))?),
    };
    let switch = cell(Column::Switch);
    if switch.is_empty() {
        return Err("no switch".to_owned());
    }
    let switch = switch_named(meter, &switch)?;
    let seen = seen(
        meter,
        &cell(Column::Dial),
        [&cell(Column::DarkFrom), &cell(Column::DarkTo)],
        &cell(Column::Lamp),
    )?;
    let looks = cell(Column::Looks);
    let circumstances = Circumstances {
        temperature: plain(
            &cell(Column::Temperature),
            "temperature",
            &["°C", "C"],
            -100.0..=200.0,
        )?,
        heated_hours: plain(
            &cell(Column::HeatedHours),
            "heated_hours",
            &["h"],
            0.0..=1e6,
        )?,
        leakage: quantity::<Ohm>(&cell(Column::Leakage), "leakage")?,
        leakage_voltage: quantity::<Volt>(&cell(Column::LeakageVoltage), "leakage_voltage")?,
        looks: (!looks.is_empty()).then(|| looks.into_owned()),
        reading: ReadingCertainty::Once,
    };
    Ok(Row {
        marking,
        family,
        switch,
        seen,
        circumstances,
    })
}

/// Returns a cell as text: bytes that are no UTF-8 replaced, the apostrophe before a formula taken off.
fn text(cell: &[u8]) -> Cow<'_, str> {
    match String::from_utf8_lossy(cell) {
        Cow::Borrowed(text) => Cow::Borrowed(unarmed(text)),
        Cow::Owned(text) => Cow::Owned(unarmed(&text).to_owned()),
    }
}

/// Reads what was seen from its cells.
pub(super) fn seen(
    meter: &Meter,
    dial: &str,
    edges: [&str; 2],
    lamp: &str,
) -> Result<Seen, String> {
    let lamp = lamp_cell(lamp)?;
    let [from, to] = edges;
    let from = edge_cell(meter, "dark_from", from)?;
    let to = edge_cell(meter, "dark_to", to)?;
    if let Some(seen) = both_edges(meter, from, to)? {
        return match lamp {
            LampCell::Never => Err(contradiction("never")),
            LampCell::Always if seen != Seen::AlwaysDark => Err(contradiction("always")),
            _ => Ok(seen),
        };
    }
    let at = repeats(meter, "dial", dial)?;
    match (lamp, at) {
        (LampCell::Always, _) => Ok(Seen::AlwaysDark),
        (LampCell::Never, at) => Ok(Seen::NeverDark {
            dimmest: at.map(Repeats::mean),
        }),
        (LampCell::Parked(lamp), Some(at)) => Ok(Seen::Parked {
            at: at.mean(),
            lamp,
        }),
        (LampCell::Parked(Lamp::Dark), None) => Err(parked_nowhere("dark")),
        (LampCell::Parked(Lamp::Lit), None) => Err(parked_nowhere("lit")),
        (LampCell::Nothing, Some(at)) => Ok(Seen::Middle(at)),
        (LampCell::Nothing, None) => {
            Err("no reading: none of dial, dark_from and dark_to, lamp".to_owned())
        }
    }
}

/// Both dark edges, or `None` if neither is given. An arc from stop to stop is no arc but a lamp that is always dark.
fn both_edges(meter: &Meter, from: EdgeCell, to: EdgeCell) -> Result<Option<Seen>, String> {
    let edges = |from, to| Ok(Some(Seen::Edges { from, to }));
    match (from, to) {
        (EdgeCell::Nothing, EdgeCell::Nothing) => Ok(None),
        (EdgeCell::Nothing, _) => Err(one_edge("dark_to", "dark_from")),
        (_, EdgeCell::Nothing) => Err(one_edge("dark_from", "dark_to")),
        (EdgeCell::Stop, EdgeCell::Stop) => Ok(Some(Seen::AlwaysDark)),
        (EdgeCell::At(at), EdgeCell::Stop) | (EdgeCell::Stop, EdgeCell::At(at)) => {
            if at_a_stop(meter, at) {
                Ok(Some(Seen::AlwaysDark))
            } else {
                edges(Edge::At(at), Edge::Stop)
            }
        }
        (EdgeCell::At(from), EdgeCell::At(to)) => {
            let is_whole_travel =
                at_a_stop(meter, from) && at_a_stop(meter, to) && from.mean() != to.mean();
            if is_whole_travel {
                Ok(Some(Seen::AlwaysDark))
            } else {
                edges(Edge::At(from), Edge::At(to))
            }
        }
    }
}

fn contradiction(lamp: &str) -> String {
    format!("the lamp was {lamp} dark, yet dark edges are given")
}

fn at_a_stop(meter: &Meter, at: Repeats) -> bool {
    let dial = &meter.dial;
    at.mean() <= dial.low || dial.high <= at.mean()
}

fn one_edge(given: &str, missing: &str) -> String {
    format!(
        "{given} without {missing}: give the other dark edge, or `stop` where a stop cuts the arc"
    )
}

fn parked_nowhere(lamp: &str) -> String {
    format!("the lamp was {lamp}, but dial does not say where the dial was parked")
}

fn lamp_cell(cell: &str) -> Result<LampCell, String> {
    match cell {
        "" => Ok(LampCell::Nothing),
        "never" => Ok(LampCell::Never),
        "always" => Ok(LampCell::Always),
        "dark" => Ok(LampCell::Parked(Lamp::Dark)),
        "lit" => Ok(LampCell::Parked(Lamp::Lit)),
        other => Err(format!(
            "lamp is `{}`; accepted: never, always, dark, lit",
            line(other)
        )),
    }
}

fn edge_cell(meter: &Meter, column: &str, cell: &str) -> Result<EdgeCell, String> {
    if cell == "stop" {
        return Ok(EdgeCell::Stop);
    }
    Ok(repeats(meter, column, cell)?.map_or(EdgeCell::Nothing, EdgeCell::At))
}

/// Reads one reading or repeats; `None` if the cell is empty.
fn repeats(meter: &Meter, column: &str, cell: &str) -> Result<Option<Repeats>, String> {
    if cell.is_empty() {
        return Ok(None);
    }
    if !cell.contains('/') {
        return reading(meter, column, cell).map(Repeats::once).map(Some);
    }
    let readings = cell
        .split('/')
        .map(|one| reading(meter, column, one.trim()))
        .collect::<Result<Vec<_>, _>>()?;
    Ok(Repeats::of(&readings))
}

fn reading(meter: &Meter, column: &str, text: &str) -> Result<DialReading, String> {
    let refuse = |why: String| format!("{column} is `{}`: {why}", line(text));
    let (value, used) =
        number(text, 0, "the number").map_err(|refusal| refuse(refusal.to_string()))?;
    if used < text.len() {
        return Err(refuse(
            "a number as printed on the dial is needed".to_owned(),
        ));
    }
    let reading = DialReading::new(value);
    if meter.dial.admits(reading) {
        Ok(reading)
    } else {
        let (low, high) = (meter.dial.low, meter.dial.high);
        Err(refuse(format!("the dial goes from {low} to {high}")))
    }
}

/// Reads a number that may carry its unit; `None` if the cell is empty.
fn plain(
    cell: &str,
    column: &str,
    units: &[&str],
    allowed: std::ops::RangeInclusive<f64>,
) -> Result<Option<f64>, String> {
    if cell.is_empty() {
        return Ok(None);
    }
    let refuse = |why: String| format!("{column} is `{}`: {why}", line(cell));
    let (value, used) =
        number(cell, 0, "the number").map_err(|refusal| refuse(refusal.to_string()))?;
    let unit = cell.get(used..).unwrap_or_default().trim();
    if !unit.is_empty() && !units.contains(&unit) {
        return Err(refuse("a plain number is needed".to_owned()));
    }
    if allowed.contains(&value) {
        Ok(Some(value))
    } else {
        let (low, high) = (allowed.start(), allowed.end());
        Err(refuse(format!("accepted: from {low} to {high}")))
    }
}

/// Reads a quantity above zero; `None` if the cell is empty.
fn quantity<Q: Quantity>(cell: &str, column: &str) -> Result<Option<Q>, String> {
    if cell.is_empty() {
        return Ok(None);
    }
    let refuse = |why: String| format!("{column} is `{}`: {why}", line(cell));
    let quantity: Q = parse(cell).map_err(|refusal| refuse(refusal.to_string()))?;
    if quantity.base() > 0.0 {
        Ok(Some(quantity))
    } else {
        Err(refuse("more than zero is needed".to_owned()))
    }
}
