//! Numbers for scripts: at most twelve significant digits, the shortest form, ASCII minus.

use std::io::Write;

/// Significant digits written.
const DIGITS: i32 = 12;
const POWERS: [f64; 23] = [
    1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15, 1e16,
    1e17, 1e18, 1e19, 1e20, 1e21, 1e22,
];

/// Appends the number: `220000`, `-0.0314`, `5.1e-9`; nothing if it is not finite. Plain from 1e-6 up to 1e15, with an
/// exponent beyond.
pub(super) fn append(value: f64, to: &mut Vec<u8>) {
    if value == 0.0 {
        to.push(b'0');
        return;
    }
    if !value.is_finite() {
        return;
    }
    if value < 0.0 {
        to.push(b'-');
    }
    let magnitude = value.abs();
    if (1e-6..1e15).contains(&magnitude) {
        append_plain(magnitude, to);
    } else {
        append_with_exponent(magnitude, to);
    }
}

/// Returns the number rounded to twelve significant digits: twelve figures over or times an exact power of ten, which is
/// the nearest double to the decimal; beyond the exact powers the long way round.
pub(super) fn rounded(value: f64) -> f64 {
    let magnitude = value.abs();
    if !(1e-6..1e15).contains(&magnitude) {
        return format!("{value:.11e}").parse().unwrap_or(value);
    }
    let power = DIGITS - 1 - floor_log10(magnitude);
    let figures = scaled(magnitude, power);
    let at = |n: i32| {
        usize::try_from(n)
            .ok()
            .and_then(|n| POWERS.get(n).copied())
            .unwrap_or(1.0)
    };
    let nearest = if power >= 0 {
        figures / at(power)
    } else {
        figures * at(-power)
    };
    nearest.copysign(value)
}

/// One product or quotient with an exact power of ten: off by less than 2e-16 relative, so that only ties in the thirteenth
/// digit could come out one unit away from the exact rounding.
fn append_plain(magnitude: f64, to: &mut Vec<u8>) {
    let mut exponent = floor_log10(magnitude);
    let mut digits = scaled(magnitude, DIGITS - 1 - exponent);
    if digits >= 1e12 {
        exponent += 1;
        digits = scaled(magnitude, DIGITS - 1 - exponent);
    }
    #[expect(
        clippy::cast_possible_truncation,
        clippy::cast_sign_loss,
        reason = "rounded, between 1e11 and 1e12"
    )]
    let mut digits = digits as u64;
    let mut last = exponent - (DIGITS - 1);
    while digits.is_multiple_of(10) && digits > 0 {
        digits /= 10;
        last += 1;
    }
    let mut text = [b'0'; 20];
    let mut start = text.len();
    while digits > 0 {
        start -= 1;
        let digit = (digits % 10) as u8;
        if let Some(place) = text.get_mut(start) {
            *place = b'0' + digit;
        }
        digits /= 10;
    }
    let text = text.get(start..).unwrap_or_default();
    let n_decimals = usize::try_from(-last).unwrap_or(0);
    if n_decimals == 0 {
        to.extend_from_slice(text);
        to.extend((0..last).map(|_| b'0'));
    } else if text.len() > n_decimals {
        let (whole, decimals) = text.split_at(text.len() - n_decimals);
        to.extend_from_slice(whole);
        to.push(b'.');
        to.extend_from_slice(decimals);
    } else {
        to.extend_from_slice(b"0.");
        to.extend((text.len()..n_decimals).map(|_| b'0'));
        to.extend_from_slice(text);
    }
}

fn append_with_exponent(magnitude: f64, to: &mut Vec<u8>) {
    let text = format!("{magnitude:.11e}");
    let (mantissa, exponent) = text.split_once('e').unwrap_or((&text, "0"));
    let mantissa = mantissa.trim_end_matches('0').trim_end_matches('.');
    // Writing to a Vec cannot fail.
    let _ = write!(to, "{mantissa}e{exponent}");
}

fn floor_log10(magnitude: f64) -> i32 {
    #[expect(clippy::cast_possible_truncation, reason = "between -6 and 15")]
    let guess = magnitude.log10().floor() as i32;
    guess
}

/// The magnitude times a power of ten, rounded.
fn scaled(magnitude: f64, power: i32) -> f64 {
    let at = |n: i32| {
        usize::try_from(n)
            .ok()
            .and_then(|n| POWERS.get(n).copied())
            .unwrap_or(1.0)
    };
    let exact = if power >= 0 {
        magnitude * at(power)
    } else {
        magnitude / at(-power)
    };
    exact.round()
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[track_caller]
    fn check(value: f64, expected: &str) {
        let mut text = Vec::new();
        append(value, &mut text);
        assert_eq!(
            String::from_utf8_lossy(&text),
            expected,
            "writing {value:e}"
        );
    }

    #[test]
    fn numbers_are_as_short_as_they_can_be() {
        check(220_000.0, "220000");
        check(0.95, "0.95");
        check(-3.25, "-3.25");
        check(0.1 + 0.2, "0.3");
        check(911_599.501_999_999_9, "911599.502");
        check(-0.0, "0");
        check(1.0, "1");
        check(0.000_031_4, "0.0000314");
        check(999_999_999_999.6, "1000000000000");
        check(1e14, "100000000000000");
        check(5.18e-9, "5.18e-9");
        check(1e300, "1e300");
        check(f64::NAN, "");
    }

    proptest! {
        #[test]
        fn what_is_written_reads_back_to_twelve_digits(mantissa in -10.0..10.0f64, exponent in -30..30i32) {
            let value = mantissa * 10f64.powi(exponent);
            let mut text = Vec::new();
            append(value, &mut text);
            let back: f64 = String::from_utf8_lossy(&text).parse().expect("a number");
            prop_assert!((back - value).abs() <= 5.1e-12 * value.abs(), "{value:e} became {back:e}");
            prop_assert!((rounded(value) - value).abs() <= 5.1e-12 * value.abs());
            let figures = format!("{:e}", rounded(value));
            let n_figures = figures.split('e').next().map_or(0, |m| m.bytes().filter(u8::is_ascii_digit).count());
            prop_assert!(n_figures <= 12, "{value:e} has too many figures: {figures}");
        }
    }
}
