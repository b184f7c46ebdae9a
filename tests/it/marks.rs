//! Markings of a part decode to the part: over preferred values, tolerances, families and voltages.

use nulltray::marking::{Mark, Wanted, marks};
use nulltray::quantity::{Farad, Tolerance, Volt};
use nulltray::tables::{Family, family_facts};
use proptest::prelude::*;

const E24: [u32; 24] = [
    10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91,
];
/// Families with the tolerances that they are made with.
const FAMILIES: [(&str, [&str; 4]); 12] = [
    ("disc1", ["", "±2 %", "±5 %", "±10 %"]),
    ("disc2", ["", "±10 %", "±20 %", "-20/+80 %"]),
    ("mlcc1", ["", "±1 %", "±2 %", "±5 %"]),
    ("mlcc2", ["", "±10 %", "±20 %", "-20/+80 %"]),
    ("pet", ["", "±5 %", "±10 %", "±20 %"]),
    ("pp", ["", "±2 %", "±5 %", "±10 %"]),
    ("ps", ["", "±1 %", "±2 %", "±5 %"]),
    ("mica", ["", "±1 %", "±2 %", "±5 %"]),
    ("paper", ["", "±10 %", "±20 %", "±20 %"]),
    ("al", ["", "±20 %", "-10/+50 %", "±20 %"]),
    ("ta", ["", "±10 %", "±20 %", "±20 %"]),
    ("polymer", ["", "±20 %", "±20 %", "±20 %"]),
];
const VOLTS: [f64; 6] = [0.0, 16.0, 50.0, 100.0, 250.0, 400.0];

fn farads(mantissa: u32, power: i32) -> Farad {
    // A decimal number divided once is the nearest double to it.
    let exponent = power - 12;
    Farad::new(if exponent < 0 {
        f64::from(mantissa) / 10f64.powi(-exponent)
    } else {
        f64::from(mantissa) * 10f64.powi(exponent)
    })
}

fn wanted(mantissa: u32, power: i32, tolerance: &str, family: &str, volts: f64) -> Option<Wanted> {
    let family = Family::named(family).expect("a family");
    let capacitance = farads(mantissa, power);
    let facts = family_facts(family);
    let usual =
        facts.usual_range.low <= Some(capacitance) && Some(capacitance) <= facts.usual_range.high;
    let voltage = Some(volts).filter(|volts| *volts > 0.0).map(Volt::new);
    let made = voltage.is_none()
        || facts.usual_voltage.low <= voltage && voltage <= facts.usual_voltage.high;
    (usual && made).then_some(Wanted {
        capacitance,
        tolerance: Tolerance::parse(tolerance).ok(),
        family: Some(family),
        voltage,
    })
}

/// The shares of markings that read back first, among three, and at all, weighed by how usual they are.
#[derive(Default)]
struct Shares {
    n: f64,
    first: f64,
    three: f64,
    at_all: f64,
    misses: Vec<String>,
}

impl Shares {
    fn add(&mut self, wanted: &Wanted, mark: &Mark) {
        let count = |is: bool| if is { mark.share } else { 0.0 };
        self.n += mark.share;
        self.first += count(mark.rank == Some(0));
        self.three += count(mark.rank.is_some_and(|rank| rank < 3));
        self.at_all += count(mark.rank.is_some());
        if mark.rank.is_none() {
            let family = wanted.family.map_or("", Family::name);
            self.misses.push(format!(
                "{} on {family} for {}",
                mark.text, wanted.capacitance
            ));
        }
    }

    fn in_words(&self) -> String {
        let percent = |part: f64| 100.0 * part / self.n;
        format!(
            "first {:.2} %, among three {:.2} %, at all {:.2} %; {:?}",
            percent(self.first),
            percent(self.three),
            percent(self.at_all),
            self.misses.iter().take(60).collect::<Vec<_>>()
        )
    }
}

#[test]
fn likely_markings_read_back() {
    let mut full = Shares::default();
    let mut bare = Shares::default();
    for (n, power) in (0..E24.len()).flat_map(|n| (0..8).map(move |power| (n, power))) {
        for (m, (family, tolerances)) in FAMILIES.iter().enumerate() {
            // A stride through tolerances and voltages: every pair comes up, not every combination.
            let tolerance = tolerances[(n + m) % tolerances.len()];
            let volts = VOLTS[(n * 5 + m + usize::try_from(power).unwrap_or(0)) % VOLTS.len()];
            let Some(wanted) = wanted(E24[n], power, tolerance, family, volts) else {
                continue;
            };
            let sums = if wanted.tolerance.is_none() && wanted.voltage.is_none() {
                &mut bare
            } else {
                &mut full
            };
            for mark in marks(&wanted) {
                sums.add(&wanted, &mark);
            }
        }
    }
    let table = format!("full: {}\nbare: {}", full.in_words(), bare.in_words());
    assert!(std::env::var_os("PRINTINGS").is_none(), "{table}");
    assert!(full.first >= 0.97 * full.n, "{table}");
    assert!(bare.three >= 0.99 * bare.n, "{table}");
}

proptest! {
    #[test]
    fn marks_of_any_part(picofarads in -1.0f64..1e12, percent in 0.0f64..99.0, family in 0usize..24, volts in 0.1f64..5e4) {
        let wanted = Wanted {
            capacitance: Farad::from_picofarads(picofarads),
            tolerance: Some(Tolerance::percent(percent)),
            family: Family::all().nth(family),
            voltage: Some(Volt::new(volts)),
        };
        let found = marks(&wanted);
        let sum: f64 = found.iter().map(|mark| mark.share).sum();
        prop_assert!(found.is_empty() || (sum - 1.0).abs() < 1e-9);
    }
}
