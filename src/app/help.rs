//! What Help says: the keys of a screen, what can be typed, the cautions.

use super::Page;
use super::cautions::GENERAL;
use super::lists::{ListView, Row};

/// Rows of Help: the keys of a screen, what can be typed on the bench, the cautions.
pub(super) fn rows_of(page: Page) -> ListView {
    let mut rows: Vec<Row> = Vec::new();
    let head = |text: &str| Row::of(vec![String::new(), text.to_owned()]);
    rows.push(head(&format!("KEYS OF THE SCREEN: {}", page.name())));
    rows.extend(
        page.bindings()
            .map(|binding| Row::of(vec![binding.key.to_string(), binding.words.to_owned()])),
    );
    rows.push(head("WHAT CAN BE TYPED AT THE PROMPTS"));
    rows.extend(
        ENTRIES
            .iter()
            .map(|(typed, means)| Row::of(vec![(*typed).to_owned(), (*means).to_owned()])),
    );
    rows.push(head("CAUTIONS"));
    rows.extend(
        GENERAL
            .iter()
            .map(|caution| Row::of(vec!["!".to_owned(), (*caution).to_owned()])),
    );
    ListView::new(vec!["", ""], rows)
}

/// What can be typed, in the order of use.
const ENTRIES: [(&str, &str); 18] = [
    (
        "224J 2A",
        "a marking; ? stands for a character that cannot be read",
    ),
    ("21.8  21,8", "one reading: the middle of the dark arc"),
    ("21.8/21.6", "repeats of one reading"),
    (
        "21.4-22.2",
        "both dark edges, a blank between will do; stop where the arc is cut",
    ),
    ("n  *  *46", "never dark; never dark, dimmest at 46"),
    ("a  **", "dark everywhere"),
    (
        "d  +",
        "lamp dark with the dial parked where the screen says",
    ),
    ("l  -", "lamp lit there"),
    ("undo  //", "take back the last entry; redo brings it back"),
    ("/2", "the second switch"),
    ("+3", "the third reading of the marking"),
    (
        "leak 12 MΩ at 63 V",
        "insulation of the last part, as you measured it",
    ),
    ("looks cracked", "what the last part looks like"),
    (
        "heated 2 h",
        "when the last part was heated; temperature 19 in the same way",
    ),
    (
        "note …",
        "free text for the last part; hold … for what it waits for",
    ),
    ("check LABEL", "measure a known part instead"),
    ("zero", "measure the open terminals instead"),
    (
        "new meter",
        "describe your own meter by question and answer",
    ),
];

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn help_lists_every_key_of_the_screen() {
        for page in Page::ALL.into_iter().chain([Page::NewMeter]) {
            let rows = rows_of(page).rows;
            for binding in page.bindings() {
                let key = binding.key.to_string();
                assert!(rows.iter().any(|row| row.cells.first() == Some(&key)));
            }
        }
    }
}
