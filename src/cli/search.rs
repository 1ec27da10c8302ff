//! `nightpool search`.

use std::fmt::Write;
use std::path::PathBuf;
use std::sync::atomic::AtomicBool;

use clap::Args;

use crate::plan::{Best, SearchError, Wanted, plan, search_ground};
use crate::report;
use crate::study::{Layout, Study};

use super::failure::Failure;
use super::out::print;
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
    /// No progress, no table: errors only.
    #[arg(long, short)]
    quiet: bool,
}

fn pad_spacing(text: &str) -> Result<f64, String> {
    let length = crate::units::length_m(text).map_err(|error| error.to_string())?;
    if (5.0..=2_000.0).contains(&length) { Ok(length) } else { Err("write 5m to 2000m".into()) }
}

impl From<SearchError> for Failure {
    fn from(error: SearchError) -> Self {
        match error {
            SearchError::Plan(_) => Self::Run(error.to_string()),
            _ => Self::Input(error.to_string()),
        }
    }
}

/// Simulates pads, searches, and plans the winners on showers of their own.
pub(super) fn run(arguments: &SearchArguments) -> Result<(), Failure> {
    let mut study = Study::read(&arguments.study)?;
    if arguments.required > arguments.telescopes {
        return Err(Failure::Input("--required: more than --telescopes".into()));
    }
    if arguments.budget.is_some_and(|budget| !(budget > 0.0 && budget.is_finite())) {
        return Err(Failure::Input("--budget: write a positive number".into()));
    }
    let folder = || PathBuf::from("reports").join(format!("{}-search", study.name));
    let out = arguments.out.clone().unwrap_or_else(folder);
    report::check_destination(&out)?;
    let wanted = Wanted {
        telescopes: arguments.telescopes.into(),
        budget: arguments.budget,
        pad_spacing_m: arguments.pad_spacing,
        condition: arguments.required.into(),
    };
    let bar = Bar::new(arguments.quiet);
    let best = search_ground(&study, &wanted, &AtomicBool::new(false), &bar)?;
    study.layouts = best.iter().map(|best| layout(best, &study, &wanted)).collect();
    // Showers that the search has not seen.
    study.seed = study.seed.wrapping_add(1);
    let result = plan(&study, &bar)?;
    bar.clear();
    let mut files = report::files(&result)?;
    files.push(("front.csv".into(), front_csv(&best).into_bytes()));
    files.push(("build_up.csv".into(), build_up_csv(&best, &study).into_bytes()));
    report::write_files(&out, &files)?;
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
        line: 0,
    }
}

fn front_csv(best: &[Best]) -> String {
    let mut text = String::from("telescopes,cost,searched_rate_hz,gamma_rate_hz,on_front\n");
    for row in best {
        let (count, cost) = (row.telescopes.len(), row.cost);
        let (searched, reported) = (row.searched_hz, row.reported_hz);
        let _ = writeln!(text, "{count},{cost},{searched:.6e},{reported:.6e},{}", row.on_front);
    }
    text
}

fn build_up_csv(best: &[Best], study: &Study) -> String {
    let mut text = String::from("telescopes,stage,kind,east_m,north_m,gamma_rate_hz,loss_if_out\n");
    for row in best {
        for (stage, (placed, rate)) in row.build_up.iter().enumerate() {
            let index = row.telescopes.iter().position(|telescope| telescope == placed);
            let loss = index.map_or(f64::NAN, |index| row.losses[index]);
            let (kind, [x, y, _]) = (&study.kinds[placed.kind].name, placed.enu_m);
            let count = row.telescopes.len();
            let stage = stage + 1;
            let _ = writeln!(text, "{count},{stage},{kind},{x:.2},{y:.2},{rate:.6e},{loss:.4}");
        }
    }
    text
}
