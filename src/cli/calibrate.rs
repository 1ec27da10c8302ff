//! `nightpool calibrate`: makes the fast engine's tables with the cascade.

use std::path::PathBuf;

use clap::{Args, ValueEnum};
use nalgebra::Vector3;

use crate::atmosphere::Atmosphere;
use crate::shower::calibrate::showers::library;
use crate::shower::calibrate::{Calibration, CalibrationSettings, files};
use crate::shower::cascade::{Cuts, Environment};

use super::{Failure, print};

/// Arguments of `calibrate`.
#[derive(Debug, Args)]
pub struct CalibrateArguments {
    /// Folder for the tables: emitters, developments, profiles.
    #[arg(long, value_name = "DIR")]
    out: PathBuf,
    /// Seed of the random streams.
    #[arg(long, default_value_t = 1)]
    seed: u64,
    /// Number of showers, relative to the tables that ship: 1 takes some minutes.
    #[arg(long, default_value_t = 0.05, value_parser = scale)]
    scale: f64,
    /// Which tables.
    #[arg(long, default_value = "all")]
    tables: Which,
}

/// Which tables are made.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
enum Which {
    /// All of them.
    All,
    /// The library of longitudinal profiles alone.
    Library,
}

fn scale(text: &str) -> Result<f64, String> {
    let number: f64 = text.parse().map_err(|_| "write a number".to_owned())?;
    if (0.001..=100.0).contains(&number) {
        return Ok(number);
    }
    Err("write a number from 0.001 to 100".into())
}

/// Makes the tables.
pub(super) fn run(arguments: &CalibrateArguments) -> Result<(), Failure> {
    let folder = &arguments.out;
    let fault = |problem: String| Failure::Run(format!("{}: {problem}", folder.display()));
    std::fs::create_dir_all(folder).map_err(|error| {
        Failure::Input(format!("--out {}: cannot be made: {error}", folder.display()))
    })?;
    let atmosphere = Atmosphere::us1976();
    let settings = CalibrationSettings::shipped(arguments.seed, arguments.scale);
    if arguments.tables == Which::All {
        let calibration = Calibration::new(&atmosphere, &settings);
        files::write(&calibration, &settings, atmosphere.name(), folder)
            .map_err(|error| fault(error.to_string()))?;
    }
    let cuts = Cuts::at_threshold(settings.floor_gev);
    let environment = Environment::new(&atmosphere, 0.0, Vector3::zeros(), cuts);
    files::library(&library(&environment, &settings), folder)
        .map_err(|error| fault(error.to_string()))?;
    print(&format!("tables: {}\n", folder.display()))
}
