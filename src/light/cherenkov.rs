//! The Frank-Tamm law.

use crate::consts::FINE_STRUCTURE;

/// sin^2 of the emission angle: 1 - 1/(n beta)^2, or zero below threshold.
///
/// # Units
/// `refractivity` is n - 1; `gamma_factor` is E/(m c2).
///
/// # Source
/// Frank & Tamm 1937, Dokl. Akad. Nauk SSSR 14, 107: cos(theta) = 1/(n beta).
#[inline]
pub fn sin2_emission_angle(refractivity: f64, gamma_factor: f64) -> f64 {
    let inverse_beta2 = 1.0 / (1.0 - 1.0 / (gamma_factor * gamma_factor));
    let n = 1.0 + refractivity;
    (1.0 - inverse_beta2 / (n * n)).max(0.0)
}

/// Emission angle of a particle at the speed of light, rad.
pub fn largest_emission_angle_rad(refractivity: f64) -> f64 {
    (1.0 / (1.0 + refractivity)).acos()
}

/// Threshold total energy of a particle of rest mass `mass_gev`: gamma = n / sqrt(n^2 - 1).
pub fn threshold_energy_gev(refractivity: f64, mass_gev: f64) -> f64 {
    let n = 1.0 + refractivity;
    mass_gev * n / ((n - 1.0) * (n + 1.0)).sqrt()
}

/// Photons per metre of track between two wavelengths, for sin^2(theta) constant over the band:
/// 2 pi alpha sin^2(theta) (1/lambda1 - 1/lambda2).
///
/// # Source
/// Frank & Tamm 1937; Review of Particle Physics, "Passage of particles through matter".
pub fn photons_per_m(sin2_angle: f64, band_nm: (f64, f64)) -> f64 {
    let inverse_m = 1e9 * (1.0 / band_nm.0 - 1.0 / band_nm.1);
    core::f64::consts::TAU * FINE_STRUCTURE * sin2_angle * inverse_m
}
