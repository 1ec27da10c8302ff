//! `nightpool air`: what atmospheres do to particles and light.

use std::io::Write;
use std::path::{Path, PathBuf};

use clap::{Args, ValueEnum};

use crate::atmosphere::{Atmosphere, Extinction, slant};
use crate::light::cherenkov::{Thresholds, largest_emission_angle_rad};
use crate::report::charts::{AirCurve, air_chart};
use crate::report::{check_destination, write_files};
use crate::units;

use super::pool::{Switch, quantity};
use super::rows::{Cell, Format, written_cells};
use super::{Failure, print};

/// Highest altitude of the chart, m: Cherenkov light comes from below.
const CHART_TOP_M: f64 = 30_000.0;
const CHART_STEP_M: f64 = 250.0;
/// Beyond this zenith angle straight rays are approximate.
const STATED_TO_DEG: f64 = 70.0;

/// Arguments of `air`.
#[derive(Debug, Args)]
pub struct AirArguments {
    /// Atmospheres: names, `model:LATITUDE,LONGITUDE,MONTH`, or CSV files of altitude, pressure and
    /// temperature.
    #[arg(required = true)]
    atmosphere: Vec<String>,
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
    /// Altitude of the observer of that light; without `--emission`, adds range and depth along the
    /// ray that the observer sees at the zenith angle.
    #[arg(long, value_parser = |text: &str| quantity(units::length_m(text)))]
    observer: Option<f64>,
    /// Zenith angle at which the observer sees it.
    #[arg(long, default_value = "0deg", value_parser = |text: &str| quantity(units::angle_rad(text)))]
    zenith: f64,
    /// Scattering by molecules.
    #[arg(long, default_value = "on")]
    rayleigh: Switch,
    /// Attenuation by aerosol.
    #[arg(long, default_value = "on")]
    aerosol: Switch,
    /// Absorption by ozone: of the profile where it gives ozone, else of the US standard; always of
    /// the US standard; or none.
    #[arg(long, default_value = "profile")]
    ozone: OzoneChoice,
    /// Vertical aerosol optical depth at 550 nm above the observer.
    #[arg(long, default_value_t = 0.04)]
    aerosol_depth: f64,
    /// Angstrom exponent of the aerosol.
    #[arg(long, default_value_t = 1.3)]
    angstrom: f64,
    /// Scale height of the aerosol above the observer.
    #[arg(long, default_value = "1200m", value_parser = |text: &str| quantity(units::length_m(text)))]
    aerosol_height: f64,
    /// Carbon dioxide in parts per million, for the refractivity.
    #[arg(long, default_value_t = 450.0)]
    co2: f64,
    /// Draw density and refractivity of all atmospheres against altitude, beside US 1976.
    #[arg(long, value_name = "FILE.svg")]
    plot: Option<PathBuf>,
    /// How to print.
    #[arg(long, default_value = "table")]
    format: Format,
}

/// Which ozone absorbs.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
enum OzoneChoice {
    Profile,
    Standard,
    Off,
}

/// Prints the table, and draws the chart if asked to.
pub(super) fn run(arguments: &AirArguments) -> Result<(), Failure> {
    check(arguments)?;
    let airs = atmospheres(arguments)?;
    let text = match (arguments.emission, arguments.observer) {
        (Some(emission), Some(observer)) => transmissions(arguments, &airs, emission, observer),
        _ => levels(arguments, &airs),
    };
    if let Some(path) = &arguments.plot {
        draw(path, &airs, arguments.wavelength[0])?;
        say(&format!("drew {}", path.display()));
    }
    print(&text)
}

/// Writes a line to standard error; nobody is left to tell if that is closed.
fn say(line: &str) {
    let _ = writeln!(std::io::stderr(), "{line}");
}

fn atmospheres(arguments: &AirArguments) -> Result<Vec<Atmosphere>, Failure> {
    let prepared = |name: &String| {
        let air =
            Atmosphere::named_or_file(name).map_err(|error| Failure::Input(error.to_string()))?;
        let air = air.with_co2_ppm(arguments.co2);
        Ok(if arguments.ozone == OzoneChoice::Standard { air.with_standard_ozone() } else { air })
    };
    arguments.atmosphere.iter().map(prepared).collect()
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
        within("an altitude in m", *altitude, -500.0, 120_000.0)?;
    }
    for wavelength in &arguments.wavelength {
        within("a wavelength in nm", *wavelength, 250.0, 900.0)?;
    }
    // Rounded: 80 degrees in radians and back is a little more.
    let zenith_deg = (1e6 * units::degrees(arguments.zenith)).round() / 1e6;
    within("--zenith in deg", zenith_deg, 0.0, 80.0)?;
    within("--aerosol-depth", arguments.aerosol_depth, 0.0, 5.0)?;
    within("--angstrom", arguments.angstrom, -1.0, 4.0)?;
    within("--aerosol-height in m", arguments.aerosol_height, 10.0, 20_000.0)?;
    within("--co2 in parts per million", arguments.co2, 0.0, 2_000.0)?;
    if let (None, Some(observer)) = (arguments.emission, arguments.observer)
        && let Some(altitude) = arguments.altitude.iter().find(|altitude| **altitude < observer)
    {
        let message = format!("--altitude {altitude} m is below --observer {observer} m");
        return Err(Failure::Input(message));
    }
    if let (Some(emission), Some(observer)) = (arguments.emission, arguments.observer)
        && emission <= observer
    {
        let message = format!("--emission {emission} m is not above --observer {observer} m");
        return Err(Failure::Input(message));
    }
    if zenith_deg > STATED_TO_DEG {
        say(&format!(
            "warning: rays are straight; beyond {STATED_TO_DEG} deg light bends by more than a tenth \
             of a pixel (0.034 deg at 80 deg)"
        ));
    }
    match &arguments.plot {
        Some(path) => check_plot(path),
        None => Ok(()),
    }
}

fn check_plot(path: &Path) -> Result<(), Failure> {
    if path.file_name().is_none() || path.is_dir() {
        let message = format!("--plot {}: is a folder; name a file", path.display());
        return Err(Failure::Input(message));
    }
    Ok(check_destination(folder(path))?)
}

fn folder(path: &Path) -> &Path {
    match path.parent() {
        Some(parent) if !parent.as_os_str().is_empty() => parent,
        _ => Path::new("."),
    }
}

/// Puts the name of each row's atmosphere before its numbers if there are several.
fn with_names(airs: &[Atmosphere], rows: impl Fn(&Atmosphere) -> Vec<Vec<f64>>) -> Vec<Vec<Cell>> {
    let cells = |air: &Atmosphere| {
        let name = (airs.len() > 1).then(|| Cell::Text(air.name().to_owned()));
        let row = move |row: Vec<f64>| {
            name.clone().into_iter().chain(row.into_iter().map(Cell::Number)).collect()
        };
        rows(air).into_iter().map(row).collect::<Vec<Vec<Cell>>>()
    };
    airs.iter().flat_map(cells).collect()
}

fn heads<'a>(airs: &[Atmosphere], columns: &[&'a str]) -> Vec<&'a str> {
    let name = (airs.len() > 1).then_some("atmosphere");
    name.into_iter().chain(columns.iter().copied()).collect()
}

fn levels(arguments: &AirArguments, airs: &[Atmosphere]) -> String {
    let mut columns = vec![
        "altitude_m",
        "temperature_k",
        "pressure_pa",
        "density_kg_m3",
        "depth_g_cm2",
        "refractivity",
        "cherenkov_angle_deg",
        "electron_threshold_mev",
        "muon_threshold_gev",
        "pion_threshold_gev",
        "proton_threshold_gev",
    ];
    if arguments.observer.is_some() {
        columns.extend(["slant_range_m", "slant_depth_g_cm2"]);
    }
    let row = |air: &Atmosphere, altitude: f64| {
        let refractivity = air.refractivity(altitude, arguments.wavelength[0]);
        let thresholds = Thresholds::new(refractivity);
        let mut row = vec![
            altitude,
            air.temperature_k(altitude),
            air.pressure_pa(altitude),
            air.density_kg_m3(altitude),
            air.depth_g_cm2(altitude),
            refractivity,
            units::degrees(largest_emission_angle_rad(refractivity)),
            1e3 * thresholds.electron_gev,
            thresholds.muon_gev,
            thresholds.pion_gev,
            thresholds.proton_gev,
        ];
        if let Some(observer) = arguments.observer {
            row.push(slant::range_m(altitude, observer, arguments.zenith));
            row.push(air.slant_depth_g_cm2(altitude, observer, arguments.zenith));
        }
        row
    };
    let rows = with_names(airs, |air| arguments.altitude.iter().map(|h| row(air, *h)).collect());
    written_cells(arguments.format, &heads(airs, &columns), &rows)
}

fn transmissions(
    arguments: &AirArguments,
    airs: &[Atmosphere],
    emission_m: f64,
    observer_m: f64,
) -> String {
    let extinction = Extinction {
        rayleigh: arguments.rayleigh == Switch::On,
        aerosol: arguments.aerosol == Switch::On,
        ozone: arguments.ozone != OzoneChoice::Off,
        aerosol_depth_550nm: arguments.aerosol_depth,
        angstrom_exponent: arguments.angstrom,
        aerosol_scale_height_m: arguments.aerosol_height,
    };
    let row = |air: &Atmosphere, nm: f64| {
        let zenith = arguments.zenith;
        let depths = extinction.optical_depths(air, emission_m, observer_m, zenith, nm);
        let parts = [depths.rayleigh, depths.aerosol, depths.ozone].map(|depth| (-depth).exp());
        vec![nm, parts[0], parts[1], parts[2], parts.iter().product()]
    };
    let columns = ["wavelength_nm", "rayleigh", "aerosol", "ozone", "total"];
    let rows = with_names(airs, |air| arguments.wavelength.iter().map(|w| row(air, *w)).collect());
    written_cells(arguments.format, &heads(airs, &columns), &rows)
}

fn draw(path: &Path, airs: &[Atmosphere], wavelength_nm: f64) -> Result<(), Failure> {
    let standard = Atmosphere::us1976();
    let count = (CHART_TOP_M / CHART_STEP_M) as usize;
    let altitudes: Vec<f64> = (0..=count).map(|i| CHART_STEP_M * i as f64).collect();
    let curve = |air: &Atmosphere| {
        let by = |value: &dyn Fn(f64) -> f64| altitudes.iter().map(|h| value(*h)).collect();
        let name = Path::new(air.name()).file_stem().map(|stem| stem.to_string_lossy());
        let file = air.name().ends_with(".csv");
        AirCurve {
            name: name.filter(|_| file).map_or_else(|| air.name().into(), Into::into),
            altitude_km: by(&|h| 1e-3 * h),
            density_ratio: by(&|h| air.density_kg_m3(h) / standard.density_kg_m3(h)),
            refractivity_difference: by(&|h| {
                1e6 * (air.refractivity(h, wavelength_nm) - standard.refractivity(h, wavelength_nm))
            }),
        }
    };
    let curves: Vec<AirCurve> = airs.iter().map(curve).collect();
    let svg = air_chart(&curves, "US 1976", wavelength_nm);
    let name = path.file_name().map(|name| name.to_string_lossy().into_owned()).unwrap_or_default();
    Ok(write_files(folder(path), &[(name, svg.into_bytes())])?)
}
