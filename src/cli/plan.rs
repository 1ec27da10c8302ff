//! `nightpool plan`.

use std::path::PathBuf;

use clap::Args;

use crate::plan::{PlanError, Tables, plan};
use crate::report;
use crate::response::TableError;
use crate::study::{Engine, Study};

use super::failure::Failure;
use super::interrupt;
use super::out::print;
use super::pool::EngineChoice;
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
    /// Light engine, instead of the study's.
    #[arg(long)]
    engine: Option<EngineChoice>,
    #[command(flatten)]
    table: TableArguments,
    /// No progress, no table: errors only.
    #[arg(long, short)]
    quiet: bool,
    /// Print the ranking as JSON instead of a table.
    #[arg(long)]
    json: bool,
}

/// Where simulated events are kept.
#[derive(Debug, Args)]
pub struct TableArguments {
    /// Folder for the simulated events, read again by later runs [default: table in the report's folder].
    #[arg(long, value_name = "DIR")]
    table: Option<PathBuf>,
    /// Simulate again and replace the events that are kept.
    #[arg(long)]
    rebuild: bool,
}

impl TableArguments {
    /// The tables of a run with this folder for its report.
    pub fn tables(&self, out: &std::path::Path) -> Tables {
        let folder = self.table.clone().unwrap_or_else(|| out.join("table"));
        Tables { folder, rebuild: self.rebuild }
    }
}

impl From<PlanError> for Failure {
    fn from(error: PlanError) -> Self {
        match error {
            PlanError::Table(TableError::Io { .. } | TableError::Parquet { .. }) => {
                Self::Run(error.to_string())
            }
            PlanError::Table(_) => Self::Input(error.to_string()),
            _ => Self::Run(error.to_string()),
        }
    }
}

/// The pool of threads of a run.
pub(super) fn threads(number: Option<u16>) -> Result<rayon::ThreadPool, Failure> {
    rayon::ThreadPoolBuilder::new()
        .num_threads(number.map_or(0, usize::from))
        .build()
        .map_err(|error| Failure::Run(format!("threads cannot be started: {error}")))
}

/// Reads the study, simulates, ranks, writes the report.
pub(super) fn run(arguments: &PlanArguments) -> Result<(), Failure> {
    let mut study = Study::read(&arguments.study)?;
    if let Some(seed) = arguments.seed {
        study.seed = seed;
    }
    match arguments.engine {
        Some(EngineChoice::Profile) => study.engine = Engine::Profile,
        Some(EngineChoice::Cascade) => study.engine = Engine::Cascade,
        None => {}
    }
    let out = arguments.out.clone().unwrap_or_else(|| PathBuf::from("reports").join(&study.name));
    report::check_destination(&out)?;
    let tables = arguments.table.tables(&out);
    report::check_destination(&tables.folder)?;
    interrupt::watch()?;
    let bar = Bar::new(arguments.quiet);
    let result = threads(arguments.threads)?.install(|| plan(&study, Some(&tables), &bar));
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
