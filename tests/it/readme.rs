//! The README shows what the program really prints, and its sheet is the one in `meshes/`.

use std::path::Path;
use std::process::Command;

/// The screen without what differs from run to run: the seconds and the folder.
fn steady(text: &str) -> String {
    let line = |line: &str| match line {
        line if line.contains("unknowns, ") => {
            line.split(", ").take(2).collect::<Vec<_>>().join(", ")
        }
        line if line.starts_with("Files are in") => "Files are in …".to_string(),
        line => line.trim_end().to_string(),
    };
    text.trim_end().lines().map(line).collect::<Vec<_>>().join("\n")
}

#[test]
fn the_readme_shows_the_screen_of_its_first_command() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let readme = std::fs::read_to_string(root.join("README.md")).unwrap();
    let shown = readme.split("```text\n").nth(1).unwrap().split("```").next().unwrap();
    let out = tempfile::tempdir().unwrap();
    let run = Command::new(env!("CARGO_BIN_EXE_gapwright"))
        .args(["solve", "meshes/buoy_choke.toml", "--out"])
        .arg(out.path().join("out"))
        .current_dir(root)
        .output()
        .unwrap();
    assert_eq!(run.status.code(), Some(0));
    assert_eq!(steady(shown), steady(&String::from_utf8(run.stdout).unwrap()));
    let picture = std::fs::read_to_string(out.path().join("out/field.svg")).unwrap();
    assert_eq!(picture, std::fs::read_to_string(root.join("meshes/buoy_choke.svg")).unwrap());
}
