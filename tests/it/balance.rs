//! Balance, residual and dark edges against a general-purpose circuit simulator (ngspice 39.3, see tests/data/README.md).

use nulltray::meter::{AssumedLoss, Cut, Meter, Part, Stop, predict};
use nulltray::quantity::Farad;

pub(crate) fn meter(name: &str) -> Meter {
    let path = format!("{}/tests/data/{name}", env!("CARGO_MANIFEST_DIR"));
    let text = std::fs::read_to_string(path).expect("the profile is there");
    match Meter::read(&text) {
        Ok((meter, _)) => meter,
        Err(complaints) => panic!("{name}: {complaints:?}"),
    }
}

pub(crate) fn part(picofarads: f64, loss: f64) -> Part {
    Part {
        capacitance: Farad::from_picofarads(picofarads),
        low: None,
        high: None,
        loss: AssumedLoss {
            value: loss,
            standard_uncertainty: 0.0,
        },
        family: None,
    }
}

#[test]
fn the_closed_forms_agree_with_the_circuit_simulator() {
    let text = include_str!("../data/balance.csv");
    let mut n_rows = 0;
    for line in text.lines().skip(1) {
        let cells: Vec<&str> = line.split(',').collect();
        let number = |i: usize| cells[i].parse::<f64>().ok();
        let meter = meter(&format!("meter-{}.toml", cells[0]));
        let switch = meter.switch_named(cells[1]).expect("switches 1 to 4");
        let found = predict(
            &meter,
            switch,
            &part(number(2).expect("pF"), number(3).expect("loss")),
        );
        let dial = number(4).expect("dial");
        assert!(
            (found.balance.get() - dial).abs() < 0.01,
            "{line}: balance {}",
            found.balance.get()
        );
        let residual = number(5).expect("mV") * 1e-3;
        assert!(
            (found.residual.get() - residual).abs() < 2e-5,
            "{line}: residual {}",
            found.residual
        );
        match (number(6), number(7), found.dark) {
            (Some(from), Some(to), Some(arc)) => {
                assert!(
                    (arc.from.get() - from).abs() < 0.01,
                    "{line}: from {}",
                    arc.from.get()
                );
                assert!(
                    (arc.to.get() - to).abs() < 0.01,
                    "{line}: to {}",
                    arc.to.get()
                );
                let cut_low = from == 0.0;
                assert_eq!(
                    cut_low,
                    matches!(arc.cut, Cut::At(Stop::Low) | Cut::Both),
                    "{line}"
                );
            }
            (None, None, None) => {}
            _ => panic!("{line}: arc {:?}", found.dark),
        }
        n_rows += 1;
    }
    assert_eq!(n_rows, 66, "every row of the table is checked");
}
