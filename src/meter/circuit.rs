//! The circuit of the meter as admittances and voltages.
//!
//! Two RC legs hang on one sine of amplitude V0. In the *unknown leg* the range resistor R1 feeds a node to which the part
//! (series form: C with D/(ωC) in series) and the stray capacitance Cs are connected; a follower with a single pole at
//! its gain-bandwidth product takes the node's voltage. In the *dial leg* the dial's resistance R feeds the reference
//! capacitor C2 with its loss D2. A unity-gain difference amplifier of four equal resistors Rd takes one from the other;
//! depending on how it is driven it loads the dial leg. Kirchhoff's laws give
//!
//! ```text
//! Yx  = ωC/(D - j) + jωCs                   admittance of the unknown leg's node to ground
//! Va  = V0·H / (1 + R1·Yx),  H = 1/(1 + jf/GBW)
//! Y2  = ωC2/(D2 - j)                        admittance of the reference
//! buffered    Vb = V0 / (1 + R·Y2)
//! divider     Vb = V0 / (1 + R·(Y2 + 1/(2Rd)))
//! inverting   Vb = (V0 + Va·R/(2Rd)) / (1 + R·(Y2 + 1/Rd))
//! ```
//!
//! and in all three the difference is one Möbius map of the dial's resistance,
//! Δ(R) = Va - Vb = (A + B·R)/(1 + Q·R), with A = Va - V0, B = Va·P' and P, Q as in [`Circuit::dial_leg`].
//!
//! Symbols: `v0` amplitude, volt peak; `omega` 2πf, rad/s; `h` = R1·Yx; `k` = jf/GBW; `r1`, `c2`, `cs`, `vth` ohm, farad,
//! farad, volt peak; `p`, `q`, `y2` siemens; `d` loss tan δ.

use num_complex::Complex64;

use super::{Difference, Meter};

/// What never changes on a meter: frequency, amplitude, drive, follower, loss of the reference.
#[derive(Clone, Copy, Debug)]
pub(super) struct Circuit {
    pub(super) omega: f64,
    pub(super) v0: f64,
    /// f/GBW; 0 for an ideal follower.
    pub(super) lag: f64,
    pub(super) d2: f64,
    pub(super) difference: Difference,
}

/// The constants in force for one switch, each with an uncertainty.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Constants {
    pub(super) r1: f64,
    pub(super) c2: f64,
    /// Total resistance of a linear dial in ohm; common factor of measured points.
    pub(super) dial_total: f64,
    /// End resistance of a linear dial in ohm; 0 with measured points.
    pub(super) dial_end: f64,
    pub(super) cs: f64,
    pub(super) vth: f64,
}

/// A part in series form.
#[derive(Clone, Copy, Debug)]
pub(super) struct Load {
    pub(super) c: f64,
    pub(super) d: f64,
}

/// The two admittances of the dial leg: Δ = (Va·(1 + P·R) - V0)/(1 + Q·R).
#[derive(Clone, Copy, Debug)]
pub(super) struct DialLeg {
    pub(super) p: Complex64,
    pub(super) q: Complex64,
}

/// The unknown leg with a part on it.
#[derive(Clone, Copy, Debug)]
pub(super) struct UnknownLeg {
    /// Voltage behind the follower.
    pub(super) va: Complex64,
    /// Va - V0, computed without cancellation.
    pub(super) a: Complex64,
    /// Voltage on the part itself, before the follower.
    pub(super) part: Complex64,
}

impl Circuit {
    pub(super) fn of(meter: &Meter) -> Self {
        Self {
            omega: 2.0 * std::f64::consts::PI * meter.frequency.get(),
            v0: meter.amplitude.get(),
            lag: meter
                .gain_bandwidth
                .map_or(0.0, |gbw| meter.frequency / gbw),
            d2: meter.reference.loss,
            difference: meter.difference,
        }
    }

    /// The follower, H = 1/(1 + j·lag).
    pub(super) fn follower(&self) -> Complex64 {
        Complex64::new(1.0, self.lag).inv()
    }

    /// Y2 loaded by the difference amplifier: buffered P = Q = Y2; divider P = Q = Y2 + 1/(2Rd); inverting
    /// Q = Y2 + 1/Rd and P = Q - 1/(2Rd).
    pub(super) fn dial_leg(&self, constants: &Constants) -> DialLeg {
        let y2 = admittance(
            self.omega,
            Load {
                c: constants.c2,
                d: self.d2,
            },
        );
        match self.difference {
            Difference::Buffered => DialLeg { p: y2, q: y2 },
            Difference::Divider(rd) => {
                let loaded = y2 + 0.5 / rd.get();
                DialLeg {
                    p: loaded,
                    q: loaded,
                }
            }
            Difference::Inverting(rd) => DialLeg {
                p: y2 + 0.5 / rd.get(),
                q: y2 + 1.0 / rd.get(),
            },
        }
    }

    /// With h = R1·Yx and k = j·lag, A = Va - V0 = -V0·(h + k + hk)/((1 + h)(1 + k)).
    pub(super) fn unknown_leg(&self, constants: &Constants, load: Load) -> UnknownLeg {
        let yx = admittance(self.omega, load) + Complex64::new(0.0, self.omega * constants.cs);
        let h = yx * constants.r1;
        let k = Complex64::new(0.0, self.lag);
        let node = (h + 1.0).inv() * self.v0;
        let va = node * self.follower();
        UnknownLeg {
            va,
            a: -va * (h + k + h * k),
            part: node,
        }
    }
}

/// Admittance of a capacitor in series form: ωC/(D - j) = ωC·(D + j)/(1 + D²).
fn admittance(omega: f64, load: Load) -> Complex64 {
    Complex64::new(load.d, 1.0) * (omega * load.c / (1.0 + load.d * load.d))
}
