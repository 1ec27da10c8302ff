//! `nightpool plan`.

use std::path::PathBuf;

use clap::Args;

use crate::plan::{PlanError, plan};
use crate::report;
use crate::study::Study;

use super::failure::Failure;
use super::out::print;
use super::progress::Bar;
use super::table::ranking_text;

/// Arguments of `plan`.
#[derive(Debug, Args)]
pub struct PlanArguments {
    /// The study file (TOML).
    study: PathBuf,
    /// Folder for the report [default: reports/NAME-OF-STUDY].
    #[arg(long, value_name = "DIR")]
    out: Option<PathBuf>,
    /// Number of threads [default: one a core]. Results do not depend on it.
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=1024))]
    threads: Option<u16>,
    /// Seed of the random streams, instead of the study's.
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u64).range(0..=i64::MAX as u64))]
    seed: Option<u64>,
    /// No progress, no table: errors only.
    #[arg(long, short)]
    quiet: bool,
    /// Print the ranking as JSON instead of a table.
    #[arg(long)]
    json: bool,
}

impl From<PlanError> for Failure {
    fn from(error: PlanError) -> Self {
        Self::Run(error.to_string())
    }
}

/// Reads the study, simulates, ranks, writes the report.
pub(super) fn run(arguments: &PlanArguments) -> Result<(), Failure> {
    let mut study = Study::read(&arguments.study)?;
    if let Some(seed) = arguments.seed {
        study.seed = seed;
    }
    let out = arguments.out.clone().unwrap_or_else(|| PathBuf::from("reports").join(&study.name));
    report::check_destination(&out)?;
    let pool = rayon::ThreadPoolBuilder::new()
        .num_threads(arguments.threads.map_or(0, usize::from))
        .build()
        .map_err(|error| Failure::Run(format!("threads cannot be started: {error}")))?;
    let bar = Bar::new(arguments.quiet);
    let result = pool.install(|| plan(&study, &bar));
    bar.clear();
    let result = result?;
    report::write_all(&out, &result)?;
    if arguments.json {
        return print(&report::ranking_json(&result));
    }
    if arguments.quiet {
        return Ok(());
    }
    let warnings: String =
        result.warnings.iter().map(|warning| format!("note: {warning}\n")).collect();
    let place = format!("report: {}\n", out.join("report.html").display());
    print(&format!("{}\n{warnings}{place}", ranking_text(&result)))
}
