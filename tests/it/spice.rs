//! Live against a general-purpose circuit simulator, where `ngspice` is installed; elsewhere this says 'skipped'.
//!
//! Real topologies, none of the formulas: the part and the reference as resistor and capacitor in series, the follower as an
//! integrator with unity feedback, the difference amplifier as a source of gain 1e9 among its four resistors.

use std::f64::consts::TAU;
use std::fmt::Write as _;
use std::io::Write as _;
use std::process::{Command, Stdio};

use nulltray::meter::{Cut, DialReading, Edge, Meter, Null, Repeats, Seen, measure, null};

use crate::truth::{Components, Random, Wiper, part};

const N_CASES_A_DRIVE: usize = 90;

/// Of profiles made by [`Components`]: hertz, volt peak, loss of the reference, gain-bandwidth in hertz.
const FREQUENCY: f64 = 1370.0;
const AMPLITUDE: f64 = 3.7;
const REFERENCE_LOSS: f64 = 0.0008;
const GAIN_BANDWIDTH: f64 = 2e6;

/// How the dial leg is loaded, for the netlist.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Drive {
    Buffered,
    Divider,
    Inverting,
}

struct Case {
    components: Components,
    /// Ohm, of the four resistors of the difference amplifier.
    difference: f64,
    position: usize,
    capacitance: f64,
    loss: f64,
    found: Null,
    /// Dial readings at which the simulator is asked.
    places: Vec<f64>,
}

fn case(drive: Drive, random: &mut Random) -> Case {
    let mut components = Components::linear();
    let difference = 100e3 * 10f64.powf(random.unit());
    let spread = |random: &mut Random| 2f64.powf(random.limits());
    components.drive = match drive {
        Drive::Buffered => "drive = \"buffered\"".to_owned(),
        Drive::Divider => format!("drive = \"divider\"\nresistance = {difference:?}"),
        Drive::Inverting => format!("drive = \"inverting\"\nresistance = {difference:?}"),
    };
    for resistor in &mut components.resistors {
        *resistor *= spread(random);
    }
    components.reference *= spread(random);
    components.stray *= spread(random);
    components.threshold *= spread(random);
    let total = 8.2e3 * spread(random);
    components.dial = Wiper::Linear {
        total,
        end: 33.0 * spread(random),
        tolerance: 0.0,
    };
    let position = random.below(4);
    // Anywhere on the dial, both stops included and a little beyond.
    let place = 0.005 + 1.05 * random.unit();
    let capacitance = place * total * components.reference / components.resistors[position];
    let loss = if random.unit() < 0.5 {
        0.0
    } else {
        0.03 * random.unit()
    };
    let meter = components.meter();
    let switch = meter.switches().nth(position).expect("a switch");
    let found = null(&meter, switch, &part(capacitance, loss, 0.0));
    let balance = found.balance.get();
    let mut places = vec![
        balance,
        (balance - 0.5).max(0.0),
        (balance + 0.5).min(100.0),
    ];
    if let Some(arc) = found.arc {
        for edge in [arc.from.get(), arc.to.get()] {
            places.extend([edge - 0.01, edge + 0.01].map(|x| x.clamp(0.0, 100.0)));
        }
    }
    Case {
        components,
        difference,
        position,
        capacitance,
        loss,
        found,
        places,
    }
}

impl Case {
    /// The circuit, its nodes marked with the number of the case; every place of the dial has a leg of its own.
    fn netlist(&self, drive: Drive, k: usize) -> String {
        let omega = TAU * FREQUENCY;
        // A resistance of 0 is none that a simulator takes; smaller ones lose digits.
        let series = |loss: f64, c: f64| (loss / (omega * c)).max(1e-4);
        let Wiper::Linear { total, end, .. } = &self.components.dial else {
            panic!("a linear dial")
        };
        let c2 = self.components.reference;
        let mut text = String::new();
        let mut line = |element: String| writeln!(text, "{element}").expect("a string");
        line(format!(
            "Ra{k} in a{k} {:e}",
            self.components.resistors[self.position]
        ));
        line(format!(
            "Rx{k} a{k} x{k} {:e}",
            series(self.loss, self.capacitance)
        ));
        line(format!("Cx{k} x{k} 0 {:e}", self.capacitance));
        line(format!("Cs{k} a{k} 0 {:e}", self.components.stray));
        line(format!("Gf{k} 0 f{k} a{k} v{k} 1"));
        line(format!("Cf{k} f{k} 0 {:e}", 1.0 / (TAU * GAIN_BANDWIDTH)));
        line(format!("Rf{k} f{k} 0 1e12"));
        line(format!("Ef{k} v{k} 0 f{k} 0 1"));
        for (j, place) in self.places.iter().enumerate() {
            let n = format!("{k}_{j}");
            line(format!("Rb{n} in b{n} {:e}", end + total * place / 100.0));
            line(format!("Ry{n} b{n} y{n} {:e}", series(REFERENCE_LOSS, c2)));
            line(format!("Cy{n} y{n} 0 {c2:e}"));
            let rd = self.difference;
            let (plus, minus) = match drive {
                Drive::Buffered => {
                    line(format!("Eb{n} w{n} 0 b{n} 0 1"));
                    (format!("v{k}"), format!("w{n}"))
                }
                Drive::Divider => (format!("b{n}"), format!("v{k}")),
                Drive::Inverting => (format!("v{k}"), format!("b{n}")),
            };
            line(format!("Rp{n} {plus} p{n} {rd:e}"));
            line(format!("Rq{n} p{n} 0 {rd:e}"));
            line(format!("Rm{n} {minus} m{n} {rd:e}"));
            line(format!("Rn{n} m{n} d{n} {rd:e}"));
            line(format!("Eo{n} d{n} 0 p{n} m{n} 1e9"));
        }
        text
    }

    #[track_caller]
    fn check(&self, simulated: &[f64], told: &str) {
        let threshold = self.components.threshold;
        let residual = self.found.residual.get();
        assert!(
            (simulated[0] - residual).abs() < 2e-5 + 1e-4 * residual,
            "{told}: {} at balance, not {residual}",
            simulated[0]
        );
        assert!(
            simulated[0] <= simulated[1] + 1e-9 && simulated[0] <= simulated[2] + 1e-9,
            "{told}: darker beside the balance"
        );
        let Some(arc) = self.found.arc else {
            assert!(
                threshold < simulated[0] + 1e-9,
                "{told}: dark at {}",
                simulated[0]
            );
            return;
        };
        let [outside_low, inside_low, inside_high, outside_high] = simulated[3..] else {
            panic!("{told}: four places")
        };
        // An arc narrower than the steps around its edges has them on the wrong side.
        if arc.to.get() - arc.from.get() < 0.03 {
            return;
        }
        assert!(
            inside_low < threshold && inside_high < threshold,
            "{told}: lit inside the arc"
        );
        for (edge, outside) in [(arc.from, outside_low), (arc.to, outside_high)] {
            let is_stop = edge.get() <= 0.0 || 100.0 <= edge.get();
            assert_eq!(
                threshold < outside,
                !is_stop,
                "{told}: {outside} beside the edge {edge}"
            );
        }
    }

    /// What the person would write down gives the part back.
    #[track_caller]
    fn check_back(&self, meter: &Meter, told: &str) {
        let Some(arc) = self
            .found
            .arc
            .filter(|arc| arc.cut != Cut::Both && arc.to.get() - arc.from.get() > 0.1)
        else {
            return;
        };
        let switch = meter.switches().nth(self.position).expect("a switch");
        let at = |x| Repeats::once(DialReading::new(x));
        let middle = Seen::Middle(at(0.5 * (arc.from.get() + arc.to.get())));
        let edges = Seen::Edges {
            from: Edge::At(at(arc.from.get())),
            to: Edge::At(at(arc.to.get())),
        };
        let value = |seen| {
            let found =
                measure(meter, switch, seen, &part(self.capacitance, self.loss, 0.0)).estimate();
            found.expect("a value").capacitance.get() / self.capacitance - 1.0
        };
        let (one, both) = (value(middle), value(edges));
        assert!(one.abs() < 1e-6, "{told}: {one:e} by the middle");
        // The foot of the chord is right to second order in the loss.
        let second_order = 2.0 * (self.loss + 0.02).powi(2);
        assert!(both.abs() < second_order, "{told}: {both:e} by both edges");
    }
}

/// Differences by case and place; `None` where there is no simulator.
fn simulate(cases: &[Case], drive: Drive) -> Option<Vec<Vec<f64>>> {
    let mut text = format!("* three drives\nV1 in 0 DC 0 AC {AMPLITUDE}\n");
    for (k, case) in cases.iter().enumerate() {
        text.push_str(&case.netlist(drive, k));
    }
    write!(
        text,
        ".control\nset numdgt=14\nac lin 1 {FREQUENCY} {FREQUENCY}\n"
    )
    .expect("a string");
    for (k, case) in cases.iter().enumerate() {
        for j in 0..case.places.len() {
            writeln!(text, "print vm(d{k}_{j})").expect("a string");
        }
    }
    text.push_str(".endc\n.end\n");
    let mut simulator = Command::new("ngspice")
        .args(["-b", "-n", "/dev/stdin"])
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::null())
        .spawn()
        .ok()?;
    let mut input = simulator.stdin.take().expect("a pipe");
    // A thread of its own writes, so that neither side waits for the other with a full pipe.
    let writer = std::thread::spawn(move || input.write_all(text.as_bytes()));
    let output = simulator.wait_with_output().expect("the simulator ends");
    writer
        .join()
        .expect("no panic")
        .expect("the netlist is taken");
    let shown = String::from_utf8_lossy(&output.stdout);
    let mut found: Vec<Vec<f64>> = cases
        .iter()
        .map(|case| vec![f64::NAN; case.places.len()])
        .collect();
    for line in shown.lines() {
        let Some((place, value)) = line
            .strip_prefix("vm(d")
            .and_then(|rest| rest.split_once(") = "))
        else {
            continue;
        };
        let (k, j) = place.split_once('_').expect("case and place");
        let (k, j): (usize, usize) = (k.parse().expect("a case"), j.parse().expect("a place"));
        found[k][j] = value.trim().parse().expect("a voltage");
    }
    Some(found)
}

#[test]
fn random_parts_on_random_meters_look_alike_to_the_simulator() {
    let mut random = Random(17_450_101);
    for drive in [Drive::Buffered, Drive::Divider, Drive::Inverting] {
        let cases: Vec<Case> = (0..N_CASES_A_DRIVE)
            .map(|_| case(drive, &mut random))
            .collect();
        let n_cut = cases
            .iter()
            .filter(|c| c.found.arc.is_some_and(|arc| arc.cut != Cut::Neither))
            .count();
        assert!(n_cut >= 5, "clipped arcs are among them: {n_cut}");
        let Some(simulated) = simulate(&cases, drive) else {
            // Past the test harness, which swallows what is printed.
            writeln!(std::io::stderr(), "skipped: ngspice is not installed")
                .expect("an error stream");
            return;
        };
        for (k, (case, simulated)) in cases.iter().zip(&simulated).enumerate() {
            let told = format!(
                "case {k}, {:?}, {:e} F, loss {}",
                case.components.drive, case.capacitance, case.loss
            );
            assert!(
                simulated.iter().all(|v| v.is_finite()),
                "{told}: {simulated:?}"
            );
            case.check(simulated, &told);
            case.check_back(&case.components.meter(), &told);
        }
    }
}
