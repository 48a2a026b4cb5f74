//! `result.json` against its schema and against the promised keys.

use super::*;
use crate::report::fixture;
use serde_json::Value;

fn parsed(results: &Results, times: Option<&StageTimes>) -> Value {
    serde_json::from_str(&result_json(results, times)).unwrap()
}

#[track_caller]
fn check_against_schema(value: &Value) {
    let validator = jsonschema::validator_for(&result_schema()).unwrap();
    let errors: Vec<String> =
        validator.iter_errors(value).map(|e| format!("{}: {e}", e.instance_path())).collect();
    assert!(errors.is_empty(), "{errors:#?}");
}

#[test]
fn the_file_satisfies_the_shipped_schema() {
    let times = StageTimes { stages: vec![("mesh".to_string(), 0.004)] };
    check_against_schema(&parsed(&fixture::results(), None));
    check_against_schema(&parsed(&fixture::results(), Some(&times)));
}

#[test]
fn everything_that_may_be_absent_is_null_and_still_satisfies_the_schema() {
    let mut results = fixture::results();
    results.inductance = None;
    results.inductance_factor = None;
    results.incremental_inductance = None;
    results.inductance_based = None;
    results.verdict = None;
    results.windings[0].flux_linkage_ends = None;
    for row in &mut results.ledger {
        row.reluctance = None;
    }
    results.parts[0].margin = None;
    results.gaps[0].gap_based = None;
    let value = parsed(&results, None);
    for key in ["inductance", "inductance_factor", "incremental_inductance", "estimate", "losses"] {
        assert!(value[key].is_null() && value.get(key).is_some(), "{key}");
    }
    check_against_schema(&value);
}

#[test]
fn the_schema_refuses_a_missing_and_a_misspelt_key() {
    let validator = jsonschema::validator_for(&result_schema()).unwrap();
    let whole = parsed(&fixture::results(), None);
    let mut missing = whole.clone();
    missing.as_object_mut().unwrap().remove("inductance");
    assert!(!validator.is_valid(&missing));
    let mut misspelt = whole;
    misspelt["ledger"][0]["shares"] = Value::from(1.0);
    assert!(!validator.is_valid(&misspelt));
}

#[test]
fn the_keys_stand_in_the_promised_order() {
    let text = result_json(&fixture::results(), None);
    let mut at = 0;
    for key in [
        "program",
        "title",
        "unknowns",
        "triangles",
        "rounds",
        "inductance",
        "inductance_factor",
        "incremental_inductance",
        "coenergy",
        "energy",
        "windings",
        "ledger",
        "gap_factors",
        "hot_spots",
        "parts",
        "probes",
        "estimate",
        "require",
        "losses",
        "notes",
    ] {
        let found = text[at..].find(&format!("\n  \"{key}\":"));
        at += found.unwrap_or_else(|| panic!("{key} is missing or out of order"));
    }
    assert!(!text.contains("timings"));
}

#[test]
fn numbers_survive_to_the_last_bit() {
    let results = fixture::results();
    let value = parsed(&results, None);
    assert_eq!(
        value["probes"][0]["points"][0]["b_r"].as_f64().unwrap(),
        results.probes[0].points[0].b_r
    );
    assert_eq!(value["inductance"]["high"].as_f64().unwrap(), results.inductance.unwrap().high);
    assert_eq!(value["parts"][0]["exceeded"]["5 %"].as_f64().unwrap(), 0.38);
}

#[test]
fn a_missed_interval_is_the_first_note() {
    let mut results = fixture::results();
    results.reached = false;
    let value = parsed(&results, None);
    assert!(value["notes"][0].as_str().unwrap().contains("was wanted"), "{}", value["notes"][0]);
}

#[test]
fn the_schema_file_beside_the_code_is_up_to_date() {
    let text = serde_json::to_string_pretty(&result_schema()).unwrap() + "\n";
    expect_test::expect_file!["../result.schema.json"].assert_eq(&text);
}
