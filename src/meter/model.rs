//! The constants of a meter with their uncertainties, ready for use: worked out once when a profile is read.

use super::circuit::{Circuit, Constants};
use super::{Change, Difference, Meter, Source, Switch, Taper};

/// How many constants a reading on one switch depends on.
pub(super) const N_CONSTANTS: usize = 6;

/// What each constant is, in the order in which they are varied.
pub(super) const SOURCES: [Source; N_CONSTANTS] = [
    Source::RangeResistor,
    Source::Reference,
    Source::DialTotal,
    Source::DialEnd,
    Source::Stray,
    Source::Threshold,
];

/// How limits become a standard uncertainty (JCGM 100:2008, 4.3.7).
pub(super) enum Spread {
    /// Equally probable anywhere within the half width.
    Rectangular { half_width: f64 },
    /// Already a standard uncertainty.
    Standard(f64),
}

impl Spread {
    pub(super) fn standard_uncertainty(&self) -> f64 {
        match self {
            Self::Rectangular { half_width } => half_width / 3f64.sqrt(),
            Self::Standard(u) => *u,
        }
    }
}

/// The constants of every switch, with standard uncertainties and correlations.
#[derive(Clone, Debug)]
pub(super) struct Model {
    circuit: Circuit,
    switches: Vec<SwitchModel>,
    repeatability: f64,
    division: f64,
}

#[derive(Clone, Debug)]
struct SwitchModel {
    constants: Constants,
    /// Standard uncertainties: relative for r1, c2, dial total and threshold, absolute for dial end and stray.
    u: [f64; N_CONSTANTS],
    /// `None`: independent.
    correlation: Option<[[f64; N_CONSTANTS]; N_CONSTANTS]>,
}

/// Estimates and covariance of a calibration, in the order of its names: natural logarithms, but for dial end and stray.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Fit {
    pub(super) estimate: Vec<f64>,
    pub(super) covariance: Vec<Vec<f64>>,
    /// For each switch, where its six constants stand; `None` for a constant that is not there (dial end of points).
    pub(super) places: Vec<[Option<usize>; N_CONSTANTS]>,
}

/// The names under which a calibration stores its constants, in their order.
pub(super) fn stored_names(meter: &Meter) -> Vec<String> {
    let mut names: Vec<String> = meter.switches.iter().map(|s| s.label.clone()).collect();
    let shared = SHARED.iter().filter(|(i, _)| has_constant(meter, *i));
    names.extend(shared.map(|(_, name)| (*name).to_owned()));
    names
}

/// For each switch, where its six constants stand among the stored ones.
pub(super) fn places(meter: &Meter) -> Vec<[Option<usize>; N_CONSTANTS]> {
    let n_switches = meter.switches.len();
    (0..n_switches)
        .map(|position| {
            let mut places = [Some(position); N_CONSTANTS];
            let mut next = n_switches;
            for (i, _) in SHARED {
                places[i] = has_constant(meter, i).then_some(next);
                next += usize::from(has_constant(meter, i));
            }
            places
        })
        .collect()
}

/// The constants that all switches share.
const SHARED: [(usize, &str); N_CONSTANTS - 1] = [
    (1, "reference"),
    (2, "dial_total"),
    (DIAL_END, "dial_end"),
    (STRAY, "stray"),
    (5, "threshold"),
];

/// Where the dial end stands among the constants of a switch.
pub(super) const DIAL_END: usize = 3;

/// Where the stray capacitance stands among the constants of a switch.
pub(super) const STRAY: usize = 4;

/// Measured points have no end resistance of their own.
fn has_constant(meter: &Meter, constant: usize) -> bool {
    constant != DIAL_END || matches!(meter.dial.taper, Taper::Linear { .. })
}

impl Model {
    /// A model without switches, to be replaced before it is used.
    pub(super) fn empty() -> Self {
        let circuit = Circuit {
            omega: 0.0,
            v0: 0.0,
            lag: 0.0,
            d2: 0.0,
            difference: super::Difference::Buffered,
        };
        Self {
            circuit,
            switches: Vec::new(),
            repeatability: 0.0,
            division: 0.0,
        }
    }

    /// Works the constants out from tolerances, or from a fit.
    pub(super) fn of(meter: &Meter, fit: Option<&Fit>) -> Self {
        let positions = 0..meter.switches.len();
        let switches = match fit {
            Some(fit) => positions.map(|position| fitted(fit, position)).collect(),
            None => positions.map(|position| nominal(meter, position)).collect(),
        };
        Self {
            circuit: Circuit::of(meter),
            switches,
            repeatability: meter.repeatability,
            division: meter.dial.division,
        }
    }

    pub(super) fn circuit(&self) -> &Circuit {
        &self.circuit
    }

    pub(super) fn constants(&self, switch: Switch) -> &Constants {
        &self.switches[switch.0].constants
    }

    /// Standard uncertainties of the constants of a switch: relative, but for dial end and stray.
    pub(super) fn uncertainties(&self, switch: Switch) -> &[f64; N_CONSTANTS] {
        &self.switches[switch.0].u
    }

    /// Standard uncertainty of the mean of n readings of one position, in dial units: repeatability averages out, the
    /// rounding to a division does not.
    pub(super) fn reading_uncertainty(&self, n_readings: u32) -> f64 {
        let repeated = self.repeatability / f64::from(n_readings).sqrt();
        repeated.hypot(self.rounding())
    }

    /// Standard uncertainty of rounding to the nearest division (JCGM 100:2008, F.2.2.1).
    pub(super) fn rounding(&self) -> f64 {
        Spread::Rectangular {
            half_width: 0.5 * self.division,
        }
        .standard_uncertainty()
    }

    /// The model with one thing about the meter bettered by half.
    pub(super) fn bettered(&self, change: Change) -> Self {
        let mut model = self.clone();
        let known: &[usize] = match change {
            Change::RangeResistors => &[0],
            Change::Reference => &[1],
            Change::Dial => &[2, DIAL_END],
            Change::Stray => &[STRAY],
            Change::Threshold => &[5],
            Change::Calibration => &[0, 1, 2, DIAL_END, STRAY, 5],
            Change::Scale => {
                model.repeatability *= 0.5;
                model.division *= 0.5;
                &[]
            }
            Change::Lamp => {
                for switch in &mut model.switches {
                    switch.constants.vth *= 0.5;
                }
                &[]
            }
            Change::DifferenceResistors => {
                model.circuit.difference = match model.circuit.difference {
                    Difference::Buffered => Difference::Buffered,
                    Difference::Divider(rd) => Difference::Divider(rd * 2.0),
                    Difference::Inverting(rd) => Difference::Inverting(rd * 2.0),
                };
                &[]
            }
        };
        for switch in &mut model.switches {
            for i in known {
                switch.u[*i] *= 0.5;
            }
        }
        model
    }

    /// The constants with one after the other moved by `step` standard uncertainties; `None` where one has none.
    pub(super) fn varied(&self, switch: Switch, step: f64) -> [Option<Constants>; N_CONSTANTS] {
        let model = &self.switches[switch.0];
        std::array::from_fn(|i| {
            let u = model.u[i] * step;
            let mut k = model.constants;
            match i {
                0 => k.r1 *= 1.0 + u,
                1 => k.c2 *= 1.0 + u,
                2 => k.dial_total *= 1.0 + u,
                3 => k.dial_end += u,
                4 => k.cs += u,
                _ => k.vth *= 1.0 + u,
            }
            (u > 0.0).then_some(k)
        })
    }

    /// Combines the changes over one standard uncertainty of each constant, correlations included
    /// (JCGM 100:2008, equation 13).
    pub(super) fn combined(&self, switch: Switch, changes: &[f64; N_CONSTANTS]) -> f64 {
        let variance = match &self.switches[switch.0].correlation {
            None => changes.iter().map(|c| c * c).sum::<f64>(),
            Some(correlation) => {
                let mut sum = 0.0;
                for (row, x) in correlation.iter().zip(changes) {
                    for (r, y) in row.iter().zip(changes) {
                        sum += r * x * y;
                    }
                }
                sum
            }
        };
        variance.max(0.0).sqrt()
    }
}

fn nominal(meter: &Meter, position: usize) -> SwitchModel {
    let relative = |tolerance: f64| {
        Spread::Rectangular {
            half_width: tolerance,
        }
        .standard_uncertainty()
    };
    let switch = &meter.switches[position];
    let (dial_total, u_total, dial_end, u_end) = match &meter.dial.taper {
        Taper::Linear {
            total,
            end,
            tolerance,
        } => {
            let u = relative(tolerance.get());
            (total.get(), u, end.get(), u * end.get())
        }
        Taper::Points { uncertainty, .. } => (
            1.0,
            Spread::Standard(uncertainty.get()).standard_uncertainty(),
            0.0,
            0.0,
        ),
    };
    SwitchModel {
        constants: Constants {
            r1: switch.resistance.get(),
            c2: meter.reference.capacitance.get(),
            dial_total,
            dial_end,
            cs: meter.stray.get(),
            vth: meter.threshold.get(),
        },
        u: [
            relative(switch.tolerance.get()),
            relative(meter.reference.tolerance.get()),
            u_total,
            u_end,
            relative(meter.stray_tolerance.get()),
            relative(meter.threshold_tolerance.get()),
        ],
        correlation: None,
    }
}

fn fitted(fit: &Fit, position: usize) -> SwitchModel {
    let places = fit.places[position];
    let at = |i: usize| places[i].map(|place| fit.estimate[place]);
    let covariance = |i: usize, j: usize| match (places[i], places[j]) {
        (Some(row), Some(column)) => fit.covariance[row][column],
        _ => 0.0,
    };
    let u: [f64; N_CONSTANTS] = std::array::from_fn(|i| covariance(i, i).max(0.0).sqrt());
    let correlation = std::array::from_fn(|i| {
        std::array::from_fn(|j| {
            let scale = u[i] * u[j];
            if scale > 0.0 {
                covariance(i, j) / scale
            } else {
                0.0
            }
        })
    });
    let log = |i: usize| at(i).map_or(1.0, f64::exp);
    SwitchModel {
        constants: Constants {
            r1: log(0),
            c2: log(1),
            dial_total: log(2),
            dial_end: at(3).unwrap_or(0.0),
            cs: at(4).unwrap_or(0.0),
            vth: log(5),
        },
        u,
        correlation: Some(correlation),
    }
}
