//! The readings as a least-squares problem, and what its solution says of each number.

use super::rows::Rows;
use super::unknowns::Unknowns;
use crate::meter::circuit::Load;
use crate::meter::fit::{Failure, Problem, Solution, huber_weight, solve};
use crate::meter::forecast::Forecast;
use crate::meter::{Calibration, Meter, NumberRead, Switch};

/// Step of the central differences, in standard uncertainties of what was known before: for relative uncertainties from
/// 0.1 to 30 % truncation and rounding both stay below 1e-6 of a slope.
const STEP: f64 = 2e-3;

/// Step of a part's logarithm.
const PART_STEP: f64 = 1e-4;

/// Weights that change by less than this stand still: what a robust fit is asked for is what it would move, and how far.
const STANDING_STILL: f64 = 0.02;

const N_ROBUST_STEPS: usize = 8;

#[derive(Clone, Copy)]
pub(super) struct Calibrating<'a> {
    pub(super) meter: &'a Meter,
    pub(super) rows: &'a Rows,
    pub(super) unknowns: &'a Unknowns,
}

/// Where a number stands: its row and its place among the numbers of the row.
#[derive(Clone, Copy, Debug)]
pub(super) struct Place {
    pub(super) row: usize,
    pub(super) number: usize,
}

impl Calibrating<'_> {
    /// What is stored of a solution.
    pub(super) fn calibration(&self, solution: &Solution, date: &str) -> Calibration {
        let n_numbers = solution.residuals.len().max(1);
        Calibration {
            date: date.to_owned(),
            observations: u32::try_from(self.rows.rows.len()).unwrap_or(u32::MAX),
            reduced_chi_square: solution.sum_of_squares / n_numbers as f64,
            fit: self.unknowns.fit(solution),
        }
    }

    /// The meter as a solution calibrates it.
    pub(super) fn calibrated(&self, solution: &Solution) -> Meter {
        self.meter.calibrated(self.calibration(solution, ""))
    }

    /// All numbers in their order.
    pub(super) fn places(&self) -> Vec<Place> {
        let rows = self.rows.rows.iter().enumerate();
        rows.flat_map(|(row, r)| (0..r.numbers.len()).map(move |number| Place { row, number }))
            .collect()
    }

    /// Solves with a weight for each number, from the start given.
    pub(super) fn solve(&self, start: Vec<f64>, weights: &[f64]) -> Result<Solution, Failure> {
        let roots: Vec<f64> = weights.iter().map(|w| w.sqrt()).collect();
        solve(&Problem {
            start,
            priors: self.unknowns.priors(),
            residuals: |at: &[f64]| self.residuals(at, &roots),
            slopes: |at: &[f64]| self.slopes(at, &roots),
        })
    }

    /// Predicted less read, in standard uncertainties of the reading.
    fn residuals(&self, at: &[f64], roots: &[f64]) -> Vec<f64> {
        let mut residuals = Vec::with_capacity(roots.len());
        for row in 0..self.rows.rows.len() {
            let numbers = &self.rows.rows[row].numbers;
            let found = self.predicted(row, at);
            for (number, found) in numbers.iter().zip(found) {
                let root = roots[residuals.len()];
                residuals.push(root * (found - number.reading) / number.u);
            }
        }
        residuals
    }

    /// Central differences over the few unknowns that each row depends on.
    fn slopes(&self, at: &[f64], roots: &[f64]) -> Vec<Vec<f64>> {
        let mut slopes: Vec<Vec<f64>> = Vec::with_capacity(roots.len());
        let mut moved = at.to_vec();
        for (row, r) in self.rows.rows.iter().enumerate() {
            let first = slopes.len();
            slopes.extend(r.numbers.iter().map(|_| vec![0.0; at.len()]));
            for column in self.unknowns.columns(r.switch, r.part) {
                moved[column] = at[column] + STEP;
                let above = self.predicted(row, &moved);
                moved[column] = at[column] - STEP;
                let below = self.predicted(row, &moved);
                moved[column] = at[column];
                for (i, number) in r.numbers.iter().enumerate() {
                    slopes[first + i][column] =
                        roots[first + i] * (above[i] - below[i]) / (2.0 * STEP * number.u);
                }
            }
        }
        slopes
    }

    /// The numbers of a row, at most two, as the unknowns would have them.
    pub(super) fn predicted(&self, row: usize, at: &[f64]) -> [f64; 2] {
        let row = &self.rows.rows[row];
        let constants = self.unknowns.constants(row.switch, at);
        let load = Load {
            c: self.unknowns.capacitance(row.part, at),
            d: row.loss,
        };
        let forecast = Forecast::of(self.meter, &constants, load);
        let mut found = [f64::NAN; 2];
        for (found, number) in found.iter_mut().zip(&row.numbers) {
            *found = forecast.number(number.kind);
        }
        found
    }

    /// Slopes of the middle read of any part by the unknowns of the meter, and by the logarithm of its capacitance.
    pub(super) fn middle_slopes(
        &self,
        switch: Switch,
        capacitance: f64,
        at: &[f64],
    ) -> (Vec<f64>, f64) {
        let middle = |at: &[f64], by: f64| {
            let constants = self.unknowns.constants(switch, at);
            let load = Load {
                c: capacitance * by.exp(),
                d: 0.0,
            };
            Forecast::of(self.meter, &constants, load).number(NumberRead::Middle)
        };
        let mut slopes = vec![0.0; at.len()];
        let mut moved = at.to_vec();
        for column in self.unknowns.columns(switch, None) {
            moved[column] = at[column] + STEP;
            let above = middle(&moved, 0.0);
            moved[column] = at[column] - STEP;
            let below = middle(&moved, 0.0);
            moved[column] = at[column];
            slopes[column] = (above - below) / (2.0 * STEP);
        }
        let of_part = (middle(at, PART_STEP) - middle(at, -PART_STEP)) / (2.0 * PART_STEP);
        (slopes, of_part)
    }

    /// Reweights by Huber's function until the weights stand still; the weights and the last solution.
    pub(super) fn robust(&self, plain: &Solution) -> Result<(Vec<f64>, Solution), Failure> {
        let n_numbers = plain.residuals.len();
        let ones = vec![1.0; n_numbers];
        let mut solution = plain.clone();
        let mut weights = ones.clone();
        for _ in 0..N_ROBUST_STEPS {
            let residuals = self.residuals(&solution.estimate, &ones);
            let next: Vec<f64> = residuals.iter().map(|r| huber_weight(*r)).collect();
            let change = next
                .iter()
                .zip(&weights)
                .map(|(x, y)| (x - y).abs())
                .fold(0.0, f64::max);
            if change < STANDING_STILL {
                break;
            }
            weights = next;
            solution = self.solve(solution.estimate, &weights)?;
        }
        Ok((weights, solution))
    }
}

#[cfg(test)]
mod tests {
    use super::super::ReferenceReading;
    use super::*;
    use crate::meter::model::{DIAL_END, N_CONSTANTS, STRAY};
    use crate::meter::{Edge, Part, Repeats, Seen, Source, measure, null};
    use crate::quantity::Farad;
    use num_complex::Complex64;

    /// Derivatives of an edge reading by the six constants and by ln C, worked out from the edge condition
    /// `F = |Va(1+PR) - V0|² - v²|1+QR|² = 0` instead of by differences: `dR = -F_θ/F_R`.
    fn edge_slopes(
        meter: &Meter,
        switch: Switch,
        load: Load,
        reading: f64,
    ) -> [f64; N_CONSTANTS + 1] {
        let model = meter.model();
        let (circuit, k) = (model.circuit(), model.constants(switch));
        let r = meter.dial.resistance(reading, k);
        let (dial, va) = (circuit.dial_leg(k), circuit.unknown_leg(k, load).va);
        let (p, q) = (dial.p, dial.q);
        let y2 = Complex64::new(circuit.d2, 1.0)
            * (circuit.omega * k.c2 / (1.0 + circuit.d2 * circuit.d2));
        let yc = Complex64::new(load.d, 1.0) * (circuit.omega * load.c / (1.0 + load.d * load.d));
        let h = (yc + Complex64::new(0.0, circuit.omega * k.cs)) * k.r1;
        let (x, bottom) = (va * (p * r + 1.0) - circuit.v0, q * r + 1.0);
        let v2 = k.vth * k.vth;
        let of_va = |dva: Complex64| 2.0 * (x.conj() * dva * (p * r + 1.0)).re;
        let through = -va / (h + 1.0);
        let f = [
            of_va(through * h),
            2.0 * (x.conj() * va * r * y2).re - v2 * 2.0 * (bottom.conj() * r * y2).re,
            0.0,
            0.0,
            of_va(through * k.r1 * Complex64::new(0.0, circuit.omega)),
            -2.0 * v2 * bottom.norm_sqr(),
            of_va(through * k.r1 * yc),
        ];
        let f_r = 2.0 * (x.conj() * va * p).re - v2 * 2.0 * (bottom.conj() * q).re;
        let units = (meter.dial.high.get() - meter.dial.low.get()) / k.dial_total;
        let mut slopes = f.map(|f| -f / f_r * units);
        slopes[2] = -(r - k.dial_end) * units;
        slopes[DIAL_END] = -units;
        slopes
    }

    fn meters() -> impl Iterator<Item = Meter> {
        [
            include_str!("../../../tests/data/meter-plain.toml"),
            include_str!("../../../tests/data/meter-loaded.toml"),
            include_str!("../../../tests/data/meter-inverting.toml"),
        ]
        .into_iter()
        .map(|text| {
            let text = text
                .replace("[reference]", "[reference]\ntolerance = \"2 %\"")
                .replace("[[switch]]", "[[switch]]\ntolerance = \"1 %\"")
                .replace("[lamp]", "[lamp]\nthreshold_tolerance = \"20 %\"")
                .replace("[terminals]", "[terminals]\nstray_tolerance = \"3 pF\"")
                .replace("[dial]", "[dial]\ntolerance = \"5 %\"");
            match Meter::read(&text) {
                Ok((meter, _)) => meter,
                Err(complaints) => panic!("{complaints:?}"),
            }
        })
    }

    /// A part of 1 % loss in the middle of a switch, with what is seen of it.
    fn seen_on(meter: &Meter, switch: Switch) -> (Part, (f64, f64)) {
        let k = meter.model().constants(switch);
        let c = 0.45 * k.dial_total * k.c2 / k.r1;
        let part = Part {
            capacitance: Farad::new(c),
            low: None,
            high: None,
            loss: crate::meter::AssumedLoss {
                value: 0.002,
                standard_uncertainty: 0.0,
            },
            family: None,
        };
        let arc = null(meter, switch, &part).arc.expect("a dark arc");
        (part, (arc.from.get(), arc.to.get()))
    }

    #[test]
    fn the_slopes_of_a_calibration_are_those_of_the_edge_condition() {
        for meter in meters() {
            for switch in meter.switches() {
                let (part, (from, to)) = seen_on(&meter, switch);
                let at = |x| Edge::At(Repeats::once(crate::meter::DialReading::new(x)));
                let reading = ReferenceReading {
                    label: "x".to_owned(),
                    capacitance: part.capacitance,
                    standard_uncertainty: part.capacitance * 0.01,
                    loss: part.loss.value,
                    switch,
                    seen: Seen::Edges {
                        from: at(from),
                        to: at(to),
                    },
                };
                let rows = Rows::of(&meter, &[reading]).expect("sound rows");
                let unknowns = Unknowns::of(&meter, &rows);
                let problem = Calibrating {
                    meter: &meter,
                    rows: &rows,
                    unknowns: &unknowns,
                };
                let slopes = problem.slopes(&vec![0.0; unknowns.count()], &[1.0, 1.0]);
                let load = Load {
                    c: part.capacitance.get(),
                    d: part.loss.value,
                };
                for (row, edge) in slopes.iter().zip([from, to]) {
                    let expected = edge_slopes(&meter, switch, load, edge);
                    let u_reading = meter.model().reading_uncertainty(1);
                    for (kind, u) in meter.model().uncertainties(switch).iter().enumerate() {
                        let place =
                            unknowns.places[switch.position()][kind].expect("a linear dial");
                        let Some(column) = unknowns.constants[place].column() else {
                            continue;
                        };
                        let expected = expected[kind] * u / u_reading;
                        assert!(
                            (row[column] - expected).abs() <= 1e-5 * expected.abs() + 1e-7,
                            "{kind}: {} {expected}",
                            row[column]
                        );
                    }
                    let expected = expected[N_CONSTANTS] * 0.01 / u_reading;
                    assert!((row[unknowns.part_column(0)] / expected - 1.0).abs() < 1e-5);
                }
            }
        }
    }

    /// A middle is the mean of two edges, so that `dlnC = -dr_θ/dr_lnC`; what an estimate states is that times u.
    #[test]
    fn the_contributions_to_an_uncertainty_are_those_of_the_edge_condition() {
        const SOURCES: [(Source, usize); 5] = [
            (Source::RangeResistor, 0),
            (Source::Reference, 1),
            (Source::DialTotal, 2),
            (Source::DialEnd, DIAL_END),
            (Source::Threshold, 5),
        ];
        for meter in meters() {
            for switch in meter.switches() {
                let (part, (from, to)) = seen_on(&meter, switch);
                let load = Load {
                    c: part.capacitance.get(),
                    d: part.loss.value,
                };
                let (one, other) = (
                    edge_slopes(&meter, switch, load, from),
                    edge_slopes(&meter, switch, load, to),
                );
                let middle: Vec<f64> = one.iter().zip(other).map(|(x, y)| 0.5 * (x + y)).collect();
                let seen = Seen::Middle(Repeats::once(crate::meter::DialReading::new(
                    0.5 * (from + to),
                )));
                let found = measure(&meter, switch, seen, &part);
                let share = |source: Source| {
                    found
                        .contributions
                        .iter()
                        .find(|c| c.source == source)
                        .expect("a contribution")
                        .share
                        .get()
                };
                let u = meter.model().uncertainties(switch);
                let expected =
                    |kind: usize| (middle[kind] / middle[N_CONSTANTS] * u[kind]).abs() * load.c;
                for (source, kind) in SOURCES {
                    let bound = 1e-3 * expected(kind) + 1e-7 * load.c;
                    assert!(
                        (share(source) - expected(kind)).abs() < bound,
                        "{source}: {} {}",
                        share(source),
                        expected(kind)
                    );
                }
                let bound = 1e-3 * expected(STRAY) + 1e-7 * load.c;
                assert!((share(Source::Stray) - expected(STRAY)).abs() < bound);
            }
        }
    }
}
