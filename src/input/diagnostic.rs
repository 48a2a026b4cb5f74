//! One mistake, placed in its file, and its printed form with the line underlined.

use ariadne::{Color, Config, IndexType, Label, Report, ReportKind, Source};
use std::ops::Range;

/// Longest line that a snippet shows [bytes]; a longer one would bury the message.
const SNIPPET_LINE_MAX: usize = 400;

/// One mistake with its place, the numbers, and what to write instead.
#[derive(Debug, Clone, PartialEq)]
pub struct Diagnostic {
    pub file: String,
    /// From 1.
    pub line: usize,
    /// In characters, from 1.
    pub column: usize,
    /// Bytes of the file's text.
    pub span: Range<usize>,
    /// What is wrong, with the numbers: lower case, no final stop.
    pub message: String,
    /// What stands beside the underlined place.
    pub label: String,
    /// What to write instead.
    pub help: String,
    /// A second place that is involved, with what stands beside it.
    pub also: Option<(Range<usize>, String)>,
    /// The text of `file` when that is not the sheet (a B–H table read by the sheet).
    pub own_text: Option<String>,
}

impl Diagnostic {
    /// A mistake at `span` of `text`, which is the content of `file`.
    pub fn at(file: &str, text: &str, span: Range<usize>, message: String, help: String) -> Self {
        let span = clip(text, span);
        let (line, column) = line_and_column(text, span.start);
        let label = "here".into();
        let file = file.into();
        Diagnostic { file, line, column, span, message, label, help, also: None, own_text: None }
    }

    /// The same with another word beside the underlined place.
    pub fn labelled(mut self, label: impl Into<String>) -> Self {
        self.label = label.into();
        self
    }
}

/// Line and column in characters, both from 1, of a byte offset.
pub fn line_and_column(text: &str, offset: usize) -> (usize, usize) {
    let before = &text[..clip(text, offset..offset).start];
    let line_start = before.rfind('\n').map_or(0, |at| at + 1);
    (before.matches('\n').count() + 1, before[line_start..].chars().count() + 1)
}

/// The span moved inward to the text and to character boundaries.
fn clip(text: &str, span: Range<usize>) -> Range<usize> {
    let inside = |mut at: usize| {
        at = at.min(text.len());
        while !text.is_char_boundary(at) {
            at -= 1;
        }
        at
    };
    let start = inside(span.start);
    start..inside(span.end).max(start)
}

/// Prints a diagnostic: `file:line:column: message`, the underlined snippet, the help.
///
/// `text` is the sheet's text; a diagnostic about another file brings its own.
pub fn render(diagnostic: &Diagnostic, text: &str, colour: bool) -> String {
    let text = diagnostic.own_text.as_deref().unwrap_or(text);
    let headline = headline(diagnostic, colour);
    let shown = printable(text);
    if !has_snippet(&shown, diagnostic) {
        return format!("{headline}\n  help: {}\n", printable(&diagnostic.help));
    }
    let file = printable(&diagnostic.file);
    let mark = |span: &Range<usize>, words: &str, color| {
        Label::new((file.as_str(), clip(&shown, span.clone())))
            .with_message(printable(words))
            .with_color(color)
    };
    let span = clip(&shown, diagnostic.span.clone());
    let mut labels = vec![mark(&diagnostic.span, &diagnostic.label, Color::Red)];
    if let Some((span, words)) = &diagnostic.also {
        // In the order of the text, else the snippet is drawn in two pieces.
        let at = usize::from(diagnostic.span.start <= span.start);
        labels.insert(at, mark(span, words, Color::Yellow));
    }
    let report = Report::build(ReportKind::Error, (file.as_str(), span))
        .with_config(Config::default().with_color(colour).with_index_type(IndexType::Byte))
        .with_labels(labels)
        .with_help(printable(&diagnostic.help))
        .finish();
    let mut bytes = Vec::new();
    // Writing to memory cannot fail; should it, the headline still stands.
    let _ = report.write((file.as_str(), Source::from(shown.as_str())), &mut bytes);
    format!("{headline}\n{}", below_first_line(&String::from_utf8_lossy(&bytes)))
}

/// An empty file and an endless line have nothing to underline.
fn has_snippet(text: &str, diagnostic: &Diagnostic) -> bool {
    let spans = [Some(&diagnostic.span), diagnostic.also.as_ref().map(|(span, _)| span)];
    spans.into_iter().flatten().all(|span| {
        let span = clip(text, span.clone());
        let start = text[..span.start].rfind('\n').map_or(0, |at| at + 1);
        let end = text[span.start..].find('\n').map_or(text.len(), |at| span.start + at);
        end - start <= SNIPPET_LINE_MAX && !text[start..end].trim().is_empty()
    })
}

/// Control characters could drive the reader's terminal: each byte of one becomes a `?`, so that
/// spans stay valid.
fn printable(text: &str) -> String {
    let is_harmless = |c: char| !c.is_control() || matches!(c, '\n' | '\t' | '\r');
    if text.chars().all(is_harmless) {
        return text.into();
    }
    text.chars().fold(String::with_capacity(text.len()), |mut shown, c| {
        if is_harmless(c) {
            shown.push(c);
        } else {
            shown.extend(std::iter::repeat_n('?', c.len_utf8()));
        }
        shown
    })
}

/// `file:line:column: message`, bold red up to the message where colour is wanted.
fn headline(diagnostic: &Diagnostic, colour: bool) -> String {
    let (on, off) = if colour { ("\u{1b}[1;31m", "\u{1b}[0m") } else { ("", "") };
    let place = format!("{}:{}:{}:", diagnostic.file, diagnostic.line, diagnostic.column);
    let message = diagnostic.message.replace('\n', " ");
    format!("{on}{}{off} {}", printable(&place), printable(&message))
}

/// The drawing below its own headline, without the blanks that it leaves at line ends.
fn below_first_line(report: &str) -> String {
    report.lines().skip(1).map(|line| format!("{}\n", line.trim_end())).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn columns_count_characters_and_lines_count_from_one() {
        let text = "a = 1\nµ = \"x\"\n";
        assert_eq!(line_and_column(text, 0), (1, 1));
        assert_eq!(line_and_column(text, text.find('=').unwrap()), (1, 3));
        assert_eq!(line_and_column(text, text.find('"').unwrap()), (2, 5));
        assert_eq!(line_and_column(text, 9999), (3, 1));
    }

    #[test]
    fn control_characters_never_reach_the_terminal() {
        let text = "name = \"\u{1b}[31m\u{9b}\"\n";
        let diagnostic = Diagnostic::at("a\u{7}.toml", text, 7..9, "bad \u{1b}".into(), "x".into());
        let rendered = render(&diagnostic, text, false);
        assert!(rendered.chars().all(|c| !c.is_control() || c == '\n'), "{rendered:?}");
    }

    #[test]
    fn an_endless_line_is_not_printed() {
        let text = "x".repeat(100_000);
        let diagnostic = Diagnostic::at("a.toml", &text, 7..9, "bad".into(), "good".into());
        assert_eq!(render(&diagnostic, &text, false), "a.toml:1:8: bad\n  help: good\n");
    }

    #[test]
    fn a_span_past_the_end_does_not_panic() {
        let diagnostic = Diagnostic::at("a.toml", "", 7..9, "empty".into(), "write".into());
        assert_eq!((diagnostic.line, diagnostic.column), (1, 1));
        assert!(render(&diagnostic, "", false).starts_with("a.toml:1:1: empty"));
    }
}
