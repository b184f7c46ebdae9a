//! Families of capacitors and their members.

use std::fmt;

/// A family of capacitors: what a part is made of, as far as it is known.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Group {
    /// Ceramic of any class and build.
    Ceramic,
    /// Plastic film.
    Film,
    /// Paper, metallised or foil.
    Paper,
    /// Mica.
    Mica,
    /// Glass.
    Glass,
    /// Aluminium electrolytic.
    Electrolytic,
    /// Tantalum, solid or wet.
    Tantalum,
    /// Conductive polymer, aluminium or tantalum.
    Polymer,
    /// Electric double layer.
    Edlc,
    /// Feedthrough.
    Feedthrough,
}

/// A member of a family: the dielectric, and for ceramics the build.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Dielectric {
    /// Ceramic disc or tube, class 1.
    Disc1,
    /// Ceramic disc, class 2.
    Disc2,
    /// Ceramic disc, class 3 (barrier layer).
    Disc3,
    /// Multilayer ceramic, class 1.
    Mlcc1,
    /// Multilayer ceramic, class 2.
    Mlcc2,
    /// Polyester (polyethylene terephthalate).
    Pet,
    /// Polyethylene naphthalate.
    Pen,
    /// Polyphenylene sulphide.
    Pps,
    /// Polypropylene.
    Pp,
    /// Polystyrene.
    Ps,
    /// Polycarbonate.
    Pc,
    /// Aluminium with liquid electrolyte.
    Al,
    /// Solid tantalum.
    Ta,
    /// Wet tantalum.
    Wetta,
}

/// What is known of a part's family: the group only, or the member too.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Family {
    /// Only the group is known.
    Group(Group),
    /// The member is known, and with it the group.
    Member(Dielectric),
}

const GROUPS: [(&str, Group); 10] = [
    ("ceramic", Group::Ceramic),
    ("film", Group::Film),
    ("paper", Group::Paper),
    ("mica", Group::Mica),
    ("glass", Group::Glass),
    ("electrolytic", Group::Electrolytic),
    ("tantalum", Group::Tantalum),
    ("polymer", Group::Polymer),
    ("edlc", Group::Edlc),
    ("feedthrough", Group::Feedthrough),
];

const MEMBERS: [(&str, Dielectric, Group); 14] = [
    ("disc1", Dielectric::Disc1, Group::Ceramic),
    ("disc2", Dielectric::Disc2, Group::Ceramic),
    ("disc3", Dielectric::Disc3, Group::Ceramic),
    ("mlcc1", Dielectric::Mlcc1, Group::Ceramic),
    ("mlcc2", Dielectric::Mlcc2, Group::Ceramic),
    ("pet", Dielectric::Pet, Group::Film),
    ("pen", Dielectric::Pen, Group::Film),
    ("pps", Dielectric::Pps, Group::Film),
    ("pp", Dielectric::Pp, Group::Film),
    ("ps", Dielectric::Ps, Group::Film),
    ("pc", Dielectric::Pc, Group::Film),
    ("al", Dielectric::Al, Group::Electrolytic),
    ("ta", Dielectric::Ta, Group::Tantalum),
    ("wetta", Dielectric::Wetta, Group::Tantalum),
];

impl Family {
    /// Returns every family that has a name, groups first.
    pub fn all() -> impl Iterator<Item = Self> {
        let groups = GROUPS.iter().map(|&(_, group)| Self::Group(group));
        groups.chain(MEMBERS.iter().map(|&(_, member, _)| Self::Member(member)))
    }

    /// Returns the family with this name, or `None`.
    pub fn named(name: &str) -> Option<Self> {
        Self::all().find(|family| family.name() == name)
    }

    /// Returns the name in files and on the command line.
    pub fn name(self) -> &'static str {
        match self {
            Self::Group(group) => GROUPS
                .iter()
                .find(|row| row.1 == group)
                .map_or("", |row| row.0),
            Self::Member(member) => MEMBERS
                .iter()
                .find(|row| row.1 == member)
                .map_or("", |row| row.0),
        }
    }

    /// Returns the group.
    pub fn group(self) -> Group {
        match self {
            Self::Group(group) => group,
            Self::Member(member) => MEMBERS
                .iter()
                .find(|row| row.1 == member)
                .map_or(Group::Ceramic, |row| row.2),
        }
    }

    /// Returns the member, where it is known.
    pub fn member(self) -> Option<Dielectric> {
        match self {
            Self::Group(_) => None,
            Self::Member(member) => Some(member),
        }
    }

    /// Returns the members of this family; a member is its own only one, and groups without named members have none.
    pub fn members(self) -> impl Iterator<Item = Dielectric> {
        MEMBERS
            .iter()
            .filter(move |row| self == Self::Member(row.1) || self == Self::Group(row.2))
            .map(|row| row.1)
    }

    /// Returns whether a part of this family is one of `wanted`; a group takes its members, a member only itself.
    pub fn is_one_of(self, wanted: Self) -> bool {
        self == wanted || wanted == Self::Group(self.group())
    }

    /// Returns whether parts of this family have a polarity (bipolar electrolytics excepted).
    pub fn is_polar(self) -> bool {
        matches!(
            self.group(),
            Group::Electrolytic | Group::Tantalum | Group::Polymer | Group::Edlc
        )
    }
}

impl fmt::Display for Group {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(Family::Group(*self).name())
    }
}

impl fmt::Display for Family {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.name())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_name_leads_back_to_its_family() {
        for family in Family::all() {
            assert_eq!(Family::named(family.name()), Some(family));
        }
        assert_eq!(Family::named("disk"), None);
    }

    #[test]
    fn a_group_takes_its_members() {
        let film = Family::Group(Group::Film);
        let polyester = Family::Member(Dielectric::Pet);
        assert!(polyester.is_one_of(film));
        assert!(
            !film.is_one_of(polyester),
            "a part known only as film is not known to be polyester"
        );
        assert!(!polyester.is_one_of(Family::Group(Group::Ceramic)));
    }
}
