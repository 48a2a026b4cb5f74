//! The sheets of `meshes/`: read without a mistake, drawn without a fault, solved to what they
//! promise, and described by the schema.

use gapwright::adapt;
use gapwright::geometry::outline;
use gapwright::input::{Sheet, read, render, schema};
use gapwright::model::Model;
use gapwright::report::StageTimes;
use gapwright::report::json::{result_json, result_schema};
use gapwright::report::saturate::{saturate_json, saturate_schema};
use gapwright::results::{Results, check_requirements, collect, ripple};
use gapwright::study::saturate::{Wish, saturate};
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

/// No place of the value is against the schema.
#[track_caller]
pub fn satisfies(validator: &jsonschema::Validator, name: &str, value: &serde_json::Value) {
    let errors = validator.iter_errors(value);
    let errors: Vec<String> =
        errors.map(|e| format!("{name}: {} {e}", e.instance_path())).collect();
    assert!(errors.is_empty(), "{errors:#?}");
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

/// A run of a model as `solve` does it, requirements and ripple included.
fn solved(model: &Model) -> Results {
    let outline = outline(model).unwrap();
    let mut outcome = adapt::run(model, &outline, &mut |_| {}).unwrap();
    let mut results = collect(model, &outline, &outcome);
    results.requirements = check_requirements(model, &outline, &mut outcome).unwrap().0;
    results.ripple = ripple(model, &outline, &mut outcome).unwrap();
    results
}

/// The sheet called `name`, ready to be run.
fn by_name(name: &str) -> Model {
    let (name, text) = all().into_iter().find(|(n, _)| n == name).unwrap();
    sheet(&name, &text).model
}

/// The line of the header that says what to expect.
fn expectation(text: &str) -> &str {
    text.lines().find_map(|line| line.strip_prefix("# Expect: ")).unwrap()
}

/// The quantity "700.6 µH" at the start of a text, in SI.
fn first_quantity(text: &str) -> f64 {
    let words: Vec<&str> = text.split(' ').take(2).collect();
    reading(words.join(" ").trim_end_matches([',', ';', '.'])).unwrap().value
}

/// What a printed number may be off by, relative: half a unit of its last digit.
fn slack(text: &str) -> f64 {
    let number = text.split(' ').next().unwrap();
    let n_decimals = number.split('.').nth(1).map_or(0, str::len);
    0.5 * 10_f64.powi(-(n_decimals as i32)) / number.parse::<f64>().unwrap()
}

#[test]
fn what_a_sheet_says_to_expect_is_what_comes_out() {
    let validator = jsonschema::validator_for(&result_schema()).unwrap();
    for (name, text) in all() {
        let results = solved(&sheet(&name, &text).model);
        assert!(results.reached, "{name}");
        let says = expectation(&text);
        let factor = says.split_once("A_L ").map(|(_, rest)| (rest, results.inductance_factor));
        for (says, found) in [Some((says, results.inductance)), factor].into_iter().flatten() {
            let (expected, found) = (first_quantity(says), found.unwrap());
            let slack = slack(says) * expected;
            let is_held = found.low - slack <= expected && expected <= found.high + slack;
            // The best value is what a reader compares: rounded, it may be one unit of the last digit off.
            let is_best = (found.value - expected).abs() <= 3.0 * slack;
            assert!(is_held && is_best, "{name}: {expected} against {found:?}");
        }
        let times = StageTimes { stages: vec![("first mesh".to_string(), 0.004)] };
        for times in [None, Some(&times)] {
            let value = serde_json::from_str(&result_json(&results, times)).unwrap();
            satisfies(&validator, &name, &value);
        }
    }
}

/// `value` is `expected` within a relative limit: what rounding in the header leaves, or as said where it is called.
#[track_caller]
fn near(what: &str, value: f64, expected: f64, limit: f64) {
    assert!((value / expected - 1.0).abs() <= limit, "{what}: {value} against {expected}");
}

#[test]
fn saturating_sheets_keep_the_promises_of_their_headers() {
    let cold = by_name("saturating_choke.toml");
    let results = solved(&cold);
    near("cold, incremental", results.incremental_inductance.unwrap(), 655e-6, 1e-3);
    assert!(results.requirements[0].met);

    let (name, text) = all().into_iter().find(|(name, _)| name == "saturating_choke.toml").unwrap();
    let hot = sheet(&name, &text.replacen("\"ferrite_cold.csv\"", "\"ferrite_hot.csv\"", 1)).model;
    assert_ne!(hot, cold);
    let results = solved(&hot);
    near("hot, incremental", results.incremental_inductance.unwrap(), 515e-6, 1e-3);
    assert!(!results.requirements[0].met);

    let results = solved(&by_name("lamp_choke_saturating.toml"));
    near("lamp choke, incremental", results.incremental_inductance.unwrap(), 701.4e-6, 1e-4);
    assert!(results.requirements.iter().all(|r| r.met) && !results.requirements.is_empty());
}

#[test]
fn other_claims_of_the_headers_hold() {
    let factors: Vec<String> = solved(&by_name("three_gaps.toml"))
        .gaps
        .iter()
        .map(|gap| format!("{:.2}", gap.gap_based.unwrap()))
        .collect();
    assert_eq!(factors, ["1.09", "1.10", "1.09"]);

    let results = solved(&by_name("spacer.toml"));
    let [post, wall] = [&results.gaps[0], &results.gaps[1]].map(|gap| gap.gap_based.unwrap());
    assert!(post < wall, "{post} {wall}");

    // The spot is the mean over a disc of 0.2 mm at a fillet of 1 mm: 3 % is what another mesh makes of it.
    let spot = solved(&by_name("chamfered_tip.toml")).hot_spots[0].clone();
    near("latch, hottest spot", spot.flux_density, 0.40, 0.03);
    assert_eq!(spot.part, "yoke");

    let legs = solved(&by_name("round_post.toml"));
    assert!(legs.notes.iter().any(|note| note.contains("legs are not round")), "{:?}", legs.notes);

    assert!(solved(&by_name("buoy_choke.toml")).verdict.unwrap().within_tolerance);
}

#[test]
fn the_table_of_every_sheet_satisfies_its_schema() {
    let validator = jsonschema::validator_for(&saturate_schema()).unwrap();
    for (name, text) in all() {
        let mut model = sheet(&name, &text).model;
        model.accuracy.interval = 1e-2;
        let outline = outline(&model).unwrap();
        let to = 2.0 * model.windings.iter().map(|w| w.current).find(|&i| i != 0.0).unwrap();
        let wish = Wish { to, n_points: 4 };
        let found = saturate(&model, &outline, &wish, &mut |_, _| {}).unwrap();
        let value = serde_json::from_str(&saturate_json(&found, None)).unwrap();
        satisfies(&validator, &name, &value);
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
        satisfies(&validator, &name, &json(&text));
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
