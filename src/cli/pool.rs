//! `nightpool pool`: light density against distance from the shower axis.

use clap::{Args, ValueEnum};
use nalgebra::Vector3;
use rayon::prelude::*;

use crate::atmosphere::{Atmosphere, Extinction, TransmissionTable};
use crate::light::collect::pool::{PoolRequest, pool_density};
use crate::light::{
    Detector, LightModel, LightSettings, ShowerLight, View, column::Transmission, parts,
};
use crate::numerics::{Stage, Stream};
use crate::shower::profile::{DevelopmentTable, EmitterTable};
use crate::shower::{Direction, Primary, Species};
use crate::units;

use super::rows::{Format, written};
use super::{Failure, print};

/// Slabs of the fast engine.
const SLABS: usize = 48;
/// Directions about the axis over which densities are averaged.
const AZIMUTHS: u32 = 12;

/// Which engine makes the light.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub(super) enum EngineChoice {
    /// Profiles and tables: microseconds a shower.
    Profile,
    /// Particle by particle: seconds a shower at 1 TeV.
    Cascade,
}

/// On or off.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub(super) enum Switch {
    On,
    Off,
}

pub(super) fn quantity<T>(parsed: Result<T, units::QuantityError>) -> Result<T, String> {
    parsed.map_err(|error| error.to_string())
}

/// Reads `EAST,NORTH,UP`.
fn field(text: &str) -> Result<[f64; 3], String> {
    let parts: Vec<f64> = quantity(text.split(',').map(units::field_ut).collect::<Result<_, _>>())?;
    parts.try_into().map_err(|_| "write three components: EAST,NORTH,UP".to_owned())
}

/// Arguments of `pool`.
#[derive(Debug, Args)]
pub struct PoolArguments {
    /// Atmosphere: a name, `model:LATITUDE,LONGITUDE,MONTH`, or a CSV file.
    #[arg(long, default_value = "us1976")]
    atmosphere: String,
    /// Altitude of the observer.
    #[arg(long, default_value = "2200m", value_parser = |text: &str| quantity(units::length_m(text)))]
    observer: f64,
    /// Primary particle.
    #[arg(long, default_value = "gamma")]
    primary: Species,
    /// Its total energy.
    #[arg(long, default_value = "1TeV", value_parser = |text: &str| quantity(units::energy_gev(text)))]
    energy: f64,
    /// Zenith angle it comes from.
    #[arg(long, default_value = "0deg", value_parser = |text: &str| quantity(units::angle_rad(text)))]
    zenith: f64,
    /// Azimuth it comes from, north through east.
    #[arg(long, default_value = "0deg", value_parser = |text: &str| quantity(units::angle_rad(text)))]
    azimuth: f64,
    /// Wavelengths counted.
    #[arg(long, default_value = "300nm..600nm", value_parser = |text: &str| quantity(units::band_nm(text)))]
    band: (f64, f64),
    /// Extinction by molecules, aerosol (0.04 at 550 nm) and ozone.
    #[arg(long, default_value = "on")]
    extinction: Switch,
    /// Magnetic field EAST,NORTH,UP.
    #[arg(long, default_value = "0uT,0uT,0uT", value_parser = field, allow_hyphen_values = true)]
    field: [f64; 3],
    /// Distances from the axis, in the plane across it.
    #[arg(long, value_delimiter = ',', default_value = "5m,25m,50m,75m,100m,125m,150m,200m,250m",
          value_parser = |text: &str| quantity(units::length_m(text)))]
    distance: Vec<f64>,
    /// One direction on the ground from the core (north through east) instead of the mean of all.
    #[arg(long, value_parser = |text: &str| quantity(units::angle_rad(text)))]
    bearing: Option<f64>,
    /// Light engine.
    #[arg(long, default_value = "profile")]
    engine: EngineChoice,
    /// Number of showers.
    #[arg(long, default_value_t = 200, value_parser = clap::value_parser!(u64).range(2..=1_000_000))]
    showers: u64,
    /// Seed of the random streams.
    #[arg(long, default_value_t = 1)]
    seed: u64,
    /// How to print.
    #[arg(long, default_value = "table")]
    format: Format,
}

/// Prints the densities.
pub(super) fn run(arguments: &PoolArguments) -> Result<(), Failure> {
    check(arguments)?;
    let air = Atmosphere::named_or_file(&arguments.atmosphere)
        .map_err(|error| Failure::Input(format!("--atmosphere: {error}")))?;
    let table = TransmissionTable::new(&Extinction::default(), &air, arguments.observer);
    let through = |emission: f64, zenith: f64, nm: f64| match arguments.extinction {
        Switch::On => table.transmission(emission, zenith, nm),
        Switch::Off => 1.0,
    };
    let rows = match arguments.engine {
        EngineChoice::Profile => profile(arguments, &air, &through),
        EngineChoice::Cascade => cascade(arguments, &air, &through),
    };
    print(&text(arguments, &rows))
}

fn check(arguments: &PoolArguments) -> Result<(), Failure> {
    let wrong = |message: &str| Err(Failure::Input(message.to_owned()));
    if !(5.0..=1e5).contains(&arguments.energy) {
        return wrong("--energy must lie between 5 GeV and 100 TeV");
    }
    if !(0.0..=units::radians(70.0)).contains(&arguments.zenith) {
        return wrong("--zenith must lie between 0 and 70 deg");
    }
    if !(0.0..=8_000.0).contains(&arguments.observer) {
        return wrong("--observer must lie between 0 and 8 km");
    }
    if arguments.distance.iter().any(|distance| !(0.0..=1_500.0).contains(distance)) {
        return wrong("--distance must lie between 0 and 1500 m");
    }
    if arguments.band.0 < 250.0 || arguments.band.1 > 900.0 {
        return wrong("--band must lie between 250 and 900 nm");
    }
    Ok(())
}

fn primary(arguments: &PoolArguments) -> Primary {
    let direction = Direction { zenith_rad: arguments.zenith, azimuth_rad: arguments.azimuth };
    Primary { species: arguments.primary, energy_gev: arguments.energy, direction }
}

fn cascade(
    arguments: &PoolArguments,
    air: &Atmosphere,
    through: &Transmission<'_>,
) -> Vec<[f64; 3]> {
    let request = PoolRequest {
        primary: primary(arguments),
        atmosphere: air,
        transmission: through,
        observer_altitude_m: arguments.observer,
        field_ut: Vector3::from(arguments.field),
        detector: Detector { name: "photons", band_nm: arguments.band, efficiency: &|_| 1.0 },
        distances_m: &arguments.distance,
        bearing_rad: arguments.bearing,
        showers: arguments.showers,
        seed: arguments.seed,
    };
    pool_density(&request).summary()
}

/// Mean, error of the mean and RMS between showers at each distance, by the fast engine.
fn profile(
    arguments: &PoolArguments,
    air: &Atmosphere,
    through: &Transmission<'_>,
) -> Vec<[f64; 3]> {
    let primary = primary(arguments);
    let field = Vector3::from(arguments.field);
    let emitters = EmitterTable::shipped().expect("the table that ships is whole");
    let developments = DevelopmentTable::shipped().expect("the table that ships is whole");
    let settings = LightSettings {
        atmosphere: air,
        transmission: through,
        observer_altitude_m: arguments.observer,
        zenith_rad: arguments.zenith,
        transverse_field_ut: field.cross(&primary.direction.to_source()).norm(),
        emitters: &emitters,
        slabs: SLABS,
    };
    let detector = Detector { name: "photons", band_nm: arguments.band, efficiency: &|_| 1.0 };
    let model = LightModel::new(&settings, &[detector]);
    let bearings: Vec<f64> = match arguments.bearing {
        Some(bearing) => vec![bearing],
        None => (0..AZIMUTHS)
            .map(|turn| core::f64::consts::TAU * f64::from(turn) / f64::from(AZIMUTHS))
            .collect(),
    };
    let to_source = primary.direction.to_source();
    let showers: Vec<Vec<f64>> = (0..arguments.showers)
        .into_par_iter()
        .map(|shower| {
            let mut stream = Stream::keyed(arguments.seed, Stage::Shower, &[shower]);
            let made = parts(&primary, field, &model, &developments, &mut stream);
            let light = ShowerLight::new(&model, primary.direction, field, made);
            let mut view = View::default();
            let mut density = |distance: f64, bearing: f64| {
                let ground = Vector3::new(bearing.sin(), bearing.cos(), 0.0);
                let across = ground - to_source * ground.dot(&to_source);
                light.view(0, &(across.normalize() * distance), &mut view);
                view.density_m2
            };
            let mean = |distance: &f64| {
                bearings.iter().map(|bearing| density(*distance, *bearing)).sum::<f64>()
                    / bearings.len() as f64
            };
            arguments.distance.iter().map(mean).collect()
        })
        .collect();
    let count = showers.len() as f64;
    let statistics = |place: usize| {
        let values = showers.iter().map(|shower| shower[place]);
        let mean = values.clone().sum::<f64>() / count;
        let variance = values.map(|value| (value - mean).powi(2)).sum::<f64>() / (count - 1.0);
        [mean, (variance / count).sqrt(), variance.sqrt()]
    };
    (0..arguments.distance.len()).map(statistics).collect()
}

const COLUMNS: [&str; 4] = ["distance_m", "density_m2", "density_error_m2", "density_rms_m2"];

fn text(arguments: &PoolArguments, rows: &[[f64; 3]]) -> String {
    let rows = arguments.distance.iter().zip(rows);
    let rows: Vec<Vec<f64>> =
        rows.map(|(distance, [mean, error, rms])| vec![*distance, *mean, *error, *rms]).collect();
    written(arguments.format, &COLUMNS, &rows)
}
