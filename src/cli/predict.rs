//! `nulltray predict`: where the lamp will go dark for a part.

use std::io::{BufWriter, Write};

use super::Streams;
use super::args::{Places, PredictArgs};
use super::decode::{among, decode_marking, family_named};
use super::failure::{Failure, Finish};
use super::harmless::{line, write_json};
use super::setup;
use super::shapes::{PredictionShape, PredictionsShape};
use crate::app::Setup;
use crate::finding::{HouseRules, expect};
use crate::marking::Reading;
use crate::meter::{AssumedLoss, Cut, Meter, Part, Prediction, Switch, best_switch, predict};
use crate::quantity::{Farad, number, parse};
use crate::tables::Family;

/// One thing to predict: what it is called, the part, and how plausible it is from the marking.
struct Candidate {
    words: String,
    part: Part,
    plausibility: Option<f64>,
}

/// Runs the command.
pub(super) fn run(
    args: &PredictArgs,
    places: &Places,
    streams: &mut Streams<'_>,
) -> Result<Finish, Failure> {
    let family = args.family.as_deref().map(family_named).transpose()?;
    let loss = args.loss.as_deref().map(loss_given).transpose()?;
    let setup = setup::for_command(places, streams.stderr)?;
    let switch = args
        .switch
        .as_deref()
        .map(|label| switch_named(&setup.meter, label).map_err(Failure::usage))
        .transpose()?;
    let marking = args
        .marking
        .as_ref()
        .map(|marking| marking.to_string_lossy());
    let mut candidates = match (&args.capacitance, &marking) {
        (Some(capacitance), _) => vec![bare(capacitance, family, &setup.rules())?],
        (None, marking) => readings(
            marking.as_deref().unwrap_or_default(),
            family,
            &setup.rules(),
        ),
    };
    if let Some(value) = loss {
        for candidate in &mut candidates {
            candidate.part.loss = AssumedLoss {
                value,
                standard_uncertainty: 0.0,
            };
        }
    }
    let predicted: Vec<(Candidate, Prediction)> = candidates
        .into_iter()
        .map(|candidate| {
            let switch = switch.unwrap_or_else(|| best_switch(&setup.meter, &candidate.part));
            let prediction = predict(&setup.meter, switch, &candidate.part);
            (candidate, prediction)
        })
        .collect();
    let mut out = BufWriter::new(&mut *streams.stdout);
    if args.json {
        write_json(
            &mut out,
            &shape(&setup.meter, marking.as_deref(), &predicted),
        )?;
        writeln!(out)?;
    } else {
        write_words(&mut out, &setup, marking.as_deref(), &predicted)?;
    }
    out.flush()?;
    Ok(Finish::after(usize::from(predicted.is_empty())))
}

/// Returns the switch with this label, or what to say of one that does not exist.
pub(super) fn switch_named(meter: &Meter, label: &str) -> Result<Switch, String> {
    meter.switch_named(label).ok_or_else(|| {
        let labels: Vec<&str> = meter.switches.iter().map(|s| s.label.as_str()).collect();
        format!(
            "{} has no switch {}",
            line(&meter.name),
            among(label, &labels)
        )
    })
}

fn readings(marking: &str, family: Option<Family>, rules: &HouseRules) -> Vec<Candidate> {
    let decoding = decode_marking(marking, family);
    decoding
        .readings
        .iter()
        .map(|reading| Candidate {
            words: reading.in_words(),
            part: expect(reading, rules),
            plausibility: Some(reading.plausibility),
        })
        .collect()
}

/// A capacitance without a marking has no limits, but the usual loss of its family.
fn bare(text: &str, family: Option<Family>, rules: &HouseRules) -> Result<Candidate, Failure> {
    let refuse = |why: String| Failure::usage(format!("--capacitance {}: {why}", line(text)));
    let capacitance: Farad = parse(text).map_err(|refusal| refuse(refusal.to_string()))?;
    if capacitance.get() <= 0.0 {
        return Err(refuse("a capacitance above zero is needed".to_owned()));
    }
    let reading = Reading {
        capacitance,
        tolerance: None,
        voltage: None,
        family,
        characteristic: None,
        safety_class: None,
        date: None,
        sections: None,
        plausibility: 1.0,
        used: Vec::new(),
        unexplained: Vec::new(),
        why: Vec::new(),
    };
    let part = Part {
        low: None,
        high: None,
        ..expect(&reading, rules)
    };
    Ok(Candidate {
        words: capacitance.to_string(),
        part,
        plausibility: None,
    })
}

/// A loss from 0 to 10, plain or in percent.
fn loss_given(text: &str) -> Result<f64, Failure> {
    const LARGEST: f64 = 10.0;
    let refuse = |why: &str| Failure::usage(format!("--loss {}: {why}", line(text)));
    let body = text.trim();
    let (value, used) =
        number(body, 0, "the loss").map_err(|refusal| refuse(&refusal.to_string()))?;
    let value = match body.get(used..).unwrap_or_default().trim() {
        "" => value,
        "%" => value / 100.0,
        _ => return Err(refuse("a plain number such as 0.02, or a percentage")),
    };
    if (0.0..=LARGEST).contains(&value) {
        Ok(value)
    } else {
        Err(refuse("a loss from 0 to 10 is needed"))
    }
}

fn shape<'a>(
    meter: &'a Meter,
    marking: Option<&'a str>,
    predicted: &[(Candidate, Prediction)],
) -> PredictionsShape<'a> {
    let readings = predicted
        .iter()
        .map(|(candidate, prediction)| {
            let part = candidate.part;
            PredictionShape::of(
                meter,
                prediction,
                part.capacitance,
                part.loss.value,
                candidate.plausibility,
            )
        })
        .collect();
    PredictionsShape { marking, readings }
}

fn write_words(
    out: &mut dyn Write,
    setup: &Setup,
    marking: Option<&str>,
    predicted: &[(Candidate, Prediction)],
) -> std::io::Result<()> {
    if let Some(marking) = marking {
        writeln!(out, "{}", line(marking))?;
    }
    if predicted.is_empty() {
        writeln!(out, "  no reading")?;
    }
    for (candidate, prediction) in predicted {
        write_prediction(out, &setup.meter, candidate, prediction)?;
    }
    Ok(())
}

fn write_prediction(
    out: &mut dyn Write,
    meter: &Meter,
    candidate: &Candidate,
    prediction: &Prediction,
) -> std::io::Result<()> {
    let show = |reading| meter.dial.show(reading);
    write!(out, "  {}", line(&candidate.words))?;
    if let Some(plausibility) = candidate.plausibility {
        write!(
            out,
            ", plausibility {} %",
            (plausibility * 1000.0).round() / 10.0
        )?;
    }
    writeln!(out)?;
    write!(out, "    switch {}", line(meter.label(prediction.switch)))?;
    match prediction.expected {
        Some(expected) => writeln!(out, ", dial {}", show(expected))?,
        None => writeln!(out, ", dimmest at {}", show(prediction.balance))?,
    }
    match prediction.dark {
        Some(arc) => {
            let cut = if arc.cut == Cut::Neither {
                ""
            } else {
                ", cut by a stop"
            };
            writeln!(
                out,
                "    dark from {} to {}{cut}",
                show(arc.from),
                show(arc.to)
            )?;
        }
        None => writeln!(out, "    never dark: {} remain", prediction.residual)?,
    }
    if let Some(band) = prediction.band {
        let cut = if band.cut == Cut::Neither {
            ""
        } else {
            ", cut by a stop"
        };
        writeln!(
            out,
            "    good parts from {} to {}{cut}",
            show(band.from),
            show(band.to)
        )?;
    }
    let loss = candidate.part.loss.value;
    writeln!(
        out,
        "    loss {loss} assumed, {} peak on the part",
        prediction.part_voltage
    )?;
    if let Some(uncertainty) = prediction.uncertainty {
        let expanded = crate::quantity::Fraction::new(2.0 * uncertainty.get());
        writeln!(out, "    one reading there is good to ±{expanded} (k = 2)")?;
    }
    for caution in &prediction.cautions {
        writeln!(out, "    {}", line(&caution.to_string()))?;
    }
    Ok(())
}
