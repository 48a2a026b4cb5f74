//! The sheet's text → [`Model`]; the only owner of the sheet's format and of its error messages.
//!
//! Opens no file: the caller hands over the text, and a function that fetches the texts which the
//! sheet names. Tables and keys are in `keys`; each module below reads a few of the tables.

#![allow(
    clippy::result_large_err,
    reason = "a diagnostic is built once, when reading ends; its size costs nothing"
)]

mod bh_file;
mod body;
mod bounds;
mod coils;
mod diagnostic;
mod keys;
mod materials;
mod nearest;
mod place;
mod schema;
mod values;
mod walk;
mod wishes;

pub use diagnostic::{Diagnostic, render};
pub use schema::schema;

use crate::model::{Interpolation, Law, Model};
use crate::units::{Dimension, read as read_quantity};
use std::path::Path;
use toml::de::DeTable;
use walk::{Fields, Reader, Spans};

/// Largest sheet or table that is read [bytes]; a page of text has 3000.
pub const FILE_BYTES_MAX: u64 = 1_000_000;

/// Most mistakes that one reading reports; more would scroll the first ones away.
const DIAGNOSTICS_MAX: usize = 50;

/// A sheet that was understood: the problem, and where each piece of it stands.
#[derive(Debug, Clone, PartialEq)]
pub struct Sheet {
    pub model: Model,
    /// The file's name, as messages show it.
    pub name: String,
    pub text: String,
    spans: Spans,
}

/// Reads a sheet; or tells everything that is wrong with it, in the order of the text.
///
/// - `name`: the file's name as the user wrote it, for messages
/// - `read_file`: fetches the text of a file whose path is relative to the sheet
pub fn read(
    text: &str,
    name: &str,
    read_file: &dyn Fn(&str) -> Result<String, String>,
) -> Result<Sheet, Vec<Diagnostic>> {
    if text.trim().is_empty() {
        let help = "write at least `[[windings]]` with `turns`, `radii` and `heights`";
        return Err(vec![Diagnostic::at(
            name,
            text,
            0..0,
            "the sheet is empty".into(),
            help.into(),
        )]);
    }
    if FILE_BYTES_MAX < text.len() as u64 {
        return Err(vec![too_large(text.len() as u64, name)]);
    }
    let (document, errors) = DeTable::parse_recoverable(text);
    if !errors.is_empty() {
        return Err(syntax(&errors, text, name));
    }
    let mut reader = Reader {
        text,
        name,
        read_file,
        bare_length: (-3, 1.0),
        length_unit: "mm",
        diagnostics: Vec::new(),
        spans: Spans::new(),
    };
    let top = reader.fields(document.get_ref(), 0..0, &keys::TOP);
    let model = reader.model(&top);
    let Reader { diagnostics, spans, .. } = reader;
    if diagnostics.is_empty() {
        Ok(Sheet { model, name: name.into(), text: text.into(), spans })
    } else {
        Err(in_order(diagnostics))
    }
}

impl<'a> Reader<'a> {
    fn model(&mut self, top: &Fields<'a>) -> Model {
        self.length_unit(top);
        let stem = Path::new(self.name).file_stem().map(|stem| stem.to_string_lossy().into_owned());
        let title = self.text(top, "title").or(stem).unwrap_or_default();
        let materials = self.materials(top);
        let core = self.core(top, &materials);
        let gaps = self.gaps(top, core.as_ref());
        let windings = self.windings(top);
        Model {
            title,
            core,
            gaps,
            parts: self.parts(top, &materials),
            probes: self.probes(top),
            accuracy: self.accuracy(top),
            estimate: self.estimate(top),
            requirements: self.requirements(top, &windings),
            hot_spots: self.hot_spots(top),
            materials,
            windings,
        }
    }

    fn length_unit(&mut self, top: &Fields<'a>) {
        let units = [
            ("mm", ("mm", (-3, 1.0))),
            ("m", ("m", (0, 1.0))),
            ("cm", ("cm", (-2, 1.0))),
            // 1 in = 0.0254 m exactly.
            ("in", ("in", (-4, 254.0))),
        ];
        if let Some((unit, scale)) = self.choice(top, "length_unit", &units) {
            (self.length_unit, self.bare_length) = (unit, scale);
        }
    }
}

/// Replaces one material's law by the table in `csv_text`, for one run (`--material NAME=FILE.csv`).
///
/// `file` is the table's name in messages. The interpolation stays that of the table replaced.
pub fn replace_material(
    sheet: &mut Sheet,
    name: &str,
    csv_text: &str,
    file: &str,
) -> Result<(), Diagnostic> {
    let Some(index) = sheet.model.materials.iter().position(|m| m.name == name) else {
        let (message, help) = materials::unknown_material(name, &sheet.model.materials);
        return Err(Diagnostic::at(&sheet.name, &sheet.text, 0..0, message, help));
    };
    let material = &mut sheet.model.materials[index];
    let interpolation = match &material.law {
        Law::Table(table) => table.interpolation(),
        _ => Interpolation::Smooth,
    };
    material.law = bh_file::law(csv_text, file, interpolation)?;
    Ok(())
}

/// Reads a relative width of the interval ("0.01 %", "1e-4"), with the bounds that the sheet has for it.
pub fn interval(text: &str) -> Result<f64, String> {
    let value =
        read_quantity(text, Dimension::Ratio, (0, 1.0)).map_err(|error| error.to_string())?;
    match wishes::INTERVALS.complaint(value, bounds::RATIO) {
        Some(complaint) => Err(format!("`{}` {complaint}", text.trim())),
        None => Ok(value),
    }
}

/// The text of a file's bytes, without a byte-order mark; or where they stop being UTF-8.
pub fn decode(bytes: &[u8], name: &str) -> Result<String, Diagnostic> {
    match std::str::from_utf8(bytes) {
        Ok(text) => Ok(text.strip_prefix('\u{feff}').unwrap_or(text).to_string()),
        Err(error) => {
            let at = error.valid_up_to();
            let message = match bytes {
                [0xff, 0xfe, ..] | [0xfe, 0xff, ..] => "the file is UTF-16, not UTF-8".to_string(),
                _ => format!(
                    "the file is not UTF-8: byte {} has the value {:#04x}",
                    at + 1,
                    bytes[at]
                ),
            };
            let shown = String::from_utf8_lossy(bytes);
            let help = "save it in the encoding UTF-8, which every text editor offers".into();
            let mut found = Diagnostic::at(name, &shown, at..at + 3, message, help);
            found.own_text = Some(shown.into_owned());
            Err(found)
        }
    }
}

/// Refuses a file by its length, before it is read.
pub fn check_size(n_bytes: u64, name: &str) -> Result<(), Diagnostic> {
    if n_bytes <= FILE_BYTES_MAX { Ok(()) } else { Err(too_large(n_bytes, name)) }
}

fn too_large(n_bytes: u64, name: &str) -> Diagnostic {
    let help = "is it the right file? a sheet has a few thousand bytes".into();
    Diagnostic::at(name, "", 0..0, size_message(n_bytes), help)
}

fn size_message(n_bytes: u64) -> String {
    format!("the file has {n_bytes} bytes; at most {FILE_BYTES_MAX} are read")
}

/// The parser's own complaints about the text as TOML.
fn syntax(errors: &[toml::de::Error], text: &str, name: &str) -> Vec<Diagnostic> {
    let help = "write `key = value`, a table as `[core]`, one of a list as `[[gaps]]`; a text, and a number with \
                a unit, stands between double quotes: \"0.3 mm\"";
    let placed = errors.iter().map(|error| {
        let span = error.span().unwrap_or(0..0);
        let message = format!("not valid TOML: {}", error.message().trim().replace('\n', "; "));
        Diagnostic::at(name, text, span, message, help.into())
    });
    in_order(placed.collect())
}

/// Sorted by place, without repetitions, shortened to the first few.
fn in_order(mut diagnostics: Vec<Diagnostic>) -> Vec<Diagnostic> {
    // A mistake in another file comes last: its place there says nothing about the order here.
    diagnostics.sort_by_key(|d| (d.own_text.is_some(), d.span.start));
    diagnostics.dedup();
    let n_more = diagnostics.len().saturating_sub(DIAGNOSTICS_MAX);
    diagnostics.truncate(DIAGNOSTICS_MAX);
    if let Some(last) = diagnostics.last_mut()
        && 0 < n_more
    {
        last.help = format!("{} ({n_more} more mistakes are not shown)", last.help);
    }
    diagnostics
}
