//! Laws and B–H tables.

use super::{GOOD, check, check_broken, check_heads, rendered};
use expect_test::expect;
use gapwright::input::read;

#[test]
fn an_undefined_material_names_the_nearest() {
    check_broken(
        "material = \"soft_ferrite\"",
        "material = \"soft_ferite\"",
        expect![[r#"
        buoy.toml:5:12: material `soft_ferite` is not defined
           ╭─[ buoy.toml:5:12 ]
           │
         5 │ material = "soft_ferite"
           │            ──────┬──────
           │                  ╰──────── here
           │
           │ Help: the nearest is `soft_ferrite`; defined here: soft_ferrite
        ───╯
    "#]],
    );
}

#[test]
fn a_material_has_exactly_one_law() {
    check_broken(
        "permeability = 2000",
        "permeability = 2000\nbh = \"a.csv\"",
        expect![[r#"
        buoy.toml:3:6: material `soft_ferrite` has two laws, `permeability` and `bh`
           ╭─[ buoy.toml:3:6 ]
           │
         2 │ permeability = 2000
           │                ──┬─
           │                  ╰─── one law
         3 │ bh = "a.csv"
           │      ───┬───
           │         ╰───── here
           │
           │ Help: keep one of them
        ───╯
    "#]],
    );
    check_heads(
        "permeability = 2000",
        "",
        expect![[r#"
        buoy.toml:1:1: material `soft_ferrite` has no law
          help: add one of `permeability = 2000`, `bh = "table.csv"`, `saturation = { … }`
    "#]],
    );
    check_heads(
        "permeability = 2000",
        "permeability = 2000\ninterpolation = \"linear\"",
        expect![[r#"
        buoy.toml:3:17: `interpolation` is given, but there is no `bh` table
          help: remove it
    "#]],
    );
    check_heads(
        "permeability = 2000",
        "permeability = -2",
        expect![[r#"
        buoy.toml:2:16: `permeability` = -2 must be greater than 0
          help: write a number greater than 0, such as 2000
    "#]],
    );
    check_heads(
        "permeability = 2000",
        "saturation = { initial_permeability = 2300 }",
        expect![[r#"
        buoy.toml:2:14: `saturation` lacks `flux_density`
          help: add `flux_density = "0.48 T"`
    "#]],
    );
    check_heads(
        "permeability = 2000",
        "saturation = { initial_permeability = 0.5, flux_density = \"0.5 T\" }",
        expect![[r#"
        buoy.toml:2:14: initial_permeability = 0.5: needs a finite number > 1, relative to empty space
          help: write what the data sheet says
    "#]],
    );
    check_heads(
        "[materials.soft_ferrite]",
        "[materials]",
        expect![[r#"
        buoy.toml:2:1: `permeability` stands in `[materials]` itself
          help: give the material a name: `[materials.soft_ferrite]`, its keys below
        buoy.toml:5:12: material `soft_ferrite` is not defined
          help: define it: `[materials.soft_ferrite]`, with `permeability = 2000` below
    "#]],
    );
}

#[test]
fn inline_tables_are_refused_by_row() {
    check_broken(
        "permeability = 2000",
        "bh = [[0, 0], [50, 0.2], [40, 0.3]]",
        expect![[r#"
        buoy.toml:2:26: `bh`: row 3: H = 40 A/m does not rise above the 50 A/m of the row before
           ╭─[ buoy.toml:2:26 ]
           │
         2 │ bh = [[0, 0], [50, 0.2], [40, 0.3]]
           │                          ────┬────
           │                              ╰────── here
           │
           │ Help: sort the rows by H and drop repeated ones
        ───╯
    "#]],
    );
    for (table, expected) in [
        (
            "[[0, 0], [50, 0.2], [60, 0.1]]",
            expect![[r#"
            buoy.toml:2:26: `bh`: row 3: B = 0.1 T does not rise above the 0.2 T of the row before, but B must grow with H
              help: smooth or drop the row
        "#]],
        ),
        (
            "[[0, 0], [50, 0.2], [60, 0.200001]]",
            expect![[r#"
            buoy.toml:2:26: `bh`: row 3: B rises by 0.000001000000000001 T over 10 A/m, less than the 0.0000125663706127 T of empty space (slope µ0)
              help: check the units (A/m and T) and that B is the flux density, not the polarisation
        "#]],
        ),
        (
            "[[10, 0.1], [50, 0.2]]",
            expect![[r#"
            buoy.toml:2:7: `bh`: row 1: H = 10 A/m, B = 0.1 T, but the first row must be 0,0
              help: give the virgin curve from zero up
        "#]],
        ),
        (
            "[[0, 0], [-50, -0.2]]",
            expect![[r#"
            buoy.toml:2:15: `bh`: row 2: H = -50 A/m does not rise above the 0 A/m of the row before
              help: sort the rows by H and drop repeated ones
        "#]],
        ),
        (
            "[[0, 0]]",
            expect![[r#"
            buoy.toml:2:6: `bh`: a B-H table needs at least 2 rows, this one has 1
              help: start with 0,0 and add measured points
        "#]],
        ),
        (
            "[]",
            expect![[r#"
            buoy.toml:2:6: `bh`: a B-H table needs at least 2 rows, this one has 0
              help: start with 0,0 and add measured points
        "#]],
        ),
        (
            "[[0, 0], [50]]",
            expect![[r#"
            buoy.toml:2:15: `bh` must hold pairs [H, B], but here is a list of 1
              help: write H in A/m and B in T: [50, 0.1]
        "#]],
        ),
        (
            "[[0, 0], [50, nan]]",
            expect![[r#"
            buoy.toml:2:20: `bh` = nan is not a finite number
              help: write a flux density such as "380 mT", or a bare number in SI units
        "#]],
        ),
        (
            "[[0, 0], [\"50 A/m\", \"0.2 A\"]]",
            expect![[r#"
            buoy.toml:2:26: `bh`: `0.2 A` is a current, not a flux density
              help: write a flux density such as "380 mT", or a bare number in SI units
        "#]],
        ),
        (
            "7",
            expect![[r#"
            buoy.toml:2:6: `bh` must be the path of a CSV file or a list of pairs, but it is a number
              help: write `bh = "table.csv"` or `bh = [[0, 0], [50, 0.1], …]`
        "#]],
        ),
    ] {
        check_heads("permeability = 2000", &format!("bh = {table}"), expected);
    }
}

#[test]
fn a_comment_above_a_broken_row_is_not_blamed() {
    let sheet = GOOD.replace("permeability = 2000", "bh = \"hot.csv\"");
    for line_end in ["\n", "\r\n"] {
        let csv = ["H [A/m],B [T]", "0,0", "# measured at noon", "", "50,high", ""].join(line_end);
        let diagnostics = read(&sheet, "buoy.toml", &|_| Ok(csv.clone())).unwrap_err();
        assert_eq!((diagnostics[0].line, diagnostics[0].column), (5, 1));
        assert_eq!(&csv[diagnostics[0].span.clone()], "50,high");
    }
}

#[test]
fn tables_in_files_are_refused_in_the_file() {
    let sheet = GOOD.replace("permeability = 2000", "bh = \"hot.csv\"");
    for (csv, expected) in [
        (
            "H [A/m],B [T]\n0,0\n50,0.2\n40,0.3\n",
            expect![[r#"
            bench/hot.csv:4:1: row 3: H = 40 A/m does not rise above the 50 A/m of the row before
               ╭─[ bench/hot.csv:4:1 ]
               │
             4 │ 40,0.3
               │ ───┬──
               │    ╰──── here
               │
               │ Help: sort the rows by H and drop repeated ones
            ───╯
        "#]],
        ),
        (
            "# a note\nH [A/m],B [T]\n\n0,0\n50;0.2\n",
            expect![[r#"
            bench/hot.csv:5:1: row 2 has 1 entries, not 2
               ╭─[ bench/hot.csv:5:1 ]
               │
             5 │ 50;0.2
               │ ───┬──
               │    ╰──── here
               │
               │ Help: write the first line `H [A/m],B [T]`, then one pair a line, decimal points, commas between
            ───╯
        "#]],
        ),
        (
            "B,H\n0,0\n",
            expect![[r#"
            bench/hot.csv:1:1: the first line is `B,H`, not `H [A/m],B [T]`
               ╭─[ bench/hot.csv:1:1 ]
               │
             1 │ B,H
               │ ─┬─
               │  ╰─── here
               │
               │ Help: write the first line `H [A/m],B [T]`, then one pair a line, decimal points, commas between
            ───╯
        "#]],
        ),
        (
            "H [A/m];B [T]\n0;0\n",
            expect![[r#"
            bench/hot.csv:1:1: the columns are separated by semicolons
               ╭─[ bench/hot.csv:1:1 ]
               │
             1 │ H [A/m];B [T]
               │ ──────┬──────
               │       ╰──────── here
               │
               │ Help: write the first line `H [A/m],B [T]`, then one pair a line, decimal points, commas between
            ───╯
        "#]],
        ),
        (
            "H [A/m],B [T]\n0,0\n50,high\n",
            expect![[r#"
            bench/hot.csv:3:1: row 2: `high` is not a finite number
               ╭─[ bench/hot.csv:3:1 ]
               │
             3 │ 50,high
               │ ───┬───
               │    ╰───── here
               │
               │ Help: write the first line `H [A/m],B [T]`, then one pair a line, decimal points, commas between
            ───╯
        "#]],
        ),
        (
            "",
            expect![[r#"
            bench/hot.csv:1:1: the B–H table is empty
              help: write the first line `H [A/m],B [T]`, then one pair a line, decimal points, commas between
        "#]],
        ),
        (
            "H [A/m],B [T]\n",
            expect![[r#"
            bench/hot.csv:1:1: a B-H table needs at least 2 rows, this one has 0
               ╭─[ bench/hot.csv:1:1 ]
               │
             1 │ H [A/m],B [T]
               │ │
               │ ╰─ here
               │
               │ Help: start with 0,0 and add measured points
            ───╯
        "#]],
        ),
    ] {
        let diagnostics = read(&sheet, "bench/buoy.toml", &|_| Ok(csv.to_string())).unwrap_err();
        expected.assert_eq(&rendered(&diagnostics, &sheet));
    }
    check(
        &sheet,
        expect![[r#"
        buoy.toml:2:6: the B–H table `hot.csv` of material `soft_ferrite` cannot be read: no such file `hot.csv`
           ╭─[ buoy.toml:2:6 ]
           │
         2 │ bh = "hot.csv"
           │      ────┬────
           │          ╰────── here
           │
           │ Help: write the path relative to this sheet
        ───╯
    "#]],
    );
}
