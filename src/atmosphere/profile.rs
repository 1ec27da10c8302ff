//! An atmosphere as the later stages see it: smooth functions of altitude.

use std::io::Read;
use std::path::Path;

use super::error::AtmosphereError;
use super::ozone::standard_ozone_cm3;
use super::refraction::{
    STANDARD_CO2_PPM, density_ratios, standard_group_refractivity, standard_refractivity,
    vapour_group_refractivity, vapour_refractivity,
};
use super::table::Profile;
use super::{seasonal, standard};
use crate::consts::BOLTZMANN_J_K;
use crate::numerics::{FallingInverse, UniformTable};

/// The air at one altitude.
#[derive(Clone, Copy, Debug)]
pub(super) struct Level {
    pub temperature_k: f64,
    pub pressure_pa: f64,
    pub density_kg_m3: f64,
    /// Density of dry air over its standard, as the index counts it.
    pub dry_index: f64,
    /// Density of water vapour over its standard, as the index counts it.
    pub vapour_index: f64,
    pub ozone_cm3: f64,
}

/// The tables that ship.
const TABLES: [(&str, &str); 6] = [
    ("tropical", include_str!("../../atmospheres/tropical.csv")),
    ("midlatitude_summer", include_str!("../../atmospheres/midlatitude_summer.csv")),
    ("midlatitude_winter", include_str!("../../atmospheres/midlatitude_winter.csv")),
    ("subarctic_summer", include_str!("../../atmospheres/subarctic_summer.csv")),
    ("subarctic_winter", include_str!("../../atmospheres/subarctic_winter.csv")),
    ("us_standard_afgl", include_str!("../../atmospheres/us_standard_afgl.csv")),
];

/// Top of the tables, m: 3e-5 g/cm2 of air is above.
pub(super) const TOP_M: f64 = 120_000.0;
/// Step of the tables, m. Linear interpolation of logarithms errs by 4e-7, and by 9e-5 in density and
/// refractivity within 25 m of where the temperature's slope jumps (test
/// `verify_interpolation_error_of_the_tables`).
const STEP_M: f64 = 25.0;
/// Lowest altitude of the tables, m.
pub(super) const BOTTOM_M: f64 = -500.0;
/// Points of the inverse of depth: about one a step.
const INVERSE_POINTS: usize = 8_192;
/// Longest profile file that is read, bytes.
const LONGEST_FILE: u64 = 256 << 20;

/// Density, depth, temperature, pressure, index and ozone by altitude.
///
/// Between -500 m and [`Atmosphere::top_m`]; outside, the values at the ends.
#[derive(Clone)]
pub struct Atmosphere {
    name: String,
    co2_factor: f64,
    log_density: UniformTable,
    log_depth: UniformTable,
    altitude_of_log_depth: FallingInverse,
    log_pressure: UniformTable,
    temperature: UniformTable,
    log_dry_index: UniformTable,
    vapour_index: UniformTable,
    ozone: UniformTable,
}

impl std::fmt::Debug for Atmosphere {
    fn fmt(&self, formatter: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        formatter.debug_struct("Atmosphere").field("name", &self.name).finish_non_exhaustive()
    }
}

impl Atmosphere {
    /// The US Standard Atmosphere 1976: dry air with 450 ppm of carbon dioxide, and the ozone of the
    /// US standard model.
    pub fn us1976() -> Self {
        Self::of("us1976", |altitude| {
            let state = standard::state(altitude);
            let (dry_index, vapour_index) =
                density_ratios(state.temperature_k, state.pressure_pa, 0.0);
            Level {
                temperature_k: state.temperature_k,
                pressure_pa: state.pressure_pa,
                density_kg_m3: state.density_kg_m3,
                dry_index,
                vapour_index,
                ozone_cm3: standard_ozone_cm3(altitude),
            }
        })
    }

    /// A profile known by name: `us1976`, a table that ships, or a seasonal model
    /// `model:LATITUDE,LONGITUDE,MONTH`.
    ///
    /// # Errors
    /// [`AtmosphereError::Unknown`], listing the names there are; [`AtmosphereError::Model`].
    pub fn named(name: &str) -> Result<Self, AtmosphereError> {
        if name == "us1976" {
            return Ok(Self::us1976());
        }
        if let Some(place) = name.strip_prefix("model:") {
            let (latitude, longitude, month) = seasonal::parse(name, place)?;
            let profile = seasonal::profile(name, latitude, longitude, month);
            return Ok(Self::of(name, |altitude| profile.level(altitude)));
        }
        match TABLES.iter().find(|(known, _)| *known == name) {
            Some((_, text)) => Self::from_text(name, text),
            None => {
                let known = Self::names().collect::<Vec<_>>().join(", ");
                let known = format!("{known}, {}", seasonal::FORM);
                Err(AtmosphereError::Unknown { name: name.into(), known })
            }
        }
    }

    /// A profile file if the text looks like a path (it holds a dot or a slash), else a name.
    ///
    /// # Errors
    /// Those of [`Atmosphere::from_csv`] and [`Atmosphere::named`].
    pub fn named_or_file(text: &str) -> Result<Self, AtmosphereError> {
        let path = !text.starts_with("model:") && text.contains(['.', '/', '\\']);
        if path { Self::from_csv(Path::new(text)) } else { Self::named(text) }
    }

    /// The names of [`Atmosphere::named`] that need no numbers.
    pub fn names() -> impl Iterator<Item = &'static str> {
        ["us1976"].into_iter().chain(TABLES.iter().map(|(known, _)| *known))
    }

    /// A tabulated profile in the CSV form of `atmospheres/*.csv`; `name` is for messages.
    ///
    /// # Errors
    /// [`AtmosphereError::Row`], naming the line.
    pub fn from_text(name: &str, text: &str) -> Result<Self, AtmosphereError> {
        let profile = Profile::parse(name, text)?;
        Ok(Self::of(name, |altitude| profile.level(altitude)))
    }

    /// A profile file in the CSV form of `atmospheres/*.csv`.
    ///
    /// # Errors
    /// [`AtmosphereError::File`] if it cannot be read, [`AtmosphereError::Row`] naming the line.
    pub fn from_csv(path: &Path) -> Result<Self, AtmosphereError> {
        let fault = |problem: String| AtmosphereError::File { path: path.to_owned(), problem };
        let file = std::fs::File::open(path).map_err(|error| fault(error.to_string()))?;
        let mut bytes = Vec::new();
        let read = file.take(LONGEST_FILE + 1).read_to_end(&mut bytes);
        read.map_err(|error| fault(error.to_string()))?;
        if bytes.len() as u64 > LONGEST_FILE {
            return Err(fault(format!("longer than {} MB; thin the profile", LONGEST_FILE >> 20)));
        }
        let name = path.display().to_string();
        match std::str::from_utf8(&bytes) {
            Ok(text) => Self::from_text(&name, text),
            Err(error) => {
                let before = &bytes[..error.valid_up_to()];
                let line = 1 + before.iter().filter(|byte| **byte == b'\n').count();
                let problem = format!("byte {} is no text", error.valid_up_to() + 1);
                Err(AtmosphereError::Row { name, line, problem })
            }
        }
    }

    fn of(name: &str, level: impl Fn(f64) -> Level) -> Self {
        let count = ((TOP_M - BOTTOM_M) / STEP_M) as usize + 1;
        let levels: Vec<Level> =
            (0..count).map(|index| level(BOTTOM_M + STEP_M * index as f64)).collect();
        let depths = depths(&levels);
        let place = |altitude: f64| ((altitude - BOTTOM_M) / STEP_M).round() as usize;
        let table = |value: &dyn Fn(usize) -> f64| {
            UniformTable::new(BOTTOM_M, TOP_M, count, |altitude| value(place(altitude)))
        };
        let log_depth = table(&|index| depths[index].ln());
        Self {
            name: name.into(),
            co2_factor: 1.0,
            altitude_of_log_depth: FallingInverse::new(&log_depth, INVERSE_POINTS),
            log_depth,
            log_pressure: table(&|index| levels[index].pressure_pa.ln()),
            temperature: table(&|index| levels[index].temperature_k),
            log_dry_index: table(&|index| levels[index].dry_index.ln()),
            vapour_index: table(&|index| levels[index].vapour_index),
            ozone: table(&|index| levels[index].ozone_cm3),
            log_density: table(&|index| levels[index].density_kg_m3.ln()),
        }
    }

    /// The same air with another share of carbon dioxide, parts per million, in its index.
    #[must_use]
    pub fn with_co2_ppm(mut self, ppm: f64) -> Self {
        self.co2_factor = 1.0 + 0.534e-6 * (ppm - STANDARD_CO2_PPM);
        self
    }

    /// The same air with the ozone of the US standard model.
    #[must_use]
    pub fn with_standard_ozone(mut self) -> Self {
        let count = ((TOP_M - BOTTOM_M) / STEP_M) as usize + 1;
        self.ozone = UniformTable::new(BOTTOM_M, TOP_M, count, standard_ozone_cm3);
        self
    }

    /// The name it was asked for by.
    pub fn name(&self) -> &str {
        &self.name
    }

    /// Altitude of the top of the tables, m; 3e-5 g/cm2 of air is left above.
    pub fn top_m(&self) -> f64 {
        TOP_M
    }

    /// Temperature, K.
    #[inline]
    pub fn temperature_k(&self, altitude_m: f64) -> f64 {
        self.temperature.value(altitude_m)
    }

    /// Pressure, Pa.
    #[inline]
    pub fn pressure_pa(&self, altitude_m: f64) -> f64 {
        self.log_pressure.value(altitude_m).exp()
    }

    /// Mass density, kg/m3.
    #[inline]
    pub fn density_kg_m3(&self, altitude_m: f64) -> f64 {
        self.log_density.value(altitude_m).exp()
    }

    /// Molecules of all kinds per cm3.
    #[inline]
    pub fn molecules_cm3(&self, altitude_m: f64) -> f64 {
        1e-6 * self.pressure_pa(altitude_m) / (BOLTZMANN_J_K * self.temperature_k(altitude_m))
    }

    /// Ozone molecules per cm3.
    #[inline]
    pub fn ozone_cm3(&self, altitude_m: f64) -> f64 {
        self.ozone.value(altitude_m)
    }

    /// Vertical depth, g/cm2: the integral of density above an altitude. It is 0.2 % more than
    /// pressure over standard gravity, because gravity falls with height.
    #[inline]
    pub fn depth_g_cm2(&self, altitude_m: f64) -> f64 {
        self.log_depth.value(altitude_m).exp()
    }

    /// Altitude of a vertical depth, m: the exact inverse of [`Atmosphere::depth_g_cm2`] between the
    /// ends of the tables, the altitude of the end outside.
    #[inline]
    pub fn altitude_m(&self, depth_g_cm2: f64) -> f64 {
        self.altitude_of_log_depth.position(&self.log_depth, depth_g_cm2.ln())
    }

    /// Phase refractivity n - 1, at the wavelength itself in both dry air and water vapour.
    #[inline]
    pub fn refractivity(&self, altitude_m: f64, wavelength_nm: f64) -> f64 {
        let dry = standard_refractivity(wavelength_nm, STANDARD_CO2_PPM) * self.co2_factor;
        self.log_dry_index.value(altitude_m).exp() * dry
            + self.vapour_index.value(altitude_m) * vapour_refractivity(wavelength_nm)
    }

    /// Group refractivity n_g - 1.
    #[inline]
    pub fn group_refractivity(&self, altitude_m: f64, wavelength_nm: f64) -> f64 {
        let dry = standard_group_refractivity(wavelength_nm, STANDARD_CO2_PPM) * self.co2_factor;
        self.log_dry_index.value(altitude_m).exp() * dry
            + self.vapour_index.value(altitude_m) * vapour_group_refractivity(wavelength_nm)
    }
}

/// Depth of each grid point: exact integral of an exponential between points, from the top down;
/// above the top, pressure over gravity.
fn depths(levels: &[Level]) -> Vec<f64> {
    let last = levels.len() - 1;
    let mut depths = vec![0.0; levels.len()];
    depths[last] = 0.1 * levels[last].pressure_pa / standard::gravity_m_s2(TOP_M);
    for index in (0..last).rev() {
        let (low, high) = (levels[index].density_kg_m3, levels[index + 1].density_kg_m3);
        let mean = (low - high) / (low / high).ln();
        depths[index] = depths[index + 1] + mean * STEP_M * 0.1;
    }
    depths
}
