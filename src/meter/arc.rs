//! Two dark edges: the most a lamp can tell, capacitance and loss.
//!
//! At an edge at dial resistance R the difference is just the threshold, |Va·α - β| = v, with
//!
//! ```text
//! buffered   α = 1,  β = V0/(1 + R·Y2)
//! divider    α = 1,  β = V0/(1 + R·(Y2 + 1/(2Rd)))
//! inverting  q = 1 + R·(Y2 + 1/Rd),  α = 1 - R/(2Rd·q),  β = V0/q
//! ```
//!
//! all of which are α = (1 + PR)/(1 + QR), β = V0/(1 + QR). So Va lies on a circle with centre β/α and radius v/|α|. Two
//! edges give two circles and Va is where they cross. The foot of their common chord, at (δ² + r1² - r2²)/(2δ) from the
//! first centre towards the second, δ apart, exists also when the circles miss, and its capacitance is that of the part
//! to second order in the loss. The two crossings lie ±s from the foot, s² = r1² - foot², with nearly the same
//! capacitance and losses to either side of D0, the loss that balances best; s² < 0 when the circles miss.

use num_complex::Complex64;

use super::circuit::{Circuit, Constants, Load};

/// What two edges tell.
#[derive(Clone, Copy, Debug)]
pub(super) struct Chord {
    /// The part at the foot of the chord; its loss is D0.
    pub(super) foot: Load,
    /// The parts at the two crossings, the one with the smaller loss first; `None` when the circles miss.
    pub(super) crossings: Option<(Load, Load)>,
    /// (D - D0)², negative when the circles miss.
    pub(super) w: f64,
}

/// Solves for the part from the dial resistances of its two dark edges; `None` where they coincide or the geometry gives
/// no capacitance.
pub(super) fn chord(circuit: &Circuit, constants: &Constants, edges: (f64, f64)) -> Option<Chord> {
    let dial = circuit.dial_leg(constants);
    let circle = |r: f64| {
        let loaded = dial.p * r + 1.0;
        let centre = loaded.inv() * circuit.v0;
        let radius = constants.vth * ((dial.q * r + 1.0) / loaded).norm();
        (centre, radius)
    };
    let (centre1, radius1) = circle(edges.0);
    let (centre2, radius2) = circle(edges.1);
    let towards = centre2 - centre1;
    let distance = towards.norm();
    if distance <= 0.0 {
        return None;
    }
    let along = 0.5 * (distance + (radius1 - radius2) * (radius1 + radius2) / distance);
    let unit = towards / distance;
    let foot = centre1 + unit * along;
    let s2 = (radius1 - along) * (radius1 + along);
    let across = unit * Complex64::new(0.0, s2.abs().sqrt());
    let part = |va: Complex64| part_behind(circuit, constants, va);
    let at_foot = part(foot)?;
    let (one, other) = (part(foot + across), part(foot - across));
    let distance_of = |load: Option<Load>| load.map(|l| (l.d - at_foot.d) * (l.d - at_foot.d));
    let w = match (distance_of(one), distance_of(other)) {
        (Some(x), Some(y)) => 0.5 * (x + y),
        (Some(x), None) | (None, Some(x)) => x,
        (None, None) => 0.0,
    };
    let crossings = match (one, other) {
        (Some(x), Some(y)) if s2 >= 0.0 => Some(if x.d <= y.d { (x, y) } else { (y, x) }),
        _ => None,
    };
    Some(Chord {
        foot: at_foot,
        crossings,
        w: w.copysign(s2),
    })
}

/// Undoes the follower and the divider of R1: Yx = (V0·H/Va - 1)/R1 - jωCs, Zx = 1/Yx, C = -1/(ω·Im Zx),
/// D = -Re Zx/Im Zx. `None` where that is no capacitance.
fn part_behind(circuit: &Circuit, constants: &Constants, va: Complex64) -> Option<Load> {
    let yx = (circuit.follower() * circuit.v0 / va - 1.0) / constants.r1
        - Complex64::new(0.0, circuit.omega * constants.cs);
    // Zx = Yx*/|Yx|², so C = |Yx|²/(ω·Im Yx) and D = Re Yx/Im Yx.
    let c = yx.norm_sqr() / (circuit.omega * yx.im);
    (c > 0.0 && c.is_finite()).then(|| Load {
        c,
        d: yx.re / yx.im,
    })
}

#[cfg(test)]
mod tests {
    use super::super::{Difference, Meter};
    use super::*;

    /// A part of 100 pF (10 nF) and loss 0.001 (0.01) with 14 pF and 0.2 nS across it and 0.35 Ω before it, at 1 kHz, shows
    /// 114.0000529 pF (10.01400240 nF). Subtracting the 14 pF is right to 1e-6, but leaves the loss wrong (recomputed from
    /// the admittances; the open correction of impedance measurement).
    #[test]
    fn the_stray_is_subtracted_from_what_the_terminals_show() {
        let circuit = Circuit {
            omega: 2000.0 * std::f64::consts::PI,
            v0: 5.0,
            lag: 1e-3,
            d2: 0.0,
            difference: Difference::Buffered,
        };
        let shown_and_true = [
            (114.000_052_9e-12, 0.001_156_663_0, 100e-12, 1e6),
            (10.014_002_40e-9, 0.010_011_222_4, 10e-9, 10e3),
        ];
        for (c, d, expected, r1) in shown_and_true {
            let mut constants = Constants {
                r1,
                c2: 100e-9,
                dial_total: 1e4,
                dial_end: 20.0,
                cs: 0.0,
                vth: 0.05,
            };
            let va = circuit.unknown_leg(&constants, Load { c, d }).va;
            constants.cs = 14e-12;
            let found = part_behind(&circuit, &constants, va).expect("a part");
            assert!((found.c / expected - 1.0).abs() < 1e-6, "{}", found.c);
        }
    }

    #[test]
    fn both_edges_of_a_meter_with_stray_give_the_part() {
        let text = include_str!("../../tests/data/meter-loaded.toml");
        let (meter, _) = Meter::read(text).unwrap_or_else(|c| panic!("{c:?}"));
        let switch = meter.switch_named("4").expect("switch 4");
        let constants = meter.model().constants(switch);
        let circuit = meter.model().circuit();
        let load = Load { c: 100e-12, d: 0.0 };
        let law = crate::meter::balance::DialLaw::of(circuit, constants, load);
        let edges = law.free_edges(constants.vth).expect("an arc");
        let found = chord(circuit, constants, edges).expect("a chord");
        assert!(
            (found.foot.c / load.c - 1.0).abs() < 1e-4,
            "{}",
            found.foot.c
        );
    }
}
