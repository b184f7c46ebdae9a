//! One way of explaining the text up to a cell: what it found, and what that is worth so far.

use super::lexicon::{ByKind, Lexicon, agree, more_precise, view_of};
use super::piece::{Class, Form, Meaning, Piece, Voltage};
use crate::tables::{Factors, Family, KINDS, VoltageKind};

/// No piece.
pub(super) const NONE: u16 = u16::MAX;

/// No step, no path.
pub(super) const START: u32 = u32::MAX;

/// A way of explaining the text up to a cell.
#[derive(Clone, Copy)]
pub(super) struct Path {
    /// The last step.
    pub(super) step: u32,
    /// The next path of the same cell.
    pub(super) next: u32,
    /// How probable the path is so far, up to a common factor.
    pub(super) mass: f64,
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
    /// The date.
    pub(super) date: u16,
    /// The digit of the X class, 0 for none.
    pub(super) x: u8,
    /// The digit of the Y class, 0 for none.
    pub(super) y: u8,
    /// The family given or found.
    pub(super) family: Option<Family>,
    /// The place of the family among the views of the lexicon.
    pub(super) view: u8,
    /// A piece that contradicts an earlier one.
    pub(super) contradicts: u16,
}

impl Path {
    /// Makes the path that has explained nothing yet.
    pub(super) fn first(lexicon: &Lexicon, given: Option<Family>) -> Self {
        let mut kinds = [0.0; KINDS];
        for (kind, view) in kinds.iter_mut().zip(lexicon.view(view_of(given))) {
            *kind = view.prior;
        }
        Self {
            step: START,
            next: START,
            mass: 1.0,
            weight: 1.0,
            kinds,
            unexplained: 0,
            slots: Slots {
                value: NONE,
                tolerance: NONE,
                voltages: [NONE; 2],
                characteristic: NONE,
                date: NONE,
                x: 0,
                y: 0,
                family: given,
                view: view_of(given),
                contradicts: NONE,
            },
        }
    }

    /// Takes a piece into the slots; returns whether that is possible.
    pub(super) fn take(
        &mut self,
        place: u16,
        piece: &Piece,
        pieces: &[Piece],
        lexicon: &Lexicon,
        factors: &Factors,
    ) -> bool {
        let meaning_of = |place: u16| pieces.get(usize::from(place)).map(|piece| piece.meaning);
        match piece.meaning {
            Meaning::Value(_) | Meaning::Sections(_) => {
                if self.slots.value == NONE {
                    self.slots.value = place;
                } else if meaning_of(self.slots.value) == Some(piece.meaning) {
                    self.weight *= factors.repeated;
                } else {
                    return false;
                }
            }
            Meaning::Date(date) => match meaning_of(self.slots.date) {
                None => self.slots.date = place,
                Some(Meaning::Date(other)) if other == date => self.weight *= factors.repeated,
                Some(_) => return self.contradict(place, factors.contradicts),
            },
            Meaning::Group(first, n) => {
                for place in first..first + u16::from(n) {
                    let Some(inner) = pieces.get(usize::from(place)) else {
                        return false;
                    };
                    if !self.take(place, inner, pieces, lexicon, factors) {
                        return false;
                    }
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
                    return self.contradict(place, factors.contradicts);
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
                return self.take_voltage(place, voltage, self.slots.voltages.map(of), factors);
            }
            Meaning::Word(row) => return self.take_word(place, row, lexicon, factors),
            Meaning::Safety(class) => return self.take_class(place, class, factors),
            Meaning::Unexplained => self.unexplained |= piece.mask(),
            Meaning::Text | Meaning::Part(_) | Meaning::Separator => {}
        }
        true
    }

    /// Notes a contradiction; returns whether that is possible. One a path: what runs on behind a marking is unexplained
    /// rather than a chain of contradictions.
    fn contradict(&mut self, place: u16, weight: f64) -> bool {
        if self.slots.contradicts != NONE {
            return false;
        }
        self.weight *= weight;
        self.slots.contradicts = place;
        true
    }

    fn take_voltage(
        &mut self,
        place: u16,
        voltage: Voltage,
        found: [Option<Voltage>; 2],
        factors: &Factors,
    ) -> bool {
        match found {
            [None, _] => self.slots.voltages[0] = place,
            [Some(first), None] => {
                let is_same = first.volts.total_cmp(&voltage.volts).is_eq();
                let is_ac = |voltage: Voltage| voltage.kind == VoltageKind::Ac;
                if is_same && first.kind == voltage.kind {
                    self.weight *= factors.repeated;
                } else if is_ac(first) || is_ac(voltage) {
                    self.slots.voltages[1] = place;
                } else if voltage.form == Form::Bare {
                    // A mere number beside another voltage is something else.
                    return false;
                } else {
                    return self.contradict(place, factors.contradicts);
                }
            }
            [Some(_), Some(_)] => return self.contradict(place, factors.contradicts),
        }
        true
    }

    fn take_word(&mut self, place: u16, row: u16, lexicon: &Lexicon, factors: &Factors) -> bool {
        let Some(word) = lexicon.words.get(usize::from(row)) else {
            return false;
        };
        if word.characteristic.is_some() {
            if self.slots.characteristic != NONE {
                return self.contradict(place, factors.contradicts_word);
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
            return self.contradict(place, factors.contradicts_word);
        }
        self.kinds = narrowed;
        let family = self
            .slots
            .family
            .map_or(word.family, |family| more_precise(family, word.family));
        self.slots.family = Some(family);
        self.slots.view = view_of(Some(family));
        true
    }

    fn take_class(&mut self, place: u16, class: Class, factors: &Factors) -> bool {
        let (slot, digit) = match class {
            Class::X(digit) => (&mut self.slots.x, digit),
            Class::Y(digit) => (&mut self.slots.y, digit),
        };
        if *slot == 0 {
            *slot = digit;
        } else if *slot == digit {
            self.weight *= factors.repeated;
        } else {
            return self.contradict(place, factors.contradicts);
        }
        true
    }
}
