//! An atmosphere as the later stages see it: smooth functions of altitude.

use thiserror::Error;

use crate::numerics::UniformTable;

use super::refraction::{
    STANDARD_CO2_PPM, dry_density_ratio, standard_group_refractivity, standard_refractivity,
};
use super::standard;
use super::table::Profile;

/// An atmosphere that cannot be had.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum AtmosphereError {
    /// No profile of that name.
    #[error("unknown atmosphere `{name}`; known: {known}")]
    Unknown {
        /// What was asked for.
        name: String,
        /// The names there are.
        known: String,
    },
    /// A row of a table that is wrong.
    #[error("{name}, line {line}: {problem}")]
    Row {
        /// The table.
        name: String,
        /// Its line, from 1.
        line: usize,
        /// What is wrong.
        problem: String,
    },
}

/// The air at one altitude.
#[derive(Clone, Copy, Debug)]
pub(super) struct Level {
    pub temperature_k: f64,
    pub pressure_pa: f64,
    pub density_kg_m3: f64,
    /// Refractivity over that of standard dry air.
    pub index_density: f64,
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

/// Top of the tables, m.
const TOP_M: f64 = 110_000.0;
/// Step of the tables, m. Linear interpolation of logarithms errs by less than 2e-6.
const STEP_M: f64 = 25.0;
/// Lowest altitude of the tables, m.
const BOTTOM_M: f64 = -500.0;

/// Density, depth, temperature, pressure and index by altitude.
#[derive(Clone, Debug)]
pub struct Atmosphere {
    name: String,
    log_density: UniformTable,
    log_depth: UniformTable,
    log_pressure: UniformTable,
    temperature: UniformTable,
    log_index_density: UniformTable,
}

impl Atmosphere {
    /// The US Standard Atmosphere 1976: dry air with 450 ppm of carbon dioxide.
    pub fn us1976() -> Self {
        Self::of("us1976", |altitude| {
            let state = standard::state(altitude);
            Level {
                temperature_k: state.temperature_k,
                pressure_pa: state.pressure_pa,
                density_kg_m3: state.density_kg_m3,
                index_density: dry_density_ratio(state.temperature_k, state.pressure_pa),
            }
        })
    }

    /// A profile known by name.
    ///
    /// # Errors
    /// [`AtmosphereError::Unknown`], listing the names there are.
    pub fn named(name: &str) -> Result<Self, AtmosphereError> {
        if name == "us1976" {
            return Ok(Self::us1976());
        }
        match TABLES.iter().find(|(known, _)| *known == name) {
            Some((_, text)) => Self::from_text(name, text),
            None => {
                let tables = TABLES.iter().map(|(known, _)| *known);
                let known: Vec<&str> = ["us1976"].into_iter().chain(tables).collect();
                Err(AtmosphereError::Unknown { name: name.into(), known: known.join(", ") })
            }
        }
    }

    /// A tabulated profile in the CSV form of `atmospheres/*.csv`; `name` is for messages.
    ///
    /// # Errors
    /// [`AtmosphereError::Row`], naming the line.
    pub fn from_text(name: &str, text: &str) -> Result<Self, AtmosphereError> {
        let profile = Profile::parse(name, text)?;
        Ok(Self::of(name, |altitude| profile.level(altitude)))
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
        Self {
            name: name.into(),
            log_depth: table(&|index| depths[index].ln()),
            log_pressure: table(&|index| levels[index].pressure_pa.ln()),
            temperature: table(&|index| levels[index].temperature_k),
            log_index_density: table(&|index| levels[index].index_density.ln()),
            log_density: table(&|index| levels[index].density_kg_m3.ln()),
        }
    }

    /// The name it was asked for by.
    pub fn name(&self) -> &str {
        &self.name
    }

    /// Altitude of the top of the tables, m; 1e-4 g/cm2 of air is left above.
    pub fn top_m(&self) -> f64 {
        TOP_M
    }

    /// Temperature, K.
    pub fn temperature_k(&self, altitude_m: f64) -> f64 {
        self.temperature.value(altitude_m)
    }

    /// Pressure, Pa.
    pub fn pressure_pa(&self, altitude_m: f64) -> f64 {
        self.log_pressure.value(altitude_m).exp()
    }

    /// Mass density, kg/m3.
    #[inline]
    pub fn density_kg_m3(&self, altitude_m: f64) -> f64 {
        self.log_density.value(altitude_m).exp()
    }

    /// Vertical depth, g/cm2: the integral of density above an altitude. It is 0.2 % more than
    /// pressure over standard gravity, because gravity falls with height.
    #[inline]
    pub fn depth_g_cm2(&self, altitude_m: f64) -> f64 {
        self.log_depth.value(altitude_m).exp()
    }

    /// Altitude of a vertical depth, m, by bisection to a millimetre.
    pub fn altitude_m(&self, depth_g_cm2: f64) -> f64 {
        let (mut low, mut high) = (BOTTOM_M, TOP_M);
        while high - low > 1e-3 {
            let middle = 0.5 * (low + high);
            if self.depth_g_cm2(middle) > depth_g_cm2 { low = middle } else { high = middle }
        }
        0.5 * (low + high)
    }

    /// Phase refractivity n - 1: exact in wavelength for dry air, which factors from altitude.
    #[inline]
    pub fn refractivity(&self, altitude_m: f64, wavelength_nm: f64) -> f64 {
        self.log_index_density.value(altitude_m).exp()
            * standard_refractivity(wavelength_nm, STANDARD_CO2_PPM)
    }

    /// Group refractivity n_g - 1.
    #[inline]
    pub fn group_refractivity(&self, altitude_m: f64, wavelength_nm: f64) -> f64 {
        self.log_index_density.value(altitude_m).exp()
            * standard_group_refractivity(wavelength_nm, STANDARD_CO2_PPM)
    }
}

/// Depth of each grid point: exact integral of an exponential between points, from the top down.
fn depths(states: &[Level]) -> Vec<f64> {
    let last = states.len() - 1;
    let mut depths = vec![0.0; states.len()];
    let scale_m = 6_000.0;
    depths[last] = states[last].density_kg_m3 * scale_m * 0.1;
    for index in (0..last).rev() {
        let (low, high) = (states[index].density_kg_m3, states[index + 1].density_kg_m3);
        let mean = (low - high) / (low / high).ln();
        depths[index] = depths[index + 1] + mean * STEP_M * 0.1;
    }
    depths
}
