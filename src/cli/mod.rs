//! Arguments → stages → files and screen; owns exit codes, files, the clock and the terminal.
//!
//! Every stage below is called with values and returns values; nothing else in the program touches the system.

mod check;
mod clock;
mod files;
mod options;
mod saturate;
mod screen;
mod sheet;
mod solve;

use clap::Parser;
use clap::error::ErrorKind;
use options::{Command, Options};
use std::process::ExitCode;

/// How a run ended; the number is the process's exit code.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum End {
    Done = 0,
    /// Done, but the estimate or a requirement is not met.
    NotMet = 1,
    /// The sheet or the arguments are wrong; clap uses the same number.
    InputWrong = 2,
    /// The interval was not reached; results are written all the same.
    NotReached = 3,
    /// A file or the screen could not be written.
    NotWritten = 4,
}

/// Why a run stopped: the text for stderr, and how it ends.
#[derive(Debug, Clone, PartialEq)]
pub struct Stop {
    pub text: String,
    pub end: End,
}

impl Stop {
    /// A stop with one plain sentence.
    pub fn new(end: End, message: impl AsRef<str>) -> Stop {
        Stop { text: format!("gapwright: {}\n", message.as_ref()), end }
    }
}

/// Exit code of a fault inside the program (EX_SOFTWARE of the BSD list of exit codes).
const FAULT_INSIDE: i32 = 70;

/// Parses the arguments, runs the command and tells the user what stopped it.
pub fn run() -> ExitCode {
    std::panic::set_hook(Box::new(|info| {
        let place =
            info.location().map_or(String::new(), |l| format!(" ({}:{})", l.file(), l.line()));
        screen::complain(&format!(
            "gapwright: a fault inside the program stopped it{place}; no result was written. \
             Please report it together with the sheet.\n"
        ));
        std::process::exit(FAULT_INSIDE);
    }));
    let arguments = match options::Arguments::try_parse() {
        Ok(arguments) => arguments,
        Err(reply) => return answered(&reply),
    };
    let end = match dispatch(&arguments.command) {
        Ok(end) => end,
        Err(stop) => {
            screen::complain(&stop.text);
            stop.end
        }
    };
    ExitCode::from(end as u8)
}

/// Prints what the parser has to say: help and version on stdout, mistakes like all other mistakes of the user.
fn answered(reply: &clap::Error) -> ExitCode {
    // Help without a command is asked for by mistake: clap then writes to stderr, and nothing needs to be named wrong.
    if !reply.use_stderr() || reply.kind() == ErrorKind::DisplayHelpOnMissingArgumentOrSubcommand {
        let _ = reply.print();
    } else {
        let text = reply.render().to_string();
        screen::complain(&format!("gapwright: {}", text.strip_prefix("error: ").unwrap_or(&text)));
    }
    let end = if reply.use_stderr() { End::InputWrong } else { End::Done };
    ExitCode::from(end as u8)
}

fn dispatch(command: &Command) -> Result<End, Stop> {
    let options = command.options();
    set_threads(options)?;
    match command {
        Command::Check(options) => check::check(options),
        Command::Solve(options) => solve::solve(options),
        Command::Saturate(options) => saturate::saturate(options),
    }
}

/// Sets up the thread pool before anything uses it.
///
/// The main thread is one of its threads: a pool beside it would be woken and waited for at every parallel step, which
/// costs a small run more than the steps.
fn set_threads(options: &Options) -> Result<(), Stop> {
    // 0 leaves the number to rayon: one per processor.
    let n_threads = options.threads.map_or(0, usize::from);
    let pool = rayon::ThreadPoolBuilder::new().num_threads(n_threads).use_current_thread();
    pool.build_global().map_err(|e| {
        let message = format!("no threads to compute with: {e}; ask for fewer with --threads");
        Stop::new(End::InputWrong, message)
    })
}
