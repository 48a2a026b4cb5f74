//! The tables of the sheet and their keys: the walker refuses every other key, the schema mirrors them.

use super::nearest::nearest;

/// One table of the sheet.
#[derive(Debug, PartialEq, Eq)]
pub(super) struct Table {
    /// As messages show it: "`[core]`".
    pub shown: &'static str,
    pub keys: &'static [&'static str],
}

pub(super) const TOP: Table = Table {
    shown: "the top of the sheet",
    keys: &[
        "title",
        "length_unit",
        "materials",
        "core",
        "gaps",
        "windings",
        "parts",
        "probes",
        "accuracy",
        "estimate",
        "require",
        "hot_spots",
    ],
};
pub(super) const MATERIAL: Table = Table {
    shown: "`[materials.NAME]`",
    keys: &["permeability", "bh", "interpolation", "saturation"],
};
pub(super) const SATURATION: Table =
    Table { shown: "`saturation`", keys: &["initial_permeability", "flux_density"] };
pub(super) const CORE: Table = Table {
    shown: "`[core]`",
    keys: &[
        "material",
        "form",
        "outer_diameter",
        "outer_legs_area",
        "wall_inner_diameter",
        "post_diameter",
        "hole_diameter",
        "height",
        "window_height",
        "flange_diameter",
        "diameter",
        "corner_radius",
        "joint",
    ],
};
pub(super) const GAP: Table =
    Table { shown: "`[[gaps]]`", keys: &["name", "across", "length", "center"] };
pub(super) const WINDING: Table = Table {
    shown: "`[[windings]]`",
    keys: &["name", "turns", "radii", "heights", "sections", "current", "ripple"],
};
pub(super) const SECTION: Table =
    Table { shown: "`sections`", keys: &["turns", "radii", "heights"] };
pub(super) const PART: Table =
    Table { shown: "`[[parts]]`", keys: &["name", "material", "outline"] };
pub(super) const PROBE: Table =
    Table { shown: "`[[probes]]`", keys: &["name", "at", "from", "to", "points"] };
pub(super) const ACCURACY: Table =
    Table { shown: "`[accuracy]`", keys: &["interval", "max_unknowns"] };
pub(super) const ESTIMATE: Table = Table {
    shown: "`[estimate]`",
    keys: &["inductance", "inductance_factor", "gap_correction", "tolerance"],
};
pub(super) const REQUIRE: Table =
    Table { shown: "`[[require]]`", keys: &["winding", "current", "kind", "least", "most"] };
pub(super) const HOT_SPOTS: Table = Table { shown: "`[hot_spots]`", keys: &["count", "averaging"] };

/// Every table, the top first: where a misplaced key may belong.
const ALL: [&Table; 13] = [
    &TOP,
    &MATERIAL,
    &SATURATION,
    &CORE,
    &GAP,
    &WINDING,
    &SECTION,
    &PART,
    &PROBE,
    &ACCURACY,
    &ESTIMATE,
    &REQUIRE,
    &HOT_SPOTS,
];

/// Keys of the top that are no tables.
const TOP_VALUES: [&str; 2] = ["title", "length_unit"];

/// What to write instead of an unknown table of the top.
pub(super) fn table_advice(unknown: &str) -> String {
    let tables: Vec<&str> =
        TOP.keys.iter().copied().filter(|key| !TOP_VALUES.contains(key)).collect();
    let nearest = nearest(unknown, &tables).unwrap_or_default();
    format!("the nearest known table is `{nearest}`; known here: {}", tables.join(", "))
}

/// What to write instead of an unknown key of `table`.
pub(super) fn advice(table: &Table, unknown: &str) -> String {
    let known = table.keys.join(", ");
    match ALL.iter().find(|other| other.keys.contains(&unknown)) {
        Some(home) if **home == TOP => {
            format!("`{unknown}` belongs at the top of the sheet, above the first table")
        }
        Some(home) => format!("`{unknown}` belongs in {}; known here: {known}", home.shown),
        None => {
            let nearest = nearest(unknown, table.keys).unwrap_or_default();
            format!("the nearest known key is `{nearest}`; known here: {known}")
        }
    }
}

/// Stands where no example would help.
pub(super) const NO_EXAMPLE: &str = "…";

/// Example of a value for a key that is missing.
pub(super) fn example(key: &str) -> &'static str {
    match key {
        "material" => "\"soft_ferrite\"",
        "form" => "\"pot\"",
        "across" => "\"post\"",
        "length" => "0.30",
        "outer_diameter" | "flange_diameter" => "25.5",
        "wall_inner_diameter" => "21.2",
        "post_diameter" | "diameter" => "11.5",
        "height" => "16.1",
        "window_height" => "11.0",
        "turns" => "42",
        "permeability" => "2000",
        "radii" => "[6.6, 10.2]",
        "heights" => "[-4.9, 4.9]",
        "outline" => "[[0, 0], [5, 0], [5, 2], [0, 2]]",
        "from" | "at" => "[0, 0]",
        "to" => "[0, 5]",
        "current" => "\"1.8 A\"",
        "winding" => "\"main\"",
        "least" => "\"0.60 mH\"",
        "initial_permeability" => "2300",
        "flux_density" => "\"0.48 T\"",
        _ => NO_EXAMPLE,
    }
}
