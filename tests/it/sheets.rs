//! The sheets of `meshes/`: read without a mistake, drawn without a fault, solved to what they
//! promise, and described by the schema.

use gapwright::adapt;
use gapwright::geometry::outline;
use gapwright::input::{Sheet, read, render, schema};
use gapwright::results::collect;
use gapwright::units::reading;
use std::fs;
use std::path::{Path, PathBuf};

fn meshes() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("meshes")
}

/// Names and texts of all sheets, sorted.
pub fn all() -> Vec<(String, String)> {
    let entries = fs::read_dir(meshes()).unwrap().map(|entry| entry.unwrap().path());
    let mut sheets: Vec<_> = entries
        .filter(|path| path.extension().is_some_and(|e| e == "toml"))
        .map(|path| {
            (
                path.file_name().unwrap().to_string_lossy().into_owned(),
                fs::read_to_string(path).unwrap(),
            )
        })
        .collect();
    sheets.sort();
    assert!(10 <= sheets.len());
    sheets
}

/// Reads a sheet that has no mistakes.
pub fn sheet(name: &str, text: &str) -> Sheet {
    let read_file = |path: &str| fs::read_to_string(meshes().join(path)).map_err(|e| e.to_string());
    read(text, name, &read_file).unwrap_or_else(|diagnostics| {
        let messages: String = diagnostics.iter().map(|d| render(d, text, false)).collect();
        panic!("{messages}")
    })
}

#[test]
fn every_sheet_is_read_and_drawn() {
    for (name, text) in all() {
        let sheet = sheet(&name, &text);
        if let Err(fault) = outline(&sheet.model) {
            panic!("{}", render(&sheet.diagnose(&fault), &text, false));
        }
    }
}

#[test]
fn every_sheet_says_what_it_shows_how_to_run_it_and_what_to_expect() {
    for (name, text) in all() {
        let comment: Vec<&str> = text.lines().take_while(|line| line.starts_with('#')).collect();
        for word in ["(invented)", "# Shows:", "# Expect:"] {
            assert!(comment.iter().any(|line| line.contains(word)), "{name} lacks `{word}`");
        }
        let command = format!("gapwright solve meshes/{name}");
        assert!(comment.iter().any(|line| line.contains(&command)), "{name} lacks `{command}`");
    }
}

/// The first quantity of the comment line "# Expect: 700.6 µH, …".
fn expected_inductance(text: &str) -> f64 {
    let line = text.lines().find_map(|line| line.strip_prefix("# Expect: ")).unwrap();
    let words: Vec<&str> = line.split([' ', ',']).take(2).collect();
    reading(&words.join(" ")).unwrap().value
}

#[test]
fn what_a_sheet_says_to_expect_is_what_comes_out() {
    for (name, text) in all() {
        let model = sheet(&name, &text).model;
        let outline = outline(&model).unwrap();
        let outcome = adapt::run(&model, &outline, &mut |_| {}).unwrap();
        let results = collect(&model, &outline, &outcome);
        let found = results.inductance.unwrap();
        let expected = expected_inductance(&text);
        // Four digits are printed in the comment: half a unit of the last is at most 0.05 %.
        let slack = 5e-4 * expected;
        let is_held = found.low - slack <= expected && expected <= found.high + slack;
        assert!(results.reached && is_held, "{name}: {expected} against {found:?}");
    }
}

#[test]
fn the_buoy_choke_is_understood() {
    let (name, text) = all().into_iter().find(|(name, _)| name == "buoy_choke.toml").unwrap();
    let model = sheet(&name, &text).model;
    assert_eq!(model.title, "Buoy charger choke");
    assert_eq!(model.gaps[0].length, 0.3e-3);
    assert_eq!(model.gaps[0].name, "gap 1");
    let section = model.windings[0].sections[0];
    assert_eq!(
        (section.turns, section.radii, section.heights),
        (42.0, [6.6e-3, 10.2e-3], [-4.9e-3, 4.9e-3])
    );
    assert_eq!(model.windings[0].current, 1.8);
    assert_eq!(model.accuracy.interval, 1e-3);
    assert_eq!(model.estimate.unwrap().tolerance, 0.03);
}

/// The sheet as the JSON that the schema describes.
fn json(text: &str) -> serde_json::Value {
    toml::from_str(text).unwrap()
}

#[test]
fn every_sheet_validates_against_the_schema() {
    let validator = jsonschema::validator_for(&schema()).unwrap();
    for (name, text) in all() {
        let errors: Vec<String> = validator
            .iter_errors(&json(&text))
            .map(|e| format!("{name}: {} {e}", e.instance_path()))
            .collect();
        assert!(errors.is_empty(), "{errors:#?}");
    }
}

#[test]
fn the_schema_refuses_what_the_reader_refuses() {
    let validator = jsonschema::validator_for(&schema()).unwrap();
    let (name, good) = all().into_iter().find(|(name, _)| name == "buoy_choke.toml").unwrap();
    for (piece, replacement) in [
        ("post_diameter ", "post_diametre "),
        ("across =", "accross ="),
        ("turns   =", "turn ="),
        ("[accuracy]", "[acuracy]"),
        ("interval =", "intervall ="),
        ("title  ", "titel  "),
        ("permeability =", "permeabilty ="),
        ("length = 0.30", "length = \"0.3 A\""),
        ("length = 0.30", "length = \"thin\""),
        ("length = 0.30", "length = true"),
        ("form                = \"pot\"", "form = \"toroid\""),
        ("turns   = 42", "turns = 0"),
        ("turns   = 42", "turns = \"42\""),
        ("radii   = [6.6, 10.2] ", "radii = [6.6, 10.2, 11]"),
        ("form                = \"pot\"", "form = \"rod\""),
    ] {
        assert!(good.contains(piece), "{piece}");
        let broken = good.replacen(piece, replacement, 1);
        assert!(!validator.is_valid(&json(&broken)), "the schema accepts `{replacement}`");
        assert!(
            read(&broken, &name, &|_| Err(String::new())).is_err(),
            "the reader accepts `{replacement}`"
        );
    }
}
