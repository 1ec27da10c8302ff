//! The command line: arguments to a study to a run; the only place that prints or exits.
//!
//! A subcommand is a file with an argument struct and a `run` that gives `Result<(), Failure>`.
//! Exit codes: 0 good, 1 the run failed, 2 wrong arguments or input, 130 interrupted (earlier
//! outputs stay whole; a search writes its best so far).

mod agree;
mod air;
mod calibrate;
mod failure;
mod interrupt;
mod out;
mod plan;
mod pool;
mod progress;
mod rows;
mod scan;
mod search;
mod table;

use clap::{Parser, Subcommand};

pub use failure::Failure;
pub use out::print;
pub use plan::PlanArguments;
pub use progress::Bar;
pub use search::SearchArguments;

/// Plans arrays of imaging air-shower telescopes.
#[derive(Debug, Parser)]
#[command(version, about, after_help = EXIT_CODES, arg_required_else_help = true)]
pub struct Arguments {
    #[command(subcommand)]
    command: Command,
}

const EXIT_CODES: &str =
    "Exit codes: 0 good, 1 the run failed, 2 wrong arguments or input, 130 interrupted.";

#[derive(Debug, Subcommand)]
enum Command {
    /// Set the two light engines side by side on one study.
    Agree(agree::AgreeArguments),
    /// Make the fast engine's tables with the cascade.
    Calibrate(calibrate::CalibrateArguments),
    /// Print an atmosphere's state by altitude, or its transmission by wavelength.
    Air(air::AirArguments),
    /// Compare the layouts of a study: simulate, rank, report.
    Plan(PlanArguments),
    /// Print trigger rates against the pixel threshold of one telescope kind, and the lowest quiet one.
    Scan(scan::ScanArguments),
    /// Find the best layouts on the ground of a study: simulate pads, search, report.
    Search(SearchArguments),
    /// Print light density against distance from the shower axis.
    Pool(pool::PoolArguments),
}

/// Runs a command.
///
/// # Errors
/// [`Failure`] with its message and exit code.
pub fn run(arguments: Arguments) -> Result<(), Failure> {
    match arguments.command {
        Command::Agree(arguments) => agree::run(&arguments),
        Command::Calibrate(arguments) => calibrate::run(&arguments),
        Command::Air(arguments) => air::run(&arguments),
        Command::Plan(arguments) => plan::run(&arguments),
        Command::Pool(arguments) => pool::run(&arguments),
        Command::Scan(arguments) => scan::run(&arguments),
        Command::Search(arguments) => search::run(&arguments),
    }
}
