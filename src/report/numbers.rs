//! Numbers → text: prefixes, significant digits, and intervals whose ends are rounded outwards.

use crate::results::Guaranteed;
use crate::units::ends;

/// Digits behind the point that are never exceeded: f64 carries about 16 and the prefix takes up to three.
const N_DECIMALS_MAX: usize = 12;

/// Decimals that leave `n_digits` significant digits of `scaled`.
pub(super) fn decimals_for(scaled: f64, n_digits: usize) -> usize {
    if !scaled.is_finite() || scaled == 0.0 {
        return n_digits.saturating_sub(1).min(N_DECIMALS_MAX);
    }
    let before = scaled.abs().log10().floor() as i64 + 1;
    (n_digits as i64 - before).clamp(0, N_DECIMALS_MAX as i64) as usize
}

/// A number with a true minus sign and no "−0".
pub(super) fn signed(value: f64, decimals: usize) -> String {
    let text = format!("{:.decimals$}", value.abs());
    if value < 0.0 && text.bytes().any(|b| (b'1'..=b'9').contains(&b)) {
        format!("−{text}")
    } else {
        text
    }
}

/// "12.5 %" of a fraction, with `n_digits` significant digits and no trailing zeros behind the point.
pub(super) fn percent(fraction: f64, n_digits: usize) -> String {
    if !fraction.is_finite() {
        return "not a number %".to_string();
    }
    let scaled = 100.0 * fraction;
    let mut text = signed(scaled, decimals_for(scaled, n_digits));
    if text.contains('.') {
        text.truncate(text.trim_end_matches('0').trim_end_matches('.').len());
    }
    format!("{text} %")
}

/// Digits of a count in groups of three: "4 737".
pub(super) fn grouped(count: usize) -> String {
    let digits = count.to_string();
    let mut text = String::new();
    for (i, digit) in digits.chars().enumerate() {
        if 0 < i && (digits.len() - i).is_multiple_of(3) {
            text.push(' ');
        }
        text.push(digit);
    }
    text
}

/// Millimetres of a length [m], four significant digits at most and no trailing zeros: "0.3", "12.75".
pub(super) fn millimeters(length: f64) -> String {
    let scaled = 1e3 * length;
    let mut text = signed(scaled, decimals_for(scaled, 5).min(4));
    if text.contains('.') {
        text.truncate(text.trim_end_matches('0').trim_end_matches('.').len());
    }
    text
}

/// (high − low)/|value|, the width that the sheet's `interval` speaks of.
pub(super) fn relative_width(interval: &Guaranteed) -> f64 {
    (interval.high - interval.low) / interval.value.abs()
}

/// An interval as text, all three numbers in one scale.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct IntervalText {
    /// Value with unit.
    pub value: String,
    /// Lower end, rounded down.
    pub low: String,
    /// Upper end, rounded up.
    pub high: String,
}

/// Prints value and ends in one unit, the ends rounded outwards: the printed interval contains the computed one.
pub(super) fn interval(quantity: &Guaranteed, unit: &str) -> IntervalText {
    let (low, high, unit) = ends(quantity.low, quantity.high, unit);
    let n_decimals = low.split_once('.').map_or(0, |(_, behind)| behind.len());
    // The unit's power of ten, read back from the end that `ends` scaled: 1e-9 of relative slack is ample for a power.
    let scale = [(quantity.high, &high), (quantity.low, &low)]
        .into_iter()
        .filter_map(|(value, text)| {
            text.parse::<f64>().ok().filter(|t| *t != 0.0 && value != 0.0).map(|t| t / value)
        })
        .map(|ratio| 10f64.powi(ratio.log10().round() as i32))
        .next()
        .unwrap_or(1.0);
    IntervalText {
        value: format!("{} {unit}", signed(scale * quantity.value, n_decimals)),
        low,
        high,
    }
}

/// `text` broken at spaces into lines of at most `width` columns; a word that is longer stands alone.
///
/// A no-break space holds its neighbours together and is printed as a space.
pub(super) fn wrap(text: &str, width: usize) -> Vec<String> {
    let mut lines: Vec<String> = vec![];
    for word in text.split([' ', '\n', '\t', '\r']).filter(|w| !w.is_empty()) {
        match lines.last_mut() {
            Some(line) if line.chars().count() + 1 + word.chars().count() <= width => {
                line.push(' ');
                line.push_str(word);
            }
            _ => lines.push(word.to_string()),
        }
    }
    lines.iter().map(|line| line.replace('\u{a0}', " ")).collect()
}

/// `text` cut to `n_max` columns, with an ellipsis where something is missing.
pub(super) fn clip(text: &str, n_max: usize) -> String {
    let clean: String = text.chars().map(|c| if c.is_control() { ' ' } else { c }).collect();
    if clean.chars().count() <= n_max {
        return clean;
    }
    let mut short: String = clean.chars().take(n_max.saturating_sub(1)).collect();
    short.push('…');
    short
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn interval_ends_are_rounded_outwards() {
        let text =
            interval(&Guaranteed { value: 700.6158e-6, low: 700.5301e-6, high: 700.6899e-6 }, "H");
        assert_eq!(text.value, "700.62 µH");
        assert_eq!((text.low.as_str(), text.high.as_str()), ("700.53", "700.69"));
        let tight =
            interval(&Guaranteed { value: 1.0, low: 0.999_999_94, high: 1.000_000_06 }, "H");
        let [low, high] = [tight.low, tight.high].map(|t| t.parse::<f64>().unwrap());
        assert!(low <= 0.999_999_94 && 1.000_000_06 <= high, "{low} {high}");
    }

    #[test]
    fn counts_are_grouped_by_three() {
        assert_eq!(
            ["4 737", "32 452", "7", "1 000 000"],
            [4737, 32452, 7, 1_000_000].map(grouped)[..]
        );
    }

    #[test]
    fn percent_drops_trailing_zeros() {
        assert_eq!(percent(0.03, 3), "3 %");
        assert_eq!(percent(-0.001_23, 2), "−0.12 %");
        assert_eq!(percent(0.0, 2), "0 %");
    }

    #[test]
    fn wrapping_keeps_every_word_and_the_width() {
        let text = "the interval is wider than wanted and says so in full";
        let lines = wrap(text, 20);
        assert!(lines.iter().all(|l| l.chars().count() <= 20));
        assert_eq!(lines.join(" "), text);
    }
}
