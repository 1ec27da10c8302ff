//! The files that ship: emitters as Parquet, ages and development as CSV with provenance.

use std::fmt::Write as _;
use std::io;
use std::path::Path;

use polars::prelude::{Column, DataFrame, ParquetCompression, ParquetWriter};

use super::maker::{Calibration, CalibrationSettings};
use super::showers::LibraryShower;
use crate::shower::cascade::CascadeSpecies;

/// Writes `emitters.parquet`, `emitter_ages.csv`, `development.csv` and the library
/// (`showers.parquet`, `profiles.parquet`) into a folder.
///
/// # Errors
/// What the file system or the Parquet writer says.
pub fn write(
    calibration: &Calibration,
    settings: &CalibrationSettings,
    atmosphere: &str,
    folder: &Path,
) -> io::Result<()> {
    let header = provenance(settings, atmosphere);
    std::fs::write(folder.join("emitter_ages.csv"), ages_csv(calibration, &header))?;
    std::fs::write(folder.join("development.csv"), development_csv(calibration, &header))?;
    let emitters = emitter_frame(calibration).map_err(io::Error::other)?;
    parquet(emitters, &folder.join("emitters.parquet"))?;
    library(&calibration.library, folder)
}

/// Writes the library: `showers.parquet` has a row a shower, `profiles.parquet` their bins one
/// after another.
///
/// # Errors
/// What the file system or the Parquet writer says.
pub fn library(showers: &[LibraryShower], folder: &Path) -> io::Result<()> {
    let column = |name: &str, value: &dyn Fn(&LibraryShower) -> f64| {
        let values: Vec<f32> = showers.iter().map(|shower| rounded(value(shower) as f32)).collect();
        Column::new(name.into(), values)
    };
    let columns = vec![
        column("electron", &|s| f64::from(u8::from(s.species != CascadeSpecies::Gamma))),
        column("energy_gev", &|s| s.energy_gev),
        column("max_g_cm2", &|s| s.max_g_cm2),
        column("length_g_cm2", &|s| s.length_g_cm2),
        column("bins", &|s| s.particles.len() as f64),
    ];
    let frame = DataFrame::new(showers.len(), columns).map_err(io::Error::other)?;
    parquet(frame, &folder.join("showers.parquet"))?;
    let all = showers.iter().flat_map(|shower| &shower.particles);
    let particles: Vec<f32> = all.map(|size| rounded(*size)).collect();
    let rows = particles.len();
    let columns = vec![Column::new("particles".into(), particles)];
    let frame = DataFrame::new(rows, columns).map_err(io::Error::other)?;
    parquet(frame, &folder.join("profiles.parquet"))
}

/// A number to eleven binary digits (2.5e-4), so that the files pack to two thirds.
fn rounded(value: f32) -> f32 {
    f32::from_bits(value.to_bits().wrapping_add(0x1000) & !0x1FFF)
}

fn parquet(mut frame: DataFrame, path: &Path) -> io::Result<()> {
    let mut bytes = Vec::new();
    ParquetWriter::new(&mut bytes)
        .with_compression(ParquetCompression::Zstd(None))
        .finish(&mut frame)
        .map_err(io::Error::other)?;
    std::fs::write(path, bytes)
}

fn provenance(settings: &CalibrationSettings, atmosphere: &str) -> String {
    let runs = |list: &[(f64, u64)]| {
        list.iter().map(|(e, n)| format!("{n} x {e} GeV")).collect::<Vec<_>>().join(", ")
    };
    format!(
        "# Made by the reference cascade of this program, version {}, seed {}, atmosphere {},\n\
         # vertical, no magnetic field, particles above {} GeV.\n\
         # Emitters from photon showers: {}; age windows +-{}.\n\
         # Development from photons and electrons: {}; rows of 0 showers by theory.\n",
        env!("CARGO_PKG_VERSION"),
        settings.seed,
        atmosphere,
        settings.floor_gev,
        runs(&settings.emitter_runs),
        settings.window,
        runs(&settings.development_runs),
    )
}

fn ages_csv(calibration: &Calibration, header: &str) -> String {
    let mut text = format!(
        "{header}# fraction: track length above the floor over that of the fitted profiles.\n\
         energy_gev,age,fraction,samples\n"
    );
    let table = &calibration.emitters;
    let ages = table.ages().len();
    for (place, node) in table.nodes.iter().enumerate() {
        let energy = table.energies_gev[place / ages];
        let (age, count) = (node.age, node.emitters.len());
        let _ = writeln!(text, "{energy},{age},{:.5},{count}", node.fraction);
    }
    text
}

fn development_csv(calibration: &Calibration, header: &str) -> String {
    let mut text = format!(
        "{header}# u = ln(depth of maximum after the start / g cm-2), v = ln(scale length / g cm-2),\n\
         # w = ln(track length per energy / g cm-2 GeV-1): means and covariances.\n\
         species,energy_gev,showers,start_g_cm2,u,v,w,uu,uv,uw,vv,vw,ww\n"
    );
    for row in &calibration.development {
        let name = format!("{:?}", row.species).to_lowercase();
        let _ =
            write!(text, "{name},{},{},{:.3}", row.energy_gev, row.showers, row.mean_start_g_cm2);
        for value in row.mean.iter().chain(&row.covariance) {
            let _ = write!(text, ",{value:.6}");
        }
        text.push('\n');
    }
    text
}

fn emitter_frame(calibration: &Calibration) -> Result<DataFrame, polars::error::PolarsError> {
    let nodes = &calibration.emitters.nodes;
    let column = |name: &str, value: &dyn Fn(&crate::shower::profile::Emitter) -> f32| {
        let values: Vec<f32> =
            nodes.iter().flat_map(|node| &node.emitters).map(|e| rounded(value(e))).collect();
        Column::new(name.into(), values)
    };
    let rows = nodes.iter().map(|node| node.emitters.len()).sum();
    let ages: Vec<f32> = nodes
        .iter()
        .flat_map(|node| std::iter::repeat_n(node.age as f32, node.emitters.len()))
        .collect();
    DataFrame::new(
        rows,
        vec![
            Column::new("age".into(), ages),
            column("energy_gev", &|e| e.energy_gev),
            column("angle_x_rad", &|e| e.angle_rad[0]),
            column("angle_y_rad", &|e| e.angle_rad[1]),
            column("offset_x_g_cm2", &|e| e.offset_g_cm2[0]),
            column("offset_y_g_cm2", &|e| e.offset_g_cm2[1]),
            column("lag_g_cm2", &|e| e.lag_g_cm2),
            column("angle_lever", &|e| e.angle_lever),
            column("offset_lever", &|e| e.offset_lever),
        ],
    )
}
