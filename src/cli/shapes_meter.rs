//! The JSON of `calibrate` and `coverage`: keys and their order are a contract with other people's scripts. Capacitances are
//! in picofarad, shares in percent, dial places in dial units; `null` stands where a thing does not exist.

use serde::Serialize;

use super::calibrate::robust_changes;
use super::number::rounded;
use crate::meter::{Calibrated, Coverage, Meter};

/// What `calibrate` says.
#[derive(Debug, Serialize)]
pub(super) struct CalibrationShape<'a> {
    observations: u32,
    reduced_chi_square: f64,
    parameters: Vec<ParameterShape<'a>>,
    residuals: Vec<ResidualShape<'a>>,
    switches: Vec<GainShape<'a>>,
    next_part: Option<NextPartShape<'a>>,
    robust_changes: Vec<String>,
}

#[derive(Debug, Serialize)]
struct ParameterShape<'a> {
    name: &'a str,
    value: f64,
    standard_uncertainty: f64,
    unit: &'static str,
}

#[derive(Debug, Serialize)]
struct ResidualShape<'a> {
    label: &'a str,
    switch: &'a str,
    divisions: f64,
    standardised: f64,
    leave_one_out_percent: Option<f64>,
    outlier: bool,
}

#[derive(Debug, Serialize)]
struct GainShape<'a> {
    label: &'a str,
    before_percent: f64,
    after_percent: f64,
}

#[derive(Debug, Serialize)]
#[expect(non_snake_case, reason = "units are written as they are")]
struct NextPartShape<'a> {
    capacitance_pF: f64,
    switch: &'a str,
}

impl<'a> CalibrationShape<'a> {
    pub(super) fn of(meter: &'a Meter, calibrated: &'a Calibrated) -> Self {
        let report = &calibrated.report;
        Self {
            observations: calibrated.calibration.observations,
            reduced_chi_square: rounded(report.reduced_chi_square),
            parameters: report
                .parameters
                .iter()
                .map(|p| ParameterShape {
                    name: &p.name,
                    value: rounded(p.value),
                    standard_uncertainty: rounded(p.standard_uncertainty),
                    unit: p.unit,
                })
                .collect(),
            residuals: report
                .residuals
                .iter()
                .map(|r| ResidualShape {
                    label: &r.label,
                    switch: meter.label(r.switch),
                    divisions: rounded(r.divisions),
                    standardised: rounded(r.standardised),
                    leave_one_out_percent: r.leave_one_out.map(|left| rounded(left.percent())),
                    outlier: r.is_outlier,
                })
                .collect(),
            switches: report
                .switches
                .iter()
                .map(|gain| GainShape {
                    label: meter.label(gain.switch),
                    before_percent: rounded(gain.before.percent()),
                    after_percent: rounded(gain.after.percent()),
                })
                .collect(),
            next_part: report.next_part.as_ref().map(|next| NextPartShape {
                capacitance_pF: rounded(next.capacitance.picofarads()),
                switch: meter.label(next.switch),
            }),
            robust_changes: robust_changes(report),
        }
    }
}

/// What `coverage` says.
#[derive(Debug, Serialize)]
pub(super) struct CoverageShape<'a> {
    switches: Vec<SwitchShape<'a>>,
}

#[derive(Debug, Serialize)]
#[expect(non_snake_case, reason = "units are written as they are")]
struct SwitchShape<'a> {
    label: &'a str,
    span_from_pF: f64,
    span_to_pF: f64,
    useful_from_pF: Option<f64>,
    useful_to_pF: Option<f64>,
    best_percent: Option<f64>,
    never_dark_from: Option<f64>,
    never_dark_to: Option<f64>,
}

impl<'a> CoverageShape<'a> {
    pub(super) fn of(meter: &'a Meter, coverage: &Coverage) -> Self {
        let switches = coverage.switches.iter().map(|switch| {
            let (useful_from, useful_to) = switch.useful.unzip();
            let (never_from, never_to) = switch.never_dark.unzip();
            SwitchShape {
                label: meter.label(switch.switch),
                span_from_pF: rounded(switch.span.0.picofarads()),
                span_to_pF: rounded(switch.span.1.picofarads()),
                useful_from_pF: useful_from.map(|c| rounded(c.picofarads())),
                useful_to_pF: useful_to.map(|c| rounded(c.picofarads())),
                best_percent: switch.best.map(|u| rounded(u.percent())),
                never_dark_from: never_from.map(|place| rounded(place.get())),
                never_dark_to: never_to.map(|place| rounded(place.get())),
            }
        });
        Self {
            switches: switches.collect(),
        }
    }
}
