//! How long a marking takes to decode. Each answer is asserted before it is timed; the figures are ratios within one run.

use divan::{Bencher, black_box};
use nulltray::marking::decode;

fn main() {
    divan::main();
}

/// Ordinary markings with the capacitance of their best reading, and a text at the bounds.
const MARKINGS: [(&str, &str); 6] = [
    ("224J", "220 nF"),
    ("2A104J", "100 nF"),
    ("104K 50V", "100 nF"),
    ("1n5J1k6", "1.5 nF"),
    ("100", "10 pF"),
    ("472M Y2 250~ X1 400~ 40/085/21", "4.7 nF"),
];

#[divan::bench(args = MARKINGS.map(|(marking, _)| marking))]
fn marking(bencher: Bencher<'_, '_>, marking: &str) {
    let expected = MARKINGS
        .iter()
        .find(|row| row.0 == marking)
        .map(|row| row.1);
    let best = decode(marking, None)
        .best()
        .map(|best| best.capacitance.to_string());
    assert_eq!(best.as_deref(), expected, "decoding {marking}");
    bencher.bench(|| decode(black_box(marking), None));
}

#[divan::bench]
fn text_at_the_bounds(bencher: Bencher<'_, '_>) {
    let text = "104K 2A 47 63 1k6 ".repeat(600);
    let rest = decode(&text, None).unexplained.concat().len();
    assert!(rest > 10_000, "{rest} bytes stand behind the bound");
    bencher.bench(|| decode(black_box(&text), None));
}
