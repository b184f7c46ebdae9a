//! Fuzzy find, for everything that can be looked up.

use fuzzy_matcher::FuzzyMatcher;
use fuzzy_matcher::skim::SkimMatcherV2;

/// Returns the indices of the texts that match, best first and otherwise in their order; all of them if nothing is asked
/// for. Each word of `wanted` must match; upper and lower case are alike. A text that has the words as they stand comes
/// before those that have their letters with others between.
pub fn find<T: AsRef<str>>(texts: &[T], wanted: &str) -> Vec<usize> {
    /// More cells than this a text are not worth a table: the matcher then takes its simple way.
    const MOST_CELLS: usize = 20_000;
    /// More than any match of scattered letters scores.
    const WHOLE_WORD: i64 = 10_000;
    let words: Vec<&str> = wanted.split_whitespace().collect();
    if words.is_empty() {
        return (0..texts.len()).collect();
    }
    let matcher = SkimMatcherV2::default()
        .ignore_case()
        .element_limit(MOST_CELLS);
    let mut scored: Vec<(i64, usize)> = texts
        .iter()
        .enumerate()
        .filter_map(|(index, text)| {
            let text = text.as_ref();
            let lower = text.to_lowercase();
            let scores = words.iter().map(|word| {
                let score = matcher.fuzzy_match(text, word)?;
                let as_it_stands = lower.contains(&word.to_lowercase());
                Some(score + if as_it_stands { WHOLE_WORD } else { 0 })
            });
            let sum: Option<i64> = scores.sum();
            sum.map(|score| (score, index))
        })
        .collect();
    scored.sort_by_key(|&(score, index)| (-score, index));
    scored.into_iter().map(|(_, index)| index).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn every_word_must_match_and_the_best_comes_first() {
        let texts = ["tolerance J ±5 %", "tolerance K ±10 %", "voltage 2A 100 V"];
        assert_eq!(find(&texts, ""), [0, 1, 2]);
        assert_eq!(find(&texts, "tol k"), [1]);
        assert_eq!(find(&texts, "100"), [2]);
        assert_eq!(find(&texts, "zzz"), [0usize; 0]);
        assert_eq!(find(&["3 on 4.3", "C 3n3 J"], "3n3"), [1, 0]);
    }

    proptest! {
        #[test]
        fn any_text_can_be_looked_for(text in ".{0,60}", wanted in ".{0,20}") {
            prop_assert!(find(&[text], &wanted).len() <= 1);
        }
    }
}
