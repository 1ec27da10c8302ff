//! All files of a report at once: made beside their destination, then renamed.

use std::fs;
use std::path::{Path, PathBuf};

use thiserror::Error;

use super::page::page;
use super::result::{PlanResult, Provenance};
use super::{charts, checks, geography, provenance, tables, thresholds};

/// A report that could not be written.
#[derive(Debug, Error)]
pub enum ReportError {
    /// The destination cannot be used.
    #[error("{path}: {problem}; name a folder that can be written")]
    Destination {
        /// The destination.
        path: PathBuf,
        /// Why not.
        problem: String,
    },
    /// A file could not be written.
    #[error("{path}: cannot be written: {cause}")]
    Write {
        /// The file.
        path: PathBuf,
        /// Why not.
        cause: std::io::Error,
    },
    /// A table could not be made.
    #[error("table {name}: {problem}")]
    Table {
        /// Its name.
        name: &'static str,
        /// Why not.
        problem: String,
    },
}

impl ReportError {
    /// Whether the user's choice of destination is at fault.
    pub fn is_input(&self) -> bool {
        matches!(self, Self::Destination { .. })
    }
}

/// Whether a folder can be written to, or made. Makes nothing that is still there afterwards.
///
/// # Errors
/// [`ReportError::Destination`] if not.
pub fn check_destination(folder: &Path) -> Result<(), ReportError> {
    let fault = |problem: String| ReportError::Destination { path: folder.to_owned(), problem };
    if folder.exists() && !folder.is_dir() {
        return Err(fault("is not a folder".into()));
    }
    let absolute = std::path::absolute(folder).map_err(|cause| fault(cause.to_string()))?;
    let Some(parent) = absolute.ancestors().find(|ancestor| ancestor.exists()) else {
        return Err(fault("has no parent folder".into()));
    };
    if !parent.is_dir() {
        return Err(fault(format!("{} is not a folder", parent.display())));
    }
    let probe = parent.join(format!(".nightpool-{}-probe", std::process::id()));
    fs::create_dir(&probe).map_err(|cause| fault(format!("cannot be written: {cause}")))?;
    fs::remove_dir(&probe).map_err(|cause| fault(format!("cannot be written: {cause}")))
}

/// Makes every file of a report in memory: name and bytes.
///
/// # Errors
/// [`ReportError::Table`].
pub fn files(result: &PlanResult) -> Result<Vec<(String, Vec<u8>)>, ReportError> {
    let both = [
        tables::ranking_table(result),
        tables::primary_table(result),
        tables::effective_area_table(result),
        tables::rate_table(result),
        tables::light_pool_table(result),
        checks::source_table(result),
        checks::scan_table(result),
        checks::order_table(result),
        checks::finalist_table(result),
        checks::direction_table(result),
        thresholds::sky_level_table(result),
    ];
    let mut files = table_files(both, &result.provenance)?;
    let drawn = [
        ("ranking.svg", charts::ranking_chart(result)),
        ("effective_area.svg", charts::effective_area_chart(result)),
        ("differential_rate.svg", charts::differential_rate_chart(result)),
        ("light_pool.svg", charts::light_pool_chart(result)),
        ("layout_map.svg", charts::layout_map_chart(result)),
        ("site_map.svg", charts::site_map_chart(result)),
    ];
    files.extend(drawn.map(|(name, svg)| (name.to_owned(), svg.into_bytes())));
    files.extend(charts::scan_chart(result).map(|svg| ("scan.svg".into(), svg.into_bytes())));
    files.push(("layouts.geojson".into(), geography::layouts_geojson(result).into_bytes()));
    files.push(("run.json".into(), provenance::run_json(result).into_bytes()));
    files.push(("report.html".into(), page(result).into_bytes()));
    Ok(files)
}

/// Each table as CSV and as Parquet.
pub(super) fn table_files<const N: usize>(
    tables: [tables::Table; N],
    from: &Provenance,
) -> Result<Vec<(String, Vec<u8>)>, ReportError> {
    let mut files = Vec::new();
    for table in tables {
        let name = table.name;
        let fault = |error: polars::prelude::PolarsError| ReportError::Table {
            name,
            problem: error.to_string(),
        };
        files.push((format!("{name}.csv"), table.csv().map_err(fault)?));
        files.push((format!("{name}.parquet"), table.parquet(from).map_err(fault)?));
    }
    Ok(files)
}

/// Writes a report into a folder: all files beside their places first, then each renamed
/// (see [`crate::staging`]). An interrupted run leaves every earlier file whole.
///
/// # Errors
/// [`ReportError`] if a file cannot be made, written or renamed.
pub fn write_all(folder: &Path, result: &PlanResult) -> Result<(), ReportError> {
    write_files(folder, &files(result)?)
}

/// Writes files into a folder as [`write_all`] does.
///
/// # Errors
/// [`ReportError`] if a file cannot be written or renamed.
pub fn write_files(folder: &Path, files: &[(String, Vec<u8>)]) -> Result<(), ReportError> {
    let files: Vec<(String, &[u8])> =
        files.iter().map(|(name, bytes)| (name.clone(), bytes.as_slice())).collect();
    crate::staging::write_files(folder, &files)
        .map_err(|(path, cause)| ReportError::Write { path, cause })
}
