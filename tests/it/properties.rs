//! Properties: what is printed reads back; no text of a file, however broken, does more than get complaints.

use nulltray::finding::{Circumstances, HouseRules, Observation, Word, judge};
use nulltray::marking::decode;
use nulltray::meter::{DialReading, Meter, Part, Repeats, Seen, measure};
use nulltray::quantity::{Farad, Fraction, Ohm, Quantity, Span, Tolerance, Uncertain, Volt, parse};
use nulltray::tray::Tray;
use proptest::prelude::*;

use crate::balance::{meter, part};

const PROFILE: &str = include_str!("../data/judge-meter-3.toml");
const TRAY: &str = include_str!("../data/judge-tray.toml");

/// Values from the smallest to the largest the prefixes reach.
fn value() -> impl Strategy<Value = f64> {
    (1.0f64..10.0, -12i32..11).prop_map(|(mantissa, exponent)| mantissa * 10f64.powi(exponent))
}

#[track_caller]
fn reads_back<Q: Quantity + std::fmt::Display>(value: f64) {
    let printed = Q::from_base(value).to_string();
    let read = parse::<Q>(&printed)
        .expect("what is printed reads back")
        .base();
    // Three significant digits: half a unit of the third at most.
    assert!(
        (read / value - 1.0).abs() <= 0.005 + 1e-12,
        "{value:e} prints {printed}, reads {read:e}"
    );
    assert_eq!(
        Q::from_base(read).to_string(),
        printed,
        "and prints the same again"
    );
    let mantissa: f64 = printed
        .split(' ')
        .next()
        .and_then(|m| m.parse().ok())
        .expect("a mantissa");
    assert!(
        (1.0..1000.0).contains(&mantissa) || value > 999e9,
        "{printed}: the mantissa is from 1 to 1000"
    );
}

/// A text with pieces cut out, repeated, or replaced by anything.
fn broken(text: &'static str) -> impl Strategy<Value = String> {
    let n = text.chars().count();
    (
        0..n,
        0..40usize,
        prop_oneof![
            Just(String::new()),
            "\\PC{0,12}",
            "[\\[\\]{}=\",.0-9nµF \n-]{0,20}"
        ],
    )
        .prop_map(move |(from, length, piece)| {
            let head: String = text.chars().take(from).collect();
            let tail: String = text.chars().skip(from + length).collect();
            format!("{head}{piece}{tail}")
        })
}

proptest! {
    #[test]
    fn quantities_read_back_as_printed(value in value()) {
        reads_back::<Farad>(value);
        reads_back::<Ohm>(value);
        reads_back::<Volt>(value);
    }

    #[test]
    fn a_measured_value_keeps_two_digits_of_its_uncertainty(value in value(), relative in 1e-5f64..0.3) {
        let u = value * relative;
        let measured = Uncertain { value: Farad::new(value), standard_uncertainty: Farad::new(u) };
        let (shown, _) = measured.in_words(None);
        let read = parse::<Farad>(&shown).expect("what is printed reads back").get();
        // Half a unit of the second digit of u, which is at least 10 of them.
        prop_assert!((read - value).abs() <= 0.05 * u * (1.0 + 1e-9), "{value:e} ± {u:e} shows {shown}");
    }

    #[test]
    fn tolerances_read_back_as_printed(minus in 0u32..=100, plus in 0u32..=300) {
        let tolerance = Tolerance::asymmetric(f64::from(minus), f64::from(plus));
        let read = Tolerance::parse(&tolerance.to_string()).expect("what is printed reads back");
        prop_assert_eq!(read.to_string(), tolerance.to_string());
    }

    #[test]
    fn any_text_as_a_quantity_is_read_or_refused(text in "\\PC{0,24}") {
        let _ = parse::<Farad>(&text);
        let _ = Tolerance::parse(&text);
        let _ = Fraction::parse(&text);
        let _ = Span::<Farad>::parse(&text);
    }

    #[test]
    fn a_broken_profile_gets_complaints_in_the_order_of_the_file(text in broken(PROFILE)) {
        if let Err(complaints) = Meter::read(&text) {
            prop_assert!(!complaints.is_empty());
            prop_assert!(complaints.is_sorted_by_key(|c| (c.line, c.column)));
            let n_lines = text.split('\n').count();
            prop_assert!(complaints.iter().all(|c| 1 <= c.line && c.line <= n_lines && 1 <= c.column));
        }
    }

    #[test]
    fn a_broken_tray_gets_complaints(text in broken(TRAY)) {
        if let Err(complaints) = Tray::read(&text) {
            prop_assert!(!complaints.is_empty());
        }
    }

    #[test]
    fn any_text_as_a_file_is_no_more_than_a_mistake(text in "\\PC{0,200}") {
        let _ = Meter::read(&text);
        let _ = Tray::read(&text);
    }

    /// Along the dial the word goes outside, undecided, inside, undecided, outside, and never back.
    #[test]
    fn the_word_changes_only_towards_and_away_from_the_limits(switch in 0usize..3, place in 3.0f64..9.0) {
        let meter = meter("judge-meter-2.toml");
        let Some(switch) = meter.switches().nth(switch) else { return Ok(()) };
        let decoding = decode("104J", None);
        let nominal = decoding.best().expect("a reading").capacitance;
        let mut words: Vec<Word> = Vec::new();
        for step in 0..120 {
            let seen = Seen::Middle(Repeats::once(DialReading::new(place)));
            let mut measured = measure(&meter, switch, seen, &part(0.0, 0.0));
            // A part about the limits, read at this place: as if the resistor of the switch were another.
            if let nulltray::meter::Value::Estimate(estimate) = &mut measured.value {
                let factor = 0.7 + 0.6 * f64::from(step) / 120.0;
                let scale = nominal.get() * factor / estimate.capacitance.get();
                estimate.capacitance = nominal * factor;
                estimate.common = estimate.common * scale;
                estimate.own = estimate.own * scale;
            }
            let circumstances = Circumstances {
                reading: nulltray::finding::ReadingCertainty::Confirmed,
                ..Circumstances::default()
            };
            let observation = Observation { meter: &meter, switch, seen, measured: &measured };
            let word = judge(&decoding, Some(0), &observation, &circumstances, &HouseRules::default()).word;
            if words.last() != Some(&word) {
                words.push(word);
            }
        }
        let order = [Word::Outside, Word::Undecided, Word::Inside, Word::Undecided, Word::Outside];
        let mut rest = order.iter();
        prop_assert!(words.iter().all(|word| rest.any(|next| next == word)), "{words:?}");
    }
}

/// A part may be far beyond every span: the prediction still lies on the dial.
#[test]
fn extreme_parts_are_predicted_without_a_panic() {
    for name in [
        "meter-plain.toml",
        "meter-loaded.toml",
        "meter-inverting.toml",
        "judge-meter-2.toml",
    ] {
        let meter = meter(name);
        for switch in meter.switches() {
            for exponent in -24..=6 {
                let part = Part {
                    loss: part(0.0, 0.01).loss,
                    ..part(10f64.powi(exponent), 0.0)
                };
                let found = nulltray::meter::predict(&meter, switch, &part);
                assert!(meter.dial.admits(found.balance), "{name} {exponent}");
                assert!(found.residual.get().is_finite() && found.part_voltage.get().is_finite());
            }
        }
    }
}
