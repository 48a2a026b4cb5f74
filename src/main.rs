//! The command line: flags → files → stages → files. The only place that touches the system.

mod cli;

use std::process::ExitCode;

fn main() -> ExitCode {
    cli::run()
}
