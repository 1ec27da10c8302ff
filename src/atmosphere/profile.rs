//! An atmosphere as the later stages see it: smooth functions of altitude.

use thiserror::Error;

use crate::numerics::UniformTable;

use super::refraction::{
    STANDARD_CO2_PPM, dry_density_ratio, standard_group_refractivity, standard_refractivity,
};
use super::standard;

/// An atmosphere that cannot be had.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum AtmosphereError {
    /// No profile of that name.
    #[error("unknown atmosphere `{name}`; known: {known}")]
    Unknown {
        /// What was asked for.
        name: String,
        /// The names there are.
        known: &'static str,
    },
}

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
        let count = ((TOP_M - BOTTOM_M) / STEP_M) as usize + 1;
        let states: Vec<standard::State> =
            (0..count).map(|i| standard::state(BOTTOM_M + STEP_M * i as f64)).collect();
        let table = |value: &dyn Fn(&standard::State) -> f64| {
            UniformTable::new(BOTTOM_M, TOP_M, count, |altitude| {
                value(&states[((altitude - BOTTOM_M) / STEP_M).round() as usize])
            })
        };
        let log_density = table(&|state| state.density_kg_m3.ln());
        let depths = depths(&states);
        let log_depth = UniformTable::new(BOTTOM_M, TOP_M, count, |altitude| {
            depths[((altitude - BOTTOM_M) / STEP_M).round() as usize].ln()
        });
        Self {
            name: "us1976".into(),
            log_depth,
            log_pressure: table(&|state| state.pressure_pa.ln()),
            temperature: table(&|state| state.temperature_k),
            log_index_density: table(&|state| {
                dry_density_ratio(state.temperature_k, state.pressure_pa).ln()
            }),
            log_density,
        }
    }

    /// A profile known by name.
    ///
    /// # Errors
    /// [`AtmosphereError::Unknown`], listing the names there are.
    pub fn named(name: &str) -> Result<Self, AtmosphereError> {
        match name {
            "us1976" => Ok(Self::us1976()),
            _ => Err(AtmosphereError::Unknown { name: name.into(), known: "us1976" }),
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
fn depths(states: &[standard::State]) -> Vec<f64> {
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
