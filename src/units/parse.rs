//! Text with a unit ("0.3 mm", "12 mil", "250nH", "3 %") → SI. Knows no key and no file.
//!
//! Decimal prefixes move the exponent of the written digits before they become a float, so that
//! "0.3 mm", "300 µm" and "3e-4 m" give the same bits and shapes that touch on paper touch here.

/// What a number measures.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Dimension {
    Length,
    Area,
    Current,
    Voltage,
    Inductance,
    FluxDensity,
    FieldStrength,
    Frequency,
    Time,
    /// A bare ratio; also "3 %" and "20 ppm".
    Ratio,
}

impl Dimension {
    /// The word for it and an example, as messages say it: ("a length", "0.3 mm").
    pub fn words(self) -> (&'static str, &'static str) {
        match self {
            Dimension::Length => ("a length", "0.3 mm"),
            Dimension::Area => ("an area", "66 mm²"),
            Dimension::Current => ("a current", "1.8 A"),
            Dimension::Voltage => ("a voltage", "24 V"),
            Dimension::Inductance => ("an inductance", "250 nH"),
            Dimension::FluxDensity => ("a flux density", "380 mT"),
            Dimension::FieldStrength => ("a field strength", "1200 A/m"),
            Dimension::Frequency => ("a frequency", "100 kHz"),
            Dimension::Time => ("a time", "5 µs"),
            Dimension::Ratio => ("a ratio", "3 %"),
        }
    }

    fn base_unit(self) -> Option<&'static str> {
        match self {
            Dimension::Length => Some("m"),
            Dimension::Current => Some("A"),
            Dimension::Voltage => Some("V"),
            Dimension::Inductance => Some("H"),
            Dimension::FluxDensity => Some("T"),
            Dimension::FieldStrength => Some("A/m"),
            Dimension::Frequency => Some("Hz"),
            Dimension::Time => Some("s"),
            Dimension::Area | Dimension::Ratio => None,
        }
    }
}

const ALL: [Dimension; 10] = [
    Dimension::Length,
    Dimension::Area,
    Dimension::Current,
    Dimension::Voltage,
    Dimension::Inductance,
    Dimension::FluxDensity,
    Dimension::FieldStrength,
    Dimension::Frequency,
    Dimension::Time,
    Dimension::Ratio,
];

/// Decimal prefixes and their powers of ten; both code points of µ, and u.
const PREFIXES: [(&str, i32); 10] = [
    ("p", -12),
    ("n", -9),
    ("µ", -6),
    ("μ", -6),
    ("u", -6),
    ("m", -3),
    ("", 0),
    ("k", 3),
    ("M", 6),
    ("G", 9),
];

/// Units that are no prefix on a base unit: name, dimension, power of ten, further factor.
/// The inch is 25.4 mm exactly and the mil 1/1000 of it (international yard and pound agreement,
/// 1959); 1 Oe = 1000/4π A/m and 1 G = 1e-4 T by definition of the CGS system.
const SPECIAL: [(&str, Dimension, i32, f64); 22] = [
    ("cm", Dimension::Length, -2, 1.0),
    ("in", Dimension::Length, -4, 254.0),
    ("inch", Dimension::Length, -4, 254.0),
    ("mil", Dimension::Length, -7, 254.0),
    ("m²", Dimension::Area, 0, 1.0),
    ("m2", Dimension::Area, 0, 1.0),
    ("m^2", Dimension::Area, 0, 1.0),
    ("cm²", Dimension::Area, -4, 1.0),
    ("cm2", Dimension::Area, -4, 1.0),
    ("cm^2", Dimension::Area, -4, 1.0),
    ("mm²", Dimension::Area, -6, 1.0),
    ("mm2", Dimension::Area, -6, 1.0),
    ("mm^2", Dimension::Area, -6, 1.0),
    ("in²", Dimension::Area, -8, 254.0 * 254.0),
    ("in2", Dimension::Area, -8, 254.0 * 254.0),
    ("in^2", Dimension::Area, -8, 254.0 * 254.0),
    ("A/cm", Dimension::FieldStrength, 2, 1.0),
    ("A/mm", Dimension::FieldStrength, 3, 1.0),
    ("Oe", Dimension::FieldStrength, 3, 0.25 / std::f64::consts::PI),
    ("G", Dimension::FluxDensity, -4, 1.0),
    ("%", Dimension::Ratio, -2, 1.0),
    ("ppm", Dimension::Ratio, -6, 1.0),
];

/// A number as written, with its unit when there is one.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Reading {
    /// In SI when `dimension` is known, as written otherwise.
    pub value: f64,
    /// `None`: a bare number.
    pub dimension: Option<Dimension>,
}

/// Why a text is no quantity of the wanted kind.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum QuantityError {
    #[error("`{text}` does not begin with a number")]
    NoNumber { text: String },
    #[error("`{text}` has a decimal comma")]
    Comma { text: String },
    #[error("`{text}` is beyond the range of numbers")]
    Range { text: String },
    #[error("`{unit}` is not a unit that is known here")]
    Unit { unit: String },
    #[error("`{text}` is {found}, not {wanted}")]
    Dimension { text: String, found: &'static str, wanted: &'static str },
}

/// Reads `text` as a quantity of `dimension` in SI; a bare number is multiplied by `10^bare.0 · bare.1`.
///
/// `read("12 mil", Length, (-3, 1.0)) = 0.3048e-3`, `read("0.3", Length, (-3, 1.0)) = 0.3e-3`.
pub fn read(text: &str, dimension: Dimension, bare: (i32, f64)) -> Result<f64, QuantityError> {
    let (digits, unit) = split(text)?;
    if unit.is_empty() {
        return finite(decimal(digits, bare.0) * bare.1, text);
    }
    let (found, power, factor) = find_unit(unit)?;
    if found != dimension {
        let (found, wanted) = (found.words().0, dimension.words().0);
        return Err(QuantityError::Dimension { text: text.trim().into(), found, wanted });
    }
    finite(decimal(digits, power) * factor, text)
}

/// Reads `text` as any quantity: in SI with its dimension, or a bare number.
pub fn reading(text: &str) -> Result<Reading, QuantityError> {
    let (digits, unit) = split(text)?;
    if unit.is_empty() {
        return Ok(Reading { value: finite(decimal(digits, 0), text)?, dimension: None });
    }
    let (dimension, power, factor) = find_unit(unit)?;
    let value = finite(decimal(digits, power) * factor, text)?;
    Ok(Reading { value, dimension: Some(dimension) })
}

/// The float nearest to `digits · 10^power`; NaN when `digits` is no decimal number.
pub fn decimal(digits: &str, power: i32) -> f64 {
    let (mantissa, exponent) = match digits.find(['e', 'E']) {
        Some(at) => (&digits[..at], digits[at + 1..].parse::<i32>().unwrap_or(i32::MAX)),
        None => (digits, 0),
    };
    format!("{mantissa}e{}", exponent.saturating_add(power)).parse().unwrap_or(f64::NAN)
}

/// Every spelling of a unit of that dimension that [`read`] understands.
pub fn spellings(dimension: Dimension) -> Vec<String> {
    let special = SPECIAL.iter().filter(|s| s.1 == dimension).map(|s| s.0.to_string());
    let prefixed = dimension
        .base_unit()
        .into_iter()
        .flat_map(|base| PREFIXES.iter().map(move |(prefix, _)| format!("{prefix}{base}")));
    prefixed.chain(special).collect()
}

fn finite(value: f64, text: &str) -> Result<f64, QuantityError> {
    if value.is_finite() {
        Ok(value)
    } else {
        Err(QuantityError::Range { text: text.trim().into() })
    }
}

/// Splits "0.3 mm" into its digits and its unit.
fn split(text: &str) -> Result<(&str, &str), QuantityError> {
    let text = text.trim();
    let end = number_length(text);
    let (digits, rest) = text.split_at(end);
    if digits.parse::<f64>().is_err() {
        return Err(QuantityError::NoNumber { text: text.into() });
    }
    if rest.starts_with(',') {
        return Err(QuantityError::Comma { text: text.into() });
    }
    Ok((digits, rest.trim_start()))
}

/// Bytes of the leading decimal number; an `e` counts only when digits follow it.
fn number_length(text: &str) -> usize {
    let bytes = text.as_bytes();
    let digits_from = |mut i: usize| {
        while bytes.get(i).is_some_and(|b| b.is_ascii_digit() || *b == b'.') {
            i += 1;
        }
        i
    };
    let is_sign = |i: usize| matches!(bytes.get(i), Some(b'+' | b'-'));
    let end = digits_from(usize::from(is_sign(0)));
    if matches!(bytes.get(end), Some(b'e' | b'E')) {
        let first = end + 1 + usize::from(is_sign(end + 1));
        if bytes.get(first).is_some_and(u8::is_ascii_digit) {
            let mut i = first;
            while bytes.get(i).is_some_and(u8::is_ascii_digit) {
                i += 1;
            }
            return i;
        }
    }
    end
}

fn find_unit(unit: &str) -> Result<(Dimension, i32, f64), QuantityError> {
    if let Some(&(_, dimension, power, factor)) = SPECIAL.iter().find(|s| s.0 == unit) {
        return Ok((dimension, power, factor));
    }
    for dimension in ALL {
        let Some(base) = dimension.base_unit() else { continue };
        for (prefix, power) in PREFIXES {
            if unit.strip_suffix(base) == Some(prefix) {
                return Ok((dimension, power, 1.0));
            }
        }
    }
    Err(QuantityError::Unit { unit: unit.into() })
}

#[cfg(test)]
mod tests {
    use super::*;

    const MM: (i32, f64) = (-3, 1.0);

    #[test]
    fn reads_every_unit_with_and_without_a_space() {
        assert_eq!(read("0.3 mm", Dimension::Length, MM), Ok(0.3e-3));
        assert_eq!(read("0.3mm", Dimension::Length, MM), Ok(0.3e-3));
        assert_eq!(read(" 12 mil ", Dimension::Length, MM), Ok(0.3048e-3));
        assert_eq!(read("1.8 A", Dimension::Current, (0, 1.0)), Ok(1.8));
        assert_eq!(read("24V", Dimension::Voltage, (0, 1.0)), Ok(24.0));
        assert_eq!(read("250 nH", Dimension::Inductance, (0, 1.0)), Ok(250e-9));
        assert_eq!(read("3 %", Dimension::Ratio, (0, 1.0)), Ok(0.03));
        assert_eq!(read("0.1%", Dimension::Ratio, (0, 1.0)), Ok(0.001));
        assert_eq!(read("1e-3", Dimension::Ratio, (0, 1.0)), Ok(1e-3));
        assert_eq!(read("380 mT", Dimension::FluxDensity, (0, 1.0)), Ok(0.38));
        assert_eq!(read("66 mm²", Dimension::Area, (-6, 1.0)), Ok(66e-6));
    }

    #[test]
    fn equal_lengths_have_equal_bits_however_they_are_spelled() {
        for tenths in 1..2000_i64 {
            let micrometres = format!("{}00 µm", tenths);
            let spelled = [
                format!("{}.{} mm", tenths / 10, tenths % 10),
                format!("{}00 um", tenths),
                format!("{tenths}e-4m"),
                format!("{}.{}", tenths / 10, tenths % 10),
            ];
            let wanted = read(&micrometres, Dimension::Length, MM).unwrap();
            for text in &spelled {
                assert_eq!(read(text, Dimension::Length, MM).unwrap().to_bits(), wanted.to_bits());
            }
        }
    }

    #[test]
    fn reads_micro_in_all_three_spellings() {
        for text in ["5 µH", "5 μH", "5uH"] {
            assert_eq!(read(text, Dimension::Inductance, (0, 1.0)), Ok(5e-6));
        }
    }

    #[test]
    fn an_e_without_digits_is_part_of_the_unit() {
        let message = read("3 eV", Dimension::Voltage, (0, 1.0)).unwrap_err().to_string();
        assert_eq!(message, "`eV` is not a unit that is known here");
        assert_eq!(read("1e3 A", Dimension::Current, (0, 1.0)), Ok(1000.0));
    }

    #[test]
    fn refuses_a_wrong_unit_and_says_what_it_is() {
        let message = read("0.3 A", Dimension::Length, MM).unwrap_err().to_string();
        assert_eq!(message, "`0.3 A` is a current, not a length");
    }

    #[test]
    fn refuses_commas_words_and_infinities() {
        for (text, message) in [
            ("0,3 mm", "`0,3 mm` has a decimal comma"),
            ("thin", "`thin` does not begin with a number"),
            ("", "`` does not begin with a number"),
            ("nan mm", "`nan mm` does not begin with a number"),
            ("inf", "`inf` does not begin with a number"),
            ("1e999 mm", "`1e999 mm` is beyond the range of numbers"),
            ("1.2.3 mm", "`1.2.3 mm` does not begin with a number"),
        ] {
            assert_eq!(read(text, Dimension::Length, MM).unwrap_err().to_string(), message);
        }
    }

    #[test]
    fn tells_apart_units_that_share_letters() {
        assert_eq!(reading("3 mT").unwrap().dimension, Some(Dimension::FluxDensity));
        assert_eq!(reading("3 G").unwrap().value, 3e-4);
        assert_eq!(reading("3 m").unwrap().dimension, Some(Dimension::Length));
        assert_eq!(reading("3 min").ok(), None);
        assert_eq!(
            reading("2 kA/m").unwrap(),
            Reading { value: 2000.0, dimension: Some(Dimension::FieldStrength) }
        );
        assert!((reading("1 Oe").unwrap().value - 79.577_471_545_947_67).abs() < 1e-12);
    }
}
