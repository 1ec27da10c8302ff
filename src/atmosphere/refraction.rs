//! Refractive index of air by wavelength, temperature, pressure, humidity and carbon dioxide.

/// Wavelengths for which the formula is published, nm.
pub const VALID_NM: (f64, f64) = (230.0, 1_690.0);

/// Carbon dioxide of the standard profiles, parts per million by volume.
pub const STANDARD_CO2_PPM: f64 = 450.0;

const DISPERSION: [(f64, f64); 2] = [(5_792_105.0, 238.018_5), (167_917.0, 57.362)];
const VAPOUR: [f64; 4] = [295.235, 2.642_2, -0.032_380, 0.004_028];

/// Dispersion of standard dry air (15 C, 101,325 Pa), n - 1:
/// 1e-8 [k1 / (k0 - s^2) + k3 / (k2 - s^2)] [1 + 0.534e-6 (CO2 - 450)], s = 1 / wavelength in um.
///
/// # Source
/// Ciddor 1996, Appl. Opt. 35, 1566, equations 1 and 2.
pub fn standard_refractivity(wavelength_nm: f64, co2_ppm: f64) -> f64 {
    let s2 = (1e3 / wavelength_nm).powi(2);
    let sum: f64 = DISPERSION.iter().map(|(height, pole)| height / (pole - s2)).sum();
    1e-8 * sum * (1.0 + 0.534e-6 * (co2_ppm - 450.0))
}

/// The same for the group index: (n - 1) + s dn/ds.
pub fn standard_group_refractivity(wavelength_nm: f64, co2_ppm: f64) -> f64 {
    let s2 = (1e3 / wavelength_nm).powi(2);
    let sum: f64 =
        DISPERSION.iter().map(|(height, pole)| height * (pole + s2) / (pole - s2).powi(2)).sum();
    1e-8 * sum * (1.0 + 0.534e-6 * (co2_ppm - 450.0))
}

/// Density of dry air over that of standard dry air, as the index counts it: p / (Z T) over its
/// standard value.
pub fn dry_density_ratio(temperature_k: f64, pressure_pa: f64) -> f64 {
    let standard = 101_325.0 / (288.15 * compressibility(288.15, 101_325.0, 0.0));
    pressure_pa / (temperature_k * compressibility(temperature_k, pressure_pa, 0.0)) / standard
}

/// n - 1 of moist air. The molar fraction of water is vapour pressure over pressure, without the
/// enhancement factor (a difference of up to 1.5e-8 in n at room temperature and saturation).
///
/// # Units
/// Wavelength nm, temperature K, pressures Pa, carbon dioxide parts per million.
///
/// # Source
/// Ciddor 1996, Appl. Opt. 35, 1566, equations 1 to 5, 12 and appendices (coefficients from memory;
/// they reproduce the published worked values). Test `validate_refractivity_ciddor1996`.
pub fn refractivity(
    wavelength_nm: f64,
    temperature_k: f64,
    pressure_pa: f64,
    vapour_pa: f64,
    co2_ppm: f64,
) -> f64 {
    let fraction = vapour_pa / pressure_pa;
    let compression = compressibility(temperature_k, pressure_pa, fraction);
    let moles = pressure_pa / (compression * temperature_k);
    let standard = 101_325.0 / (compressibility(288.15, 101_325.0, 0.0) * 288.15);
    let saturated = 1_333.0 / (compressibility(293.15, 1_333.0, 1.0) * 293.15);
    let s2 = (1e3 / wavelength_nm).powi(2);
    let water = VAPOUR.iter().rev().fold(0.0, |sum, term| sum * s2 + term);
    (1.0 - fraction) * moles / standard * standard_refractivity(wavelength_nm, co2_ppm)
        + fraction * moles / saturated * 1.022e-8 * water
}

/// Compressibility of moist air.
///
/// # Source
/// Davis 1992, Metrologia 29, 67 (CIPM-81/91), as used by Ciddor 1996.
fn compressibility(temperature_k: f64, pressure_pa: f64, vapour_fraction: f64) -> f64 {
    let t = temperature_k - 273.15;
    let ratio = pressure_pa / temperature_k;
    let x = vapour_fraction;
    let first = 1.581_23e-6 - 2.933_1e-8 * t
        + 1.104_3e-10 * t * t
        + (5.707e-6 - 2.051e-8 * t) * x
        + (1.989_8e-4 - 2.376e-6 * t) * x * x;
    1.0 - ratio * first + ratio * ratio * (1.83e-11 - 0.765e-8 * x * x)
}
