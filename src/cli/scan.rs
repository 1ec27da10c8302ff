//! `nightpool scan`: rates against the pixel threshold of one telescope kind.

use std::path::PathBuf;

use clap::Args;

use crate::plan::{ScanError, ScanRequest, scan};
use crate::report::{ThresholdRow, ThresholdScan, charts, write_files};
use crate::study::Study;

use super::progress::Bar;
use super::rows::{Format, written};
use super::{Failure, interrupt, plan, print};

/// Arguments of `scan`.
#[derive(Debug, Args)]
pub struct ScanArguments {
    /// The study file (TOML).
    study: PathBuf,
    /// Telescope kind whose pixel threshold is scanned.
    #[arg(long, value_name = "KIND")]
    telescope: String,
    /// Layout it stands in [default: the first with that kind].
    #[arg(long, value_name = "NAME")]
    layout: Option<String>,
    /// Lowest threshold, photoelectrons [default: where accidentals are rare].
    #[arg(long, value_name = "PE", value_parser = photoelectrons)]
    from: Option<f64>,
    /// Highest threshold, photoelectrons [default: three times the quiet one].
    #[arg(long, value_name = "PE", value_parser = photoelectrons)]
    to: Option<f64>,
    /// Number of thresholds.
    #[arg(long, default_value_t = 60, value_parser = clap::value_parser!(u16).range(2..=2_000))]
    points: u16,
    /// How to print.
    #[arg(long, default_value = "table")]
    format: Format,
    /// Also draw the rates into this SVG file.
    #[arg(long, value_name = "FILE.svg")]
    plot: Option<PathBuf>,
    /// Number of threads [default: one a core]. Results do not depend on it.
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=1024))]
    threads: Option<u16>,
    /// Seed of the random streams, instead of the study's.
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u64).range(0..=i64::MAX as u64))]
    seed: Option<u64>,
    /// No progress, no note of the quiet threshold: rates and errors only.
    #[arg(long, short)]
    quiet: bool,
}

fn photoelectrons(text: &str) -> Result<f64, String> {
    let number: f64 = text.parse().map_err(|_| "write a number of photoelectrons".to_owned())?;
    if (0.1..=10_000.0).contains(&number) {
        return Ok(number);
    }
    Err("write a number from 0.1 to 10000 (photoelectrons)".into())
}

impl From<ScanError> for Failure {
    fn from(error: ScanError) -> Self {
        match error {
            ScanError::Plan(error) => error.into(),
            ScanError::Telescope { .. } => Self::Input(format!("--telescope: {error}")),
            ScanError::Layout { .. } => Self::Input(format!("--layout: {error}")),
            ScanError::Range { .. } => Self::Input(format!("--from, --to: {error}")),
        }
    }
}

/// Reads the study, simulates one layout, prints the rates.
pub(super) fn run(arguments: &ScanArguments) -> Result<(), Failure> {
    let mut study = Study::read(&arguments.study)?;
    if let Some(seed) = arguments.seed {
        study.seed = seed;
    }
    interrupt::watch()?;
    let request = ScanRequest {
        telescope: arguments.telescope.clone(),
        layout: arguments.layout.clone(),
        from_pe: arguments.from,
        to_pe: arguments.to,
        points: arguments.points.into(),
    };
    let bar = Bar::new(arguments.quiet);
    let found = plan::threads(arguments.threads)?.install(|| scan(&study, &request, None, &bar));
    bar.clear();
    let found = found?;
    if let Some(path) = &arguments.plot {
        draw(path, &found)?;
    }
    let rows: Vec<Vec<f64>> = found.rows.iter().map(cells).collect();
    let text = written(arguments.format, &COLUMNS, &rows);
    if arguments.quiet {
        return print(&text);
    }
    if arguments.format == Format::Table {
        return print(&format!("{text}{}\n", found.quiet_line()));
    }
    print(&text)?;
    note(&found.quiet_line());
    Ok(())
}

/// A line for people beside output for programs: on standard error.
fn note(line: &str) {
    use std::io::Write;
    // Nobody is left to tell if standard error is closed.
    let _ = writeln!(std::io::stderr(), "{line}");
}

fn draw(path: &std::path::Path, found: &ThresholdScan) -> Result<(), Failure> {
    let folder = path.parent().filter(|folder| !folder.as_os_str().is_empty());
    let folder = folder.unwrap_or_else(|| std::path::Path::new("."));
    let Some(name) = path.file_name() else {
        return Err(Failure::Input(format!("--plot: {} names no file", path.display())));
    };
    let svg = charts::threshold_chart(found).into_bytes();
    write_files(folder, &[(name.to_string_lossy().into_owned(), svg)])?;
    Ok(())
}

const COLUMNS: [&str; 9] = [
    "threshold_pe",
    "pixel_rate_hz",
    "accidental_rate_hz",
    "shower_rate_hz",
    "total_rate_hz",
    "array_accidental_rate_hz",
    "array_shower_rate_hz",
    "shower_rate_error_hz",
    "array_shower_rate_error_hz",
];

fn cells(row: &ThresholdRow) -> Vec<f64> {
    vec![
        row.threshold_pe,
        row.pixel_rate_hz,
        row.accidental_rate_hz,
        row.shower_rate_hz,
        row.total_rate_hz,
        row.array_accidental_rate_hz,
        row.array_shower_rate_hz,
        row.shower_rate_error_hz,
        row.array_shower_rate_error_hz,
    ]
}
