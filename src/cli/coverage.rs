//! `nulltray coverage`: where the meter can be trusted.

use std::io::{BufWriter, Write};

use super::Streams;
use super::aligned::write_aligned;
use super::args::{CoverageArgs, Places};
use super::failure::{Failure, Finish};
use super::harmless::{line, write_json};
use super::setup;
use super::shapes_meter::CoverageShape;
use crate::meter::{Coverage, Meter, coverage};
use crate::quantity::Fraction;

/// Every so many values of a span are listed.
const VALUES_BETWEEN: usize = 20;
/// The limit where none is given.
const USUAL_LIMIT: f64 = 0.05;

/// Runs the command.
pub(super) fn run(
    args: &CoverageArgs,
    places: &Places,
    streams: &mut Streams<'_>,
) -> Result<Finish, Failure> {
    let limit = args
        .limit
        .as_deref()
        .map_or(Ok(Fraction::new(USUAL_LIMIT)), limit_given)?;
    let setup = setup::for_command(places, streams.stderr)?;
    let found = coverage(&setup.meter, limit);
    let mut out = BufWriter::new(&mut *streams.stdout);
    if args.json {
        write_json(&mut out, &CoverageShape::of(&setup.meter, &found))?;
        writeln!(out)?;
    } else {
        write_words(&mut out, &setup.meter, &found, limit)?;
    }
    out.flush()?;
    Ok(Finish::Done)
}

fn limit_given(text: &str) -> Result<Fraction, Failure> {
    let limit = Fraction::parse(text)
        .map_err(|refusal| Failure::usage(format!("--limit {}: {refusal}", line(text))))?;
    if 0.0 < limit.get() && limit.get() < 1.0 {
        return Ok(limit);
    }
    Err(Failure::usage(format!(
        "--limit {}: accepted here: above 0 %, below 100 %",
        line(text)
    )))
}

fn write_words(
    out: &mut dyn Write,
    meter: &Meter,
    found: &Coverage,
    limit: Fraction,
) -> std::io::Result<()> {
    writeln!(
        out,
        "{}: one standard uncertainty, of one reading or of both edges, whichever is less",
        line(&meter.name)
    )?;
    let useful = format!("to {limit} or better");
    let mut rows = vec![["switch", "span", &useful, "best", "lamp never dark"].map(str::to_owned)];
    rows.extend(found.switches.iter().map(|switch| {
        let dial = &meter.dial;
        [
            line(meter.label(switch.switch)).into_owned(),
            format!("{} to {}", switch.span.0, switch.span.1),
            switch
                .useful
                .map_or("nowhere".to_owned(), |(from, to)| format!("{from} to {to}")),
            switch
                .best
                .map_or("-".to_owned(), |best| format!("{:.2} %", best.percent())),
            switch.never_dark.map_or("-".to_owned(), |(from, to)| {
                format!("{} to {}", dial.show(from), dial.show(to))
            }),
        ]
    }));
    write_aligned(out, &rows)?;
    writeln!(out, "\nalong each span")?;
    let mut rows = vec![
        [
            "switch",
            "value",
            "nulls at",
            "one reading",
            "both edges",
            "on the part",
        ]
        .map(str::to_owned),
    ];
    for switch in &found.switches {
        rows.extend(switch.values.iter().step_by(VALUES_BETWEEN).map(|value| {
            let percent =
                |u: Option<Fraction>| u.map_or("-".to_owned(), |u| format!("{:.2} %", u.percent()));
            [
                line(meter.label(switch.switch)).into_owned(),
                value.capacitance.to_string(),
                meter.dial.show(value.balance),
                percent(value.one_reading),
                percent(value.both_edges),
                format!("{:.1} V", value.part_voltage.get()),
            ]
        }));
    }
    write_aligned(out, &rows)?;
    if let Some(best) = found.changes.first() {
        writeln!(
            out,
            "what would better it most: {}, {:.0} % less uncertainty",
            best.change,
            best.narrower.percent()
        )?;
    }
    Ok(())
}
