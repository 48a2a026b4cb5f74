//! `[[windings]]`, `[[require]]` and `[[probes]]` → who carries current, and what is asked of it.

use super::bounds::{Bound, CURRENT, INDUCTANCE, Kind, LENGTH};
use super::keys;
use super::nearest::nearest;
use super::walk::{Fields, Reader};
use crate::model::{InductanceKind, Probe, Requirement, Section, Subject, Winding};
use std::collections::BTreeMap;

impl<'a> Reader<'a> {
    /// All windings; notes a sheet without any, or without any current.
    pub fn windings(&mut self, top: &Fields<'a>) -> Vec<Winding> {
        let mut windings = Vec::new();
        for fields in self.list(top, "windings", &keys::WINDING) {
            windings.push(self.winding(&fields, windings.len()));
        }
        let is_absent = !top.has("windings") && !top.has_misspelled("windings");
        let is_empty_list = top
            .get("windings")
            .is_some_and(|v| v.get_ref().as_array().is_some_and(|list| list.is_empty()));
        if is_absent || is_empty_list {
            let help = "add `[[windings]]` with `turns = 42`, `radii = [6.6, 10.2]` and `heights = [-4.9, 4.9]`";
            let span = top.get("windings").map_or(0..0, |value| value.span());
            self.fault(span, "the sheet has no windings", help);
        } else if !windings.is_empty() && windings.iter().all(|winding| winding.current == 0.0) {
            let subject = Subject::Winding { winding: 0, section: 0 };
            let span = self.spans.get(&(subject, "current")).cloned().unwrap_or(0..0);
            self.fault(
                span,
                "the currents of all windings are 0, so there is no field",
                "give one of them a current, such as \"1 A\"",
            );
        }
        let names = windings.iter().map(|winding| winding.name.as_str());
        self.distinct_names("winding", names, |winding| Subject::Winding { winding, section: 0 });
        windings
    }

    fn winding(&mut self, fields: &Fields<'a>, index: usize) -> Winding {
        self.remember(Subject::Winding { winding: index, section: 0 }, fields);
        let name = self.text(fields, "name").unwrap_or(format!("winding {}", index + 1));
        let sections = if fields.has("sections") {
            self.sections(fields, index)
        } else {
            vec![self.section(fields)]
        };
        let current = self.number_or(
            fields,
            "current",
            CURRENT,
            Bound::Any,
            if index == 0 { 1.0 } else { 0.0 },
        );
        let ripple = self.number_or(fields, "ripple", CURRENT, Bound::NotNegative, 0.0);
        Winding { name, sections, current, ripple }
    }

    fn sections(&mut self, fields: &Fields<'a>, winding: usize) -> Vec<Section> {
        for key in keys::SECTION.keys {
            if fields.has(key) {
                let also = (fields.span("sections"), "the sections");
                let message = format!("`{key}` stands beside `sections`");
                self.fault_pair(
                    fields.span(key),
                    also,
                    message,
                    format!("write `{key}` inside each section only"),
                );
            }
        }
        let mut sections = Vec::new();
        for (section, inner) in self.list(fields, "sections", &keys::SECTION).iter().enumerate() {
            self.remember_section(winding, section, fields, inner);
            sections.push(self.section(inner));
        }
        if sections.is_empty() {
            self.fault(
                fields.span("sections"),
                "`sections` is empty",
                "write `sections = [{ turns = 21, radii = [6.6, 8.4], heights = [-4.9, 4.9] }, …]`",
            );
        }
        sections
    }

    /// A section's keys, and the winding's where the section has none.
    fn remember_section(
        &mut self,
        winding: usize,
        section: usize,
        outer: &Fields<'a>,
        inner: &Fields<'a>,
    ) {
        let subject = Subject::Winding { winding, section };
        self.remember(subject, outer);
        self.remember(subject, inner);
    }

    fn section(&mut self, fields: &Fields<'a>) -> Section {
        Section {
            turns: self.number(fields, "turns", Kind::Pure, Bound::Positive),
            radii: self.ordered_pair(
                fields,
                "radii",
                ["the inner radius", "the outer radius"],
                Bound::NotNegative,
            ),
            heights: self.ordered_pair(fields, "heights", ["the bottom", "the top"], Bound::Any),
        }
    }

    /// Notes names that occur twice; `subject` finds where each one stands.
    pub fn distinct_names<'n>(
        &mut self,
        what: &str,
        names: impl Iterator<Item = &'n str>,
        subject: impl Fn(usize) -> Subject,
    ) {
        let mut seen: BTreeMap<&str, usize> = BTreeMap::new();
        for (index, name) in names.enumerate() {
            let Some(first) = seen.insert(name, index) else { continue };
            let [span, also] = [index, first].map(|i| self.place(subject(i), Some("name")));
            let message = format!("two {what}s have the name `{name}`");
            self.fault_pair(span, (also, "the first one"), message, "give each its own name");
        }
    }

    /// All promises that are to be checked.
    pub fn requirements(&mut self, top: &Fields<'a>, windings: &[Winding]) -> Vec<Requirement> {
        let tables = self.list(top, "require", &keys::REQUIRE);
        tables.iter().map(|fields| self.requirement(fields, windings)).collect()
    }

    fn requirement(&mut self, fields: &Fields<'a>, windings: &[Winding]) -> Requirement {
        let winding = self.winding_of(fields, windings);
        let current = self.number(fields, "current", CURRENT, Bound::NotZero);
        let kinds =
            [("apparent", InductanceKind::Apparent), ("incremental", InductanceKind::Incremental)];
        let kind = self.choice(fields, "kind", &kinds).unwrap_or(InductanceKind::Apparent);
        let [least, most] = ["least", "most"].map(|key| {
            fields.get(key).map(|value| self.number_at(key, value, INDUCTANCE, Bound::Positive))
        });
        if least.is_none() && most.is_none() {
            self.fault(
                fields.header_span(),
                "`[[require]]` promises nothing",
                "add `least = \"0.60 mH\"`, `most`, or both",
            );
        }
        if let (Some(least), Some(most)) = (least, most)
            && most < least
        {
            let [low, high] = ["least", "most"].map(|key| fields.span(key));
            let message = format!(
                "`least` = {} is above `most` = {}",
                self.written(&low),
                self.written(&high)
            );
            self.fault_pair(low, (high, "below `least`"), message, "exchange the two");
        }
        Requirement { winding, current, kind, least, most }
    }

    fn winding_of(&mut self, fields: &Fields<'a>, windings: &[Winding]) -> usize {
        self.must(fields, "winding");
        let Some(name) = self.text(fields, "winding") else { return 0 };
        let names: Vec<&str> = windings.iter().map(|w| w.name.as_str()).collect();
        names.iter().position(|known| *known == name).unwrap_or_else(|| {
            let near = nearest(&name, &names).unwrap_or("…");
            let help = format!("the nearest is `{near}`; the windings are: {}", names.join(", "));
            self.fault(fields.span("winding"), format!("there is no winding `{name}`"), help);
            0
        })
    }

    /// All probes.
    pub fn probes(&mut self, top: &Fields<'a>) -> Vec<Probe> {
        let mut probes = Vec::new();
        for fields in self.list(top, "probes", &keys::PROBE) {
            let index = probes.len();
            self.remember(Subject::Probe(index), &fields);
            probes.push(self.probe(&fields, index));
        }
        self.distinct_names(
            "probe",
            probes.iter().map(|probe: &Probe| probe.name.as_str()),
            Subject::Probe,
        );
        probes
    }

    fn probe(&mut self, fields: &Fields<'a>, index: usize) -> Probe {
        const POINTS_DEFAULT: f64 = 101.0;
        let name = self.text(fields, "name").unwrap_or(format!("probe {}", index + 1));
        if let Some(value) = fields.get("at") {
            for key in ["from", "to", "points"] {
                if fields.has(key) {
                    let also = (value.span(), "a probe at one point");
                    self.fault_pair(
                        fields.span(key),
                        also,
                        format!("`{key}` stands beside `at`"),
                        "keep `at` for a point, or `from` and `to` for a line",
                    );
                }
            }
            let at = self.point_at("at", value);
            return Probe { name, from: at, to: at, n_points: 1 };
        }
        let [from, to] = ["from", "to"].map(|key| match self.must(fields, key) {
            Some(value) => self.point_at(key, value),
            None => crate::model::Point { r: f64::NAN, z: f64::NAN },
        });
        if from == to {
            self.fault(
                fields.span("to"),
                "the probe's `to` equals its `from`",
                "write `at = [r, z]` for a single point",
            );
        }
        let n_points =
            self.number_or(fields, "points", Kind::Pure, Bound::Whole(2, 100_000), POINTS_DEFAULT);
        Probe { name, from, to, n_points: n_points as usize }
    }

    /// `[hot_spots]`'s radius and the like share this: a positive length or its default.
    pub fn positive_length_or(
        &mut self,
        fields: &Fields<'a>,
        key: &'static str,
        default: f64,
    ) -> f64 {
        self.number_or(fields, key, LENGTH, Bound::Positive, default)
    }
}
