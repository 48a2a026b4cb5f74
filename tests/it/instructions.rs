//! Instruction counts of whole runs keep their band: a time guard that a busy machine cannot disturb.
//!
//! Slow (`RUN_SLOW_TESTS=1`), needs valgrind. `UPDATE_EXPECT=1` stores new counts in `validation/bench/instructions.json`.

#![allow(clippy::print_stdout)]

use crate::cases::is_slow;
use serde_json::{Value, json};
use std::path::{Path, PathBuf};
use std::process::Command;

/// Relative change that counts as one: waiting threads spin a little more or less, and that moves a count by 1–2 %.
const BAND: f64 = 0.10;

/// Sheet and interval of the runs.
const RUNS: [(&str, &str, &str); 3] = [
    ("R1 0.1 %", "buoy_choke", "0.1%"),
    ("R1 0.01 %", "buoy_choke", "0.01%"),
    ("R8 0.1 %", "rod_coil", "0.1%"),
];

fn is_set(name: &str) -> bool {
    std::env::var_os(name).is_some()
}

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

fn store() -> PathBuf {
    root().join("validation/bench/instructions.json")
}

/// First line that a command prints; `None` when it cannot be run.
fn first_line(program: &str) -> Option<String> {
    let output = Command::new(program).arg("--version").output().ok()?;
    Some(String::from_utf8_lossy(&output.stdout).lines().next()?.to_string())
}

/// Profile of the binary under test: counts of another profile are no measure.
fn profile() -> &'static str {
    if cfg!(debug_assertions) { "dev" } else { "release" }
}

/// Instructions of one run on one thread, no file written.
fn count(sheet: &str, interval: &str) -> u64 {
    let output = Command::new("valgrind")
        .args(["--tool=callgrind", "--callgrind-out-file=/dev/null"])
        .arg(env!("CARGO_BIN_EXE_gapwright"))
        .arg("solve")
        .arg(root().join("meshes").join(format!("{sheet}.toml")))
        .args(["--json", "--threads", "1", "--interval", interval])
        .output()
        .unwrap();
    let said = String::from_utf8_lossy(&output.stderr).into_owned();
    let line =
        said.lines().find_map(|l| l.split_once("Collected : ")).unwrap_or_else(|| panic!("{said}"));
    line.1.trim().parse().unwrap()
}

#[test]
fn instruction_counts_keep_their_band() {
    if !is_slow() {
        println!("skipped, RUN_SLOW_TESTS is not set");
        return;
    }
    if first_line("valgrind").is_none() {
        assert!(
            !is_set("CI"),
            "valgrind is not installed, and CI must count: apt-get install valgrind"
        );
        println!("skipped, not installed: valgrind");
        return;
    }
    let compiler = first_line("rustc").unwrap();
    let mut stored: Value = std::fs::read_to_string(store())
        .map_or(json!({}), |text| serde_json::from_str(&text).unwrap());
    if is_set("UPDATE_EXPECT") {
        let counts: Vec<(String, Value)> = RUNS
            .iter()
            .map(|(name, sheet, interval)| (name.to_string(), json!(count(sheet, interval))))
            .collect();
        stored[profile()] = json!({ "compiler": compiler, "counts": counts.into_iter().collect::<serde_json::Map<_, _>>() });
        std::fs::write(store(), serde_json::to_string_pretty(&stored).unwrap() + "\n").unwrap();
        return;
    }
    let measured = &stored[profile()];
    if measured["compiler"] != json!(compiler) {
        let advice = format!(
            "counts are of {}, this is {compiler}: store new ones with UPDATE_EXPECT=1",
            measured["compiler"]
        );
        assert!(!is_set("CI"), "{advice}");
        println!("skipped, {advice}");
        return;
    }
    for (name, sheet, interval) in RUNS {
        let (now, before) =
            (count(sheet, interval) as f64, measured["counts"][name].as_f64().unwrap());
        println!("{name}: {now:.0} instructions, {before:.0} stored");
        assert!(
            (now / before - 1.0).abs() <= BAND,
            "{name}: {now:.4e} instructions, {before:.4e} were stored"
        );
    }
}
