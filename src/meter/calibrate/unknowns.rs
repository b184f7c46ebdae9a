//! What a calibration is to find: the constants of the meter and the true values of the reference parts.
//!
//! Every unknown is counted in standard uncertainties from what was known of it before, so that each prior is 0 ± 1 and the
//! covariance needs no scaling. Positive constants and parts are varied by their logarithms; dial end and stray are not.

use super::rows::{KnownPart, Rows};
use crate::meter::circuit::Constants;
use crate::meter::fit::{Prior, Solution};
use crate::meter::model::{DIAL_END, Fit, Model, N_CONSTANTS, STRAY, places};
use crate::meter::{Meter, Switch};

/// A constant of the meter as it is stored.
#[derive(Clone, Copy, Debug)]
pub(super) struct Constant {
    /// Position among the constants of a switch.
    pub(super) kind: usize,
    /// The switch, for a range resistor.
    pub(super) switch: Option<Switch>,
    /// Natural logarithm, but for dial end and stray.
    mean: f64,
    u: f64,
    /// `None`: known exactly.
    column: Option<usize>,
}

#[derive(Clone, Debug)]
pub(super) struct Unknowns {
    pub(super) constants: Vec<Constant>,
    pub(super) places: Vec<[Option<usize>; N_CONSTANTS]>,
    nominal: Vec<Constants>,
    parts: Vec<KnownPart>,
    n_free: usize,
}

impl Unknowns {
    pub(super) fn of(meter: &Meter, rows: &Rows) -> Self {
        // What was known before the readings are the tolerances, not an earlier calibration.
        let model = Model::of(meter, None);
        let places = places(meter);
        let mut constants: Vec<Constant> = Vec::new();
        let mut n_free = 0;
        let switches: Vec<Switch> = meter.switches().collect();
        let mut push = |switch: Switch, kind: usize| {
            let u = model.uncertainties(switch)[kind];
            let value = value_of(model.constants(switch), kind);
            constants.push(Constant {
                kind,
                switch: (kind == 0).then_some(switch),
                mean: if is_logarithm(kind) {
                    value.ln()
                } else {
                    value
                },
                u,
                column: (u > 0.0).then_some(n_free),
            });
            n_free += usize::from(u > 0.0);
        };
        for switch in &switches {
            push(*switch, 0);
        }
        if let (Some(first), Some(placed)) = (switches.first(), places.first()) {
            for kind in (1..N_CONSTANTS).filter(|kind| placed[*kind].is_some()) {
                push(*first, kind);
            }
        }
        Self {
            constants,
            places,
            nominal: switches.iter().map(|s| *model.constants(*s)).collect(),
            parts: rows.parts.clone(),
            n_free,
        }
    }

    pub(super) fn count(&self) -> usize {
        self.n_free + self.parts.len()
    }

    pub(super) fn priors(&self) -> Vec<Prior> {
        (0..self.count())
            .map(|parameter| Prior {
                parameter,
                mean: 0.0,
                standard_uncertainty: 1.0,
            })
            .collect()
    }

    /// The unknowns that a reading on a switch depends on, the part's included.
    pub(super) fn columns(&self, switch: Switch, part: Option<usize>) -> Vec<usize> {
        self.places[switch.position()]
            .iter()
            .filter_map(|place| self.constants[(*place)?].column)
            .chain(part.map(|part| self.part_column(part)))
            .collect()
    }

    pub(super) fn part_column(&self, part: usize) -> usize {
        self.n_free + part
    }

    /// The constants of a switch.
    pub(super) fn constants(&self, switch: Switch, at: &[f64]) -> Constants {
        let mut k = self.nominal[switch.position()];
        for (kind, place) in self.places[switch.position()].iter().enumerate() {
            let Some(constant) = place.map(|place| &self.constants[place]) else {
                continue;
            };
            let Some(column) = constant.column else {
                continue;
            };
            let moved = constant.u * at[column];
            match kind {
                0 => k.r1 *= moved.exp(),
                1 => k.c2 *= moved.exp(),
                2 => k.dial_total *= moved.exp(),
                DIAL_END => k.dial_end += moved,
                STRAY => k.cs += moved,
                _ => k.vth *= moved.exp(),
            }
        }
        k
    }

    /// The capacitance of a part; 0 for open terminals.
    pub(super) fn capacitance(&self, part: Option<usize>, at: &[f64]) -> f64 {
        part.map_or(0.0, |part| {
            let known = &self.parts[part];
            known.capacitance * (known.u * at[self.part_column(part)]).exp()
        })
    }

    /// The constants and their covariance as they are stored.
    pub(super) fn fit(&self, solution: &Solution) -> Fit {
        let at = |c: &Constant| c.mean + c.column.map_or(0.0, |j| c.u * solution.estimate[j]);
        let shared = |one: &Constant, other: &Constant| match (one.column, other.column) {
            (Some(i), Some(j)) => one.u * other.u * solution.covariance[i][j],
            _ => 0.0,
        };
        Fit {
            estimate: self.constants.iter().map(at).collect(),
            covariance: self
                .constants
                .iter()
                .map(|one| {
                    self.constants
                        .iter()
                        .map(|other| shared(one, other))
                        .collect()
                })
                .collect(),
            places: self.places.clone(),
        }
    }
}

impl Constant {
    /// Estimate and standard uncertainty in the constant's own unit.
    pub(super) fn natural(&self, solution: &Solution) -> (f64, f64) {
        let (by, u) = self.column.map_or((0.0, 0.0), |j| {
            (solution.estimate[j], solution.covariance[j][j].sqrt())
        });
        self.in_own_unit(by, u)
    }

    /// What was known before, in the constant's own unit.
    pub(super) fn prior(&self) -> (f64, f64) {
        self.in_own_unit(0.0, 1.0)
    }

    fn in_own_unit(&self, by: f64, u: f64) -> (f64, f64) {
        let value = self.mean + self.u * by;
        if is_logarithm(self.kind) {
            (value.exp(), value.exp() * self.u * u)
        } else {
            (value, self.u * u)
        }
    }

    /// Standard uncertainty over that of the prior, and how far the estimate lies from it in standard uncertainties of
    /// the prior; `None` for what is known exactly.
    pub(super) fn learnt(&self, solution: &Solution) -> Option<(f64, f64)> {
        let j = self.column?;
        Some((solution.covariance[j][j].sqrt(), solution.estimate[j]))
    }

    /// The unknown that stands for it.
    pub(super) fn column(&self) -> Option<usize> {
        self.column
    }
}

fn is_logarithm(kind: usize) -> bool {
    kind != DIAL_END && kind != STRAY
}

fn value_of(k: &Constants, kind: usize) -> f64 {
    match kind {
        0 => k.r1,
        1 => k.c2,
        2 => k.dial_total,
        DIAL_END => k.dial_end,
        STRAY => k.cs,
        _ => k.vth,
    }
}
