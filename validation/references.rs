//! The outside values: `references/published.json` (formulas and tables with their sources, recomputed to more digits)
//! and `references/field_cases.json` (field problems computed by an independent high-order program).

use serde_json::Value;

/// µ0 that the SI values of `published.json` were computed with [H/m].
pub const MU0_OF_CHECKS: f64 = 4.0e-7 * std::f64::consts::PI;

/// One published value with its inputs and its source.
#[derive(Debug, Clone)]
pub struct Published {
    pub id: String,
    pub source: String,
    pub status: String,
    inputs: Value,
    value: Value,
}

impl Published {
    /// An input by name; infinity is written "inf".
    #[track_caller]
    pub fn input(&self, name: &str) -> f64 {
        number(&self.inputs[name]).unwrap_or_else(|| panic!("{}: no input {name}", self.id))
    }

    /// A list of numbers among the inputs.
    #[track_caller]
    pub fn input_list(&self, name: &str) -> Vec<f64> {
        let list =
            self.inputs[name].as_array().unwrap_or_else(|| panic!("{}: no list {name}", self.id));
        list.iter().filter_map(number).collect()
    }

    /// A list of numbers among the values.
    #[track_caller]
    pub fn value_list(&self, name: &str) -> Vec<f64> {
        let list =
            self.value[name].as_array().unwrap_or_else(|| panic!("{}: no list {name}", self.id));
        list.iter().filter_map(number).collect()
    }

    /// Source and how sure it is.
    pub fn cited(&self) -> String {
        format!("{} ({})", self.source, self.status)
    }

    /// The value, or the part `name` of it ("" where it is a single number).
    #[track_caller]
    pub fn value(&self, name: &str) -> f64 {
        let value = if name.is_empty() { &self.value } else { &self.value[name] };
        number(value).unwrap_or_else(|| panic!("{}: no value {name:?}", self.id))
    }

    /// Fails when `ours` is further than `tolerance` (relative; absolute for a reference of 0) from the value `name`.
    #[track_caller]
    pub fn agrees(&self, name: &str, ours: f64, tolerance: f64) {
        let reference = self.value(name);
        let scale = if reference == 0.0 { 1.0 } else { reference.abs() };
        let deviation = (ours - reference).abs() / scale;
        assert!(
            deviation <= tolerance,
            "{} {name}: {ours:.15e} against {reference:.15e}, {deviation:.1e}",
            self.id
        );
    }
}

/// Every published row whose id starts with `prefix`, in the file's order.
pub fn published(prefix: &str) -> Vec<Published> {
    let rows: Vec<Value> = serde_json::from_str(include_str!("references/published.json")).unwrap();
    let text = |row: &Value, key: &str| row[key].as_str().unwrap_or_default().to_owned();
    rows.iter()
        .map(|row| Published {
            id: text(row, "id"),
            source: text(row, "source"),
            status: text(row, "status"),
            inputs: row["inputs"].clone(),
            value: row["value"].clone(),
        })
        .filter(|row| row.id.starts_with(prefix))
        .collect()
}

/// All rows whose id starts with `prefix`, which must be so many.
#[track_caller]
pub fn all_published(prefix: &str, n_rows: usize) -> Vec<Published> {
    let rows = published(prefix);
    assert_eq!(rows.len(), n_rows, "{prefix}");
    rows
}

/// A number, or text that reads as one ("inf", "10.0").
fn number(value: &Value) -> Option<f64> {
    value.as_f64().or_else(|| value.as_str().and_then(|text| text.parse().ok()))
}

/// The field problems R1 … R10 with their computed values (lengths there in millimetres).
pub fn field_cases() -> Value {
    serde_json::from_str(include_str!("references/field_cases.json")).unwrap()
}
