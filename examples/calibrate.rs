//! Makes the fast engine's tables: `cargo run --release --example calibrate -- FOLDER SEED SCALE`;
//! a fourth word `library` makes the library of profiles alone.

use std::path::PathBuf;

use nalgebra::Vector3;
use nightpool::atmosphere::Atmosphere;
use nightpool::shower::calibrate::showers::library;
use nightpool::shower::calibrate::{Calibration, CalibrationSettings, files};
use nightpool::shower::cascade::{Cuts, Environment};

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let mut words = std::env::args().skip(1);
    let folder = PathBuf::from(words.next().unwrap_or_else(|| ".".into()));
    let seed = words.next().map_or(Ok(1), |word| word.parse())?;
    let scale = words.next().map_or(Ok(1.0), |word| word.parse())?;
    let atmosphere = Atmosphere::us1976();
    let settings = CalibrationSettings::shipped(seed, scale);
    if words.next().as_deref() == Some("library") {
        let cuts = Cuts::at_threshold(settings.floor_gev);
        let environment = Environment::new(&atmosphere, 0.0, Vector3::zeros(), cuts);
        files::library(&library(&environment, &settings), &folder)?;
        return Ok(());
    }
    let calibration = Calibration::new(&atmosphere, &settings);
    files::write(&calibration, &settings, atmosphere.name(), &folder)?;
    Ok(())
}
