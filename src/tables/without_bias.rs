//! How much alternating voltage a polarised part may see without bias.

use std::sync::LazyLock;

use serde::Deserialize;

use super::Family;
use crate::quantity::{Volt, parse};

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct File {
    #[serde(rename = "format")]
    _format: u32,
    #[serde(rename = "source")]
    _source: String,
    row: Vec<Row>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Row {
    family: String,
    peak: String,
}

static ROWS: LazyLock<Vec<(Family, Volt)>> = LazyLock::new(|| {
    let file: File = toml::from_str(include_str!("../../data/without-bias.toml"))
        .expect("data/without-bias.toml is tested");
    file.row
        .iter()
        .map(|row| {
            let family = Family::named(&row.family)
                .expect("a family of data/without-bias.toml has its name");
            (
                family,
                parse(&row.peak).expect("a voltage of data/without-bias.toml can be read"),
            )
        })
        .collect()
});

/// Returns the highest alternating voltage, peak, that a part of this family should see without direct voltage beside it;
/// `None` for families without polarity.
pub fn peak_without_bias(family: Family) -> Option<Volt> {
    ROWS.iter()
        .find(|(row, _)| family.is_one_of(*row))
        .map(|(_, peak)| *peak)
}

#[cfg(test)]
mod tests {
    use super::super::{Dielectric, Group};
    use super::*;

    #[test]
    fn polarised_families_have_a_limit_and_others_none() {
        assert_eq!(
            peak_without_bias(Family::Member(Dielectric::Al)),
            Some(Volt::new(1.0))
        );
        assert_eq!(
            peak_without_bias(Family::Member(Dielectric::Ta)),
            Some(Volt::new(0.5))
        );
        assert_eq!(peak_without_bias(Family::Group(Group::Film)), None);
        for family in Family::all() {
            assert_eq!(
                peak_without_bias(family).is_some(),
                family.is_polar(),
                "{family}"
            );
        }
    }
}
