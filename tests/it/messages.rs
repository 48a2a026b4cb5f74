//! Every class of mistake in a sheet has its message here, as the user sees it.

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
    let line = |d: &Diagnostic| format!("{}:{}:{}: {}\n  help: {}\n", d.file, d.line, d.column, d.message, d.help);
    diagnostics.iter().map(line).collect()
}

fn good() -> Sheet {
    read(GOOD, "buoy.toml", &no_files).unwrap()
}

#[test]
fn the_good_sheet_has_no_mistakes() {
    check(GOOD, expect![[r#"
        no mistakes
    "#]]);
}

#[test]
fn names_the_nearest_key_for_an_unknown_one() {
    check_broken("outer_diameter = 25.5", "outer_diametre = 25.5", expect![[r#"
        [31mbuoy.toml:4:1:[0m `[core]` lacks `outer_diameter` or `outer_legs_area`
           ╭─[ buoy.toml:4:1 ]
           │
         4 │ [core]
           │ ───┬──
           │    ╰──── here
           │
           │ Help: add `outer_diameter = 25.5`, or `outer_legs_area = "95 mm²"` for legs that are not round
        ───╯
        [31mbuoy.toml:7:1:[0m unknown key `outer_diametre` in `[core]`
           ╭─[ buoy.toml:7:1 ]
           │
         7 │ outer_diametre = 25.5
           │ ───────┬──────
           │        ╰──────── here
           │
           │ Help: the nearest known key is `outer_diameter`; known here: material, form, outer_diameter, outer_legs_area, wall_inner_diameter, post_diameter, hole_diameter, height, window_height, flange_diameter, diameter, corner_radius, joint
        ───╯
    "#]]);
}

#[test]
fn names_the_nearest_table_for_an_unknown_one() {
    check_broken("[[gaps]]", "[[gap]]", expect![[r#"
        [31mbuoy.toml:13:3:[0m unknown table `[[gap]]`
            ╭─[ buoy.toml:13:3 ]
            │
         13 │ [[gap]]
            │   ─┬─
            │    ╰─── here
            │
            │ Help: the nearest known key is `gaps`; known here: title, length_unit, materials, core, gaps, windings, parts, probes, accuracy, estimate, require, hot_spots
        ────╯
    "#]]);
    check_broken("[core]", "[kore]", expect![[r#"
        [31mbuoy.toml:4:2:[0m unknown table `[kore]`
           ╭─[ buoy.toml:4:2 ]
           │
         4 │ [kore]
           │  ──┬─
           │    ╰─── here
           │
           │ Help: the nearest known key is `core`; known here: title, length_unit, materials, core, gaps, windings, parts, probes, accuracy, estimate, require, hot_spots
        ───╯
        [31mbuoy.toml:13:1:[0m a gap without a `[core]` to grind it into
            ╭─[ buoy.toml:13:1 ]
            │
         13 │ [[gaps]]
            │ ────┬───
            │     ╰───── here
            │
            │ Help: add a `[core]`, or remove the gap; between `[[parts]]` a gap is the room that the outlines leave
        ────╯
    "#]]);
}

#[test]
fn refuses_keys_that_this_version_does_not_serve() {
    for (piece, replacement, expected) in [
        ("[[windings]]", "[[rings]]\nname = \"band\"\n[[windings]]", expect![[r#"
            buoy.toml:17:3: unknown table `[[rings]]`
              help: the nearest known key is `title`; known here: title, length_unit, materials, core, gaps, windings, parts, probes, accuracy, estimate, require, hot_spots
        "#]]),
        ("[[windings]]", "[tolerance]\n[[windings]]", expect![[r#"
            buoy.toml:17:2: unknown table `[tolerance]`
              help: `tolerance` belongs in `[estimate]`; known here: title, length_unit, materials, core, gaps, windings, parts, probes, accuracy, estimate, require, hot_spots
        "#]]),
        ("[[windings]]", "[drive]\n[[windings]]", expect![[r#"
            buoy.toml:17:2: unknown table `[drive]`
              help: the nearest known key is `title`; known here: title, length_unit, materials, core, gaps, windings, parts, probes, accuracy, estimate, require, hot_spots
        "#]]),
        ("turns = 42", "turns = 42\nshorted = true", expect![[r#"
            buoy.toml:20:1: unknown key `shorted` in `[[windings]]`
              help: the nearest known key is `name`; known here: name, turns, radii, heights, sections, current, ripple
        "#]]),
        ("turns = 42", "turns = 42\nwire = {}", expect![[r#"
            buoy.toml:20:1: unknown key `wire` in `[[windings]]`
              help: the nearest known key is `name`; known here: name, turns, radii, heights, sections, current, ripple
        "#]]),
        ("permeability = 2000", "permeability = 2000\nloss = {}", expect![[r#"
            buoy.toml:3:1: unknown key `loss` in `[materials.NAME]`
              help: the nearest known key is `bh`; known here: permeability, bh, interpolation, saturation
        "#]]),
    ] {
        check_heads(piece, replacement, expected);
    }
}

#[test]
fn says_where_a_misplaced_key_belongs() {
    check_heads("turns = 42", "turns = 42\njoint = 0.003\ntitle = \"x\"", expect![[r#"
        buoy.toml:20:1: unknown key `joint` in `[[windings]]`
          help: `joint` belongs in `[core]`; known here: name, turns, radii, heights, sections, current, ripple
        buoy.toml:21:1: unknown key `title` in `[[windings]]`
          help: `title` belongs at the top of the sheet, above the first table
    "#]]);
}

#[test]
fn a_missing_key_comes_with_an_example() {
    check_broken("turns = 42\n", "", expect![[r#"
        [31mbuoy.toml:17:1:[0m `[[windings]]` lacks `turns`
            ╭─[ buoy.toml:17:1 ]
            │
         17 │ [[windings]]
            │ ──────┬─────
            │       ╰─────── here
            │
            │ Help: add `turns = 42`
        ────╯
    "#]]);
    check_heads("height = 16.1\n", "", expect![[r#"
        buoy.toml:4:1: `[core]` lacks `height`
          help: add `height = 16.1`
    "#]]);
    check_heads("outer_diameter = 25.5\n", "", expect![[r#"
        buoy.toml:4:1: `[core]` lacks `outer_diameter` or `outer_legs_area`
          help: add `outer_diameter = 25.5`, or `outer_legs_area = "95 mm²"` for legs that are not round
    "#]]);
    check_heads("form = \"pot\"\n", "", expect![[r#"
        buoy.toml:4:1: `[core]` lacks `form`
          help: add `form = "pot"`
    "#]]);
    check_heads("across = \"post\"\n", "", expect![[r#"
        buoy.toml:13:1: `[[gaps]]` lacks `across`
          help: add `across = "post"`
    "#]]);
}

#[test]
fn a_current_is_no_length() {
    check_broken("length = 0.30", "length = \"0.3 A\"", expect![[r#"
        [31mbuoy.toml:15:10:[0m `length`: `0.3 A` is a current, not a length
            ╭─[ buoy.toml:15:10 ]
            │
         15 │ length = "0.3 A"
            │          ───┬───
            │             ╰───── here
            │
            │ Help: write a length such as "0.3 mm", or a bare number in mm
        ────╯
    "#]]);
}

#[test]
fn unknown_units_and_decimal_commas() {
    check_heads("length = 0.30", "length = \"0.3 mmm\"", expect![[r#"
        buoy.toml:15:10: `length`: `mmm` is not a unit that is known here
          help: write a length such as "0.3 mm", or a bare number in mm
    "#]]);
    check_heads("length = 0.30", "length = \"0,3 mm\"", expect![[r#"
        buoy.toml:15:10: `length`: `0,3 mm` has a decimal comma
          help: write a decimal point: "0.3 mm"
    "#]]);
    check_heads("length = 0.30", "length = \"thin\"", expect![[r#"
        buoy.toml:15:10: `length`: `thin` does not begin with a number
          help: write a length such as "0.3 mm", or a bare number in mm
    "#]]);
    check_heads("current = \"1.8 A\"", "current = \"1.8 V\"", expect![[r#"
        buoy.toml:22:11: `current`: `1.8 V` is a voltage, not a current
          help: write a current such as "1.8 A", or a bare number in SI units
    "#]]);
}

#[test]
fn wrong_types_are_named() {
    check_heads("turns = 42", "turns = \"many\"", expect![[r#"
        buoy.toml:19:9: `turns` must be a number, but it is a text
          help: write a plain number without quotes and without a unit
    "#]]);
    check_heads("turns = 42", "turns = true", expect![[r#"
        buoy.toml:19:9: `turns` must be a number, but it is true or false
          help: write a plain number without quotes and without a unit
    "#]]);
    check_heads("length = 0.30", "length = [0.3]", expect![[r#"
        buoy.toml:15:10: `length` must be a length, but it is a list
          help: write a length such as "0.3 mm", or a bare number in mm
    "#]]);
    check_heads("name = \"main\"", "name = 7", expect![[r#"
        buoy.toml:18:8: `name` must be a text, but it is a number
          help: put it between double quotes
    "#]]);
    check_heads("radii = [6.6, 10.2]", "radii = 6.6", expect![[r#"
        buoy.toml:20:9: `radii` must be two lengths, [inner, outer], but it is a number
          help: write `radii = [6.6, 10.2]`
    "#]]);
    check_heads("radii = [6.6, 10.2]", "radii = [6.6, 10.2, 11]", expect![[r#"
        buoy.toml:20:9: `radii` must be two lengths, [inner, outer], but it has 3 of them
          help: write `radii = [6.6, 10.2]`
    "#]]);
    check_heads("[core]", "[[core]]", expect![[r#"
        buoy.toml:4:1: `core` must be one table, but it is a list
          help: write `[core]` once, in single brackets, its keys below
    "#]]);
    check_heads("[[gaps]]", "[gaps]", expect![[r#"
        buoy.toml:13:1: `gaps` must be a list of tables, but it is a table
          help: write `[[gaps]]`, in double brackets, before each one
    "#]]);
}

#[test]
fn turns_must_be_positive() {
    check_broken("turns = 42", "turns = 0", expect![[r#"
        [31mbuoy.toml:19:9:[0m `turns` = 0 must be greater than 0
            ╭─[ buoy.toml:19:9 ]
            │
         19 │ turns = 0
            │         ┬
            │         ╰── here
            │
            │ Help: write a plain number without quotes and without a unit
        ────╯
    "#]]);
    check_heads("turns = 42", "turns = -3", expect![[r#"
        buoy.toml:19:9: `turns` = -3 must be greater than 0
          help: write a plain number without quotes and without a unit
    "#]]);
}

#[test]
fn all_currents_zero_means_no_field() {
    check_broken("current = \"1.8 A\"", "current = 0", expect![[r#"
        [31mbuoy.toml:22:11:[0m the currents of all windings are 0, so there is no field
            ╭─[ buoy.toml:22:11 ]
            │
         22 │ current = 0
            │           ┬
            │           ╰── here
            │
            │ Help: give one of them a current, such as "1 A"
        ────╯
    "#]]);
}

#[test]
fn nan_and_infinity_are_refused() {
    check_broken("length = 0.30", "length = nan", expect![[r#"
        [31mbuoy.toml:15:10:[0m `length` = nan is not a finite number
            ╭─[ buoy.toml:15:10 ]
            │
         15 │ length = nan
            │          ─┬─
            │           ╰─── here
            │
            │ Help: write a length such as "0.3 mm", or a bare number in mm
        ────╯
    "#]]);
    check_heads("length = 0.30", "length = inf", expect![[r#"
        buoy.toml:15:10: `length` = inf is not a finite number
          help: write a length such as "0.3 mm", or a bare number in mm
    "#]]);
    check_heads("length = 0.30", "length = \"1e999 mm\"", expect![[r#"
        buoy.toml:15:10: `length`: `1e999 mm` is beyond the range of numbers
          help: write a length such as "0.3 mm", or a bare number in mm
    "#]]);
    check_heads("turns = 42", "turns = -inf", expect![[r#"
        buoy.toml:19:9: `turns` = -inf is not a finite number
          help: write a plain number without quotes and without a unit
    "#]]);
    check_heads("length = 0.30", "length = 1e30", expect![[r#"
        buoy.toml:15:10: `length` = 1e30 is larger than anything that makes sense here
          help: write a length such as "0.3 mm", or a bare number in mm
    "#]]);
    check_heads("length = 0.30", "length = 1e-30", expect![[r#"
        buoy.toml:15:10: `length` = 1e-30 is smaller than anything that makes sense here
          help: write a length such as "0.3 mm", or a bare number in mm
    "#]]);
}

#[test]
fn inverted_radii_and_heights() {
    check_broken("radii = [6.6, 10.2]", "radii = [10.2, 6.6]", expect![[r#"
        [31mbuoy.toml:20:9:[0m `radii` = [10.2, 6.6]: the inner end is not below the outer end
            ╭─[ buoy.toml:20:9 ]
            │
         20 │ radii = [10.2, 6.6]
            │         ─────┬─────
            │              ╰─────── here
            │
            │ Help: write the inner one first, and leave some room between the two
        ────╯
    "#]]);
    check_heads("heights = [-4.9, 4.9]", "heights = [4.9, -4.9]", expect![[r#"
        buoy.toml:21:11: `heights` = [4.9, -4.9]: the bottom end is not below the top end
          help: write the bottom one first, and leave some room between the two
    "#]]);
    check_heads("heights = [-4.9, 4.9]", "heights = [4.9, 4.9]", expect![[r#"
        buoy.toml:21:11: `heights` = [4.9, 4.9]: the bottom end is not below the top end
          help: write the bottom one first, and leave some room between the two
    "#]]);
}

#[test]
fn a_winding_may_touch_the_axis_but_not_cross_it() {
    check("[[windings]]\nturns = 5\nradii = [0, 2]\nheights = [0, 1]\n", expect![[r#"
        no mistakes
    "#]]);
    check_heads("radii = [6.6, 10.2]", "radii = [-6.6, 10.2]", expect![[r#"
        buoy.toml:20:10: `radii` = -6.6 must not be negative
          help: write a length such as "0.3 mm", or a bare number in mm
    "#]]);
}

#[test]
fn core_dimensions_in_the_wrong_order() {
    check_broken("post_diameter = 11.5", "post_diameter = 21.2", expect![[r#"
        [31mbuoy.toml:9:17:[0m `post_diameter` = 21.2 is not smaller than `wall_inner_diameter` = 21.2
           ╭─[ buoy.toml:9:17 ]
           │
         9 │ post_diameter = 21.2
           │                 ──┬─
           │                   ╰─── here
           │
           ├─[ buoy.toml:9:17 ]
           │
         8 │ wall_inner_diameter = 21.2
           │                       ──┬─
           │                         ╰─── must be the larger
           │
           │ Help: look both up in the drawing again
        ───╯
    "#]]);
    check_heads("window_height = 11.0", "window_height = 16.1", expect![[r#"
        buoy.toml:11:17: `window_height` = 16.1 is not smaller than `height` = 16.1
          help: look both up in the drawing again
    "#]]);
    check_heads("outer_diameter = 25.5", "outer_diameter = 20", expect![[r#"
        buoy.toml:8:23: `wall_inner_diameter` = 21.2 is not smaller than `outer_diameter` = 20
          help: look both up in the drawing again
    "#]]);
    check_heads("height = 16.1", "height = 16.1\nhole_diameter = 12", expect![[r#"
        buoy.toml:11:17: `hole_diameter` = 12 is not smaller than `post_diameter` = 11.5
          help: look both up in the drawing again
    "#]]);
}

#[test]
fn gaps_without_a_core_and_a_center_for_a_spacer() {
    check(
        "[[windings]]\nturns = 5\nradii = [1, 2]\nheights = [0, 1]\n[[gaps]]\nacross = \"post\"\nlength = 1\n",
        expect![[r#"
            [31mbuoy.toml:5:1:[0m a gap without a `[core]` to grind it into
               ╭─[ buoy.toml:5:1 ]
               │
             5 │ [[gaps]]
               │ ────┬───
               │     ╰───── here
               │
               │ Help: add a `[core]`, or remove the gap; between `[[parts]]` a gap is the room that the outlines leave
            ───╯
        "#]],
    );
    check_heads("across = \"post\"", "across = \"spacer\"\ncenter = 1", expect![[r#"
        buoy.toml:15:10: `center` is given for a spacer, which moves the halves apart in the middle
          help: remove `center`, or write across = "post" for a ground gap
    "#]]);
    check_heads("across = \"post\"", "across = \"top\"", expect![[r#"
        buoy.toml:14:10: `across` = "top" is unknown
          help: write one of "post", "wall", "spacer"; the nearest is "post"
    "#]]);
}

#[test]
fn a_wall_gap_needs_a_wall() {
    let rod = "[materials.m]\npermeability = 500\n[core]\nmaterial = \"m\"\nform = \"rod\"\ndiameter = 10\nheight = 100\ncorner_radius = 1\nwindow_height = 3\n[[gaps]]\nacross = \"wall\"\nlength = 1\n[[windings]]\nturns = 5\nradii = [6, 7]\nheights = [0, 1]\n";
    let diagnostics = read(rod, "buoy.toml", &no_files).unwrap_err();
    expect![[r#"
        buoy.toml:8:17: `corner_radius` rounds the corners of a window, and a rod has none
          help: remove it, or draw the rod in `[[parts]]` with fillets
        buoy.toml:9:17: `window_height` is no dimension of form = "rod"
          help: remove it; a rod has diameter, hole_diameter, height
        buoy.toml:11:10: a gap across the wall, but form = "rod" has no wall
          help: write across = "post"
    "#]].assert_eq(&heads(&diagnostics));
}

#[test]
fn an_undefined_material_names_the_nearest() {
    check_broken("material = \"soft_ferrite\"", "material = \"soft_ferite\"", expect![[r#"
        [31mbuoy.toml:5:12:[0m material `soft_ferite` is not defined
           ╭─[ buoy.toml:5:12 ]
           │
         5 │ material = "soft_ferite"
           │            ──────┬──────
           │                  ╰──────── here
           │
           │ Help: the nearest is `soft_ferrite`; defined here: soft_ferrite
        ───╯
    "#]]);
}

#[test]
fn a_material_has_exactly_one_law() {
    check_broken("permeability = 2000", "permeability = 2000\nbh = \"a.csv\"", expect![[r#"
        [31mbuoy.toml:3:6:[0m material `soft_ferrite` has two laws, `permeability` and `bh`
           ╭─[ buoy.toml:3:6 ]
           │
         3 │ bh = "a.csv"
           │      ───┬───
           │         ╰───── here
           │
           ├─[ buoy.toml:3:6 ]
           │
         2 │ permeability = 2000
           │                ──┬─
           │                  ╰─── one law
           │
           │ Help: keep one of them
        ───╯
    "#]]);
    check_heads("permeability = 2000", "", expect![[r#"
        buoy.toml:1:1: material `soft_ferrite` has no law
          help: add one of `permeability = 2000`, `bh = "table.csv"`, `saturation = { … }`
    "#]]);
    check_heads("permeability = 2000", "permeability = 2000\ninterpolation = \"linear\"", expect![[r#"
        buoy.toml:3:17: `interpolation` is given, but there is no `bh` table
          help: remove it
    "#]]);
    check_heads("permeability = 2000", "permeability = -2", expect![[r#"
        buoy.toml:2:16: `permeability` = -2 must be greater than 0
          help: write a plain number without quotes and without a unit
    "#]]);
    check_heads("permeability = 2000", "saturation = { initial_permeability = 2300 }", expect![[r#"
        buoy.toml:2:14: `saturation` lacks `flux_density`
          help: add `flux_density = "0.48 T"`
    "#]]);
    check_heads("permeability = 2000", "saturation = { initial_permeability = 0.5, flux_density = \"0.5 T\" }", expect![[r#"
        buoy.toml:2:14: initial permeability 0.5 is not above 1
          help: write what the data sheet says, such as 2300
    "#]]);
    check_heads("[materials.soft_ferrite]", "[materials]", expect![[r#"
        buoy.toml:2:1: `permeability` stands in `[materials]` itself
          help: give the material a name: `[materials.soft_ferrite]`, its keys below
        buoy.toml:5:12: material `soft_ferrite` is not defined
          help: define it: `[materials.soft_ferrite]`, with `permeability = 2000` below
    "#]]);
}

#[test]
fn inline_tables_are_refused_by_row() {
    check_broken("permeability = 2000", "bh = [[0, 0], [50, 0.2], [40, 0.3]]", expect![[r#"
        [31mbuoy.toml:2:26:[0m `bh`, row 3: (40, 0.3) does not rise above (50, 0.2)
           ╭─[ buoy.toml:2:26 ]
           │
         2 │ bh = [[0, 0], [50, 0.2], [40, 0.3]]
           │                          ────┬────
           │                              ╰────── here
           │
           │ Help: start at (0, 0) and let H and B rise from row to row, by at least µ0 (1.2566e-6 T per A/m)
        ───╯
    "#]]);
    for (table, expected) in [
        ("[[0, 0], [50, 0.2], [60, 0.1]]", expect![[r#"
            buoy.toml:2:26: `bh`, row 3: (60, 0.1) does not rise above (50, 0.2)
              help: start at (0, 0) and let H and B rise from row to row, by at least µ0 (1.2566e-6 T per A/m)
        "#]]),
        ("[[0, 0], [50, 0.2], [60, 0.200001]]", expect![[r#"
            buoy.toml:2:26: `bh`, row 3: the slope from the point before is 0.080 µ0, less than that of air
              help: start at (0, 0) and let H and B rise from row to row, by at least µ0 (1.2566e-6 T per A/m)
        "#]]),
        ("[[10, 0.1], [50, 0.2]]", expect![[r#"
            buoy.toml:2:7: `bh`, row 1: the first point is (10, 0.1), not (0, 0)
              help: start at (0, 0) and let H and B rise from row to row, by at least µ0 (1.2566e-6 T per A/m)
        "#]]),
        ("[[0, 0], [-50, -0.2]]", expect![[r#"
            buoy.toml:2:15: `bh`, row 2: (-50, -0.2) is negative
              help: start at (0, 0) and let H and B rise from row to row, by at least µ0 (1.2566e-6 T per A/m)
        "#]]),
        ("[[0, 0]]", expect![[r#"
            buoy.toml:2:7: `bh`, row 1: a table needs at least two points
              help: start at (0, 0) and let H and B rise from row to row, by at least µ0 (1.2566e-6 T per A/m)
        "#]]),
        ("[]", expect![[r#"
            buoy.toml:2:6: `bh`, row 0: a table needs at least two points
              help: start at (0, 0) and let H and B rise from row to row, by at least µ0 (1.2566e-6 T per A/m)
        "#]]),
        ("[[0, 0], [50]]", expect![[r#"
            buoy.toml:2:15: `bh` must hold pairs [H, B], but here is a list of 1
              help: write H in A/m and B in T: [50, 0.1]
        "#]]),
        ("[[0, 0], [50, nan]]", expect![[r#"
            buoy.toml:2:20: `bh` = nan is not a finite number
              help: write a flux density such as "380 mT", or a bare number in SI units
        "#]]),
        ("[[0, 0], [\"50 A/m\", \"0.2 A\"]]", expect![[r#"
            buoy.toml:2:26: `bh`: `0.2 A` is a current, not a flux density
              help: write a flux density such as "380 mT", or a bare number in SI units
        "#]]),
        ("7", expect![[r#"
            buoy.toml:2:6: `bh` must be the path of a CSV file or a list of pairs, but it is a number
              help: write `bh = "table.csv"` or `bh = [[0, 0], [50, 0.1], …]`
        "#]]),
    ] {
        check_heads("permeability = 2000", &format!("bh = {table}"), expected);
    }
}

#[test]
fn tables_in_files_are_refused_in_the_file() {
    let sheet = GOOD.replace("permeability = 2000", "bh = \"hot.csv\"");
    for (csv, expected) in [
        ("H [A/m],B [T]\n0,0\n50,0.2\n40,0.3\n", expect![[r#"
            [31mbench/hot.csv:4:1:[0m row 3: (40, 0.3) does not rise above (50, 0.2)
               ╭─[ bench/hot.csv:4:1 ]
               │
             4 │ 40,0.3
               │ ───┬──
               │    ╰──── here
               │
               │ Help: start at (0, 0) and let H and B rise from row to row, by at least µ0 (1.2566e-6 T per A/m)
            ───╯
        "#]]),
        ("# a note\nH [A/m],B [T]\n\n0,0\n50;0.2\n", expect![[r#"
            [31mbench/hot.csv:5:1:[0m row 2 has 1 entries, not 2
               ╭─[ bench/hot.csv:5:1 ]
               │
             5 │ 50;0.2
               │ ───┬──
               │    ╰──── here
               │
               │ Help: write the first line `H [A/m],B [T]`, then one pair a line, decimal points, commas between
            ───╯
        "#]]),
        ("B,H\n0,0\n", expect![[r#"
            [31mbench/hot.csv:1:1:[0m the first line is `B,H`, not `H [A/m],B [T]`
               ╭─[ bench/hot.csv:1:1 ]
               │
             1 │ B,H
               │ ─┬─
               │  ╰─── here
               │
               │ Help: write the first line `H [A/m],B [T]`, then one pair a line, decimal points, commas between
            ───╯
        "#]]),
        ("H [A/m];B [T]\n0;0\n", expect![[r#"
            [31mbench/hot.csv:1:1:[0m the columns are separated by semicolons
               ╭─[ bench/hot.csv:1:1 ]
               │
             1 │ H [A/m];B [T]
               │ ──────┬──────
               │       ╰──────── here
               │
               │ Help: write the first line `H [A/m],B [T]`, then one pair a line, decimal points, commas between
            ───╯
        "#]]),
        ("H [A/m],B [T]\n0,0\n50,high\n", expect![[r#"
            [31mbench/hot.csv:3:1:[0m row 2: `high` is not a finite number
               ╭─[ bench/hot.csv:3:1 ]
               │
             3 │ 50,high
               │ ───┬───
               │    ╰───── here
               │
               │ Help: write the first line `H [A/m],B [T]`, then one pair a line, decimal points, commas between
            ───╯
        "#]]),
        ("", expect![[r#"
            bench/hot.csv:1:1: the B–H table is empty
              help: write the first line `H [A/m],B [T]`, then one pair a line, decimal points, commas between
        "#]]),
        ("H [A/m],B [T]\n", expect![[r#"
            [31mbench/hot.csv:1:1:[0m row 0: a table needs at least two points
               ╭─[ bench/hot.csv:1:1 ]
               │
             1 │ H [A/m],B [T]
               │ │
               │ ╰─ here
               │
               │ Help: start at (0, 0) and let H and B rise from row to row, by at least µ0 (1.2566e-6 T per A/m)
            ───╯
        "#]]),
    ] {
        let diagnostics = read(&sheet, "bench/buoy.toml", &|_| Ok(csv.to_string())).unwrap_err();
        expected.assert_eq(&rendered(&diagnostics, &sheet));
    }
    check(&sheet, expect![[r#"
        [31mbuoy.toml:2:6:[0m the B–H table `hot.csv` of material `soft_ferrite` cannot be read: no such file `hot.csv`
           ╭─[ buoy.toml:2:6 ]
           │
         2 │ bh = "hot.csv"
           │      ────┬────
           │          ╰────── here
           │
           │ Help: write the path relative to this sheet
        ───╯
    "#]]);
}

#[test]
fn names_must_differ() {
    let twice = format!("{GOOD}\n[[windings]]\nname = \"main\"\nturns = 2\nradii = [1, 2]\nheights = [20, 21]\n");
    check(&twice, expect![[r#"
        [31mbuoy.toml:25:8:[0m two windings have the name `main`
            ╭─[ buoy.toml:25:8 ]
            │
         25 │ name = "main"
            │        ───┬──
            │           ╰──── here
            │
            ├─[ buoy.toml:25:8 ]
            │
         18 │ name = "main"
            │        ───┬──
            │           ╰──── the first one
            │
            │ Help: give each its own name
        ────╯
    "#]]);
    check_heads("name = \"main\"", "name = \"\"", expect![[r#"
        buoy.toml:18:8: `name` is empty
          help: write a short text on one line
    "#]]);
    check_heads("name = \"main\"", "name = \"\\u001b[31m\"", expect![[r#"
        buoy.toml:18:8: `name` holds a control character
          help: write a short text on one line
    "#]]);
}

#[test]
fn unknown_forms_and_ring_cores() {
    check_broken("form = \"pot\"", "form = \"pott\"", expect![[r#"
        [31mbuoy.toml:6:8:[0m `form` = "pott" is unknown
           ╭─[ buoy.toml:6:8 ]
           │
         6 │ form = "pott"
           │        ───┬──
           │           ╰──── here
           │
           │ Help: write one of "pot", "drum", "rod"; the nearest is "pot"
        ───╯
    "#]]);
    check_broken("form = \"pot\"", "form = \"toroid\"", expect![[r#"
        [31mbuoy.toml:6:8:[0m form = "toroid": a ring core carries its flux around the axis, and this program solves flux in the (r, z) plane
           ╭─[ buoy.toml:6:8 ]
           │
         6 │ form = "toroid"
           │        ────┬───
           │            ╰───── here
           │
           │ Help: sum it by hand, L = µ0 µr N² h ln(r2/r1)/2π; the forms solved here are "pot", "drum" and "rod"
        ───╯
    "#]]);
    check_heads("form = \"pot\"", "form = \"Ring\"", expect![[r#"
        buoy.toml:6:8: form = "Ring": a ring core carries its flux around the axis, and this program solves flux in the (r, z) plane
          help: sum it by hand, L = µ0 µr N² h ln(r2/r1)/2π; the forms solved here are "pot", "drum" and "rod"
    "#]]);
    check_heads("form = \"pot\"", "form = \"drum\"", expect![[r#"
        buoy.toml:4:1: `[core]` lacks `flange_diameter`
          help: add `flange_diameter = 25.5`
        buoy.toml:7:18: `outer_diameter` is no dimension of form = "drum"
          help: remove it; a drum has flange_diameter, post_diameter, hole_diameter, height, window_height
        buoy.toml:8:23: `wall_inner_diameter` is no dimension of form = "drum"
          help: remove it; a drum has flange_diameter, post_diameter, hole_diameter, height, window_height
    "#]]);
}

#[test]
fn the_wall_is_stated_once() {
    check_heads("outer_diameter = 25.5", "outer_diameter = 25.5\nouter_legs_area = \"95 mm²\"", expect![[r#"
        buoy.toml:8:19: the wall is given twice, by `outer_diameter` and by `outer_legs_area`
          help: keep the one that the drawing has: legs that are not round have an area
    "#]]);
}

#[test]
fn a_sheet_needs_windings() {
    check("title = \"nothing\"\n", expect![[r#"
        [31mbuoy.toml:1:1:[0m the sheet has no windings
           ╭─[ buoy.toml:1:1 ]
           │
         1 │ title = "nothing"
           │ │
           │ ╰─ here
           │
           │ Help: add `[[windings]]` with `turns = 42`, `radii = [6.6, 10.2]` and `heights = [-4.9, 4.9]`
        ───╯
    "#]]);
    check(
        "[[windings]]\nturns = 3\nradii = [1, 2]\nheights = [0, 1]\nsections = []\n",
        expect![[r#"
            [31mbuoy.toml:2:9:[0m `turns` stands beside `sections`
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
            [31mbuoy.toml:3:9:[0m `radii` stands beside `sections`
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
            [31mbuoy.toml:4:11:[0m `heights` stands beside `sections`
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
            [31mbuoy.toml:5:12:[0m `sections` is empty
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
fn an_empty_sheet() {
    check("", expect![[r#"
        buoy.toml:1:1: the sheet is empty
          help: write at least `[[windings]]` with `turns`, `radii` and `heights`
    "#]]);
    check("  \n\t\n", expect![[r#"
        [31mbuoy.toml:1:1:[0m the sheet is empty
           ╭─[ buoy.toml:1:1 ]
           │
         1 │
           │ │
           │ ╰─ here
           │
           │ Help: write at least `[[windings]]` with `turns`, `radii` and `heights`
        ───╯
    "#]]);
}

#[test]
fn broken_toml() {
    check_broken("[core]", "[core", expect![[r#"
        [31mbuoy.toml:4:6:[0m not valid TOML: unclosed table, expected `]`
           ╭─[ buoy.toml:4:6 ]
           │
         4 │ [core
           │      │
           │      ╰─ here
           │
           │ Help: write `key = value`, a table as `[core]`, one of a list as `[[gaps]]`, texts between double quotes
        ───╯
    "#]]);
    check_heads("turns = 42", "turns = 42\nturns = 43", expect![[r#"
        buoy.toml:20:1: not valid TOML: duplicate key
          help: write `key = value`, a table as `[core]`, one of a list as `[[gaps]]`, texts between double quotes
    "#]]);
    check_heads("turns = 42", "turns = ", expect![[r#"
        buoy.toml:19:9: not valid TOML: string values must be quoted, expected literal string
          help: write `key = value`, a table as `[core]`, one of a list as `[[gaps]]`, texts between double quotes
    "#]]);
    check_heads("length = 0.30", "length = 0,30", expect![[r#"
        buoy.toml:15:11: not valid TOML: unexpected key or value, expected newline, `#`
          help: write `key = value`, a table as `[core]`, one of a list as `[[gaps]]`, texts between double quotes
    "#]]);
    check_heads("length = 0.30", "length = 0.30 mm", expect![[r#"
        buoy.toml:15:10: not valid TOML: string values must be quoted, expected literal string
          help: write `key = value`, a table as `[core]`, one of a list as `[[gaps]]`, texts between double quotes
    "#]]);
}

#[test]
fn parts_and_probes() {
    let end = "current = \"1.8 A\"";
    let add = |text: &str| format!("{end}\n{text}");
    for (text, expected) in [
        ("[[parts]]\nmaterial = \"soft_ferrite\"\noutline = [[0, 20], [5, 20]]", expect![[r#"
            buoy.toml:25:11: `outline` must be a list of three corners or more, but it is a list of 2
              help: write three corners or more, such as [[0, 0], [5, 0], [5, 2, 0.5]]
        "#]]),
        ("[[parts]]\nmaterial = \"soft_ferrite\"\noutline = [[0, 20], [-5, 20], [5, 21, -1], [0, 22, 1, 1]]", expect![[r#"
            buoy.toml:25:22: `outline` = -5 must not be negative
              help: write a length such as "0.3 mm", or a bare number in mm
            buoy.toml:25:39: `outline` = -1 must not be negative
              help: write a length such as "0.3 mm", or a bare number in mm
            buoy.toml:25:44: `outline` must hold corners [r, z] or [r, z, fillet], but here is a list of 4
              help: write radius, height and, for a rounded corner, the fillet's radius
        "#]]),
        ("[[parts]]\noutline = \"round\"", expect![[r#"
            buoy.toml:23:1: `[[parts]]` lacks `material`
              help: add `material = "soft_ferrite"`
            buoy.toml:24:11: `outline` must be a list of three corners or more, but it is a text
              help: write three corners or more, such as [[0, 0], [5, 0], [5, 2, 0.5]]
        "#]]),
        ("[[probes]]\nat = [0]", expect![[r#"
            buoy.toml:24:6: `at` must be a point [r, z], but it is a list of 1
              help: write radius and height, such as [5.0, 0.0]
        "#]]),
        ("[[probes]]\nat = [0, 0]\npoints = 3", expect![[r#"
            buoy.toml:25:10: `points` stands beside `at`
              help: keep `at` for a point, or `from` and `to` for a line
        "#]]),
        ("[[probes]]\nfrom = [0, 0]", expect![[r#"
            buoy.toml:23:1: `[[probes]]` lacks `to`
              help: add `to = [0, 5]`
        "#]]),
        ("[[probes]]\nfrom = [0, 0]\nto = [0, 0]", expect![[r#"
            buoy.toml:25:6: the probe's `to` equals its `from`
              help: write `at = [r, z]` for a single point
        "#]]),
        ("[[probes]]\nfrom = [0, 0]\nto = [0, 1]\npoints = 1.5", expect![[r#"
            buoy.toml:26:10: `points` = 1.5 must be a whole number from 2 to 100000
              help: write a plain number without quotes and without a unit
        "#]]),
    ] {
        check_heads(end, &add(text), expected);
    }
}

#[test]
fn wishes_out_of_range() {
    let end = "current = \"1.8 A\"";
    let add = |text: &str| format!("{end}\n{text}");
    for (text, expected) in [
        ("[accuracy]\ninterval = \"0 %\"", expect![[r#"
            buoy.toml:24:12: `interval` = "0 %" must lie from 0.00001 % to 50 %
              help: write a ratio such as "3 %", or a bare ratio
        "#]]),
        ("[accuracy]\ninterval = 1e-12\nmax_unknowns = 1.5", expect![[r#"
            buoy.toml:24:12: `interval` = 1e-12 must lie from 0.00001 % to 50 %
              help: write a ratio such as "3 %", or a bare ratio
            buoy.toml:25:16: `max_unknowns` = 1.5 must be a whole number from 1000 to 50000000
              help: write a plain number without quotes and without a unit
        "#]]),
        ("[estimate]\ninductance = \"0.7 mH\"\ninductance_factor = \"400 nH\"", expect![[r#"
            buoy.toml:25:21: `inductance` and `inductance_factor` are both given
              help: keep the one that is to be judged
        "#]]),
        ("[estimate]\ninductance = \"0.7 mT\"", expect![[r#"
            buoy.toml:24:14: `inductance`: `0.7 mT` is a flux density, not an inductance
              help: write an inductance such as "250 nH", or a bare number in SI units
        "#]]),
        ("[estimate]\ngap_correction = \"logg\"\ntolerance = -0.1", expect![[r#"
            buoy.toml:24:18: `gap_correction` = "logg" is unknown
              help: write one of "none", "one gap length", "log", "corner", "roters"; the nearest is "log"
            buoy.toml:25:13: `tolerance` = -0.1 must lie from 0.0001 % to 1000 %
              help: write a ratio such as "3 %", or a bare ratio
        "#]]),
        ("[[require]]\nwinding = \"man\"\ncurrent = 0", expect![[r#"
            buoy.toml:23:1: `[[require]]` promises nothing
              help: add `least = "0.60 mH"`, `most`, or both
            buoy.toml:24:11: there is no winding `man`
              help: the nearest is `main`; the windings are: main
            buoy.toml:25:11: `current` = 0 must not be 0
              help: write a current such as "1.8 A", or a bare number in SI units
        "#]]),
        ("[[require]]\nwinding = \"main\"\ncurrent = 1\nleast = 2e-3\nmost = 1e-3", expect![[r#"
            buoy.toml:26:9: `least` = 2e-3 is above `most` = 1e-3
              help: exchange the two
        "#]]),
        ("[hot_spots]\ncount = -1\naveraging = 0", expect![[r#"
            buoy.toml:24:9: `count` = -1 must be a whole number from 0 to 1000
              help: write a plain number without quotes and without a unit
            buoy.toml:25:13: `averaging` = 0 must be greater than 0
              help: write a length such as "0.3 mm", or a bare number in mm
        "#]]),
    ] {
        check_heads(end, &add(text), expected);
    }
}

#[test]
fn several_mistakes_are_reported_together_in_the_order_of_the_sheet() {
    let text = GOOD.replace("turns = 42", "turns = -42").replace("permeability = 2000", "permeability = \"high\"").replace("length", "lenght");
    let diagnostics = read(&text, "buoy.toml", &no_files).unwrap_err();
    expect![[r#"
        buoy.toml:2:16: `permeability` must be a number, but it is a text
          help: write a plain number without quotes and without a unit
        buoy.toml:13:1: `[[gaps]]` lacks `length`
          help: add `length = 0.30`
        buoy.toml:15:1: unknown key `lenght` in `[[gaps]]`
          help: the nearest known key is `length`; known here: name, across, length, center
        buoy.toml:19:9: `turns` = -42 must be greater than 0
          help: write a plain number without quotes and without a unit
    "#]].assert_eq(&heads(&diagnostics));
}
