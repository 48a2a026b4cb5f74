//! The walker over the parsed sheet: tables, lists, unknown and missing keys, and where things stand.
//!
//! A mistake is noted and reading goes on with a placeholder (NaN for a number), so that one run
//! reports all of them; the placeholders never leave `read`, which fails when anything was noted.

use super::diagnostic::Diagnostic;
use super::keys::{self, Table};
use super::nearest::{distance, nearest};
use crate::model::Subject;
use std::collections::BTreeMap;
use std::ops::Range;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// Where each subject and its keys stand in the sheet; the key "" is the subject's header.
pub(super) type Spans = BTreeMap<(Subject, &'static str), Range<usize>>;

/// Fetches the text of a file that the sheet names, or says why it cannot.
pub(super) type ReadFile<'a> = &'a dyn Fn(&str) -> Result<String, String>;

/// Most entries of one list; real sheets have a dozen.
pub(super) const ITEMS_MAX: usize = 1000;

/// The state of one reading.
pub(super) struct Reader<'a> {
    pub text: &'a str,
    pub name: &'a str,
    pub read_file: ReadFile<'a>,
    /// Power of ten and factor that turn a bare length into metres.
    pub bare_length: (i32, f64),
    /// The unit's name, for messages.
    pub length_unit: &'static str,
    pub diagnostics: Vec<Diagnostic>,
    pub spans: Spans,
}

/// One table of the sheet, with the keys that it may have.
#[derive(Clone, Copy)]
pub(super) struct Fields<'a> {
    pub entries: &'a DeTable<'a>,
    pub header: (usize, usize),
    pub table: &'static Table,
}

impl<'a> Fields<'a> {
    /// The value of a key.
    pub fn get(&self, key: &str) -> Option<&'a Spanned<DeValue<'a>>> {
        self.entries.get(key)
    }

    /// The key's value is there.
    pub fn has(&self, key: &str) -> bool {
        self.entries.contains_key(key)
    }

    /// An unknown key is so near to this missing one that its own message says enough.
    pub fn has_misspelled(&self, key: &str) -> bool {
        const EDITS_MAX: usize = 2;
        let known = self.table.keys;
        self.entries.keys().map(|word| word.get_ref()).any(|word| {
            !known.contains(&&**word)
                && distance(word, key) <= EDITS_MAX
                && nearest(word, known) == Some(key)
        })
    }

    /// Bytes of the value, or of the header when the key is missing.
    pub fn span(&self, key: &str) -> Range<usize> {
        self.get(key).map_or(self.header_span(), Spanned::span)
    }

    /// Bytes of the table's header.
    pub fn header_span(&self) -> Range<usize> {
        self.header.0..self.header.1
    }
}

impl<'a> Reader<'a> {
    /// Notes a mistake.
    pub fn fault(
        &mut self,
        span: Range<usize>,
        message: impl Into<String>,
        help: impl Into<String>,
    ) {
        let found = Diagnostic::at(self.name, self.text, span, message.into(), help.into());
        self.diagnostics.push(found);
    }

    /// Notes a mistake that involves a second place.
    pub fn fault_pair(
        &mut self,
        span: Range<usize>,
        also: (Range<usize>, &str),
        message: impl Into<String>,
        help: impl Into<String>,
    ) {
        self.fault(span, message, help);
        if let Some(last) = self.diagnostics.last_mut() {
            last.also = Some((also.0, also.1.into()));
        }
    }

    /// The written value, shortened for a message.
    pub fn written(&self, span: &Range<usize>) -> String {
        const LETTERS_MAX: usize = 40;
        let line = self.text[span.clone()].lines().next().unwrap_or_default();
        let short: String = line.chars().take(LETTERS_MAX).collect();
        if short.len() < span.len() { format!("{short}…") } else { short }
    }

    /// Wraps a table and notes its unknown keys.
    pub fn fields(
        &mut self,
        entries: &'a DeTable<'a>,
        header: Range<usize>,
        table: &'static Table,
    ) -> Fields<'a> {
        let mut unknown: Vec<_> =
            entries.iter().filter(|(key, _)| !table.keys.contains(&&**key.get_ref())).collect();
        unknown.sort_by_key(|(key, _)| key.span().start);
        for (key, value) in unknown {
            let word: String = key.get_ref().chars().take(60).collect();
            let is_top = *table == keys::TOP;
            let (what, help) = match value.get_ref() {
                DeValue::Table(_) if is_top => {
                    (format!("unknown table `[{word}]`"), keys::table_advice(&word))
                }
                DeValue::Array(list) if is_top && list.iter().any(|v| v.get_ref().is_table()) => {
                    (format!("unknown table `[[{word}]]`"), keys::table_advice(&word))
                }
                _ => {
                    let preposition = if is_top { "at" } else { "in" };
                    (
                        format!("unknown key `{word}` {preposition} {}", table.shown),
                        keys::advice(table, &word),
                    )
                }
            };
            self.fault(key.span(), what, help);
        }
        Fields { entries, header: (header.start, header.end), table }
    }

    /// The table under `key` of the top level, when there is one.
    pub fn table(
        &mut self,
        top: &Fields<'a>,
        key: &str,
        table: &'static Table,
    ) -> Option<Fields<'a>> {
        let value = top.get(key)?;
        match value.get_ref() {
            DeValue::Table(entries) => Some(self.fields(entries, value.span(), table)),
            other => {
                let what = kind_of(other);
                let message = format!("`{key}` must be one table, but it is {what}");
                self.fault(
                    value.span(),
                    message,
                    format!("write `[{key}]` once, in single brackets, its keys below"),
                );
                None
            }
        }
    }

    /// The tables of a list such as `[[gaps]]`, in the order of the sheet.
    pub fn list(&mut self, top: &Fields<'a>, key: &str, table: &'static Table) -> Vec<Fields<'a>> {
        let Some(value) = top.get(key) else { return Vec::new() };
        let help = match table.shown.contains("[[") {
            true => format!("write `[[{key}]]`, in double brackets, before each one"),
            false => format!("write `{key} = [{{ … }}, {{ … }}]`"),
        };
        let DeValue::Array(list) = value.get_ref() else {
            let message =
                format!("`{key}` must be a list of tables, but it is {}", kind_of(value.get_ref()));
            self.fault(value.span(), message, help);
            return Vec::new();
        };
        if ITEMS_MAX < list.len() {
            let message =
                format!("{} entries of `{key}`, where at most {ITEMS_MAX} are read", list.len());
            self.fault(value.span(), message, "leave out what does not matter for the field");
            return Vec::new();
        }
        let mut tables = Vec::new();
        for item in list.iter() {
            match item.get_ref() {
                DeValue::Table(entries) => tables.push(self.fields(entries, item.span(), table)),
                other => {
                    let message = format!(
                        "`{key}` must be a list of tables, but it holds {}",
                        kind_of(other)
                    );
                    self.fault(item.span(), message, help.clone());
                }
            }
        }
        tables
    }

    /// The value of a key that must be there; notes its absence.
    pub fn must(
        &mut self,
        fields: &Fields<'a>,
        key: &'static str,
    ) -> Option<&'a Spanned<DeValue<'a>>> {
        let value = fields.get(key);
        if value.is_none() && !fields.has_misspelled(key) {
            let message = format!("{} lacks `{key}`", fields.table.shown);
            let help = format!("add `{key} = {}`", keys::example(key));
            self.fault(fields.header_span(), message, help);
        }
        value
    }

    /// Remembers where a subject and its keys stand.
    pub fn remember(&mut self, subject: Subject, fields: &Fields<'a>) {
        self.spans.insert((subject, ""), fields.header_span());
        for key in fields.table.keys {
            if fields.has(key) {
                self.spans.insert((subject, key), fields.span(key));
            }
        }
    }
}

/// A TOML value's kind, with its article.
pub(super) fn kind_of(value: &DeValue<'_>) -> &'static str {
    match value {
        DeValue::String(_) => "a text",
        DeValue::Integer(_) | DeValue::Float(_) => "a number",
        DeValue::Boolean(_) => "true or false",
        DeValue::Datetime(_) => "a date",
        DeValue::Array(_) => "a list",
        DeValue::Table(_) => "a table",
    }
}
