//! `[accuracy]`, `[estimate]`, `[hot_spots]` → what the answer should be measured by.

use super::bounds::{Bound, INDUCTANCE, Kind, RATIO};
use super::keys;
use super::walk::{Fields, Reader};
use crate::model::{Accuracy, Claim, Estimate, GapCorrection, HotSpotWish};
use toml::de::DeValue;

/// Widths that can be asked for: below 1e-7 rounding and quadrature speak, above one half no one does.
pub(super) const INTERVALS: Bound = Bound::Between([1e-7, 0.5], "from 0.00001 % to 50 %");

const CORRECTIONS: [(&str, GapCorrection); 5] = [
    ("none", GapCorrection::None),
    ("one gap length", GapCorrection::OneGapLength),
    ("log", GapCorrection::Log),
    ("corner", GapCorrection::Corner),
    ("roters", GapCorrection::Roters),
];

impl<'a> Reader<'a> {
    /// `[accuracy]`, or its defaults.
    pub fn accuracy(&mut self, top: &Fields<'a>) -> Accuracy {
        let default = Accuracy::default();
        let Some(fields) = self.table(top, "accuracy", &keys::ACCURACY) else { return default };
        let n_default = default.n_unknowns_max as f64;
        let most = self.number_or(
            &fields,
            "max_unknowns",
            Kind::Pure,
            Bound::Whole(1000, 50_000_000),
            n_default,
        );
        Accuracy {
            interval: self.number_or(&fields, "interval", RATIO, INTERVALS, default.interval),
            n_unknowns_max: most as usize,
        }
    }

    /// `[estimate]`, when there is one.
    pub fn estimate(&mut self, top: &Fields<'a>) -> Option<Estimate> {
        const TOLERANCE_DEFAULT: f64 = 0.05;
        let fields = self.table(top, "estimate", &keys::ESTIMATE)?;
        let claim = match (fields.has("inductance"), fields.has("inductance_factor")) {
            (true, true) => {
                let also = (fields.span("inductance"), "one estimate");
                let message = "`inductance` and `inductance_factor` are both given";
                self.fault_pair(
                    fields.span("inductance_factor"),
                    also,
                    message,
                    "keep the one that is to be judged",
                );
                Claim::HandSum
            }
            (true, false) => {
                Claim::Inductance(self.number(&fields, "inductance", INDUCTANCE, Bound::Positive))
            }
            (false, true) => Claim::InductanceFactor(self.number(
                &fields,
                "inductance_factor",
                INDUCTANCE,
                Bound::Positive,
            )),
            (false, false) => Claim::HandSum,
        };
        let gap_correction = self.gap_correction(&fields);
        let tolerance = self.number_or(
            &fields,
            "tolerance",
            RATIO,
            Bound::Between([1e-6, 10.0], "from 0.0001 % to 1000 %"),
            TOLERANCE_DEFAULT,
        );
        Some(Estimate { claim, gap_correction, tolerance })
    }

    fn gap_correction(&mut self, fields: &Fields<'a>) -> GapCorrection {
        match fields.get("gap_correction").map(|value| (value, value.get_ref())) {
            None => GapCorrection::Log,
            Some((_, DeValue::String(_))) => {
                self.choice(fields, "gap_correction", &CORRECTIONS).unwrap_or(GapCorrection::Log)
            }
            Some((value, _)) => {
                let bound = Bound::Between(
                    [0.1, 100.0],
                    "from 0.1 to 100: it divides the gap's reluctance",
                );
                GapCorrection::Factor(self.number_at("gap_correction", value, Kind::Pure, bound))
            }
        }
    }

    /// `[hot_spots]`, or its defaults.
    pub fn hot_spots(&mut self, top: &Fields<'a>) -> HotSpotWish {
        let default = HotSpotWish::default();
        let Some(fields) = self.table(top, "hot_spots", &keys::HOT_SPOTS) else { return default };
        let count = self.number_or(
            &fields,
            "count",
            Kind::Pure,
            Bound::Whole(0, 1000),
            default.count as f64,
        );
        HotSpotWish {
            count: count as usize,
            averaging: self.positive_length_or(&fields, "averaging", default.averaging),
        }
    }
}
