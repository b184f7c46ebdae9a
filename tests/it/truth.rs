//! True meters and true parts behind a profile, and a person who reads them: for checks by simulation.

use nulltray::meter::{
    AssumedLoss, Cut, DialReading, Edge, Meter, Part, ReferenceReading, Repeats, Seen, Switch, null,
};
use nulltray::quantity::Farad;

/// A small generator of known quality (splitmix64, Steele, Lea and Flood 2014), so that a seed fixes a run.
pub(crate) struct Random(pub(crate) u64);

impl Random {
    fn next(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }

    /// Anywhere in 0 to 1.
    pub(crate) fn unit(&mut self) -> f64 {
        (self.next() >> 11) as f64 / 9_007_199_254_740_992.0
    }

    /// One of so many, counted from 0.
    pub(crate) fn below(&mut self, n: usize) -> usize {
        let n = u64::try_from(n).expect("a count");
        usize::try_from(self.next() % n).expect("less than a count")
    }

    /// Anywhere within ±1.
    pub(crate) fn limits(&mut self) -> f64 {
        2.0 * self.unit() - 1.0
    }

    /// Normal, 0 ± 1 (Box and Muller 1958).
    pub(crate) fn normal(&mut self) -> f64 {
        let (u, v) = (1.0 - self.unit(), self.unit());
        (-2.0 * u.ln()).sqrt() * (std::f64::consts::TAU * v).cos()
    }
}

/// The components of a meter, and how far each may be off.
#[derive(Clone, Debug)]
pub(crate) struct Components {
    pub(crate) drive: String,
    pub(crate) resistors: Vec<f64>,
    pub(crate) resistor_tolerance: f64,
    pub(crate) reference: f64,
    pub(crate) reference_tolerance: f64,
    pub(crate) dial: Wiper,
    pub(crate) stray: f64,
    pub(crate) stray_tolerance: f64,
    pub(crate) threshold: f64,
    pub(crate) threshold_tolerance: f64,
    pub(crate) repeatability: f64,
}

#[derive(Clone, Debug)]
pub(crate) enum Wiper {
    Linear {
        total: f64,
        end: f64,
        tolerance: f64,
    },
    Points {
        points: Vec<(f64, f64)>,
        uncertainty: f64,
    },
}

impl Components {
    pub(crate) fn linear() -> Self {
        Self {
            drive: "drive = \"divider\"\nresistance = \"330 kΩ\"".to_owned(),
            resistors: vec![430.0, 5.1e3, 62e3, 750e3],
            resistor_tolerance: 0.02,
            reference: 82e-9,
            reference_tolerance: 0.02,
            dial: Wiper::Linear {
                total: 8.2e3,
                end: 33.0,
                tolerance: 0.05,
            },
            stray: 17e-12,
            stray_tolerance: 4e-12,
            threshold: 0.042,
            threshold_tolerance: 0.2,
            repeatability: 0.3,
        }
    }

    pub(crate) fn with_points() -> Self {
        let points = vec![
            (0.0, 24.0),
            (20.0, 958.0),
            (40.0, 1905.0),
            (60.0, 2842.0),
            (80.0, 3789.0),
            (100.0, 4716.0),
        ];
        Self {
            drive: "drive = \"inverting\"\nresistance = \"470 kΩ\"".to_owned(),
            resistors: vec![300.0, 1.8e3, 11e3, 68e3],
            reference: 68e-9,
            dial: Wiper::Points {
                points,
                uncertainty: 0.005,
            },
            ..Self::linear()
        }
    }

    /// The profile that its owner writes.
    pub(crate) fn profile(&self) -> String {
        use std::fmt::Write;
        let mut text =
            String::from("name = \"Bench\"\n[oscillator]\nfrequency = 1370\namplitude = 3.7\n");
        for (label, resistor) in ["A", "B", "C", "D"].iter().zip(&self.resistors) {
            let tolerance = 100.0 * self.resistor_tolerance;
            writeln!(text, "[[switch]]\nlabel = \"{label}\"\nresistance = {resistor:?}\ntolerance = \"{tolerance} %\"").expect("a string");
        }
        let percent = |x: f64| 100.0 * x;
        let dial = match &self.dial {
            Wiper::Linear {
                total,
                end,
                tolerance,
            } => {
                format!(
                    "resistance = {total:?}\nend_resistance = {end:?}\ntolerance = \"{} %\"",
                    percent(*tolerance)
                )
            }
            Wiper::Points {
                points,
                uncertainty,
            } => {
                let shown: Vec<String> = points
                    .iter()
                    .map(|(x, r)| format!("[{x:?}, {r:?}]"))
                    .collect();
                format!(
                    "points = [{}]\npoint_uncertainty = \"{} %\"",
                    shown.join(", "),
                    percent(*uncertainty)
                )
            }
        };
        write!(
            text,
            "[reference]\ncapacitance = {:?}\ntolerance = \"{} %\"\nloss = 0.0008\n[dial]\nlow = 0\nhigh = 100\ndivision = 1\n{dial}\n\
             [buffer]\ngain_bandwidth = \"2 MHz\"\n[difference]\n{}\n[terminals]\nstray = {:?}\nstray_tolerance = {:?}\n\
             [lamp]\nthreshold = {:?}\nthreshold_tolerance = \"{} %\"\n[reading]\nrepeatability = {}\n",
            self.reference, percent(self.reference_tolerance), self.drive, self.stray, self.stray_tolerance, self.threshold,
            percent(self.threshold_tolerance), self.repeatability,
        )
        .expect("a string");
        text
    }

    pub(crate) fn meter(&self) -> Meter {
        match Meter::read(&self.profile()) {
            Ok((meter, _)) => meter,
            Err(complaints) => panic!("{complaints:?}"),
        }
    }

    /// A meter built to the profile, its components anywhere within their limits.
    pub(crate) fn built(&self, random: &mut Random) -> Self {
        let mut built = self.clone();
        for resistor in &mut built.resistors {
            *resistor *= 1.0 + self.resistor_tolerance * random.limits();
        }
        built.reference *= 1.0 + self.reference_tolerance * random.limits();
        match &mut built.dial {
            Wiper::Linear {
                total,
                end,
                tolerance,
            } => {
                *total *= 1.0 + *tolerance * random.limits();
                *end *= 1.0 + *tolerance * random.limits();
            }
            Wiper::Points {
                points,
                uncertainty,
            } => {
                let factor = 1.0 + *uncertainty * random.normal();
                for (_, r) in points {
                    *r *= factor;
                }
            }
        }
        built.stray += self.stray_tolerance * random.limits();
        built.threshold *= 1.0 + self.threshold_tolerance * random.limits();
        built
    }
}

pub(crate) fn part(capacitance: f64, loss: f64, u_loss: f64) -> Part {
    Part {
        capacitance: Farad::new(capacitance),
        low: None,
        high: None,
        loss: AssumedLoss {
            value: loss,
            standard_uncertainty: u_loss,
        },
        family: None,
    }
}

/// Who reads: exactly, or with a hand that shakes and the eye of whoever writes down whole divisions.
pub(crate) enum Reader<'a> {
    Exact,
    Person {
        random: &'a mut Random,
        repeatability: f64,
    },
}

impl Reader<'_> {
    fn read(&mut self, place: f64) -> DialReading {
        DialReading::new(match self {
            Self::Exact => place,
            Self::Person {
                random,
                repeatability,
            } => (place + *repeatability * random.normal())
                .round()
                .clamp(0.0, 100.0),
        })
    }

    /// Both edges of the dark arc, a cut one as a stop; `None` where there is no free edge.
    pub(crate) fn edges(
        &mut self,
        meter: &Meter,
        switch: Switch,
        capacitance: f64,
        loss: f64,
    ) -> Option<Seen> {
        let arc = null(meter, switch, &part(capacitance, loss, 0.0))
            .arc
            .filter(|arc| arc.cut != Cut::Both)?;
        let mut edge = |place: DialReading| {
            if place <= meter.dial.low || meter.dial.high <= place {
                Edge::At(Repeats::once(place))
            } else {
                Edge::At(Repeats::once(self.read(place.get())))
            }
        };
        let (from, to) = (edge(arc.from), edge(arc.to));
        // Rounded to the stops there is no edge left to write down.
        let is_free = |edge: Edge| {
            let inner = |r: DialReading| meter.dial.low < r && r < meter.dial.high;
            matches!(edge, Edge::At(r) if inner(r.mean()))
        };
        (is_free(from) || is_free(to)).then_some(Seen::Edges { from, to })
    }

    /// The middle of the whole dark arc; `None` where a stop cuts it.
    pub(crate) fn middle(
        &mut self,
        meter: &Meter,
        switch: Switch,
        capacitance: f64,
        loss: f64,
    ) -> Option<Seen> {
        let arc = null(meter, switch, &part(capacitance, loss, 0.0))
            .arc
            .filter(|arc| arc.cut == Cut::Neither)?;
        let middle = 0.5 * (arc.from.get() + arc.to.get());
        Some(Seen::Middle(Repeats::once(self.read(middle))))
    }
}

/// A reading of a part whose stated value is given.
pub(crate) fn reading(
    label: &str,
    stated: f64,
    relative_u: f64,
    switch: Switch,
    seen: Seen,
) -> ReferenceReading {
    ReferenceReading {
        label: label.to_owned(),
        capacitance: Farad::new(stated),
        standard_uncertainty: Farad::new(stated * relative_u),
        loss: 0.001,
        switch,
        seen,
    }
}
