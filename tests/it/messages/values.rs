//! Numbers and units.

use super::{check_broken, check_heads};
use expect_test::expect;

#[test]
fn a_current_is_no_length() {
    check_broken(
        "length = 0.30",
        "length = \"0.3 A\"",
        expect![[r#"
        buoy.toml:15:10: `length`: `0.3 A` is a current, not a length
            ╭─[ buoy.toml:15:10 ]
            │
         15 │ length = "0.3 A"
            │          ───┬───
            │             ╰───── here
            │
            │ Help: write a length such as "0.3 mm", or a bare number in mm
        ────╯
    "#]],
    );
}

#[test]
fn unknown_units_and_decimal_commas() {
    check_heads(
        "length = 0.30",
        "length = \"0.3 mmm\"",
        expect![[r#"
        buoy.toml:15:10: `length`: `mmm` is not a unit that is known here
          help: write a length such as "0.3 mm", or a bare number in mm
    "#]],
    );
    check_heads(
        "length = 0.30",
        "length = \"0,3 mm\"",
        expect![[r#"
        buoy.toml:15:10: `length`: `0,3 mm` has a decimal comma
          help: write a decimal point: "0.3 mm"
    "#]],
    );
    check_heads(
        "length = 0.30",
        "length = \"thin\"",
        expect![[r#"
        buoy.toml:15:10: `length`: `thin` does not begin with a number
          help: write a length such as "0.3 mm", or a bare number in mm
    "#]],
    );
    check_heads(
        "current = \"1.8 A\"",
        "current = \"1.8 V\"",
        expect![[r#"
        buoy.toml:22:11: `current`: `1.8 V` is a voltage, not a current
          help: write a current such as "1.8 A", or a bare number in SI units
    "#]],
    );
}

#[test]
fn nan_and_infinity_are_refused() {
    check_broken(
        "length = 0.30",
        "length = nan",
        expect![[r#"
        buoy.toml:15:10: `length` = nan is not a finite number
            ╭─[ buoy.toml:15:10 ]
            │
         15 │ length = nan
            │          ─┬─
            │           ╰─── here
            │
            │ Help: write a length such as "0.3 mm", or a bare number in mm
        ────╯
    "#]],
    );
    check_heads(
        "length = 0.30",
        "length = inf",
        expect![[r#"
        buoy.toml:15:10: `length` = inf is not a finite number
          help: write a length such as "0.3 mm", or a bare number in mm
    "#]],
    );
    check_heads(
        "length = 0.30",
        "length = \"1e999 mm\"",
        expect![[r#"
        buoy.toml:15:10: `length`: `1e999 mm` is beyond the range of numbers
          help: write a length such as "0.3 mm", or a bare number in mm
    "#]],
    );
    check_heads(
        "turns = 42",
        "turns = -inf",
        expect![[r#"
        buoy.toml:19:9: `turns` = -inf is not a finite number
          help: write a plain number without quotes and without a unit
    "#]],
    );
    check_heads(
        "length = 0.30",
        "length = 1e30",
        expect![[r#"
            buoy.toml:15:10: `length` = 1e30 is beyond 1 km, the most that is accepted
              help: write a number greater than 0, such as 0.30
        "#]],
    );
    check_heads(
        "length = 0.30",
        "length = 1e-30",
        expect![[r#"
            buoy.toml:15:10: `length` = 1e-30 is below 1 nm, the least that is accepted
              help: write a number greater than 0, such as 0.30
        "#]],
    );
}

#[test]
fn wishes_out_of_range() {
    let end = "current = \"1.8 A\"";
    let add = |text: &str| format!("{end}\n{text}");
    for (text, expected) in [
        (
            "[accuracy]\ninterval = \"0 %\"",
            expect![[r#"
            buoy.toml:24:12: `interval` = "0 %" must lie from 0.00001 % to 50 %
              help: write a ratio such as "3 %", or a bare ratio
        "#]],
        ),
        (
            "[accuracy]\ninterval = 1e-12\nmax_unknowns = 1.5",
            expect![[r#"
            buoy.toml:24:12: `interval` = 1e-12 must lie from 0.00001 % to 50 %
              help: write a ratio such as "3 %", or a bare ratio
            buoy.toml:25:16: `max_unknowns` = 1.5 must be a whole number from 1000 to 50000000
              help: write a whole number, at least 1000
        "#]],
        ),
        (
            "[estimate]\ninductance = \"0.7 mH\"\ninductance_factor = \"400 nH\"",
            expect![[r#"
            buoy.toml:25:21: `inductance` and `inductance_factor` are both given
              help: keep the one that is to be judged
        "#]],
        ),
        (
            "[estimate]\ninductance = \"0.7 mT\"",
            expect![[r#"
            buoy.toml:24:14: `inductance`: `0.7 mT` is a flux density, not an inductance
              help: write an inductance such as "250 nH", or a bare number in SI units
        "#]],
        ),
        (
            "[estimate]\ngap_correction = \"logg\"\ntolerance = -0.1",
            expect![[r#"
            buoy.toml:24:18: `gap_correction` = "logg" is unknown
              help: write one of "none", "one gap length", "log", "corner", "roters"; the nearest is "log"
            buoy.toml:25:13: `tolerance` = -0.1 must lie from 0.0001 % to 1000 %
              help: write a ratio such as "3 %", or a bare ratio
        "#]],
        ),
        (
            "[[require]]\nwinding = \"man\"\ncurrent = 0",
            expect![[r#"
            buoy.toml:23:1: `[[require]]` promises nothing
              help: add `least = "0.60 mH"`, `most`, or both
            buoy.toml:24:11: there is no winding `man`
              help: the nearest is `main`; the windings are: main
            buoy.toml:25:11: `current` = 0 must not be 0
              help: write a current such as "1.8 A", or a bare number in SI units
        "#]],
        ),
        (
            "[[require]]\nwinding = \"main\"\ncurrent = 1\nleast = 2e-3\nmost = 1e-3",
            expect![[r#"
            buoy.toml:26:9: `least` = 2e-3 is above `most` = 1e-3
              help: exchange the two
        "#]],
        ),
        (
            "[hot_spots]\ncount = -1\naveraging = 0",
            expect![[r#"
            buoy.toml:24:9: `count` = -1 must be a whole number from 0 to 1000
              help: write a whole number, at least 0
            buoy.toml:25:13: `averaging` = 0 must be greater than 0
              help: write a length such as "0.3 mm", or a bare number in mm
        "#]],
        ),
    ] {
        check_heads(end, &add(text), expected);
    }
}
