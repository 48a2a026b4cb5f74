//! Numbers → text: prefixes, significant digits, and intervals whose ends are rounded outwards.

use crate::results::Guaranteed;

/// One power of ten that a group of values is printed with.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Scale {
    pub prefix: &'static str,
    pub exponent: i32,
}

/// Prefixes of the SI from pico to tera.
const PREFIXES: [(&str, i32); 9] =
    [("p", -12), ("n", -9), ("µ", -6), ("m", -3), ("", 0), ("k", 3), ("M", 6), ("G", 9), ("T", 12)];

/// Digits behind the point that are never exceeded: f64 carries about 16 and the prefix takes up to three.
const N_DECIMALS_MAX: usize = 12;

impl Scale {
    /// The prefix that puts `value` into 1 … 1000; none for zero and for what is not finite.
    pub fn of(value: f64) -> Scale {
        let magnitude = value.abs();
        let mut best = PREFIXES[4];
        if magnitude.is_finite() && 0.0 < magnitude {
            best = PREFIXES[0];
            for candidate in PREFIXES {
                if 10f64.powi(candidate.1) <= magnitude * (1.0 + 1e-12) {
                    best = candidate;
                }
            }
        }
        Scale { prefix: best.0, exponent: best.1 }
    }

    /// `value` in this scale.
    pub fn apply(self, value: f64) -> f64 {
        value / 10f64.powi(self.exponent)
    }
}

/// Decimals that leave `n_digits` significant digits of `scaled`.
pub(super) fn decimals_for(scaled: f64, n_digits: usize) -> usize {
    if !scaled.is_finite() || scaled == 0.0 {
        return n_digits.saturating_sub(1).min(N_DECIMALS_MAX);
    }
    let before = scaled.abs().log10().floor() as i64 + 1;
    (n_digits as i64 - before).clamp(0, N_DECIMALS_MAX as i64) as usize
}

/// "397.2 nH": a value with its prefix and `n_digits` significant digits.
pub(super) fn engineering(value: f64, unit: &str, n_digits: usize) -> String {
    if !value.is_finite() {
        return format!("not a number {unit}");
    }
    let scale = Scale::of(value);
    let scaled = scale.apply(value);
    format!("{} {}{unit}", signed(scaled, decimals_for(scaled, n_digits)), scale.prefix)
}

/// A number with a true minus sign and no "−0".
pub(super) fn signed(value: f64, decimals: usize) -> String {
    let text = format!("{:.decimals$}", value.abs());
    if value < 0.0 && text.bytes().any(|b| (b'1'..=b'9').contains(&b)) { format!("−{text}") } else { text }
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
        if 0 < i && (digits.len() - i) % 3 == 0 {
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

/// Prints value and ends with as many decimals as the width deserves (two of its digits), ends rounded outwards:
/// the printed interval always contains the computed one.
pub(super) fn interval(quantity: &Guaranteed, unit: &str) -> IntervalText {
    let scale = Scale::of(quantity.value);
    let [value, low, high] = [quantity.value, quantity.low, quantity.high].map(|v| scale.apply(v));
    let width = high - low;
    let decimals = if width.is_finite() && 0.0 < width {
        decimals_for(width, 2).clamp(decimals_for(value, 4), N_DECIMALS_MAX.min(decimals_for(value, 12)))
    } else {
        decimals_for(value, 10)
    };
    let step = 10f64.powi(decimals as i32);
    IntervalText {
        value: format!("{} {}{unit}", signed(value, decimals), scale.prefix),
        low: signed((low * step).floor() / step, decimals),
        high: signed((high * step).ceil() / step, decimals),
    }
}

/// `text` broken at spaces into lines of at most `width` columns; a word that is longer stands alone.
pub(super) fn wrap(text: &str, width: usize) -> Vec<String> {
    let mut lines: Vec<String> = vec![];
    for word in text.split_whitespace() {
        match lines.last_mut() {
            Some(line) if line.chars().count() + 1 + word.chars().count() <= width => {
                line.push(' ');
                line.push_str(word);
            }
            _ => lines.push(word.to_string()),
        }
    }
    lines
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
    fn prefixes_put_values_between_one_and_a_thousand() {
        assert_eq!(engineering(397.2e-9, "H", 4), "397.2 nH");
        assert_eq!(engineering(1e-3, "H", 3), "1.00 mH");
        assert_eq!(engineering(-0.0021, "T", 2), "−2.1 mT");
        assert_eq!(engineering(0.0, "N", 3), "0.00 N");
        assert_eq!(engineering(2.5178e6, "/H", 4), "2.518 M/H");
        assert_eq!(engineering(f64::NAN, "T", 3), "not a number T");
    }

    #[test]
    fn interval_ends_are_rounded_outwards() {
        let text = interval(&Guaranteed { value: 700.6158e-6, low: 700.5301e-6, high: 700.6899e-6 }, "H");
        assert_eq!(text.value, "700.62 µH");
        assert_eq!((text.low.as_str(), text.high.as_str()), ("700.53", "700.69"));
        let tight = interval(&Guaranteed { value: 1.0, low: 0.999_999_94, high: 1.000_000_06 }, "H");
        let [low, high] = [tight.low, tight.high].map(|t| t.parse::<f64>().unwrap());
        assert!(low <= 0.999_999_94 && 1.000_000_06 <= high, "{low} {high}");
    }

    #[test]
    fn counts_are_grouped_by_three() {
        assert_eq!(["4 737", "32 452", "7", "1 000 000"], [4737, 32452, 7, 1_000_000].map(grouped)[..]);
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
