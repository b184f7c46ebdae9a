//! Undo, redo and replacing.

use nulltray::app::RecordId;
use nulltray::log::Which;
use proptest::prelude::*;

use super::{Folder, LOT, PROFILE, append, marking, open, part, replacing, says, stands, time};
use std::fs;

#[test]
fn undo_takes_back_and_redo_brings_back() {
    let folder = Folder::new();
    let mut log = open(&folder.log());
    append(&mut log, LOT, &["a", "b", "c"]);
    append(&mut log, "other", &["x"]);
    assert_eq!(
        marking(log.void_last(LOT, time(1)).unwrap()).as_deref(),
        Some("c")
    );
    assert_eq!(stands(&log, LOT), "a b");
    let voided = log.entries(Some(LOT), Which::All).unwrap().pop().unwrap();
    assert_eq!(
        (voided.record.raw.marking.as_str(), voided.voided),
        ("c", Some(time(1)))
    );
    assert_eq!(
        marking(log.void_last(LOT, time(2)).unwrap()).as_deref(),
        Some("b")
    );
    assert_eq!(stands(&log, LOT), "a");
    append(&mut log, "other", &["y"]);
    assert_eq!(
        marking(log.redo(LOT, time(3)).unwrap()).as_deref(),
        Some("b")
    );
    assert_eq!(stands(&log, LOT), "a b");
    assert_eq!(
        marking(log.redo(LOT, time(4)).unwrap()).as_deref(),
        Some("c")
    );
    assert_eq!(stands(&log, LOT), "a b c");
    assert_eq!(marking(log.redo(LOT, time(5)).unwrap()), None);
    assert_eq!(
        marking(log.void_last(LOT, time(6)).unwrap()).as_deref(),
        Some("c")
    );
    append(&mut log, LOT, &["d"]);
    assert_eq!(
        marking(log.redo(LOT, time(7)).unwrap()),
        None,
        "a new entry ends what can be brought back"
    );
    for expected in [Some("d"), Some("b"), Some("a"), None] {
        assert_eq!(
            marking(log.void_last(LOT, time(8)).unwrap()).as_deref(),
            expected
        );
    }
    assert_eq!(stands(&log, LOT), "");
    assert_eq!(stands(&log, "other"), "x y");
}

#[test]
fn undoing_a_replacement_brings_the_older_entry_back() {
    let folder = Folder::new();
    let mut log = open(&folder.log());
    let ids = append(&mut log, LOT, &["a", "b"]);
    let first = log
        .append(
            &replacing(ids[0], part(LOT, "a1", Some("B2"))),
            time(1),
            PROFILE,
        )
        .unwrap();
    assert_eq!(stands(&log, LOT), "b a1");
    log.append(&replacing(first, part(LOT, "a2", None)), time(2), PROFILE)
        .unwrap();
    assert_eq!(
        stands(&log, LOT),
        "b a2",
        "the replaced replacement does not let the first one back"
    );
    assert_eq!(
        log.counts()
            .unwrap()
            .by_compartment()
            .into_iter()
            .collect::<Vec<_>>(),
        [(None, 1), (Some("A1"), 1)]
    );
    says(
        log.append(&replacing(first, part(LOT, "a3", None)), time(2), PROFILE),
        "already taken back or replaced",
    );
    for (expected, standing) in [("a2", "b a1"), ("a1", "a b"), ("b", "a")] {
        assert_eq!(
            marking(log.void_last(LOT, time(3)).unwrap()).as_deref(),
            Some(expected)
        );
        assert_eq!(stands(&log, LOT), standing);
    }
    for (expected, standing) in [("b", "a b"), ("a1", "b a1"), ("a2", "b a2")] {
        assert_eq!(
            marking(log.redo(LOT, time(4)).unwrap()).as_deref(),
            Some(expected)
        );
        assert_eq!(stands(&log, LOT), standing);
    }
}

#[test]
fn any_entry_that_stands_can_be_taken_back_once() {
    let folder = Folder::new();
    let mut log = open(&folder.log());
    let ids = append(&mut log, LOT, &["a", "b", "c"]);
    assert_eq!(
        marking(log.void(ids[0], time(1)).unwrap()).as_deref(),
        Some("a")
    );
    let before = fs::read(folder.log()).unwrap();
    says(
        log.void(ids[0], time(2)),
        "entry 1 was already taken back or replaced at 2026-05-03T08:01:00+02:00",
    );
    says(log.void(RecordId(4), time(2)), "there is no entry 4");
    says(log.void(RecordId(99), time(2)), "there is no entry 99");
    says(
        log.append(
            &replacing(RecordId(99), part(LOT, "z", None)),
            time(2),
            PROFILE,
        ),
        "there is no entry 99",
    );
    says(
        log.append(
            &replacing(ids[1], part("other", "z", None)),
            time(2),
            PROFILE,
        ),
        "is of the lot",
    );
    assert_eq!(
        fs::read(folder.log()).unwrap(),
        before,
        "a refusal writes nothing"
    );
    assert_eq!(stands(&log, LOT), "b c");
    assert_eq!(
        marking(log.redo(LOT, time(3)).unwrap()).as_deref(),
        Some("a")
    );
    assert_eq!(stands(&log, LOT), "a b c");
}

#[derive(Clone, Debug)]
enum Step {
    Append,
    Replace(usize),
    Undo,
    Redo,
    Void(usize),
}

fn any_step() -> impl Strategy<Value = (bool, Step)> {
    let step = prop_oneof![
        3 => Just(Step::Append),
        2 => any::<usize>().prop_map(Step::Replace),
        3 => Just(Step::Undo),
        3 => Just(Step::Redo),
        1 => any::<usize>().prop_map(Step::Void),
    ];
    (any::<bool>(), step)
}

/// The same as the log, as an editor would do it: each lot a set of entries, and a stack of the sets before each undo.
#[derive(Default)]
struct Model {
    live: Vec<RecordId>,
    replaces: std::collections::HashMap<RecordId, RecordId>,
    undone: Vec<Vec<RecordId>>,
}

impl Model {
    fn void(&mut self, id: RecordId) {
        self.undone.push(self.live.clone());
        self.live.retain(|live| *live != id);
        self.live.extend(self.replaces.get(&id));
        self.live.sort();
    }
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 12, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn undo_and_redo_agree_with_a_stack(steps in proptest::collection::vec(any_step(), 1..25)) {
        let folder = Folder::new();
        let mut log = open(&folder.log());
        let mut models = [Model::default(), Model::default()];
        for (second, step) in steps {
            let lot = if second { "second" } else { "first" };
            let model = &mut models[usize::from(second)];
            let chosen = |index: usize| model.live.get(index % model.live.len().max(1)).copied();
            match step {
                Step::Append => {
                    model.live.push(log.append(&part(lot, "p", Some("A1")), time(0), PROFILE).unwrap());
                    model.undone.clear();
                }
                Step::Replace(index) => if let Some(old) = chosen(index) {
                    let id = log.append(&replacing(old, part(lot, "p", Some("B2"))), time(0), PROFILE).unwrap();
                    model.live.retain(|live| *live != old);
                    model.live.push(id);
                    model.replaces.insert(id, old);
                    model.undone.clear();
                },
                Step::Undo => {
                    let taken = log.void_last(lot, time(1)).unwrap().map(|entry| entry.id);
                    prop_assert_eq!(taken, model.live.last().copied());
                    if let Some(id) = taken { model.void(id); }
                }
                Step::Void(index) => if let Some(id) = chosen(index) {
                    log.void(id, time(1)).unwrap();
                    model.void(id);
                },
                Step::Redo => {
                    let back = log.redo(lot, time(2)).unwrap().is_some();
                    prop_assert_eq!(back, !model.undone.is_empty());
                    if let Some(live) = model.undone.pop() { model.live = live; }
                }
            }
            let live: Vec<_> = log.entries(Some(lot), Which::Live).unwrap().iter().map(|entry| entry.id).collect();
            prop_assert_eq!(&live, &model.live);
        }
        prop_assert_eq!(log.verify().unwrap(), []);
    }
}
