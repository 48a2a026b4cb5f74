//! SI → text for people: "412 nH", "0.30 mm", "700.53 µH … 700.68 µH". Knows no locale.

/// Prefixes by power of a thousand, from 10⁻¹⁵ up.
const PREFIXES: [&str; 9] = ["f", "p", "n", "µ", "m", "", "k", "M", "G"];

/// Index of the empty prefix in [`PREFIXES`].
const PLAIN: i32 = 5;

/// How a unit takes prefixes: power of ten per step, and what stands before the prefix.
struct Scale<'a> {
    before: &'a str,
    after: &'a str,
    /// Power of ten of one step: 3 for H, 6 for m², −3 for 1/H.
    step: i32,
}

fn scale_of(unit: &str) -> Scale<'_> {
    if let Some(after) = unit.strip_prefix("1/") {
        return Scale { before: "1/", after, step: -3 };
    }
    let step = match unit {
        "m²" => 6,
        "m³" => 9,
        _ => 3,
    };
    Scale { before: "", after: unit, step }
}

/// The power of ten and the full unit with which `value` reads between 1 and 1000 (10⁶ for m²).
fn choose(value: f64, unit: &str) -> (i32, String) {
    let scale = scale_of(unit);
    let takes_prefix = !matches!(unit, "" | "%" | "°C" | "turns");
    if !takes_prefix || value == 0.0 || !value.is_finite() {
        return (0, unit.to_string());
    }
    let decade = value.abs().log10();
    // A value a hair below a step must not print as 1000 of the smaller unit: 1e-9 of slack.
    let steps = ((decade + 1e-9) / f64::from(scale.step.abs())).floor() as i32;
    let steps = steps * scale.step.signum();
    let index = (PLAIN + steps).clamp(0, PREFIXES.len() as i32 - 1);
    let prefix = PREFIXES[index as usize];
    ((index - PLAIN) * scale.step, format!("{}{prefix}{}", scale.before, scale.after))
}

/// `value` in engineering notation with that many significant digits: `(4.12e-7, "H", 3)` → "412 nH".
///
/// Reluctances take the prefix below the line ("2.50 1/µH"); areas and volumes step by 10⁶ and 10⁹.
/// NaN and infinities print as words.
pub fn engineering(value: f64, unit: &str, significant_digits: usize) -> String {
    let (mut power, mut full_unit) = choose(value, unit);
    let mut digits = significant(shift(value, -power), significant_digits);
    // 999.96 at 4 digits rounds up to 1000.0: then the next prefix says it better.
    let rounded = shift(digits.parse().unwrap_or(value), power);
    let (next_power, next_unit) = choose(rounded, unit);
    if next_power != power {
        (power, full_unit) = (next_power, next_unit);
        digits = significant(shift(value, -power), significant_digits);
    }
    join(&digits, &full_unit)
}

/// A length in millimetres, as drawings have it: `(0.3e-3, 2)` → "0.30 mm".
pub fn millimeters(length: f64, significant_digits: usize) -> String {
    format!("{} mm", significant(shift(length, 3), significant_digits))
}

/// The two ends of an interval in one common unit, with enough digits to tell them apart.
///
/// The last digit is at most a fifth of the width; the low end is rounded down and the high end up,
/// so the printed interval holds whatever the exact one holds.
/// `(397.1312e-9, 397.2063e-9, "H")` → ("397.13", "397.21", "nH").
pub fn ends(low: f64, high: f64, unit: &str) -> (String, String, String) {
    let (power, unit) = choose(if high.abs() > low.abs() { high } else { low }, unit);
    let width = shift(high - low, -power);
    let largest = shift(high.abs().max(low.abs()), -power);
    // 12 significant digits: beyond them the ends are rounding noise of double precision.
    let n_most = 11 - exponent(largest);
    let wanted = if width > 0.0 { -exponent(width / 5.0) } else { n_most };
    let n_decimals = wanted.clamp(0, n_most.max(0)) as usize;
    (toward(low, power, n_decimals, -1.0), toward(high, power, n_decimals, 1.0), unit)
}

/// `value` · 10^−power with `n_decimals`, rounded down (`direction` −1) or up (+1).
fn toward(value: f64, power: i32, n_decimals: usize, direction: f64) -> String {
    let text = format!("{:.n_decimals$}", shift(value, -power));
    let printed = super::decimal(&text, power);
    if !value.is_finite() || direction * (printed - value) >= 0.0 {
        return text;
    }
    let unit_in_last_place = shift(1.0, -(n_decimals as i32));
    let scaled: f64 = text.parse().unwrap_or(value);
    format!("{:.n_decimals$}", scaled + direction * unit_in_last_place)
}

/// A plain number with that many significant digits and no exponent between 1e-4 and 1e7.
pub fn number(value: f64, significant_digits: usize) -> String {
    if value == 0.0 || !value.is_finite() || (1e-4..1e7).contains(&value.abs()) {
        return significant(value, significant_digits);
    }
    format!("{value:.*e}", significant_digits.saturating_sub(1))
}

/// A ratio as per cent: `(0.0123, 2)` → "1.2 %".
pub fn percent(ratio: f64, significant_digits: usize) -> String {
    format!("{} %", number(100.0 * ratio, significant_digits))
}

/// Fixed-point text with that many significant digits (never fewer than the integer part has).
fn significant(value: f64, n_digits: usize) -> String {
    if value == 0.0 {
        return "0".into();
    }
    if value.is_nan() {
        return "not a number".into();
    }
    if value.is_infinite() {
        return if value > 0.0 { "infinite".into() } else { "-infinite".into() };
    }
    let n_decimals = (n_digits as i32 - 1 - exponent(value)).max(0) as usize;
    let text = format!("{value:.n_decimals$}");
    // Rounding may have added a digit: 9.996 at 3 digits is 10.0, not 10.00.
    let rounded: f64 = text.parse().unwrap_or(value);
    let n_decimals = (n_digits as i32 - 1 - exponent(rounded)).max(0) as usize;
    format!("{value:.n_decimals$}")
}

/// Decimal exponent of a value other than 0, by its own printing (no logarithm to round).
fn exponent(value: f64) -> i32 {
    let text = format!("{value:e}");
    text.split_once('e').and_then(|(_, e)| e.parse().ok()).unwrap_or(0)
}

/// value · 10^power, one rounding.
fn shift(value: f64, power: i32) -> f64 {
    if power < 0 { value / 10f64.powi(-power) } else { value * 10f64.powi(power) }
}

fn join(digits: &str, unit: &str) -> String {
    if unit.is_empty() { digits.to_string() } else { format!("{digits} {unit}") }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn prints_engineering_units() {
        for (value, unit, digits, text) in [
            (412e-9, "H", 3, "412 nH"),
            (397.2e-9, "H", 4, "397.2 nH"),
            (0.3e-3, "m", 2, "300 µm"),
            (1.8, "A", 2, "1.8 A"),
            (-0.0123, "T", 3, "-12.3 mT"),
            (1e-9, "H", 3, "1.00 nH"),
            (1e-3, "m", 3, "1.00 mm"),
            (1000.0, "A", 3, "1.00 kA"),
            (0.0, "H", 3, "0 H"),
            (999.96e-9, "H", 4, "1.000 µH"),
            (999.6e-3, "m", 3, "1.00 m"),
            (999.96, "A/m", 4, "1.000 kA/m"),
            (2.5e6, "1/H", 3, "2.50 1/µH"),
            (66e-6, "m²", 3, "66.0 mm²"),
            (1.5e-7, "m³", 3, "150 mm³"),
            (42.0, "", 3, "42.0"),
            (12345.0, "H", 3, "12.3 kH"),
            (f64::NAN, "H", 3, "not a number H"),
        ] {
            assert_eq!(engineering(value, unit, digits), text);
        }
    }

    #[test]
    fn prints_ends_that_can_be_told_apart() {
        let (low, high, unit) = ends(397.1312e-9, 397.2063e-9, "H");
        assert_eq!((low.as_str(), high.as_str(), unit.as_str()), ("397.13", "397.21", "nH"));
        let (low, high, unit) = ends(700.615e-6, 700.6161e-6, "H");
        assert_eq!((low.as_str(), high.as_str(), unit.as_str()), ("700.6150", "700.6161", "µH"));
        let (low, high, _) = ends(0.9999e-3, 1.0001e-3, "H");
        assert_eq!((low.as_str(), high.as_str()), ("0.99990", "1.00010"));
        let (low, high, _) = ends(1.0, 1.0, "H");
        assert_eq!((low.as_str(), high.as_str()), ("1.00000000000", "1.00000000000"));
    }

    #[test]
    fn printed_ends_never_lie_inside_the_interval() {
        // A fixed linear congruence gives the same 2000 intervals in every run.
        let mut state = 12345_u64;
        let mut next = || {
            state = state.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
            (state >> 11) as f64 / (1_u64 << 53) as f64
        };
        for _ in 0..2000 {
            let low = (next() - 0.3) * 10f64.powf(-9.0 * next());
            let high = low + low.abs() * 10f64.powf(-8.0 * next());
            let (low_text, high_text, unit) = ends(low, high, "H");
            let read =
                |digits: &str| super::super::reading(&format!("{digits} {unit}")).unwrap().value;
            assert!(read(&low_text) <= low && high <= read(&high_text), "{low} {high}");
            let printed_width = read(&high_text) - read(&low_text);
            assert!(low_text != high_text && printed_width <= 1.5 * (high - low), "{low} {high}");
        }
    }

    #[test]
    fn prints_ratios_lengths_and_plain_numbers() {
        assert_eq!(millimeters(0.3e-3, 2), "0.30 mm");
        assert_eq!(percent(0.0123, 2), "1.2 %");
        assert_eq!(percent(-0.001, 1), "-0.1 %");
        assert_eq!(number(1.5e-7, 3), "1.50e-7");
        assert_eq!(number(9.996, 3), "10.0");
    }
}
