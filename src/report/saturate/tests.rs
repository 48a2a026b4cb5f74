//! The table as CSV, JSON, screen and plot.

use super::*;
use crate::report::svg::tests::check_texts;
use crate::results::Guaranteed;
use crate::study::saturate::{FALLS, Fall, Work};

/// A table with the shape of a real one; the numbers belong to no guarantee.
fn found() -> Saturation {
    let row = |k: usize| {
        let current = 0.6 * k as f64;
        let apparent = 700e-6 / (1.0 + (current / 3.0).powi(4));
        let linkage = apparent * current;
        Row {
            current,
            flux_linkage: linkage,
            flux_linkage_ends: Some([0.95 * linkage, 1.05 * linkage]),
            apparent,
            incremental: apparent / (1.0 + (current / 2.5).powi(4)),
            half_square: 0.5 * linkage * current,
            coenergy: Guaranteed {
                value: 0.5 * linkage * current,
                low: 0.499 * linkage * current,
                high: 0.501 * linkage * current,
            },
            exceeded: vec![0.5 * (1.0 - (-current).exp()), 0.499 * (1.0 - (-current).exp()), 0.3],
            n_unknowns: 1309,
            n_newton_steps: 3,
        }
    };
    let current = [Some(2.31), Some(2.35), Some(2.4), None];
    Saturation {
        title: "Buoy charger choke".to_string(),
        winding: "main".to_string(),
        parts: ["post, upper", "wall <outer>", "plate"].map(String::from).to_vec(),
        rows: (0..11).map(row).collect(),
        falls: FALLS.iter().zip(current).map(|(&share, current)| Fall { share, current }).collect(),
        requirements: crate::report::fixture::results().requirements,
        wanted: 5e-3,
        reached: true,
        work: Work { n_solves: 40, n_newton_steps: 100, n_cg_iterations: 900, n_meshes: 2 },
        notes: vec!["a note".to_string()],
    }
}

#[test]
fn csv_and_json_have_the_same_columns_and_numbers() {
    let mut found = found();
    found.rows[2].flux_linkage_ends = None;
    let text = saturate_csv(&found);
    let mut reader = ::csv::Reader::from_reader(text.as_bytes());
    let header: Vec<String> = reader.headers().unwrap().iter().map(String::from).collect();
    let json: serde_json::Value = serde_json::from_str(&saturate_json(&found, None)).unwrap();
    let rows: Vec<_> = reader.records().map(|r| r.unwrap()).collect();
    assert_eq!(rows.len(), found.rows.len());
    for (record, entry) in rows.iter().zip(json["rows"].as_array().unwrap()) {
        let entry = entry.as_object().unwrap();
        assert_eq!(entry.len(), header.len());
        for (column, cell) in header.iter().zip(record) {
            assert_eq!(entry[column].as_f64(), cell.parse().ok(), "{column}");
        }
    }
    assert_eq!(&rows[2][2], "");
}

#[test]
fn the_file_satisfies_its_schema_and_a_misspelt_key_does_not() {
    let validator = jsonschema::validator_for(&saturate_schema()).unwrap();
    let times = StageTimes { stages: vec![("solves".to_string(), 0.2)] };
    let mut value: serde_json::Value =
        serde_json::from_str(&saturate_json(&found(), Some(&times))).unwrap();
    let errors: Vec<String> =
        validator.iter_errors(&value).map(|e| format!("{}: {e}", e.instance_path())).collect();
    assert!(errors.is_empty(), "{errors:#?}");
    value["rows"][0].as_object_mut().unwrap().remove("coenergy low [J]");
    assert!(!validator.is_valid(&value));
}

#[test]
fn the_schema_file_beside_the_code_is_up_to_date() {
    let text = serde_json::to_string_pretty(&saturate_schema()).unwrap() + "\n";
    expect_test::expect_file!["../saturate.schema.json"].assert_eq(&text);
}

#[test]
fn no_label_overlaps_another_or_leaves_the_page() {
    check_texts(&saturate_svg(&found()));
    // Falls on top of one another, at both ends; twenty parts; a name too long for any column; no ends.
    let mut crowded = found();
    for (fall, current) in crowded.falls.iter_mut().zip([0.001, 0.001, 6.0, 6.0]) {
        fall.current = Some(current);
    }
    crowded.parts = (0..20).map(|k| format!("part {k} with a name that is far too long")).collect();
    crowded.title = "A choke with a very long title that goes on and on, ".repeat(3);
    for row in &mut crowded.rows {
        row.exceeded = vec![0.3; 20];
        row.flux_linkage_ends = None;
    }
    check_texts(&saturate_svg(&crowded));
    // A table of zeros still has axes.
    for row in &mut crowded.rows {
        (row.apparent, row.incremental) = (0.0, 0.0);
        row.exceeded = vec![0.0; 20];
    }
    check_texts(&saturate_svg(&crowded));
}

#[test]
fn the_screen_says_the_falls_first_and_keeps_eighty_columns() {
    let mut found = found();
    found.winding = "a winding with a name that is far too long for any table".to_string();
    let text = saturate_screen(&found, &Look::default());
    assert!(text.find("at 2.310 A").unwrap() < text.find("Against current").unwrap());
    assert!(
        text.contains("by   50 %  not up to 6.00 A") || text.contains("by  50 %  not up to"),
        "{text}"
    );
    for line in text.lines() {
        assert!(line.chars().count() <= 80, "{} columns: {line}", line.chars().count());
    }
}

#[test]
fn a_missed_interval_stands_before_the_numbers() {
    let mut found = found();
    found.reached = false;
    let text = saturate_screen(&found, &Look::default());
    assert!(text.find("Not reached").unwrap() < text.find("Against current").unwrap());
    let json: serde_json::Value = serde_json::from_str(&saturate_json(&found, None)).unwrap();
    assert!(json["notes"][0].as_str().unwrap().contains("was wanted"));
}
