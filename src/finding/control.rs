//! The control of a check part: whether the meter still reads it as it did.
//!
//! Two charts over the same readings. A Shewhart chart warns beyond two standard deviations and acts beyond three; it sees a
//! jump at once. An EWMA (exponentially weighted moving average, NIST/SEMATECH e-Handbook of Statistical Methods, 6.3.2.4)
//! with weight 0.2 and limits at 2.962 of its own standard deviations sees a small shift that lasts.
//!
//! *Against the known value.* At first the only yardstick is what is stated: a reading has its own standard uncertainty, and
//! all readings share the error of the meter and of the known value. One reading then scatters by √(own² + shared²) about the
//! known value. The average `z` of readings that share an error scatters by more than the usual formula says, since a shared
//! error does not average out. With `y = shared error + own error` in units of the own one,
//!
//! ```text
//! z' = w·y + (1-w)·z          v' = w² + (1-w)²·v          g' = w·shared + (1-w)·g          var z = v + g²
//! ```
//!
//! where v is w/(2-w)·(1-(1-w)^2t), the exact form for t readings, and g the share of the common error. Without g a meter
//! within its stated uncertainty would be called moved for ever.
//!
//! *Against its own past.* Once 20 readings of three days stand, not counting those beyond the limits, they are the
//! baseline: target and scatter come from them, and the chart starts anew. Their mean is not known exactly: its error is
//! shared from then on. Their scatter is not either, so the limits are widened as Student's t is against the normal
//! distribution.

/// What an average gives to its newest reading.
const TREND_WEIGHT: f64 = 0.2;
/// The limit of the average in its own standard deviations; together with the weight about 500 readings between false alarms.
const TREND_LIMIT: f64 = 2.962;
/// Beyond so many standard deviations a reading warns.
pub const WARN: f64 = 2.0;
/// Beyond so many it is out.
pub const ACT: f64 = 3.0;
/// One wild reading counts no more than this in the average: the Shewhart chart has seen it already.
const WILDEST: f64 = 4.0;
/// So many readings are a baseline …
const BASELINE_READINGS: usize = 20;
/// … of so many days: the scatter of one sitting is not that of the meter.
const BASELINE_DAYS: usize = 3;
/// The baseline's scatter counts as at least this part of the stated one: readings that all round to the same division do
/// not make the next division an alarm.
const LEAST_SCATTER: f64 = 0.5;

/// One reading of a check part, in any one unit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CheckReading {
    /// What was read less the known value.
    pub deviation: f64,
    /// Standard uncertainty of this reading alone.
    pub own: f64,
    /// Standard uncertainty of what all readings share: the meter's constants, the known value.
    pub shared: f64,
    /// The day it was taken, counted from anywhere.
    pub day: i64,
}

/// Where a reading stands on the charts.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Control {
    /// Within the limits.
    Inside,
    /// The reading is beyond two standard deviations.
    Warning,
    /// The reading is beyond three.
    Jumped,
    /// The average is beyond its limits.
    Drifted,
}

impl Control {
    /// Returns whether the meter has moved.
    pub fn is_out(self) -> bool {
        matches!(self, Self::Jumped | Self::Drifted)
    }
}

/// A reading on the charts.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ControlPoint {
    /// The reading from its target, in standard deviations.
    pub score: f64,
    /// The average from its target, in its own standard deviations.
    pub trend: f64,
    /// The target: the known value (0) or the mean of the baseline.
    pub target: f64,
    /// Where it stands.
    pub control: Control,
}

/// Since when the meter has moved.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Moved {
    /// The first reading that was out.
    pub first_out: usize,
    /// The last reading before that which speaks for the meter; `None` if none does. What was measured after it is in doubt.
    pub last_good: Option<usize>,
}

/// A chart, oldest reading first.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct ControlChart {
    /// The readings.
    pub points: Vec<ControlPoint>,
    /// From which reading on the baseline is the yardstick.
    pub baseline_until: Option<usize>,
    /// Set while the meter has moved: from the first reading out until one is within the limits again.
    pub moved: Option<Moved>,
}

/// Returns the chart of the readings, oldest first.
pub fn control(readings: &[CheckReading]) -> ControlChart {
    let mut chart = ControlChart::default();
    let mut yardstick = Yardstick::stated();
    let mut trend = Trend::default();
    let mut quiet = Vec::new();
    for (index, reading) in readings.iter().enumerate() {
        let (point, next) = yardstick.place(reading, trend);
        trend = next;
        chart.points.push(point);
        match point.control {
            Control::Inside => chart.moved = None,
            Control::Warning => {}
            Control::Jumped | Control::Drifted => {
                let last_good = last_good(&chart, index);
                chart.moved.get_or_insert(Moved {
                    first_out: index,
                    last_good,
                });
            }
        }
        if chart.baseline_until.is_none() && !point.control.is_out() {
            quiet.push(*reading);
            if let Some(baseline) = Yardstick::of(&quiet) {
                yardstick = baseline;
                trend = Trend::default();
                chart.baseline_until = Some(index + 1);
            }
        }
    }
    chart
}

/// Returns the last reading before one that is out which speaks for the meter. An average that has crossed its limit began
/// to leave where it last was on the other side of its target.
fn last_good(chart: &ControlChart, out: usize) -> Option<usize> {
    let point = chart.points.get(out)?;
    let start = chart.baseline_until.filter(|start| *start <= out);
    let earlier = chart.points.iter().enumerate().take(out).rev();
    let mut inside = earlier.filter(|(_, p)| p.control == Control::Inside);
    let found = match point.control {
        Control::Drifted => inside.find(|(index, earlier)| {
            start.is_some_and(|start| *index < start) || earlier.trend * point.trend <= 0.0
        }),
        _ => inside.next(),
    };
    found.map(|(index, _)| index)
}

/// An average of readings in units of their own scatter; see the module page for `variance` and `shared`.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
struct Trend {
    value: f64,
    variance: f64,
    shared: f64,
}

impl Trend {
    fn with(self, weight: f64, value: f64, shared: f64) -> Self {
        let kept = 1.0 - weight;
        Self {
            value: weight * value + kept * self.value,
            variance: weight * weight + kept * kept * self.variance,
            shared: weight * shared + kept * self.shared,
        }
    }

    fn deviation(self) -> f64 {
        self.variance.sqrt().hypot(self.shared)
    }
}

/// What readings are compared with.
#[derive(Clone, Copy, Debug)]
struct Yardstick {
    target: f64,
    /// The scatter of a reading as a multiple of its own stated uncertainty.
    scatter: f64,
    /// The standard uncertainty of the target; `None`: what each reading says it shares.
    doubt: Option<f64>,
}

impl Yardstick {
    fn stated() -> Self {
        Self {
            target: 0.0,
            scatter: 1.0,
            doubt: None,
        }
    }

    /// Returns the baseline of the readings; `None` while there are too few.
    fn of(readings: &[CheckReading]) -> Option<Self> {
        let mut days: Vec<i64> = readings.iter().map(|r| r.day).collect();
        days.sort_unstable();
        days.dedup();
        if readings.len() < BASELINE_READINGS || days.len() < BASELINE_DAYS {
            return None;
        }
        let weight = |r: &CheckReading| own(r).powi(-2);
        let weights: f64 = readings.iter().map(weight).sum();
        let target = readings
            .iter()
            .map(|r| weight(r) * r.deviation)
            .sum::<f64>()
            / weights;
        let squares: f64 = readings
            .iter()
            .map(|r| weight(r) * (r.deviation - target).powi(2))
            .sum();
        let freedom = readings.len() as f64 - 1.0;
        let scatter = (squares / freedom).sqrt().max(LEAST_SCATTER);
        Some(Self {
            target,
            scatter: scatter * student(ACT, freedom) / ACT,
            doubt: Some(scatter / weights.sqrt()),
        })
    }

    /// Places a reading on the charts; also returns the average with it.
    fn place(&self, reading: &CheckReading, trend: Trend) -> (ControlPoint, Trend) {
        let scatter = self.scatter * own(reading);
        let value = (reading.deviation - self.target) / scatter;
        let shared = self.doubt.unwrap_or(reading.shared) / scatter;
        let all = 1f64.hypot(shared);
        let wildest = WILDEST * all;
        let trend = trend.with(TREND_WEIGHT, value.clamp(-wildest, wildest), shared);
        let score = value / all;
        let average = trend.value / trend.deviation();
        let control = match score.abs() {
            far if far > ACT => Control::Jumped,
            _ if average.abs() > TREND_LIMIT => Control::Drifted,
            far if far > WARN => Control::Warning,
            _ => Control::Inside,
        };
        let point = ControlPoint {
            score,
            trend: average,
            target: self.target,
            control,
        };
        (point, trend)
    }
}

/// The own uncertainty, never zero.
fn own(reading: &CheckReading) -> f64 {
    let least = 1e-6 * reading.shared.abs().max(reading.deviation.abs());
    reading.own.abs().max(least).max(f64::MIN_POSITIVE.sqrt())
}

/// The quantile of Student's t that has the same probability as z of the normal distribution (M. Abramowitz and I. A. Stegun,
/// Handbook of Mathematical Functions, 26.7.5); good to 1e-3 from ten degrees of freedom on.
fn student(z: f64, freedom: f64) -> f64 {
    let first = (z.powi(3) + z) / 4.0;
    let second = (5.0 * z.powi(5) + 16.0 * z.powi(3) + 3.0 * z) / 96.0;
    let third = (3.0 * z.powi(7) + 19.0 * z.powi(5) + 17.0 * z.powi(3) - 15.0 * z) / 384.0;
    z + first / freedom + second / freedom.powi(2) + third / freedom.powi(3)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn reading(deviation: f64, own: f64, shared: f64, day: i64) -> CheckReading {
        CheckReading {
            deviation,
            own,
            shared,
            day,
        }
    }

    /// Standard normal numbers from a fixed seed (`SplitMix64` and the polar form of Box and Muller).
    struct Normal(u64);

    impl Normal {
        fn uniform(&mut self) -> f64 {
            self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
            let mut x = self.0;
            x = (x ^ (x >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
            x = (x ^ (x >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
            ((x ^ (x >> 31)) >> 11) as f64 / (1u64 << 53) as f64
        }

        fn next(&mut self) -> f64 {
            let (u, v) = (1.0 - self.uniform(), self.uniform());
            (-2.0 * u.ln()).sqrt() * (std::f64::consts::TAU * v).cos()
        }
    }

    /// Example of the NIST/SEMATECH e-Handbook, 6.3.2.4: target 50, s 2.0539, weight 0.3, k = 3; in control throughout. The first
    /// exact upper limits were computed apart.
    #[test]
    fn the_average_of_the_handbook() {
        const S: f64 = 2.0539;
        let data = [
            52.0, 47.0, 53.0, 49.3, 50.1, 47.0, 51.0, 50.1, 51.2, 50.5, 49.6, 47.6, 49.9, 51.3,
            47.8, 51.2, 52.6, 52.4, 53.6, 52.1,
        ];
        let expected = [
            50.60, 49.52, 50.56, 50.18, 50.16, 49.21, 49.75, 49.85, 50.26, 50.33, 50.11, 49.36,
            49.52, 50.05, 49.38, 49.92, 50.73, 51.23, 51.94, 51.99,
        ];
        let upper = [51.8485, 52.2564, 52.4314, 52.5127, 52.5516];
        let mut trend = Trend::default();
        for (t, (y, z)) in data.into_iter().zip(expected).enumerate() {
            trend = trend.with(0.3, (y - 50.0) / S, 0.0);
            let average = 50.0 + S * trend.value;
            assert!((average - z).abs() < 0.0051, "z_{t}: {average}");
            let limit = 50.0 + 3.0 * S * trend.deviation();
            if let Some(upper) = upper.get(t) {
                assert!((limit - upper).abs() < 1e-4, "limit {t}: {limit}");
            }
            assert!(average < limit, "{t}");
        }
        let limit = 50.0 + 3.0 * S * trend.deviation();
        assert!((limit - 52.5884).abs() < 1e-3, "{limit}");
    }

    /// √(λ/(2-λ)) for λ 0.2 is a third; 26.7.5 against the t quantile of the e-Handbook's control of a linear calibration
    /// (2.3.7): 2.497575 for 38 degrees of freedom, three checks at once, 5 %; and t at the probability of 3 s for 19.
    #[test]
    fn the_constants() {
        let mut trend = Trend::default();
        for _ in 0..200 {
            trend = trend.with(TREND_WEIGHT, 0.0, 0.0);
        }
        assert!((trend.deviation() - 1.0 / 3.0).abs() < 1e-12);
        assert!((student(2.387_737, 38.0) - 2.497_575).abs() < 1e-3);
        assert!(
            (student(3.0, 19.0) - 3.447).abs() < 3e-3,
            "{}",
            student(3.0, 19.0)
        );
    }

    /// Daily checks of a linewidth scale (e-Handbook, 2.3.7): on the fourth day all three positions are out.
    #[test]
    fn the_fourth_day_of_the_linewidth_scale() {
        let s = 0.062_032_0 / 0.987_037_7;
        let positions = [
            [-0.1358, -0.0041, -0.0649, 0.2289, 0.0263, -0.0447],
            [-0.0070, -0.0475, 0.0234, -0.2704, -0.0475, -0.0374],
            [-0.1008, 0.1221, -0.0096, -0.2933, -0.0400, -0.0096],
        ];
        for w in positions {
            let readings: Vec<_> = (0..)
                .zip(w)
                .map(|(day, w)| reading(w, s, 0.0, day))
                .collect();
            let chart = control(&readings);
            let jumped: Vec<usize> = (1..)
                .zip(&chart.points)
                .filter(|(_, p)| p.control == Control::Jumped)
                .map(|(day, _)| day)
                .collect();
            assert_eq!(jumped, [4]);
            assert_eq!(chart.moved, None, "the fifth day is good again");
        }
    }

    #[test]
    fn a_jump_puts_in_doubt_what_came_after_the_reading_before() {
        let readings = [0.3, -0.4, 0.1, 3.6].map(|d| reading(d, 1.0, 0.0, 1));
        let chart = control(&readings);
        assert_eq!(chart.points[3].control, Control::Jumped);
        let moved = Moved {
            first_out: 3,
            last_good: Some(2),
        };
        assert_eq!(chart.moved, Some(moved));
        let first = control(&[reading(-5.0, 1.0, 0.0, 1)]);
        assert_eq!(first.moved.and_then(|m| m.last_good), None);
        // It stays in doubt while it only warns, and no longer once a reading is within the limits.
        let mut on = readings.to_vec();
        on.push(reading(2.5, 1.0, 0.0, 1));
        assert_eq!(control(&on).moved, Some(moved));
    }

    #[test]
    fn a_drift_puts_in_doubt_what_came_after_the_average_left() {
        let deviations = [0.5, -0.9, 0.2, -0.2, 1.8, 1.7, 1.6, 1.9, 1.8, 1.9];
        let chart = control(&deviations.map(|d| reading(d, 1.0, 0.0, 1)));
        let out = chart.points.iter().position(|p| p.control.is_out());
        let moved = chart.moved.expect("it drifts");
        assert_eq!(Some(moved.first_out), out);
        assert_eq!(moved.last_good, Some(3), "{:?}", chart.points);
    }

    /// A shift of 1.5 standard deviations after 40 quiet readings: found by the average in 5 to 6 readings if all were known
    /// (average run lengths of an EWMA); the baseline is not, so about 9.
    #[test]
    fn a_shift_is_found_soon() {
        let mut normal = Normal(7);
        let n_runs = 400;
        let mut delays = 0;
        let mut n_found = 0;
        for _ in 0..n_runs {
            let quiet = (0..40).map(|t| reading(normal.next(), 1.0, 0.0, t / 5));
            let mut readings: Vec<_> = quiet.collect();
            if control(&readings).moved.is_some() {
                continue;
            }
            for delay in 1..=60 {
                readings.push(reading(1.5 + normal.next(), 1.0, 0.0, 9));
                if control(&readings).moved.is_some() {
                    delays += delay;
                    n_found += 1;
                    break;
                }
            }
        }
        assert!(n_found > n_runs * 9 / 10, "{n_found}");
        let mean = f64::from(delays) / f64::from(n_found);
        assert!(4.0 < mean && mean < 11.0, "{mean} readings");
    }

    /// Readings until a false alarm, on average; a run ends after 3000.
    fn mean_run(normal: &mut Normal, shared: f64, day_of: fn(i64) -> i64) -> f64 {
        let n_runs = 300;
        let mut sum = 0;
        for _ in 0..n_runs {
            let (error, mut yardstick) = (shared * normal.next(), Yardstick::stated());
            let (mut trend, mut quiet, mut is_baseline) = (Trend::default(), Vec::new(), false);
            for t in 0..3000 {
                sum += 1;
                let taken = reading(error + normal.next(), 1.0, shared, day_of(t));
                let (point, next) = yardstick.place(&taken, trend);
                trend = next;
                if point.control.is_out() {
                    break;
                }
                if !is_baseline {
                    quiet.push(taken);
                    if let Some(baseline) = Yardstick::of(&quiet) {
                        (yardstick, trend, is_baseline) = (baseline, Trend::default(), true);
                    }
                }
            }
        }
        f64::from(sum) / f64::from(n_runs)
    }

    /// Two charts at once, of 370 and 500 readings between false alarms each: 200 to 300 together, stated or learned.
    #[test]
    fn false_alarms_stay_rare() {
        let mut normal = Normal(20_260_503);
        let stated = mean_run(&mut normal, 0.0, |_| 1);
        assert!(180.0 < stated && stated < 320.0, "stated: {stated}");
        let learned = mean_run(&mut normal, 0.0, |t| t / 5);
        assert!(150.0 < learned, "learned: {learned}");
        // The error that all readings share is not taken for a drift.
        let shared = mean_run(&mut normal, 3.0, |t| t / 5);
        assert!(150.0 < shared, "with a shared error: {shared}");
    }

    #[test]
    fn a_baseline_needs_twenty_readings_of_three_days() {
        let until = |days: i64, n: i64| {
            let readings: Vec<_> = (0..n)
                .map(|t| reading(if t % 2 == 0 { 0.4 } else { -0.2 }, 1.0, 2.0, t % days))
                .collect();
            control(&readings).baseline_until
        };
        assert_eq!(until(2, 30), None);
        assert_eq!(until(3, 19), None);
        assert_eq!(until(3, 30), Some(20));
    }

    #[test]
    fn readings_that_round_alike_do_not_make_the_next_division_an_alarm() {
        let mut readings: Vec<_> = (0..25).map(|t| reading(0.0, 1.0, 0.0, t)).collect();
        readings.push(reading(1.2, 1.0, 0.0, 26));
        let last = control(&readings).points.pop().expect("a point");
        assert!(!last.control.is_out(), "{last:?}");
        let none = control(&[reading(0.0, 0.0, 0.0, 1), reading(1.0, 0.0, 0.0, 1)]);
        assert!(none.points.iter().all(|p| p.score.is_finite()), "{none:?}");
    }
}
