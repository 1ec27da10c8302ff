//! `nightpool search`.

use std::path::PathBuf;
use std::sync::atomic::Ordering;

use clap::Args;

use crate::plan::{Best, SearchError, Wanted, best_files, plan, search_ground};
use crate::report;
use crate::study::{Layout, Study};

use super::failure::Failure;
use super::interrupt;
use super::out::print;
use super::plan::{TableArguments, threads};
use super::progress::Bar;
use super::table::ranking_text;

/// Arguments of `search`.
#[derive(Debug, Args)]
pub struct SearchArguments {
    /// The study file (TOML); its boundary is the ground that is searched.
    study: PathBuf,
    /// Most telescopes of a layout; every number from the array condition up is searched.
    #[arg(long, value_name = "N", default_value_t = 4, value_parser = clap::value_parser!(u16).range(2..=64))]
    telescopes: u16,
    /// Most that a layout may cost, in the unit of the kinds' costs.
    #[arg(long, value_name = "C")]
    budget: Option<f64>,
    /// Telescopes that must fire.
    #[arg(long, value_name = "K", default_value_t = 2, value_parser = clap::value_parser!(u16).range(1..=64))]
    required: u16,
    /// Distance of neighbouring pads.
    #[arg(long, value_name = "LENGTH", default_value = "80m", value_parser = pad_spacing)]
    pad_spacing: f64,
    /// Folder for the report [default: reports/NAME-OF-STUDY-search].
    #[arg(long, value_name = "DIR")]
    out: Option<PathBuf>,
    #[command(flatten)]
    table: TableArguments,
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

fn pad_spacing(text: &str) -> Result<f64, String> {
    let length = crate::units::length_m(text).map_err(|error| error.to_string())?;
    if (5.0..=2_000.0).contains(&length) { Ok(length) } else { Err("write 5m to 2000m".into()) }
}

impl From<SearchError> for Failure {
    fn from(error: SearchError) -> Self {
        match error {
            SearchError::Plan(error) => error.into(),
            _ => Self::Input(error.to_string()),
        }
    }
}

/// Simulates pads, searches, and plans the winners on showers of their own. The first interrupt
/// ends the search and writes its best so far.
pub(super) fn run(arguments: &SearchArguments) -> Result<(), Failure> {
    let mut study = Study::read(&arguments.study)?;
    if let Some(seed) = arguments.seed {
        study.seed = seed;
    }
    if arguments.required > arguments.telescopes {
        return Err(Failure::Input("--required: more than --telescopes".into()));
    }
    if arguments.budget.is_some_and(|budget| !(budget > 0.0 && budget.is_finite())) {
        return Err(Failure::Input("--budget: write a positive number".into()));
    }
    let folder = || PathBuf::from("reports").join(format!("{}-search", study.name));
    let out = arguments.out.clone().unwrap_or_else(folder);
    report::check_destination(&out)?;
    let tables = arguments.table.tables(&out);
    report::check_destination(&tables.folder)?;
    let wanted = Wanted {
        telescopes: arguments.telescopes.into(),
        budget: arguments.budget,
        pad_spacing_m: arguments.pad_spacing,
        condition: arguments.required.into(),
    };
    let bar = Bar::new(arguments.quiet);
    let pool = threads(arguments.threads)?;
    interrupt::watch()?;
    let searching = || interrupt::wait(true);
    let best = pool.install(|| {
        search_ground(&study, &wanted, Some(&tables), (&interrupt::STOP, &searching), &bar)
    })?;
    let stopped = interrupt::STOP.load(Ordering::SeqCst);
    interrupt::wait(false);
    let found = best_files(&best, &study)?;
    if stopped {
        bar.clear();
        report::write_files(&out, &found)?;
        let place = out.join("front.csv");
        let text = format!("interrupted; the best so far stands in {}", place.display());
        return Err(Failure::Interrupted(text));
    }
    study.layouts = best.iter().map(|best| layout(best, &study, &wanted)).collect();
    // Showers that the search has not seen.
    study.seed = study.seed.wrapping_add(1);
    let result = pool.install(|| plan(&study, Some(&tables), &bar))?;
    bar.clear();
    let mut files = report::files(&result)?;
    files.extend(found);
    report::write_files(&out, &files)?;
    if arguments.json {
        return print(&report::ranking_json(&result));
    }
    if arguments.quiet {
        return Ok(());
    }
    print(&format!("{}\nreport: {}\n", ranking_text(&result), out.join("report.html").display()))
}

fn layout(best: &Best, study: &Study, wanted: &Wanted) -> Layout {
    Layout {
        name: format!("best of {}", best.telescopes.len()),
        telescopes: best.telescopes.clone(),
        condition: wanted.condition,
        window_ns: study.layouts.first().map_or(50.0, |layout| layout.window_ns),
        scan: None,
        line: 0,
    }
}
