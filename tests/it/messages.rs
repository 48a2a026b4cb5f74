//! Every class of mistake in a sheet has its message here, as the user sees it.

#![allow(clippy::too_many_lines, reason = "most lines of a test are the message that it expects")]

mod body;
mod coils;
mod keys;
mod materials;
mod placed;
mod text;
mod values;

use expect_test::{Expect, expect};
use gapwright::input::{Diagnostic, Sheet, read, render};

/// A sheet without mistakes, for the tests to break.
const GOOD: &str = r#"[materials.soft_ferrite]
permeability = 2000

[core]
material = "soft_ferrite"
form = "pot"
outer_diameter = 25.5
wall_inner_diameter = 21.2
post_diameter = 11.5
height = 16.1
window_height = 11.0

[[gaps]]
across = "post"
length = 0.30

[[windings]]
name = "main"
turns = 42
radii = [6.6, 10.2]
heights = [-4.9, 4.9]
current = "1.8 A"
"#;

fn no_files(path: &str) -> Result<String, String> {
    Err(format!("no such file `{path}`"))
}

fn rendered(diagnostics: &[Diagnostic], text: &str) -> String {
    diagnostics.iter().map(|d| render(d, text, false)).collect()
}

/// The messages of a sheet, all of them, against the expected text.
#[track_caller]
fn check(sheet_text: &str, expected: Expect) {
    let messages = match read(sheet_text, "buoy.toml", &no_files) {
        Ok(_) => "no mistakes\n".to_string(),
        Err(diagnostics) => rendered(&diagnostics, sheet_text),
    };
    expected.assert_eq(&messages);
}

/// The messages of the good sheet with one piece replaced.
#[track_caller]
fn check_broken(piece: &str, replacement: &str, expected: Expect) {
    assert!(GOOD.contains(piece), "`{piece}` is not in the good sheet");
    check(&GOOD.replacen(piece, replacement, 1), expected);
}

/// Only `file:line:column: message` of each mistake: for variants of a message shown in full before.
#[track_caller]
fn check_heads(piece: &str, replacement: &str, expected: Expect) {
    assert!(GOOD.contains(piece), "`{piece}` is not in the good sheet");
    let text = GOOD.replacen(piece, replacement, 1);
    let diagnostics = read(&text, "buoy.toml", &no_files).unwrap_err();
    expected.assert_eq(&heads(&diagnostics));
}

fn heads(diagnostics: &[Diagnostic]) -> String {
    let line = |d: &Diagnostic| {
        format!("{}:{}:{}: {}\n  help: {}\n", d.file, d.line, d.column, d.message, d.help)
    };
    diagnostics.iter().map(line).collect()
}

fn good() -> Sheet {
    read(GOOD, "buoy.toml", &no_files).unwrap()
}

#[test]
fn the_good_sheet_has_no_mistakes() {
    check(
        GOOD,
        expect![[r#"
        no mistakes
    "#]],
    );
}
