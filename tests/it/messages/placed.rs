//! Faults that the geometry found, placed in the sheet; and materials replaced for one run.

use super::{GOOD, good, heads, rendered};
use expect_test::expect;
use gapwright::input::{read, replace_material};
use gapwright::model::{Fault, Law, Subject};

fn fault(subject: Subject, key: Option<&'static str>, other: Option<Subject>) -> Fault {
    let message = "winding `main` overlaps the core near r = 4.10 mm".into();
    Fault { subject, key, other, message, help: "lower its outer radius".into() }
}

#[test]
fn an_overlap_underlines_both_places() {
    let winding = Subject::Winding { winding: 0, section: 0 };
    let found = good().diagnose(&fault(winding, Some("radii"), Some(Subject::Core)));
    expect![[r#"
        buoy.toml:20:9: winding `main` overlaps the core near r = 4.10 mm
            ╭─[ buoy.toml:20:9 ]
            │
          4 │ [core]
            │ ───┬──
            │    ╰──── the core
            │
         20 │ radii = [6.6, 10.2]
            │         ─────┬─────
            │              ╰─────── winding `main`
            │
            │ Help: lower its outer radius
        ────╯
    "#]]
    .assert_eq(&rendered(&[found], GOOD));
}

#[test]
fn a_fault_without_a_place_is_still_told() {
    let sheet = good();
    for (subject, key, expected) in [
        (
            Subject::Gap(0),
            Some("length"),
            expect![[r#"
            buoy.toml:15:10: winding `main` overlaps the core near r = 4.10 mm
              help: lower its outer radius
        "#]],
        ),
        (
            Subject::Gap(0),
            Some("center"),
            expect![[r#"
            buoy.toml:13:1: winding `main` overlaps the core near r = 4.10 mm
              help: lower its outer radius
        "#]],
        ),
        (
            Subject::Gap(7),
            None,
            expect![[r#"
            buoy.toml:1:1: winding `main` overlaps the core near r = 4.10 mm
              help: lower its outer radius
        "#]],
        ),
        (
            Subject::Material(0),
            Some("permeability"),
            expect![[r#"
            buoy.toml:2:16: winding `main` overlaps the core near r = 4.10 mm
              help: lower its outer radius
        "#]],
        ),
        (
            Subject::Sheet,
            None,
            expect![[r#"
            buoy.toml:1:1: winding `main` overlaps the core near r = 4.10 mm
              help: lower its outer radius
        "#]],
        ),
    ] {
        expected.assert_eq(&heads(&[sheet.diagnose(&fault(subject, key, None))]));
    }
}

#[test]
fn a_section_is_underlined_in_its_own_line() {
    let text = "[[windings]]\nname = \"w\"\nsections = [\n  { turns = 2, radii = [1, 2], heights = [0, 1] },\n  { turns = 2, radii = [1.5, 3], heights = [0, 1] },\n]\n";
    let sheet = read(text, "buoy.toml", &|_| Err(String::new())).unwrap();
    let [first, second] = [0, 1].map(|section| Subject::Winding { winding: 0, section });
    let found = sheet.diagnose(&fault(second, Some("radii"), Some(first)));
    expect![[r#"
        buoy.toml:5:24: winding `main` overlaps the core near r = 4.10 mm
           ╭─[ buoy.toml:5:24 ]
           │
         4 │   { turns = 2, radii = [1, 2], heights = [0, 1] },
           │   ───────────────────────┬───────────────────────
           │                          ╰───────────────────────── winding `w`, section 1
         5 │   { turns = 2, radii = [1.5, 3], heights = [0, 1] },
           │                        ────┬───
           │                            ╰───── winding `w`, section 2
           │
           │ Help: lower its outer radius
        ───╯
    "#]]
    .assert_eq(&rendered(&[found], text));
}

#[test]
fn real_faults_of_the_geometry_are_placed() {
    for (piece, replacement, expected) in [
        (
            "radii = [6.6, 10.2]",
            "radii = [5.6, 10.2]",
            expect![[r#"
            buoy.toml:20:9: winding `main` overlaps the post near r = 5.6 mm, z = -0.15 mm
                ╭─[ buoy.toml:20:9 ]
                │
              4 │ [core]
                │ ───┬──
                │    ╰──── the core
                │
             20 │ radii = [5.6, 10.2]
                │         ─────┬─────
                │              ╰─────── winding `main`
                │
                │ Help: the post spans r = 0 to 5.75 mm and z = -5.5 to -0.15 mm; shapes may touch but not share an area
            ────╯
        "#]],
        ),
        (
            "heights = [-4.9, 4.9]",
            "heights = [-4.9, 5.9]",
            expect![[r#"
            buoy.toml:21:11: winding `main` overlaps the upper plate near r = 10.2 mm, z = 5.7 mm
                ╭─[ buoy.toml:21:11 ]
                │
              4 │ [core]
                │ ───┬──
                │    ╰──── the core
                │
             21 │ heights = [-4.9, 5.9]
                │           ─────┬─────
                │                ╰─────── winding `main`
                │
                │ Help: the upper plate spans r = 0 to 12.75 mm and z = 5.5 to 8.05 mm; shapes may touch but not share an area
            ────╯
        "#]],
        ),
        (
            "length = 0.30",
            "length = 0.30\ncenter = 5.45",
            expect![[r#"
            buoy.toml:16:10: gap `gap 1` lies outside its leg: it spans z = 5.3 to 5.6 mm, the straight part of the post z = -5.5 to 5.5 mm
                ╭─[ buoy.toml:16:10 ]
                │
             16 │ center = 5.45
                │          ──┬─
                │            ╰─── gap `gap 1`
                │
                │ Help: keep center ± length/2 within ±5.5 mm
            ────╯
        "#]],
        ),
        (
            "length = 0.30",
            "length = 12",
            expect![[r#"
            buoy.toml:13:1: gap `gap 1` lies outside its leg: it spans z = -6 to 6 mm, the straight part of the post z = -5.5 to 5.5 mm
                ╭─[ buoy.toml:13:1 ]
                │
             13 │ [[gaps]]
                │ ────┬───
                │     ╰───── gap `gap 1`
                │
                │ Help: keep center ± length/2 within ±5.5 mm
            ────╯
        "#]],
        ),
        (
            "height = 16.1",
            "height = 16.1\ncorner_radius = 9",
            expect![[r#"
            buoy.toml:11:17: corner_radius is 9 mm, but the window has room for less than 2.425 mm
                ╭─[ buoy.toml:11:17 ]
                │
             11 │ corner_radius = 9
                │                 ┬
                │                 ╰── the core
                │
                │ Help: write a smaller corner_radius
            ────╯
        "#]],
        ),
    ] {
        let text = GOOD.replacen(piece, replacement, 1);
        let sheet = read(&text, "buoy.toml", &|_| Err(String::new())).unwrap();
        let fault = gapwright::geometry::outline(&sheet.model).unwrap_err();
        expected.assert_eq(&rendered(&[sheet.diagnose(&fault)], &text));
    }
}

#[test]
fn a_material_is_replaced_for_one_run() {
    let mut sheet = good();
    let csv = "H [A/m],B [T]\n0,0\n100,0.3\n";
    replace_material(&mut sheet, "soft_ferrite", csv, "hot.csv").unwrap();
    assert!(matches!(sheet.model.materials[0].law, Law::Table(_)));

    let unknown = replace_material(&mut sheet, "soft_ferite", csv, "hot.csv").unwrap_err();
    expect![[r#"
        buoy.toml:1:1: material `soft_ferite` is not defined
          help: the nearest is `soft_ferrite`; defined here: soft_ferrite
    "#]]
    .assert_eq(&heads(&[unknown]));
    let broken =
        replace_material(&mut sheet, "soft_ferrite", "H [A/m],B [T]\n0,0\n100,-0.3\n", "hot.csv");
    expect![[r#"
        hot.csv:3:1: row 2: B = -0.3 T does not rise above the 0 T of the row before, but B must grow with H
           ╭─[ hot.csv:3:1 ]
           │
         3 │ 100,-0.3
           │ ────┬───
           │     ╰───── here
           │
           │ Help: smooth or drop the row
        ───╯
    "#]].assert_eq(&rendered(&[broken.unwrap_err()], GOOD));
}
