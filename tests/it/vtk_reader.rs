//! `field.vtu` read by the vtk library of PyPI: the flux linkages in `result.json` follow from the file's nodes.

use crate::cases::R5;
use std::path::Path;
use std::process::Command;

/// The interpreter: `PYTHON` if set, else `python3`.
fn python() -> String {
    std::env::var("PYTHON").unwrap_or_else(|_| "python3".to_string())
}

/// True when the vtk library is there; on a CI machine (`CI=true`) its absence is a failure.
fn has_vtk() -> bool {
    let found = Command::new(python()).args(["-c", "import vtk"]).output();
    let found = found.is_ok_and(|output| output.status.success());
    let is_ci = std::env::var("CI").is_ok_and(|v| v == "true");
    assert!(found || !is_ci, "the vtk library is not installed: pip install vtk");
    if !found {
        println!(
            "skipped, not installed: vtk (pip install vtk, or PYTHON=interpreter that has it)"
        );
    }
    found
}

/// Solves a sheet and has the script read its files: for each winding the linkage by the file, and `result.json`'s.
fn windings(sheet: &str, interval: &str) -> Option<Vec<serde_json::Value>> {
    if !has_vtk() {
        return None;
    }
    let base = tempfile::tempdir().unwrap();
    let (path, out) = (base.path().join("case.toml"), base.path().join("case.out"));
    std::fs::write(&path, sheet).unwrap();
    let solve = Command::new(env!("CARGO_BIN_EXE_gapwright"))
        .args(["solve", "--quiet", "--interval", interval])
        .arg(&path)
        .output()
        .unwrap();
    assert!(
        matches!(solve.status.code(), Some(0 | 1)),
        "{}",
        String::from_utf8_lossy(&solve.stderr)
    );
    let script = Path::new(env!("CARGO_MANIFEST_DIR")).join("validation/linkage_from_vtu.py");
    let read = Command::new(python()).arg(script).arg(&path).arg(&out).output().unwrap();
    assert!(read.status.success(), "{}", String::from_utf8_lossy(&read.stderr));
    Some(serde_json::from_slice(&read.stdout).unwrap())
}

#[test]
fn linkages_of_two_windings_follow_from_the_files_nodes() {
    // With two currents result.json's linkages are those of ψ_h itself, so the file must give the same numbers.
    let sheet = R5.sheet.replacen("radii = [8.2, 13.4]", "radii = [8.2, 10.4]", 1)
        + r#"
[[windings]]
name = "second"
current = "-0.5 A"
sections = [
  { turns = 15, radii = [11.0, 13.4], heights = [-7.2, 1] },
  { turns = 6, radii = [11.0, 13.0], heights = [1.5, 7] },
]
"#;
    let Some(windings) = windings(&sheet, "1e-3") else { return };
    assert_eq!(windings.len(), 2);
    for winding in windings {
        let (by_file, value) =
            (winding["by_file"].as_f64().unwrap(), winding["value"].as_f64().unwrap());
        println!(
            "{}: {by_file:e} by the file, {value:e}, {:+.1e}",
            winding["name"],
            by_file / value - 1.0
        );
        assert!((by_file / value - 1.0).abs() <= 1e-11);
    }
}

#[test]
fn the_linkage_of_one_winding_is_the_low_end() {
    // λ(ψ_h) = b·x/I, the low end 2(b·x − ½ x·Ax)/I less the margin of 1e-9. They differ by x·(b − Ax)/I, of first order
    // in what the solver left: at an interval of 1e-6 at most √(3e-5 · 1e-6) ≈ 5e-6 of λ in the worst direction, 1e-6 or
    // less in practice, because conjugate gradients leave a rest that is nearly orthogonal to x.
    let Some(windings) = windings(R5.sheet, "1e-6") else { return };
    let [by_file, low, high] =
        ["by_file", "low", "high"].map(|key| windings[0][key].as_f64().unwrap());
    println!("{:+.1e} of the low end, interval {:.1e}", by_file / low - 1.0, high / low - 1.0);
    assert!((by_file / low - 1.0).abs() <= 1e-6);
    let value = windings[0]["value"].as_f64().unwrap();
    assert!((by_file / value - 1.0).abs() <= 2e-6);
}
