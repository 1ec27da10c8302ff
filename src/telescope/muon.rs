//! Light of one muon: rings in the camera, the usual calibration of a telescope's throughput.

use crate::consts::FINE_STRUCTURE;

/// Chord of a round mirror seen from the impact point of a muon towards azimuth `phi_rad`, m.
///
/// `D = R (sqrt(1 - (rho/R)^2 sin^2 phi) + (rho/R) cos phi)` inside the mirror; outside
/// (rho > R) the full chord `2 R sqrt(1 - (rho/R)^2 sin^2 phi)`, zero beyond the tangent and behind.
///
/// # Units
/// `radius_m` of the mirror, `impact_m` distance of the muon from its centre; phi from the direction
/// of the mirror's centre.
///
/// # Source
/// Vacanti et al. 1994, Astropart. Phys. 2, 1, eqs. 5 to 7 (numbers from memory); plane geometry.
pub fn chord_m(radius_m: f64, impact_m: f64, phi_rad: f64) -> f64 {
    let ratio = impact_m / radius_m;
    let (sin, cos) = phi_rad.sin_cos();
    let square = 1.0 - (ratio * sin).powi(2);
    if ratio <= 1.0 {
        return radius_m * (square.max(0.0).sqrt() + ratio * cos);
    }
    if square <= 0.0 || cos <= 0.0 { 0.0 } else { 2.0 * radius_m * square.sqrt() }
}

/// Photoelectrons per radian of azimuth of a muon ring:
/// `dN/dphi = alpha / 2 x sin(2 theta) x D(phi) x int efficiency(lambda) d(lambda) / lambda^2`.
///
/// # Units
/// `emission_angle_rad` is the ring's radius; `inverse_band_per_m` the integral of efficiency
/// over wavelength^-2, 1/m.
///
/// # Source
/// Vacanti et al. 1994, Astropart. Phys. 2, 1, eq. 6 (number from memory); follows from Frank-Tamm
/// 2 pi alpha sin^2(theta) per metre and a track length D / tan(theta) that lights one azimuth.
pub fn ring_photoelectrons_per_rad(
    emission_angle_rad: f64,
    chord_m: f64,
    inverse_band_per_m: f64,
) -> f64 {
    0.5 * FINE_STRUCTURE * (2.0 * emission_angle_rad).sin() * chord_m * inverse_band_per_m
}
