//! The command `solve`: the main job, from the sheet to files and screen.

use super::clock::Clock;
use super::files::Finished;
use super::options::{Options, SolveOptions};
use super::{End, Stop, files, screen, sheet};
use gapwright::adapt::{self, AdaptError, Event, Outcome, Stage};
use gapwright::geometry::Outline;
use gapwright::mesh::MeshError;
use gapwright::model::Model;
use gapwright::report::csv;
use gapwright::report::field_map::{FieldMap, field_svg};
use gapwright::report::json::result_json;
use gapwright::report::section::section_svg;
use gapwright::report::terminal::{Look, solve_screen};
use gapwright::report::vtk::field_vtu;
use gapwright::results::sample::Sampler;
use gapwright::results::{self, Results};
use gapwright::solve::SolveError;
use std::time::Instant;

/// Runs `solve`.
pub fn solve(options: &SolveOptions) -> Result<End, Stop> {
    let SolveOptions { common: options, mirror } = options;
    let start = Instant::now();
    let mut clock = Clock::start();
    let (sheet, outline) = sheet::read(options)?;
    clock.lap("sheet and section");
    let mut outcome = run(&sheet.model, &outline, options, &mut clock)?;
    let mut results = results::collect(&sheet.model, &outline, &outcome);
    at_other_currents(&sheet.model, &outline, &mut outcome, &mut results)
        .map_err(|error| Stop::new(End::NotReached, format!("no result: {error}")))?;
    clock.lap("results");
    let seconds = start.elapsed().as_secs_f64();

    let writes_files = !options.json || options.out.is_some();
    let out = files::directory(&options.sheet, options.out.as_deref());
    if writes_files {
        let mut finished = drawings(&sheet.model, &outline, &outcome, &results, *mirror)?;
        clock.lap("drawings and tables");
        finished.push((
            "result.json",
            result_json(&results, clock.asked(options).as_ref()).into_bytes(),
        ));
        files::write_all(&out, &finished)?;
        clock.lap("writing");
    }
    let times = clock.asked(options);
    let json = || result_json(&results, times.as_ref());
    let look = Look { colour: screen::has_colour(), seconds: Some(seconds), times: times.as_ref() };
    screen::answer(options, &out, json, || solve_screen(&results, &look))?;
    Ok(end_of(&results))
}

/// The rounds, with progress; a failure without any field is a stop.
fn run(
    model: &Model,
    outline: &Outline,
    options: &Options,
    clock: &mut Clock,
) -> Result<Outcome, Stop> {
    let mut progress = screen::Progress::new(options.quiet || options.json);
    let outcome = adapt::run(model, outline, &mut |event| match event {
        Event::Finished(stage) => clock.lap(stage_name(stage)),
        Event::Round(round) => progress.round(round.n_unknowns, round.low, round.high),
    });
    outcome.map_err(|error| {
        let end = match error {
            AdaptError::Mesh(MeshError::TooFine { .. }) => End::InputWrong,
            _ => End::NotReached,
        };
        Stop::new(end, format!("no result: {error}"))
    })
}

/// The promises and the ripple: both need the field at other currents than the sheet's.
fn at_other_currents(
    model: &Model,
    outline: &Outline,
    outcome: &mut Outcome,
    found: &mut Results,
) -> Result<(), SolveError> {
    let (verdicts, notes) = results::check_requirements(model, outline, outcome)?;
    found.requirements = verdicts;
    found.notes.extend(notes);
    found.ripple = results::ripple(model, outline, outcome)?;
    Ok(())
}

/// Everything but `result.json`.
fn drawings(
    model: &Model,
    outline: &Outline,
    outcome: &Outcome,
    results: &Results,
    mirror: bool,
) -> Result<Vec<Finished>, Stop> {
    let cells = Sampler::new(outline, outcome).cell_values();
    let map = FieldMap {
        title: &results.title,
        mesh: &outcome.mesh,
        outline,
        solution: &outcome.solution,
        b_corner: &cells.b_corner,
        hot_spots: &results.hot_spots,
        mirror,
    };
    let vtu = field_vtu(&outcome.mesh, &outcome.solution, &cells, &outcome.bound.shares)
        .map_err(|e| Stop::new(End::NotWritten, format!("field.vtu: {e}")))?;
    let quantity = if results.is_linear && results.inductance.is_some() {
        "inductance [H]"
    } else {
        "coenergy [J]"
    };
    let mut finished = vec![
        ("section.svg", section_svg(model, outline).into_bytes()),
        ("field.svg", field_svg(&map).into_bytes()),
        ("field.vtu", vtu),
        ("rounds.csv", csv::rounds(&results.rounds, quantity).into_bytes()),
    ];
    if !results.probes.is_empty() {
        finished.push(("probes.csv", csv::probes(&results.probes).into_bytes()));
    }
    Ok(finished)
}

/// A stage of the rounds as the table of times names it.
fn stage_name(stage: Stage) -> &'static str {
    match stage {
        Stage::FirstMesh => "first mesh",
        Stage::Elements => "element matrices",
        Stage::Solve => "assembly and solve",
        Stage::Bound => "bound",
        Stage::Refine => "marking and bisection",
    }
}

/// How the run ends: a missed interval weighs more than a missed promise, whose verdict it makes doubtful.
fn end_of(results: &Results) -> End {
    let is_met = results.verdict.as_ref().is_none_or(|v| v.within_tolerance)
        && results.requirements.iter().all(|r| r.met);
    match (results.reached, is_met) {
        (false, _) => End::NotReached,
        (true, false) => End::NotMet,
        (true, true) => End::Done,
    }
}
