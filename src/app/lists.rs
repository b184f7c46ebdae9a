//! The screens that are a list with a find prompt: what their rows say, which of them match, which one is selected.

use tui_input::Input;

use super::check_rows::Chart;
use super::search;

/// A list with its find prompt.
#[derive(Clone, Debug, Default)]
pub struct ListView {
    /// What is looked for.
    pub find: Input,
    /// All rows.
    pub rows: Vec<Row>,
    /// So many of them, the first ones, answer what is looked for: they come first whatever they say.
    pub n_answers: usize,
    /// The indices of the rows that match, in the order shown.
    pub order: Vec<usize>,
    /// Which of those shown is selected.
    pub selected: usize,
    /// Which of those shown stands at the top.
    pub top: usize,
    /// The column they are sorted by; `None`: as they come.
    pub sorted_by: Option<usize>,
    /// What the columns are called.
    pub columns: Vec<&'static str>,
    /// Charts that rows speak of.
    pub charts: Vec<Chart>,
}

/// A row of a list.
#[derive(Clone, Debug, PartialEq)]
pub struct Row {
    /// What stands in each column.
    pub cells: Vec<String>,
    /// More about it, shown when it is selected.
    pub details: Vec<String>,
    /// The finding it speaks of, for its sign.
    pub finding: Option<String>,
    /// What it is sorted by in each column, where that is a number.
    pub keys: Vec<Option<f64>>,
    /// Which of the charts it speaks of.
    pub chart: Option<usize>,
}

impl Row {
    /// Makes a row of cells alone.
    pub fn of(cells: Vec<String>) -> Self {
        Self {
            cells,
            details: Vec::new(),
            finding: None,
            keys: Vec::new(),
            chart: None,
        }
    }

    fn text(&self) -> String {
        let mut text = self.cells.join(" ");
        for line in &self.details {
            text.push(' ');
            text.push_str(line);
        }
        text
    }
}

impl ListView {
    /// Makes a list, nothing looked for, the first row selected.
    pub fn new(columns: Vec<&'static str>, rows: Vec<Row>) -> Self {
        let order = (0..rows.len()).collect();
        Self {
            rows,
            order,
            columns,
            ..Self::default()
        }
    }

    /// Returns the selected row.
    pub fn selected_row(&self) -> Option<&Row> {
        self.rows.get(*self.order.get(self.selected)?)
    }

    /// Returns the chart of the selected row, else the first one.
    pub fn chart(&self) -> Option<&Chart> {
        let chosen = self.selected_row().and_then(|row| row.chart);
        self.charts.get(chosen.unwrap_or(0))
    }

    /// Finds and sorts anew.
    pub(super) fn refresh(&mut self, height: usize) {
        let texts: Vec<String> = self.rows.iter().map(Row::text).collect();
        let (_, searched) = texts.split_at(self.n_answers.min(texts.len()));
        let found = search::find(searched, self.find.value());
        let found = found.into_iter().map(|index| index + self.n_answers);
        self.order = (0..self.n_answers).chain(found).collect();
        if let Some(column) = self.sorted_by {
            let rows = &self.rows;
            self.order.sort_by(|a, b| {
                let (a, b) = (rows.get(*a), rows.get(*b));
                let key =
                    |row: Option<&Row>| row.and_then(|r| r.keys.get(column).copied().flatten());
                let cell = |row: Option<&Row>| row.and_then(|r| r.cells.get(column).cloned());
                match (key(a), key(b)) {
                    (Some(a), Some(b)) => a.total_cmp(&b),
                    _ => cell(a).cmp(&cell(b)),
                }
            });
        }
        self.move_to(0, height);
    }

    /// Puts these answers to what is looked for in the place of the last ones.
    pub(super) fn answer(&mut self, answers: Vec<Row>) {
        let n_answers = answers.len();
        self.rows.splice(..self.n_answers, answers);
        self.n_answers = n_answers;
    }

    /// Sorts by the next column, after the last one as they come.
    pub(super) fn sort_next(&mut self, height: usize) {
        let next = self.sorted_by.map_or(0, |column| column + 1);
        self.sorted_by = (next < self.columns.len()).then_some(next);
        self.refresh(height);
    }

    /// Moves the selection by so many rows.
    pub(super) fn move_by(&mut self, rows: isize, height: usize) {
        self.move_to(self.selected.saturating_add_signed(rows), height);
    }

    /// Selects a row and keeps it in view.
    pub(super) fn move_to(&mut self, row: usize, height: usize) {
        let height = height.max(1);
        self.selected = row.min(self.order.len().saturating_sub(1));
        let least = (self.selected + 1).saturating_sub(height);
        let most = self.order.len().saturating_sub(height);
        self.top = self.top.clamp(least, self.selected).min(most.max(least));
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn list() -> ListView {
        let rows = ["b 2", "a 10", "c 1"].into_iter().map(|text| {
            let cells: Vec<String> = text.split(' ').map(str::to_owned).collect();
            let key = cells.get(1).and_then(|cell| cell.parse().ok());
            Row {
                keys: vec![None, key],
                ..Row::of(cells)
            }
        });
        ListView::new(vec!["letter", "number"], rows.collect())
    }

    #[test]
    fn numbers_sort_as_numbers_and_then_it_is_as_it_came() {
        let mut list = list();
        let mut orders = Vec::new();
        for _ in 0..3 {
            list.sort_next(10);
            orders.push(list.order.clone());
        }
        assert_eq!(orders, [vec![1, 0, 2], vec![2, 0, 1], vec![0, 1, 2]]);
    }

    #[test]
    fn the_selection_stays_in_view() {
        let mut list = list();
        list.move_by(5, 2);
        assert_eq!((list.selected, list.top), (2, 1));
        list.move_by(-9, 2);
        assert_eq!((list.selected, list.top), (0, 0));
        list.move_by(1, 0);
        assert_eq!((list.selected, list.top), (1, 1));
    }
}
