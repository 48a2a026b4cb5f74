//! Where measurements are kept: `history/DATE-machine.json`, one file a day and machine, with the commit.

use serde_json::Value;
use std::path::{Path, PathBuf};
use std::process::Command;

/// Folder of the bench.
pub fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("validation/bench")
}

/// Output of a command, `unknown` when it cannot be run.
fn said(program: &str, arguments: &[&str]) -> String {
    let output = Command::new(program).args(arguments).output();
    let text = output.map(|o| String::from_utf8_lossy(&o.stdout).trim().to_string());
    text.ok().filter(|t| !t.is_empty()).unwrap_or_else(|| "unknown".to_string())
}

/// Processor as the system names it, and its number of cores.
pub fn machine() -> String {
    let info = std::fs::read_to_string("/proc/cpuinfo").unwrap_or_default();
    let line = info.lines().find(|l| l.starts_with("model name"));
    let name = line.and_then(|l| l.split(": ").nth(1)).unwrap_or("unknown processor");
    let n = std::thread::available_parallelism().map_or(1, usize::from);
    format!("{}, {n} cores", name.trim())
}

/// Compiler version, as `rustc --version` prints it.
pub fn compiler() -> String {
    said("rustc", &["--version"])
}

/// Date, commit, compiler, machine and its load: what a number means nothing without.
pub fn facts() -> Value {
    let load = std::fs::read_to_string("/proc/loadavg").unwrap_or_default();
    serde_json::json!({
        "date": said("date", &["-u", "+%Y-%m-%d"]),
        "commit": said("git", &["describe", "--always", "--dirty", "--abbrev=12"]),
        "compiler": compiler(),
        "package": format!("{} {}", env!("CARGO_PKG_NAME"), env!("CARGO_PKG_VERSION")),
        "machine": machine(),
        "load_before": load.split(' ').next().unwrap_or(""),
    })
}

/// Writes the measurement under today's date, `what` behind it; returns the path.
pub fn store(measured: &Value, what: &str) -> PathBuf {
    let text = |key: &str| measured["facts"][key].as_str().unwrap_or("unknown").to_string();
    let short: String = text("machine")
        .chars()
        .map(|c| if c.is_ascii_alphanumeric() { c.to_ascii_lowercase() } else { '-' })
        .collect();
    let words: Vec<&str> = short.split('-').filter(|w| !w.is_empty()).collect();
    let path =
        folder().join("history").join(format!("{}-{}{what}.json", text("date"), words.join("-")));
    let mut pretty = serde_json::to_string_pretty(measured).unwrap();
    pretty.push('\n');
    std::fs::create_dir_all(folder().join("history")).unwrap();
    std::fs::write(&path, pretty).unwrap();
    path
}
