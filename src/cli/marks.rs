//! `nulltray marks`: how a part is likely to be marked.

use std::io::{BufWriter, Write};

use serde::Serialize;

use super::Streams;
use super::aligned::write_aligned;
use super::args::MarksArgs;
use super::decode::family_named;
use super::failure::{Failure, Finish};
use super::harmless::{line, write_json};
use super::number::rounded;
use crate::marking::{Mark, Wanted, marks};
use crate::quantity::{Farad, Quantity, Refusal, Tolerance, Volt, parse};

/// What `marks` says: its keys are a contract with other people's scripts and stand in the README.
#[derive(Debug, Serialize)]
#[expect(non_snake_case, reason = "units are written as they are")]
struct MarksShape<'a> {
    capacitance_pF: f64,
    tolerance: Option<String>,
    family: Option<&'static str>,
    rated_voltage_V: Option<f64>,
    marks: Vec<MarkShape<'a>>,
}

#[derive(Debug, Serialize)]
struct MarkShape<'a> {
    marking: &'a str,
    system: &'a str,
    share: f64,
    reads_back: f64,
    rank: Option<usize>,
}

/// Runs the command.
pub(super) fn run(args: &MarksArgs, streams: &mut Streams<'_>) -> Result<Finish, Failure> {
    let capacitance: Farad = given("QUANTITY", &args.capacitance, parse)?;
    if capacitance.get() <= 0.0 {
        return Err(Failure::usage(format!(
            "{} is no capacitance of a part",
            line(&args.capacitance)
        )));
    }
    let wanted = Wanted {
        capacitance,
        tolerance: args
            .tolerance
            .as_deref()
            .map(|text| given("--tolerance", text, Tolerance::parse))
            .transpose()?,
        family: args.family.as_deref().map(family_named).transpose()?,
        voltage: args
            .voltage
            .as_deref()
            .map(|text| given("--voltage", text, parse::<Volt>))
            .transpose()?,
    };
    let found = marks(&wanted);
    let mut out = BufWriter::new(&mut *streams.stdout);
    if args.json {
        write_json(&mut out, &shape(&wanted, &found))?;
        writeln!(out)?;
    } else {
        let mut rows = vec![["marking", "of a hundred", "reads back", "system"].map(str::to_owned)];
        rows.extend(found.iter().map(|mark| {
            [
                mark.text.clone(),
                percent(mark.share),
                doubt(mark),
                mark.system.clone(),
            ]
        }));
        write_aligned(&mut out, &rows)?;
    }
    out.flush()?;
    Ok(Finish::after(usize::from(found.is_empty())))
}

fn given<T>(
    what: &str,
    text: &str,
    read: impl Fn(&str) -> Result<T, Refusal>,
) -> Result<T, Failure> {
    read(text).map_err(|refusal| Failure::usage(format!("{what} {}: {refusal}", line(text))))
}

fn percent(share: f64) -> String {
    format!("{:.0}", 100.0 * share)
}

/// How sure the marking is to be read as this part.
fn doubt(mark: &Mark) -> String {
    match mark.rank {
        Some(0) => format!("first, {:.0} %", 100.0 * mark.reads_back),
        Some(rank) => format!("as number {}, {:.0} %", rank + 1, 100.0 * mark.reads_back),
        None => "as something else".to_owned(),
    }
}

fn shape<'a>(wanted: &Wanted, found: &'a [Mark]) -> MarksShape<'a> {
    MarksShape {
        capacitance_pF: rounded(wanted.capacitance.picofarads()),
        tolerance: wanted.tolerance.map(|t| t.to_string()),
        family: wanted.family.map(crate::tables::Family::name),
        rated_voltage_V: wanted.voltage.map(|v| rounded(v.base())),
        marks: found
            .iter()
            .map(|mark| MarkShape {
                marking: &mark.text,
                system: &mark.system,
                share: rounded(mark.share),
                reads_back: rounded(mark.reads_back),
                rank: mark.rank.map(|rank| rank + 1),
            })
            .collect(),
    }
}
