//! `nightpool air`: what an atmosphere does to particles and light.

use std::fmt::Write;

use clap::Args;
use serde_json::{Map, Value};

use crate::atmosphere::{Atmosphere, Extinction};
use crate::consts::ELECTRON_MASS_GEV;
use crate::light::cherenkov::{largest_emission_angle_rad, threshold_energy_gev};
use crate::units;

use super::pool::{Format, quantity};
use super::{Failure, print};

/// Arguments of `air`.
#[derive(Debug, Args)]
pub struct AirArguments {
    /// Atmosphere: a name, or a CSV file of altitude, pressure and temperature.
    atmosphere: String,
    /// Altitudes above the sea.
    #[arg(long, value_delimiter = ',', default_value = "0m,2200m,5km,10km,20km",
          value_parser = |text: &str| quantity(units::length_m(text)))]
    altitude: Vec<f64>,
    /// Wavelengths; the first is used for the refractivity.
    #[arg(long, value_delimiter = ',', default_value = "400nm",
          value_parser = |text: &str| quantity(units::wavelength_nm(text)))]
    wavelength: Vec<f64>,
    /// Altitude at which light is emitted: prints transmissions to the observer.
    #[arg(long, requires = "observer", value_parser = |text: &str| quantity(units::length_m(text)))]
    emission: Option<f64>,
    /// Altitude of the observer of that light.
    #[arg(long, requires = "emission", value_parser = |text: &str| quantity(units::length_m(text)))]
    observer: Option<f64>,
    /// Zenith angle at which the observer sees it.
    #[arg(long, default_value = "0deg", value_parser = |text: &str| quantity(units::angle_rad(text)))]
    zenith: f64,
    /// Vertical aerosol optical depth at 550 nm above the observer.
    #[arg(long, default_value_t = 0.04)]
    aerosol_depth: f64,
    /// Angstrom exponent of the aerosol.
    #[arg(long, default_value_t = 1.3)]
    angstrom: f64,
    /// Scale height of the aerosol above the observer.
    #[arg(long, default_value = "1200m", value_parser = |text: &str| quantity(units::length_m(text)))]
    aerosol_height: f64,
    /// How to print.
    #[arg(long, default_value = "table")]
    format: Format,
}

/// Prints the table.
pub(super) fn run(arguments: &AirArguments) -> Result<(), Failure> {
    check(arguments)?;
    let air = atmosphere(&arguments.atmosphere)?;
    let text = match (arguments.emission, arguments.observer) {
        (Some(emission), Some(observer)) => transmissions(arguments, &air, emission, observer),
        _ => levels(arguments, &air),
    };
    print(&text)
}

fn atmosphere(name: &str) -> Result<Atmosphere, Failure> {
    let input = |message: String| Failure::Input(message);
    if !name.contains(['.', '/']) {
        return Atmosphere::named(name).map_err(|error| input(error.to_string()));
    }
    let text = std::fs::read_to_string(name).map_err(|error| input(format!("{name}: {error}")))?;
    Atmosphere::from_text(name, &text).map_err(|error| input(error.to_string()))
}

fn check(arguments: &AirArguments) -> Result<(), Failure> {
    let within = |what: &str, value: f64, low: f64, high: f64| {
        if (low..=high).contains(&value) {
            Ok(())
        } else {
            Err(Failure::Input(format!("{what} is {value}; allowed: {low} to {high}")))
        }
    };
    for altitude in arguments.altitude.iter().chain(&arguments.emission).chain(&arguments.observer)
    {
        within("an altitude in m", *altitude, -500.0, 110_000.0)?;
    }
    for wavelength in &arguments.wavelength {
        within("a wavelength in nm", *wavelength, 250.0, 900.0)?;
    }
    within("--zenith in rad", arguments.zenith, 0.0, units::radians(80.0))?;
    within("--aerosol-depth", arguments.aerosol_depth, 0.0, 5.0)?;
    within("--angstrom", arguments.angstrom, -1.0, 4.0)?;
    within("--aerosol-height in m", arguments.aerosol_height, 10.0, 20_000.0)
}

fn levels(arguments: &AirArguments, air: &Atmosphere) -> String {
    let columns = [
        "altitude_m",
        "temperature_k",
        "pressure_pa",
        "density_kg_m3",
        "depth_g_cm2",
        "refractivity",
        "cherenkov_angle_deg",
        "electron_threshold_mev",
    ];
    let row = |&altitude: &f64| {
        let refractivity = air.refractivity(altitude, arguments.wavelength[0]);
        vec![
            altitude,
            air.temperature_k(altitude),
            air.pressure_pa(altitude),
            air.density_kg_m3(altitude),
            air.depth_g_cm2(altitude),
            refractivity,
            units::degrees(largest_emission_angle_rad(refractivity)),
            1e3 * threshold_energy_gev(refractivity, ELECTRON_MASS_GEV),
        ]
    };
    written(arguments.format, &columns, &arguments.altitude.iter().map(row).collect::<Vec<_>>())
}

fn transmissions(
    arguments: &AirArguments,
    air: &Atmosphere,
    emission_m: f64,
    observer_m: f64,
) -> String {
    let extinction = Extinction {
        aerosol_depth_550nm: arguments.aerosol_depth,
        angstrom_exponent: arguments.angstrom,
        aerosol_scale_height_m: arguments.aerosol_height,
        ..Extinction::default()
    };
    let row = |&nm: &f64| {
        let zenith = arguments.zenith;
        let depths = extinction.optical_depths(air, emission_m, observer_m, zenith, nm);
        let parts = [depths.rayleigh, depths.aerosol, depths.ozone].map(|depth| (-depth).exp());
        vec![nm, parts[0], parts[1], parts[2], parts.iter().product()]
    };
    let columns = ["wavelength_nm", "rayleigh", "aerosol", "ozone", "total"];
    written(arguments.format, &columns, &arguments.wavelength.iter().map(row).collect::<Vec<_>>())
}

/// Rows of numbers under their columns.
pub(super) fn written(format: Format, columns: &[&str], rows: &[Vec<f64>]) -> String {
    let mut out = String::new();
    match format {
        Format::Json => {
            let object = |row: &Vec<f64>| {
                let pairs = columns.iter().zip(row);
                let map: Map<String, Value> =
                    pairs.map(|(name, value)| ((*name).to_owned(), (*value).into())).collect();
                Value::Object(map)
            };
            let _ = writeln!(out, "{:#}", Value::Array(rows.iter().map(object).collect()));
        }
        Format::Csv => {
            let _ = writeln!(out, "{}", columns.join(","));
            for row in rows {
                let cells: Vec<String> = row.iter().map(f64::to_string).collect();
                let _ = writeln!(out, "{}", cells.join(","));
            }
        }
        Format::Table => {
            let line = |cells: Vec<String>| {
                let padded: Vec<String> = cells
                    .iter()
                    .zip(columns)
                    .map(|(cell, name)| format!("{cell:>width$}", width = name.len().max(10)))
                    .collect();
                padded.join("  ")
            };
            let _ = writeln!(out, "{}", line(columns.iter().map(|c| (*c).to_owned()).collect()));
            for row in rows {
                let _ = writeln!(out, "{}", line(row.iter().map(|value| short(*value)).collect()));
            }
        }
    }
    out
}

/// Six significant digits.
fn short(value: f64) -> String {
    let size = value.abs();
    if value == 0.0 {
        return "0".into();
    }
    if (1e-2..1e6).contains(&size) {
        let digits = (5 - size.max(1e-9).log10().floor() as i32).clamp(0, 8) as usize;
        format!("{value:.digits$}")
    } else {
        format!("{value:.5e}")
    }
}
