//! The direction table: which stage may use which. Arrows that are not listed fail here.

use crate::tidy::{read, sources};

/// Folder in `src`, and the folders that it may use; everything may use `units`.
const MAY_USE: [(&str, &[&str]); 13] = [
    ("units", &[]),
    ("sparse", &[]),
    ("model", &[]),
    ("input", &["model"]),
    ("geometry", &["model"]),
    ("mesh", &["geometry", "model"]),
    ("fem", &["mesh", "geometry", "model", "sparse"]),
    ("solve", &["fem", "mesh", "geometry", "model", "sparse"]),
    ("bound", &["solve", "fem", "mesh", "geometry", "model"]),
    ("adapt", &["bound", "solve", "fem", "mesh", "geometry", "model", "sparse"]),
    ("results", &["adapt", "bound", "solve", "fem", "mesh", "geometry", "model", "sparse"]),
    (
        "study",
        &["results", "adapt", "bound", "solve", "fem", "mesh", "geometry", "model", "sparse"],
    ),
    (
        "report",
        &[
            "study", "results", "adapt", "bound", "solve", "fem", "mesh", "geometry", "model",
            "sparse",
        ],
    ),
];

/// Folders that text uses through `crate::` paths, outside comments.
fn used(text: &str) -> Vec<(usize, String)> {
    let mut found = vec![];
    for (i, line) in text.lines().enumerate() {
        let code = line.split("//").next().unwrap_or_default();
        for piece in code.split("crate::").skip(1) {
            // `use crate::{mesh, model::Point}` names its folders inside the braces.
            let names: Vec<&str> = match piece.strip_prefix('{') {
                Some(list) => list.split('}').next().unwrap_or_default().split(',').collect(),
                None => vec![piece],
            };
            for name in names {
                let word: String = name
                    .trim()
                    .chars()
                    .take_while(|c| c.is_ascii_alphanumeric() || *c == '_')
                    .collect();
                if !word.is_empty() {
                    found.push((i + 1, word));
                }
            }
        }
    }
    found
}

/// Arrows of one file that the table does not have.
fn wrong_arrows(name: &str, text: &str) -> Vec<String> {
    let Some((folder, _)) = name.strip_prefix("src/").and_then(|rest| rest.split_once('/')) else {
        return vec![];
    };
    let row = MAY_USE.iter().find(|(from, _)| *from == folder);
    let Some((_, allowed)) = row else {
        return if folder == "cli" {
            vec![]
        } else {
            vec![format!("{name}: the folder {folder} is not in the table")]
        };
    };
    used(text)
        .into_iter()
        .filter(|(_, to)| to != folder && to != "units" && !allowed.contains(&to.as_str()))
        .map(|(line, to)| format!("{name}:{line}: {folder} may not use {to}"))
        .collect()
}

#[test]
fn no_stage_uses_a_later_one() {
    let mut found = vec![];
    for path in sources(&["src"]) {
        let (name, text) = read(&path);
        found.extend(wrong_arrows(&name, &text));
    }
    assert!(found.is_empty(), "\n{}", found.join("\n"));
}

#[test]
fn a_wrong_arrow_is_found_wherever_it_is_written() {
    for text in [
        "use crate::report::json;",
        "let x = crate::report::f();",
        "use crate::{units, report::json};",
    ] {
        assert_eq!(
            wrong_arrows("src/mesh/mod.rs", text),
            ["src/mesh/mod.rs:1: mesh may not use report"]
        );
    }
    assert!(
        wrong_arrows("src/mesh/mod.rs", "// see crate::report\nuse crate::model::Point;")
            .is_empty()
    );
    assert_eq!(wrong_arrows("src/extra/mod.rs", "").len(), 1);
}

/// Words that only `cli` and `main` may contain: files, clock, environment, terminal.
const SYSTEM: [&str; 9] = [
    "std::fs",
    "std::env",
    "std::io::std",
    "std::time",
    "std::process",
    "println!",
    "eprintln!",
    "Instant::now",
    "SystemTime",
];

#[test]
fn only_the_command_line_touches_the_system() {
    let mut found = vec![];
    for path in sources(&["src"]) {
        let (name, text) = read(&path);
        if name.starts_with("src/cli/") || name == "src/main.rs" || name.ends_with("tests.rs") {
            continue;
        }
        let code = text.split("#[cfg(test)]\nmod tests {").next().unwrap_or_default();
        for (i, line) in code.lines().enumerate() {
            let line = line.split("//").next().unwrap_or_default();
            for word in SYSTEM.iter().filter(|word| line.contains(**word)) {
                found.push(format!("{name}:{}: `{word}` belongs into src/cli", i + 1));
            }
        }
    }
    assert!(found.is_empty(), "\n{}", found.join("\n"));
}
