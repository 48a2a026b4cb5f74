//! The command `saturate`: inductance against current, from the sheet to files and screen.

use super::clock::Clock;
use super::options::SaturateOptions;
use super::{End, Stop, files, screen, sheet};
use gapwright::adapt::AdaptError;
use gapwright::mesh::MeshError;
use gapwright::report::saturate::{saturate_csv, saturate_json, saturate_screen, saturate_svg};
use gapwright::report::terminal::Look;
use gapwright::study::StudyError;
use gapwright::study::saturate::{self as study, Saturation, Wish};
use std::time::Instant;

/// Runs `saturate`.
pub fn saturate(options: &SaturateOptions) -> Result<End, Stop> {
    let start = Instant::now();
    let mut clock = Clock::start();
    let common = &options.common;
    let (sheet, outline) = sheet::read(common)?;
    clock.lap("sheet and section");
    let wish = Wish { to: options.to, n_points: usize::from(options.points) };
    let mut progress = screen::Progress::new(common.quiet || common.json);
    let found = study::saturate(&sheet.model, &outline, &wish, &mut |done, wanted| {
        progress.point(done, wanted);
    });
    drop(progress);
    let found = found.map_err(stop)?;
    clock.lap("solves of the table");
    let seconds = start.elapsed().as_secs_f64();

    let out = files::directory(&common.sheet, common.out.as_deref());
    if !common.json || common.out.is_some() {
        let drawn = [
            ("saturate.csv", saturate_csv(&found).into_bytes()),
            ("saturate.svg", saturate_svg(&found).into_bytes()),
        ];
        clock.lap("drawings and tables");
        let json = saturate_json(&found, clock.asked(common).as_ref()).into_bytes();
        let finished: Vec<_> = drawn.into_iter().chain([("saturate.json", json)]).collect();
        files::write_all(&out, &finished)?;
        clock.lap("writing");
    }
    let times = clock.asked(common);
    let json = || saturate_json(&found, times.as_ref());
    let look = Look { colour: screen::has_colour(), seconds: Some(seconds), times: times.as_ref() };
    screen::answer(common, &out, json, || saturate_screen(&found, &look))?;
    Ok(end_of(&found))
}

fn stop(error: StudyError) -> Stop {
    let end = match error {
        StudyError::NoCurrent | StudyError::Adapt(AdaptError::Mesh(MeshError::TooFine { .. })) => {
            End::InputWrong
        }
        _ => End::NotReached,
    };
    Stop::new(end, format!("no table: {error}"))
}

fn end_of(found: &Saturation) -> End {
    match (found.reached, found.requirements.iter().all(|r| r.met)) {
        (false, _) => End::NotReached,
        (true, false) => End::NotMet,
        (true, true) => End::Done,
    }
}
