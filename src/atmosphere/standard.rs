//! The US Standard Atmosphere 1976 from its definition.

/// Sea-level acceleration of gravity of the standard, m/s2.
const GRAVITY_M_S2: f64 = 9.806_65;
/// Molar gas constant of the standard (not the modern one), J/(kmol K).
pub(super) const GAS_CONSTANT: f64 = 8_314.32;
/// Mean molar mass of dry air at sea level, kg/kmol.
pub(super) const MOLAR_MASS: f64 = 28.964_4;
/// Effective Earth radius of the standard, m.
const RADIUS_M: f64 = 6_356_766.0;

/// Layer bases: geopotential altitude (m') and lapse rate of the molecular-scale temperature (K/m').
const LAYERS: [(f64, f64); 7] = [
    (0.0, -6.5e-3),
    (11_000.0, 0.0),
    (20_000.0, 1e-3),
    (32_000.0, 2.8e-3),
    (47_000.0, 0.0),
    (51_000.0, -2.8e-3),
    (71_000.0, -2e-3),
];

/// Altitude up to which the definition by layers holds, m.
pub const TOP_OF_LAYERS_M: f64 = 86_000.0;

/// Ratio of molar mass to its sea-level value from 80 to 86 km in steps of 0.5 km.
///
/// # Source
/// U.S. Standard Atmosphere 1976, table 8 (from memory).
const MOLAR_RATIO: [f64; 13] = [
    1.0, 0.999_996, 0.999_989, 0.999_971, 0.999_941, 0.999_909, 0.999_870, 0.999_829, 0.999_786,
    0.999_741, 0.999_694, 0.999_641, 0.999_579,
];

/// State of the air at one altitude.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct State {
    /// Kinetic temperature, K.
    pub temperature_k: f64,
    /// Pressure, Pa.
    pub pressure_pa: f64,
    /// Mass density, kg/m3.
    pub density_kg_m3: f64,
}

/// Acceleration of gravity of the standard, m/s2: falls with the square of the distance from the
/// Earth's centre.
pub fn gravity_m_s2(altitude_m: f64) -> f64 {
    GRAVITY_M_S2 * (RADIUS_M / (RADIUS_M + altitude_m)).powi(2)
}

/// Geometric altitude of a geopotential one, m: R H / (R - H).
pub fn geometric_altitude_m(geopotential_m: f64) -> f64 {
    RADIUS_M * geopotential_m / (RADIUS_M - geopotential_m)
}

/// The standard atmosphere at a geometric altitude.
///
/// Layer by layer, with geopotential altitude H = R z / (R + z) and molecular-scale temperature T_M
/// linear in H: P falls as (T_b / T_M)^(g M / (R* L)), or exponentially where L = 0;
/// rho = P M / (R* T_M). Above 86 km the gases settle each by itself: [`super::thermosphere`].
///
/// # Validity
/// -5 to 80 km: within 0.02 % of the published table; to 1000 km 0.1 %.
///
/// # Source
/// U.S. Standard Atmosphere 1976, NOAA/NASA/USAF, equations 18, 23, 33, 42 (constants from memory;
/// they reproduce the published layer bases). Test `validate_air_us1976_every_row`.
pub fn state(altitude_m: f64) -> State {
    if altitude_m > TOP_OF_LAYERS_M {
        return super::thermosphere::state(altitude_m);
    }
    let height = RADIUS_M * altitude_m / (RADIUS_M + altitude_m);
    let exponent = GRAVITY_M_S2 * MOLAR_MASS / GAS_CONSTANT;
    let (mut temperature, mut pressure) = (288.15, 101_325.0);
    for (index, (base, lapse)) in LAYERS.iter().enumerate() {
        let top = LAYERS.get(index + 1).map_or(f64::INFINITY, |next| next.0).min(height);
        let thickness = top - base;
        if *lapse == 0.0 {
            pressure *= (-exponent * thickness / temperature).exp();
        } else {
            let next: f64 = temperature + lapse * thickness;
            pressure *= (temperature / next).powf(exponent / lapse);
            temperature = next;
        }
        if top >= height {
            break;
        }
    }
    let density = pressure * MOLAR_MASS / (GAS_CONSTANT * temperature);
    let temperature_k = temperature * molar_ratio(altitude_m);
    State { temperature_k, pressure_pa: pressure, density_kg_m3: density }
}

fn molar_ratio(altitude_m: f64) -> f64 {
    let place = (altitude_m - 80_000.0) / 500.0;
    if place <= 0.0 {
        return 1.0;
    }
    let low = (place as usize).min(MOLAR_RATIO.len() - 2);
    let fraction = place - low as f64;
    MOLAR_RATIO[low] + fraction * (MOLAR_RATIO[low + 1] - MOLAR_RATIO[low])
}
