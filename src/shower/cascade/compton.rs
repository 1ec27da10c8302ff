//! Photons scattering off electrons at rest.

use core::f64::consts::PI;

use super::material::{electrons_mol_g, radius2_per_mol_cm2};
use crate::consts::ELECTRON_MASS_GEV;
use crate::numerics::Stream;

/// Total coefficient of air, cm2/g.
///
/// # Source
/// Klein & Nishina 1929, Z. Phys. 52, 853.
pub fn compton_cm2_g(photon_gev: f64) -> f64 {
    let k = photon_gev / ELECTRON_MASS_GEV;
    let (a, log) = (1.0 + 2.0 * k, (1.0 + 2.0 * k).ln());
    let per_electron = 2.0
        * PI
        * ((1.0 + k) / (k * k) * (2.0 * (1.0 + k) / a - log / k) + log / (2.0 * k)
            - (1.0 + 3.0 * k) / (a * a));
    per_electron * radius2_per_mol_cm2() * electrons_mol_g()
}

/// Draws the energy share the photon keeps and the cosine of its scattering angle.
///
/// # Source
/// Composition and rejection for (1/x + x)(1 - x sin^2 / (1 + x^2)): Butcher & Messel 1960.
pub fn scattering(photon_gev: f64, stream: &mut Stream) -> (f64, f64) {
    let k = photon_gev / ELECTRON_MASS_GEV;
    let least = 1.0 / (1.0 + 2.0 * k);
    let (log_weight, linear_weight) = (-least.ln(), 0.5 * (1.0 - least * least));
    loop {
        let x = if stream.uniform() * (log_weight + linear_weight) < log_weight {
            (-log_weight * stream.uniform()).exp()
        } else {
            (least * least + (1.0 - least * least) * stream.uniform()).sqrt()
        };
        let rise = (1.0 - x) / (k * x);
        let sin2 = rise * (2.0 - rise);
        if stream.uniform() < 1.0 - x * sin2 / (1.0 + x * x) {
            return (x, 1.0 - rise);
        }
    }
}
