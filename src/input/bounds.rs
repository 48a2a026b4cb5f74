//! Which numbers a key allows, and what is said about the others.

use crate::units::Dimension;

/// What a number is.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Kind {
    /// A number without a unit: turns, permeability, a count.
    Pure,
    Of(Dimension),
}

pub(super) const LENGTH: Kind = Kind::Of(Dimension::Length);
pub(super) const CURRENT: Kind = Kind::Of(Dimension::Current);
pub(super) const INDUCTANCE: Kind = Kind::Of(Dimension::Inductance);
pub(super) const RATIO: Kind = Kind::Of(Dimension::Ratio);

/// Which numbers are allowed.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Bound {
    Any,
    Positive,
    NotNegative,
    NotZero,
    /// Whole numbers from … to ….
    Whole(u32, u32),
    /// From … to …, with the words for it.
    Between([f64; 2], &'static str),
}

impl Kind {
    /// "a length", "a number".
    pub fn words(self) -> &'static str {
        match self {
            Kind::Pure => "a number",
            Kind::Of(dimension) => dimension.words().0,
        }
    }

    /// Smallest positive and largest magnitude that make sense, and the words for them: far outside any
    /// real core, close enough that squares and ratios of such numbers stay within double precision.
    fn limits(self) -> ([f64; 2], [&'static str; 2]) {
        match self {
            Kind::Pure => ([1e-6, 1e9], ["1e-6", "1e9"]),
            Kind::Of(Dimension::Length) => ([1e-9, 1e3], ["1 nm", "1 km"]),
            Kind::Of(_) => ([1e-15, 1e12], ["1e-15 in SI units", "1e12 in SI units"]),
        }
    }
}

impl Bound {
    /// What is wrong with a value in SI, to follow "`key` = value"; `None` when it is allowed.
    pub fn complaint(self, value: f64, kind: Kind) -> Option<String> {
        let ([least, most], [least_words, most_words]) = kind.limits();
        match self {
            _ if !value.is_finite() => Some("is not a finite number".into()),
            Bound::Positive if value <= 0.0 => Some("must be greater than 0".into()),
            Bound::NotNegative if value < 0.0 => Some("must not be negative".into()),
            Bound::NotZero if value == 0.0 => Some("must not be 0".into()),
            Bound::Whole(from, to) => {
                let is_in =
                    (f64::from(from)..=f64::from(to)).contains(&value) && value.fract() == 0.0;
                (!is_in).then(|| format!("must be a whole number from {from} to {to}"))
            }
            Bound::Between([from, to], words) => {
                (!(from..=to).contains(&value)).then(|| format!("must lie {words}"))
            }
            _ if most < value.abs() => {
                Some(format!("is beyond {most_words}, the most that is accepted"))
            }
            Bound::Positive if value < least => {
                Some(format!("is below {least_words}, the least that is accepted"))
            }
            _ => None,
        }
    }
}
