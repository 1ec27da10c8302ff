//! `nightpool agree`: the two light engines side by side on one study.

use std::path::PathBuf;

use clap::Args;

use crate::plan::agree;
use crate::study::Study;

use super::progress::Bar;
use super::rows::{Cell, Format, written_cells};
use super::{Failure, interrupt, plan, print};

/// Arguments of `agree`.
#[derive(Debug, Args)]
pub struct AgreeArguments {
    /// The study file (TOML).
    study: PathBuf,
    /// Gamma showers of each engine.
    #[arg(long, default_value_t = 400, value_parser = clap::value_parser!(u64).range(16..=1_000_000))]
    gamma_showers: u64,
    /// Showers of each background and engine.
    #[arg(long, default_value_t = 200, value_parser = clap::value_parser!(u64).range(16..=1_000_000))]
    background_showers: u64,
    /// Number of threads [default: one a core]. Results do not depend on it.
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=1024))]
    threads: Option<u16>,
    /// Seed of the random streams, instead of the study's.
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u64).range(0..=i64::MAX as u64))]
    seed: Option<u64>,
    /// How to print.
    #[arg(long, default_value = "table")]
    format: Format,
    /// No progress.
    #[arg(long, short)]
    quiet: bool,
}

const COLUMNS: [&str; 8] = [
    "quantity",
    "of",
    "profile",
    "profile_error",
    "cascade",
    "cascade_error",
    "ratio",
    "ratio_error",
];

/// Prints both engines' numbers and their ratio.
pub(super) fn run(arguments: &AgreeArguments) -> Result<(), Failure> {
    let mut study = Study::read(&arguments.study)?;
    study.seed = arguments.seed.unwrap_or(study.seed);
    study.budget.gamma_showers = arguments.gamma_showers;
    study.budget.background_showers = arguments.background_showers;
    interrupt::watch()?;
    let bar = Bar::new(arguments.quiet);
    let rows = plan::threads(arguments.threads)?.install(|| agree(&study, &bar));
    bar.clear();
    let rows = rows?;
    let cells = rows.iter().map(|row| {
        let ratio = row.ratio();
        let numbers = [row.profile, row.cascade, ratio].map(|e| [e.value, e.error]);
        let texts = [row.quantity.clone(), row.of.clone()].into_iter().map(Cell::Text);
        texts.chain(numbers.into_iter().flatten().map(Cell::Number)).collect()
    });
    print(&written_cells(arguments.format, &COLUMNS, &cells.collect::<Vec<_>>()))
}
