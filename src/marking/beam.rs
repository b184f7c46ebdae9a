//! From pieces to whole readings: a beam over the text, left to right.
//!
//! A path has explained everything left of its cell and carries what it found in slots: one value, one tolerance, up to
//! two voltages of unlike kind, one family, the classes of interference suppression. A piece either fills its slot,
//! repeats what is there, or contradicts it, which is punished and named. What no piece explains is skipped at a cost. At
//! each cell only the [`WIDTH`] best paths go on.

use super::lexicon::{ByKind, Lexicon, agree, more_precise};
use super::piece::{Class, Form, Meaning, Piece, Pieces, Voltage};
use super::scan::{MOST_CELLS, Scan, Sort};
use super::{Rule, rules_for};
use crate::tables::{Factors, Family, KINDS, TABLES, VoltageKind};

/// How many paths go on from a cell.
const WIDTH: usize = 24;

/// No piece.
pub(super) const NONE: u16 = u16::MAX;

/// A way of explaining the text up to a cell.
#[derive(Clone, Copy)]
pub(super) struct Path {
    /// The last step.
    step: u32,
    next: u32,
    /// The product of all factors that do not depend on the kind.
    pub(super) weight: f64,
    /// The product of prior and evidence, by kind.
    pub(super) kinds: ByKind,
    /// The cells left unexplained.
    pub(super) unexplained: u128,
    /// What was found.
    pub(super) slots: Slots,
}

/// What a path found: places in the list of pieces, [`NONE`] where nothing.
#[derive(Clone, Copy)]
pub(super) struct Slots {
    /// The value.
    pub(super) value: u16,
    /// The tolerance.
    pub(super) tolerance: u16,
    /// The voltages.
    pub(super) voltages: [u16; 2],
    /// The characteristic.
    pub(super) characteristic: u16,
    /// The digit of the X class, 0 for none.
    pub(super) x: u8,
    /// The digit of the Y class, 0 for none.
    pub(super) y: u8,
    /// The family given or found.
    pub(super) family: Option<Family>,
    /// A piece that contradicts an earlier one.
    pub(super) contradicts: u16,
}

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
    pub(super) pieces: Vec<Piece>,
    /// The paths that reach the end.
    pub(super) finished: Vec<Path>,
    steps: Vec<Step>,
}

const START: u32 = u32::MAX;

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
        paths: Vec::with_capacity(64),
        heads: [START; MOST_CELLS + 1],
        steps: Vec::with_capacity(64),
    };
    let mut pieces = Pieces {
        list: Vec::with_capacity(48),
    };
    search.add(scan.after_blanks(0), Path::first(lexicon, given));
    let mut live: Vec<u32> = Vec::with_capacity(WIDTH);
    for cell in 0..scan.len() {
        search.best_at(cell, &mut live);
        if live.is_empty() {
            continue;
        }
        let first = pieces.list.len();
        for rule in rules_for(scan.at(cell)) {
            propose(*rule, scan, cell, lexicon, &mut pieces);
        }
        search.skip(cell, &mut pieces);
        for (offset, piece) in pieces
            .list
            .get(first..)
            .unwrap_or_default()
            .iter()
            .enumerate()
        {
            let number = u16::try_from(first + offset).unwrap_or(NONE);
            for &path in &live {
                search.extend(path, number, piece, &pieces.list);
            }
        }
    }
    search.best_at(scan.len(), &mut live);
    let finished = live
        .iter()
        .filter_map(|&path| search.paths.get(index(path)).copied())
        .collect();
    Beam {
        scan,
        lexicon,
        pieces: pieces.list,
        finished,
        steps: search.steps,
    }
}

fn propose(rule: Rule, scan: &Scan<'_>, cell: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    rule(scan, cell, lexicon, pieces);
}

impl Beam<'_, '_> {
    /// Returns the pieces of a path in the order of the text.
    pub(super) fn pieces_of(&self, path: &Path) -> Vec<&Piece> {
        let mut found = Vec::with_capacity(8);
        let mut step = path.step;
        while let Some(here) = self.steps.get(index(step)) {
            found.extend(self.piece(here.piece));
            step = here.before;
        }
        found.reverse();
        found
    }

    /// Returns a piece by its place, `None` for [`NONE`].
    pub(super) fn piece(&self, place: u16) -> Option<&Piece> {
        self.pieces.get(usize::from(place))
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
    fn best_at(&self, cell: usize, live: &mut Vec<u32>) {
        live.clear();
        let mut next = self.heads.get(cell).copied().unwrap_or(START);
        while let Some(path) = self.paths.get(index(next)) {
            live.push(next);
            next = path.next;
        }
        if live.len() > WIDTH {
            let mass = |&path: &u32| self.paths.get(index(path)).map_or(0.0, Path::mass);
            live.sort_by(|a, b| mass(b).total_cmp(&mass(a)));
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
        if sort != Sort::Sign && (touches(cell.wrapping_sub(1)) || touches(end)) {
            weight *= factors.unexplained_touching;
        }
        pieces.push((cell, end), Meaning::Unexplained, neutral, weight);
    }

    /// Adds the path with one more piece, if the two go together at all.
    fn extend(&mut self, number: u32, place: u16, piece: &Piece, pieces: &[Piece]) {
        let Some(mut path) = self.paths.get(index(number)).copied() else {
            return;
        };
        if !path.take(place, piece, pieces, self.lexicon, self.factors) {
            return;
        }
        path.weight *= piece.weight;
        if let Some(reason) = self.lexicon.reason(piece.evidence) {
            path.kinds
                .iter_mut()
                .zip(&reason.on)
                .for_each(|(kind, on)| *kind *= on);
        }
        if path.kinds.iter().all(|&kind| kind <= 0.0) {
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

impl Path {
    fn first(lexicon: &Lexicon, given: Option<Family>) -> Self {
        let mut kinds = [0.0; KINDS];
        for (kind, view) in kinds.iter_mut().zip(lexicon.view(given)) {
            *kind = view.prior;
        }
        Self {
            step: START,
            next: START,
            weight: 1.0,
            kinds,
            unexplained: 0,
            slots: Slots {
                value: NONE,
                tolerance: NONE,
                voltages: [NONE; 2],
                characteristic: NONE,
                x: 0,
                y: 0,
                family: given,
                contradicts: NONE,
            },
        }
    }

    /// How probable the path is so far, up to a common factor.
    pub(super) fn mass(&self) -> f64 {
        self.weight * self.kinds.iter().sum::<f64>()
    }

    /// Takes a piece into the slots; returns whether that is possible.
    fn take(
        &mut self,
        place: u16,
        piece: &Piece,
        pieces: &[Piece],
        lexicon: &Lexicon,
        factors: &Factors,
    ) -> bool {
        let meaning_of = |place: u16| pieces.get(usize::from(place)).map(|piece| piece.meaning);
        match piece.meaning {
            Meaning::Value(_) => {
                if self.slots.value == NONE {
                    self.slots.value = place;
                } else if meaning_of(self.slots.value) == Some(piece.meaning) {
                    self.weight *= factors.repeated;
                } else {
                    return false;
                }
            }
            Meaning::Limits(_) | Meaning::Letter(_) => {
                if self.slots.value == NONE {
                    self.weight *= factors.tolerance_first;
                }
                if self.slots.tolerance == NONE {
                    self.slots.tolerance = place;
                } else if meaning_of(self.slots.tolerance) == Some(piece.meaning) {
                    self.weight *= factors.repeated;
                } else {
                    self.contradict(place, factors);
                }
            }
            Meaning::Voltage(voltage) => {
                if voltage.form == Form::Bare && self.slots.value == NONE {
                    self.weight *= factors.bare_voltage_first;
                }
                let of = |place: u16| match meaning_of(place) {
                    Some(Meaning::Voltage(voltage)) => Some(voltage),
                    _ => None,
                };
                self.take_voltage(place, voltage, self.slots.voltages.map(of), factors);
            }
            Meaning::Word(row) => return self.take_word(place, row, lexicon, factors),
            Meaning::Safety(class) => self.take_class(place, class, factors),
            Meaning::Unexplained => self.unexplained |= piece.mask(),
            Meaning::Text | Meaning::Separator => {}
        }
        true
    }

    fn contradict(&mut self, place: u16, factors: &Factors) {
        self.weight *= factors.contradicts;
        if self.slots.contradicts == NONE {
            self.slots.contradicts = place;
        }
    }

    fn take_voltage(
        &mut self,
        place: u16,
        voltage: Voltage,
        found: [Option<Voltage>; 2],
        factors: &Factors,
    ) {
        match found {
            [None, _] => self.slots.voltages[0] = place,
            [Some(first), None] => {
                let is_same = first.volts.total_cmp(&voltage.volts).is_eq();
                let is_ac = |voltage: Voltage| voltage.kind == VoltageKind::Ac;
                if is_same && first.kind == voltage.kind {
                    self.weight *= factors.repeated;
                } else if is_ac(first) || is_ac(voltage) {
                    self.slots.voltages[1] = place;
                } else {
                    self.contradict(place, factors);
                }
            }
            [Some(_), Some(_)] => self.contradict(place, factors),
        }
    }

    fn take_word(&mut self, place: u16, row: u16, lexicon: &Lexicon, factors: &Factors) -> bool {
        let Some(word) = lexicon.words.get(usize::from(row)) else {
            return false;
        };
        if word.characteristic.is_some() {
            if self.slots.characteristic != NONE {
                self.contradict(place, factors);
                return true;
            }
            self.slots.characteristic = place;
        }
        let agrees = self
            .slots
            .family
            .is_none_or(|family| agree(family, word.family));
        let mut narrowed = self.kinds;
        narrowed
            .iter_mut()
            .zip(&word.kinds)
            .for_each(|(kind, fits)| *kind *= fits);
        if !agrees || narrowed.iter().all(|&kind| kind <= 0.0) {
            self.contradict(place, factors);
            return true;
        }
        self.kinds = narrowed;
        let family = self
            .slots
            .family
            .map_or(word.family, |family| more_precise(family, word.family));
        self.slots.family = Some(family);
        true
    }

    fn take_class(&mut self, place: u16, class: Class, factors: &Factors) {
        let (slot, digit) = match class {
            Class::X(digit) => (&mut self.slots.x, digit),
            Class::Y(digit) => (&mut self.slots.y, digit),
        };
        if *slot == 0 {
            *slot = digit;
        } else if *slot == digit {
            self.weight *= factors.repeated;
        } else {
            self.contradict(place, factors);
        }
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
