//! The closed forms: from a part to the place of its null, and from a null to the part. No search anywhere.
//!
//! **The map.** Δ(R) = (A + B·R)/(1 + Q·R) is a Möbius map of the dial's resistance R (see `circuit.rs`; B = Va·P), so
//! |Δ|² = (n0 + n1·R + n2·R²)/(1 + d1·R + d2·R²) with n0 = |A|², n1 = 2Re(A*B), n2 = |B|², d1 = 2Re Q, d2 = |Q|².
//!
//! **Best balance.** d|Δ|²/dR = 0 is (n2·d1 - n1·d2)R² + 2(n2 - n0·d2)R + (n1 - n0·d1) = 0: at most two stationary points;
//! the least |Δ| among them and the two ends of travel is the balance.
//!
//! **Dark edges.** |Δ|² < v² is aR² + bR + c < 0 with a = n2 - v²d2, b = n1 - v²d1, c = n0 - v².
//!
//! **Back to the part.** 1 + R1·Yx = α + β·C for an assumed loss D, with α = 1 + jωR1Cs and β = ωR1/(D - j). Put
//! S(C) = |α + βC|², L(z) = Re(z·(α + βC)*), g = V0·H. Multiplying the conditions above by S gives a quadratic in C for
//! each kind of reading:
//!
//! ```text
//! edge at R      K·S - 2L(V0·u) + |u|² = 0,                u = g(1 + PR),  K = V0² - v²|1 + QR|²
//! middle at R    K·S - 2L(V0·g·P) + |g|²(2Re P + 2R|P|²) = 0,              K = -v²(d1 + 2R·d2)
//! dimmest at R   -γV0²·S - 2β'L(V0·g·P) + 2γL(V0·g) + |g|²(|P|²α' + 2β'Re P - γ) = 0,
//!                α' = d1R² + 2R,  β' = 1 - d2R²,  γ = 2d2R + d1
//! ```
//!
//! (The middle of the arc is the vertex of its quadratic, b + 2aR = 0; the dimmest place is a stationary point of |Δ|².)
//!
//! **Two edges** say more: at each, |Δ| = v puts Va on a circle, and Va is where the two cross (see `arc.rs`).

use num_complex::Complex64;

use super::circuit::{Circuit, Constants, DialLeg, Load, UnknownLeg};

/// The real solutions of a quadratic equation, sorted.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Roots {
    None,
    One(f64),
    Two(f64, f64),
}

/// Solves a·x² + b·x + c = 0 without cancellation: q = -(b + sign(b)·√(b² - 4ac))/2, roots q/a and c/q. Roots that
/// are not finite (a = 0) are left out.
pub(super) fn quadratic(a: f64, b: f64, c: f64) -> Roots {
    let discriminant = b * b - 4.0 * a * c;
    if discriminant < 0.0 || discriminant.is_nan() {
        return Roots::None;
    }
    let q = -0.5 * (b + discriminant.sqrt().copysign(b));
    let (x1, x2) = (q / a, c / q);
    match (x1.is_finite(), x2.is_finite()) {
        (true, true) => Roots::Two(x1.min(x2), x1.max(x2)),
        (true, false) => Roots::One(x1),
        (false, true) => Roots::One(x2),
        (false, false) => Roots::None,
    }
}

impl Roots {
    /// The larger root.
    fn larger(self) -> Option<f64> {
        match self {
            Self::None => None,
            Self::One(x) | Self::Two(_, x) => Some(x),
        }
    }

    /// The smallest root above 0.
    fn smallest_positive(self) -> Option<f64> {
        match self {
            Self::None => None,
            Self::One(x) => Some(x),
            Self::Two(x, y) => Some(if x > 0.0 { x } else { y }),
        }
        .filter(|x| *x > 0.0)
    }
}

/// The span of the dial in ohm.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct ResistanceSpan {
    pub(super) low: f64,
    pub(super) high: f64,
}

/// An end of the dial's resistance.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Side {
    Lower,
    Upper,
}

/// The difference as a function of the dial's resistance.
#[derive(Clone, Copy, Debug)]
pub(super) struct DialLaw {
    a: Complex64,
    b: Complex64,
    q: Complex64,
}

/// The place of least difference.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Balance {
    /// Dial resistance, ohm.
    pub(super) r: f64,
    /// Least difference, volt peak.
    pub(super) residual: f64,
    /// The side on which the free optimum lies outside the span.
    pub(super) beyond: Option<Side>,
}

/// The dark part of the dial's span, ohm, and the sides on which the span cuts it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct DarkSpan {
    pub(super) from: f64,
    pub(super) to: f64,
    pub(super) cut_low: bool,
    pub(super) cut_high: bool,
}

impl DialLaw {
    pub(super) fn of(circuit: &Circuit, constants: &Constants, load: Load) -> Self {
        Self::from_legs(
            circuit.unknown_leg(constants, load),
            circuit.dial_leg(constants),
        )
    }

    pub(super) fn from_legs(unknown: UnknownLeg, dial: DialLeg) -> Self {
        Self {
            a: unknown.a,
            b: unknown.va * dial.p,
            q: dial.q,
        }
    }

    /// |Δ| at a dial resistance, volt peak.
    pub(super) fn difference(&self, r: f64) -> f64 {
        (self.a + self.b * r).norm() / (self.q * r + 1.0).norm()
    }

    fn numerator(&self) -> (f64, f64, f64) {
        (
            self.a.norm_sqr(),
            2.0 * (self.a.conj() * self.b).re,
            self.b.norm_sqr(),
        )
    }

    fn denominator(&self) -> (f64, f64) {
        (2.0 * self.q.re, self.q.norm_sqr())
    }

    /// The least difference within the span.
    pub(super) fn best_balance(&self, span: ResistanceSpan) -> Balance {
        let (n0, n1, n2) = self.numerator();
        let (d1, d2) = self.denominator();
        let stationary = quadratic(n2 * d1 - n1 * d2, 2.0 * (n2 - n0 * d2), n1 - n0 * d1);
        let free = match stationary {
            Roots::None => None,
            Roots::One(r) => Some(r),
            Roots::Two(r1, r2) => [r1, r2]
                .into_iter()
                .filter(|r| *r > 0.0)
                .min_by(|x, y| self.difference(*x).total_cmp(&self.difference(*y))),
        };
        let at = |r: f64| (r, self.difference(r));
        let (low, high) = (at(span.low), at(span.high));
        let nearest_end = if low.1 <= high.1 { low } else { high };
        match free.filter(|r| *r > 0.0) {
            Some(r) if span.low <= r && r <= span.high => {
                let inside = at(r);
                let (r, residual) = if inside.1 <= nearest_end.1 {
                    inside
                } else {
                    nearest_end
                };
                Balance {
                    r,
                    residual,
                    beyond: None,
                }
            }
            Some(r) => {
                let beyond = if r < span.low {
                    Side::Lower
                } else {
                    Side::Upper
                };
                Balance {
                    r: nearest_end.0,
                    residual: nearest_end.1,
                    beyond: Some(beyond),
                }
            }
            // No positive stationary point: |Δ| falls or rises all the way.
            None => {
                let beyond = if low.1 <= high.1 {
                    Side::Lower
                } else {
                    Side::Upper
                };
                Balance {
                    r: nearest_end.0,
                    residual: nearest_end.1,
                    beyond: Some(beyond),
                }
            }
        }
    }

    /// The dark piece that holds the best balance, clipped to the span; `None` where the lamp never goes dark.
    pub(super) fn dark_span(&self, threshold: f64, span: ResistanceSpan) -> Option<DarkSpan> {
        let (n0, n1, n2) = self.numerator();
        let (d1, d2) = self.denominator();
        let v2 = threshold * threshold;
        let a = n2 - v2 * d2;
        let roots = quadratic(a, n1 - v2 * d1, n0 - v2);
        let (from, to) = match roots {
            // Opening upwards: dark between the roots.
            Roots::Two(r1, r2) if a > 0.0 => (r1, r2),
            Roots::None | Roots::One(_) if a > 0.0 => return None,
            // Opening downwards: dark outside the roots; the piece with the better balance counts.
            Roots::Two(r1, r2) => {
                let best = self.best_balance(span).r;
                if best <= r1 {
                    (f64::NEG_INFINITY, r1)
                } else {
                    (r2, f64::INFINITY)
                }
            }
            Roots::One(r) => {
                if self.difference(0.5 * r) < threshold {
                    (f64::NEG_INFINITY, r)
                } else {
                    (r, f64::INFINITY)
                }
            }
            Roots::None => (f64::NEG_INFINITY, f64::INFINITY),
        };
        let cut_low = from <= span.low;
        let cut_high = to >= span.high;
        let (from, to) = (from.max(span.low), to.min(span.high));
        (from <= to).then_some(DarkSpan {
            from,
            to,
            cut_low,
            cut_high,
        })
    }

    /// Both roots of the dark condition, whatever the span; `None` where there is no arc between two of them.
    pub(super) fn free_edges(&self, threshold: f64) -> Option<(f64, f64)> {
        let (n0, n1, n2) = self.numerator();
        let (d1, d2) = self.denominator();
        let v2 = threshold * threshold;
        let a = n2 - v2 * d2;
        match quadratic(a, n1 - v2 * d1, n0 - v2) {
            Roots::Two(r1, r2) if a > 0.0 => Some((r1, r2)),
            _ => None,
        }
    }

    /// Both roots of the dark condition; where it is met nowhere, twice the place that comes nearest to it, so that a fit
    /// may pass through. `None` where no arc lies between two of them.
    pub(super) fn edges_or_nearest(&self, threshold: f64) -> Option<(f64, f64)> {
        let (n0, n1, n2) = self.numerator();
        let (d1, d2) = self.denominator();
        let v2 = threshold * threshold;
        let (a, b) = (n2 - v2 * d2, n1 - v2 * d1);
        match quadratic(a, b, n0 - v2) {
            Roots::Two(r1, r2) if a > 0.0 => Some((r1, r2)),
            Roots::None if a > 0.0 => Some((-0.5 * b / a, -0.5 * b / a)),
            _ => None,
        }
    }

    /// The piece of the dial around the balance over which |Δ| stays within a factor of its least value, ohm, clipped.
    pub(super) fn shallow_span(&self, factor: f64, span: ResistanceSpan) -> Option<DarkSpan> {
        let least = self.best_balance(span).residual;
        self.dark_span(least * factor, span)
    }
}

/// 1 + R1·Yx = `a` + `b`·C for an assumed loss, and what follows from it.
struct PartLaw {
    v0: f64,
    g: Complex64,
    a: Complex64,
    b: Complex64,
    dial: DialLeg,
}

impl PartLaw {
    fn of(circuit: &Circuit, constants: &Constants, loss: f64) -> Self {
        let reactive = circuit.omega * constants.r1;
        Self {
            v0: circuit.v0,
            g: circuit.follower() * circuit.v0,
            a: Complex64::new(1.0, reactive * constants.cs),
            b: Complex64::new(loss, 1.0) * (reactive / (1.0 + loss * loss)),
            dial: circuit.dial_leg(constants),
        }
    }

    /// S(C) as coefficients of C⁰, C¹, C².
    fn s(&self) -> (f64, f64, f64) {
        (
            self.a.norm_sqr(),
            2.0 * (self.a.conj() * self.b).re,
            self.b.norm_sqr(),
        )
    }

    /// L(z) as coefficients of C⁰ and C¹.
    fn l(&self, z: Complex64) -> (f64, f64) {
        ((z * self.a.conj()).re, (z * self.b.conj()).re)
    }
}

/// The two capacitances whose dark edge lies at the dial resistance, smaller first: a lamp parked there is dark between
/// them. A root at or below 0 is left as it is.
pub(super) fn parts_with_edge(
    circuit: &Circuit,
    constants: &Constants,
    loss: f64,
    r: f64,
) -> Roots {
    let law = PartLaw::of(circuit, constants, loss);
    let u = law.g * (law.dial.p * r + 1.0);
    let v2 = constants.vth * constants.vth;
    // K = V0² - v²|1 + QR|²
    let k = law.v0 * law.v0 - v2 * (law.dial.q * r + 1.0).norm_sqr();
    let (s0, s1, s2) = law.s();
    let (l0, l1) = law.l(u * law.v0);
    quadratic(k * s2, k * s1 - 2.0 * l1, k * s0 - 2.0 * l0 + u.norm_sqr())
}

/// The capacitance whose dark edge on this side lies at the dial resistance; `None`: less than open terminals.
pub(super) fn part_from_edge(
    circuit: &Circuit,
    constants: &Constants,
    loss: f64,
    edge: (Side, f64),
) -> Option<f64> {
    let roots = parts_with_edge(circuit, constants, loss, edge.1);
    let root = match edge.0 {
        Side::Lower => roots.larger(),
        Side::Upper => roots.smallest_positive(),
    };
    root.filter(|c| *c > 0.0)
}

/// The capacitance whose dark arc has its middle, in resistance, at `r`; `None`: less than open terminals.
pub(super) fn part_from_middle(
    circuit: &Circuit,
    constants: &Constants,
    loss: f64,
    r: f64,
) -> Option<f64> {
    let law = PartLaw::of(circuit, constants, loss);
    let v2 = constants.vth * constants.vth;
    let (d1, d2) = (2.0 * law.dial.q.re, law.dial.q.norm_sqr());
    let k = -v2 * (d1 + 2.0 * r * d2);
    let (s0, s1, s2) = law.s();
    let (l0, l1) = law.l(law.g * law.dial.p * law.v0);
    let constant = law.g.norm_sqr() * (2.0 * law.dial.p.re + 2.0 * r * law.dial.p.norm_sqr());
    quadratic(k * s2, k * s1 - 2.0 * l1, k * s0 - 2.0 * l0 + constant).smallest_positive()
}

/// The capacitance whose difference is least at `r`; `None`: less than open terminals.
pub(super) fn part_from_dimmest(
    circuit: &Circuit,
    constants: &Constants,
    loss: f64,
    r: f64,
) -> Option<f64> {
    let law = PartLaw::of(circuit, constants, loss);
    let (p, q) = (law.dial.p, law.dial.q);
    let (d1, d2) = (2.0 * q.re, q.norm_sqr());
    // α', β', γ of the module page.
    let (alpha, beta, gamma) = (d1 * r * r + 2.0 * r, 1.0 - d2 * r * r, 2.0 * d2 * r + d1);
    let (s0, s1, s2) = law.s();
    let (p0, p1) = law.l(law.g * p * law.v0);
    let (g0, g1) = law.l(law.g * law.v0);
    let k = -gamma * law.v0 * law.v0;
    let constant = law.g.norm_sqr() * (p.norm_sqr() * alpha + 2.0 * beta * p.re - gamma);
    quadratic(
        k * s2,
        k * s1 - 2.0 * beta * p1 + 2.0 * gamma * g1,
        k * s0 - 2.0 * beta * p0 + 2.0 * gamma * g0 + constant,
    )
    .smallest_positive()
}
