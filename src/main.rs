//! The `nightpool` command: arguments, a study, a run, a report.

use std::process::ExitCode;

use clap::Parser;
use nightpool::cli::{Arguments, run};

fn main() -> ExitCode {
    // Wrong arguments end here, with exit code 2 and a hint.
    let arguments = Arguments::parse();
    match run(arguments) {
        Ok(()) => ExitCode::SUCCESS,
        Err(failure) => failure.report(),
    }
}
