//! The questions, in the order in which they are asked, which is that of the profile.

use Accepts::{Count, Number, OneOf, Path, Percent, Points, Quantity, Words, Yes, YesOrNo};
use Unit::{Farad, Hertz, Ohm, Volt};

/// What a question is about.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Topic {
    /// What the meter is called.
    Name,
    /// Frequency of the oscillator.
    Frequency,
    /// Amplitude of the oscillator, peak.
    Amplitude,
    /// How many positions the range switch has.
    SwitchCount,
    /// What is printed beside a position.
    SwitchLabel,
    /// The range resistor of a position.
    SwitchResistance,
    /// Its tolerance.
    SwitchTolerance,
    /// The known capacitor.
    ReferenceCapacitance,
    /// Its tolerance.
    ReferenceTolerance,
    /// Its loss.
    ReferenceLoss,
    /// The smallest printed number of the dial.
    DialLow,
    /// The largest.
    DialHigh,
    /// The smallest printed division.
    Division,
    /// Whether the dial was measured.
    HasPoints,
    /// The measured points.
    Points,
    /// Their common uncertainty.
    PointUncertainty,
    /// The dial's track from end to end.
    DialTotal,
    /// What is left of it at the low number.
    DialEnd,
    /// The tolerance of both.
    DialTolerance,
    /// How far the dial turns.
    Sweep,
    /// Which way its numbers rise.
    Direction,
    /// Gain-bandwidth product of the follower.
    GainBandwidth,
    /// How the difference amplifier is driven.
    Drive,
    /// The resistor that loads the dial leg.
    DriveResistance,
    /// Stray capacitance of the terminals.
    Stray,
    /// Its tolerance.
    StrayTolerance,
    /// Where the lamp just goes dark.
    Threshold,
    /// Its tolerance.
    ThresholdTolerance,
    /// How well a reading repeats.
    Repeatability,
    /// Where the profile is written.
    Place,
    /// Whether a file that is there already is written over.
    Overwrite,
}

/// A question.
#[derive(Debug)]
pub struct Question {
    /// What it is about.
    pub topic: Topic,
    /// The table of the profile its answer stands in; empty for the top and for what the profile does not hold.
    pub section: &'static str,
    /// What the prompt says; the key in the profile, if it has one.
    pub name: &'static str,
    /// The question; `{}` stands for the number or the label of a switch position.
    pub words: &'static str,
    /// What the answer is good for, in one short sentence.
    pub good_for: &'static str,
    /// Which answers make sense.
    pub accepts: Accepts,
    /// What Enter alone takes, where that does not follow from the answers before.
    pub default: &'static str,
    /// When it is asked.
    pub when: When,
}

/// Which answers make sense.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Accepts {
    /// Any text of so many characters at most.
    Words(usize),
    /// A whole number from 1.
    Count(usize),
    /// A quantity from … to …, as people write it.
    Quantity(Unit, &'static str, &'static str),
    /// A percentage from 0 to below 100.
    Percent,
    /// A plain number from … to ….
    Number(f64, f64),
    /// One of these words.
    OneOf(&'static [&'static str]),
    /// A quantity like the ones above, or the word `ideal`.
    QuantityOrIdeal(Unit, &'static str, &'static str),
    /// `yes` or `no`.
    YesOrNo,
    /// A dial number and a resistance; nothing ends them.
    Points,
    /// The path of a file.
    Path,
    /// `yes`; anything else is a no.
    Yes,
}

/// A unit in which a question is answered.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Unit {
    /// Capacitance.
    Farad,
    /// Frequency.
    Hertz,
    /// Resistance.
    Ohm,
    /// Voltage.
    Volt,
}

/// When a question is asked.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum When {
    /// Of every meter.
    Always,
    /// Once for every position of the range switch.
    EachSwitch,
    /// If the dial was measured.
    Measured,
    /// If it was not.
    NotMeasured,
    /// If the dial leg is loaded by a resistor.
    Loaded,
    /// Only if the file is there already.
    FileExists,
}

/// All questions in their order; the first is asked of every meter.
pub static QUESTIONS: [Question; 31] = [
    Question {
        topic: Topic::Name,
        section: "",
        name: "name",
        words: "What is the meter called?",
        good_for: "tells this meter from others on the screen and in reports",
        accepts: Words(60),
        default: "Home-built meter",
        when: When::Always,
    },
    Question {
        topic: Topic::Frequency,
        section: "oscillator",
        name: "frequency",
        words: "At which frequency does the oscillator run?",
        good_for: "bears on the dark arc's width and on what the follower does to a balance",
        accepts: Quantity(Hertz, "10 Hz", "1 MHz"),
        default: "1 kHz",
        when: When::Always,
    },
    Question {
        topic: Topic::Amplitude,
        section: "oscillator",
        name: "amplitude",
        words: "What is the oscillator's peak voltage?",
        good_for: "peak; says what voltage a part will see",
        accepts: Quantity(Volt, "10 mV", "100 V"),
        default: "4.2 V",
        when: When::Always,
    },
    Question {
        topic: Topic::SwitchCount,
        section: "",
        name: "switches",
        words: "How many positions has the range switch?",
        good_for: "each position has capacitances of its own that it can null",
        accepts: Count(8),
        default: "4",
        when: When::Always,
    },
    Question {
        topic: Topic::SwitchLabel,
        section: "switch",
        name: "label",
        words: "What is printed beside switch position {}?",
        good_for: "names the position on the screen and in your lists",
        accepts: Words(12),
        default: "",
        when: When::EachSwitch,
    },
    Question {
        topic: Topic::SwitchResistance,
        section: "switch",
        name: "resistance",
        words: "Which range resistor does position {} have?",
        good_for: "every value found on this position rests on it",
        accepts: Quantity(Ohm, "1 Ω", "100 MΩ"),
        default: "300 Ω",
        when: When::EachSwitch,
    },
    Question {
        topic: Topic::SwitchTolerance,
        section: "switch",
        name: "tolerance",
        words: "How far may the resistor of position {} be off?",
        good_for: "goes straight into the doubt of every value on this position",
        accepts: Percent,
        default: "1 %",
        when: When::EachSwitch,
    },
    Question {
        topic: Topic::ReferenceCapacitance,
        section: "reference",
        name: "capacitance",
        words: "What is the known capacitor of the dial leg?",
        good_for: "the capacitor that every part is compared with",
        accepts: Quantity(Farad, "10 pF", "1 mF"),
        default: "68 nF",
        when: When::Always,
    },
    Question {
        topic: Topic::ReferenceTolerance,
        section: "reference",
        name: "tolerance",
        words: "How far may the known capacitor be off?",
        good_for: "a doubt that all values share, until the meter is calibrated",
        accepts: Percent,
        default: "2 %",
        when: When::Always,
    },
    Question {
        topic: Topic::ReferenceLoss,
        section: "reference",
        name: "loss",
        words: "What is the known capacitor's loss, tan δ?",
        good_for: "tan δ; shifts the loss that is found for parts (0 if it is not known)",
        accepts: Number(0.0, 0.5),
        default: "0.0005",
        when: When::Always,
    },
    Question {
        topic: Topic::DialLow,
        section: "dial",
        name: "low",
        words: "What is the smallest number printed on the dial?",
        good_for: "readings below it are refused as slips",
        accepts: Number(0.0, 1e6),
        default: "0",
        when: When::Always,
    },
    Question {
        topic: Topic::DialHigh,
        section: "dial",
        name: "high",
        words: "What is the largest number printed on the dial?",
        good_for: "readings above it are refused as slips",
        accepts: Number(0.0, 1e6),
        default: "",
        when: When::Always,
    },
    Question {
        topic: Topic::Division,
        section: "dial",
        name: "division",
        words: "How much is the smallest printed division?",
        good_for: "the smallest printed step; the dial is drawn with it",
        accepts: Number(1e-6, 1e6),
        default: "",
        when: When::Always,
    },
    Question {
        topic: Topic::HasPoints,
        section: "",
        name: "measured",
        words: "Did you measure the dial's resistance at some of its numbers?",
        good_for: "measured points leave far less doubt; a dial that starts at its high resistance needs them",
        accepts: YesOrNo,
        default: "no",
        when: When::Always,
    },
    Question {
        topic: Topic::Points,
        section: "dial",
        name: "points",
        words: "Which resistance belongs to which number, from the low end on, one pair a line?",
        good_for: "number and measured resistance; straight lines join the points",
        accepts: Points,
        default: "",
        when: When::Measured,
    },
    Question {
        topic: Topic::PointUncertainty,
        section: "dial",
        name: "point_uncertainty",
        words: "How well does the ohmmeter know these resistances?",
        good_for: "standard uncertainty of the ohmmeter's scale, which all points share",
        accepts: Percent,
        default: "0.5 %",
        when: When::Measured,
    },
    Question {
        topic: Topic::DialTotal,
        section: "dial",
        name: "resistance",
        words: "What is the resistance of the dial's track?",
        good_for: "from end to end; sets the span of every switch position",
        accepts: Quantity(Ohm, "10 Ω", "10 MΩ"),
        default: "4.7 kΩ",
        when: When::NotMeasured,
    },
    Question {
        topic: Topic::DialEnd,
        section: "dial",
        name: "end_resistance",
        words: "What resistance is left at the low number?",
        good_for: "what is left at the low number; shifts small values",
        accepts: Quantity(Ohm, "0 Ω", "1 MΩ"),
        default: "20 Ω",
        when: When::NotMeasured,
    },
    Question {
        topic: Topic::DialTolerance,
        section: "dial",
        name: "tolerance",
        words: "How far may the dial's resistance be off?",
        good_for: "a dial known to 10 % only leaves most parts undecided",
        accepts: Percent,
        default: "10 %",
        when: When::NotMeasured,
    },
    Question {
        topic: Topic::Sweep,
        section: "dial",
        name: "sweep",
        words: "How many degrees does the dial turn from low to high?",
        good_for: "degrees from low to high, negative: counterclockwise; for drawing only",
        accepts: Number(1.0, 360.0),
        default: "270",
        when: When::Always,
    },
    Question {
        topic: Topic::Direction,
        section: "",
        name: "direction",
        words: "Which way do the dial's numbers rise?",
        good_for: "for drawing only",
        accepts: OneOf(&["clockwise", "counterclockwise"]),
        default: "clockwise",
        when: When::Always,
    },
    Question {
        topic: Topic::GainBandwidth,
        section: "buffer",
        name: "gain_bandwidth",
        words: "What is the gain-bandwidth product of the follower?",
        good_for: "from the amplifier's data sheet; a slow follower shifts every balance a little",
        accepts: Accepts::QuantityOrIdeal(Hertz, "1 kHz", "10 GHz"),
        default: "1 MHz",
        when: When::Always,
    },
    Question {
        topic: Topic::Drive,
        section: "difference",
        name: "drive",
        words: "How does the dial leg drive the difference amplifier?",
        good_for: "buffered leaves the dial leg alone, the other two load it",
        accepts: OneOf(&["buffered", "divider", "inverting"]),
        default: "buffered",
        when: When::Always,
    },
    Question {
        topic: Topic::DriveResistance,
        section: "difference",
        name: "resistance",
        words: "Which resistor of the difference amplifier loads the dial leg?",
        good_for: "loads the dial leg and shifts every balance",
        accepts: Quantity(Ohm, "100 Ω", "100 MΩ"),
        default: "150 kΩ",
        when: When::Loaded,
    },
    Question {
        topic: Topic::Stray,
        section: "terminals",
        name: "stray",
        words: "How much capacitance have the open terminals?",
        good_for: "is taken off every value",
        accepts: Quantity(Farad, "0 F", "10 nF"),
        default: "14 pF",
        when: When::Always,
    },
    Question {
        topic: Topic::StrayTolerance,
        section: "terminals",
        name: "stray_tolerance",
        words: "How far may that be off?",
        good_for: "matters for small values only",
        accepts: Quantity(Farad, "0 F", "10 nF"),
        default: "4 pF",
        when: When::Always,
    },
    Question {
        topic: Topic::Threshold,
        section: "lamp",
        name: "threshold",
        words: "At which peak difference does the lamp just go dark?",
        good_for: "peak difference at which the lamp just goes dark; sets the width of the dark arc",
        accepts: Quantity(Volt, "10 µV", "50 V"),
        default: "",
        when: When::Always,
    },
    Question {
        topic: Topic::ThresholdTolerance,
        section: "lamp",
        name: "threshold_tolerance",
        words: "How far may the threshold be off?",
        good_for: "matters for one edge or a parked dial; the middle of the arc hardly feels it",
        accepts: Percent,
        default: "20 %",
        when: When::Always,
    },
    Question {
        topic: Topic::Repeatability,
        section: "reading",
        name: "repeatability",
        words: "How well does a reading repeat, in dial numbers?",
        good_for: "one standard deviation of a reading, in dial numbers",
        accepts: Number(0.0, 1e6),
        default: "",
        when: When::Always,
    },
    Question {
        topic: Topic::Place,
        section: "",
        name: "write to",
        words: "Where is the profile to be written?",
        good_for: "in its usual place the program finds it at every start",
        accepts: Path,
        default: "",
        when: When::Always,
    },
    Question {
        topic: Topic::Overwrite,
        section: "",
        name: "write over it",
        words: "There is such a file already. Is it to be written over?",
        good_for: "what it says now would be lost; anything but yes asks for another place",
        accepts: Yes,
        default: "no",
        when: When::FileExists,
    },
];

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn questions_come_in_the_order_of_their_topics() {
        let topics: Vec<Topic> = QUESTIONS.iter().map(|q| q.topic).collect();
        assert!(topics.is_sorted() && topics.len() == 31, "{topics:?}");
        for question in &QUESTIONS {
            assert!(question.words.ends_with('?'), "{question:?}");
            let count = question.good_for.chars().count();
            assert!((5..=90).contains(&count), "{count}: {question:?}");
        }
    }
}
