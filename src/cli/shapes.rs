//! The JSON of `decode` and `predict`: keys and their order are a contract with other people's scripts. Capacitances are in
//! picofarad, voltages in volt, numbers have at most twelve significant digits, `null` stands where a thing does not exist.

use serde::{Serialize, Serializer};

use super::number::rounded;
use crate::marking::{Decoding, Reading};
use crate::meter::{Cut, Meter, Prediction, Stop};
use crate::quantity::Farad;
use crate::tables::Family;
use crate::tray::VoltageKind;

/// What `decode` says of one marking.
#[derive(Debug, Serialize)]
pub(super) struct DecodingShape<'a> {
    marking: &'a str,
    readings: Vec<ReadingShape<'a>>,
    unexplained: &'a [String],
    omitted: usize,
}

#[derive(Debug, Serialize)]
#[expect(non_snake_case, reason = "units are written as they are")]
struct ReadingShape<'a> {
    capacitance_pF: Number,
    low_pF: Option<Number>,
    high_pF: Option<Number>,
    tolerance: Option<String>,
    rated_voltage_V: Option<Number>,
    voltage_kind: Option<&'static str>,
    rated_voltage_ac_V: Option<Number>,
    #[serde(skip_serializing_if = "Option::is_none")]
    rated_voltage_y_V: Option<Number>,
    family: Option<&'static str>,
    dielectric: Option<&'static str>,
    temperature_characteristic: Option<&'a str>,
    safety_class: Option<&'a str>,
    date: Option<&'a str>,
    sections_pF: Option<Vec<Number>>,
    plausibility: Number,
    used: Vec<UsedShape<'a>>,
    unexplained: &'a [String],
    why: &'a [String],
}

#[derive(Debug, Serialize)]
struct UsedShape<'a> {
    text: &'a str,
    r#as: &'static str,
}

/// What `predict` says of one marking or capacitance.
#[derive(Debug, Serialize)]
pub(super) struct PredictionsShape<'a> {
    pub(super) marking: Option<&'a str>,
    pub(super) readings: Vec<PredictionShape<'a>>,
}

/// What `predict` says of one reading of a marking.
#[derive(Debug, Serialize)]
#[expect(non_snake_case, reason = "units are written as they are")]
pub(super) struct PredictionShape<'a> {
    capacitance_pF: Number,
    loss: Number,
    plausibility: Option<Number>,
    switch: &'a str,
    balance: Number,
    beyond: Option<&'static str>,
    residual_V: Number,
    goes_dark: bool,
    dark_from: Option<Number>,
    dark_to: Option<Number>,
    expected: Option<Number>,
    band_from: Option<Number>,
    band_to: Option<Number>,
    band_cut: Option<bool>,
    part_voltage_V: Number,
    uncertainty_percent: Option<Number>,
    warnings: Vec<String>,
}

/// A number with at most twelve significant digits; one that is not finite becomes null.
#[derive(Clone, Copy, Debug)]
struct Number(f64);

impl Serialize for Number {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.serialize_f64(rounded(self.0) + 0.0)
    }
}

impl<'a> DecodingShape<'a> {
    /// Shapes a decoding; `marking` is the text as it was given.
    pub(super) fn of(marking: &'a str, decoding: &'a Decoding) -> Self {
        Self {
            marking,
            readings: decoding.readings.iter().map(ReadingShape::of).collect(),
            unexplained: &decoding.unexplained,
            omitted: decoding.omitted,
        }
    }
}

impl<'a> ReadingShape<'a> {
    fn of(reading: &'a Reading) -> Self {
        let limits = reading
            .tolerance
            .map(|tolerance| tolerance.limits(reading.capacitance));
        let voltage = reading.voltage.unwrap_or_default();
        let family = reading.family;
        // The direct voltage where one is marked; else the alternating one, so that the key is filled wherever a voltage is.
        let (rated, kind) = match (voltage.dc, voltage.ac) {
            (Some(dc), _) => (Some(dc), Some(VoltageKind::Dc)),
            (None, Some(ac)) => (Some(ac), Some(VoltageKind::Ac)),
            (None, None) => (None, None),
        };
        Self {
            capacitance_pF: picofarads(reading.capacitance),
            low_pF: limits.map(|(low, _)| picofarads(low)),
            high_pF: limits.and_then(|(_, high)| high).map(picofarads),
            tolerance: reading.tolerance.map(|tolerance| tolerance.to_string()),
            rated_voltage_V: rated.map(|volts| Number(volts.get())),
            voltage_kind: kind.map(|kind| match kind {
                VoltageKind::Dc => "dc",
                VoltageKind::Ac => "ac",
            }),
            rated_voltage_ac_V: voltage.ac.map(|volts| Number(volts.get())),
            rated_voltage_y_V: voltage.y.map(|volts| Number(volts.get())),
            family: family.map(|family| Family::Group(family.group()).name()),
            dielectric: family
                .and_then(Family::member)
                .map(|member| Family::Member(member).name()),
            temperature_characteristic: reading.characteristic.as_deref(),
            safety_class: reading.safety_class.as_deref(),
            date: reading.date.as_deref(),
            sections_pF: reading
                .sections
                .as_ref()
                .map(|sections| sections.iter().copied().map(picofarads).collect()),
            plausibility: Number(reading.plausibility),
            used: reading
                .used
                .iter()
                .map(|used| UsedShape {
                    text: &used.text,
                    r#as: used.role.word(),
                })
                .collect(),
            unexplained: &reading.unexplained,
            why: &reading.why,
        }
    }
}

impl<'a> PredictionShape<'a> {
    /// Shapes a prediction for a part of this capacitance and loss.
    pub(super) fn of(
        meter: &'a Meter,
        prediction: &Prediction,
        capacitance: Farad,
        loss: f64,
        plausibility: Option<f64>,
    ) -> Self {
        let dark = prediction.dark;
        let band = prediction.band;
        Self {
            capacitance_pF: picofarads(capacitance),
            loss: Number(loss),
            plausibility: plausibility.map(Number),
            switch: meter.label(prediction.switch),
            balance: Number(prediction.balance.get()),
            beyond: prediction.beyond.map(|stop| match stop {
                Stop::Low => "low",
                Stop::High => "high",
            }),
            residual_V: Number(prediction.residual.get()),
            goes_dark: dark.is_some(),
            dark_from: dark.map(|arc| Number(arc.from.get())),
            dark_to: dark.map(|arc| Number(arc.to.get())),
            expected: prediction.expected.map(|reading| Number(reading.get())),
            band_from: band.map(|band| Number(band.from.get())),
            band_to: band.map(|band| Number(band.to.get())),
            band_cut: band.map(|band| band.cut != Cut::Neither),
            part_voltage_V: Number(prediction.part_voltage.get()),
            uncertainty_percent: prediction.uncertainty.map(|part| Number(part.percent())),
            warnings: prediction
                .cautions
                .iter()
                .map(ToString::to_string)
                .collect(),
        }
    }
}

fn picofarads(capacitance: Farad) -> Number {
    Number(capacitance.picofarads())
}
