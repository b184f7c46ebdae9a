//! What to know before a part is touched: short, where it matters, and once.

use super::{Marked, State};
use crate::finding::limits;
use crate::quantity::{Farad, Resolution, Volt, engineering};

/// The cautions of the Help screen, most important first.
pub const GENERAL: [&str; 9] = [
    "Discharge every part before you touch it, and once more before it goes to the meter.",
    "Take the part out of its circuit: what is connected beside it is measured with it, and may feed the meter.",
    "Polarised parts see the meter's alternating voltage without bias: heed \"do not connect\".",
    "Suppression parts (X1, X2, Y1, Y2) are replaced only by new, approved ones of the same class; salvaged ones never go back on the line.",
    "Oil-filled parts of old make may hold PCB: do not open, heat or bin them; ask your waste service.",
    "A null is no test of leakage, and a good value says nothing about insulation.",
    "Leakage tests above 60 V dc are for trained people with a guarded supply; local rules first.",
    "Local codes come first, and so does a licensed practitioner wherever they ask for one.",
    SAME_SIDE,
];

/// What play in the drive of a dial asks for (common practice, no source).
pub const SAME_SIDE: &str = "Come to every reading from the same side, edges too: play in the dial's drive shifts them (common practice, no source).";

/// Returns what to know about the part in hand, most urgent first.
pub fn cautions(state: &State) -> Vec<String> {
    let mut said = Vec::new();
    let expected = state.bench.prediction.as_ref();
    let all = expected.map_or(&[][..], |prediction| &prediction.cautions);
    let (urgent, later): (Vec<_>, Vec<_>) = all.iter().partition(|caution| caution.is_urgent());
    said.extend(urgent.iter().map(ToString::to_string));
    if let Some(marked) = state.bench.marked() {
        said.extend(of_marking(marked));
    }
    said.extend(later.iter().map(ToString::to_string));
    said
}

fn of_marking(marked: &Marked) -> Vec<String> {
    let mut said = Vec::new();
    let Some(reading) = marked.reading() else {
        return said;
    };
    if let Some(class) = &reading.safety_class {
        said.push(format!("class {class}: never back on the line"));
    }
    let rated = reading.voltage.and_then(|voltage| voltage.dc);
    if let Some(charge) = rated.and_then(|volts| discharge(reading.capacitance, volts)) {
        said.push(charge);
    }
    said
}

/// Says what a charged part holds and how long it takes to be rid of it, if that is enough to be felt or to harm the meter.
fn discharge(capacitance: Farad, rated: Volt) -> Option<String> {
    /// Below this a discharge is hardly felt; builders' custom, no standard behind it.
    const WORTH_SAYING_J: f64 = 0.01;
    const THROUGH_OHM: f64 = 10e3;
    const SAFE_V: f64 = 1.0;
    let energy = 0.5 * capacitance.get() * rated.get() * rated.get();
    if energy < WORTH_SAYING_J || rated.get() <= SAFE_V {
        return None;
    }
    let seconds = THROUGH_OHM * capacitance.get() * (rated.get() / SAFE_V).ln();
    let joules = engineering(energy, Resolution::Digits(2), "J");
    let time = engineering(seconds, Resolution::Digits(2), "s");
    Some(format!(
        "discharge first: {joules} at {rated}; through 10 kΩ {time} to 1 V"
    ))
}

/// Returns the limits in force for the reading in use, as numbers and where they come from.
pub fn limits_in_force(state: &State) -> Option<crate::finding::Limits> {
    let marked = state.bench.marked()?;
    let reading = marked.reading()?;
    Some(limits(reading, &state.setup.rules()))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn only_a_charge_worth_fearing_is_spoken_of() {
        let shown = |farad, volt| discharge(Farad::new(farad), Volt::new(volt));
        assert_eq!(shown(220e-9, 100.0), None);
        assert_eq!(
            shown(47e-6, 450.0).as_deref(),
            Some("discharge first: 4.8 J at 450 V; through 10 kΩ 2.9 s to 1 V")
        );
    }
}
