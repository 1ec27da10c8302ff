//! Makes the fast engine's tables: `cargo run --release --example calibrate -- FOLDER SEED SCALE`.

use std::path::PathBuf;

use nightpool::atmosphere::Atmosphere;
use nightpool::shower::calibrate::{Calibration, CalibrationSettings, files};

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let mut words = std::env::args().skip(1);
    let folder = PathBuf::from(words.next().unwrap_or_else(|| ".".into()));
    let seed = words.next().map_or(Ok(1), |word| word.parse())?;
    let scale = words.next().map_or(Ok(1.0), |word| word.parse())?;
    let atmosphere = Atmosphere::us1976();
    let settings = CalibrationSettings::shipped(seed, scale);
    let calibration = Calibration::new(&atmosphere, &settings);
    files::write(&calibration, &settings, atmosphere.name(), &folder)?;
    Ok(())
}
