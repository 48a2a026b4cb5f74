//! CSV text with the header `H [A/m],B [T]` → a law; mistakes are placed in the CSV file.

use super::diagnostic::Diagnostic;
use super::{FILE_BYTES_MAX, size_message};
use crate::model::{BhTable, Interpolation, Law, LawError};
use std::ops::Range;
use std::path::Path;

const HEADER_HELP: &str =
    "write the first line `H [A/m],B [T]`, then one pair a line, decimal points, commas between";

/// Path of a file that a sheet names, as messages show it: beside the sheet.
pub(super) fn beside(sheet: &str, path: &str) -> String {
    Path::new(sheet).with_file_name(path).to_string_lossy().into_owned()
}

/// The law in a CSV text. Lines that begin with `#` are comments.
pub(super) fn law(text: &str, file: &str, interpolation: Interpolation) -> Result<Law, Diagnostic> {
    let fault = |span: Range<usize>, message: String, help: &str| {
        let mut found = Diagnostic::at(file, text, span, message, help.into());
        found.own_text = Some(text.into());
        found
    };
    if FILE_BYTES_MAX < text.len() as u64 {
        return Err(fault(0..0, size_message(text.len() as u64), HEADER_HELP));
    }
    let rows = rows(text).map_err(|(span, message, help)| fault(span, message, help))?;
    let (h, b) = rows.iter().map(|row| (row.h, row.b)).unzip();
    BhTable::new(h, b, interpolation).map(Law::Table).map_err(|error| {
        let span =
            error.row().and_then(|row| rows.get(row - 1)).map_or(0..0, |row| row.span.clone());
        let (message, help) = message_and_help(&error);
        fault(span, message, &help)
    })
}

/// A law's error says what is wrong and, behind a semicolon, what to do.
pub(super) fn message_and_help(error: &LawError) -> (String, String) {
    let text = error.to_string();
    match text.split_once("; ") {
        Some((message, help)) => (message.into(), help.into()),
        None => (text, "write what the data sheet says".into()),
    }
}

struct Row {
    h: f64,
    b: f64,
    span: Range<usize>,
}

type RowFault = (Range<usize>, String, &'static str);

fn rows(text: &str) -> Result<Vec<Row>, RowFault> {
    let mut reader = csv::ReaderBuilder::new()
        .has_headers(false)
        .comment(Some(b'#'))
        .trim(csv::Trim::All)
        .flexible(true)
        .from_reader(text.trim_start_matches('\u{feff}').as_bytes());
    let skipped = text.len() - text.trim_start_matches('\u{feff}').len();
    let mut rows = Vec::new();
    let mut has_header = false;
    for record in reader.records() {
        let record =
            record.map_err(|error| (0..0, format!("not a CSV table: {error}"), HEADER_HELP))?;
        let start = skipped + record.position().map_or(0, |p| p.byte() as usize);
        let span = record_span(text, start);
        if !has_header {
            check_header(&record, span)?;
            has_header = true;
            continue;
        }
        rows.push(row(&record, span, rows.len() + 1)?);
    }
    if !has_header {
        return Err((0..0, "the B–H table is empty".into(), HEADER_HELP));
    }
    Ok(rows)
}

/// The bytes of the first line at or after `start` that is neither blank nor a comment.
fn record_span(text: &str, start: usize) -> Range<usize> {
    let mut at = start;
    for line in text.get(start..).unwrap_or_default().split_inclusive('\n') {
        let content = line.trim();
        if !content.is_empty() && !content.starts_with('#') {
            let indent = line.len() - line.trim_start().len();
            return at + indent..at + indent + content.len();
        }
        at += line.len();
    }
    start..start
}

fn check_header(record: &csv::StringRecord, span: Range<usize>) -> Result<(), RowFault> {
    let header: Vec<&str> = record.iter().collect();
    if header == ["H [A/m]", "B [T]"] {
        return Ok(());
    }
    let message = match header[..] {
        [one] if one.contains(';') => "the columns are separated by semicolons".to_string(),
        _ => format!("the first line is `{}`, not `H [A/m],B [T]`", header.join(",")),
    };
    Err((span, message, HEADER_HELP))
}

fn row(record: &csv::StringRecord, span: Range<usize>, index: usize) -> Result<Row, RowFault> {
    if record.len() != 2 {
        let message = format!("row {index} has {} entries, not 2", record.len());
        return Err((span, message, HEADER_HELP));
    }
    let number = |field: &str| match field.parse::<f64>() {
        Ok(value) if value.is_finite() => Ok(value),
        _ => {
            let message =
                format!("row {index}: `{}` is not a finite number", field.escape_default());
            Err((span.clone(), message, HEADER_HELP))
        }
    };
    Ok(Row { h: number(&record[0])?, b: number(&record[1])?, span: span.clone() })
}
