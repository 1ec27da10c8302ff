//! The Frank-Tamm law.

use crate::consts::{
    CHARGED_PION_MASS_GEV, ELECTRON_MASS_GEV, FINE_STRUCTURE, MUON_MASS_GEV, PROTON_MASS_GEV,
};

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

/// Threshold total energies in air of one refractivity, GeV.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Thresholds {
    /// Of electrons and positrons.
    pub electron_gev: f64,
    /// Of muons.
    pub muon_gev: f64,
    /// Of charged pions.
    pub pion_gev: f64,
    /// Of protons.
    pub proton_gev: f64,
}

impl Thresholds {
    /// The thresholds where the air's n - 1 is `refractivity`.
    pub fn new(refractivity: f64) -> Self {
        let of = |mass_gev| threshold_energy_gev(refractivity, mass_gev);
        Self {
            electron_gev: of(ELECTRON_MASS_GEV),
            muon_gev: of(MUON_MASS_GEV),
            pion_gev: of(CHARGED_PION_MASS_GEV),
            proton_gev: of(PROTON_MASS_GEV),
        }
    }
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
