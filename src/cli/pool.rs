//! `nightpool pool`: light density against distance from the shower axis.

use std::path::{Path, PathBuf};

use clap::{Args, ValueEnum};
use nalgebra::Vector3;
use rayon::prelude::*;

use crate::atmosphere::{Atmosphere, Extinction, TransmissionTable};
use crate::light::collect::pool::{PoolRequest, pool_density};
use crate::light::{
    Detector, LightModel, LightSettings, ShowerLight, View, column::Transmission, parts,
};
use crate::numerics::{Stage, Stream};
use crate::report::charts::{self, PoolPoint};
use crate::shower::profile::{DevelopmentTable, EmitterTable};
use crate::shower::{Direction, Primary, Species};
use crate::study::Study;
use crate::telescope::TelescopeKind;
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
    /// Photoelectrons in a telescope instead of photons per m2: STUDY.toml:KIND.
    #[arg(long, value_name = "STUDY:KIND")]
    telescope: Option<String>,
    /// How to print.
    #[arg(long, default_value = "table")]
    format: Format,
    /// Also draw mean and RMS against distance into this SVG file.
    #[arg(long, value_name = "FILE.svg")]
    plot: Option<PathBuf>,
    /// Also draw the footprint on the ground into this SVG file (fast engine).
    #[arg(long, value_name = "FILE.svg")]
    map: Option<PathBuf>,
}

/// What receives the light: photons in a band, or a telescope of a study.
struct Receiver {
    kind: Option<TelescopeKind>,
    band_nm: (f64, f64),
}

impl Receiver {
    fn of(arguments: &PoolArguments) -> Result<Self, Failure> {
        let Some(named) = &arguments.telescope else {
            return Ok(Self { kind: None, band_nm: arguments.band });
        };
        let wrong = |problem: String| Failure::Input(format!("--telescope: {problem}"));
        let Some((study, name)) = named.rsplit_once(':') else {
            return Err(wrong("write STUDY.toml:KIND".into()));
        };
        let study = Study::read(Path::new(study))?;
        let names: Vec<&str> = study.kinds.iter().map(|kind| kind.name.as_str()).collect();
        let known = names.join(", ");
        let kind = study.kinds.iter().find(|kind| kind.name == name);
        let kind = kind.ok_or_else(|| wrong(format!("no kind {name}; the study has {known}")))?;
        Ok(Self { band_nm: kind.band_nm(), kind: Some(kind.clone()) })
    }

    fn efficiency(&self, nm: f64) -> f64 {
        self.kind.as_ref().map_or(1.0, |kind| kind.efficiency(nm))
    }

    /// Collecting area, m2; one for photons.
    fn area_m2(&self) -> f64 {
        self.kind.as_ref().map_or(1.0, TelescopeKind::collecting_area_m2)
    }

    fn unit(&self) -> &'static str {
        if self.kind.is_some() { "Photoelectrons" } else { "Cherenkov photons per m\u{00b2}" }
    }
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
    let receiver = Receiver::of(arguments)?;
    let mut rows = match arguments.engine {
        EngineChoice::Profile => profile(arguments, &receiver, &air, &through),
        EngineChoice::Cascade => cascade(arguments, &receiver, &air, &through),
    };
    rows.iter_mut().flatten().for_each(|value| *value *= receiver.area_m2());
    if let Some(path) = &arguments.plot {
        let points: Vec<PoolPoint> =
            arguments.distance.iter().zip(&rows).map(|(r, [a, b, c])| [*r, *a, *b, *c]).collect();
        let name = format!("{} {} GeV", arguments.primary, arguments.energy);
        draw(path, charts::pool_chart(&name, receiver.unit(), &points))?;
    }
    if let Some(path) = &arguments.map {
        draw(path, footprint(arguments, &receiver, &air, &through))?;
    }
    print(&text(arguments, &receiver, &rows))
}

fn draw(path: &Path, svg: String) -> Result<(), Failure> {
    std::fs::write(path, svg)
        .map_err(|error| Failure::Input(format!("{}: cannot be written: {error}", path.display())))
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
    if arguments.map.is_some() && arguments.engine == EngineChoice::Cascade {
        return wrong("--map is drawn by the fast engine: leave --engine cascade out");
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
    receiver: &Receiver,
    air: &Atmosphere,
    through: &Transmission<'_>,
) -> Vec<[f64; 3]> {
    let request = PoolRequest {
        primary: primary(arguments),
        atmosphere: air,
        transmission: through,
        observer_altitude_m: arguments.observer,
        field_ut: Vector3::from(arguments.field),
        detector: Detector {
            name: "receiver",
            band_nm: receiver.band_nm,
            efficiency: &|nm| receiver.efficiency(nm),
        },
        distances_m: &arguments.distance,
        bearing_rad: arguments.bearing,
        showers: arguments.showers,
        seed: arguments.seed,
    };
    pool_density(&request).summary()
}

/// The fast engine's light tables.
fn model(
    arguments: &PoolArguments,
    receiver: &Receiver,
    air: &Atmosphere,
    through: &Transmission<'_>,
) -> LightModel {
    let primary = primary(arguments);
    let field = Vector3::from(arguments.field);
    let emitters = EmitterTable::shipped().expect("the table that ships is whole");
    let settings = LightSettings {
        atmosphere: air,
        transmission: through,
        observer_altitude_m: arguments.observer,
        zenith_rad: arguments.zenith,
        transverse_field_ut: field.cross(&primary.direction.to_source()).norm(),
        emitters: &emitters,
        slabs: SLABS,
    };
    let efficiency = |nm: f64| receiver.efficiency(nm);
    let detector =
        Detector { name: "receiver", band_nm: receiver.band_nm, efficiency: &efficiency };
    let radius_m = (receiver.area_m2() / core::f64::consts::PI).sqrt();
    LightModel::new(&settings, &[detector]).with_disc_radii_m(vec![radius_m])
}

/// Cells of a side of the footprint, and half its width, m.
const MAP_CELLS: usize = 60;
const MAP_HALF_M: f64 = 300.0;

/// The mean footprint on the ground.
fn footprint(
    arguments: &PoolArguments,
    receiver: &Receiver,
    air: &Atmosphere,
    through: &Transmission<'_>,
) -> String {
    let (primary, field) = (primary(arguments), Vector3::from(arguments.field));
    let developments = DevelopmentTable::shipped().expect("the table that ships is whole");
    let model = model(arguments, receiver, air, through);
    let step = 2.0 * MAP_HALF_M / MAP_CELLS as f64;
    let middle = |place: usize| (place as f64 + 0.5) * step - MAP_HALF_M;
    let showers: Vec<Vec<f64>> = (0..arguments.showers)
        .into_par_iter()
        .map(|shower| {
            let mut stream = Stream::keyed(arguments.seed, Stage::Shower, &[shower]);
            let made = parts(&primary, field, &model, &developments, &mut stream);
            let light = ShowerLight::new(&model, primary.direction, field, made);
            let mut view = View::default();
            let cells = 0..MAP_CELLS * MAP_CELLS;
            let value = |cell: usize| {
                let (east, north) = (middle(cell % MAP_CELLS), middle(cell / MAP_CELLS));
                light.view(0, &Vector3::new(east, north, 0.0), &mut view);
                view.density_m2 * receiver.area_m2()
            };
            cells.map(value).collect()
        })
        .collect();
    let mean = |cell: usize| showers.iter().map(|s| s[cell]).sum::<f64>() / showers.len() as f64;
    let values: Vec<f64> = (0..MAP_CELLS * MAP_CELLS).map(mean).collect();
    charts::footprint_chart(MAP_HALF_M, MAP_CELLS, &values, receiver.unit())
}

/// Mean, error of the mean and RMS between showers at each distance, by the fast engine.
fn profile(
    arguments: &PoolArguments,
    receiver: &Receiver,
    air: &Atmosphere,
    through: &Transmission<'_>,
) -> Vec<[f64; 3]> {
    let primary = primary(arguments);
    let field = Vector3::from(arguments.field);
    let developments = DevelopmentTable::shipped().expect("the table that ships is whole");
    let model = model(arguments, receiver, air, through);
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
const TELESCOPE_COLUMNS: [&str; 4] =
    ["distance_m", "photoelectrons", "photoelectrons_error", "photoelectrons_rms"];

fn text(arguments: &PoolArguments, receiver: &Receiver, rows: &[[f64; 3]]) -> String {
    let columns = if receiver.kind.is_some() { TELESCOPE_COLUMNS } else { COLUMNS };
    let rows = arguments.distance.iter().zip(rows);
    let rows: Vec<Vec<f64>> =
        rows.map(|(distance, [mean, error, rms])| vec![*distance, *mean, *error, *rms]).collect();
    written(arguments.format, &columns, &rows)
}
