//! Places a fault that the geometry found (it knows no text) in the sheet.

use super::Sheet;
use super::diagnostic::Diagnostic;
use super::walk::{Reader, Spans};
use crate::model::{Fault, Subject};
use std::ops::Range;

impl Sheet {
    /// The fault with the lines of the sheet that it is about; both of them when two shapes collide.
    pub fn diagnose(&self, fault: &Fault) -> Diagnostic {
        let span = find(&self.spans, fault.subject, fault.key);
        let mut found = Diagnostic::at(
            &self.name,
            &self.text,
            span.clone(),
            fault.message.clone(),
            fault.help.clone(),
        )
        .labelled(self.words(fault.subject));
        if let Some(other) = fault.other {
            let place = find(&self.spans, other, None);
            if place != span {
                found.also = Some((place, self.words(other)));
            }
        }
        found
    }

    /// The user's name for a thing.
    fn words(&self, subject: Subject) -> String {
        let model = &self.model;
        let named = |what: &str, name: Option<&str>| match name {
            Some(name) => format!("{what} `{name}`"),
            None => what.to_string(),
        };
        match subject {
            Subject::Core => "the core".into(),
            Subject::Gap(i) => named("gap", model.gaps.get(i).map(|gap| gap.name.as_str())),
            Subject::Part(i) => named("part", model.parts.get(i).map(|part| part.name.as_str())),
            Subject::Material(i) => {
                named("material", model.materials.get(i).map(|m| m.name.as_str()))
            }
            Subject::Probe(i) => {
                named("probe", model.probes.get(i).map(|probe| probe.name.as_str()))
            }
            Subject::Sheet => "here".into(),
            Subject::Winding { winding, section } => match model.windings.get(winding) {
                Some(w) if 1 < w.sections.len() => {
                    format!("winding `{}`, section {}", w.name, section + 1)
                }
                w => named("winding", w.map(|w| w.name.as_str())),
            },
        }
    }
}

impl Reader<'_> {
    /// Where a subject, or one of its keys, stands.
    pub fn place(&self, subject: Subject, key: Option<&'static str>) -> Range<usize> {
        find(&self.spans, subject, key)
    }
}

/// The key's place, else the subject's header, else the sheet's first line.
fn find(spans: &Spans, subject: Subject, key: Option<&'static str>) -> Range<usize> {
    let of_key = key.and_then(|key| spans.get(&(subject, key)));
    of_key.or_else(|| spans.get(&(subject, ""))).cloned().unwrap_or(0..0)
}
