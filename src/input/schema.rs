//! The JSON Schema of the sheet, for editors and generators of sheets.
//!
//! The structs here mirror the format and are never filled: reading goes through the walker, whose
//! messages know the place; a test keeps the two from drifting apart.

use crate::units::{Dimension, spellings};
use schemars::{JsonSchema, Schema, SchemaGenerator, json_schema};
use serde_json::Value;
use std::borrow::Cow;
use std::collections::BTreeMap;

/// JSON Schema (draft 2020-12) of a sheet read as TOML.
pub fn schema() -> Value {
    let mut value = schemars::schema_for!(Sheet).to_value();
    forbid_null(&mut value);
    value
}

/// TOML has no null: an absent key is the only way to leave something out.
fn forbid_null(root: &mut Value) {
    let mut open = vec![root];
    while let Some(value) = open.pop() {
        if let Value::Object(map) = value {
            without_null(map);
        }
        match value {
            Value::Object(map) => open.extend(map.values_mut()),
            Value::Array(items) => open.extend(items.iter_mut()),
            _ => {}
        }
    }
}

fn without_null(map: &mut serde_json::Map<String, Value>) {
    if let Some(Value::Array(types)) = map.get_mut("type") {
        types.retain(|name| name != "null");
        if let [only] = &types[..] {
            let only = only.clone();
            map.insert("type".into(), only);
        }
    }
    if let Some(Value::Array(choices)) = map.get_mut("anyOf") {
        choices.retain(|choice| choice["type"] != "null");
    }
}

/// A number, or a text of digits and a unit of one dimension.
macro_rules! quantity {
    ($name:ident, $dimension:expr, $description:literal) => {
        struct $name;

        impl JsonSchema for $name {
            fn schema_name() -> Cow<'static, str> {
                stringify!($name).into()
            }

            fn json_schema(_: &mut SchemaGenerator) -> Schema {
                quantity_schema($dimension, $description)
            }
        }
    };
}

quantity!(Length, Dimension::Length, "a bare number in length_unit, or a text such as \"0.3 mm\"");
quantity!(Area, Dimension::Area, "a bare number in m², or a text such as \"66 mm²\"");
quantity!(Current, Dimension::Current, "a bare number in A, or a text such as \"1.8 A\"");
quantity!(Inductance, Dimension::Inductance, "a bare number in H, or a text such as \"250 nH\"");
quantity!(FluxDensity, Dimension::FluxDensity, "a bare number in T, or a text such as \"380 mT\"");
quantity!(FieldStrength, Dimension::FieldStrength, "a bare number in A/m, or a text with a unit");
quantity!(Ratio, Dimension::Ratio, "a bare ratio, or a text such as \"3 %\"");

fn quantity_schema(dimension: Dimension, description: &str) -> Schema {
    let units = spellings(dimension).join("|").replace('^', "\\^");
    let pattern =
        format!("^\\s*[+-]?([0-9]+\\.?[0-9]*|\\.[0-9]+)([eE][+-]?[0-9]+)?\\s*({units})?\\s*$");
    json_schema!({
        "description": description,
        "anyOf": [{ "type": "number" }, { "type": "string", "pattern": pattern }],
    })
}

/// A plain number greater than 0.
struct Positive;

impl JsonSchema for Positive {
    fn schema_name() -> Cow<'static, str> {
        "Positive".into()
    }

    fn json_schema(_: &mut SchemaGenerator) -> Schema {
        json_schema!({ "type": "number", "exclusiveMinimum": 0 })
    }
}

/// A round core with its coils.
#[derive(JsonSchema)]
#[schemars(deny_unknown_fields)]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
struct Sheet {
    /// Stands above every result.
    title: Option<String>,
    /// Unit of bare lengths; mm when left out.
    length_unit: Option<LengthUnit>,
    materials: Option<BTreeMap<String, Material>>,
    core: Option<Core>,
    gaps: Option<Vec<Gap>>,
    #[schemars(length(min = 1))]
    windings: Vec<Winding>,
    parts: Option<Vec<Part>>,
    probes: Option<Vec<Probe>>,
    accuracy: Option<Accuracy>,
    estimate: Option<Estimate>,
    require: Option<Vec<Require>>,
    hot_spots: Option<HotSpots>,
}

#[derive(JsonSchema)]
#[schemars(rename_all = "lowercase")]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
enum LengthUnit {
    Mm,
    M,
    Cm,
    In,
}

/// Exactly one law.
#[derive(JsonSchema)]
#[schemars(untagged, deny_unknown_fields)]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
enum Material {
    Constant {
        /// Relative permeability.
        permeability: Positive,
    },
    Table {
        bh: Bh,
        interpolation: Option<Interpolation>,
    },
    TwoParameters {
        saturation: Saturation,
    },
}

/// Path of a CSV file relative to the sheet, or pairs of H and B.
#[derive(JsonSchema)]
#[schemars(untagged)]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
enum Bh {
    Path(String),
    Pairs(Vec<(FieldStrength, FluxDensity)>),
}

#[derive(JsonSchema)]
#[schemars(rename_all = "lowercase")]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
enum Interpolation {
    Smooth,
    Linear,
}

#[derive(JsonSchema)]
#[schemars(deny_unknown_fields)]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
struct Saturation {
    initial_permeability: Positive,
    flux_density: FluxDensity,
}

/// A core given by its form; diameters and full heights.
#[derive(JsonSchema)]
#[schemars(tag = "form", rename_all = "lowercase", deny_unknown_fields)]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
enum Core {
    #[schemars(extend("oneOf" = [{ "required": ["outer_diameter"] }, { "required": ["outer_legs_area"] }]))]
    Pot {
        material: String,
        /// Either this or `outer_legs_area`.
        outer_diameter: Option<Length>,
        /// Summed section of outer legs that are not round.
        outer_legs_area: Option<Area>,
        wall_inner_diameter: Length,
        post_diameter: Length,
        hole_diameter: Option<Length>,
        height: Length,
        window_height: Length,
        corner_radius: Option<Length>,
        joint: Option<Length>,
    },
    Drum {
        material: String,
        flange_diameter: Length,
        post_diameter: Length,
        hole_diameter: Option<Length>,
        height: Length,
        window_height: Length,
        corner_radius: Option<Length>,
        joint: Option<Length>,
    },
    Rod {
        material: String,
        diameter: Length,
        hole_diameter: Option<Length>,
        height: Length,
        /// A rod has no window: only 0 is accepted.
        corner_radius: Option<Length>,
        joint: Option<Length>,
    },
}

#[derive(JsonSchema)]
#[schemars(deny_unknown_fields)]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
struct Gap {
    name: Option<String>,
    across: Across,
    length: Length,
    /// Height of the gap's middle; not for a spacer.
    center: Option<Length>,
}

#[derive(JsonSchema)]
#[schemars(rename_all = "lowercase")]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
enum Across {
    Post,
    Wall,
    Spacer,
}

/// Either `turns`, `radii`, `heights`, or `sections` in series.
#[derive(JsonSchema)]
#[schemars(deny_unknown_fields)]
#[schemars(extend("oneOf" = [{ "required": ["turns", "radii", "heights"] }, { "required": ["sections"] }]))]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
struct Winding {
    name: Option<String>,
    turns: Option<Positive>,
    radii: Option<[Length; 2]>,
    heights: Option<[Length; 2]>,
    sections: Option<Vec<Section>>,
    /// 1 A for the first winding and 0 for the others when left out; the sign is the sense.
    current: Option<Current>,
    /// Peak to peak.
    ripple: Option<Current>,
}

#[derive(JsonSchema)]
#[schemars(deny_unknown_fields)]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
struct Section {
    turns: Positive,
    radii: [Length; 2],
    heights: [Length; 2],
}

#[derive(JsonSchema)]
#[schemars(deny_unknown_fields)]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
struct Part {
    name: Option<String>,
    material: String,
    /// Corners [r, z] or [r, z, fillet radius].
    #[schemars(length(min = 3))]
    outline: Vec<Corner>,
}

#[derive(JsonSchema)]
#[schemars(untagged)]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
enum Corner {
    Sharp([Length; 2]),
    Fillet([Length; 3]),
}

/// One point `at`, or a line `from` … `to`.
#[derive(JsonSchema)]
#[schemars(deny_unknown_fields)]
#[schemars(extend("oneOf" = [{ "required": ["at"] }, { "required": ["from", "to"] }]))]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
struct Probe {
    name: Option<String>,
    at: Option<[Length; 2]>,
    from: Option<[Length; 2]>,
    to: Option<[Length; 2]>,
    points: Option<u32>,
}

#[derive(JsonSchema)]
#[schemars(deny_unknown_fields)]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
struct Accuracy {
    /// Relative width of the interval; 0.1 % when left out.
    interval: Option<Ratio>,
    max_unknowns: Option<u32>,
}

/// The number that is to be judged; the hand sum when none is given.
#[derive(JsonSchema)]
#[schemars(deny_unknown_fields)]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
struct Estimate {
    inductance: Option<Inductance>,
    inductance_factor: Option<Inductance>,
    gap_correction: Option<GapCorrection>,
    tolerance: Option<Ratio>,
}

#[derive(JsonSchema)]
#[schemars(untagged)]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
enum GapCorrection {
    Named(NamedCorrection),
    Factor(Positive),
}

#[derive(JsonSchema)]
#[schemars(rename_all = "lowercase")]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
enum NamedCorrection {
    None,
    #[schemars(rename = "one gap length")]
    OneGapLength,
    Log,
    Corner,
    Roters,
}

/// A promise; `least`, `most` or both.
#[derive(JsonSchema)]
#[schemars(deny_unknown_fields)]
#[schemars(extend("anyOf" = [{ "required": ["least"] }, { "required": ["most"] }]))]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
struct Require {
    winding: String,
    current: Current,
    kind: Option<InductanceKind>,
    least: Option<Inductance>,
    most: Option<Inductance>,
}

#[derive(JsonSchema)]
#[schemars(rename_all = "lowercase")]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
enum InductanceKind {
    Apparent,
    Incremental,
}

#[derive(JsonSchema)]
#[schemars(deny_unknown_fields)]
#[expect(dead_code, reason = "mirrors the format; only its schema is used")]
struct HotSpots {
    count: Option<u32>,
    /// Radius of the disc over which B is averaged; 0.2 mm when left out.
    averaging: Option<Length>,
}

#[cfg(test)]
mod tests {
    use super::super::keys;
    use super::*;
    use std::collections::BTreeSet;

    /// Property names of a definition, those of its alternatives included.
    fn properties(definition: &Value) -> BTreeSet<String> {
        let alternatives =
            ["oneOf", "anyOf"].into_iter().filter_map(|key| definition[key].as_array());
        let all = alternatives.flatten().chain([definition]);
        all.filter_map(|d| d["properties"].as_object()).flat_map(|p| p.keys().cloned()).collect()
    }

    #[test]
    fn the_schema_has_the_keys_of_the_reader() {
        let root = schema();
        let definitions = &root["$defs"];
        for (definition, table) in [
            (&root, &keys::TOP),
            (&definitions["Material"], &keys::MATERIAL),
            (&definitions["Saturation"], &keys::SATURATION),
            (&definitions["Core"], &keys::CORE),
            (&definitions["Gap"], &keys::GAP),
            (&definitions["Winding"], &keys::WINDING),
            (&definitions["Section"], &keys::SECTION),
            (&definitions["Part"], &keys::PART),
            (&definitions["Probe"], &keys::PROBE),
            (&definitions["Accuracy"], &keys::ACCURACY),
            (&definitions["Estimate"], &keys::ESTIMATE),
            (&definitions["Require"], &keys::REQUIRE),
            (&definitions["HotSpots"], &keys::HOT_SPOTS),
        ] {
            let wanted: BTreeSet<String> = table.keys.iter().map(|key| key.to_string()).collect();
            assert_eq!(properties(definition), wanted, "{}", table.shown);
        }
    }

    #[test]
    fn the_schema_file_beside_the_code_is_up_to_date() {
        let text = serde_json::to_string_pretty(&schema()).unwrap() + "\n";
        expect_test::expect_file!["sheet.schema.json"].assert_eq(&text);
    }

    #[test]
    fn null_is_nowhere_allowed() {
        assert!(!schema().to_string().contains("null"));
    }
}
