//! How long a marking takes to decode. Each answer is asserted before it is timed; the figures are ratios within one run.

use divan::{Bencher, black_box};
use nulltray::marking::decode;

fn main() {
    divan::main();
}

/// Ordinary markings with the capacitance of their best reading, and longer ones.
const MARKINGS: [(&str, &str); 9] = [
    ("224J", "220 nF"),
    ("2A104J", "100 nF"),
    ("473K100", "47 nF"),
    ("0.47 K 250", "470 nF"),
    ("104K 50V", "100 nF"),
    ("1n5J1k6", "1.5 nF"),
    ("100", "10 pF"),
    ("472M Y2 250~ X1 400~ 40/085/21", "4.7 nF"),
    ("brown black yellow white red", "100 nF"),
];

#[divan::bench(args = MARKINGS.map(|(marking, _)| marking))]
fn marking(bencher: Bencher<'_, '_>, marking: &str) {
    let expected = MARKINGS
        .iter()
        .find(|row| row.0 == marking)
        .map(|row| row.1);
    assert_eq!(best(marking).as_deref(), expected, "decoding {marking}");
    bencher.bench(|| decode(black_box(marking), None));
}

/// Growth with tokens: the same marking with more and more text behind it.
#[divan::bench(args = [1, 2, 4, 8, 16])]
fn tokens(bencher: Bencher<'_, '_>, n: usize) {
    let others = ["HX27Q4", "EN132400", "85°C", "3046712"];
    let more = others.iter().cycle().take(n - 1);
    let text = more.fold("224J".to_owned(), |text, token| format!("{text} {token}"));
    assert_eq!(best(&text).as_deref(), Some("220 nF"), "decoding {text}");
    bencher.bench(|| decode(black_box(&text), None));
}

/// Growth with unreadable characters, up to the bound and past it.
#[divan::bench(args = ["224J", "22?J", "2??J", "2A???J", "2???????J"])]
fn unreadable(bencher: Bencher<'_, '_>, text: &str) {
    assert!(decode(text, None).readings.len() < 51, "decoding {text}");
    bencher.bench(|| decode(black_box(text), None));
}

#[divan::bench]
fn text_at_the_bounds(bencher: Bencher<'_, '_>) {
    let text = "104K 2A 47 63 1k6 ".repeat(600);
    let rest = decode(&text, None).unexplained.concat().len();
    assert!(rest > 10_000, "{rest} bytes stand behind the bound");
    bencher.bench(|| decode(black_box(&text), None));
}

fn best(text: &str) -> Option<String> {
    decode(text, None)
        .best()
        .map(|best| best.capacitance.to_string())
}
