//! What is usual for a family of parts.

use super::codes::{quantity, tolerance};
use super::names::family;
use super::read::RawRow;
use super::{Family, TABLES};
use crate::quantity::{Farad, Hertz, Quantity, Span, Tolerance, Volt};
use serde::Deserialize;
use std::fmt;

/// What is usual for a family: for ranking, and for what a marking leaves unsaid.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FamilyFacts {
    /// What a part without a tolerance mark is taken to have.
    pub usual_tolerance: Tolerance,
    /// The loss factor of a good part; `None` for a group with named members, or where none is published.
    pub usual_loss: Option<f64>,
    /// What the loss factor may be at most.
    pub loss_limit: Option<LossLimit>,
    /// The usual capacitances.
    pub usual_range: Span<Farad>,
    /// The usual rated voltages.
    pub usual_voltage: Span<Volt>,
}

/// The highest loss factor a part may have.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LossLimit {
    /// The loss factor.
    pub limit: f64,
    /// The frequency it is stated at.
    pub stated_at: Hertz,
}

/// One row of the table of families.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FamilyRow {
    /// A member, or a group without named members.
    pub family: Family,
    /// What is usual.
    pub facts: FamilyFacts,
}

/// Returns what is usual for a family; a group has the widest of its members' limits and the union of their ranges.
pub fn family_facts(family: Family) -> FamilyFacts {
    let table = &TABLES.facts;
    table
        .iter()
        .find(|row| row.family == family)
        .map_or(ANYTHING, |row| row.facts)
}

/// Returns the facts of every family, groups put together from their members.
pub(super) fn all_facts(rows: &[FamilyRow]) -> Vec<FamilyRow> {
    let facts = |family: Family| {
        let own = rows.iter().find(|row| row.family == family);
        let members = rows.iter().filter(|row| row.family.is_one_of(family));
        let of_members = || {
            let facts = members.map(|row| row.facts).reduce(loosest)?;
            Some(FamilyFacts {
                usual_loss: None,
                ..facts
            })
        };
        let facts = own.map(|row| row.facts).or_else(of_members)?;
        Some(FamilyRow { family, facts })
    };
    Family::all().filter_map(facts).collect()
}

/// No fact at all: every family has a row, by test.
const ANYTHING: FamilyFacts = FamilyFacts {
    usual_tolerance: Tolerance::Minimum,
    usual_loss: None,
    loss_limit: None,
    usual_range: Span {
        low: None,
        high: None,
    },
    usual_voltage: Span {
        low: None,
        high: None,
    },
};

fn loosest(one: FamilyFacts, other: FamilyFacts) -> FamilyFacts {
    let unit = Farad::new(1.0);
    let width = |facts: &FamilyFacts| facts.usual_tolerance.larger_side(unit).get();
    let wider = if width(&other) > width(&one) {
        other
    } else {
        one
    };
    let loss_limit = match (one.loss_limit, other.loss_limit) {
        (Some(a), Some(b)) => Some(if b.limit > a.limit { b } else { a }),
        (a, b) => a.or(b),
    };
    FamilyFacts {
        usual_tolerance: wider.usual_tolerance,
        usual_loss: None,
        loss_limit,
        usual_range: union(one.usual_range, other.usual_range),
        usual_voltage: union(one.usual_voltage, other.usual_voltage),
    }
}

fn union<Q: Quantity>(one: Span<Q>, other: Span<Q>) -> Span<Q> {
    let end = |a: Option<Q>, b: Option<Q>, keeps_first: fn(&Q, &Q) -> bool| {
        a.zip(b)
            .map(|(a, b)| if keeps_first(&a, &b) { a } else { b })
    };
    Span {
        low: end(one.low, other.low, |a, b| a <= b),
        high: end(one.high, other.high, |a, b| a >= b),
    }
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RawFamilyRow {
    family: String,
    tolerance: String,
    loss: Option<f64>,
    loss_limit: Option<f64>,
    loss_at: Option<String>,
    capacitance: String,
    voltage: String,
    source: Option<String>,
}

impl RawRow for RawFamilyRow {
    type Typed = FamilyRow;
    fn key(&self) -> String {
        self.family.clone()
    }
    fn source(&self) -> Option<&str> {
        self.source.as_deref()
    }
    fn typed(self) -> Result<FamilyRow, String> {
        let loss_limit = match (self.loss_limit, self.loss_at) {
            (Some(limit), Some(at)) => Some(LossLimit {
                limit,
                stated_at: quantity(&at)?,
            }),
            (None, None) => None,
            _ => return Err("loss_limit and loss_at go together".to_owned()),
        };
        let usual = self.loss.unwrap_or_default();
        if loss_limit.is_some_and(|limit| limit.limit < usual) || usual < 0.0 {
            return Err("the usual loss lies above its limit".to_owned());
        }
        Ok(FamilyRow {
            family: family(&self.family)?,
            facts: FamilyFacts {
                usual_tolerance: tolerance(&self.tolerance)?,
                usual_loss: self.loss,
                loss_limit,
                usual_range: span(&self.capacitance)?,
                usual_voltage: span(&self.voltage)?,
            },
        })
    }
}

fn span<Q: Quantity>(text: &str) -> Result<Span<Q>, String> {
    Span::parse(text).map_err(|refusal| refusal.to_string())
}

impl fmt::Display for FamilyRow {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let facts = &self.facts;
        write!(f, "{}: unmarked {}", self.family, facts.usual_tolerance)?;
        if let Some(loss) = facts.usual_loss {
            write!(f, ", loss {loss}")?;
        }
        if let Some(LossLimit { limit, stated_at }) = facts.loss_limit {
            write!(f, ", loss at most {limit} at {stated_at}")?;
        }
        if let Span {
            low: Some(low),
            high: Some(high),
        } = facts.usual_range
        {
            write!(f, ", {low} to {high}")?;
        }
        if let Span {
            low: Some(low),
            high: Some(high),
        } = facts.usual_voltage
        {
            write!(f, ", {low} to {high}")?;
        }
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(family: &str, expected: &str) {
        let family = Family::named(family).expect("a family");
        let row = FamilyRow {
            family,
            facts: family_facts(family),
        };
        assert_eq!(row.to_string(), expected);
    }

    #[test]
    fn members_and_groups_have_facts() {
        check(
            "pp",
            "pp: unmarked ±20 %, loss 0.0003, loss at most 0.001 at 1 kHz, 100 pF to 100 µF, 63 V to 3 kV",
        );
        check(
            "film",
            "film: unmarked ±20 %, loss at most 0.01 at 1 kHz, 10 pF to 100 µF, 16 V to 3 kV",
        );
        check(
            "ceramic",
            "ceramic: unmarked ±20 %, loss at most 0.125 at 1 kHz, 0.1 pF to 100 µF, 4 V to 30 kV",
        );
    }

    #[test]
    fn a_group_with_named_members_has_no_usual_loss() {
        for family in Family::all() {
            let has_members = family.member().is_none() && family.members().next().is_some();
            let expected = family_facts(family).usual_loss.filter(|_| !has_members);
            assert_eq!(family_facts(family).usual_loss, expected, "{family}");
        }
    }

    #[test]
    fn every_family_has_facts() {
        for family in Family::all() {
            let facts = family_facts(family);
            assert!(facts.usual_range.low < facts.usual_range.high, "{family}");
        }
    }
}
