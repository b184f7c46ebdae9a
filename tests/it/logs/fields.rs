//! Every field, whatever stands in it.

use chrono::{DateTime, FixedOffset};
use nulltray::app::{Entry, Outcome, Raw, Record, RecordKind};
use nulltray::log::{Log, Which, salvage};
use proptest::prelude::*;

use super::{Folder, PROFILE, open, part, replacing, says, time};

#[test]
fn odd_numbers_and_times_are_stored_as_documented() {
    let folder = Folder::new();
    let mut log = open(&folder.log());
    let mut record = part("", "", None);
    record.outcome.loss = Some(f64::NAN);
    record.outcome.deviation_percent = Some(-0.0);
    record.outcome.high_pf = Some(f64::INFINITY);
    record.outcome.low_pf = Some(f64::MIN_POSITIVE / 8.0);
    let seconds = time(0).with_timezone(&FixedOffset::east_opt(3_661).unwrap());
    log.append(&record, seconds, "").unwrap();
    let entry = log.entries(None, Which::All).unwrap().remove(0);
    assert_eq!(entry.time, seconds);
    assert_eq!(entry.time.offset().local_minus_utc(), 3_660);
    assert_eq!(entry.profile, "00000000");
    let outcome = entry.record.outcome;
    assert_eq!(
        (outcome.loss, outcome.high_pf, outcome.low_pf),
        (None, Some(f64::INFINITY), record.outcome.low_pf)
    );
    assert!(outcome.deviation_percent.unwrap().is_sign_positive());
    says(
        log.append(&record, DateTime::<chrono::Utc>::MAX_UTC.fixed_offset(), ""),
        "cannot be written",
    );
}

fn any_text() -> impl Strategy<Value = String> {
    prop_oneof![
        any::<String>(),
        Just(String::new()),
        Just("'; DROP TABLE entry; --".to_owned()),
        Just("\"a\"\0b\r\n\u{1b}[2J\u{7f}".to_owned()),
        Just("0.1µ | µ μ Ω 日本".to_owned()),
        Just("1e999".to_owned()),
    ]
}

fn maybe_text() -> impl Strategy<Value = Option<String>> {
    proptest::option::of(any_text())
}

fn maybe_number() -> impl Strategy<Value = Option<f64>> {
    proptest::option::of(prop_oneof![
        any::<f64>()
            .prop_filter("as documented", |number| !number.is_nan())
            .prop_map(|number| if number == 0.0 { 0.0 } else { number }),
        (0..1_000_000_000_i32).prop_map(f64::from),
    ])
}

fn any_record() -> impl Strategy<Value = Record> {
    let raw = (
        (any_text(), any_text(), any_text(), any_text(), any_text()),
        proptest::collection::vec(maybe_text(), 13),
        proptest::option::of(any::<u32>()),
    );
    (
        raw,
        proptest::collection::vec(maybe_number(), 12),
        any_text(),
        0..3_usize,
    )
        .prop_map(
            |(
                ((lot, marking, switch, typed, finding), texts, chosen_reading),
                numbers,
                remark,
                kind,
            )| {
                let mut texts = texts.into_iter();
                let mut text = || texts.next().unwrap();
                let mut numbers = numbers.into_iter();
                let mut number = || numbers.next().unwrap();
                Record {
                    lot,
                    kind: [RecordKind::Part, RecordKind::Check, RecordKind::Zero]
                        .into_iter()
                        .nth(kind)
                        .unwrap(),
                    raw: Raw {
                        marking,
                        family: text(),
                        switch,
                        dial: text(),
                        dark_from: text(),
                        dark_to: text(),
                        lamp: text(),
                        temperature: text(),
                        heated_hours: text(),
                        leakage: text(),
                        leakage_voltage: text(),
                        looks: text(),
                        note: text(),
                        chosen_reading,
                        typed,
                    },
                    outcome: Outcome {
                        nominal_pf: number(),
                        low_pf: number(),
                        high_pf: number(),
                        limits_from: text(),
                        capacitance_pf: number(),
                        uncertainty_pf: number(),
                        own_uncertainty_pf: number(),
                        loss: number(),
                        loss_below: number(),
                        deviation_percent: number(),
                        probability_inside: number(),
                        probability_flat: number(),
                        reading_probability: number(),
                        finding,
                        compartment: text(),
                        remark,
                    },
                    replaces: None,
                }
            },
        )
}

#[test]
fn every_field_comes_back() {
    let folder = Folder::new();
    let mut log = open(&folder.log());
    let mut written = Vec::new();
    let mut runner = proptest::test_runner::TestRunner::new(ProptestConfig {
        cases: 64,
        failure_persistence: None,
        ..ProptestConfig::default()
    });
    let cases = std::cell::RefCell::new((&mut log, &mut written));
    runner
        .run(
            &(
                any_record(),
                any_text(),
                -1_000_000_000_000_i64..4_000_000_000_000,
                -800..800,
            ),
            |(record, profile, millis, minutes)| {
                let (log, written) = &mut *cases.borrow_mut();
                let time = DateTime::from_timestamp_millis(millis)
                    .unwrap()
                    .with_timezone(&FixedOffset::east_opt(minutes * 60).unwrap());
                let id = log.append(&record, time, &profile).unwrap();
                let hash = format!("{:08x}", crc32fast::hash(profile.as_bytes()));
                let entry = Entry {
                    id,
                    time,
                    voided: None,
                    profile: hash,
                    record,
                };
                prop_assert_eq!(log.entry(id).unwrap().unwrap(), entry.clone());
                prop_assert_eq!(log.profile_text(&entry.profile).unwrap().unwrap(), profile);
                written.push(entry);
                Ok(())
            },
        )
        .unwrap();
    assert_eq!(log.entries(None, Which::All).unwrap(), written);
    assert_eq!(salvage(&folder.log()).unwrap().entries, written);
    assert_eq!(log.verify().unwrap(), []);
    let lots = log.counts().unwrap().lots();
    assert_eq!(
        lots.iter().map(|lot| lot.n_parts).sum::<u64>(),
        written
            .iter()
            .filter(|entry| entry.record.kind == RecordKind::Part)
            .count() as u64
    );
}

#[test]
fn readings_of_check_parts_are_found_over_all_lots() {
    let folder = Folder::new();
    let mut log = open(&folder.log());
    assert_eq!(log.checks().unwrap(), []);
    let check = |lot: &str, label: &str, kind| Record {
        kind,
        ..part(lot, label, None)
    };
    let write = |log: &mut Log, record| log.append(&record, time(0), PROFILE).unwrap();
    write(&mut log, check("one", "blue", RecordKind::Check));
    write(&mut log, part("one", "224J", None));
    let open_terminals = write(&mut log, check("two", "open terminals", RecordKind::Zero));
    let wrong = write(&mut log, check("two", "grey", RecordKind::Check));
    log.void(wrong, time(1)).unwrap();
    let again = check("two", "open terminals", RecordKind::Zero);
    write(&mut log, replacing(open_terminals, again));
    let found: Vec<String> = log
        .checks()
        .unwrap()
        .iter()
        .map(|entry| {
            let stands = if entry.voided.is_none() {
                ""
            } else {
                " voided"
            };
            format!("{} {}{stands}", entry.id, entry.record.raw.marking)
        })
        .collect();
    assert_eq!(
        found,
        [
            "1 blue",
            "3 open terminals voided",
            "4 grey voided",
            "6 open terminals"
        ]
    );
    let all = log.entries(None, Which::All).unwrap();
    let checks: Vec<Entry> = all
        .into_iter()
        .filter(|entry| entry.record.kind != RecordKind::Part)
        .collect();
    assert_eq!(log.checks().unwrap(), checks);
}
