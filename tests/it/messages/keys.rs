//! Unknown, missing and misplaced keys, wrong types.

use super::{check_broken, check_heads};
use expect_test::expect;

#[test]
fn names_the_nearest_key_for_an_unknown_one() {
    check_broken(
        "outer_diameter = 25.5",
        "outer_diametre = 25.5",
        expect![[r#"
        buoy.toml:7:1: unknown key `outer_diametre` in `[core]`
           ╭─[ buoy.toml:7:1 ]
           │
         7 │ outer_diametre = 25.5
           │ ───────┬──────
           │        ╰──────── here
           │
           │ Help: the nearest known key is `outer_diameter`; known here: material, form, outer_diameter, outer_legs_area, wall_inner_diameter, post_diameter, hole_diameter, height, window_height, flange_diameter, diameter, corner_radius, joint
        ───╯
    "#]],
    );
}

#[test]
fn names_the_nearest_table_for_an_unknown_one() {
    check_broken(
        "[[gaps]]",
        "[[gap]]",
        expect![[r#"
        buoy.toml:13:3: unknown table `[[gap]]`
            ╭─[ buoy.toml:13:3 ]
            │
         13 │ [[gap]]
            │   ─┬─
            │    ╰─── here
            │
            │ Help: the nearest known table is `gaps`; known here: materials, core, gaps, windings, parts, probes, accuracy, estimate, require, hot_spots
        ────╯
    "#]],
    );
    check_broken(
        "[core]",
        "[kore]",
        expect![[r#"
        buoy.toml:4:2: unknown table `[kore]`
           ╭─[ buoy.toml:4:2 ]
           │
         4 │ [kore]
           │  ──┬─
           │    ╰─── here
           │
           │ Help: the nearest known table is `core`; known here: materials, core, gaps, windings, parts, probes, accuracy, estimate, require, hot_spots
        ───╯
    "#]],
    );
}

#[test]
fn refuses_keys_that_this_version_does_not_serve() {
    for (piece, replacement, expected) in [
        (
            "[[windings]]",
            "[[rings]]\nname = \"band\"\n[[windings]]",
            expect![[r#"
            buoy.toml:17:3: unknown table `[[rings]]`
              help: the nearest known table is `gaps`; known here: materials, core, gaps, windings, parts, probes, accuracy, estimate, require, hot_spots
        "#]],
        ),
        (
            "[[windings]]",
            "[tolerance]\n[[windings]]",
            expect![[r#"
            buoy.toml:17:2: unknown table `[tolerance]`
              help: the nearest known table is `core`; known here: materials, core, gaps, windings, parts, probes, accuracy, estimate, require, hot_spots
        "#]],
        ),
        (
            "[[windings]]",
            "[drive]\n[[windings]]",
            expect![[r#"
            buoy.toml:17:2: unknown table `[drive]`
              help: the nearest known table is `core`; known here: materials, core, gaps, windings, parts, probes, accuracy, estimate, require, hot_spots
        "#]],
        ),
        (
            "turns = 42",
            "turns = 42\nshorted = true",
            expect![[r#"
            buoy.toml:20:1: unknown key `shorted` in `[[windings]]`
              help: the nearest known key is `name`; known here: name, turns, radii, heights, sections, current, ripple
        "#]],
        ),
        (
            "turns = 42",
            "turns = 42\nwire = {}",
            expect![[r#"
            buoy.toml:20:1: unknown key `wire` in `[[windings]]`
              help: the nearest known key is `name`; known here: name, turns, radii, heights, sections, current, ripple
        "#]],
        ),
        (
            "permeability = 2000",
            "permeability = 2000\nloss = {}",
            expect![[r#"
            buoy.toml:3:1: unknown key `loss` in `[materials.NAME]`
              help: the nearest known key is `bh`; known here: permeability, bh, interpolation, saturation
        "#]],
        ),
    ] {
        check_heads(piece, replacement, expected);
    }
}

#[test]
fn says_where_a_misplaced_key_belongs() {
    check_heads(
        "turns = 42",
        "turns = 42\njoint = 0.003\ntitle = \"x\"",
        expect![[r#"
        buoy.toml:20:1: unknown key `joint` in `[[windings]]`
          help: `joint` belongs in `[core]`; known here: name, turns, radii, heights, sections, current, ripple
        buoy.toml:21:1: unknown key `title` in `[[windings]]`
          help: `title` belongs at the top of the sheet, above the first table
    "#]],
    );
}

#[test]
fn a_missing_key_comes_with_an_example() {
    check_broken(
        "turns = 42\n",
        "",
        expect![[r#"
        buoy.toml:17:1: `[[windings]]` lacks `turns`
            ╭─[ buoy.toml:17:1 ]
            │
         17 │ [[windings]]
            │ ──────┬─────
            │       ╰─────── here
            │
            │ Help: add `turns = 42`
        ────╯
    "#]],
    );
    check_heads(
        "height = 16.1\n",
        "",
        expect![[r#"
        buoy.toml:4:1: `[core]` lacks `height`
          help: add `height = 16.1`
    "#]],
    );
    check_heads(
        "outer_diameter = 25.5\n",
        "",
        expect![[r#"
        buoy.toml:4:1: `[core]` lacks `outer_diameter` or `outer_legs_area`
          help: add `outer_diameter = 25.5`, or `outer_legs_area = "95 mm²"` for legs that are not round
    "#]],
    );
    check_heads(
        "form = \"pot\"\n",
        "",
        expect![[r#"
        buoy.toml:4:1: `[core]` lacks `form`
          help: add `form = "pot"`
    "#]],
    );
    check_heads(
        "across = \"post\"\n",
        "",
        expect![[r#"
        buoy.toml:13:1: `[[gaps]]` lacks `across`
          help: add `across = "post"`
    "#]],
    );
}

#[test]
fn wrong_types_are_named() {
    check_heads(
        "turns = 42",
        "turns = \"many\"",
        expect![[r#"
        buoy.toml:19:9: `turns` must be a number, but it is a text
          help: write a plain number without quotes and without a unit
    "#]],
    );
    check_heads(
        "turns = 42",
        "turns = true",
        expect![[r#"
        buoy.toml:19:9: `turns` must be a number, but it is true or false
          help: write a plain number without quotes and without a unit
    "#]],
    );
    check_heads(
        "length = 0.30",
        "length = [0.3]",
        expect![[r#"
        buoy.toml:15:10: `length` must be a length, but it is a list
          help: write a length such as "0.3 mm", or a bare number in mm
    "#]],
    );
    check_heads(
        "name = \"main\"",
        "name = 7",
        expect![[r#"
        buoy.toml:18:8: `name` must be a text, but it is a number
          help: put it between double quotes
    "#]],
    );
    check_heads(
        "radii = [6.6, 10.2]",
        "radii = 6.6",
        expect![[r#"
        buoy.toml:20:9: `radii` must be two lengths, the inner radius and the outer radius, but it is a number
          help: write `radii = [6.6, 10.2]`
    "#]],
    );
    check_heads(
        "radii = [6.6, 10.2]",
        "radii = [6.6, 10.2, 11]",
        expect![[r#"
        buoy.toml:20:9: `radii` must be two lengths, the inner radius and the outer radius, but it has 3 of them
          help: write `radii = [6.6, 10.2]`
    "#]],
    );
    check_heads(
        "[core]",
        "[[core]]",
        expect![[r#"
        buoy.toml:4:1: `core` must be one table, but it is a list
          help: write `[core]` once, in single brackets, its keys below
    "#]],
    );
    check_heads(
        "[[gaps]]",
        "[gaps]",
        expect![[r#"
        buoy.toml:13:1: `gaps` must be a list of tables, but it is a table
          help: write `[[gaps]]`, in double brackets, before each one
    "#]],
    );
}
