//! `nulltray calibrate`: the meter from a few good parts.

use std::fs::{self, File};
use std::io::{BufRead, BufReader, BufWriter, Write};
use std::path::{Path, PathBuf};

use chrono::{Local, SubsecRound};

use super::Streams;
use super::aligned::write_aligned;
use super::args::{CalibrateArgs, Places};
use super::failure::{Failure, Finish};
use super::harmless::{line, write_json};
use super::references::{self, References};
use super::setup;
use super::shapes_meter::CalibrationShape;
use crate::meter::{Calibrated, CalibrationReport, Meter, NotCalibrated, NumberRead, calibrate};
use crate::quantity::{Resolution, engineering};

/// Runs the command.
pub(super) fn run(
    args: &CalibrateArgs,
    places: &Places,
    streams: &mut Streams<'_>,
) -> Result<Finish, Failure> {
    let (meter, profile, _) = setup::meter(places, streams.stderr)?;
    let name = args.references.display().to_string();
    let references = references::read(setup::table(&args.references)?, &name, &meter)?;
    let date = Local::now().fixed_offset().trunc_subsecs(0).to_rfc3339();
    let calibrated = calibrate(&meter, &references.readings, &date)
        .map_err(|refusal| refused(&refusal, &name, &references))?;
    if let Some(out) = &args.out {
        let text = calibrated.calibration.written_into(&meter, &profile);
        write_profile(out, &text, streams)?;
        let _ = writeln!(streams.stderr, "written to {}", out.display());
    }
    let mut out = BufWriter::new(&mut *streams.stdout);
    if args.json {
        write_json(&mut out, &CalibrationShape::of(&meter, &calibrated))?;
        writeln!(out)?;
    } else {
        write_report(&mut out, &meter, &calibrated)?;
    }
    out.flush()?;
    Ok(Finish::Done)
}

fn refused(refusal: &NotCalibrated, name: &str, references: &References) -> Failure {
    let NotCalibrated::Rows(faults) = refusal else {
        let failure = Failure::input(format!("{name}: not calibrated: {refusal}"));
        return match refusal {
            NotCalibrated::TeachesNothing { .. } => {
                failure.hint("read known parts on the switches concerned")
            }
            _ => failure,
        };
    };
    let mistakes: Vec<String> = faults
        .iter()
        .map(|fault| {
            let at = references.lines.get(fault.row).copied().unwrap_or_default();
            format!("{name}:{at}: {}", fault.kind)
        })
        .collect();
    Failure::input(mistakes.join("\n"))
}

/// Writes beside the file and renames, so that a profile is never half there. One that is there is only replaced if the
/// person says so.
fn write_profile(path: &Path, text: &str, streams: &mut Streams<'_>) -> Result<(), Failure> {
    if path.exists() && !is_agreed(path, streams) {
        return Err(
            Failure::io(format!("{} is there already and is kept", path.display()))
                .hint("answer yes to replace it, or name another file with --out"),
        );
    }
    let mut beside = path.as_os_str().to_owned();
    beside.push(".new");
    let beside = PathBuf::from(beside);
    let written = File::create_new(&beside)
        .and_then(|mut file| {
            file.write_all(text.as_bytes())
                .and_then(|()| file.sync_all())
        })
        .and_then(|()| fs::rename(&beside, path));
    written.map_err(|error| Failure::file("write", path, &error))
}

fn is_agreed(path: &Path, streams: &mut Streams<'_>) -> bool {
    let _ = write!(
        streams.stderr,
        "{} is there already; replace it? yes or no: ",
        path.display()
    );
    let _ = streams.stderr.flush();
    let mut answer = String::new();
    // No answer is no agreement.
    let _ = BufReader::new(&mut *streams.stdin).read_line(&mut answer);
    answer.trim().eq_ignore_ascii_case("yes")
}

fn write_report(
    out: &mut dyn Write,
    meter: &Meter,
    calibrated: &Calibrated,
) -> std::io::Result<()> {
    let report = &calibrated.report;
    let n_parts = report.parts.len();
    writeln!(
        out,
        "{}: {} numbers read, {n_parts} parts, reduced chi-square {:.2}",
        line(&meter.name),
        report.n_numbers,
        report.reduced_chi_square
    )?;
    writeln!(out, "\nconstants, with one standard uncertainty")?;
    let mut rows = vec![["", "calibrated", "±", "by tolerance", "±"].map(str::to_owned)];
    rows.extend(report.parameters.iter().map(|p| {
        let shown = |value: f64, u: f64| {
            if p.unit.is_empty() {
                (format!("{value:.4}"), format!("{u:.4}"))
            } else {
                let prefix = crate::quantity::Prefix::fitting(value, Resolution::Uncertainty(u));
                let within = |x: f64| {
                    crate::quantity::engineering_in(x, Resolution::Uncertainty(u), prefix, p.unit)
                };
                (within(value), within(u))
            }
        };
        let (value, u) = shown(p.value, p.standard_uncertainty);
        let (prior, prior_u) = shown(p.prior_value, p.prior_uncertainty);
        [p.name.clone(), value, u, prior, prior_u]
    }));
    write_aligned(out, &rows)?;
    write_residuals(out, meter, report)?;
    writeln!(out, "\ncommon standard uncertainty at mid-span")?;
    let mut rows = vec![["switch", "before", "after"].map(str::to_owned)];
    rows.extend(report.switches.iter().map(|gain| {
        [
            line(meter.label(gain.switch)).into_owned(),
            format!("{:.2} %", gain.before.percent()),
            format!("{:.2} %", gain.after.percent()),
        ]
    }));
    write_aligned(out, &rows)?;
    for sentence in sentences(meter, report) {
        writeln!(out, "{sentence}")?;
    }
    Ok(())
}

fn write_residuals(
    out: &mut dyn Write,
    meter: &Meter,
    report: &CalibrationReport,
) -> std::io::Result<()> {
    writeln!(
        out,
        "\nread less predicted; what it would read too much had it been left out"
    )?;
    let mut rows = vec![
        [
            "part",
            "switch",
            "number",
            "divisions",
            "in u",
            "left out",
            "",
        ]
        .map(str::to_owned),
    ];
    rows.extend(report.residuals.iter().map(|r| {
        let number = match r.number {
            NumberRead::Middle => "middle",
            NumberRead::LowEdge => "low edge",
            NumberRead::HighEdge => "high edge",
            NumberRead::Dimmest => "dimmest",
        };
        let label = if r.label.is_empty() {
            "open terminals".into()
        } else {
            line(&r.label)
        };
        [
            label.into_owned(),
            line(meter.label(r.switch)).into_owned(),
            number.to_owned(),
            format!("{:+.2}", r.divisions),
            format!("{:+.1}", r.standardised),
            r.leave_one_out
                .map_or(String::new(), |left| format!("{:+.2} %", left.percent())),
            if r.is_outlier {
                "! outlier".to_owned()
            } else {
                String::new()
            },
        ]
    }));
    write_aligned(out, &rows)
}

/// What the figures mean, in sentences.
fn sentences(meter: &Meter, report: &CalibrationReport) -> Vec<String> {
    let mut said = Vec::new();
    if let Some(weight) = report.open_terminals {
        said.push(format!(
            "the open terminals give {:.0} % of what is known of the stray",
            weight.percent()
        ));
    }
    for part in report.parts.iter().filter(|part| part.is_outlier()) {
        said.push(format!(
            "{} does not fit: the others make it {:+.1} % (standard uncertainty {:.1} %)",
            line(&part.label),
            part.deviation.percent(),
            part.standard_uncertainty.percent()
        ));
    }
    said.extend(robust_changes(report));
    if let Some(next) = &report.next_part {
        let after: Vec<String> = next
            .after
            .iter()
            .map(|u| format!("{:.2} %", u.percent()))
            .collect();
        said.push(format!(
            "next, read a part of {} known to {:.1} % on switch {}: {} then",
            next.capacitance,
            next.standard_uncertainty.percent(),
            line(meter.label(next.switch)),
            after.join(", ")
        ));
    }
    said
}

/// What changes if far readings count for less, a sentence a constant.
pub(super) fn robust_changes(report: &CalibrationReport) -> Vec<String> {
    let changes = report.robust.changes.iter().map(|change| {
        let shown = |value: f64| match change.unit {
            "" => format!("{value:.4}"),
            unit => engineering(value, Resolution::Digits(4), unit),
        };
        format!(
            "with far readings counting for less {} is {} instead of {} ({:+.1} standard uncertainties)",
            change.name,
            shown(change.to),
            shown(change.from),
            change.in_uncertainties
        )
    });
    changes.collect()
}
