//! What another reading of a check part or the open terminals comes to: compared with what is known, and with what it read
//! before.

use super::checks::{Checks, Series, SeriesKey, compared, day_and_time, reading_of, word_of};
use super::work::{Subject, Work, known_part};
use super::{Outcome, RecordKind, Setup, Units};
use crate::finding::{CheckReading, Control, ControlPoint, Moved, Word, control};
use crate::meter::{DialReading, Estimate, Lamp, Repeats, Seen, Value, measure};
use crate::quantity::{Farad, Fraction, Uncertain};

impl Checks {
    /// Returns the outcome of another reading of a check part or the open terminals.
    pub(super) fn outcome(&self, work: &Work, setup: &Setup) -> Outcome {
        let (known, loss) = match &work.subject {
            Subject::Check(check) => (
                Uncertain {
                    value: check.capacitance,
                    standard_uncertainty: check.capacitance * check.uncertainty.get(),
                },
                check.loss,
            ),
            // The meter takes the stray off: open terminals read nothing, give or take the doubt of the stray.
            _ => (
                Uncertain {
                    value: Farad::new(0.0),
                    standard_uncertainty: Farad::new(0.0),
                },
                0.0,
            ),
        };
        let part = known_part(known.value, loss);
        let measured = measure(&setup.meter, work.switch, work.sighting.seen, &part);
        let kind = work.subject.kind();
        let stray = match kind {
            RecordKind::Zero => setup.meter.stray,
            _ => Farad::new(0.0),
        };
        let mut outcome = Outcome {
            nominal_pf: Some((known.value + stray).picofarads()),
            finding: Word::Undecided.word().to_owned(),
            ..Outcome::default()
        };
        match measured.value {
            Value::Estimate(estimate) => {
                fill(&mut outcome, estimate, known, stray);
                self.speak(&mut outcome, work, setup);
            }
            _ => outcome.remark = without_value(measured.value, kind, setup.meter.stray),
        }
        if kind == RecordKind::Zero && measured.estimate().is_some() {
            outcome.remark = format!("{}; {}", outcome.remark, meaning(&outcome, setup));
        }
        outcome
    }

    /// Says what the charts say of the reading.
    fn speak(&self, outcome: &mut Outcome, work: &Work, setup: &Setup) {
        let key = SeriesKey::of_work(work, setup);
        let Some(newest) = compared(outcome, i64::MAX) else {
            return;
        };
        let series = self.series(&key);
        let mut values: Vec<CheckReading> = series
            .readings
            .iter()
            .filter_map(|checked| reading_of(checked))
            .collect();
        values.push(newest);
        let chart = control(&values);
        let Some(point) = chart.points.last() else {
            return;
        };
        let word = match chart.moved {
            Some(_) => Word::Outside,
            None => word_of(point.control),
        };
        word.word().clone_into(&mut outcome.finding);
        let target = outcome.nominal_pf.unwrap_or(0.0) + point.target;
        let target = Units::Auto.write(Farad::from_picofarads(target));
        let said = match chart.baseline_until.filter(|until| *until < values.len()) {
            Some(_) => format!("{target}, the mean of its earlier readings"),
            None => target,
        };
        let (what, look_at) = match work.subject.kind() {
            RecordKind::Zero => (
                "the stray of the terminals",
                "look at leads and terminals, then calibrate with a row of 0 F",
            ),
            _ => (
                "the meter",
                "look at battery, leads and lamp, then calibrate",
            ),
        };
        outcome.remark = match (point.control, chart.moved) {
            (Control::Inside, _) => {
                format!("{what} agrees: {} from {said}", times(point.score))
            }
            (Control::Warning, None) => format!(
                "near the limit, read it once more: {} from {said}",
                times(point.score)
            ),
            (_, moved) => format!(
                "{what} has moved: {}; {look_at}",
                doubt_words(*point, &said, &series, moved)
            ),
        };
    }
}

fn times(score: f64) -> String {
    format!("{score:+.1} standard uncertainties")
}

/// Says what is in doubt, and why.
fn doubt_words(
    point: ControlPoint,
    target: &str,
    series: &Series<'_>,
    moved: Option<Moved>,
) -> String {
    let how = match point.control {
        Control::Drifted => format!("its last readings together lie {}", times(point.trend)),
        _ => times(point.score),
    };
    let good = moved
        .and_then(|moved| moved.last_good)
        .and_then(|index| series.readings.get(index));
    let doubt = match good {
        Some(good) => format!(
            "parts since {} in doubt (entries after {})",
            day_and_time(good.taken),
            good.first
        ),
        None => "all parts so far in doubt: no earlier check agreed".to_owned(),
    };
    format!("{doubt}; {how} from {target}")
}

/// Fills in what was measured, `offset` added, and the expanded doubt (k = 2) about what is known.
fn fill(outcome: &mut Outcome, estimate: Estimate, known: Uncertain<Farad>, offset: Farad) {
    let found = estimate.combined();
    let doubt = found
        .standard_uncertainty
        .get()
        .hypot(known.standard_uncertainty.get());
    let expanded = Farad::new(2.0 * doubt);
    let (value, center) = (found.value + offset, known.value + offset);
    outcome.low_pf = Some((center - expanded).picofarads());
    outcome.high_pf = Some((center + expanded).picofarads());
    outcome.capacitance_pf = Some(value.picofarads());
    outcome.uncertainty_pf = Some(found.standard_uncertainty.picofarads());
    outcome.own_uncertainty_pf = Some(estimate.own.picofarads());
    let relative = (center.get() > 0.0).then(|| Fraction::new((value - center) / center));
    outcome.deviation_percent = relative.map(Fraction::percent);
}

fn without_value(value: Value, kind: RecordKind, stray: Farad) -> String {
    match (value, kind) {
        (Value::Open, RecordKind::Zero) => format!(
            "less than the stray of the profile, {stray}: parts would read too little; look at the leads, then calibrate with a row of 0 F"
        ),
        (Value::Open, _) => "less than the open terminals: nothing is connected".to_owned(),
        (Value::Window { lamp, .. }, _) => {
            let seen = match lamp {
                Lamp::Dark => "dark",
                Lamp::Lit => "lit",
            };
            format!("a {seen} lamp gives no value to compare: read the dial")
        }
        (_, RecordKind::Zero) => {
            "no value to compare: turn to where the lamp is dimmest, on the switch of the smallest parts, and type `n` and the place".to_owned()
        }
        _ => "no value to compare: read the middle of the dark arc".to_owned(),
    }
}

/// Says what a stray other than the profile's does to the smallest parts.
fn meaning(outcome: &Outcome, setup: &Setup) -> String {
    let (Some(found), Some(known), Some(high)) =
        (outcome.capacitance_pf, outcome.nominal_pf, outcome.high_pf)
    else {
        return String::new();
    };
    let smallest = smallest_part(setup);
    let of_smallest = |pf: f64| {
        smallest.map_or_else(String::new, |smallest| {
            let share = Fraction::new(pf / smallest.picofarads());
            if share.get() > 1.0 {
                format!(", more than the smallest part it reads, {smallest}")
            } else {
                format!(", {share} of the smallest part it reads, {smallest}")
            }
        })
    };
    let difference = found - known;
    if outcome.finding == Word::Outside.word() {
        let (more, off) = (
            if difference > 0.0 { "more" } else { "less" },
            difference.abs(),
        );
        format!(
            "every part reads {} {more} than it is{}; below {} that is over 1 %",
            Farad::from_picofarads(off),
            of_smallest(off),
            Farad::from_picofarads(100.0 * off)
        )
    } else {
        let doubt = high - known;
        format!(
            "what it leaves open is ±{} (k = 2){}",
            Farad::from_picofarads(doubt),
            of_smallest(doubt)
        )
    }
}

/// Returns the smallest capacitance that any switch reads at an end of the dial.
fn smallest_part(setup: &Setup) -> Option<Farad> {
    let meter = &setup.meter;
    let ends: [DialReading; 2] = [meter.dial.low, meter.dial.high];
    let part = known_part(Farad::new(1e-9), 0.0);
    let values = meter.switches().flat_map(|switch| {
        ends.map(|end| {
            let measured = measure(meter, switch, Seen::Middle(Repeats::once(end)), &part);
            measured.estimate().map(|estimate| estimate.capacitance)
        })
    });
    values
        .flatten()
        .filter(|c| c.get() > 0.0)
        .min_by(|a, b| a.get().total_cmp(&b.get()))
}

#[cfg(test)]
mod tests {
    use super::super::testing::Table;
    use crate::meter::Meter;

    /// Types a check or zero with its reading; returns its finding and remark.
    fn read(table: &mut Table, what: &str, reading: &str) -> String {
        table.line(what);
        table.line(reading);
        let shown = table.state.bench.shown.as_ref().expect("a finding");
        let outcome = &shown.record.outcome;
        format!("{}: {}", outcome.finding, outcome.remark)
    }

    #[test]
    fn a_check_says_whether_the_meter_has_moved_and_what_is_in_doubt() {
        let mut table = Table::new();
        table.keys("224J↵20.3↵");
        let blue = "check blue 10 nF";
        expect_test::expect!["inside: the meter agrees: +0.0 standard uncertainties from 10.02 nF"]
            .assert_eq(&read(&mut table, blue, "34"));
        assert_eq!(table.notice(), "");
        table.keys("224J↵20.3↵↵20.2↵");
        expect_test::expect!["outside: the meter has moved: parts since 28 May 20:26 in doubt (entries after 2); +4.6 standard uncertainties from 10.02 nF; look at battery, leads and lamp, then calibrate"].assert_eq(&read(&mut table, blue, "36.2"));
        expect_test::expect!["outside: the meter has moved: parts since 28 May 20:26 in doubt (entries after 2); +22.3 standard uncertainties from 10.02 nF; look at battery, leads and lamp, then calibrate"].assert_eq(&read(&mut table, blue, "45"));
        assert_eq!(table.notice(), "in doubt in this lot: parts 2 to 3");
        // Taken back, it is forgotten.
        table.line("undo");
        expect_test::expect!["inside: the meter agrees: +0.0 standard uncertainties from 10.02 nF"]
            .assert_eq(&read(&mut table, blue, "34"));
        // On another switch it is another chart.
        table.line(blue);
        table.keys("/2↵");
        table.line("60");
        let shown = table.state.bench.shown.as_ref().expect("a finding");
        expect_test::expect!["the meter has moved: all parts so far in doubt: no earlier check agreed; +111.4 standard uncertainties from 10.02 nF; look at battery, leads and lamp, then calibrate"].assert_eq(&shown.record.outcome.remark);
        assert_eq!(table.notice(), "in doubt in this lot: parts 1 to 3");
    }

    #[test]
    fn small_shifts_that_last_are_a_drift() {
        let mut table = Table::new();
        let mut said = String::new();
        for _ in 0..14 {
            said = read(&mut table, "check blue 10 nF", "34.8");
            if said.contains("moved") {
                break;
            }
        }
        expect_test::expect!["outside: the meter has moved: all parts so far in doubt: no earlier check agreed; its last readings together lie +3.0 standard uncertainties from 10.02 nF; look at battery, leads and lamp, then calibrate"].assert_eq(&said);
    }

    #[test]
    fn the_open_terminals_are_compared_with_the_stray_of_the_profile() {
        let mut table = Table::new();
        expect_test::expect!["undecided: no value to compare: turn to where the lamp is dimmest, on the switch of the smallest parts, and type `n` and the place"].assert_eq(&read(&mut table, "zero", "n"));
        expect_test::expect!["inside: the stray of the terminals agrees: +0.8 standard uncertainties from 14 pF; what it leaves open is ±78.3 pF (k = 2), more than the smallest part it reads, 33.1 pF"].assert_eq(&read(&mut table, "zero", "0"));
        expect_test::expect!["outside: the stray of the terminals has moved: parts since 28 May 20:26 in doubt (entries after 2); +9.9 standard uncertainties from 14 pF; look at leads and terminals, then calibrate with a row of 0 F; every part reads 195 pF more than it is, more than the smallest part it reads, 33.1 pF; below 19.5 nF that is over 1 %"].assert_eq(&read(&mut table, "zero", "4"));
        // Terminals of less doubt, as after a calibration with a row of 0 F, on a switch for small parts.
        let setup = &mut table.state.setup;
        let text = setup
            .profile_text
            .split("[calibration]")
            .next()
            .expect("the profile")
            .replace("68 kΩ", "2.2 MΩ")
            .replace("stray_tolerance = \"4 pF\"", "stray_tolerance = \"0.5 pF\"");
        setup.meter = Meter::read(&text).expect("a profile").0;
        setup.profile_text = text;
        expect_test::expect!["undecided: less than the stray of the profile, 14 pF: parts would read too little; look at the leads, then calibrate with a row of 0 F"].assert_eq(&read(&mut table, "zero", "9"));
        expect_test::expect!["outside: the stray of the terminals has moved: all parts so far in doubt: no earlier check agreed; +14.8 standard uncertainties from 14 pF; look at leads and terminals, then calibrate with a row of 0 F; every part reads 11.2 pF more than it is, 8.23 % of the smallest part it reads, 136 pF; below 1.12 nF that is over 1 %"].assert_eq(&read(&mut table, "zero", "17"));
    }
}
