//! The arguments: commands and their common options.

use clap::{Args, Parser, Subcommand};
use gapwright::input;
use gapwright::units::{self, Dimension};
use std::path::PathBuf;

/// Inductance of gapped round cores and coils, from the solved field, with a guaranteed interval.
#[derive(Debug, Parser)]
#[command(version, after_help = EXIT_CODES, max_term_width = 80)]
pub struct Arguments {
    #[command(subcommand)]
    pub command: Command,
}

const EXIT_CODES: &str = "\
Example: gapwright solve choke.toml --interval 0.01%

Exit codes:
  0  done
  1  done, but the estimate or a requirement is not met
  2  the sheet or the arguments are wrong
  3  the interval was not reached; the results are written and say so
  4  a file could not be written";

/// What to do with the sheet.
#[derive(Debug, Subcommand)]
pub enum Command {
    /// Read the sheet, say what was understood and draw the section; no field
    Check(Options),
    /// Solve the field: A_L and inductance with their interval, gaps, hot spots, pictures
    Solve(SolveOptions),
    /// Inductance against current: table, knee, currents at which the inductance has fallen
    Saturate(SaturateOptions),
}

/// Options of `solve`.
#[derive(Debug, Clone, Args)]
pub struct SolveOptions {
    #[command(flatten)]
    pub common: Options,
    /// Draw both halves of the section in field.svg
    #[arg(long)]
    pub mirror: bool,
}

/// Options of `saturate`.
#[derive(Debug, Clone, Args)]
pub struct SaturateOptions {
    #[command(flatten)]
    pub common: Options,
    /// Highest current of the first winding that carries some; all others scale along
    #[arg(long, value_name = "CURRENT", value_parser = current)]
    pub to: f64,
    /// Points of the table, that of I → 0 included; they stand close where the curve bends
    #[arg(long, value_name = "N", default_value_t = 24, value_parser = clap::value_parser!(u16).range(3..=1000))]
    pub points: u16,
}

impl Command {
    /// The options that every command has.
    pub fn options(&self) -> &Options {
        match self {
            Command::Check(options) => options,
            Command::Solve(options) => &options.common,
            Command::Saturate(options) => &options.common,
        }
    }
}

/// Options of every command.
#[derive(Debug, Clone, Args)]
pub struct Options {
    /// The sheet: a TOML file that describes core, gaps and windings
    pub sheet: PathBuf,
    /// Where to write the files [default: the sheet's name with .out, beside it]
    #[arg(long, value_name = "DIR")]
    pub out: Option<PathBuf>,
    /// Print the result as JSON and nothing else; files only with --out
    #[arg(long)]
    pub json: bool,
    /// Widest interval that will do, such as 0.01%, instead of the sheet's
    #[arg(long, value_name = "WIDTH", value_parser = interval)]
    pub interval: Option<f64>,
    /// Threads to compute with [default: one per processor]
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=1024))]
    pub threads: Option<u16>,
    /// Print mistakes only; the files are written all the same
    #[arg(long)]
    pub quiet: bool,
    /// Add the time of every stage, and the rounds of solve; nothing is timed in check
    #[arg(long)]
    pub timings: bool,
    /// Another B-H table for a material of the sheet; may be repeated
    #[arg(long, value_name = "NAME=FILE.csv", value_parser = material)]
    pub material: Vec<(String, PathBuf)>,
}

/// Highest current that may be asked for [A]; the sheet's currents have a bound of their own.
const CURRENT_MAX: f64 = 1e9;

/// "6A" or "6" → 6.
fn current(text: &str) -> Result<f64, String> {
    let value = units::read(text, Dimension::Current, (0, 1.0))
        .map_err(|e| format!("{e}; write 6A or 6"))?;
    if 0.0 < value && value <= CURRENT_MAX {
        Ok(value)
    } else {
        Err(format!("{value} A is not above 0 and at most {CURRENT_MAX:e} A; write 6A or 6"))
    }
}

/// "0.01%" or "1e-4" → 1e-4.
fn interval(text: &str) -> Result<f64, String> {
    input::interval(text).map_err(|e| format!("{e}; write 0.1% or 0.001"))
}

/// "core=table.csv" → its two halves.
fn material(text: &str) -> Result<(String, PathBuf), String> {
    match text.split_once('=') {
        Some((name, file)) if !name.is_empty() && !file.is_empty() => {
            Ok((name.to_string(), PathBuf::from(file)))
        }
        _ => Err("write NAME=FILE.csv, the material's name in the sheet and the table".to_string()),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use clap::CommandFactory;

    #[test]
    fn the_arguments_are_consistent() {
        Arguments::command().debug_assert();
    }

    #[test]
    fn an_option_that_a_command_cannot_use_is_refused() {
        let parsed =
            |command| Arguments::try_parse_from(["gapwright", command, "a.toml", "--mirror"]);
        assert!(parsed("solve").is_ok());
        assert!(parsed("check").is_err());
    }

    #[test]
    fn an_interval_is_a_ratio_within_bounds() {
        assert_eq!(interval("0.01%"), Ok(1e-4));
        assert_eq!(interval("0.1 %"), Ok(1e-3));
        assert_eq!(interval("1e-4"), Ok(1e-4));
        for wrong in ["0", "-1%", "80%", "1 mm", "", "much", "NaN"] {
            assert!(interval(wrong).is_err(), "{wrong}");
        }
    }

    #[test]
    fn a_current_is_positive() {
        assert_eq!(current("6A"), Ok(6.0));
        assert_eq!(current("350 mA"), Ok(0.35));
        assert_eq!(current("6"), Ok(6.0));
        for wrong in ["0", "-1A", "1 mm", "", "much", "NaN", "1e300"] {
            assert!(current(wrong).is_err(), "{wrong}");
        }
    }

    #[test]
    fn a_material_has_a_name_and_a_file() {
        assert_eq!(material("core=a=b.csv"), Ok(("core".to_string(), PathBuf::from("a=b.csv"))));
        for wrong in ["core", "=a.csv", "core="] {
            assert!(material(wrong).is_err(), "{wrong}");
        }
    }
}
