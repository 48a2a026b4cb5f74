//! Text → stdout and stderr, progress on a terminal.

use super::options::Options;
use super::{End, Stop, files};
use gapwright::report::terminal::progress_line;
use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};
use std::io::{self, ErrorKind, IsTerminal, Write};
use std::path::Path;

/// Prints to stdout. A reader that has closed the pipe has seen enough: that is no error.
pub fn print(text: &str) -> Result<(), Stop> {
    let mut stdout = io::stdout().lock();
    match stdout.write_all(text.as_bytes()).and_then(|()| stdout.flush()) {
        Err(error) if error.kind() != ErrorKind::BrokenPipe => Err(Stop::new(
            End::NotWritten,
            format!("the screen could not be written: {}", files::plain(&error)),
        )),
        _ => Ok(()),
    }
}

/// Prints what a run has found: as JSON, as text with the place of the files, or not at all, as the options ask.
pub fn answer(
    options: &Options,
    out: &Path,
    json: impl FnOnce() -> String,
    text: impl FnOnce() -> String,
) -> Result<(), Stop> {
    if options.json {
        print(&json())?;
    } else if !options.quiet {
        print(&text())?;
        print(&format!("\nFiles are in {}\n", files::shown(out)))?;
    }
    Ok(())
}

/// Prints to stderr; there is nobody left to tell when that fails.
pub fn complain(text: &str) {
    let _ = io::stderr().lock().write_all(text.as_bytes());
}

/// True when stdout takes colour: a terminal, and the user has not set NO_COLOR.
pub fn has_colour() -> bool {
    io::stdout().is_terminal() && wants_colour()
}

/// True when stderr takes colour.
pub fn has_colour_for_mistakes() -> bool {
    io::stderr().is_terminal() && wants_colour()
}

fn wants_colour() -> bool {
    std::env::var_os("NO_COLOR").is_none_or(|value| value.is_empty())
}

/// A line on stderr that shows the latest round or point; hidden unless stderr is a terminal.
pub struct Progress {
    bar: ProgressBar,
    n_rounds: usize,
}

impl Progress {
    /// Starts the line, or a hidden one when `is_quiet`.
    pub fn new(is_quiet: bool) -> Progress {
        let is_shown = !is_quiet && io::stderr().is_terminal();
        let target =
            if is_shown { ProgressDrawTarget::stderr() } else { ProgressDrawTarget::hidden() };
        let bar = ProgressBar::with_draw_target(None, target);
        if let Ok(style) = ProgressStyle::with_template("  {msg}") {
            bar.set_style(style);
        }
        Progress { bar, n_rounds: 0 }
    }

    /// Shows one more round.
    pub fn round(&mut self, n_unknowns: usize, low: f64, high: f64) {
        self.n_rounds += 1;
        self.bar.set_message(progress_line(self.n_rounds, n_unknowns, low, high));
        self.bar.tick();
    }

    /// Shows how far a study has come.
    pub fn point(&mut self, n_done: usize, n_wanted: usize) {
        self.bar.set_message(format!("point {n_done} of {n_wanted}"));
        self.bar.tick();
    }
}

impl Drop for Progress {
    fn drop(&mut self) {
        self.bar.finish_and_clear();
    }
}
