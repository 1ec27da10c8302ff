//! Deflection by the Coulomb field of nuclei: many small scatterings and single large ones.
//!
//! The single-scattering law is chi_c^2 per g/cm2 times 2 theta dtheta / (theta^2 + theta_a^2)^2,
//! chi_c^2 = 4 pi N_A r_e^2 m^2 sum(w Z (Z+1) / A) / (p beta)^2. Angles above theta_c are drawn
//! one by one, those below add up to a normal deviate of mean square
//! chi_c^2 t [ln(1 + x) - x / (1 + x)], x = (theta_c / theta_a)^2. Both parts add exactly over
//! steps, so the result does not depend on where steps end, and the tail of large angles is there.
//!
//! # Source
//! Moliere 1947, Z. Naturforsch. 2a, 133; 1948, 3a, 78; Bethe 1953, Phys. Rev. 89, 1256.
//! Test `validate_scattered_width_highland1975`.

use core::f64::consts::PI;

use super::material::{AIR, radius2_per_mol_cm2};
use crate::consts::{ELECTRON_MASS_GEV, FINE_STRUCTURE};
use crate::numerics::Stream;

/// Mean thickness between single large scatterings, g/cm2, at high energies.
const HARD_FREE_PATH_G_CM2: f64 = 10.0;
/// Largest square of the angle that separates the two parts, rad^2.
const LARGEST_SOFT_RAD2: f64 = 0.05;

/// chi_c^2 (p beta)^2 per g/cm2, GeV^2.
pub fn strength_gev2_cm2_g() -> f64 {
    4.0 * PI * radius2_per_mol_cm2() * ELECTRON_MASS_GEV.powi(2) * mean(|_| 1.0)
}

fn mean(value: impl Fn(f64) -> f64) -> f64 {
    AIR.iter()
        .map(|element| {
            let z = element.charge;
            element.mass_share * z * (z + 1.0) / element.molar_mass * value(z)
        })
        .sum()
}

/// Square of the screening angle times p^2, GeV^2: [m alpha Z^(1/3) / 0.885]^2
/// [1.13 + 3.76 (alpha Z / beta)^2], averaged in its logarithm.
fn screening_gev2(beta2: f64) -> f64 {
    let log = |z: f64| {
        let base = ELECTRON_MASS_GEV * FINE_STRUCTURE * z.cbrt() / 0.885_34;
        (base * base * (1.13 + 3.76 * (FINE_STRUCTURE * z).powi(2) / beta2)).ln()
    };
    (mean(log) / mean(|_| 1.0)).exp()
}

/// How a particle of one energy is scattered.
#[derive(Clone, Copy, Debug)]
pub struct Scattering {
    /// Mean square angle in space of the small scatterings, rad^2 per g/cm2.
    pub soft_rad2_cm2_g: f64,
    /// Probability per g/cm2 of a single scattering above [`Scattering::edge_rad2`].
    pub hard_cm2_g: f64,
    /// Square of the smallest single angle drawn, rad^2.
    pub edge_rad2: f64,
}

impl Scattering {
    /// At a total energy.
    pub fn new(energy_gev: f64) -> Self {
        let p2 = energy_gev.powi(2) - ELECTRON_MASS_GEV.powi(2);
        let beta2 = p2 / energy_gev.powi(2);
        let chi2 = strength_gev2_cm2_g() / (p2 * beta2);
        let hard_cm2_g = (1.0 / HARD_FREE_PATH_G_CM2).max(chi2 / LARGEST_SOFT_RAD2);
        let edge_rad2 = chi2 / hard_cm2_g;
        let x = edge_rad2 * p2 / screening_gev2(beta2);
        Self { soft_rad2_cm2_g: chi2 * (x.ln_1p() - x / (1.0 + x)), hard_cm2_g, edge_rad2 }
    }
}

/// Cosine of a single large scattering, or 1 where the rejected part of the law is drawn:
/// theta^2 = 2 (1 - cos) falls as theta^-4, times Mott's 1 - beta^2 (1 - cos) / 2.
#[inline]
pub fn hard_cosine(edge_rad2: f64, stream: &mut Stream) -> f64 {
    let rise = 0.5 * edge_rad2 / stream.uniform_positive();
    if rise > 2.0 || stream.uniform() < 0.5 * rise { 1.0 } else { 1.0 - rise }
}
