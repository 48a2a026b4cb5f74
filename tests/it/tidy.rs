//! The house rules that a reader would otherwise have to repeat: documented, short files and functions.

use std::path::{Path, PathBuf};

/// Longest file and function [lines].
const N_FILE_LINES_MAX: usize = 500;
const N_FUNCTION_LINES_MAX: usize = 70;

/// Every `.rs` file below the given folders of the project, sorted.
pub fn sources(folders: &[&str]) -> Vec<PathBuf> {
    let mut files = vec![];
    let mut waiting: Vec<PathBuf> = folders
        .iter()
        .map(|f| Path::new(env!("CARGO_MANIFEST_DIR")).join(f))
        .filter(|p| p.is_dir())
        .collect();
    while let Some(folder) = waiting.pop() {
        for entry in std::fs::read_dir(&folder).unwrap() {
            let path = entry.unwrap().path();
            if path.is_dir() {
                waiting.push(path);
            } else if path.extension().is_some_and(|e| e == "rs") {
                files.push(path);
            }
        }
    }
    files.sort();
    assert!(!files.is_empty(), "no source found below {folders:?}");
    files
}

/// The file's name below the project's root, and its text.
pub fn read(path: &Path) -> (String, String) {
    let name = path.strip_prefix(env!("CARGO_MANIFEST_DIR")).unwrap_or(path);
    (name.to_string_lossy().replace('\\', "/"), std::fs::read_to_string(path).unwrap())
}

/// What is untidy in one file, one sentence each.
fn untidy(name: &str, text: &str) -> Vec<String> {
    let lines: Vec<&str> = text.lines().collect();
    let mut found = vec![];
    if !lines.first().is_some_and(|line| line.starts_with("//!")) {
        found.push(format!("{name}: the first line is not a `//!` that says what the file does"));
    }
    // Snapshots of the integration tests are long texts by nature.
    let is_measured = !name.starts_with("tests/");
    if is_measured && N_FILE_LINES_MAX < lines.len() {
        found.push(format!("{name}: {} lines, at most {N_FILE_LINES_MAX}", lines.len()));
    }
    for (i, line) in lines.iter().enumerate() {
        if is_public_item(line) && !is_documented(&lines[..i]) {
            found.push(format!("{name}:{}: no `///` above `{}`", i + 1, line.trim()));
        }
        if let Some(n_lines) = function_length(&lines[i..])
            && is_measured
            && N_FUNCTION_LINES_MAX < n_lines
        {
            found.push(format!(
                "{name}:{}: a function of {n_lines} lines, at most {N_FUNCTION_LINES_MAX}",
                i + 1
            ));
        }
    }
    found
}

fn is_public_item(line: &str) -> bool {
    let line = line.trim_start();
    ["pub fn ", "pub const fn ", "pub struct ", "pub enum "]
        .iter()
        .any(|start| line.starts_with(start))
}

/// True when a doc comment stands above, with nothing but attributes between.
fn is_documented(above: &[&str]) -> bool {
    let mut inside_attribute = false;
    for line in above.iter().rev().map(|l| l.trim()) {
        // An attribute over several lines ends in `)]` or `]` and begins with `#[`.
        if line.starts_with("#[") {
            inside_attribute = false;
        } else if line.ends_with(")]") || line == "]" {
            inside_attribute = true;
        } else if !inside_attribute {
            return line.starts_with("///");
        }
    }
    false
}

/// Lines of the function that begins on the first line, from `fn` to the brace that closes it at the same indent.
fn function_length(lines: &[&str]) -> Option<usize> {
    let first = lines[0];
    let body = first.trim_start();
    let is_function = body.starts_with("fn ") || (body.starts_with("pub") && body.contains(" fn "));
    if !is_function || body.ends_with(';') || body.ends_with('}') {
        return None;
    }
    let close = format!("{}}}", &first[..first.len() - body.len()]);
    lines.iter().position(|line| *line == close).map(|end| end + 1)
}

#[test]
fn every_file_and_public_item_is_documented_and_short() {
    let mut found = vec![];
    for path in sources(&["src", "tests", "validation"]) {
        let (name, text) = read(&path);
        found.extend(untidy(&name, &text));
    }
    assert!(found.is_empty(), "\n{}", found.join("\n"));
}

#[test]
fn untidy_text_is_found() {
    let long =
        format!("//! A file.\n\n/// Long.\npub fn long() {{\n{}}}\n", "    work();\n".repeat(80));
    assert_eq!(untidy("a.rs", &long), ["a.rs:4: a function of 82 lines, at most 70"]);
    let bare = "use x;\n\n#[derive(Debug)]\npub struct Bare;\n";
    assert_eq!(untidy("a.rs", bare).len(), 2);
    let attribute = "//! A file.\n\n/// Has a word.\n#[error(\n    \"text\"\n)]\n#[derive(Debug)]\npub struct Well;\n";
    assert!(untidy("a.rs", attribute).is_empty());
    assert_eq!(untidy("a.rs", &format!("//! A file.\n{}", "//\n".repeat(500))).len(), 1);
}
