//! Where to park the dial for a batch of equal parts, and what the lamp then settles.
//!
//! At each place a dark lamp and a lit one both have a probability of the part being inside (see `parked.rs`); a word follows
//! where that reaches the confidence asked for. The best place settles the largest share of the parts that are inside.

use super::parked::Window;
use super::prior::{Interval, Prior};
use super::{HouseRules, PriorKind, Word, expect, judge, limits, remark};
use crate::marking::Reading;
use crate::meter::{DialReading, Lamp, Meter, ParkedWindow, Switch, parked_window, parking_places};
use crate::quantity::Fraction;

/// A place to park the dial.
#[derive(Clone, Debug, PartialEq)]
pub struct Parking {
    /// The switch.
    pub switch: Switch,
    /// What the lamp tells apart there, and where that is.
    pub window: ParkedWindow,
    /// What a dark lamp says.
    pub dark: Proof,
    /// What a lit lamp says.
    pub lit: Proof,
    /// The share of good parts that get the word `inside` at once; the others are to be measured.
    pub settled: Fraction,
}

/// What the lamp says of a part.
#[derive(Clone, Debug, PartialEq)]
pub struct Proof {
    /// The word that follows.
    pub word: Word,
    /// The probability of being inside.
    pub probability_inside: f64,
    /// What is proven, at two standard uncertainties: "between 209 nF and 224 nF".
    pub interval: String,
}

/// Returns the best place on any switch; `None` if a parked lamp settles none of these parts.
pub fn best_parking(meter: &Meter, reading: &Reading, rules: &HouseRules) -> Option<Parking> {
    meter
        .switches()
        .filter_map(|switch| park(meter, switch, reading, rules))
        .filter(|parking| parking.settled.get() > 0.0)
        .reduce(better)
}

/// Returns the best place on a switch; `None` where parts inside their limits do not null on it.
pub fn park(
    meter: &Meter,
    switch: Switch,
    reading: &Reading,
    rules: &HouseRules,
) -> Option<Parking> {
    let part = expect(reading, rules);
    parking_places(meter, switch, &part)
        .into_iter()
        .filter_map(|at| parking_at(meter, switch, at, reading, rules))
        .reduce(better)
}

/// Returns what the lamp settles with the dial parked at this place; `None` if it is dark for no part.
pub fn parking_at(
    meter: &Meter,
    switch: Switch,
    at: DialReading,
    reading: &Reading,
    rules: &HouseRules,
) -> Option<Parking> {
    let window = parked_window(meter, switch, at, &expect(reading, rules))?;
    let limits = limits(reading, rules);
    let prior = Prior::of(reading.capacitance, limits.made_to, rules);
    let interval = Interval::of(&limits);
    let look = |lamp: Lamp| {
        let seen = Window {
            lamp,
            low: window.low,
            high: window.high,
        };
        let evidence = seen.evidence(prior, interval);
        let posterior = if evidence.total > 0.0 {
            evidence.inside / evidence.total
        } else {
            0.0
        };
        let deciding = match rules.prior {
            PriorKind::Salvage => Some(posterior),
            PriorKind::Flat => seen.flat_probability(interval),
        };
        let proof = Proof {
            word: deciding.map_or(Word::Undecided, |p| judge::word_of(p, rules)),
            probability_inside: deciding.unwrap_or(posterior),
            interval: remark::window(lamp, window.low, window.high),
        };
        (proof, evidence.inside)
    };
    let ((dark, good_dark), (lit, good_lit)) = (look(Lamp::Dark), look(Lamp::Lit));
    let share = |proof: &Proof, good: f64| {
        if proof.word == Word::Inside {
            good / (good_dark + good_lit)
        } else {
            0.0
        }
    };
    let settled = Fraction::new(share(&dark, good_dark) + share(&lit, good_lit));
    Some(Parking {
        switch,
        window,
        dark,
        lit,
        settled,
    })
}

/// More parts settled; of two that settle alike, the one whose dark lamp says more.
fn better(one: Parking, other: Parking) -> Parking {
    let key = |p: &Parking| (p.settled.get(), p.dark.probability_inside);
    if key(&one) >= key(&other) { one } else { other }
}
