//! The line in one call: measure, judge, place. Bench, `line` and every command go through here.

use super::Outcome;
use crate::finding::{Circumstances, HouseRules, Observation, Verdict, expect, judge, usual_loss};
use crate::marking::{Decoding, Reading};
use crate::meter::{
    Measured, Meter, Part, Prediction, Seen, Switch, best_switch, measure, predict,
};
use crate::quantity::Farad;
use crate::tables::Family;
use crate::tray::{Judged, Placement, Tray, place};

/// What the line works with: the meter and the tray in force.
#[derive(Clone, Debug)]
pub struct Setup {
    /// The meter.
    pub meter: Meter,
    /// The whole text of its profile, as the log keeps it.
    pub profile_text: String,
    /// The tray, if one is in force.
    pub tray: Option<Tray>,
}

impl Setup {
    /// Returns what the log calls the profile: the CRC-32 of its text, eight hexadecimal digits.
    pub fn profile_hash(&self) -> String {
        format!("{:08x}", crc32fast::hash(self.profile_text.as_bytes()))
    }

    /// Returns the house rules in force.
    pub fn rules(&self) -> HouseRules {
        self.tray
            .as_ref()
            .map_or_else(HouseRules::default, |tray| tray.rules.clone())
    }
}

/// What a part is, as far as its marking and the person say.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Marked {
    /// All readings.
    pub decoding: Decoding,
    /// The family given by the person.
    pub family: Option<Family>,
    /// The reading the person chose (index), if not left to the program.
    pub chosen: Option<usize>,
}

impl Marked {
    /// Returns the reading the person chose, else the most plausible one.
    pub fn reading(&self) -> Option<&Reading> {
        self.chosen
            .and_then(|index| self.decoding.readings.get(index))
            .or_else(|| self.decoding.best())
    }
}

/// All that the line says about one part.
#[derive(Clone, Debug)]
pub struct Assessment {
    /// What was measured.
    pub measured: Measured,
    /// The finding.
    pub verdict: Verdict,
    /// Where it goes; `None` without a tray.
    pub placement: Option<Placement>,
}

/// Returns what the meter expects of the chosen (else best) reading, on the switch given or on the best one; `None` if
/// the marking has no reading.
pub fn predict_marked(
    setup: &Setup,
    marked: &Marked,
    switch: Option<Switch>,
) -> Option<Prediction> {
    let part = expect(marked.reading()?, &setup.rules());
    let switch = switch.unwrap_or_else(|| best_switch(&setup.meter, &part));
    Some(predict(&setup.meter, switch, &part))
}

/// Measures, judges and places.
pub fn assess(
    setup: &Setup,
    marked: &Marked,
    switch: Switch,
    seen: Seen,
    circumstances: &Circumstances,
) -> Assessment {
    let family = marked
        .family
        .or_else(|| marked.reading().and_then(|reading| reading.family));
    let unmarked = Part {
        capacitance: Farad::new(0.0),
        low: None,
        high: None,
        loss: usual_loss(family),
        family,
    };
    let measured = measure(&setup.meter, switch, seen, &unmarked);
    let observation = Observation {
        meter: &setup.meter,
        switch,
        seen,
        measured: &measured,
    };
    let usual = HouseRules::default();
    let rules = setup.tray.as_ref().map_or(&usual, |tray| &tray.rules);
    let verdict = judge(
        &marked.decoding,
        marked.chosen,
        &observation,
        circumstances,
        rules,
    );
    let placement = setup.tray.as_ref().map(|tray| {
        let reading = verdict
            .chosen
            .and_then(|index| marked.decoding.readings.get(index));
        let family = marked.family.or_else(|| reading.and_then(|r| r.family));
        place(
            tray,
            &Judged {
                reading,
                family,
                measured: &measured,
                verdict: &verdict,
            },
        )
    });
    Assessment {
        measured,
        verdict,
        placement,
    }
}

/// Returns the columns of `judge` for an assessment.
pub fn outcome(setup: &Setup, marked: &Marked, assessment: &Assessment) -> Outcome {
    let Assessment {
        measured,
        verdict,
        placement,
    } = assessment;
    let reading = verdict
        .chosen
        .and_then(|index| marked.decoding.readings.get(index));
    // A deviation is missing where the reading is no value (too lossy): then no value is written either.
    let estimate = measured
        .estimate()
        .filter(|_| verdict.deviation.is_some() || reading.is_none());
    let mut remarks = verdict.remarks.clone();
    if let Some(Placement::Unplaced { why }) = placement {
        remarks.push(why.clone());
    }
    Outcome {
        nominal_pf: reading.map(|r| r.capacitance.picofarads()),
        low_pf: verdict.limits.map(|l| l.low.picofarads()),
        high_pf: verdict.limits.and_then(|l| l.high).map(Farad::picofarads),
        limits_from: verdict.limits.map(|l| l.from.word().to_owned()),
        capacitance_pf: estimate.map(|e| e.capacitance.picofarads()),
        uncertainty_pf: estimate.map(|e| e.combined().standard_uncertainty.picofarads()),
        own_uncertainty_pf: estimate.map(|e| e.own.picofarads()),
        loss: measured.loss.proven,
        loss_below: measured.loss.below,
        deviation_percent: verdict.deviation.map(crate::quantity::Fraction::percent),
        probability_inside: verdict.probability_inside,
        probability_flat: verdict.probability_flat,
        reading_probability: verdict.reading_probability,
        finding: verdict.word.word().to_owned(),
        compartment: placement
            .as_ref()
            .map(|placement| compartment(setup, placement)),
        remark: remarks.join("; "),
    }
}

/// The place in words: "B3" or "no place".
pub fn compartment(setup: &Setup, placement: &Placement) -> String {
    let at = match placement {
        Placement::At(index) => setup
            .tray
            .as_ref()
            .and_then(|tray| tray.compartments.get(*index)),
        Placement::Unplaced { .. } => None,
    };
    at.map_or_else(
        || "no place".to_owned(),
        |compartment| compartment.at.to_string(),
    )
}
