//! The header of a file of readings: which column is what, whatever their order.

use csv::ByteRecord;

use super::failure::Failure;
use super::harmless::{line, unarmed};
use super::sheet::OUTPUTS;

/// A column that `judge` reads.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Column {
    /// What is printed on the part.
    Marking,
    /// Group or member.
    Family,
    /// The label of the switch.
    Switch,
    /// One reading or repeats.
    Dial,
    /// One dark edge.
    DarkFrom,
    /// The other dark edge.
    DarkTo,
    /// never, always, dark or lit.
    Lamp,
    /// In degrees Celsius.
    Temperature,
    /// Hours since the part was last heated.
    HeatedHours,
    /// Insulation resistance.
    Leakage,
    /// The voltage it was measured at.
    LeakageVoltage,
    /// What the part looks like.
    Looks,
    /// Free text.
    Note,
}

/// The columns with their names, in the order of the contract.
pub(super) const INPUTS: [(&str, Column); 13] = [
    ("marking", Column::Marking),
    ("family", Column::Family),
    ("switch", Column::Switch),
    ("dial", Column::Dial),
    ("dark_from", Column::DarkFrom),
    ("dark_to", Column::DarkTo),
    ("lamp", Column::Lamp),
    ("temperature", Column::Temperature),
    ("heated_hours", Column::HeatedHours),
    ("leakage", Column::Leakage),
    ("leakage_voltage", Column::LeakageVoltage),
    ("looks", Column::Looks),
    ("note", Column::Note),
];

impl Column {
    /// Returns whether the cells are numbers where they can be.
    pub(super) fn holds_numbers(self) -> bool {
        matches!(
            self,
            Self::Dial | Self::DarkFrom | Self::DarkTo | Self::Temperature | Self::HeatedHours
        )
    }
}

/// A column that is copied to the output.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct Copied {
    /// Where it stands in the file.
    pub(super) position: usize,
    /// Its name.
    pub(super) name: String,
    /// What it is, if `judge` knows it.
    pub(super) column: Option<Column>,
}

/// The header of a file of readings.
#[derive(Clone, Debug)]
pub(super) struct Columns {
    positions: [Option<usize>; INPUTS.len()],
    /// The columns that are copied, in the order of the file.
    pub(super) copied: Vec<Copied>,
    /// How many cells the header has.
    pub(super) n_cells: usize,
    /// What should be said of the header though it can be used.
    pub(super) warnings: Vec<String>,
}

impl Columns {
    /// Reads the header.
    pub(super) fn read(header: &ByteRecord) -> Result<Self, Failure> {
        let names: Vec<String> = header
            .iter()
            .map(|cell| unarmed(String::from_utf8_lossy(cell).trim()).to_owned())
            .collect();
        let mut columns = Self {
            positions: [None; INPUTS.len()],
            copied: Vec::new(),
            n_cells: names.len(),
            warnings: Vec::new(),
        };
        for (position, name) in names.iter().enumerate() {
            if OUTPUTS.contains(&name.as_str()) {
                continue;
            }
            let known = INPUTS
                .iter()
                .find(|(known, _)| known == name)
                .map(|row| row.1);
            match known {
                Some(column) => columns.take(column, position, name)?,
                None => columns.suspect(name),
            }
            columns.copied.push(Copied {
                position,
                name: name.clone(),
                column: known,
            });
        }
        columns.complete(&names)?;
        Ok(columns)
    }

    /// Returns the cell of a column, blanks around it left out; empty where the file has none.
    pub(super) fn cell<'r>(&self, record: &'r ByteRecord, column: Column) -> &'r [u8] {
        self.positions
            .get(column as usize)
            .copied()
            .flatten()
            .and_then(|position| record.get(position))
            .unwrap_or_default()
            .trim_ascii()
    }

    fn has(&self, column: Column) -> bool {
        self.positions
            .get(column as usize)
            .copied()
            .flatten()
            .is_some()
    }

    fn take(&mut self, column: Column, position: usize, name: &str) -> Result<(), Failure> {
        let Some(place) = self.positions.get_mut(column as usize) else {
            return Err(Failure::defect(format!("column `{name}` has no place")));
        };
        if let Some(earlier) = place.replace(position) {
            return Err(Failure::input(format!(
                "the header names `{name}` twice, as columns {} and {}",
                earlier + 1,
                position + 1
            )));
        }
        Ok(())
    }

    /// A name that is nearly one of ours is copied, but not in silence.
    fn suspect(&mut self, name: &str) {
        const NEAR: f64 = 0.9;
        let plain = name.to_lowercase().replace([' ', '-'], "_");
        let near = INPUTS
            .iter()
            .map(|(known, _)| (strsim::jaro_winkler(&plain, known), known))
            .filter(|(likeness, _)| *likeness >= NEAR)
            .max_by(|a, b| a.0.total_cmp(&b.0));
        if let Some((_, known)) = near {
            self.warnings.push(format!(
                "column `{}` is not known and only copied; did you mean `{known}`?",
                line(name)
            ));
        }
    }

    fn complete(&self, names: &[String]) -> Result<(), Failure> {
        let reading = [Column::Dial, Column::DarkFrom, Column::DarkTo, Column::Lamp];
        let mut missing = Vec::new();
        if !self.has(Column::Marking) {
            missing.push("`marking`");
        }
        if !self.has(Column::Switch) {
            missing.push("`switch`");
        }
        if !reading.into_iter().any(|column| self.has(column)) {
            missing.push("a reading (`dial`, `dark_from` and `dark_to`, or `lamp`)");
        }
        if missing.is_empty() {
            return Ok(());
        }
        let shown = line(&names.join(",")).into_owned();
        let failure = Failure::input(format!(
            "the header lacks {}; it reads: {shown}",
            missing.join(", ")
        ));
        let known: Vec<&str> = INPUTS.iter().map(|row| row.0).collect();
        Err(match separator(names) {
            Some(separator) => failure.hint(format!(
                "the cells seem to be separated by {separator}: save the file with commas"
            )),
            None => failure.hint(format!(
                "the first line names the columns: {}",
                known.join(",")
            )),
        })
    }
}

/// Returns what separates the cells if it is not the comma.
fn separator(names: &[String]) -> Option<&'static str> {
    let has = |mark: char| names.iter().any(|name| name.contains(mark));
    if has(';') {
        Some("`;`")
    } else if has('\t') {
        Some("tabs")
    } else {
        None
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(header: &str, expected: &str) {
        let record = ByteRecord::from(header.split(',').collect::<Vec<_>>());
        let said = match Columns::read(&record) {
            Ok(columns) => {
                let copied: Vec<&str> = columns.copied.iter().map(|c| c.name.as_str()).collect();
                format!("{} {}", copied.join(","), columns.warnings.join("; "))
            }
            Err(failure) => failure.to_string(),
        };
        assert_eq!(said.trim_end(), expected, "reading {header:?}");
    }

    #[test]
    fn columns_come_in_any_order_and_outputs_are_left_out() {
        check(
            "switch,shelf,finding,dial,marking",
            "switch,shelf,dial,marking",
        );
    }

    #[test]
    fn a_near_name_is_not_passed_over() {
        check(
            "marking,switch,dial,dark_form",
            "marking,switch,dial,dark_form column `dark_form` is not known and only copied; did you mean `dark_from`?",
        );
    }

    #[test]
    fn headers_that_cannot_be_used() {
        check(
            "marking;switch;dial",
            "the header lacks `marking`, `switch`, a reading (`dial`, `dark_from` and `dark_to`, or `lamp`); it reads: marking;switch;dial\n  the cells seem to be separated by `;`: save the file with commas",
        );
        check(
            "marking,switch,dial,marking",
            "the header names `marking` twice, as columns 1 and 4",
        );
    }

    #[test]
    fn columns_stand_in_the_order_of_their_numbers() {
        for (n, (_, column)) in INPUTS.iter().enumerate() {
            assert_eq!(*column as usize, n);
        }
    }
}
