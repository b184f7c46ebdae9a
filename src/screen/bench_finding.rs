//! The finding, and where the part goes.

use super::block_letters;
use super::sheet::Sheet;
use super::strip;
use super::theme::{Role, sign};
use crate::app::{RecordKind, Shown, State, deviation, probability, went_to};

/// Returns what the finding is about.
pub(super) fn caption(state: &State) -> String {
    match &state.bench.shown {
        None => "finding".to_owned(),
        Some(shown) => {
            let marking: String = shown.record.raw.marking.chars().take(16).collect();
            match (shown.number, shown.record.kind) {
                (Some(number), RecordKind::Part) => format!("finding: part {number}, {marking}"),
                (_, RecordKind::Check) => format!("check part: {marking}"),
                _ => format!("finding: {marking}"),
            }
        }
    }
}

/// Draws the finding.
pub(super) fn draw(state: &State, sheet: &mut Sheet<'_>) {
    let Some(shown) = &state.bench.shown else {
        sheet.text(0, 0, "nothing measured yet in this lot", Role::Faint);
        return;
    };
    draw_headline(state, shown, sheet, 0);
    let outcome = &shown.record.outcome;
    sheet.text(0, 1, &how_sure(shown), Role::Plain);
    strip::draw(sheet, 2, outcome, state.look.units);
    let left = sheet.height().saturating_sub(3);
    sheet.paragraph(0, 3, left, &outcome.remark, Role::Plain);
}

/// Draws word, value with its doubt, and deviation on one row.
pub(super) fn draw_headline(state: &State, shown: &Shown, sheet: &mut Sheet<'_>, y: u16) {
    let outcome = &shown.record.outcome;
    let word = format!(
        "{} {}",
        sign(&outcome.finding, state.look.glyphs),
        outcome.finding.to_uppercase()
    );
    let mut x = sheet.chip(0, y, &word, Role::of_finding(&outcome.finding)) + 1;
    if let Some(value) = state.look.units.measured_with_doubt(outcome) {
        x = sheet.text(x, y, &value, Role::Strong) + 2;
    } else {
        x = sheet.text(x, y, "no value", Role::Faint) + 1;
    }
    if let Some(deviation) = deviation(outcome) {
        sheet.text(x, y, &deviation, Role::Plain);
    }
}

/// Returns how sure the finding is, and what the ± means.
pub(super) fn how_sure(shown: &Shown) -> String {
    let outcome = &shown.record.outcome;
    let mut words = Vec::new();
    words.extend(
        outcome
            .probability_inside
            .map(|share| format!("inside: {}", probability(share))),
    );
    words.extend(outcome.uncertainty_pf.map(|_| "±: k = 2".to_owned()));
    words.extend(outcome.loss.map(|loss| format!("loss {loss:.2}")));
    words.join("   ")
}

/// Draws the compartment in block letters, and what it is for.
pub(super) fn draw_place(state: &State, sheet: &mut Sheet<'_>) {
    let Some(shown) = &state.bench.shown else {
        return;
    };
    if shown.record.kind != RecordKind::Part {
        sheet.text(0, 0, "back beside the meter", Role::Plain);
        return;
    }
    let outcome = &shown.record.outcome;
    let Some(place) = went_to(outcome) else {
        if outcome.compartment.is_none() {
            sheet.text(0, 0, "no tray file: nothing says where", Role::Faint);
            return;
        }
        sheet.chip(0, 0, "NO PLACE", Role::Caution);
        let why = shown
            .unplaced
            .as_deref()
            .unwrap_or("no compartment takes it");
        let height = sheet.height().saturating_sub(2);
        sheet.paragraph(0, 2, height, why, Role::Plain);
        return;
    };
    let (width, _) = block_letters::draw(sheet, 0, 0, place, Role::Compartment);
    let x = if width == 0 { 0 } else { width + 2 };
    if width == 0 {
        sheet.text(0, 0, place, Role::Compartment);
    }
    let label = label(state, place).unwrap_or_default();
    let count = state.lot.in_compartment(place);
    let (width, height) = (sheet.width().saturating_sub(x), sheet.height());
    let mut beside = sheet.part(x, u16::from(x == 0), width, height);
    let rows = beside.paragraph(0, 0, height.saturating_sub(1), label, Role::Plain);
    beside.text(0, rows, &format!("{count} in it"), Role::Faint);
}

/// Returns what is written on a compartment.
pub(super) fn label<'a>(state: &'a State, place: &str) -> Option<&'a str> {
    let tray = state.setup.tray.as_ref()?;
    let found = tray
        .compartments
        .iter()
        .find(|compartment| compartment.at.to_string() == place);
    found.map(|compartment| compartment.label.as_str())
}
