//! The ways of looking at one marking: as typed, with unreadable characters completed, with look-alikes, upside down.
//!
//! ```text
//! "10?K"   each ? is tried as every character of `unreadable.toml`, and the completions share the probability
//! "1O4K"   O and 0, I and 1, B and 8, S and 5, Z and 2 are taken for each other where the marking makes little sense as typed
//! "681"    figures that are figures upside down too are also read that way
//! ```
//! Bounds: one `?` is completed from the long list of characters, more from the short one, the leftmost ones first, as long as
//! there are at most [`MOST_COMPLETIONS`] completions, and of a long text so many that all of them together have at most
//! [`MOST_COMPLETED_CELLS`] characters. So a short marking has two completed and a line of 96 characters one; any further `?`
//! stays unexplained. At most [`MOST_SLIPS`] look-alikes are tried, one at a time.

use super::scan::{MOST_CELLS, Scan, UNREADABLE, glyph};
use crate::tables::{Beside, Mistaken, TABLES};
use std::sync::LazyLock;

/// How many completions of unreadable characters are tried.
pub(super) const MOST_COMPLETIONS: usize = 512;
/// How many characters all completions have together.
pub(super) const MOST_COMPLETED_CELLS: usize = 8192;
/// How many look-alikes are tried.
pub(super) const MOST_SLIPS: usize = 8;

/// A way of looking at a marking.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Variant {
    /// As typed.
    AsTyped,
    /// With characters completed: cell and glyph; and how probable these characters are.
    Completed(Vec<(usize, u8)>, f64),
    /// With one character taken for its look-alike.
    Slip(usize, u8),
    /// Upside down.
    Turned,
}

static LISTS: LazyLock<Lists> = LazyLock::new(|| {
    let of = |how: Mistaken| {
        let rows = TABLES.look_alikes().filter(move |row| row.how == how);
        rows.map(|row| (glyph(row.read), glyph(row.printed)))
            .collect()
    };
    let rare = TABLES.ranking.factors.rare_character;
    let characters = |beside: Beside| {
        let mut rows = TABLES.unreadables().filter(|row| row.beside == beside);
        let Some(row) = rows.next() else {
            return Vec::new();
        };
        let usual = row.characters.chars().map(|c| (glyph(c), 1.0));
        let rare = row.rare.chars().map(|c| (glyph(c), rare));
        let all: Vec<(u8, f64)> = usual.chain(rare).collect();
        let whole: f64 = all.iter().map(|one| one.1).sum();
        all.into_iter()
            .map(|(glyph, share)| (glyph, share / whole))
            .collect()
    };
    Lists {
        worn: of(Mistaken::Worn),
        turned: of(Mistaken::Turned),
        alone: characters(Beside::Anything),
        others: characters(Beside::Others),
    }
});

struct Lists {
    worn: Vec<(u8, u8)>,
    turned: Vec<(u8, u8)>,
    alone: Vec<(u8, f64)>,
    others: Vec<(u8, f64)>,
}

impl Variant {
    /// Returns the text looked at in this way.
    pub(super) fn of<'t>(&self, scan: &Scan<'t>) -> Scan<'t> {
        match self {
            Self::AsTyped => scan.clone(),
            Self::Completed(glyphs, _) => {
                glyphs
                    .iter()
                    .fold(scan.clone(), |mut scan, &(cell, glyph)| {
                        scan.put(cell, glyph);
                        scan
                    })
            }
            Self::Slip(cell, glyph) => {
                let mut changed = scan.clone();
                changed.put(*cell, *glyph);
                changed
            }
            Self::Turned => scan.turned(|glyph| partner(&LISTS.turned, glyph)),
        }
    }

    /// Returns how probable it is; `otherwise` for those that do not say.
    pub(super) fn share(&self, otherwise: f64) -> f64 {
        match self {
            Self::Completed(_, share) => *share,
            _ => otherwise,
        }
    }

    /// Returns what is said of it.
    pub(super) fn in_words(&self, scan: &Scan<'_>) -> Option<String> {
        let shown = |glyph: u8| super::scan::shown(glyph);
        match self {
            Self::AsTyped => None,
            Self::Completed(glyphs, _) => {
                let read: Vec<String> = glyphs
                    .iter()
                    .map(|&(_, glyph)| format!("? read as {}", shown(glyph)))
                    .collect();
                Some(format!(
                    "{}: a character that could not be read",
                    read.join(", ")
                ))
            }
            Self::Slip(cell, glyph) => Some(format!(
                "{} read as {}: a slip of the eye, they look alike on worn parts",
                shown(scan.at(*cell)),
                shown(*glyph)
            )),
            Self::Turned => Some("read upside down".to_owned()),
        }
    }
}

fn partner(list: &[(u8, u8)], glyph: u8) -> Option<u8> {
    list.iter().find(|pair| pair.0 == glyph).map(|pair| pair.1)
}

/// Returns the completions of unreadable characters; empty where there is none.
pub(super) fn completions(scan: &Scan<'_>) -> Vec<Variant> {
    let cells: Vec<usize> = (0..scan.len())
        .filter(|&cell| scan.at(cell) == UNREADABLE)
        .collect();
    let list = match cells.len() {
        0 => return Vec::new(),
        1 => &LISTS.alone,
        _ => &LISTS.others,
    };
    let most = MOST_COMPLETIONS.min(MOST_COMPLETED_CELLS / scan.len().max(1));
    let mut variants = vec![(Vec::new(), 1.0)];
    for &cell in &cells {
        if variants.len() * list.len() > most {
            break;
        }
        let longer = |(glyphs, share): &(Vec<(usize, u8)>, f64)| {
            let with = |&(glyph, part): &(u8, f64)| {
                let mut glyphs = glyphs.clone();
                glyphs.push((cell, glyph));
                (glyphs, share * part)
            };
            list.iter().map(with).collect::<Vec<_>>()
        };
        variants = variants.iter().flat_map(longer).collect();
    }
    let completed = |(glyphs, share)| Variant::Completed(glyphs, share);
    variants.into_iter().map(completed).collect()
}

/// Returns the ways with one look-alike.
pub(super) fn slips(scan: &Scan<'_>) -> Vec<Variant> {
    let slip = |cell: usize| Some(Variant::Slip(cell, partner(&LISTS.worn, scan.at(cell))?));
    (0..scan.len().min(MOST_CELLS))
        .filter_map(slip)
        .take(MOST_SLIPS)
        .collect()
}

/// Returns the way upside down, where every figure has a partner and another marking comes of it.
pub(super) fn turned(scan: &Scan<'_>) -> Option<Variant> {
    let figures = scan.rest(0);
    let is_whole = figures
        .iter()
        .all(|&glyph| glyph == b' ' || partner(&LISTS.turned, glyph).is_some());
    let differs = |glyph: &u8| partner(&LISTS.turned, *glyph).is_some_and(|other| other != *glyph);
    (is_whole && figures.iter().any(differs) && figures.len() < 8).then_some(Variant::Turned)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn completions_are_bounded() {
        for (text, least) in [("10?", 30), ("1??", 100), ("????????", 100)] {
            let n = completions(&Scan::new(text)).len();
            assert!(least <= n && n <= MOST_COMPLETIONS, "{text}: {n}");
        }
        assert!(completions(&Scan::new("104")).is_empty());
    }

    #[test]
    fn some_figures_are_figures_upside_down() {
        assert_eq!(turned(&Scan::new("681")), Some(Variant::Turned));
        assert_eq!(turned(&Scan::new("101")), None);
        assert_eq!(turned(&Scan::new("682")), None);
        let scan = Scan::new("681");
        let turned = Variant::Turned.of(&scan);
        assert_eq!((turned.rest(0), turned.text(0, 2)), (&b"189"[..], "81"));
    }
}
