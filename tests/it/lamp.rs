//! What a lamp that misbehaves means, and where a parked one is of use.

use nulltray::finding::{
    Cause, Circumstances, HouseRules, Hypothesis, Next, Observation, Word, best_parking, expect,
    judge, lamp_says, park, parking_at,
};
use nulltray::marking::decode;
use nulltray::meter::{DialReading, Edge, Lamp, Meter, Repeats, Seen, Stop, Switch, measure, null};

use crate::balance::meter;
use crate::truth::{Components, part};

/// What the lamp says of a part of this marking; `None`: of no marking.
fn says(meter: &Meter, switch: &str, seen: Seen, marking: &str) -> Vec<Hypothesis> {
    let switch = meter.switch_named(switch).expect("a switch");
    let decoding = decode(marking, None);
    let promised = decoding
        .best()
        .map(|reading| expect(reading, &HouseRules::default()));
    let measured = measure(
        meter,
        switch,
        seen,
        &promised.unwrap_or_else(|| part(0.0, 0.0, 0.005)),
    );
    let observation = Observation {
        meter,
        switch,
        seen,
        measured: &measured,
    };
    lamp_says(&observation, promised.as_ref())
}

fn never(place: f64) -> Seen {
    Seen::NeverDark {
        dimmest: Some(DialReading::new(place)),
    }
}

#[track_caller]
fn check(found: &[Hypothesis], cause: &Cause, next: &Next) {
    let first = found.first().expect("a hypothesis");
    assert_eq!((&first.cause, &first.next), (cause, next), "{found:?}");
}

#[test]
fn dimmest_at_the_high_stop_is_too_much_or_a_short() {
    let plain = meter("meter-plain.toml");
    let found = says(&plain, "2", never(100.0), "105");
    check(&found, &Cause::AboveSpan, &Next::TakeSwitch("1".to_owned()));
    assert!(found.iter().any(|h| h.cause == Cause::Short));
    // The marking promises a null well inside: then a short comes first.
    check(
        &says(&plain, "2", never(100.0), "473"),
        &Cause::Short,
        &Next::Ohmmeter,
    );
    check(
        &says(&plain, "1", never(100.0), "106"),
        &Cause::AboveSpan,
        &Next::Ohmmeter,
    );
}

/// With 20 Ω of end resistance an open part leaves 63 mV at the low stop, more than the lamp's 50 mV.
#[test]
fn dimmest_at_the_low_stop_is_too_little_or_open() {
    let plain = meter("meter-plain.toml");
    let open = null(
        &plain,
        plain.switch_named("2").expect("2"),
        &part(0.0, 0.0, 0.0),
    );
    assert!(
        open.arc.is_none() && (open.residual.get() - 0.063).abs() < 0.001,
        "{open:?}"
    );
    assert_eq!(open.beyond, Some(Stop::Low));
    check(
        &says(&plain, "2", never(0.0), "473"),
        &Cause::Open,
        &Next::TakeSwitch("3".to_owned()),
    );
    check(
        &says(&plain, "2", never(0.0), "100"),
        &Cause::BelowSpan,
        &Next::TakeSwitch("4".to_owned()),
    );
    // Where an open part is dark at the stop, a lamp that is lit there says otherwise.
    let mut components = Components::linear();
    components.threshold = 0.12;
    let found = says(&components.meter(), "B", never(0.0), "473");
    assert!(
        matches!(found[0].cause, Cause::TooLossy { .. }),
        "{found:?}"
    );
}

#[test]
fn dimmest_inside_is_loss_or_load() {
    let plain = meter("meter-plain.toml");
    let found = says(&plain, "2", never(47.0), "473");
    assert!(
        matches!(found[0].cause, Cause::TooLossy { at_least: Some(loss) } if loss > 0.01),
        "{found:?}"
    );
    assert_eq!(found[1].cause, Cause::Distortion);
    let mut components = Components::linear();
    components.drive = "drive = \"divider\"\nresistance = \"100 kΩ\"".to_owned();
    components.threshold = 0.008;
    let found = says(&components.meter(), "B", never(17.0), "223");
    assert!(
        matches!(found[0].cause, Cause::LoadResidual { residual } if residual.get() > 0.008),
        "{found:?}"
    );
}

#[test]
fn dark_everywhere_is_the_meter() {
    let plain = meter("meter-plain.toml");
    check(
        &says(&plain, "2", Seen::AlwaysDark, "473"),
        &Cause::Meter,
        &Next::OpenTerminals,
    );
    let stops = Seen::Edges {
        from: Edge::Stop,
        to: Edge::Stop,
    };
    check(
        &says(&plain, "2", stops, "473"),
        &Cause::Meter,
        &Next::OpenTerminals,
    );
    // Unless its lamp is so dull that open terminals are dark all the way.
    let mut components = Components::linear();
    components.threshold = 3.69;
    let found = says(&components.meter(), "A", Seen::AlwaysDark, "473");
    assert_eq!(found[0].cause, Cause::DullLamp, "{found:?}");
}

#[test]
fn dark_only_at_the_low_stop_is_compared_with_open_terminals() {
    let mut components = Components::linear();
    components.threshold = 0.12;
    let actual = components.meter();
    let switch = actual.switch_named("B").expect("B");
    let open = null(&actual, switch, &part(0.0, 0.0, 0.0))
        .arc
        .expect("dark from the stop");
    let edge = |place| Edge::At(Repeats::once(place));
    let found = says(
        &actual,
        "B",
        Seen::Edges {
            from: edge(open.from),
            to: edge(open.to),
        },
        "473",
    );
    assert_eq!(found[0].cause, Cause::Open, "{found:?}");
    // A sound part says nothing of the kind.
    let arc = null(&actual, switch, &part(47e-9, 0.0, 0.0))
        .arc
        .expect("an arc");
    assert_eq!(
        says(
            &actual,
            "B",
            Seen::Edges {
                from: edge(arc.from),
                to: edge(arc.to)
            },
            "473"
        ),
        []
    );
}

#[test]
fn nobody_looked_where_it_was_dimmest() {
    let plain = meter("meter-plain.toml");
    let seen = Seen::NeverDark { dimmest: None };
    let found = says(&plain, "2", seen, "473");
    assert!(
        matches!(found[0].cause, Cause::TooLossy { .. }) && found[0].next == Next::FindDimmest,
        "{found:?}"
    );
    check(
        &says(&plain, "2", seen, "105"),
        &Cause::AboveSpan,
        &Next::TakeSwitch("1".to_owned()),
    );
}

fn judged(meter: &Meter, switch: Switch, seen: Seen, marking: &str) -> (Word, String) {
    let decoding = decode(marking, None);
    let rules = HouseRules::default();
    let promised = expect(decoding.best().expect("a reading"), &rules);
    let measured = measure(meter, switch, seen, &promised);
    let observation = Observation {
        meter,
        switch,
        seen,
        measured: &measured,
    };
    let verdict = judge(
        &decoding,
        None,
        &observation,
        &Circumstances::default(),
        &rules,
    );
    (verdict.word, verdict.remarks.join("; "))
}

#[test]
fn the_remark_tells_cause_and_next_step() {
    let plain = meter("meter-plain.toml");
    let switch = plain.switch_named("2").expect("2");
    let (word, remark) = judged(&plain, switch, Seen::AlwaysDark, "473");
    assert_eq!(word, Word::Undecided);
    assert!(remark.contains("dark everywhere: lamp, oscillator or wiring: check that the lamp lights with open terminals"), "{remark}");
    let (_, remark) = judged(&plain, switch, never(100.0), "105");
    assert!(
        remark.contains("more than this switch reaches, or a short; next: take switch 1"),
        "{remark}"
    );
}

fn example() -> Meter {
    Meter::read(include_str!("../../data/example-meter.toml"))
        .expect("the example")
        .0
}

/// What parking promises is what judging then says.
#[test]
fn the_best_parking_place_settles_good_parts() {
    let meter = example();
    let rules = HouseRules::default();
    let cases = [
        (
            "223J",
            (
                "between 19.5 nF and 24.6 nF",
                "a lit lamp proves nothing here",
            ),
        ),
        (
            "104K",
            (
                "between 85.6 nF and 115 nF",
                "a lit lamp proves nothing here",
            ),
        ),
        (
            "472J",
            (
                "between 4.52 nF and 4.9 nF",
                "not between 4.64 nF and 4.77 nF",
            ),
        ),
    ];
    for (marking, intervals) in cases {
        let decoding = decode(marking, None);
        let reading = decoding.best().expect("a reading");
        let best = best_parking(&meter, reading, &rules).expect("a place");
        assert_eq!(best.dark.word, Word::Inside, "{marking}: {best:?}");
        assert!(
            0.1 < best.settled.get() && best.settled.get() < 1.0,
            "{marking}: {best:?}"
        );
        assert_eq!(best.lit.word, Word::Undecided);
        let proven = (&best.dark.interval, &best.lit.interval);
        assert_eq!(
            (proven.0.as_str(), proven.1.as_str()),
            intervals,
            "{marking}"
        );
        for (lamp, word) in [(Lamp::Dark, best.dark.word), (Lamp::Lit, best.lit.word)] {
            let seen = Seen::Parked {
                at: best.window.at,
                lamp,
            };
            assert_eq!(
                judged(&meter, best.switch, seen, marking).0,
                word,
                "{marking}"
            );
        }
        // No place nearby is better.
        for by in [-1.0, -0.5, 0.5, 1.0] {
            let at = DialReading::new(best.window.at.get() + by);
            let other = parking_at(&meter, best.switch, at, reading, &rules).expect("a window");
            assert!(other.settled <= best.settled, "{marking}: {at}");
        }
    }
}

#[test]
fn parts_that_null_nowhere_have_no_parking_place() {
    let meter = example();
    let rules = HouseRules::default();
    let decoding = decode("100J", None);
    let reading = decoding.best().expect("10 pF");
    let first = meter.switches().next().expect("a switch");
    assert_eq!(park(&meter, first, reading, &rules), None);
    assert_eq!(best_parking(&meter, reading, &rules), None);
}
