//! From pieces to whole readings: a beam over the text, left to right.
//!
//! A path has explained everything left of its cell and carries what it found in slots: one value, one tolerance, up to
//! two voltages of unlike kind, one family, the classes of interference suppression. A piece either fills its slot,
//! repeats what is there, or contradicts it, which is punished and named. What no piece explains is skipped at a cost. At
//! each cell only the [`WIDTH`] best paths go on.

use super::lexicon::Lexicon;
use super::path::{NONE, Path, START};
use super::piece::{Amount, Meaning, Piece, Pieces, Standing, Voltage};
use super::rules_for;
use super::scan::{MOST_CELLS, Scan, Sort};
use crate::tables::{Factors, Family, TABLES};

/// How many paths go on from a cell.
const WIDTH: usize = 16;
/// Paths that are this much less probable than the best of their cell, of those with or without a value, end there.
const HOPELESS: f64 = 2e-4;
/// The same at the end of the text, where nothing can come to their help but a better value.
const LATE: f64 = 1e-3;

#[derive(Clone, Copy)]
struct Step {
    piece: u16,
    before: u32,
}

/// Everything that was tried.
pub(super) struct Beam<'a, 't> {
    /// The text.
    pub(super) scan: &'a Scan<'t>,
    /// The words.
    pub(super) lexicon: &'a Lexicon,
    /// The pieces proposed.
    pub(super) pieces: Pieces,
    /// The paths that reach the end.
    pub(super) finished: Vec<Path>,
    steps: Vec<Step>,
}

/// Explains the whole text in every way that the width allows.
pub(super) fn search<'a, 't>(
    scan: &'a Scan<'t>,
    lexicon: &'a Lexicon,
    given: Option<Family>,
) -> Beam<'a, 't> {
    let mut search = Search {
        scan,
        lexicon,
        factors: &TABLES.ranking.factors,
        paths: Vec::with_capacity(56),
        heads: [START; MOST_CELLS + 1],
        steps: Vec::with_capacity(56),
    };
    let mut pieces = Pieces {
        list: Vec::with_capacity(24),
        sections: Vec::new(),
    };
    search.add(scan.after_blanks(0), Path::first(lexicon, given));
    let mut live: Vec<u32> = Vec::with_capacity(WIDTH);
    for cell in 0..scan.len() {
        search.best_at(cell, &mut live, HOPELESS);
        if live.is_empty() {
            continue;
        }
        let first = pieces.list.len();
        for rule in rules_for(scan.at(cell)) {
            rule(scan, cell, lexicon, &mut pieces);
        }
        search.skip(cell, &mut pieces);
        for (offset, piece) in pieces
            .list
            .get(first..)
            .unwrap_or_default()
            .iter()
            .enumerate()
        {
            if piece.place == Standing::Inner {
                continue;
            }
            let number = u16::try_from(first + offset).unwrap_or(NONE);
            for &path in &live {
                search.extend(path, number, piece, &pieces.list);
            }
        }
    }
    search.best_at(scan.len(), &mut live, LATE);
    let finished = live
        .iter()
        .filter_map(|&path| search.paths.get(index(path)).copied())
        .collect();
    Beam {
        scan,
        lexicon,
        pieces,
        finished,
        steps: search.steps,
    }
}

impl Beam<'_, '_> {
    /// Returns the pieces of a path in the order of the text.
    pub(super) fn pieces_of(&self, path: &Path) -> Vec<&Piece> {
        let mut found = Vec::with_capacity(8);
        let mut step = path.step;
        while let Some(here) = self.steps.get(index(step)) {
            if let Some(piece) = self.piece(here.piece) {
                if let Meaning::Group(first, n) = piece.meaning {
                    let inner = (first..first + u16::from(n)).rev();
                    found.extend(inner.filter_map(|place| self.piece(place)));
                }
                found.push(piece);
            }
            step = here.before;
        }
        found.reverse();
        found
    }

    /// Returns a piece by its place, `None` for [`NONE`].
    pub(super) fn piece(&self, place: u16) -> Option<&Piece> {
        self.pieces.list.get(usize::from(place))
    }

    /// Returns the capacitance by its place; of several sections that of the first.
    pub(super) fn value(&self, place: u16) -> Option<Amount> {
        match self.piece(place)?.meaning {
            Meaning::Value(amount) => Some(amount),
            Meaning::Sections(_) => self.sections(place)?.first().copied(),
            _ => None,
        }
    }

    /// Returns the sections by the place of their piece.
    pub(super) fn sections(&self, place: u16) -> Option<&[Amount]> {
        match self.piece(place)?.meaning {
            Meaning::Sections(row) => self
                .pieces
                .sections
                .get(usize::from(row))
                .map(Vec::as_slice),
            _ => None,
        }
    }

    /// Returns a voltage by its place.
    pub(super) fn voltage(&self, place: u16) -> Option<Voltage> {
        match self.piece(place)?.meaning {
            Meaning::Voltage(voltage) => Some(voltage),
            _ => None,
        }
    }
}

struct Search<'a, 't> {
    scan: &'a Scan<'t>,
    lexicon: &'a Lexicon,
    factors: &'a Factors,
    paths: Vec<Path>,
    /// The first path of each cell, the others linked behind it.
    heads: [u32; MOST_CELLS + 1],
    steps: Vec<Step>,
}

impl Search<'_, '_> {
    fn add(&mut self, cell: usize, path: Path) {
        if let Some(head) = self.heads.get_mut(cell) {
            let number = u32::try_from(self.paths.len()).unwrap_or(START);
            self.paths.push(Path {
                next: *head,
                ..path
            });
            *head = number;
        }
    }

    /// Lists the best paths of a cell.
    fn best_at(&self, cell: usize, live: &mut Vec<u32>, hopeless: f64) {
        live.clear();
        // Paths with and without a value are not measured against each other: the value may still come.
        let mut best = [0.0f64; 2];
        let mut next = self.heads.get(cell).copied().unwrap_or(START);
        while let Some(path) = self.paths.get(index(next)) {
            live.push(next);
            let slot = &mut best[usize::from(path.slots.value == NONE)];
            *slot = slot.max(path.mass);
            next = path.next;
        }
        let mass = |path: u32| self.paths.get(index(path)).map_or(0.0, |path| path.mass);
        let is_hopeful =
            |path: &Path| path.mass >= hopeless * best[usize::from(path.slots.value == NONE)];
        live.retain(|&path| self.paths.get(index(path)).is_some_and(is_hopeful));
        if live.len() > WIDTH {
            live.select_nth_unstable_by(WIDTH, |&a, &b| mass(b).total_cmp(&mass(a)));
            live.truncate(WIDTH);
        }
    }

    /// Proposes to leave the run at a cell unexplained, or to pass a separator.
    fn skip(&self, cell: usize, pieces: &mut Pieces) {
        let (scan, factors, neutral) = (self.scan, self.factors, self.lexicon.neutral);
        let (sort, end) = scan.run(cell);
        if sort == Sort::Sign && is_separator(scan.at(cell)) {
            pieces.push((cell, end), Meaning::Separator, neutral, factors.separator);
            return;
        }
        let mut weight = match sort {
            Sort::Digit => factors.unexplained_figures,
            Sort::Letter => (cell + 1..end).fold(factors.unexplained_letters, |weight, _| {
                weight * factors.unexplained_more_letters
            }),
            Sort::Blank | Sort::Sign => factors.unexplained_sign,
        };
        let touches = |cell: usize| matches!(scan.sort(cell), Sort::Digit | Sort::Letter);
        if touches(cell.wrapping_sub(1)) || touches(end) {
            weight *= factors.unexplained_touching;
        }
        pieces.push((cell, end), Meaning::Unexplained, neutral, weight);
    }

    /// Adds the path with one more piece, if the two go together at all.
    fn extend(&mut self, number: u32, place: u16, piece: &Piece, pieces: &[Piece]) {
        let Some(from) = self.paths.get(index(number)) else {
            return;
        };
        // A second value is the usual case at a number behind the first, so it is refused before anything is copied.
        if let Meaning::Value(_) | Meaning::Sections(_) = piece.meaning
            && let Some(taken) = pieces.get(usize::from(from.slots.value))
            && taken.meaning != piece.meaning
        {
            return;
        }
        let mut path = *from;
        if !path.take(place, piece, pieces, self.lexicon, self.factors) {
            return;
        }
        path.weight *= piece.weight;
        if let Some(reason) = self.lexicon.reason(piece.evidence) {
            if path.slots.contradicts == from.slots.contradicts {
                path.kinds
                    .iter_mut()
                    .zip(&reason.on)
                    .for_each(|(kind, on)| *kind *= on);
            } else {
                // What contradicts the rest says nothing of the kind of part; it is as rare as where it is usual.
                path.weight *= reason.on.iter().copied().fold(0.0, f64::max);
            }
        }
        path.mass = path.weight * path.kinds.iter().sum::<f64>();
        if path.mass <= 0.0 {
            return;
        }
        let before = path.step;
        path.step = u32::try_from(self.steps.len()).unwrap_or(START);
        self.steps.push(Step {
            piece: place,
            before,
        });
        self.add(self.scan.after_blanks(usize::from(piece.end)), path);
    }
}

fn index(number: u32) -> usize {
    usize::try_from(number).unwrap_or(usize::MAX)
}

/// Whether a sign may stand between others without saying anything.
fn is_separator(glyph: u8) -> bool {
    matches!(
        glyph,
        b'/' | b',' | b';' | b'-' | b'(' | b')' | b'[' | b']' | b':'
    )
}
