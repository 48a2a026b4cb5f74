//! The file as a whole: empty, broken, too large, in another encoding.

use super::{GOOD, check, check_broken, check_heads, heads, no_files, rendered};
use expect_test::expect;
use gapwright::input::{FILE_BYTES_MAX, check_size, decode, read, render};

#[test]
fn an_empty_sheet() {
    check(
        "",
        expect![[r#"
        buoy.toml:1:1: the sheet is empty
          help: write at least `[[windings]]` with `turns`, `radii` and `heights`
    "#]],
    );
    check(
        "  \n\t\n",
        expect![[r#"
        buoy.toml:1:1: the sheet is empty
          help: write at least `[[windings]]` with `turns`, `radii` and `heights`
    "#]],
    );
}

#[test]
fn broken_toml() {
    check_broken(
        "[core]",
        "[core",
        expect![[r#"
        buoy.toml:4:6: not valid TOML: unclosed table, expected `]`
           ╭─[ buoy.toml:4:6 ]
           │
         4 │ [core
           │      │
           │      ╰─ here
           │
           │ Help: write `key = value`, a table as `[core]`, one of a list as `[[gaps]]`; a text, and a number with a unit, stands between double quotes: "0.3 mm"
        ───╯
    "#]],
    );
    check_heads(
        "turns = 42",
        "turns = 42\nturns = 43",
        expect![[r#"
        buoy.toml:20:1: not valid TOML: duplicate key
          help: write `key = value`, a table as `[core]`, one of a list as `[[gaps]]`; a text, and a number with a unit, stands between double quotes: "0.3 mm"
    "#]],
    );
    check_heads(
        "turns = 42",
        "turns = ",
        expect![[r#"
        buoy.toml:19:9: not valid TOML: string values must be quoted, expected literal string
          help: write `key = value`, a table as `[core]`, one of a list as `[[gaps]]`; a text, and a number with a unit, stands between double quotes: "0.3 mm"
    "#]],
    );
    check_heads(
        "length = 0.30",
        "length = 0,30",
        expect![[r#"
        buoy.toml:15:11: not valid TOML: unexpected key or value, expected newline, `#`
          help: write `key = value`, a table as `[core]`, one of a list as `[[gaps]]`; a text, and a number with a unit, stands between double quotes: "0.3 mm"
    "#]],
    );
    check_heads(
        "length = 0.30",
        "length = 0.30 mm",
        expect![[r#"
        buoy.toml:15:10: not valid TOML: string values must be quoted, expected literal string
          help: write `key = value`, a table as `[core]`, one of a list as `[[gaps]]`; a text, and a number with a unit, stands between double quotes: "0.3 mm"
    "#]],
    );
}

#[test]
fn several_mistakes_are_reported_together_in_the_order_of_the_sheet() {
    let text = GOOD
        .replace("turns = 42", "turns = -42")
        .replace("permeability = 2000", "permeability = \"high\"")
        .replace("length", "lenght");
    let diagnostics = read(&text, "buoy.toml", &no_files).unwrap_err();
    expect![[r#"
        buoy.toml:2:16: `permeability` must be a number, but it is a text
          help: write a plain number without quotes and without a unit
        buoy.toml:15:1: unknown key `lenght` in `[[gaps]]`
          help: the nearest known key is `length`; known here: name, across, length, center
        buoy.toml:19:9: `turns` = -42 must be greater than 0
          help: write a number greater than 0, such as 42
    "#]]
    .assert_eq(&heads(&diagnostics));
}

#[test]
fn a_file_in_another_encoding() {
    let latin = [b"title = \"Dr\xfccker\"\n".as_slice(), GOOD.as_bytes()].concat();
    let found = decode(&latin, "buoy.toml").unwrap_err();
    expect![[r#"
        buoy.toml:1:12: the file is not UTF-8: byte 12 has the value 0xfc
           ╭─[ buoy.toml:1:12 ]
           │
         1 │ title = "Dr�cker"
           │            ┬
           │            ╰── here
           │
           │ Help: save it in the encoding UTF-8, which every text editor offers
        ───╯
    "#]]
    .assert_eq(&rendered(&[found], GOOD));
    let utf16: Vec<u8> =
        [0xff, 0xfe].into_iter().chain(GOOD.encode_utf16().flat_map(u16::to_le_bytes)).collect();
    let found = decode(&utf16, "buoy.toml").unwrap_err();
    expect![[r#"
        buoy.toml:1:1: the file is UTF-16, not UTF-8
          help: save it in the encoding UTF-8, which every text editor offers
    "#]]
    .assert_eq(&heads(&[found]));
}

#[test]
fn a_byte_order_mark_is_no_mistake() {
    let marked = format!("\u{feff}{GOOD}");
    assert_eq!(decode(marked.as_bytes(), "buoy.toml").unwrap(), GOOD);
}

#[test]
fn windows_line_ends_are_no_mistake_and_keep_the_places() {
    let text = GOOD.replace('\n', "\r\n");
    check(
        &text,
        expect![[r#"
        no mistakes
    "#]],
    );
    let text = text.replace("turns = 42", "turns = 0");
    check(
        &text,
        expect![[r#"
        buoy.toml:19:9: `turns` = 0 must be greater than 0
            ╭─[ buoy.toml:19:9 ]
            │
         19 │ turns = 0
            │         ┬
            │         ╰── here
            │
            │ Help: write a number greater than 0, such as 42
        ────╯
    "#]],
    );
}

#[test]
fn a_huge_file_is_refused_by_its_length() {
    check_size(FILE_BYTES_MAX, "buoy.toml").unwrap();
    let found = check_size(2_000_000_000, "buoy.toml").unwrap_err();
    expect![[r#"
        buoy.toml:1:1: the file has 2000000000 bytes; at most 1000000 are read
          help: is it the right file? a sheet has a few thousand bytes
    "#]]
    .assert_eq(&rendered(&[found], ""));
    let long = format!("# {}\n", "x".repeat(FILE_BYTES_MAX as usize));
    let diagnostics = read(&long, "buoy.toml", &no_files).unwrap_err();
    expect![[r#"
        buoy.toml:1:1: the file has 1000003 bytes; at most 1000000 are read
          help: is it the right file? a sheet has a few thousand bytes
    "#]]
    .assert_eq(&heads(&diagnostics));
}

#[test]
fn a_flood_of_mistakes_is_cut_and_says_so() {
    let text = format!("{GOOD}{}", "[[gaps]]\n".repeat(100));
    let diagnostics = read(&text, "buoy.toml", &no_files).unwrap_err();
    assert_eq!(diagnostics.len(), 50);
    let last = diagnostics.last().unwrap();
    assert!(last.help.ends_with("(150 more mistakes are not shown)"), "{}", last.help);
}

#[test]
fn deep_nesting_does_not_exhaust_the_stack() {
    let text = format!("title = {}\n", "[".repeat(100_000));
    let diagnostics = read(&text, "buoy.toml", &no_files).unwrap_err();
    assert!(!diagnostics.is_empty());
    for diagnostic in &diagnostics {
        render(diagnostic, &text, true);
    }
}

#[test]
fn colour_is_only_there_when_asked_for() {
    let text = GOOD.replace("turns = 42", "turns = 0");
    let diagnostics = read(&text, "buoy.toml", &no_files).unwrap_err();
    assert!(!render(&diagnostics[0], &text, false).contains('\u{1b}'));
    assert!(render(&diagnostics[0], &text, true).contains('\u{1b}'));
    let first_line = render(&diagnostics[0], &text, true).lines().next().unwrap().to_string();
    assert!(first_line.contains("buoy.toml:19:9:"), "{first_line}");
}
