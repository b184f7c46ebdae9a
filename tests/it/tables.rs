//! The tables of `data/`: each is loaded, each row has a source, and a wrong row is reported with its line.

use nulltray::tables::{TABLES, check, rows};
use std::path::Path;

/// Files of `data/` that are no tables of facts; their own readers are tested elsewhere.
const OTHERS: [&str; 3] = ["example-meter.toml", "example-tray.toml", "demo-lot.csv"];

fn files() -> Vec<(String, String)> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("data");
    let entries = std::fs::read_dir(&folder).expect("data/ can be listed");
    entries
        .map(|entry| entry.expect("an entry of data/ can be read"))
        .map(|entry| {
            (
                entry.file_name().to_string_lossy().into_owned(),
                entry.path(),
            )
        })
        .filter(|(name, _)| !OTHERS.contains(&name.as_str()))
        .map(|(name, path)| {
            (
                name,
                std::fs::read_to_string(path).expect("a table is text"),
            )
        })
        .collect()
}

#[test]
fn every_file_is_loaded_and_every_row_has_a_source() {
    let mut n_rows = 0;
    for (name, text) in files() {
        let listed = check(&name, &text).unwrap_or_else(|| panic!("data/{name} is not loaded"));
        let listed = listed.unwrap_or_else(|error| panic!("{error}"));
        assert!(!listed.is_empty(), "{name} has no rows");
        for row in &listed {
            assert!(
                !row.source.trim().is_empty(),
                "{name}: {} has no source",
                row.text
            );
            assert!(!row.text.trim().is_empty(), "{name}: a row says nothing");
        }
        n_rows += listed.len();
    }
    assert_eq!(
        n_rows,
        rows().len(),
        "the listing has every row of every file"
    );
}

#[test]
fn names_used_across_tables_exist() {
    let ranking = &TABLES.ranking;
    let notations = TABLES.unit_words().map(|row| &row.notation);
    for notation in notations.chain(TABLES.point_letters().map(|row| &row.notation)) {
        assert!(
            ranking.evidence_named(notation).is_some(),
            "no evidence `{notation}`"
        );
    }
    let letters = TABLES.tolerance_letters().map(|row| &row.share);
    let shares = letters.chain(TABLES.voltage_letters().map(|row| &row.share));
    let on_kinds = shares.flat_map(|share| share.on.keys());
    for kind in on_kinds.chain(TABLES.family_words().flat_map(|row| &row.kinds)) {
        assert!(ranking.kind_named(kind).is_some(), "no kind `{kind}`");
    }
    let families = TABLES.families().map(|row| row.family);
    for family in families {
        let kinds = ranking
            .kinds
            .iter()
            .filter(|kind| kind.families.contains(&family));
        assert_eq!(kinds.count(), 1, "{family} is of one kind");
    }
}

#[track_caller]
fn check_wrong(file: &str, text: &str, expected: &str) {
    let result = check(file, text).expect("a table");
    let error = result.expect_err("the table is wrong");
    assert_eq!(error.to_string(), expected);
}

const HEAD: &str = "format = 1\ntitle = \"t\"\nsource = \"s\"\n";

#[test]
fn a_wrong_row_is_reported_with_its_line() {
    let letters = |rows: &str| format!("{HEAD}{rows}");
    check_wrong(
        "tolerance-letters.toml",
        &letters("[[row]]\nletter = \"J\"\nlimits = \"five\"\n"),
        "tolerance-letters.toml:4:1: found `f` at position 1 while reading the tolerance; accepted here: a number",
    );
    check_wrong(
        "tolerance-letters.toml",
        &letters(
            "[[row]]\nletter = \"J\"\nlimits = \"5 %\"\n[[row]]\nletter = \"J\"\nlimits = \"5 %\"\n",
        ),
        "tolerance-letters.toml:7:1: the row of J 0.0000 stands out of order, or its key is not unique",
    );
    check_wrong(
        "tolerance-letters.toml",
        &letters("[[row]]\nletter = \"J\"\nlimts = \"5 %\"\n"),
        "tolerance-letters.toml:6:1: unknown field `limts`, expected one of `letter`, `limits`, `below_10_pF`, `share`, `share_on`, `disputed`, `source`",
    );
    check_wrong(
        "voltage-codes.toml",
        &letters("[[row]]\nletter = \"A\"\nmantissa = 10.0\ndigits = [0]\n"),
        "voltage-codes.toml:4:1: the mantissa 10 is not 1 to 10",
    );
    check_wrong(
        "families.toml",
        &letters(
            "[[row]]\nfamily = \"pet\"\ntolerance = \"5 %\"\ncapacitance = \"1 nF .. 1 pF\"\nvoltage = \"1 V .. 2 V\"\n",
        ),
        "families.toml:4:1: the range 1 nF .. 1 pF is out of range; accepted here: a low end below the high end",
    );
    check_wrong(
        "multipliers.toml",
        "format = 2\ntitle = \"t\"\nsource = \"s\"\nrow = []\n",
        "multipliers.toml:1:10: format 2 is not known; known here: 1",
    );
    check_wrong(
        "multipliers.toml",
        "format = 1\ntitle = \"t\"\nsource = \" \"\nrow = []\n",
        "multipliers.toml:3:10: the source is empty",
    );
}

#[test]
fn the_listing_has_what_people_look_up() {
    let rows = rows();
    for text in [
        "2E 250 V",
        "Z: -20/+80 %",
        "X2:",
        "mfd: 1 µF",
        "E12:",
        "MKP: pp",
        "8: times 10^8 pF",
    ] {
        let row = rows.iter().find(|row| row.text.contains(text));
        assert!(row.is_some(), "no row says {text}");
    }
}
