//! Windings, parts and probes.

use super::{GOOD, check, check_broken, check_heads};
use expect_test::expect;

#[test]
fn turns_must_be_positive() {
    check_broken(
        "turns = 42",
        "turns = 0",
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
    check_heads(
        "turns = 42",
        "turns = -3",
        expect![[r#"
        buoy.toml:19:9: `turns` = -3 must be greater than 0
          help: write a number greater than 0, such as 42
    "#]],
    );
}

#[test]
fn all_currents_zero_means_no_field() {
    check_broken(
        "current = \"1.8 A\"",
        "current = 0",
        expect![[r#"
        buoy.toml:22:11: the currents of all windings are 0, so there is no field
            ╭─[ buoy.toml:22:11 ]
            │
         22 │ current = 0
            │           ┬
            │           ╰── here
            │
            │ Help: give one of them a current, such as "1 A"
        ────╯
    "#]],
    );
}

#[test]
fn inverted_radii_and_heights() {
    check_broken(
        "radii = [6.6, 10.2]",
        "radii = [10.2, 6.6]",
        expect![[r#"
        buoy.toml:20:9: `radii` = [10.2, 6.6]: the inner radius is not below the outer radius
            ╭─[ buoy.toml:20:9 ]
            │
         20 │ radii = [10.2, 6.6]
            │         ─────┬─────
            │              ╰─────── here
            │
            │ Help: write the smaller number first, and leave some room between the two
        ────╯
    "#]],
    );
    check_heads(
        "heights = [-4.9, 4.9]",
        "heights = [4.9, -4.9]",
        expect![[r#"
        buoy.toml:21:11: `heights` = [4.9, -4.9]: the bottom is not below the top
          help: write the smaller number first, and leave some room between the two
    "#]],
    );
    check_heads(
        "heights = [-4.9, 4.9]",
        "heights = [4.9, 4.9]",
        expect![[r#"
        buoy.toml:21:11: `heights` = [4.9, 4.9]: the bottom is not below the top
          help: write the smaller number first, and leave some room between the two
    "#]],
    );
}

#[test]
fn a_winding_may_touch_the_axis_but_not_cross_it() {
    check(
        "[[windings]]\nturns = 5\nradii = [0, 2]\nheights = [0, 1]\n",
        expect![[r#"
        no mistakes
    "#]],
    );
    check_heads(
        "radii = [6.6, 10.2]",
        "radii = [-6.6, 10.2]",
        expect![[r#"
        buoy.toml:20:10: `radii` = -6.6 must not be negative
          help: write a length such as "0.3 mm", or a bare number in mm
    "#]],
    );
}

#[test]
fn names_must_differ() {
    let twice = format!(
        "{GOOD}\n[[windings]]\nname = \"main\"\nturns = 2\nradii = [1, 2]\nheights = [20, 21]\n"
    );
    check(
        &twice,
        expect![[r#"
        buoy.toml:25:8: two windings have the name `main`
            ╭─[ buoy.toml:25:8 ]
            │
         18 │ name = "main"
            │        ───┬──
            │           ╰──── the first one
            │
         25 │ name = "main"
            │        ───┬──
            │           ╰──── here
            │
            │ Help: give each its own name
        ────╯
    "#]],
    );
    check_heads(
        "name = \"main\"",
        "name = \"\"",
        expect![[r#"
        buoy.toml:18:8: `name` is empty
          help: write a short text on one line
    "#]],
    );
    check_heads(
        "name = \"main\"",
        "name = \"\\u001b[31m\"",
        expect![[r#"
        buoy.toml:18:8: `name` holds a control character
          help: write a short text on one line
    "#]],
    );
}

#[test]
fn a_sheet_needs_windings() {
    check(
        "title = \"nothing\"\n",
        expect![[r#"
        buoy.toml:1:1: the sheet has no windings
           ╭─[ buoy.toml:1:1 ]
           │
         1 │ title = "nothing"
           │ │
           │ ╰─ here
           │
           │ Help: add `[[windings]]` with `turns = 42`, `radii = [6.6, 10.2]` and `heights = [-4.9, 4.9]`
        ───╯
    "#]],
    );
    check(
        "[[windings]]\nturns = 3\nradii = [1, 2]\nheights = [0, 1]\nsections = []\n",
        expect![[r#"
            buoy.toml:2:9: `turns` stands beside `sections`
               ╭─[ buoy.toml:2:9 ]
               │
             2 │ turns = 3
               │         ┬
               │         ╰── here
               │
             5 │ sections = []
               │            ─┬
               │             ╰── the sections
               │
               │ Help: write `turns` inside each section only
            ───╯
            buoy.toml:3:9: `radii` stands beside `sections`
               ╭─[ buoy.toml:3:9 ]
               │
             3 │ radii = [1, 2]
               │         ───┬──
               │            ╰──── here
               │
             5 │ sections = []
               │            ─┬
               │             ╰── the sections
               │
               │ Help: write `radii` inside each section only
            ───╯
            buoy.toml:4:11: `heights` stands beside `sections`
               ╭─[ buoy.toml:4:11 ]
               │
             4 │ heights = [0, 1]
               │           ───┬──
               │              ╰──── here
             5 │ sections = []
               │            ─┬
               │             ╰── the sections
               │
               │ Help: write `heights` inside each section only
            ───╯
            buoy.toml:5:12: `sections` is empty
               ╭─[ buoy.toml:5:12 ]
               │
             5 │ sections = []
               │            ─┬
               │             ╰── here
               │
               │ Help: write `sections = [{ turns = 21, radii = [6.6, 8.4], heights = [-4.9, 4.9] }, …]`
            ───╯
        "#]],
    );
}

#[test]
fn parts_and_probes() {
    let end = "current = \"1.8 A\"";
    let add = |text: &str| format!("{end}\n{text}");
    for (text, expected) in [
        (
            "[[parts]]\nmaterial = \"soft_ferrite\"\noutline = [[0, 20], [5, 20]]",
            expect![[r#"
            buoy.toml:25:11: `outline` must be a list of three corners or more, but it is a list of 2
              help: write three corners or more, such as [[0, 0], [5, 0], [5, 2, 0.5]]
        "#]],
        ),
        (
            "[[parts]]\nmaterial = \"soft_ferrite\"\noutline = [[0, 20], [-5, 20], [5, 21, -1], [0, 22, 1, 1]]",
            expect![[r#"
            buoy.toml:25:22: `outline` = -5 must not be negative
              help: write a length such as "0.3 mm", or a bare number in mm
            buoy.toml:25:39: `outline` = -1 must not be negative
              help: write a length such as "0.3 mm", or a bare number in mm
            buoy.toml:25:44: `outline` must hold corners [r, z] or [r, z, fillet], but here is a list of 4
              help: write radius, height and, for a rounded corner, the fillet's radius
        "#]],
        ),
        (
            "[[parts]]\noutline = \"round\"",
            expect![[r#"
            buoy.toml:23:1: `[[parts]]` lacks `material`
              help: add `material = "soft_ferrite"`
            buoy.toml:24:11: `outline` must be a list of three corners or more, but it is a text
              help: write three corners or more, such as [[0, 0], [5, 0], [5, 2, 0.5]]
        "#]],
        ),
        (
            "[[probes]]\nat = [0]",
            expect![[r#"
            buoy.toml:24:6: `at` must be a point [r, z], but it is a list of 1
              help: write radius and height, such as [5.0, 0.0]
        "#]],
        ),
        (
            "[[probes]]\nat = [0, 0]\npoints = 3",
            expect![[r#"
            buoy.toml:25:10: `points` stands beside `at`
              help: keep `at` for a point, or `from` and `to` for a line
        "#]],
        ),
        (
            "[[probes]]\nfrom = [0, 0]",
            expect![[r#"
            buoy.toml:23:1: `[[probes]]` lacks `to`
              help: add `to = [0, 5]`
        "#]],
        ),
        (
            "[[probes]]\nfrom = [0, 0]\nto = [0, 0]",
            expect![[r#"
            buoy.toml:25:6: the probe's `to` equals its `from`
              help: write `at = [r, z]` for a single point
        "#]],
        ),
        (
            "[[probes]]\nfrom = [0, 0]\nto = [0, 1]\npoints = 1.5",
            expect![[r#"
            buoy.toml:26:10: `points` = 1.5 must be a whole number from 2 to 100000
              help: write a whole number, at least 2
        "#]],
        ),
    ] {
        check_heads(end, &add(text), expected);
    }
}
