//! The program as a user meets it: files, screen, exit codes.

use crate::sheets::satisfies;
use std::path::{Path, PathBuf};
use std::process::{Command, Output, Stdio};

const CHOKE: &str = include_str!("../../meshes/buoy_choke.toml");

/// A fresh directory with `text` as its `choke.toml`.
fn bench(text: &str) -> (tempfile::TempDir, PathBuf) {
    let directory = tempfile::tempdir().unwrap();
    let sheet = directory.path().join("choke.toml");
    std::fs::write(&sheet, text).unwrap();
    (directory, sheet)
}

fn gapwright(arguments: &[&str], sheet: &Path) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_gapwright"));
    command.arg(arguments[0]).arg(sheet).args(&arguments[1..]).env_remove("NO_COLOR");
    command
}

fn run(arguments: &[&str], sheet: &Path) -> Output {
    gapwright(arguments, sheet).output().unwrap()
}

fn names(directory: &Path) -> Vec<String> {
    let entries = std::fs::read_dir(directory).unwrap();
    let mut names: Vec<String> =
        entries.map(|e| e.unwrap().file_name().to_string_lossy().into_owned()).collect();
    names.sort();
    names
}

#[track_caller]
fn check_code(output: &Output, code: i32) {
    let [out, err] =
        [&output.stdout, &output.stderr].map(|b| String::from_utf8_lossy(b).into_owned());
    assert_eq!(output.status.code(), Some(code), "stdout:\n{out}\nstderr:\n{err}");
}

#[test]
fn solve_answers_on_the_screen_and_writes_every_file_beside_the_sheet() {
    let (directory, sheet) = bench(CHOKE);
    let output = run(&["solve"], &sheet);
    check_code(&output, 0);
    let screen = String::from_utf8(output.stdout).unwrap();
    assert!(screen.starts_with("Buoy charger choke\n  A_L "), "{screen}");
    assert!(screen.contains("surely between") && !screen.contains('\u{1b}'), "{screen}");
    assert!(output.stderr.is_empty());
    assert_eq!(names(directory.path()), ["choke.out", "choke.toml"]);
    assert_eq!(
        names(&directory.path().join("choke.out")),
        ["field.svg", "field.vtu", "result.json", "rounds.csv", "section.svg"]
    );
}

#[test]
fn json_is_the_only_thing_on_stdout_and_no_file_appears() {
    let (directory, sheet) = bench(CHOKE);
    let output = run(&["solve", "--json"], &sheet);
    check_code(&output, 0);
    let value: serde_json::Value = serde_json::from_slice(&output.stdout).unwrap();
    let schema = gapwright::report::json::result_schema();
    let validator = jsonschema::validator_for(&schema).unwrap();
    satisfies(&validator, "choke.toml", &value);
    assert!(value.get("timings").is_none());
    assert_eq!(names(directory.path()), ["choke.toml"]);
}

#[test]
fn no_arguments_show_the_help_and_end_with_2() {
    let output = Command::new(env!("CARGO_BIN_EXE_gapwright")).output().unwrap();
    check_code(&output, 2);
    let text = String::from_utf8_lossy(&output.stderr).into_owned();
    assert!(text.contains("Usage:") && text.contains("Exit codes:"), "{text}");
    let asked = Command::new(env!("CARGO_BIN_EXE_gapwright")).arg("--help").output().unwrap();
    check_code(&asked, 0);
    assert!(String::from_utf8_lossy(&asked.stdout).contains("Usage:"));
}

#[test]
fn a_wrong_argument_is_named_like_any_other_mistake() {
    let (_directory, sheet) = bench(CHOKE);
    for wrong in [["solve", "--intervall"], ["solve", "--interval=wide"], ["slove", "--json"]] {
        let output = run(&wrong, &sheet);
        check_code(&output, 2);
        let text = String::from_utf8_lossy(&output.stderr).into_owned();
        assert!(text.starts_with("gapwright: ") && !text.contains("error:"), "{text}");
    }
}

#[test]
fn quiet_prints_nothing_and_writes_the_files() {
    let (directory, sheet) = bench(CHOKE);
    let output = run(&["solve", "--quiet"], &sheet);
    check_code(&output, 0);
    assert!(output.stdout.is_empty() && output.stderr.is_empty());
    assert!(directory.path().join("choke.out/result.json").exists());
}

#[test]
fn equal_sheets_give_equal_bytes_for_any_number_of_threads() {
    let (directory, sheet) = bench(CHOKE);
    let (one, three) = (directory.path().join("one"), directory.path().join("three"));
    check_code(&run(&["solve", "--threads", "1", "--out", one.to_str().unwrap()], &sheet), 0);
    check_code(&run(&["solve", "--threads", "3", "--out", three.to_str().unwrap()], &sheet), 0);
    assert_eq!(names(&one), names(&three));
    for name in names(&one) {
        assert!(
            std::fs::read(one.join(&name)).unwrap() == std::fs::read(three.join(&name)).unwrap(),
            "{name} differs"
        );
    }
}

#[test]
fn stage_times_appear_only_on_request() {
    let (_directory, sheet) = bench(CHOKE);
    let output = run(&["solve", "--json", "--timings"], &sheet);
    let value: serde_json::Value = serde_json::from_slice(&output.stdout).unwrap();
    assert!(3 < value["timings"].as_array().unwrap().len());
    let screen = run(&["solve", "--timings"], &sheet);
    let screen = String::from_utf8(screen.stdout).unwrap();
    assert!(screen.contains("\nRounds\n") && screen.contains("\nStage times\n"), "{screen}");
}

#[test]
fn a_figure_outside_its_tolerance_ends_with_1() {
    let (_directory, sheet) =
        bench(&CHOKE.replace("inductance = \"0.70 mH\"", "inductance = \"0.90 mH\""));
    let output = run(&["solve"], &sheet);
    check_code(&output, 1);
    assert!(String::from_utf8_lossy(&output.stdout).contains("outside your ±3 %"));
}

#[test]
fn a_wrong_sheet_ends_with_2_and_writes_nothing() {
    for (from, to, wanted) in [
        ("permeability = 2000", "permeability = -1", "permeability"),
        ("[core]", "[cord]", "cord"),
        ("radii   = [6.6, 10.2]", "radii   = [2.0, 10.2]", "post"),
    ] {
        assert!(CHOKE.contains(from), "{from}");
        let (directory, sheet) = bench(&CHOKE.replace(from, to));
        for command in ["check", "solve"] {
            let output = run(&[command], &sheet);
            check_code(&output, 2);
            let message = String::from_utf8(output.stderr).unwrap();
            assert!(message.contains("choke.toml:") && message.contains(wanted), "{message}");
            assert!(output.stdout.is_empty());
            assert_eq!(names(directory.path()), ["choke.toml"]);
        }
    }
}

#[test]
fn files_that_cannot_be_a_sheet_end_with_2_and_a_reason() {
    let (directory, sheet) = bench("");
    check_code(&run(&["check"], &sheet), 2);
    let missing = run(&["check"], &directory.path().join("none.toml"));
    check_code(&missing, 2);
    assert!(
        String::from_utf8_lossy(&missing.stderr)
            .contains("none.toml could not be read: no such file")
    );
    check_code(&run(&["check"], directory.path()), 2);
    std::fs::write(&sheet, [0xff, 0xfe, 0x00, 0x41]).unwrap();
    check_code(&run(&["check"], &sheet), 2);
    // Sparse: two gigabytes that take no room, refused by their length.
    std::fs::File::create(&sheet).unwrap().set_len(2_000_000_000).unwrap();
    let large = run(&["check"], &sheet);
    check_code(&large, 2);
    let message = String::from_utf8_lossy(&large.stderr).into_owned();
    assert!(message.contains("the file has 2000") && message.contains("are read"), "{message}");
}

#[test]
fn an_interval_that_is_not_reached_ends_with_3_says_so_first_and_is_written() {
    let (directory, sheet) =
        bench(&CHOKE.replace("interval = \"0.1 %\"", "interval = \"0.01 %\"\nmax_unknowns = 1500"));
    let output = run(&["solve"], &sheet);
    check_code(&output, 3);
    let screen = String::from_utf8(output.stdout).unwrap();
    assert!(screen.lines().nth(1).unwrap().contains("Not reached"), "{screen}");
    let json = std::fs::read_to_string(directory.path().join("choke.out/result.json")).unwrap();
    assert!(json.contains("was wanted"));
}

#[test]
fn a_place_that_cannot_be_written_ends_with_4_and_stays_clean() {
    let (directory, sheet) = bench(CHOKE);
    let blocked = directory.path().join("choke.toml/deeper");
    let output = run(&["solve", "--out", blocked.to_str().unwrap()], &sheet);
    check_code(&output, 4);
    assert!(String::from_utf8_lossy(&output.stderr).contains("could not be written"));
    assert_eq!(names(directory.path()), ["choke.toml"]);
}

#[test]
fn options_that_make_no_sense_end_with_2() {
    let (_directory, sheet) = bench(CHOKE);
    for wrong in [
        &["solve", "--interval", "0"][..],
        &["solve", "--threads", "0"],
        &["solve", "--material", "x"],
        &["solve", "--material", "nothing=none.csv"],
    ] {
        check_code(&run(wrong, &sheet), 2);
    }
}

#[test]
fn another_table_changes_the_material_for_one_run() {
    let (directory, sheet) = bench(CHOKE);
    let table = directory.path().join("hot.csv");
    std::fs::write(&table, include_str!("../../meshes/ferrite_hot.csv")).unwrap();
    let argument = format!("soft_ferrite={}", table.display());
    let output = run(&["solve", "--json", "--interval", "1%", "--material", &argument], &sheet);
    let value: serde_json::Value = serde_json::from_slice(&output.stdout).unwrap();
    let inductance = value["inductance"]["value"].as_f64().unwrap();
    // The constant permeability gives 700.6 µH; a table that saturates lower gives another value.
    assert!((inductance / 700.6e-6 - 1.0).abs() > 1e-3, "{inductance}");
}

#[test]
fn a_reader_that_goes_away_is_no_fault() {
    let (_directory, sheet) = bench(CHOKE);
    let mut child = gapwright(&["solve", "--json"], &sheet)
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    drop(child.stdout.take());
    let output = child.wait_with_output().unwrap();
    check_code(&output, 0);
    assert!(output.stderr.is_empty());
}

#[test]
#[cfg(target_os = "linux")]
fn a_full_disk_behind_stdout_ends_with_4() {
    let (_directory, sheet) = bench(CHOKE);
    let full = std::fs::OpenOptions::new().write(true).open("/dev/full").unwrap();
    let output = gapwright(&["solve", "--json"], &sheet)
        .stdout(full)
        .stderr(Stdio::piped())
        .output()
        .unwrap();
    check_code(&output, 4);
}

#[test]
fn check_reads_the_sheet_back_and_draws_the_section() {
    let (directory, sheet) = bench(CHOKE);
    let output = run(&["check"], &sheet);
    check_code(&output, 0);
    assert!(String::from_utf8_lossy(&output.stdout).contains("42 turns at 1.80 A"));
    assert_eq!(names(&directory.path().join("choke.out")), ["section.svg"]);
    let json = run(&["check", "--json"], &sheet);
    let value: serde_json::Value = serde_json::from_slice(&json.stdout).unwrap();
    assert_eq!(value["windings"][0]["turns"], 42.0);
}

#[test]
fn the_vtk_library_reads_the_field_and_derives_the_same_flux_density() {
    let (directory, sheet) = bench(CHOKE);
    check_code(&run(&["solve", "--quiet"], &sheet), 0);
    let script = Path::new(env!("CARGO_MANIFEST_DIR")).join("validation/read_vtu.py");
    let file = directory.path().join("choke.out/field.vtu");
    let is_ci = std::env::var_os("CI").is_some_and(|v| v == "true");
    let Ok(output) = Command::new("python3").arg(script).arg(file).output() else {
        assert!(!is_ci, "python3 is not installed");
        eprintln!("skipped, not installed: python3");
        return;
    };
    if output.status.code() == Some(77) && !is_ci {
        eprintln!("{}", String::from_utf8_lossy(&output.stdout));
        return;
    }
    check_code(&output, 0);
}

const BIASED: &str = include_str!("../../meshes/saturating_choke.toml");

/// The saturating choke beside its two tables.
fn biased(text: &str) -> (tempfile::TempDir, PathBuf) {
    let (directory, sheet) = bench(text);
    for (name, table) in [
        ("ferrite_cold.csv", include_str!("../../meshes/ferrite_cold.csv")),
        ("ferrite_hot.csv", include_str!("../../meshes/ferrite_hot.csv")),
    ] {
        std::fs::write(directory.path().join(name), table).unwrap();
    }
    (directory, sheet)
}

/// Few rows of a wide interval: what is asked here is how a run ends.
const SHORT_TABLE: [&str; 6] = ["saturate", "--to", "3A", "--points", "5", "--interval=1%"];

fn json_of(output: &Output) -> serde_json::Value {
    serde_json::from_slice(&output.stdout).unwrap()
}

#[test]
fn saturate_writes_its_table_plot_and_json_and_shows_them() {
    let (directory, sheet) = biased(BIASED);
    let output = run(&SHORT_TABLE, &sheet);
    check_code(&output, 0);
    let screen = String::from_utf8(output.stdout).unwrap();
    assert!(screen.contains("has fallen") && screen.contains("kept by"), "{screen}");
    assert!(output.stderr.is_empty());
    let out = directory.path().join("choke.out");
    assert_eq!(names(&out), ["saturate.csv", "saturate.json", "saturate.svg"]);

    let quiet = run(&[&SHORT_TABLE[..], &["--quiet"]].concat(), &sheet);
    check_code(&quiet, 0);
    assert!(quiet.stdout.is_empty() && quiet.stderr.is_empty());

    let timed = run(&[&SHORT_TABLE[..], &["--timings"]].concat(), &sheet);
    assert!(String::from_utf8_lossy(&timed.stdout).contains("\nStage times\n"));
    let timed = run(&[&SHORT_TABLE[..], &["--timings", "--json"]].concat(), &sheet);
    assert!(1 < json_of(&timed)["timings"].as_array().unwrap().len());

    let json =
        run(&[&SHORT_TABLE[..], &["--json", "--out", out.to_str().unwrap()]].concat(), &sheet);
    assert!(json.stdout == std::fs::read(out.join("saturate.json")).unwrap());
    assert_eq!(json_of(&json)["rows"].as_array().unwrap().len(), 5);
}

#[test]
fn a_broken_promise_ends_with_1_in_solve_and_saturate() {
    let (directory, sheet) = biased(BIASED);
    let hot = format!("--material=charger_ferrite={}/ferrite_hot.csv", directory.path().display());
    for command in [&["solve", "--interval=1%"][..], &SHORT_TABLE] {
        let cold = run(&[command, &["--json"]].concat(), &sheet);
        check_code(&cold, 0);
        assert_eq!(json_of(&cold)["require"][0]["met"], true);
        let warm = run(&[command, &["--json", &hot]].concat(), &sheet);
        check_code(&warm, 1);
        assert_eq!(json_of(&warm)["require"][0]["met"], false);
        let screen = run(&[command, &[&hot]].concat(), &sheet);
        check_code(&screen, 1);
        assert!(String::from_utf8_lossy(&screen.stdout).contains("broken by"));
    }
}

#[test]
fn saturate_ends_with_2_3_and_4_like_solve() {
    let (directory, sheet) = biased(BIASED);
    let without_end = run(&["saturate"], &sheet);
    check_code(&without_end, 2);
    assert!(String::from_utf8_lossy(&without_end.stderr).contains("--to"));
    for wrong in [["--to", "0"], ["--to", "6 mm"], ["--points", "2"]] {
        check_code(&run(&["saturate", "--to=3A", wrong[0], wrong[1]], &sheet), 2);
    }

    let blocked = directory.path().join("choke.toml/deeper");
    let unwritten =
        run(&[&SHORT_TABLE[..], &["--out", blocked.to_str().unwrap()]].concat(), &sheet);
    check_code(&unwritten, 4);

    let narrow =
        BIASED.replace("interval = \"0.01 %\"", "interval = \"0.001 %\"\nmax_unknowns = 1500");
    assert_ne!(narrow, BIASED);
    let (directory, sheet) = biased(&narrow);
    let missed = run(&["saturate", "--to", "3A", "--points", "5"], &sheet);
    check_code(&missed, 3);
    let screen = String::from_utf8(missed.stdout).unwrap();
    assert!(screen.lines().nth(1).unwrap().contains("Not reached"), "{screen}");
    let json = std::fs::read_to_string(directory.path().join("choke.out/saturate.json")).unwrap();
    assert!(json.contains("was wanted"));
}

#[test]
fn the_interval_of_the_command_line_replaces_the_sheets() {
    let (_directory, sheet) = bench(CHOKE);
    let mut unknowns = Vec::new();
    for (argument, wanted) in [("--interval=1%", 1e-2), ("--interval=0.01 %", 1e-4)] {
        let value = json_of(&run(&["solve", "--json", argument], &sheet));
        let [best, low, high] =
            ["value", "low", "high"].map(|key| value["inductance"][key].as_f64().unwrap());
        assert!(low < best && best < high && (high - low) / best <= wanted, "{argument}");
        unknowns.push(value["unknowns"].as_u64().unwrap());
    }
    assert!(2 * unknowns[0] < unknowns[1], "{unknowns:?}");
}
