//! Cores and gaps.

use super::{check, check_broken, check_heads, heads, no_files};
use expect_test::expect;
use gapwright::input::read;

#[test]
fn core_dimensions_in_the_wrong_order() {
    check_broken(
        "post_diameter = 11.5",
        "post_diameter = 21.2",
        expect![[r#"
        buoy.toml:9:17: `post_diameter` = 21.2 is not smaller than `wall_inner_diameter` = 21.2
           ╭─[ buoy.toml:9:17 ]
           │
         8 │ wall_inner_diameter = 21.2
           │                       ──┬─
           │                         ╰─── must be the larger
         9 │ post_diameter = 21.2
           │                 ──┬─
           │                   ╰─── here
           │
           │ Help: look both up in the drawing again
        ───╯
    "#]],
    );
    check_heads(
        "window_height = 11.0",
        "window_height = 16.1",
        expect![[r#"
        buoy.toml:11:17: `window_height` = 16.1 is not smaller than `height` = 16.1
          help: look both up in the drawing again
    "#]],
    );
    check_heads(
        "outer_diameter = 25.5",
        "outer_diameter = 20",
        expect![[r#"
        buoy.toml:8:23: `wall_inner_diameter` = 21.2 is not smaller than `outer_diameter` = 20
          help: look both up in the drawing again
    "#]],
    );
    check_heads(
        "height = 16.1",
        "height = 16.1\nhole_diameter = 12",
        expect![[r#"
        buoy.toml:11:17: `hole_diameter` = 12 is not smaller than `post_diameter` = 11.5
          help: look both up in the drawing again
    "#]],
    );
}

#[test]
fn gaps_without_a_core_and_a_center_for_a_spacer() {
    check(
        "[[windings]]\nturns = 5\nradii = [1, 2]\nheights = [0, 1]\n[[gaps]]\nacross = \"post\"\nlength = 1\n",
        expect![[r#"
            buoy.toml:5:1: a gap without a `[core]` to grind it into
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
    check_heads(
        "across = \"post\"",
        "across = \"spacer\"\ncenter = 1",
        expect![[r#"
        buoy.toml:15:10: `center` is given for a spacer, which moves the halves apart in the middle
          help: remove `center`, or write across = "post" for a ground gap
    "#]],
    );
    check_heads(
        "across = \"post\"",
        "across = \"top\"",
        expect![[r#"
        buoy.toml:14:10: `across` = "top" is unknown
          help: write one of "post", "wall", "spacer"; the nearest is "post"
    "#]],
    );
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
    "#]]
    .assert_eq(&heads(&diagnostics));
}

#[test]
fn unknown_forms_and_ring_cores() {
    check_broken(
        "form = \"pot\"",
        "form = \"pott\"",
        expect![[r#"
        buoy.toml:6:8: `form` = "pott" is unknown
           ╭─[ buoy.toml:6:8 ]
           │
         6 │ form = "pott"
           │        ───┬──
           │           ╰──── here
           │
           │ Help: write one of "pot", "drum", "rod"; the nearest is "pot"
        ───╯
    "#]],
    );
    check_broken(
        "form = \"pot\"",
        "form = \"toroid\"",
        expect![[r#"
        buoy.toml:6:8: form = "toroid": a ring core carries its flux around the axis, and this program solves flux in the (r, z) plane
           ╭─[ buoy.toml:6:8 ]
           │
         6 │ form = "toroid"
           │        ────┬───
           │            ╰───── here
           │
           │ Help: sum it by hand, L = µ0 µr N² h ln(r2/r1)/2π; the forms solved here are "pot", "drum" and "rod"
        ───╯
    "#]],
    );
    check_heads(
        "form = \"pot\"",
        "form = \"Ring\"",
        expect![[r#"
        buoy.toml:6:8: form = "Ring": a ring core carries its flux around the axis, and this program solves flux in the (r, z) plane
          help: sum it by hand, L = µ0 µr N² h ln(r2/r1)/2π; the forms solved here are "pot", "drum" and "rod"
    "#]],
    );
    check_heads(
        "form = \"pot\"",
        "form = \"drum\"",
        expect![[r#"
        buoy.toml:4:1: `[core]` lacks `flange_diameter`
          help: add `flange_diameter = 25.5`
        buoy.toml:7:18: `outer_diameter` is no dimension of form = "drum"
          help: remove it; a drum has flange_diameter, post_diameter, hole_diameter, height, window_height
        buoy.toml:8:23: `wall_inner_diameter` is no dimension of form = "drum"
          help: remove it; a drum has flange_diameter, post_diameter, hole_diameter, height, window_height
    "#]],
    );
}

#[test]
fn the_wall_is_stated_once() {
    check_heads(
        "outer_diameter = 25.5",
        "outer_diameter = 25.5\nouter_legs_area = \"95 mm²\"",
        expect![[r#"
        buoy.toml:8:19: the wall is given twice, by `outer_diameter` and by `outer_legs_area`
          help: keep the one that the drawing has: legs that are not round have an area
    "#]],
    );
}
