//! Single values of the sheet: numbers and quantities, pairs and points, texts and choices.

use super::bounds::{Bound, Kind, LENGTH};
use super::keys;
use super::nearest::nearest;
use super::walk::{Fields, Reader, kind_of};
use crate::model::Point;
use crate::units::{Dimension, QuantityError, decimal, read};
use toml::Spanned;
use toml::de::DeValue;

impl<'a> Reader<'a> {
    /// The number under a key that must be there; NaN when it is not usable.
    pub fn number(
        &mut self,
        fields: &Fields<'a>,
        key: &'static str,
        kind: Kind,
        bound: Bound,
    ) -> f64 {
        match self.must(fields, key) {
            Some(value) => self.number_at(key, value, kind, bound),
            None => f64::NAN,
        }
    }

    /// The number under a key, or `default`.
    pub fn number_or(
        &mut self,
        fields: &Fields<'a>,
        key: &'static str,
        kind: Kind,
        bound: Bound,
        default: f64,
    ) -> f64 {
        fields.get(key).map_or(default, |value| self.number_at(key, value, kind, bound))
    }

    /// The positive length under a key that must be there.
    pub fn length(&mut self, fields: &Fields<'a>, key: &'static str) -> f64 {
        self.number(fields, key, LENGTH, Bound::Positive)
    }

    /// The length ≥ 0 under a key, or 0.
    pub fn length_or_zero(&mut self, fields: &Fields<'a>, key: &'static str) -> f64 {
        self.number_or(fields, key, LENGTH, Bound::NotNegative, 0.0)
    }

    /// One number of the sheet in SI; NaN, with the mistake noted, when it is not usable.
    pub fn number_at(
        &mut self,
        key: &str,
        value: &Spanned<DeValue<'a>>,
        kind: Kind,
        bound: Bound,
    ) -> f64 {
        let span = value.span();
        let read = match (value.get_ref(), kind) {
            (DeValue::Integer(number), _) if number.radix() != 10 => {
                i64::from_str_radix(number.as_str(), number.radix())
                    .map_or(f64::NAN, |n| self.bare(&n.to_string(), kind))
            }
            (DeValue::Integer(number), _) => self.bare(number.as_str(), kind),
            (DeValue::Float(number), _) => self.bare(number.as_str(), kind),
            (DeValue::String(text), Kind::Of(dimension)) => {
                match read(text, dimension, self.bare_scale(kind)) {
                    Ok(number) => number,
                    Err(error) => {
                        let message = format!("`{key}`: {error}");
                        let help = self.quantity_help(&error, kind);
                        self.fault(span, message, help);
                        return f64::NAN;
                    }
                }
            }
            (other, _) => {
                let message =
                    format!("`{key}` must be {}, but it is {}", kind.words(), kind_of(other));
                let help = self.wanted(kind);
                self.fault(span, message, help);
                return f64::NAN;
            }
        };
        self.bounded(key, span, read, kind, bound)
    }

    fn bare(&self, digits: &str, kind: Kind) -> f64 {
        let (power, factor) = self.bare_scale(kind);
        if digits.contains("inf") { f64::INFINITY } else { decimal(digits, power) * factor }
    }

    fn bare_scale(&self, kind: Kind) -> (i32, f64) {
        if kind == LENGTH { self.bare_length } else { (0, 1.0) }
    }

    fn bounded(
        &mut self,
        key: &str,
        span: std::ops::Range<usize>,
        value: f64,
        kind: Kind,
        bound: Bound,
    ) -> f64 {
        let Some(complaint) = bound.complaint(value, kind) else { return value };
        let help = match (value.is_finite(), bound) {
            (true, Bound::Whole(from, _)) => format!("write a whole number, at least {from}"),
            (true, Bound::Positive) if keys::example(key) != keys::NO_EXAMPLE => {
                format!("write a number greater than 0, such as {}", keys::example(key))
            }
            _ => self.wanted(kind),
        };
        let written = self.written(&span);
        self.fault(span, format!("`{key}` = {written} {complaint}"), help);
        f64::NAN
    }

    /// "write a length …": the help of most number mistakes.
    fn wanted(&self, kind: Kind) -> String {
        match kind {
            Kind::Pure => "write a plain number without quotes and without a unit".into(),
            Kind::Of(dimension) => {
                let (words, example) = dimension.words();
                let bare = match dimension {
                    Dimension::Length => format!("a bare number in {}", self.length_unit),
                    Dimension::Ratio => "a bare ratio".into(),
                    _ => "a bare number in SI units".into(),
                };
                format!("write {words} such as \"{example}\", or {bare}")
            }
        }
    }

    fn quantity_help(&self, error: &QuantityError, kind: Kind) -> String {
        match error {
            QuantityError::Comma { text } => {
                format!("write a decimal point: \"{}\"", text.replacen(',', ".", 1))
            }
            _ => self.wanted(kind),
        }
    }

    /// Two numbers in a list, such as `radii = [inner, outer]`.
    pub fn pair(
        &mut self,
        fields: &Fields<'a>,
        key: &'static str,
        words: &str,
        bound: Bound,
    ) -> [f64; 2] {
        let Some(value) = self.must(fields, key) else { return [f64::NAN; 2] };
        let list = match value.get_ref() {
            DeValue::Array(list) if list.len() == 2 => list,
            other => {
                let is = match other {
                    DeValue::Array(list) => format!("it has {} of them", list.len()),
                    other => format!("it is {}", kind_of(other)),
                };
                let message = format!("`{key}` must be two lengths, {words}, but {is}");
                self.fault(
                    value.span(),
                    message,
                    format!("write `{key} = {}`", keys::example(key)),
                );
                return [f64::NAN; 2];
            }
        };
        let mut ends = [f64::NAN; 2];
        for (end, item) in ends.iter_mut().zip(list.iter()) {
            *end = self.number_at(key, item, LENGTH, bound);
        }
        ends
    }

    /// A pair in ascending order.
    pub fn ordered_pair(
        &mut self,
        fields: &Fields<'a>,
        key: &'static str,
        words: [&str; 2],
        bound: Bound,
    ) -> [f64; 2] {
        let ends = self.pair(fields, key, &format!("{} and {}", words[0], words[1]), bound);
        if ends[1] <= ends[0] {
            let span = fields.span(key);
            let message = format!(
                "`{key}` = {}: {} is not below {}",
                self.written(&span),
                words[0],
                words[1]
            );
            let help = "write the smaller number first, and leave some room between the two";
            self.fault(span, message, help);
        }
        ends
    }

    /// A point [r, z], r ≥ 0.
    pub fn point_at(&mut self, key: &'static str, value: &Spanned<DeValue<'a>>) -> Point {
        let items = match value.get_ref() {
            DeValue::Array(list) if list.len() == 2 => list,
            other => {
                let message =
                    format!("`{key}` must be a point [r, z], but it is {}", list_words(other));
                self.fault(value.span(), message, "write radius and height, such as [5.0, 0.0]");
                return Point { r: f64::NAN, z: f64::NAN };
            }
        };
        Point {
            r: self.number_at(key, &items[0], LENGTH, Bound::NotNegative),
            z: self.number_at(key, &items[1], LENGTH, Bound::Any),
        }
    }

    /// A text without control characters, not empty; `None` when missing or refused.
    pub fn text(&mut self, fields: &Fields<'a>, key: &'static str) -> Option<String> {
        const LETTERS_MAX: usize = 120;
        let value = fields.get(key)?;
        let DeValue::String(text) = value.get_ref() else {
            let message = format!("`{key}` must be a text, but it is {}", kind_of(value.get_ref()));
            self.fault(value.span(), message, "put it between double quotes");
            return None;
        };
        let complaint = if text.trim().is_empty() {
            "is empty"
        } else if text.chars().any(is_harmful) {
            "holds a control character"
        } else if LETTERS_MAX < text.chars().count() {
            "is longer than 120 letters"
        } else {
            return Some(text.trim().to_string());
        };
        self.fault(value.span(), format!("`{key}` {complaint}"), "write a short text on one line");
        None
    }

    /// One word out of a few; `None` when missing or unknown.
    pub fn choice<T: Copy>(
        &mut self,
        fields: &Fields<'a>,
        key: &'static str,
        words: &[(&str, T)],
    ) -> Option<T> {
        let word = self.text(fields, key)?;
        if let Some((_, meaning)) = words.iter().find(|(known, _)| *known == word) {
            return Some(*meaning);
        }
        let known: Vec<&str> = words.iter().map(|(word, _)| *word).collect();
        let near = nearest(&word.to_lowercase(), &known).unwrap_or_default();
        let all = known.iter().map(|word| format!("\"{word}\"")).collect::<Vec<_>>().join(", ");
        let message = format!("`{key}` = \"{word}\" is unknown");
        self.fault(
            fields.span(key),
            message,
            format!("write one of {all}; the nearest is \"{near}\""),
        );
        None
    }
}

/// "a list of 3", "a text".
pub(super) fn list_words(value: &DeValue<'_>) -> String {
    match value {
        DeValue::Array(list) => format!("a list of {}", list.len()),
        other => kind_of(other).to_string(),
    }
}

/// Letters that would drive a terminal or turn the direction of writing.
pub(super) fn is_harmful(letter: char) -> bool {
    letter.is_control()
        || matches!(letter, '\u{200e}'..='\u{200f}' | '\u{202a}'..='\u{202e}' | '\u{2066}'..='\u{2069}')
}
