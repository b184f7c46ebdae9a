//! What a person saw on the lamp and the dial.

use std::fmt;

/// A position of the dial as printed on it, between its lowest and highest number.
#[derive(Clone, Copy, Debug, Default, PartialEq, PartialOrd)]
pub struct DialReading(f64);

impl DialReading {
    /// Makes a reading; whether it lies on the dial is checked where it is read from text, by [`super::Dial::admits`].
    pub const fn new(value: f64) -> Self {
        Self(value)
    }

    /// Returns the number printed on the dial.
    pub const fn get(self) -> f64 {
        self.0
    }
}

impl fmt::Display for DialReading {
    /// Writes the number with up to four significant digits; [`super::Dial::show`] knows how many the dial supports.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}", (self.0 * 1000.0).round() / 1000.0)
    }
}

/// One or more readings of the same position.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Repeats {
    mean: DialReading,
    n_readings: u32,
}

impl Repeats {
    /// Makes a single reading.
    pub const fn once(reading: DialReading) -> Self {
        Self {
            mean: reading,
            n_readings: 1,
        }
    }

    /// Makes repeats from the readings; `None` if there are none.
    pub fn of(readings: &[DialReading]) -> Option<Self> {
        let n_readings = u32::try_from(readings.len()).ok().filter(|n| *n > 0)?;
        let sum: f64 = readings.iter().map(|r| r.get()).sum();
        Some(Self {
            mean: DialReading(sum / f64::from(n_readings)),
            n_readings,
        })
    }

    /// Makes repeats whose mean is known; no readings count as one.
    pub fn with_mean(mean: DialReading, n_readings: u32) -> Self {
        Self {
            mean,
            n_readings: n_readings.max(1),
        }
    }

    /// Returns the mean.
    pub const fn mean(self) -> DialReading {
        self.mean
    }

    /// Returns how many readings there are, at least one.
    pub const fn count(self) -> u32 {
        self.n_readings
    }
}

/// One end of the dark arc.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Edge {
    /// The lamp changed here.
    At(Repeats),
    /// The lamp was still dark at the stop: the arc is cut.
    Stop,
}

/// A lamp seen with the dial parked.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Lamp {
    /// Below the threshold.
    Dark,
    /// Above the threshold.
    Lit,
}

/// One observation of a part on one switch.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Seen {
    /// The middle of the dark arc.
    Middle(Repeats),
    /// Both ends of the dark arc, in any order; two stops mean always dark.
    Edges {
        /// One end.
        from: Edge,
        /// The other end.
        to: Edge,
    },
    /// The lamp never went dark; the dimmest place, if it was noted.
    NeverDark {
        /// Where the lamp was dimmest.
        dimmest: Option<DialReading>,
    },
    /// The lamp was dark everywhere.
    AlwaysDark,
    /// The dial was parked at a place and the lamp looked at.
    Parked {
        /// The place.
        at: DialReading,
        /// What the lamp did.
        lamp: Lamp,
    },
}
